//! Pairs of subbands given by their numbers, and bulk crystals, as emitters.

use crate::judgement::Check;
use crate::strain::{composition, crystal};
use crate::{Answer, Problem};
use serde::Deserialize;
use std::f64::consts::PI;
use stepwell::carriers::{Reservoir, Subband};
use stepwell::materials::Parameters;
use stepwell::spectra::landmarks::{View, logarithmic_fit};
use stepwell::spectra::{Bulk, Emitter, Hole, Line, Occupation, Pair, Staircase};
use stepwell::structure::Lineshape;
use stepwell::units::{ELEMENTARY_CHARGE_C, HBAR2_OVER_2M0_EV_NM2, thermal_ev};

/// One pair of an electron and a heavy-hole subband with the zone-centre dipole at every energy.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct PairProblem {
    name: String,
    edge_ev: f64,
    electron_mass: f64,
    hole_mass: f64,
    #[serde(default = "room_k")]
    temperature_k: f64,
    #[serde(default = "one")]
    kane_energy_ev: f64,
    #[serde(default = "one")]
    refractive_index: f64,
    #[serde(default = "ten")]
    thickness_nm: f64,
    /// Either the density, or both quasi-Fermi levels inside their bands.
    sheet_density_cm2: Option<f64>,
    electron_fermi_ev: Option<f64>,
    hole_fermi_ev: Option<f64>,
    /// Light holes in place of heavy ones.
    #[serde(default)]
    light: bool,
    check: Vec<Check>,
}

fn room_k() -> f64 {
    300.0
}

fn one() -> f64 {
    1.0
}

fn ten() -> f64 {
    10.0
}

/// So sharp that the step is whole at any energy a row asks for.
const SHARP: Line = Line {
    shape: Lineshape::Gaussian,
    half_width_ev: 1e-9,
};

impl PairProblem {
    fn pair(&self) -> Pair {
        Pair {
            electron: 0,
            kind: if self.light { Hole::Light } else { Hole::Heavy },
            hole: 0,
            electron_ev: self.edge_ev,
            hole_ev: 0.0,
            electron_mass: self.electron_mass,
            hole_mass: self.hole_mass,
            overlap: 1.0,
            // All confinement: the dipole of the zone centre.
            confinement_ev: 1e12,
        }
    }

    fn emitter(&self, line: Line) -> Staircase {
        Staircase::new(
            vec![self.pair()],
            self.kane_energy_ev,
            self.thickness_nm,
            self.refractive_index,
            line,
        )
    }

    fn fermi_ev(&self, mass: f64, given: Option<f64>) -> Answer {
        let subbands = [Subband { edge_ev: 0.0, mass }];
        match (given, self.sheet_density_cm2) {
            (Some(fermi), None) => Ok(fermi),
            (None, Some(sheet)) => {
                Ok(Reservoir::Parabolic(&subbands).fermi_ev(sheet, thermal_ev(self.temperature_k)))
            }
            _ => Err("give a density or quasi-Fermi levels".to_owned()),
        }
    }

    fn occupation(&self) -> Result<Occupation, String> {
        Ok(Occupation {
            fermi_electron_ev: self.edge_ev
                + self.fermi_ev(self.electron_mass, self.electron_fermi_ev)?,
            fermi_hole_ev: -self.fermi_ev(self.hole_mass, self.hole_fermi_ev)?,
            lowering_ev: 0.0,
            thermal_ev: thermal_ev(self.temperature_k),
        })
    }

    /// A little above the edge, where the sharp step is whole.
    fn above_edge_ev(&self) -> f64 {
        self.edge_ev + 1e-8
    }

    /// Rate per area, cm⁻² s⁻¹.
    fn rate_cm2_s(&self) -> Answer {
        let rate = self
            .emitter(SHARP)
            .sharp_rate_per_cm3_s(&self.occupation()?);
        Ok(rate * 1e-7 * self.thickness_nm)
    }

    /// n p coefficient of a gas so thin and cold that every pair recombines at the edge, times
    /// (m_c + m_v) kT/(π ħ²): the rate of one filled pair, s⁻¹.
    fn filled_rate_per_s(&self) -> Answer {
        let thin = Self {
            name: String::new(),
            check: Vec::new(),
            temperature_k: 1.0,
            sheet_density_cm2: Some(1e3),
            electron_fermi_ev: None,
            hole_fermi_ev: None,
            ..*self
        };
        let per_cm2 = 1e14 * (self.electron_mass + self.hole_mass) * thermal_ev(1.0)
            / (2.0 * PI * HBAR2_OVER_2M0_EV_NM2);
        Ok(thin.rate_cm2_s()? / 1e6 * per_cm2)
    }
}

impl Problem for PairProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let photon_ev = check.at.unwrap_or(self.edge_ev).max(self.above_edge_ev());
        let sharp = self.emitter(SHARP);
        let (te, tm) = self.pair().polarisation(0.0);
        Ok(match check.quantity.as_str() {
            "splitting_ev" => self.occupation()?.splitting_ev(),
            "electron_fermi_ev" => self.fermi_ev(self.electron_mass, self.electron_fermi_ev)?,
            "hole_fermi_ev" => self.fermi_ev(self.hole_mass, self.hole_fermi_ev)?,
            "inversion" => {
                let gain = sharp.point(&self.occupation()?, photon_ev).te_gain_cm;
                gain / sharp.absorption(photon_ev, 1e-3, 1)[0].0
            }
            "te_gain_cm" => sharp.point(&self.occupation()?, photon_ev).te_gain_cm,
            "te_absorption_cm" => sharp.absorption(photon_ev, 1e-3, 1)[0].0,
            "absorbed_fraction" => {
                sharp.absorption(photon_ev, 1e-3, 1)[0].0 * 1e-7 * self.thickness_nm
            }
            // Emission that goes with a mean gain of 1000 cm⁻¹.
            "spontaneous_per_1000_cm" => {
                let point = sharp.point(&self.occupation()?, photon_ev);
                let mean = (2.0 * point.te_gain_cm + point.tm_gain_cm) / 3.0;
                1e3 * point.spontaneous_per_ev_cm3_s / mean
            }
            // Gain over emission in units of the modes: 1 − exp((E − ΔF)/kT).
            "gain_per_emission" => {
                let point = sharp.point(&self.occupation()?, photon_ev);
                let mean = (2.0 * point.te_gain_cm + point.tm_gain_cm) / 3.0;
                let modes = stepwell::spectra::modes_per_ev_cm2_s(photon_ev, self.refractive_index);
                mean * modes / point.spontaneous_per_ev_cm3_s
            }
            "rate_cm2_s" => self.rate_cm2_s()?,
            "current_a_cm2" => ELEMENTARY_CHARGE_C * self.rate_cm2_s()?,
            "rate_per_density_squared_cm2_s" => {
                let sheet = self.sheet_density_cm2.ok_or("a density is needed")?;
                self.rate_cm2_s()? / (sheet * sheet)
            }
            // The integral over the emission spectrum of a narrow line against the sharp sum.
            "rate_from_spectrum_over_sum" => {
                let narrow = self.emitter(Line {
                    half_width_ev: 2e-5,
                    ..SHARP
                });
                let occupation = self.occupation()?;
                View::new(&narrow, &occupation)
                    .ok_or("no transition")?
                    .total_rate_per_cm3_s()
                    / narrow.sharp_rate_per_cm3_s(&occupation)
            }
            "filled_rate_per_s" => self.filled_rate_per_s()?,
            "filled_lifetime_ns" => 1e9 / self.filled_rate_per_s()?,
            "thin_gas_coefficient_cm2_s" => {
                let room = thermal_ev(self.temperature_k);
                let per_cm2 = 1e14 * (self.electron_mass + self.hole_mass) * room
                    / (2.0 * PI * HBAR2_OVER_2M0_EV_NM2);
                self.filled_rate_per_s()? / per_cm2
            }
            // In units of |M|² = m₀ E_p/2 = 3 M_b².
            "te_share_of_m2" => te / 3.0,
            "tm_share_of_m2" => tm / 3.0,
            "polarisation_sum_of_m2" => (2.0 * te + tm) / 3.0,
            "te_factor" => te,
            "tm_factor" => tm,
            other => return Err(format!("unknown quantity {other}")),
        })
    }
}

/// A bulk crystal.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct BulkProblem {
    name: String,
    material: String,
    substrate: String,
    #[serde(default = "room_k")]
    temperature_k: f64,
    check: Vec<Check>,
}

impl Problem for BulkProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let material = crystal(&self.material)?;
        let index = Parameters::shipped().index(
            &composition(&self.material)?,
            Some(&composition(&self.substrate)?),
            material.gap_ev,
        );
        let bulk = Bulk::new(&material, index, Line::new(Lineshape::Sech, 100.0));
        let kt = thermal_ev(self.temperature_k);
        Ok(match check.quantity.as_str() {
            "transparency_cm3" => bulk.transparency_cm3(kt),
            "fit_transparency_cm3" | "fit_g0_cm" => {
                let gains: Vec<(f64, f64)> = [2e18, 2.5e18, 3e18, 4e18, 5e18]
                    .into_iter()
                    .filter_map(|density| {
                        let occupation = bulk.occupation(density, 0.0, kt);
                        let view = View::new(&bulk, &occupation)?;
                        let peak = view.gain_peak(|point| point.te_gain_cm)?;
                        Some((density, peak.height))
                    })
                    .collect();
                let fit = logarithmic_fit(&gains).ok_or("no gain to fit")?;
                if check.quantity == "fit_g0_cm" {
                    fit.g0_cm
                } else {
                    fit.transparency_cm3
                }
            }
            // Rate over n² of a thin gas.
            "radiative_coefficient_cm3_s" => {
                let density = 1e15;
                let occupation = bulk.occupation(density, 0.0, kt);
                bulk.sharp_rate_per_cm3_s(&occupation) / (density * density)
            }
            other => return Err(format!("unknown quantity {other}")),
        })
    }
}
