//! The document of `xray`.

use super::FORMAT;
use crate::diffraction::{
    COPPER_K_ALPHA1_NM, Diffraction, LayerPeak, MultiWell, Peak, RESOLUTION_ARCSEC, RockingCurve,
    Satellite,
};
use crate::materials::Mismatch;
use crate::sheet::Stamp;
use crate::structure::Stack;
use serde::Serialize;

#[derive(Serialize)]
struct Document<'a> {
    format: u32,
    stamp: &'a Stamp,
    title: &'a str,
    temperature_k: f64,
    reflection: String,
    wavelength_nm: f64,
    /// Offsets are in ω.
    scan: &'static str,
    substrate: Substrate,
    layers: Vec<LayerEntry<'a>>,
    multi_well: Option<MultiWellEntry>,
    fringe_arcsec: f64,
    resolution_arcsec: f64,
    curve: Curve,
}

#[derive(Serialize)]
struct Substrate {
    formula: String,
    lattice_nm: f64,
    theta_deg: f64,
    two_theta_deg: f64,
}

#[derive(Serialize)]
struct LayerEntry<'a> {
    role: &'static str,
    formula: &'a str,
    end: &'static str,
    count: usize,
    thickness_nm: f64,
    #[serde(flatten)]
    mismatch: MismatchEntry,
    #[serde(flatten)]
    peak: PeakEntry,
    fringe_arcsec: f64,
}

#[derive(Serialize)]
struct MismatchEntry {
    relaxed_mismatch_ppm: f64,
    perpendicular_mismatch_ppm: f64,
    strain: &'static str,
}

#[derive(Serialize)]
struct PeakEntry {
    theta_deg: Option<f64>,
    two_theta_deg: Option<f64>,
    offset_arcsec: Option<f64>,
}

#[derive(Serialize)]
struct MultiWellEntry {
    period_nm: f64,
    periods: usize,
    #[serde(flatten)]
    mean: MismatchEntry,
    zero_order_arcsec: Option<f64>,
    spacing_arcsec: f64,
    fringe_arcsec: f64,
    satellites: Vec<SatelliteEntry>,
}

#[derive(Serialize)]
struct SatelliteEntry {
    order: i32,
    #[serde(flatten)]
    peak: PeakEntry,
    relative_intensity: f64,
}

#[derive(Serialize)]
struct Curve {
    offset_arcsec: Vec<f64>,
    intensity: Vec<f64>,
    kinematical: Vec<f64>,
}

/// What X-rays see of a stack as one JSON document.
#[must_use]
pub fn xray(stack: &Stack, seen: &Diffraction, curve: &RockingCurve, stamp: &Stamp) -> String {
    let column = |of: fn(&crate::diffraction::CurvePoint) -> f64| -> Vec<f64> {
        curve.points.iter().map(of).collect()
    };
    super::text(&Document {
        format: FORMAT,
        stamp,
        title: &stack.title,
        temperature_k: seen.temperature_k,
        reflection: seen.reflection.to_string(),
        wavelength_nm: COPPER_K_ALPHA1_NM,
        scan: "omega-2theta, offsets in omega",
        substrate: Substrate {
            formula: stack.substrate.formula(),
            lattice_nm: seen.substrate_lattice_nm,
            theta_deg: seen.substrate.theta_deg,
            two_theta_deg: seen.substrate.two_theta_deg(),
        },
        layers: seen
            .layers
            .iter()
            .map(|layer| LayerEntry::new(stack, layer))
            .collect(),
        multi_well: seen.multi_well.as_ref().map(MultiWellEntry::from),
        fringe_arcsec: seen.fringe_arcsec,
        resolution_arcsec: RESOLUTION_ARCSEC,
        curve: Curve {
            offset_arcsec: column(|point| point.offset_arcsec),
            intensity: column(|point| point.intensity),
            kinematical: column(|point| point.kinematical),
        },
    })
}

impl<'a> LayerEntry<'a> {
    fn new(stack: &Stack, layer: &'a LayerPeak) -> Self {
        let is_graded = stack.layers[layer.layer].grade_to.is_some();
        Self {
            role: layer.role.word(),
            formula: &layer.formula,
            end: match (is_graded, layer.is_upper_end) {
                (false, _) => "both",
                (true, false) => "lower",
                (true, true) => "upper",
            },
            count: layer.count,
            thickness_nm: layer.thickness_nm,
            mismatch: MismatchEntry::from(&layer.mismatch),
            peak: PeakEntry::from(layer.peak),
            fringe_arcsec: layer.fringe_arcsec,
        }
    }
}

impl From<&Mismatch> for MismatchEntry {
    fn from(mismatch: &Mismatch) -> Self {
        Self {
            relaxed_mismatch_ppm: mismatch.relaxed_ppm(),
            perpendicular_mismatch_ppm: mismatch.perpendicular_ppm(),
            strain: mismatch.sense().word(),
        }
    }
}

impl From<Option<Peak>> for PeakEntry {
    fn from(peak: Option<Peak>) -> Self {
        Self {
            theta_deg: peak.map(|peak| peak.theta_deg),
            two_theta_deg: peak.map(|peak| peak.two_theta_deg()),
            offset_arcsec: peak.map(|peak| peak.offset_arcsec),
        }
    }
}

impl From<&MultiWell> for MultiWellEntry {
    fn from(multi_well: &MultiWell) -> Self {
        Self {
            period_nm: multi_well.period_nm,
            periods: multi_well.periods,
            mean: MismatchEntry::from(&multi_well.mean),
            zero_order_arcsec: multi_well.zero_order().map(|it| it.peak.offset_arcsec),
            spacing_arcsec: multi_well.spacing_arcsec,
            fringe_arcsec: multi_well.fringe_arcsec,
            satellites: multi_well
                .satellites
                .iter()
                .map(SatelliteEntry::from)
                .collect(),
        }
    }
}

impl From<&Satellite> for SatelliteEntry {
    fn from(satellite: &Satellite) -> Self {
        Self {
            order: satellite.order,
            peak: PeakEntry::from(Some(satellite.peak)),
            relative_intensity: satellite.intensity,
        }
    }
}
