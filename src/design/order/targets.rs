//! What is to be seen on the finished wafer.

use crate::diffraction::{Diffraction, Reflection};
use crate::evaluation::Evaluation;
use crate::materials::{Mismatch, Parameters};
use crate::structure::{Order, Stack, Wavelength};
use crate::units::air;

/// Photoluminescence of the finished wafer at low injection.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PlTarget {
    /// Peak as calculated from the layers, nm in vacuum.
    pub calculated_nm: f64,
    /// What the house adds to that from experience, nm; zero where it knows nothing.
    pub offset_nm: f64,
    /// Peak to be had, nm in vacuum.
    pub vacuum_nm: f64,
    /// The same in standard air, nm.
    pub air_nm: f64,
    /// How far the mean over a wafer may be off, nm.
    pub tolerance_nm: f64,
}

/// X-ray diffraction of the finished wafer.
#[derive(Clone, Debug, PartialEq)]
pub struct XrayTarget {
    /// Everything seen at the temperature of the bench.
    pub seen: Diffraction,
    /// How far the period may be off, nm; `None` where wells do not repeat.
    pub period_tolerance_nm: Option<f64>,
    /// How far the zero order may be off, arcsec of ω, from the tolerance of the mean mismatch.
    pub zero_order_tolerance_arcsec: Option<f64>,
}

/// Targets on the finished wafer.
#[derive(Clone, Debug, PartialEq)]
pub struct Targets {
    /// Temperature of the bench, K.
    pub temperature_k: f64,
    /// Photoluminescence, or why there is none to be had.
    pub pl: Result<PlTarget, String>,
    /// X-ray diffraction, or why there is none to be had.
    pub xray: Result<XrayTarget, String>,
    /// Thickness of the whole epitaxy, nm.
    pub total_nm: f64,
    /// How far it may be off, nm.
    pub total_tolerance_nm: f64,
}

/// The targets of a wafer at the temperature of the bench.
pub(super) fn targets(wafer: &Stack, order: &Order, parameters: &Parameters) -> Targets {
    let number = |path: &str| order.number(path);
    let total_nm = wafer.layers.iter().map(|it| it.thickness_nm).sum::<f64>();
    let total_percent = number("targets.thickness_percent").unwrap_or(0.0);
    Targets {
        temperature_k: wafer.operation.temperature_k,
        pl: pl(wafer, order, parameters),
        xray: xray(wafer, order, parameters),
        total_nm,
        total_tolerance_nm: 1e-2 * total_percent * total_nm,
    }
}

fn pl(wafer: &Stack, order: &Order, parameters: &Parameters) -> Result<PlTarget, String> {
    let evaluation = Evaluation::new(wafer, parameters).map_err(|failure| failure.to_string())?;
    let calculated_nm = evaluation
        .wavelength_nm(Wavelength::Photoluminescence)
        .ok_or_else(|| "the wells have no peak of photoluminescence".to_owned())?;
    let offset_nm = order.number("targets.pl_offset_nm").unwrap_or(0.0);
    let vacuum_nm = calculated_nm + offset_nm;
    Ok(PlTarget {
        calculated_nm,
        offset_nm,
        vacuum_nm,
        air_nm: air::air_nm(vacuum_nm),
        tolerance_nm: order.number("targets.pl_tolerance_nm").unwrap_or(0.0),
    })
}

fn xray(wafer: &Stack, order: &Order, parameters: &Parameters) -> Result<XrayTarget, String> {
    let kelvin = wafer.operation.temperature_k;
    let seen = Diffraction::new(wafer, parameters, Reflection::DEFAULT, kelvin)
        .map_err(|error| error.to_string())?;
    let multi_well = seen.multi_well.clone();
    let multi_well = multi_well.as_ref();
    let percent = order.number("targets.period_percent").unwrap_or(0.0);
    let period_tolerance_nm = multi_well.map(|it| 1e-2 * percent * it.period_nm);
    let ppm = order.number("targets.zero_order_ppm").unwrap_or(0.0);
    let zero_order_tolerance_arcsec =
        multi_well.and_then(|it| zero_order_shift_arcsec(&seen, &it.mean, ppm));
    Ok(XrayTarget {
        seen,
        period_tolerance_nm,
        zero_order_tolerance_arcsec,
    })
}

/// How far the zero order moves with so many ppm of mean perpendicular mismatch, arcsec of ω.
fn zero_order_shift_arcsec(seen: &Diffraction, mean: &Mismatch, ppm: f64) -> Option<f64> {
    let angle = |perpendicular: f64| {
        let lattice_nm = seen.substrate_lattice_nm * (1.0 + perpendicular);
        seen.reflection.bragg_angle(lattice_nm)
    };
    let here = angle(mean.perpendicular)?;
    let there = angle(mean.perpendicular + 1e-6 * ppm)?;
    Some((here - there).to_degrees() * 3600.0)
}
