//! Whether wells and barriers stay inside their limits once they are corrected.

use crate::design::wafer::{WaferFinding, wells_and_barriers};
use crate::design::{Measure, Standing};
use crate::materials::Parameters;
use crate::structure::Stack;

/// Figures that are followed from the order to the next wafer, by the names of their measures.
const FOLLOWED: [&str; 5] = [
    "strain_percent",
    "mean_strain_percent",
    "strain_thickness_percent_nm",
    "critical_share",
    "thickness_nm",
];

/// A figure of wells and barriers, as it was ordered, as it was grown, as it will grow.
#[derive(Clone, Debug, PartialEq)]
pub struct LimitedFigure {
    /// Of which layers: `6 × well`, `wells and barriers`.
    pub of: String,
    /// Code of the finding of `check` that it belongs to.
    pub code: &'static str,
    /// What it is, with its unit at the end.
    pub name: &'static str,
    /// Its limit, where there is one.
    pub limit: Option<f64>,
    /// As ordered; `None` where the order has no such figure.
    pub ordered: Option<f64>,
    /// Of the most likely structure.
    pub grown: Option<f64>,
    /// Of the wafer to be expected after the correction; `None` without a correction.
    pub next: Option<f64>,
    /// How the last of these stands.
    pub standing: Standing,
}

/// The figures of three wafers side by side.
pub(super) fn limits(
    ordered: &Stack,
    grown: &Stack,
    next: Option<&Stack>,
    parameters: &Parameters,
) -> Vec<LimitedFigure> {
    let of_order = wells_and_barriers(ordered, parameters);
    let of_grown = wells_and_barriers(grown, parameters);
    let of_next = next.map(|stack| wells_and_barriers(stack, parameters));
    let like = |findings: &[(Option<usize>, WaferFinding)],
                (layer, finding): &(Option<usize>, WaferFinding),
                name: &str| {
        let same = findings
            .iter()
            .find(|(it, other)| it == layer && other.code() == finding.code());
        same.and_then(|(_, other)| value(other, name))
    };
    let mut figures = Vec::new();
    for entry in of_next.as_ref().unwrap_or(&of_grown) {
        let (_, finding) = entry;
        for measure in finding.measures() {
            if !FOLLOWED.contains(&measure.name) {
                continue;
            }
            figures.push(LimitedFigure {
                of: of(finding),
                code: finding.code(),
                name: measure.name,
                limit: measure.limit,
                ordered: like(&of_order, entry, measure.name),
                grown: like(&of_grown, entry, measure.name),
                next: of_next.is_some().then_some(measure.value),
                standing: standing(finding, &measure),
            });
        }
    }
    figures
}

fn value(finding: &WaferFinding, name: &str) -> Option<f64> {
    let measures = finding.measures();
    measures
        .iter()
        .find(|measure| measure.name == name)
        .map(|measure| measure.value)
}

/// A figure with a limit of its own stands by that; a share of the critical thickness stands as the
/// layer does.
fn standing(finding: &WaferFinding, measure: &Measure) -> Standing {
    match measure.is_inside() {
        Some(true) => Standing::Within,
        Some(false) => Standing::Outside,
        None if measure.name == "critical_share" => finding.coherence(),
        None => Standing::Stated,
    }
}

fn of(finding: &WaferFinding) -> String {
    match finding {
        WaferFinding::Strain { layer, .. } if layer.count > 1 => {
            format!("{} × {}", layer.count, layer.role.word())
        }
        WaferFinding::Strain { layer, .. } => layer.role.word().to_owned(),
        WaferFinding::Thin { role, .. } => role.word().to_owned(),
        _ => "wells and barriers".to_owned(),
    }
}
