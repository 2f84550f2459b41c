//! Formulas: text to [`Composition`] and back.

use super::{Composition, Element, Elements};
use crate::source::Diagnostic;
use std::fmt::Write as _;
use std::ops::Range;

/// How far the fractions of a sublattice may miss 1: thirds to six decimals, and their binary rounding.
const SUM_TOLERANCE: f64 = 1e-6 + 1e-12;
/// Steps of the last printed decimal in one.
const STEPS: u32 = 10_000;

const KNOWN: &str = "a formula is made of Al, Ga, In with P, As, Sb";

/// An element of a formula, with the fraction as it is written.
struct Part {
    element: Element,
    fraction: Option<f64>,
    span: Range<usize>,
}

impl Composition {
    /// Reads a formula such as `In0.53Ga0.47As`, elements in any order, a lone element of its
    /// sublattice without a number or with 1.
    ///
    /// # Errors
    ///
    /// An element that is unknown or stands twice, a number that is none, a sublattice that is
    /// missing, has an element without a fraction, or does not sum to 1 within 1e-6 (a smaller
    /// miss is taken as rounding, and the fractions are normalised). The place is in bytes of
    /// `formula`.
    pub fn parse(formula: &str) -> Result<Self, Diagnostic> {
        let parts = parts(formula)?;
        let whole = whole(formula);
        let mut composition = Self {
            group_iii: [0.0; 3],
            group_v: [0.0; 3],
        };
        for (group_iii, fractions) in [
            (true, &mut composition.group_iii),
            (false, &mut composition.group_v),
        ] {
            let own: Vec<&Part> = parts
                .iter()
                .filter(|part| part.element.is_group_iii() == group_iii)
                .collect();
            *fractions = sublattice(group_iii, &own, &whole)?;
        }
        Ok(composition)
    }

    /// The formula: elements in the order Al Ga In P As Sb, fractions with at most four decimals
    /// that still sum to 1 on each sublattice, a lone element without a number.
    #[must_use]
    pub fn formula(&self) -> String {
        let mut text = String::new();
        for (symbols, fractions) in [
            (["Al", "Ga", "In"], self.group_iii),
            (["P", "As", "Sb"], self.group_v),
        ] {
            let printed = rounded(fractions);
            for (symbol, steps) in symbols.into_iter().zip(printed) {
                if steps == STEPS {
                    text.push_str(symbol);
                } else if steps > 0 {
                    let decimals = format!("{steps:04}");
                    let _ = write!(text, "{symbol}0.{}", decimals.trim_end_matches('0'));
                }
            }
        }
        text
    }
}

impl Elements {
    /// Reads a family name such as `AlGaInAs`, elements in any order and without numbers.
    ///
    /// # Errors
    ///
    /// An element that is unknown or stands twice, a number, a missing sublattice.
    pub fn parse(family: &str) -> Result<Self, Diagnostic> {
        let mut elements = Self {
            group_iii: [false; 3],
            group_v: [false; 3],
        };
        for part in parts(family)? {
            if part.fraction.is_some() {
                return Err(Diagnostic::new(
                    part.span,
                    format!("an alloy is named by its elements alone, and {family:?} has numbers"),
                )
                .with_help("give a composition as `formula`"));
            }
            let sublattice = if part.element.is_group_iii() {
                &mut elements.group_iii
            } else {
                &mut elements.group_v
            };
            sublattice[part.element.place()] = true;
        }
        for (present, names) in [
            (elements.group_iii, "Al, Ga or In"),
            (elements.group_v, "P, As or Sb"),
        ] {
            if !present.contains(&true) {
                return Err(Diagnostic::new(
                    whole(family),
                    format!("{family:?} has none of {names}"),
                )
                .with_help(KNOWN));
            }
        }
        Ok(elements)
    }
}

/// The place of the formula without the blanks around it; of an empty one, its start.
fn whole(formula: &str) -> Range<usize> {
    let start = formula.len() - formula.trim_start().len();
    start..start + formula.trim().len()
}

/// Splits a formula into elements and numbers, and refuses an element that stands twice.
fn parts(formula: &str) -> Result<Vec<Part>, Diagnostic> {
    let whole = whole(formula);
    if whole.is_empty() {
        return Err(Diagnostic::new(0..formula.len(), "the formula is empty")
            .with_help(format!("{KNOWN}, e.g. In0.53Ga0.47As")));
    }
    let bytes = formula.as_bytes();
    let mut parts: Vec<Part> = Vec::new();
    let mut at = whole.start;
    while at < whole.end {
        let word = run(bytes, at, whole.end, |byte| byte.is_ascii_lowercase(), 1);
        if !bytes[at].is_ascii_alphabetic() {
            return Err(stray(formula, at));
        }
        let symbol = &formula[at..word];
        let element = Element::from_symbol(symbol).ok_or_else(|| unknown(formula, at..word))?;
        let end = run(
            bytes,
            word,
            whole.end,
            |byte| byte.is_ascii_digit() || matches!(byte, b'.' | b',' | b'+' | b'-'),
            0,
        );
        let fraction = if end == word {
            None
        } else {
            Some(number(formula, word..end)?)
        };
        if parts.iter().any(|part| part.element == element) {
            return Err(Diagnostic::new(
                at..end,
                format!("{symbol} stands twice in the formula {:?}", formula.trim()),
            )
            .with_help("write each element once"));
        }
        parts.push(Part {
            element,
            fraction,
            span: at..end,
        });
        at = end;
    }
    Ok(parts)
}

/// End of the run of bytes that begins at `at`: `first` bytes whatever they are, then those that
/// `belongs` accepts.
fn run(bytes: &[u8], at: usize, limit: usize, belongs: impl Fn(u8) -> bool, first: usize) -> usize {
    let mut end = (at + first).min(limit);
    while end < limit && belongs(bytes[end]) {
        end += 1;
    }
    end
}

/// A character that begins no element.
fn stray(formula: &str, at: usize) -> Diagnostic {
    let character = formula[at..].chars().next().unwrap_or('?');
    let span = at..at + character.len_utf8();
    let help = if character.is_ascii_digit() || character == '.' {
        "a fraction stands after its element, e.g. In0.53Ga0.47As"
    } else if character == '(' || character == '[' {
        "write the fractions of the elements, e.g. Al0.24Ga0.235In0.525As, without brackets"
    } else if ('\u{2080}'..='\u{2089}').contains(&character) {
        "write fractions in plain digits, e.g. In0.53Ga0.47As"
    } else {
        KNOWN
    };
    Diagnostic::new(
        span,
        format!(
            "{character:?} does not belong in the formula {:?}",
            formula.trim()
        ),
    )
    .with_help(help)
}

/// A word that is no element of the data.
fn unknown(formula: &str, span: Range<usize>) -> Diagnostic {
    let word = &formula[span.clone()];
    let variable = ["x", "y", "z"].iter().any(|letter| {
        word.strip_suffix(letter)
            .is_some_and(|rest| Element::from_symbol(rest).is_some())
    });
    let lower = word.starts_with(|letter: char| letter.is_ascii_lowercase());
    if variable {
        Diagnostic::new(
            span,
            format!("{word:?} has a letter where its fraction belongs"),
        )
        .with_help("write numbers, e.g. Al0.3Ga0.7As in place of AlxGa1-xAs")
    } else if word == "Q" {
        Diagnostic::new(
            0..formula.len(),
            format!("`{}` does not say which alloy it is, nor of what its wavelength is", formula.trim()),
        )
        .with_help(
            "gap, photoluminescence or absorption edge, at which temperature? name a material with `alloy`, \
             `gap_nm` (at 300 K) and a strain",
        )
    } else if lower {
        Diagnostic::new(span, format!("{word:?} is no element"))
            .with_help("symbols begin with a capital letter, e.g. In0.53Ga0.47As")
    } else {
        Diagnostic::new(
            span,
            format!("{word:?} is no element of the parameter data"),
        )
        .with_help(KNOWN)
    }
}

/// The fraction that stands at `span`.
fn number(formula: &str, span: Range<usize>) -> Result<f64, Diagnostic> {
    let text = &formula[span.clone()];
    let fault =
        |message: String, help: &str| Err(Diagnostic::new(span.clone(), message).with_help(help));
    if text.contains(',') {
        return fault(
            format!("{text:?} is no fraction"),
            "write a decimal point, not a comma",
        );
    }
    let rest = &formula[span.end..];
    if text.contains(['-', '+']) || rest.starts_with(['x', 'y', 'z']) {
        return fault(
            format!("{text:?} is no fraction"),
            "write numbers, e.g. Al0.3Ga0.7As in place of AlxGa1-xAs",
        );
    }
    match text.parse::<f64>() {
        Ok(value) if value <= 1.0 => Ok(value),
        Ok(_) => fault(
            format!("the fraction {text} is above 1"),
            "fractions of a sublattice lie between 0 and 1 and sum to 1",
        ),
        Err(_) => fault(
            format!("{text:?} is no fraction"),
            "write a number between 0 and 1, e.g. In0.53Ga0.47As",
        ),
    }
}

/// The fractions of one sublattice, summing to 1.
fn sublattice(
    group_iii: bool,
    parts: &[&Part],
    whole: &Range<usize>,
) -> Result<[f64; 3], Diagnostic> {
    let names = if group_iii {
        "Al, Ga or In"
    } else {
        "P, As or Sb"
    };
    let (Some(first), Some(last)) = (parts.first(), parts.last()) else {
        return Err(
            Diagnostic::new(whole.clone(), format!("the formula has none of {names}"))
                .with_help(format!("{KNOWN}, at least one of each")),
        );
    };
    if parts.len() > 1
        && let Some(bare) = parts.iter().find(|part| part.fraction.is_none())
    {
        let symbol = bare.element.symbol();
        return Err(
            Diagnostic::new(bare.span.clone(), format!("{symbol} has no fraction")).with_help(
                format!("several of {names}: give each its fraction, e.g. In0.53Ga0.47As"),
            ),
        );
    }
    // filled before it is summed, so that the order in the formula does not matter to the last bit
    let mut fractions = [0.0; 3];
    for part in parts {
        fractions[part.element.place()] = part.fraction.unwrap_or(1.0);
    }
    let sum: f64 = fractions.iter().sum();
    if (sum - 1.0).abs() > SUM_TOLERANCE {
        let symbols: Vec<&str> = parts.iter().map(|part| part.element.symbol()).collect();
        let miss = format!("{:.6}", (sum - 1.0).abs());
        let miss = miss.trim_end_matches('0').trim_end_matches('.');
        let sense = if sum > 1.0 { "much" } else { "little" };
        let sum = format!("{sum:.6}");
        let sum = sum.trim_end_matches('0').trim_end_matches('.');
        return Err(Diagnostic::new(
            first.span.start..last.span.end,
            format!(
                "the fractions of {} sum to {sum}, {miss} too {sense}",
                symbols.join(", ")
            ),
        )
        .with_help("the fractions of each sublattice sum to 1"));
    }
    // a miss of rounding is left, so that fractions written with every digit read back to the bit
    let sum = if (sum - 1.0).abs() < 1e-12 { 1.0 } else { sum };
    Ok(fractions.map(|fraction| fraction / sum))
}

/// Fractions in steps of the last printed decimal, which sum to [`STEPS`]: the largest remainders
/// are rounded up.
fn rounded(fractions: [f64; 3]) -> [u32; 3] {
    let exact = fractions.map(|fraction| fraction.clamp(0.0, 1.0) * f64::from(STEPS));
    #[expect(
        clippy::cast_possible_truncation,
        clippy::cast_sign_loss,
        reason = "between 0 and STEPS"
    )]
    let mut steps = exact.map(|value| value as u32);
    let mut order = [0, 1, 2];
    order.sort_by(|&a, &b| {
        let remainder = |place: usize| exact[place] - f64::from(steps[place]);
        remainder(b).total_cmp(&remainder(a))
    });
    let missing = STEPS.saturating_sub(steps.iter().sum());
    for place in order.into_iter().take(missing as usize) {
        steps[place] += 1;
    }
    steps
}
