//! What a check found, in words.

mod wafer;

use super::number::{fixed, length_nm, plain, power, signed, significant, temperature};
use super::page::{Page, bold, padded, wrapped};
use super::stamp::Stamp;
use crate::design::{Carrier, Finding, Standing};
use crate::source::Colour;
use crate::structure::{Remark, Stack};
use std::fmt::Write as _;

/// Width of the column that says how a finding stands.
const STANDING_COLUMNS: usize = 9;
/// Column at which the words begin.
const WORDS_COLUMN: usize = 31;

/// A smaller spread is not told apart from none, eV.
const LEAST_SPREAD_EV: f64 = 1e-5;

/// Findings as text of 80 columns.
#[must_use]
pub fn findings(stack: &Stack, findings: &[Finding], stamp: &Stamp, colour: Colour) -> String {
    let mut page = Page::new(colour);
    super::levels::head(stack, &mut page);
    page.heading("Findings");
    for finding in findings {
        entry(finding, &mut page, colour);
    }
    page.gap();
    page.paragraph(2, &verdict(findings));
    stamp.write(&mut page);
    page.finish()
}

fn entry(finding: &Finding, page: &mut Page, colour: Colour) {
    let standing = finding.standing();
    let word = padded(standing.word(), STANDING_COLUMNS);
    let word = if standing == Standing::Outside {
        bold(&word, colour)
    } else {
        word
    };
    let code = padded(finding.code(), WORDS_COLUMN - STANDING_COLUMNS - 2);
    let mut lead = format!("  {word}{code}");
    let width = super::page::COLUMNS - WORDS_COLUMN;
    let mut lines = wrapped(&message(finding), width);
    if let Some(advice) = advice(finding) {
        let words = wrapped(&advice, width - 2);
        let marks = std::iter::once("→ ").chain(std::iter::repeat("  "));
        lines.extend(marks.zip(words).map(|(mark, line)| format!("{mark}{line}")));
    }
    for line in lines {
        page.ready(&format!("{lead}{line}"));
        lead = " ".repeat(WORDS_COLUMN);
    }
}

fn verdict(findings: &[Finding]) -> String {
    let count = |standing| {
        findings
            .iter()
            .filter(|it| it.standing() == standing)
            .count()
    };
    let (outside, noted) = (count(Standing::Outside), count(Standing::Noted));
    let looks = match noted {
        0 => String::new(),
        1 => "; one is worth a look".to_owned(),
        many => format!("; {many} are worth a look"),
    };
    let broken = match outside {
        0 => "No limit is broken".to_owned(),
        1 => "One limit is broken".to_owned(),
        many => format!("{many} limits are broken"),
    };
    format!("{broken}{looks}.")
}

/// What was found, with its numbers.
#[must_use]
pub(super) fn message(finding: &Finding) -> String {
    match finding {
        Finding::File(remark) => remark.message(),
        Finding::Unsolved(failure) => failure.to_string(),
        Finding::Levels(remark) => remark.message(),
        Finding::DirectWell {
            formula,
            valley,
            margin_ev,
            thermal_ev,
            least_kt,
        } => format!(
            "the well {formula} is direct: its {valley} valley lies {} meV above Γ, {} kT (a look below {} kT)",
            fixed(1e3 * margin_ev, 0),
            fixed(margin_ev / thermal_ev, 1),
            plain(*least_kt)
        ),
        Finding::Barrier {
            carrier,
            height_ev,
            thermal_ev,
            least_kt,
            is_house,
        } => {
            let (level, edge) = match carrier {
                Carrier::Electrons => ("electron", "lowest conduction edge"),
                Carrier::Holes => ("hole", "highest valence edge"),
            };
            format!(
                "the first {level} level lies {} meV from the {edge} outside the wells, {} kT ({} {} kT)",
                fixed(1e3 * height_ev, 0),
                fixed(height_ev / thermal_ev, 1),
                if *is_house {
                    "at least"
                } else {
                    "a look below"
                },
                plain(*least_kt)
            )
        }
        Finding::Wafer(finding) => wafer::message(finding),
        Finding::Target {
            kind,
            temperature_k,
            promised_nm,
            computed_nm,
            tolerance_nm,
        } => {
            let tolerance = tolerance_nm.map_or(String::new(), |nm| format!(" ± {}", plain(nm)));
            let computed = computed_nm.map_or("have none".to_owned(), |nm| {
                format!(
                    "have {} nm, {} nm off",
                    fixed(nm, 2),
                    signed(nm - promised_nm, 2)
                )
            });
            format!(
                "the file promises a {} of {}{tolerance} nm in vacuum at {}; its layers {computed}",
                kind.meaning(),
                fixed(*promised_nm, 2),
                temperature(*temperature_k)
            )
        }
        Finding::Scatter(scatter) => {
            let strongest = &scatter.strongest;
            format!(
                "errors of growth move the {} by {} nm, one sigma, {} % of the variance by the {} \
                 (linear, single bands); ± {} nm then holds {} % of the wafers, if the design stands \
                 in the middle",
                scatter.kind.meaning(),
                significant(scatter.sigma_nm, 2),
                fixed(100.0 * strongest.share, 0),
                strongest.variable.cause.name(),
                plain(scatter.tolerance_nm),
                fixed(100.0 * scatter.share_if_centred(), 0)
            )
        }
        Finding::Coupling {
            carrier,
            spread_ev,
            most_ev,
            is_house,
        } => format!(
            "the first level of the {} spreads by {} meV over the wells ({} {} meV)",
            carrier.word(),
            if *spread_ev < LEAST_SPREAD_EV {
                format!("less than {}", plain(1e3 * LEAST_SPREAD_EV))
            } else {
                significant(1e3 * spread_ev, 2)
            },
            if *is_house { "at most" } else { "a look above" },
            plain(1e3 * most_ev)
        ),
        Finding::GroundHole { light, split_ev } => {
            let (first, other) = if *light {
                ("light", "heavy")
            } else {
                ("heavy", "light")
            };
            split_ev.map_or_else(
                || format!("the first hole is {first}; no {other} hole is bound"),
                |split| {
                    format!(
                        "the first hole is {first}; the first {other} hole lies {} meV deeper",
                        significant(1e3 * split, 3)
                    )
                },
            )
        }
        Finding::Doping {
            net_cm3,
            acceptors_setback_nm,
            donors_setback_nm,
            least_nm,
        } => {
            let mut words = doping(*net_cm3, *acceptors_setback_nm, *donors_setback_nm);
            if let Some(nm) = least_nm {
                let _ = write!(words, " (acceptors at least {} nm)", length_nm(*nm));
            }
            words
        }
    }
}

fn doping(
    net_cm3: f64,
    acceptors_setback_nm: Option<f64>,
    donors_setback_nm: Option<f64>,
) -> String {
    let mut words = if net_cm3 == 0.0 {
        "the wells and their barriers are not doped".to_owned()
    } else {
        let kind = if net_cm3 > 0.0 { "donors" } else { "acceptors" };
        format!(
            "wells and barriers hold {} cm⁻³ net of {kind}, per volume of the wells",
            power(net_cm3.abs(), 4)
        )
    };
    for (kind, setback_nm) in [
        ("acceptors", acceptors_setback_nm),
        ("donors", donors_setback_nm),
    ] {
        if let Some(nm) = setback_nm {
            let _ = write!(words, "; {kind} begin {} nm from the wells", length_nm(nm));
        }
    }
    words
}

/// What to do about it; `None` where nothing needs doing.
#[must_use]
pub(super) fn advice(finding: &Finding) -> Option<String> {
    if finding.standing() == Standing::Within {
        return None;
    }
    match finding {
        Finding::File(Remark::DefaultTemperature { .. }) => Some("give `temperature_c`".to_owned()),
        Finding::File(remark) => Some(remark.advice()),
        Finding::Levels(remark) => remark.advice(),
        Finding::Wafer(finding) => wafer::advice(finding),
        Finding::Target { tolerance_nm: None, .. } => {
            Some("give `tolerance_nm` in [target]: without it nothing can be accepted".to_owned())
        }
        Finding::Target { .. } if finding.standing() == Standing::Noted => Some(
            "a wafer map tells 1 nm at best: a tolerance below that cannot be shown to be kept"
                .to_owned(),
        ),
        Finding::Target { .. } => Some(
            "table and promise must agree before the order goes out: move the layers (`stepwell aim`), or the promise"
                .to_owned(),
        ),
        Finding::Scatter(scatter) => Some(format!(
            "hold the {} closer, widen the tolerance, or take a structure that hangs less on it \
             (`stepwell spread --yield 95` says what it takes)",
            scatter.strongest.variable.cause.name()
        )),
        Finding::Doping { .. } if finding.standing() == Standing::Outside => Some(
            "acceptors move while the rest grows: a spacer, a sharper dopant, or a colder growth"
                .to_owned(),
        ),
        Finding::Unsolved(_) | Finding::Doping { .. } => None,
        Finding::DirectWell { .. } => Some(
            "electrons spill into the valley and do not emit: less of the wide-gap element in the well"
                .to_owned(),
        ),
        Finding::Barrier { carrier, .. } => Some(format!(
            "{} leave the wells when warm: take a barrier of larger gap, a wider well, or a family with more of its gap difference in that band",
            carrier.word()
        )),
        Finding::Coupling { .. } => Some(
            "the wells act together and the line widens: thicker barriers part them, if that is not meant"
                .to_owned(),
        ),
        Finding::GroundHole { .. } => {
            Some("emission is mostly TM: right for a TM device, else less tension".to_owned())
        }
    }
}
