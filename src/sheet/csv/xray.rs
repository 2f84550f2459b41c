//! The tables of `xray`.

use super::{Cell, CsvTable};
use crate::diffraction::{Diffraction, RockingCurve};

/// The rocking curve, the layers and the satellites; the first is the principal table.
#[must_use]
pub fn xray(seen: &Diffraction, curve: &RockingCurve) -> Vec<CsvTable> {
    vec![points(curve), layers(seen), satellites(seen)]
}

fn points(curve: &RockingCurve) -> CsvTable {
    let mut table = CsvTable::new(
        "rocking_curve",
        &[
            "omega_offset_arcsec",
            "reflectivity",
            "kinematical_reflectivity",
        ],
    );
    table.rows = curve
        .points
        .iter()
        .map(|point| row![point.offset_arcsec, point.intensity, point.kinematical])
        .collect();
    table
}

fn layers(seen: &Diffraction) -> CsvTable {
    let mut table = CsvTable::new(
        "layers",
        &[
            "layer",
            "count",
            "role",
            "end",
            "formula",
            "thickness_nm",
            "relaxed_mismatch_ppm",
            "perpendicular_mismatch_ppm",
            "strain",
            "omega_deg",
            "two_theta_deg",
            "omega_offset_arcsec",
            "fringe_arcsec",
        ],
    );
    for layer in &seen.layers {
        table.rows.push(row![
            layer.layer + 1,
            layer.count,
            layer.role.word(),
            if layer.is_upper_end { "upper" } else { "lower" },
            layer.formula.as_str(),
            layer.thickness_nm,
            layer.mismatch.relaxed_ppm(),
            layer.mismatch.perpendicular_ppm(),
            layer.mismatch.sense().word(),
            layer.peak.map(|peak| peak.theta_deg),
            layer.peak.map(|peak| peak.two_theta_deg()),
            layer.peak.map(|peak| peak.offset_arcsec),
            layer.fringe_arcsec,
        ]);
    }
    table
}

fn satellites(seen: &Diffraction) -> CsvTable {
    let mut table = CsvTable::new(
        "satellites",
        &[
            "order",
            "omega_deg",
            "two_theta_deg",
            "omega_offset_arcsec",
            "relative_intensity",
        ],
    );
    for satellite in seen.multi_well.iter().flat_map(|it| &it.satellites) {
        table.rows.push(row![
            satellite.order.to_string(),
            satellite.peak.theta_deg,
            satellite.peak.two_theta_deg(),
            satellite.peak.offset_arcsec,
            satellite.intensity,
        ]);
    }
    table
}
