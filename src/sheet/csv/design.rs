//! The tables of `aim` and `weigh`.

use super::{Cell, CsvTable};
use crate::design::{Outcome, Variation, Weighed};
use crate::sheet::aim::{drift_nm, exchanges};
use crate::sheet::weigh::rows;

/// The solutions with their figures.
#[must_use]
pub fn aim(variation: &Variation<'_>, outcome: &Outcome) -> Vec<CsvTable> {
    let mut heads: Vec<String> = vec!["number".to_owned(), "line".to_owned()];
    heads.extend(variation.moves.iter().map(|it| it.key()));
    heads.extend(
        [
            "wavelength_nm",
            "density_cm3",
            "peak_gain_cm",
            "polarization",
            "transparency_cm3",
            "electron_barrier_kt",
            "hole_barrier_kt",
            "well_strain_percent",
            "well_strain",
            "well_thickness_nm",
            "critical_free_nm",
            "critical_buried_nm",
            "critical_share",
            "stack_critical_share",
            "nm_per_percent_width",
            "nm_per_k",
        ]
        .map(str::to_owned),
    );
    let exchanges = exchanges(outcome);
    heads.extend(exchanges.iter().map(|(element, other)| {
        format!(
            "nm_per_thousandth_{}_for_{}",
            element.symbol(),
            other.symbol()
        )
    }));
    heads.push("limits_broken".to_owned());
    let heads: Vec<&str> = heads.iter().map(String::as_str).collect();
    let mut table = CsvTable::new("solutions", &heads);
    for (index, solution) in outcome.solutions.iter().enumerate() {
        let figures = &solution.figures;
        let well = figures.well.as_ref();
        let mut row = row![index + 1, solution.line];
        row.extend(
            variation
                .moves
                .iter()
                .zip(&solution.values)
                .map(|(moved, &value)| Cell::from(moved.said(value))),
        );
        row.extend(row![
            solution.wavelength_nm,
            figures.density_cm3,
            figures.gain.map(|(_, peak)| peak.gain_cm),
            figures.gain.map(|(polarisation, _)| polarisation),
            figures.transparency_cm3,
            figures.electron_barrier_kt,
            figures.hole_barrier_kt,
            well.map(|it| it.mismatch.strain_percent()),
            well.map(|it| it.mismatch.sense().word()),
            well.map(|it| it.thickness_nm),
            well.and_then(|it| it.critical.overlayer.thickness_nm()),
            well.and_then(|it| it.critical.buried.thickness_nm()),
            well.map(|it| it.critical_share()),
            figures.stack_critical_share,
            figures.nm_per_percent_width,
            figures.nm_per_k,
        ]);
        row.extend(
            exchanges
                .iter()
                .map(|&exchange| Cell::from(drift_nm(figures, exchange))),
        );
        row.push(Cell::from(figures.broken_limits.join(" ")));
        table.rows.push(row);
    }
    vec![table]
}

/// The comparison, and the spectra and densities of states of all columns.
#[must_use]
pub fn weigh(weighed: &[Weighed]) -> Vec<CsvTable> {
    let mut heads = vec!["figure", "unit"];
    heads.extend(weighed.iter().map(|column| column.name.as_str()));
    let mut comparison = CsvTable::new("weigh", &heads);
    for row in rows(weighed) {
        let mut cells = row![row.key, row.unit];
        cells.extend(row.values.into_iter().map(Cell::from));
        comparison.rows.push(cells);
    }
    let mut spectra = CsvTable::new(
        "spectra",
        &[
            "column",
            "photon_ev",
            "te_gain_cm",
            "tm_gain_cm",
            "spontaneous_per_ev_cm3_s",
        ],
    );
    for column in weighed {
        for (&photon_ev, point) in column.photon_ev.iter().zip(&column.points) {
            spectra.rows.push(row![
                column.name.as_str(),
                photon_ev,
                point.te_gain_cm,
                point.tm_gain_cm,
                point.spontaneous_per_ev_cm3_s,
            ]);
        }
    }
    let mut states = CsvTable::new(
        "states",
        &["column", "above_first_edge_ev", "states_per_ev_cm3"],
    );
    for column in weighed {
        for &(above_ev, per_ev_cm3) in &column.states_per_ev_cm3 {
            states
                .rows
                .push(row![column.name.as_str(), above_ev, per_ev_cm3]);
        }
    }
    vec![comparison, spectra, states]
}
