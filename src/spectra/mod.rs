//! Transitions, lineshape, gain, spontaneous emission and their landmarks.

mod bulk;
mod dispersive;
pub mod landmarks;
mod lineshape;
mod staircase;

pub use bulk::Bulk;
pub use dispersive::{Dispersion, Dispersive, Sample};
pub use lineshape::Line;
pub use staircase::{Hole, Pair, Staircase};

/// Carriers in the wells, as the spectra see them. Energies with the gap shrinkage.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Occupation {
    /// Quasi-Fermi level of the electrons, eV.
    pub fermi_electron_ev: f64,
    /// Quasi-Fermi level of the holes, eV.
    pub fermi_hole_ev: f64,
    /// How far the conduction edge is lowered, eV, at least zero.
    pub lowering_ev: f64,
    /// kT, eV.
    pub thermal_ev: f64,
}

impl Occupation {
    /// F_c − F_v, eV.
    #[must_use]
    pub fn splitting_ev(&self) -> f64 {
        self.fermi_electron_ev - self.fermi_hole_ev
    }
}

/// Gain and emission at one photon energy.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Point {
    /// Gain for light polarised in the plane of the wells, cm⁻¹; negative is absorption.
    pub te_gain_cm: f64,
    /// Gain for light polarised along growth, cm⁻¹.
    pub tm_gain_cm: f64,
    /// Spontaneous emission into all directions, per eV, cm³ of wells and second.
    pub spontaneous_per_ev_cm3_s: f64,
}

/// Anything that absorbs and emits: the staircase of single bands, or mixed bands.
pub trait Emitter: std::fmt::Debug + Send + Sync {
    /// Gain and emission at a photon energy, cm⁻¹ and per eV, cm³ and s.
    fn point(&self, occupation: &Occupation, photon_ev: f64) -> Point;

    /// The same at `count` even photon energies from `low_ev` on.
    fn sample(
        &self,
        occupation: &Occupation,
        low_ev: f64,
        step_ev: f64,
        count: usize,
    ) -> Vec<Point> {
        (0..count)
            .map(|at| self.point(occupation, low_ev + at as f64 * step_ev))
            .collect()
    }

    /// Absorption (TE, TM) without carriers at `count` even photon energies, cm⁻¹, at least zero.
    fn absorption(&self, low_ev: f64, step_ev: f64, count: usize) -> Vec<(f64, f64)>;

    /// Edges of the transitions without shrinkage, rising, eV.
    fn edges_ev(&self) -> &[f64];

    /// The line that gain uses.
    fn line(&self) -> Line;

    /// The line that emission uses at kT in eV.
    fn emission_line(&self, thermal_ev: f64) -> Line {
        self.line().for_emission(thermal_ev)
    }

    /// Total spontaneous rate of an infinitely sharp line, per cm³ and s.
    fn sharp_rate_per_cm3_s(&self, occupation: &Occupation) -> f64;
}

/// Spontaneous emission per eV, cm³ and s that goes with a mean gain of 1 cm⁻¹ at full inversion:
/// n² E² / (π² ħ³ c²), the density of optical modes times their speed.
///
/// Source: W. van Roosbroeck, W. Shockley, Phys. Rev. 94, 1558 (1954); G. Lasher, F. Stern,
/// Phys. Rev. 133, A553 (1964).
#[must_use]
pub fn modes_per_ev_cm2_s(photon_ev: f64, refractive_index: f64) -> f64 {
    let speed_cm_s = 100.0 * crate::units::LIGHT_SPEED_M_S;
    let ratio = refractive_index * photon_ev / (std::f64::consts::PI * speed_cm_s);
    ratio * ratio / crate::units::HBAR_EV_S.powi(3)
}
