//! The table of the strain budget.

use super::{Cell, CsvTable};
use crate::coherence::{CriticalBand, StrainBudget};
use crate::materials::Mismatch;

/// Every layer against its critical thickness, and wells and barriers together.
pub(super) fn strain(budget: &StrainBudget) -> CsvTable {
    let mut table = CsvTable::new(
        "strain",
        &[
            "layer",
            "formula",
            "count",
            "thickness_nm",
            "strain_percent",
            "strain",
            "relaxed_mismatch_ppm",
            "perpendicular_mismatch_ppm",
            "critical_single_nm",
            "critical_buried_nm",
            "critical_energy_nm",
            "critical_share",
        ],
    );
    let numbers = |nm: f64, mismatch: &Mismatch, critical: &CriticalBand, share: f64| {
        row![
            nm,
            mismatch.strain_percent(),
            mismatch.sense().word(),
            mismatch.relaxed_ppm(),
            mismatch.perpendicular_ppm(),
            critical.overlayer.thickness_nm(),
            critical.buried.thickness_nm(),
            critical.energy_balance.thickness_nm(),
            share,
        ]
    };
    for layer in &budget.layers {
        let mut cells = row![layer.role.word(), layer.formula.as_str(), layer.count];
        cells.extend(numbers(
            layer.thickness_nm,
            &layer.mismatch,
            &layer.critical,
            layer.critical_share(),
        ));
        table.rows.push(cells);
    }
    if let Some(active) = &budget.active {
        let mut cells = row!["wells and barriers", "", 1_usize];
        cells.extend(numbers(
            active.thickness_nm,
            &active.mean,
            &active.critical,
            active.critical_share(),
        ));
        table.rows.push(cells);
    }
    table
}
