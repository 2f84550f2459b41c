//! The document of `spectrum`.

use super::FORMAT;
use crate::evaluation::{Evaluation, GainPeak, Run, Spectrum};
use crate::sheet::Stamp;
use crate::spectra::Point;
use serde::Serialize;

#[derive(Serialize)]
struct Document<'a> {
    format: u32,
    stamp: &'a Stamp,
    title: &'a str,
    temperature_k: f64,
    refractive_index: f64,
    absorption: AbsorptionEntry<'a>,
    pl: Option<PlEntry>,
    fit: Option<FitEntry>,
    transparency: Option<TransparencyEntry>,
    runs: Vec<RunEntry<'a>>,
}

#[derive(Serialize)]
struct AbsorptionEntry<'a> {
    photon_ev: &'a [f64],
    te_cm: &'a [f64],
    tm_cm: &'a [f64],
}

#[derive(Serialize)]
struct PlEntry {
    peak_nm: f64,
    fwhm_mev: f64,
}

#[derive(Serialize)]
struct FitEntry {
    polarization: &'static str,
    g0_cm: f64,
    transparency_cm3: f64,
    residual_cm: f64,
}

#[derive(Serialize)]
struct TransparencyEntry {
    density_cm3: f64,
    wavelength_nm: f64,
}

#[derive(Serialize)]
struct RunEntry<'a> {
    density_cm3: f64,
    sheet_density_cm2: f64,
    fermi_electron_ev: f64,
    fermi_hole_ev: f64,
    splitting_ev: f64,
    shrinkage_mev: f64,
    te: PeakEntry,
    tm: PeakEntry,
    spontaneous: SpontaneousEntry,
    photon_ev: &'a [f64],
    te_gain_cm: Vec<f64>,
    tm_gain_cm: Vec<f64>,
    spontaneous_per_ev_cm3_s: Vec<f64>,
}

#[expect(
    clippy::struct_field_names,
    reason = "they are the keys of the document"
)]
#[derive(Serialize)]
struct PeakEntry {
    peak_gain_cm: Option<f64>,
    peak_nm: Option<f64>,
    peak_ev: Option<f64>,
}

#[derive(Serialize)]
struct SpontaneousEntry {
    peak_nm: Option<f64>,
    total_per_cm3_s: Option<f64>,
    current_a_cm2: Option<f64>,
}

/// A spectrum as one JSON document.
#[must_use]
pub fn spectrum(evaluation: &Evaluation<'_>, spectrum: &Spectrum, stamp: &Stamp) -> String {
    super::text(&Document {
        format: FORMAT,
        stamp,
        title: &evaluation.stack.title,
        temperature_k: evaluation.stack.operation.temperature_k,
        refractive_index: spectrum.refractive_index,
        absorption: AbsorptionEntry {
            photon_ev: &spectrum.absorption.photon_ev,
            te_cm: &spectrum.absorption.te_cm,
            tm_cm: &spectrum.absorption.tm_cm,
        },
        pl: spectrum.pl.map(|pl| PlEntry {
            peak_nm: pl.peak_nm,
            fwhm_mev: pl.fwhm_mev,
        }),
        fit: spectrum.fit.map(|(polarization, fit)| FitEntry {
            polarization,
            g0_cm: fit.g0_cm,
            transparency_cm3: fit.transparency_cm3,
            residual_cm: fit.residual_cm,
        }),
        transparency: spectrum.transparency.map(|at| TransparencyEntry {
            density_cm3: at.density_cm3,
            wavelength_nm: at.wavelength_nm,
        }),
        runs: spectrum
            .runs
            .iter()
            .map(|run| RunEntry::new(run, &spectrum.photon_ev))
            .collect(),
    })
}

impl<'a> RunEntry<'a> {
    fn new(run: &Run, photon_ev: &'a [f64]) -> Self {
        let of = |pick: fn(&Point) -> f64| run.points.iter().map(pick).collect();
        let spontaneous = run.spontaneous;
        Self {
            density_cm3: run.density_cm3,
            sheet_density_cm2: run.sheet_density_cm2,
            fermi_electron_ev: run.fermi_electron_ev,
            fermi_hole_ev: run.fermi_hole_ev,
            splitting_ev: run.splitting_ev,
            shrinkage_mev: run.shrinkage_mev,
            te: PeakEntry::from(run.te),
            tm: PeakEntry::from(run.tm),
            spontaneous: SpontaneousEntry {
                peak_nm: spontaneous.map(|it| it.peak_nm),
                total_per_cm3_s: spontaneous.map(|it| it.total_per_cm3_s),
                current_a_cm2: spontaneous.map(|it| it.current_a_cm2),
            },
            photon_ev,
            te_gain_cm: of(|point| point.te_gain_cm),
            tm_gain_cm: of(|point| point.tm_gain_cm),
            spontaneous_per_ev_cm3_s: of(|point| point.spontaneous_per_ev_cm3_s),
        }
    }
}

impl From<Option<GainPeak>> for PeakEntry {
    fn from(peak: Option<GainPeak>) -> Self {
        Self {
            peak_gain_cm: peak.map(|peak| peak.gain_cm),
            peak_nm: peak.map(|peak| peak.peak_nm),
            peak_ev: peak.map(|peak| peak.peak_ev),
        }
    }
}
