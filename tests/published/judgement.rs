//! Rows and how they are judged.

use crate::Answer;
use libtest_mimic::Failed;
use serde::Deserialize;

/// One number to compare.
#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Check {
    /// What is asked, in the words of the problem.
    pub(crate) quantity: String,
    /// Where it is asked, if the quantity depends on something.
    pub(crate) at: Option<f64>,
    value: Option<f64>,
    range: Option<[f64; 2]>,
    /// In the unit of the value.
    tolerance: Option<f64>,
    relative_tolerance: Option<f64>,
    /// How this number is known, where it differs from the rest of the file.
    known: Option<String>,
    /// Why its tolerance differs from the rest of the file.
    tolerance_reason: Option<String>,
    /// Why the program is known to miss it.
    expected_miss: Option<String>,
}

impl Check {
    /// A question without an expected answer.
    pub(crate) fn asking(quantity: &str) -> Self {
        Self {
            quantity: quantity.to_owned(),
            at: None,
            value: None,
            range: None,
            tolerance: None,
            relative_tolerance: None,
            known: None,
            tolerance_reason: None,
            expected_miss: None,
        }
    }

    pub(crate) fn title(&self) -> String {
        self.at.map_or_else(
            || self.quantity.clone(),
            |at| format!("{} at {at}", self.quantity),
        )
    }

    /// Lowest and highest accepted value, and what is published in words.
    fn accepted(&self) -> (f64, f64, String) {
        for statement in [&self.known, &self.tolerance_reason, &self.expected_miss] {
            assert!(
                statement.as_ref().is_none_or(|text| !text.is_empty()),
                "{} has an empty statement",
                self.title()
            );
        }
        match (
            self.value,
            self.range,
            self.tolerance,
            self.relative_tolerance,
        ) {
            (Some(value), None, Some(tolerance), None) => (
                value - tolerance,
                value + tolerance,
                format!("{} ± {}", digits(value), digits(tolerance)),
            ),
            (Some(value), None, None, Some(relative)) => {
                let tolerance = (value * relative).abs();
                (
                    value - tolerance,
                    value + tolerance,
                    format!("{} ± {} of it", digits(value), digits(relative)),
                )
            }
            (None, Some([low, high]), None, None) if low < high => {
                (low, high, format!("{} … {}", digits(low), digits(high)))
            }
            _ => panic!(
                "{}: give a value with one tolerance, or a range",
                self.title()
            ),
        }
    }
}

/// A published number, with six digits.
fn digits(value: f64) -> String {
    with_digits(value, 6)
}

/// A computed number, with five: what a grid leaves open is not shown.
fn computed_digits(value: f64) -> String {
    with_digits(value, 5)
}

fn with_digits(value: f64, count: usize) -> String {
    let size = value.abs();
    if value == 0.0 {
        "0".to_owned()
    } else if (1e-3..1e6).contains(&size) {
        let mut decimals = count - 1;
        let mut ten = 10.0;
        while ten <= size && decimals > 0 {
            decimals -= 1;
            ten *= 10.0;
        }
        // Below one the zeros after the point are no digits.
        let mut one = 1.0;
        while size < one {
            decimals += 1;
            one *= 0.1;
        }
        let text = format!("{value:.decimals$}");
        if text.contains('.') {
            text.trim_end_matches('0').trim_end_matches('.').to_owned()
        } else {
            text
        }
    } else {
        let text = format!("{value:.*e}", count - 1);
        let (mantissa, exponent) = text.split_once('e').expect("scientific notation");
        let mantissa = mantissa.trim_end_matches('0').trim_end_matches('.');
        format!("{mantissa}e{exponent}")
    }
}

/// How a row came out.
pub(crate) struct Verdict {
    /// What is published.
    pub(crate) published: String,
    /// What the program says.
    pub(crate) computed: String,
    /// Whether it is inside the tolerance.
    pub(crate) met: bool,
    /// Why it was expected to be missed.
    pub(crate) expected_miss: Option<String>,
}

impl Verdict {
    pub(crate) fn of(check: &Check, answer: Answer) -> Self {
        let (low, high, published) = check.accepted();
        let (met, computed) = match answer {
            // Written so that NaN is a miss.
            Ok(got) => (low <= got && got <= high, computed_digits(got)),
            Err(reason) => (false, reason),
        };
        Self {
            published,
            computed,
            met,
            expected_miss: check.expected_miss.clone(),
        }
    }

    pub(crate) fn of_order(values: Result<Vec<f64>, String>, expected_miss: Option<&str>) -> Self {
        let (met, computed) = match values {
            Ok(values) => (
                values.len() > 1 && values.windows(2).all(|pair| pair[0] < pair[1]),
                values
                    .iter()
                    .map(|&value| computed_digits(value))
                    .collect::<Vec<_>>()
                    .join(", "),
            ),
            Err(reason) => (false, reason),
        };
        Self {
            published: "rising".to_owned(),
            computed,
            met,
            expected_miss: expected_miss.map(str::to_owned),
        }
    }

    pub(crate) fn outcome(&self) -> Result<(), Failed> {
        match (self.met, &self.expected_miss) {
            (true, None) | (false, Some(_)) => Ok(()),
            (false, None) => {
                Err(format!("published {}, computed {}", self.published, self.computed).into())
            }
            (true, Some(reason)) => Err(format!(
                "met ({}), though listed as a miss because {reason}: take it off the list",
                self.computed
            )
            .into()),
        }
    }
}
