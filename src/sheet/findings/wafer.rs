//! What a check found about the wafer, in words.

use crate::coherence::{ActiveStrain, CriticalBand, CriticalThickness, LayerStrain};
use crate::design::{Standing, StrainLimits, WaferFinding};
use crate::materials::{Element, Mismatch};
use crate::sheet::number::{fixed, length_nm, plain, signed, significant};
use crate::sheet::strain::balancing;
use crate::units::CELSIUS_ZERO_K;

/// What was found, with its numbers.
pub(super) fn message(finding: &WaferFinding) -> String {
    match finding {
        WaferFinding::Strain { layer, limits } => strain(layer, limits),
        WaferFinding::StackStrain {
            active,
            most_percent,
        } => stack_strain(active, *most_percent),
        WaferFinding::Balance(balance) => balancing(balance),
        WaferFinding::FencePosts {
            wells,
            between,
            below_nm,
            above_nm,
        } => {
            let outer = |nm: &Option<f64>| {
                nm.map_or("none".to_owned(), |nm| {
                    format!("one of {} nm", length_nm(nm))
                })
            };
            format!(
                "{}, {} between them; outer barriers: {} below, {} above",
                counted(*wells, "well"),
                counted(*between, "barrier"),
                outer(below_nm),
                outer(above_nm)
            )
        }
        WaferFinding::Thin {
            role,
            formula,
            thickness_nm,
            monolayers,
            least_nm,
        } => format!(
            "the {} {formula} is {} nm thick, {} monolayers{}",
            role.word(),
            length_nm(*thickness_nm),
            fixed(*monolayers, 1),
            least_nm.map_or(String::new(), |nm| format!(
                " (at least {} nm)",
                length_nm(nm)
            ))
        ),
        WaferFinding::BulkMismatch {
            role,
            formula,
            relaxed_ppm,
            most_ppm,
        } => format!(
            "of buffer, cladding, contact and cap the {} {formula} has the most mismatch, {} ppm relaxed{}",
            role.word(),
            fixed(*relaxed_ppm, 0),
            limit(*most_ppm, "ppm")
        ),
        WaferFinding::ForbiddenElement {
            role,
            formula,
            elements,
        } => {
            let symbols: Vec<&str> = elements.iter().copied().map(Element::symbol).collect();
            format!(
                "the {} {formula} holds {}",
                role.word(),
                symbols.join(" and ")
            )
        }
        WaferFinding::GroupVChange { interfaces, first } => format!(
            "the group-V elements change at {} of the wells, as from {} to {}",
            counted(*interfaces, "interface"),
            first[0],
            first[1]
        ),
        WaferFinding::SimilarAlloys {
            formulas,
            difference,
        } => format!(
            "{} and {} are two alloys to calibrate and differ by {} at most",
            formulas[0],
            formulas[1],
            fixed(*difference, 4)
        ),
        WaferFinding::Unmixing { formula, below_k } => format!(
            "{formula} free of its substrate would unmix below {} °C (delta-lattice-parameter model)",
            fixed(below_k - CELSIUS_ZERO_K, 0)
        ),
        WaferFinding::OtherSource {
            quantity,
            of,
            difference_ev,
            thermal_ev,
            source,
        } => format!(
            "by {source} the {quantity} of {of} is {} meV off the one used, {} kT",
            signed(1e3 * difference_ev, 0),
            fixed(difference_ev.abs() / thermal_ev, 1)
        ),
    }
}

fn counted(count: usize, what: &str) -> String {
    match count {
        0 => format!("no {what}"),
        1 => format!("one {what}"),
        many => format!("{many} {what}s"),
    }
}

fn limit(limit: Option<f64>, unit: &str) -> String {
    limit.map_or(String::new(), |most| {
        format!(" (at most {} {unit})", plain(most))
    })
}

fn kinds(mismatch: &Mismatch) -> String {
    format!(
        "mismatch {} ppm relaxed, {} ppm perpendicular",
        fixed(mismatch.relaxed_ppm(), 0),
        fixed(mismatch.perpendicular_ppm(), 0)
    )
}

fn strain(layer: &LayerStrain, limits: &StrainLimits) -> String {
    let times = if layer.count > 1 {
        format!("{} × ", layer.count)
    } else {
        String::new()
    };
    format!(
        "{times}{} {}: {} % {}{} over {} nm, {} % nm each{}; {}; {}",
        layer.role.word(),
        layer.formula,
        fixed(layer.mismatch.strain_percent(), 2),
        layer.mismatch.sense().word(),
        limit(limits.strain_percent_max, "%"),
        length_nm(layer.thickness_nm),
        significant(layer.strain_thickness_percent_nm(), 3),
        limit(limits.strain_thickness_percent_nm_max, "% nm"),
        kinds(&layer.mismatch),
        band(
            &layer.critical,
            layer.is_buried,
            layer.critical_share(),
            limits.critical_share_max
        )
    )
}

/// The critical thicknesses and the share that is used.
fn band(critical: &CriticalBand, is_buried: bool, share: f64, most: Option<f64>) -> String {
    let thickness = |at: CriticalThickness| match at {
        CriticalThickness::Unlimited => "any thickness".to_owned(),
        CriticalThickness::UpTo { thickness_nm } if thickness_nm < 1e4 => {
            format!("{} nm", significant(thickness_nm, 3))
        }
        CriticalThickness::UpTo { thickness_nm } => format!("{} µm", fixed(1e-3 * thickness_nm, 0)),
        CriticalThickness::NoneCoherent => "none".to_owned(),
    };
    let used = if share.is_finite() {
        let most = most.map_or(String::new(), |most| {
            format!(" (at most {} %)", fixed(100.0 * most, 0))
        });
        let which = if is_buried { "grown over" } else { "single" };
        format!(
            ": {} % of {which} used{most}",
            significant(100.0 * share, 2)
        )
    } else {
        String::new()
    };
    format!(
        "critical by force balance single {}, grown over {}, by energy balance {}{used}",
        thickness(critical.overlayer),
        thickness(critical.buried),
        thickness(critical.energy_balance)
    )
}

fn stack_strain(active: &ActiveStrain, most_percent: Option<f64>) -> String {
    format!(
        "wells and barriers together, {} nm: {} % {} in the mean{}, {} % nm, {} N/m; {}; {}",
        length_nm(active.thickness_nm),
        fixed(active.mean.strain_percent(), 3),
        active.mean.sense().word(),
        limit(most_percent, "%"),
        significant(active.strain_thickness_percent_nm(), 3),
        significant(active.force_n_m.abs(), 3),
        kinds(&active.mean),
        band(
            &active.critical,
            active.is_buried,
            active.critical_share(),
            None
        )
    )
}

/// What to do about it; `None` where nothing needs doing.
pub(super) fn advice(finding: &WaferFinding) -> Option<String> {
    let standing = finding.standing();
    let words = match finding {
        WaferFinding::Strain { .. } | WaferFinding::StackStrain { .. } => match standing {
            Standing::Outside => {
                "misfit dislocations are to be expected: less strain, a thinner layer, or barriers strained the other way"
            }
            Standing::Noted => {
                "over force balance, under energy balance: it can grow coherent when cold and fast, and relaxes when annealed; ask the grower"
            }
            _ => return None,
        },
        WaferFinding::FencePosts { .. } if standing == Standing::Noted => {
            "one side has an outer barrier and the other has none: say in the order whether that is meant"
        }
        WaferFinding::Thin { .. } => "interfaces are a monolayer rough: make it thicker",
        WaferFinding::BulkMismatch { .. } if standing == Standing::Outside => {
            "thick layers relax at small mismatch: match it"
        }
        WaferFinding::ForbiddenElement { .. } => {
            "`without_elements` in [limits] excludes it: take another alloy"
        }
        WaferFinding::GroupVChange { .. } => {
            "exchange at such interfaces makes wells emit longer than calculated: agree on the gas switching"
        }
        WaferFinding::SimilarAlloys { .. } => {
            "one calibration would do for both: make them one, unless they are meant to part"
        }
        WaferFinding::Unmixing { .. } => {
            "coherent growth holds it together; expect wider lines, and ask the grower"
        }
        WaferFinding::OtherSource { .. } => {
            "the line may not show it, escape over the barrier will: measure, or give your own `numbers`"
        }
        _ => return None,
    };
    Some(words.to_owned())
}
