//! The record of a spectrum.

use super::{Evaluation, Failure, PL_DENSITY_CM3, Remark, remark};
use crate::spectra::landmarks::{LogarithmicFit, logarithmic_fit};
use crate::spectra::{Emitter, Occupation, Point};
use crate::units::{ELEMENTARY_CHARGE_C, wavelength_nm};

/// Photon energies of the sampled spectra.
const SAMPLES: usize = 401;

/// A peak of gain.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GainPeak {
    /// Its height, cm⁻¹.
    pub gain_cm: f64,
    /// Its wavelength in vacuum, nm.
    pub peak_nm: f64,
    /// Its photon energy, eV.
    pub peak_ev: f64,
}

impl GainPeak {
    /// The larger of the peaks of TE and TM gain, with the name of its polarisation.
    #[must_use]
    pub fn larger(te: Option<Self>, tm: Option<Self>) -> Option<(&'static str, Self)> {
        match (te, tm) {
            (Some(te), Some(tm)) if tm.gain_cm > te.gain_cm => Some(("TM", tm)),
            (Some(te), _) => Some(("TE", te)),
            (None, Some(tm)) => Some(("TM", tm)),
            (None, None) => None,
        }
    }
}

/// Absorption without carriers.
#[derive(Clone, Debug, PartialEq)]
pub struct Absorption {
    /// Photon energies, eV.
    pub photon_ev: Vec<f64>,
    /// Absorption of light polarised in the plane, cm⁻¹.
    pub te_cm: Vec<f64>,
    /// Absorption of light polarised along growth, cm⁻¹.
    pub tm_cm: Vec<f64>,
}

/// Photoluminescence at low injection.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PhotoLuminescence {
    /// Peak wavelength in vacuum, nm.
    pub peak_nm: f64,
    /// Full width at half maximum, meV.
    pub fwhm_mev: f64,
}

/// The transparency point.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Transparency {
    /// Density at which the quasi-Fermi splitting equals the first transition, cm⁻³.
    pub density_cm3: f64,
    /// The first transition there with shrinkage, as a wavelength in vacuum, nm.
    pub wavelength_nm: f64,
}

/// Spontaneous emission.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Spontaneous {
    /// Peak wavelength in vacuum, nm.
    pub peak_nm: f64,
    /// Total rate, per cm³ of wells and second.
    pub total_per_cm3_s: f64,
    /// The current that it takes, of all wells, A/cm².
    pub current_a_cm2: f64,
}

/// Everything at one density.
#[derive(Clone, Debug, PartialEq)]
pub struct Run {
    /// Density of pairs per volume of the wells, cm⁻³.
    pub density_cm3: f64,
    /// Density of pairs per area, of all wells, cm⁻².
    pub sheet_density_cm2: f64,
    /// Quasi-Fermi level of the electrons, with shrinkage, eV.
    pub fermi_electron_ev: f64,
    /// Quasi-Fermi level of the holes, eV.
    pub fermi_hole_ev: f64,
    /// Their difference, eV.
    pub splitting_ev: f64,
    /// Gap shrinkage, meV, at least zero.
    pub shrinkage_mev: f64,
    /// Peak of TE gain; `None` below transparency.
    pub te: Option<GainPeak>,
    /// Peak of TM gain; `None` below transparency.
    pub tm: Option<GainPeak>,
    /// Spontaneous emission.
    pub spontaneous: Option<Spontaneous>,
    /// Spectra on the photon energies of [`Spectrum::photon_ev`].
    pub points: Vec<Point>,
}

/// Spectra at every density asked for, and their landmarks.
#[derive(Clone, Debug, PartialEq)]
pub struct Spectrum {
    /// Refractive index of the wells.
    pub refractive_index: f64,
    /// Absorption without carriers.
    pub absorption: Absorption,
    /// Photoluminescence.
    pub pl: Option<PhotoLuminescence>,
    /// The logarithmic law over the densities asked for, and the polarisation it is of.
    pub fit: Option<(&'static str, LogarithmicFit)>,
    /// Transparency.
    pub transparency: Option<Transparency>,
    /// Photon energies of all runs, eV.
    pub photon_ev: Vec<f64>,
    /// One run a density, by rising density.
    pub runs: Vec<Run>,
    /// What a reader should know beyond the remarks on the levels.
    pub remarks: Vec<Remark>,
}

impl Evaluation<'_> {
    /// Spectra at the densities of the stack.
    ///
    /// # Errors
    ///
    /// [`Failure::NoIndex`] if the refractive index of a well is not known.
    pub fn spectrum(&self) -> Result<Spectrum, Failure> {
        let refractive_index = self.refractive_index()?;
        let densities = &self.stack.operation.densities_cm3;
        let occupations: Vec<Occupation> = densities
            .iter()
            .map(|&density| self.occupation(&self.filling(density), self.shrinkage_ev(density)))
            .collect();
        let photon_ev = self.photon_energies(&occupations);
        let runs: Vec<Run> = densities
            .iter()
            .zip(&occupations)
            .map(|(&density, occupation)| self.run(density, occupation, &photon_ev))
            .collect();

        let low = self.low_injection();
        let low_view = self.view(&low);
        let pl = low_view.emission_peak().map(|peak| PhotoLuminescence {
            peak_nm: wavelength_nm(peak.photon_ev),
            fwhm_mev: 1e3 * low_view.emission_width_ev(&peak),
        });
        let polarisation = runs
            .last()
            .and_then(|run| GainPeak::larger(run.te, run.tm))
            .map_or("TE", |(polarisation, _)| polarisation);
        let gains: Vec<(f64, f64)> = runs
            .iter()
            .filter_map(|run| {
                let peak = if polarisation == "TM" { run.tm } else { run.te };
                peak.map(|peak| (run.density_cm3, peak.gain_cm))
            })
            .collect();
        let mut remarks = remark::of_spectrum(self, &runs);
        remarks.extend(self.cold_remark(&low, PL_DENSITY_CM3, None));
        for (run, occupation) in runs.iter().zip(&occupations) {
            let rate = run
                .spontaneous
                .map(|spontaneous| spontaneous.total_per_cm3_s);
            if remarks
                .iter()
                .any(|known| matches!(known, Remark::ColdEmission { .. }))
            {
                break;
            }
            remarks.extend(self.cold_remark(occupation, run.density_cm3, rate));
        }
        Ok(Spectrum {
            refractive_index,
            absorption: self.absorption_spectrum(),
            pl,
            fit: logarithmic_fit(&gains).map(|fit| (polarisation, fit)),
            transparency: self.transparency_cm3().map(|density_cm3| Transparency {
                density_cm3,
                wavelength_nm: wavelength_nm(self.first_ev - self.shrinkage_ev(density_cm3)),
            }),
            photon_ev,
            runs,
            remarks,
        })
    }

    /// Photon energies that show every run: from below the lowest edge to above the highest
    /// splitting.
    fn photon_energies(&self, occupations: &[Occupation]) -> Vec<f64> {
        let width = self.emitter.line().half_width_ev;
        let lowering = occupations
            .iter()
            .map(|o| o.lowering_ev)
            .fold(0.0, f64::max);
        let splitting = occupations
            .iter()
            .map(Occupation::splitting_ev)
            .fold(0.0, f64::max);
        let low = (self.first_ev - lowering - 6.0 * width).max(0.02);
        let high = splitting.max(self.first_ev) + (4.0 * self.thermal_ev()).max(0.06);
        spread(low, high)
    }

    fn absorption_spectrum(&self) -> Absorption {
        let width = self.emitter.line().half_width_ev;
        let edges = self.emitter.edges_ev();
        let highest = edges.last().copied().unwrap_or(self.first_ev);
        let low = (self.first_ev - 8.0 * width).max(0.02);
        let high = (highest + 0.05).clamp(self.first_ev + 0.1, self.first_ev + 0.6);
        let photon_ev = spread(low, high);
        let step = even_step(&photon_ev);
        let (te_cm, tm_cm) = self
            .emitter
            .absorption(low, step, photon_ev.len())
            .into_iter()
            .unzip();
        Absorption {
            photon_ev,
            te_cm,
            tm_cm,
        }
    }

    fn run(&self, density_cm3: f64, occupation: &Occupation, photon_ev: &[f64]) -> Run {
        let emitter: &dyn Emitter = &*self.emitter;
        let view = self.view(occupation);
        let [te, tm] = self.gain_peaks(&self.filling(density_cm3), &view);
        let total_per_cm3_s = view.total_rate_per_cm3_s();
        let wells_cm = 1e-7 * self.profile.well_thickness_nm;
        Run {
            density_cm3,
            sheet_density_cm2: density_cm3 * wells_cm,
            fermi_electron_ev: occupation.fermi_electron_ev,
            fermi_hole_ev: occupation.fermi_hole_ev,
            splitting_ev: occupation.splitting_ev(),
            shrinkage_mev: 1e3 * occupation.lowering_ev,
            te,
            tm,
            spontaneous: view.emission_peak().map(|peak| Spontaneous {
                peak_nm: wavelength_nm(peak.photon_ev),
                total_per_cm3_s,
                current_a_cm2: ELEMENTARY_CHARGE_C * total_per_cm3_s * wells_cm,
            }),
            points: emitter.sample(
                occupation,
                photon_ev[0],
                even_step(photon_ev),
                photon_ev.len(),
            ),
        }
    }

    /// A remark where the line, of fixed width, makes emission too strong.
    fn cold_remark(
        &self,
        occupation: &Occupation,
        density_cm3: f64,
        rate_per_cm3_s: Option<f64>,
    ) -> Option<Remark> {
        /// A broadened rate this much above the sharp one is remarked.
        const TOO_STRONG: f64 = 1.2;
        // Where kT is several line widths the two rates agree: no need to look.
        let line = self.emitter.emission_line(occupation.thermal_ev);
        if line.half_width_ev < 0.35 * occupation.thermal_ev {
            return None;
        }
        let emitter: &dyn Emitter = &*self.emitter;
        let rate = rate_per_cm3_s.unwrap_or_else(|| self.view(occupation).total_rate_per_cm3_s());
        let ratio = rate / emitter.sharp_rate_per_cm3_s(occupation);
        (ratio > TOO_STRONG).then_some(Remark::ColdEmission { density_cm3, ratio })
    }
}

/// The step of [`spread`], from its ends: the difference of two neighbours has lost so many digits
/// that the last energies of a spectrum would not be those it is listed under.
fn even_step(photon_ev: &[f64]) -> f64 {
    (photon_ev[SAMPLES - 1] - photon_ev[0]) / (SAMPLES - 1) as f64
}

fn spread(low: f64, high: f64) -> Vec<f64> {
    (0..SAMPLES)
        .map(|index| low + (high - low) * index as f64 / (SAMPLES - 1) as f64)
        .collect()
}
