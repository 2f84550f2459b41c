//! Constants, chains between walls, and the filling of bands.

use crate::judgement::Check;
use crate::{Answer, Problem};
use serde::Deserialize;
use std::f64::consts::PI;
use stepwell::carriers::bulk::{BulkBands, transparency_cm3};
use stepwell::carriers::{Reservoir, Subband};
use stepwell::numerics::chain::{Chain, Run};
use stepwell::numerics::fermi::{half_integral, log_one_plus_exp};
use stepwell::units::{
    BOLTZMANN_J_K, ELECTRON_MASS_KG, ELEMENTARY_CHARGE_C, FINE_STRUCTURE, HBAR_J_S,
    HBAR2_OVER_2M0_EV_NM2, HC_EV_NM, LIGHT_SPEED_M_S, PLANCK_J_S, SUBBAND_DENSITY_PER_CM2_EV,
    VACUUM_PERMITTIVITY_F_M, thermal_ev,
};

/// The constants of the program.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Constants {
    name: String,
    check: Vec<Check>,
}

impl Problem for Constants {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let rest_energy_ev = ELECTRON_MASS_KG * LIGHT_SPEED_M_S.powi(2) / ELEMENTARY_CHARGE_C;
        Ok(match check.quantity.as_str() {
            "elementary_charge_c" => ELEMENTARY_CHARGE_C,
            "planck_j_s" => PLANCK_J_S,
            "boltzmann_j_k" => BOLTZMANN_J_K,
            "light_speed_m_s" => LIGHT_SPEED_M_S,
            "electron_mass_kg" => ELECTRON_MASS_KG,
            "vacuum_permittivity_f_m" => VACUUM_PERMITTIVITY_F_M,
            "hbar_j_s" => HBAR_J_S,
            "fine_structure" => FINE_STRUCTURE,
            // Bohr radius and Rydberg energy tie charge, mass, ħ and α together.
            "bohr_radius_m" => HBAR_J_S / (ELECTRON_MASS_KG * LIGHT_SPEED_M_S * FINE_STRUCTURE),
            "rydberg_ev" => 0.5 * FINE_STRUCTURE.powi(2) * rest_energy_ev,
            "hc_ev_nm" => HC_EV_NM,
            "hbar2_over_2m0_ev_nm2" => HBAR2_OVER_2M0_EV_NM2,
            "thermal_ev" => thermal_ev(check.at.ok_or("at which temperature?")?),
            "subband_density_per_cm2_ev" => SUBBAND_DENSITY_PER_CM2_EV,
            "charge_squared_ev_nm" => FINE_STRUCTURE * HC_EV_NM / (2.0 * PI),
            other => return Err(format!("unknown constant {other}")),
        })
    }
}

/// A band between two hard walls, solved on a chain of equal intervals; the potential is that of a
/// field (zero at the lower wall) or a parabola about the middle.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Walls {
    name: String,
    mass: f64,
    length_nm: f64,
    intervals: usize,
    #[serde(default)]
    field_v_m: f64,
    #[serde(default)]
    curvature_ev_nm2: f64,
    check: Vec<Check>,
}

impl Walls {
    fn chain(&self, field_v_m: f64) -> Chain {
        let length = self.length_nm / self.intervals as f64;
        let run = |intervals, potential| Run {
            intervals,
            length,
            stiffness: HBAR2_OVER_2M0_EV_NM2 / self.mass,
            potential,
            softening: 0.0,
        };
        if field_v_m == 0.0 && self.curvature_ev_nm2 == 0.0 {
            return Chain::new(vec![run(self.intervals, 0.0)]);
        }
        // The mean of a parabola over an interval is its middle and h²/12 more.
        let runs = (0..self.intervals)
            .map(|index| {
                let z_nm = (index as f64 + 0.5) * length;
                let off_nm = z_nm - 0.5 * self.length_nm;
                let parabola = self.curvature_ev_nm2 * (off_nm * off_nm + length * length / 12.0);
                run(1, 1e-9 * field_v_m * z_nm + parabola)
            })
            .collect();
        Chain::new(runs)
    }

    fn level_ev(&self, number: usize, field_v_m: f64) -> Answer {
        let states = self
            .chain(field_v_m)
            .lowest(number, None)
            .map_err(|error| error.to_string())?;
        Ok(states[number - 1].energy)
    }

    /// Shift of the first level from the potential of the middle, meV.
    fn shift_mev(&self, field_v_m: f64) -> Answer {
        let middle = 0.5e-9 * field_v_m * self.length_nm;
        Ok(1e3 * (self.level_ev(1, field_v_m)? - middle - self.level_ev(1, 0.0)?))
    }
}

impl Problem for Walls {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        match check.quantity.as_str() {
            // Of a second-order grid the error is that of two grids extrapolated.
            "shift_mev" => self.shift_mev(self.field_v_m),
            // The part quadratic in the field, from a field small enough that no other is seen.
            "second_order_shift_mev" => Ok(400.0 * self.shift_mev(self.field_v_m / 20.0)?),
            "spacing_ev" => Ok(self.level_ev(2, 0.0)? - self.level_ev(1, 0.0)?),
            // E₁ in units of the triangular well's (ħ²/2m)^⅓ (qF)^⅔, and its length.
            "length_scale_nm" => {
                let slope = 1e-9 * self.field_v_m;
                Ok(
                    (self.level_ev(2, self.field_v_m)? - self.level_ev(1, self.field_v_m)?)
                        / (slope * AIRY_DIFFERENCE),
                )
            }
            other => {
                let number = other
                    .strip_prefix("level_")
                    .and_then(|rest| rest.strip_suffix("_ev"))
                    .and_then(|number| number.parse().ok())
                    .ok_or_else(|| format!("unknown quantity {other}"))?;
                self.level_ev(number, self.field_v_m)
            }
        }
    }
}

/// Difference of the first two zeros of Ai, DLMF table 9.9.1.
const AIRY_DIFFERENCE: f64 = 4.087_949_444_131 - 2.338_107_410_46;

/// Fermi-Dirac integrals, normalised; `at` is the reduced Fermi energy.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct FermiIntegral {
    name: String,
    check: Vec<Check>,
}

impl Problem for FermiIntegral {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let eta = check.at.ok_or("at which Fermi energy?")?;
        Ok(match check.quantity.as_str() {
            "F(1/2)" => half_integral(1, eta),
            "F(-1/2)" => half_integral(-1, eta),
            "F(3/2)" => half_integral(3, eta),
            "F(0)" => log_one_plus_exp(eta),
            "F(1/2) unnormalised" => 0.5 * PI.sqrt() * half_integral(1, eta),
            // The inverse through the bulk band: kT = 1, filling `at` of the effective density.
            "inverse F(1/2)" => {
                let band = BulkBands::of_one_edge(&[1.0]);
                band.fermi_ev(eta * band.effective_density_cm3(1.0), 1.0)
            }
            other => return Err(format!("unknown integral {other}")),
        })
    }
}

/// One parabolic subband.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct SubbandProblem {
    name: String,
    mass: f64,
    temperature_k: f64,
    check: Vec<Check>,
}

impl Problem for SubbandProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let subbands = [Subband {
            edge_ev: 0.0,
            mass: self.mass,
        }];
        let reservoir = Reservoir::Parabolic(&subbands);
        let kt = thermal_ev(self.temperature_k);
        Ok(match check.quantity.as_str() {
            // Deep in a cold band the density per energy is the step.
            "step_per_cm2_ev" => {
                let cold = thermal_ev(1.0);
                (reservoir.sheet_density_cm2(0.4, cold) - reservoir.sheet_density_cm2(0.2, cold))
                    / 0.2
            }
            // The Boltzmann limit exp(F/kT) times this.
            "effective_density_cm2" => reservoir.sheet_density_cm2(-25.0 * kt, kt) * 25f64.exp(),
            "density_cm2" => {
                reservoir.sheet_density_cm2(1e-3 * check.at.ok_or("at which level?")?, kt)
            }
            "fermi_ev" => reservoir.fermi_ev(check.at.ok_or("at which density?")?, kt),
            other => return Err(format!("unknown quantity {other}")),
        })
    }
}

/// Parabolic bands of a bulk crystal.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct BulkBandsProblem {
    name: String,
    electron_mass: f64,
    hole_mass: f64,
    temperature_k: f64,
    check: Vec<Check>,
}

impl Problem for BulkBandsProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let electrons = BulkBands::of_one_edge(&[self.electron_mass]);
        let holes = BulkBands::of_one_edge(&[self.hole_mass]);
        let kt = thermal_ev(self.temperature_k);
        let transparency = || transparency_cm3(&electrons, &holes, kt);
        Ok(match check.quantity.as_str() {
            "electron_density_cm3" => electrons.effective_density_cm3(kt),
            "hole_density_cm3" => holes.effective_density_cm3(kt),
            "transparency_cm3" => transparency(),
            "transparency_eta" => electrons.fermi_ev(transparency(), kt) / kt,
            other => return Err(format!("unknown quantity {other}")),
        })
    }
}
