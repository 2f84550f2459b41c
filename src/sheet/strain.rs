//! The strain budget as a short table.

use super::number::{ABSENT, fixed, length_nm, significant};
use super::page::Page;
use super::table::{Table, numbers, words};
use crate::coherence::{CriticalBand, CriticalThickness, StrainBudget};

/// Layers of less strain are left out, %: what a matched one has for rounding or temperature.
const LEAST_PERCENT: f64 = 0.02;
/// From this thickness on the limit says nothing any more, nm.
const NO_LIMIT_NM: f64 = 1e4;

/// Strained layers against their critical thickness, wells and barriers together, and the balance.
pub(super) fn budget(budget: &StrainBudget, page: &mut Page) {
    let strained = budget
        .layers
        .iter()
        .filter(|layer| layer.mismatch.strain_percent() >= LEAST_PERCENT);
    if strained.clone().next().is_none() {
        return;
    }
    page.heading("Strain budget: layers against their critical thickness");
    let mut table = Table::new([
        words("layer"),
        numbers("nm"),
        numbers("strain\n%"),
        words("sense"),
        numbers("strain ×\n% nm"),
        numbers("single\nnm"),
        numbers("grown\nover nm"),
        numbers("energy\nnm"),
        numbers("used\n%"),
    ]);
    let row = |name: String,
               nm: f64,
               mismatch: &crate::materials::Mismatch,
               critical: &CriticalBand,
               share: f64| {
        [
            name,
            length_nm(nm),
            fixed(mismatch.strain_percent(), 2),
            mismatch.sense().word().to_owned(),
            significant(mismatch.strain_percent() * nm, 3),
            thickness(critical.overlayer),
            thickness(critical.buried),
            thickness(critical.energy_balance),
            if share.is_finite() {
                significant(100.0 * share, 2)
            } else {
                ABSENT.to_owned()
            },
        ]
    };
    for layer in strained {
        let name = if layer.count == 1 {
            layer.role.word().to_owned()
        } else {
            format!("{} × {}", layer.count, layer.role.word())
        };
        let share = layer.critical_share();
        table.row(row(
            name,
            layer.thickness_nm,
            &layer.mismatch,
            &layer.critical,
            share,
        ));
    }
    if let Some(active) = &budget.active {
        let name = "all wells and barriers".to_owned();
        let share = active.critical_share();
        table.row(row(
            name,
            active.thickness_nm,
            &active.mean,
            &active.critical,
            share,
        ));
    }
    page.table(&table);
    page.paragraph(
        2,
        "Critical thickness by the balance of forces, of a single layer with a free surface and of one \
         grown over, and by that of energies: a band, with practice in it. Used: of the one that holds \
         for the layer.",
    );
}

fn thickness(critical: CriticalThickness) -> String {
    match critical {
        CriticalThickness::UpTo { thickness_nm } if thickness_nm < NO_LIMIT_NM => {
            significant(thickness_nm, 3)
        }
        CriticalThickness::UpTo { .. } => format!("> {}", fixed(NO_LIMIT_NM, 0)),
        CriticalThickness::Unlimited => "any".to_owned(),
        CriticalThickness::NoneCoherent => "none".to_owned(),
    }
}
