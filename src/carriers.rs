//! Occupation of the levels and quasi-Fermi levels.

pub mod bulk;

use crate::numerics::fermi::{log_exp_minus_one, log_one_plus_exp, occupation};
use crate::numerics::roots::bracketed_root;
use crate::units::SUBBAND_DENSITY_PER_CM2_EV;

/// A parabolic subband.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Subband {
    /// Distance of its edge above the lowest electron edge (holes: below the highest), or any other
    /// energy counted the same way, eV.
    pub edge_ev: f64,
    /// In-plane mass, free-electron masses.
    pub mass: f64,
}

/// States that carriers of one kind may fill, energies counted away from the gap.
#[derive(Clone, Copy, Debug)]
pub enum Reservoir<'a> {
    /// Parabolic subbands: each has a density of states of one step.
    Parabolic(&'a [Subband]),
    /// States sampled over the in-plane wave number: energy in eV, number per area in cm⁻².
    Sampled(&'a [(f64, f64)]),
}

impl Reservoir<'_> {
    /// Carriers per area, cm⁻², at a quasi-Fermi level counted like the energies.
    ///
    /// # Equation
    ///
    /// ```text
    ///  n = Σ_i (m_i kT / π ħ²) ln(1 + exp((F − E_i)/kT))       or      n = Σ_k w_k / (1 + exp((E_k − F)/kT))
    /// ```
    #[must_use]
    pub fn sheet_density_cm2(&self, fermi_ev: f64, thermal_ev: f64) -> f64 {
        match self {
            Self::Parabolic(subbands) => subbands
                .iter()
                .map(|subband| {
                    SUBBAND_DENSITY_PER_CM2_EV
                        * subband.mass
                        * thermal_ev
                        * log_one_plus_exp((fermi_ev - subband.edge_ev) / thermal_ev)
                })
                .sum(),
            Self::Sampled(states) => states
                .iter()
                .map(|&(energy, weight)| weight * occupation((energy - fermi_ev) / thermal_ev))
                .sum(),
        }
    }

    /// The quasi-Fermi level, eV, at which the states hold `sheet_cm2` carriers: rises without
    /// bound as the density does, never clipped.
    ///
    /// # Arguments
    ///
    /// * `sheet_cm2` – carriers per area, above zero
    /// * `thermal_ev` – kT, eV
    ///
    /// # Panics
    ///
    /// If there is no state.
    #[must_use]
    pub fn fermi_ev(&self, sheet_cm2: f64, thermal_ev: f64) -> f64 {
        let (low, high) = match self {
            Self::Parabolic(subbands) => {
                // All subbands at the lowest edge hold more, the lowest one alone holds less.
                let lowest = subbands
                    .iter()
                    .min_by(|a, b| a.edge_ev.total_cmp(&b.edge_ev))
                    .expect("a reservoir has states");
                let total: f64 = subbands.iter().map(|subband| subband.mass).sum();
                let level = |mass: f64| {
                    let states = SUBBAND_DENSITY_PER_CM2_EV * mass * thermal_ev;
                    lowest.edge_ev + thermal_ev * log_exp_minus_one(sheet_cm2 / states)
                };
                (level(total), level(lowest.mass))
            }
            Self::Sampled(states) => {
                let edge = states
                    .iter()
                    .map(|state| state.0)
                    .fold(f64::INFINITY, f64::min);
                let mut reach = 4.0 * thermal_ev;
                while self.sheet_density_cm2(edge - reach, thermal_ev) > sheet_cm2 {
                    reach *= 2.0;
                }
                let low = edge - reach;
                let mut reach = 4.0 * thermal_ev;
                // A finite sample holds finitely many: past its end the level can't rise further.
                while self.sheet_density_cm2(edge + reach, thermal_ev) < sheet_cm2 && reach < 1e3 {
                    reach *= 2.0;
                }
                (low, edge + reach)
            }
        };
        let target = sheet_cm2.ln();
        let excess = |fermi: f64| self.sheet_density_cm2(fermi, thermal_ev).ln() - target;
        let slack = 1e-9 + 1e-6 * thermal_ev;
        bracketed_root(excess, low - slack, high + slack, 1e-13)
    }
}

/// Net doping that the wells feel, cm⁻³ of wells, and the rule for both carriers.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct NetDoping {
    /// Donors less acceptors per volume of the wells, cm⁻³.
    pub net_cm3: f64,
}

impl NetDoping {
    /// Electrons and holes per volume of the wells at a density of pairs, cm⁻³.
    #[must_use]
    pub fn electrons_and_holes_cm3(&self, pairs_cm3: f64) -> (f64, f64) {
        (
            pairs_cm3 + self.net_cm3.max(0.0),
            pairs_cm3 + (-self.net_cm3).max(0.0),
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units::thermal_ev;

    #[test]
    fn fermi_level_inverts_density_from_empty_to_overfull_and_cold_to_hot() {
        let subbands = [
            Subband {
                edge_ev: 0.05,
                mass: 0.05,
            },
            Subband {
                edge_ev: 0.18,
                mass: 0.07,
            },
            Subband {
                edge_ev: 0.0501,
                mass: 0.05,
            },
        ];
        let reservoir = Reservoir::Parabolic(&subbands);
        for temperature in [4.0, 77.0, 300.0, 600.0] {
            for sheet in [1e7, 1e10, 1e12, 1e13, 1e15] {
                let kt = thermal_ev(temperature);
                let fermi = reservoir.fermi_ev(sheet, kt);
                let back = reservoir.sheet_density_cm2(fermi, kt);
                assert!(
                    (back / sheet - 1.0).abs() < 1e-8,
                    "{temperature} K, {sheet}: {back}"
                );
            }
        }
    }

    /// A parabola sampled over k is the step of the same mass.
    #[test]
    fn sampled_states_of_a_parabola_hold_what_its_step_does() {
        let mass = 0.2;
        let step = 1e-3;
        let states: Vec<(f64, f64)> = (0..4000)
            .map(|index| {
                let k = (f64::from(index) + 0.5) * step;
                // Two spins, k dk/2π each, 1e14 cm⁻² per nm⁻².
                (
                    crate::units::HBAR2_OVER_2M0_EV_NM2 * k * k / mass,
                    2.0 * k * step / (2.0 * std::f64::consts::PI) * 1e14,
                )
            })
            .collect();
        let subbands = [Subband { edge_ev: 0.0, mass }];
        let kt = thermal_ev(300.0);
        for fermi in [-0.1, 0.0, 0.1] {
            let sampled = Reservoir::Sampled(&states).sheet_density_cm2(fermi, kt);
            let exact = Reservoir::Parabolic(&subbands).sheet_density_cm2(fermi, kt);
            assert!(
                (sampled / exact - 1.0).abs() < 1e-5,
                "{fermi}: {sampled} {exact}"
            );
        }
    }
}
