//! Gain and emission between parabolic subbands: the staircase, rounded by the line.

use super::{Emitter, Line, Occupation, Point, modes_per_ev_cm2_s};
use crate::numerics::fermi::occupation;
use crate::numerics::quadrature::panels;
use crate::units::FINE_STRUCTURE;

/// The kind of a hole.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Hole {
    /// Heavy.
    Heavy,
    /// Light.
    Light,
}

/// One pair of an electron and a hole level.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pair {
    /// Index of the electron level, from 0.
    pub electron: usize,
    /// Kind of the hole.
    pub kind: Hole,
    /// Index of the hole level within its kind, from 0.
    pub hole: usize,
    /// Electron level, eV.
    pub electron_ev: f64,
    /// Hole level, eV.
    pub hole_ev: f64,
    /// In-plane mass of the electron.
    pub electron_mass: f64,
    /// In-plane mass of the hole.
    pub hole_mass: f64,
    /// |<electron|hole>|².
    pub overlap: f64,
    /// Confinement energy of both: distance of the levels from the edges of the wells, eV.
    pub confinement_ev: f64,
}

impl Pair {
    /// Edge of the transition, eV.
    #[must_use]
    pub fn energy_ev(&self) -> f64 {
        self.electron_ev - self.hole_ev
    }

    /// Reduced in-plane mass.
    #[must_use]
    pub fn reduced_mass(&self) -> f64 {
        self.electron_mass * self.hole_mass / (self.electron_mass + self.hole_mass)
    }

    /// Polarisation factors (TE, TM) of the two-dimensional dipole at a kinetic energy in the plane.
    ///
    /// ```text
    ///  heavy  TE ¾ (1 + c²)      TM 3/2 (1 − c²)          c² = confinement / (confinement + kinetic)
    ///  light  TE 5/4 − ¾ c²      TM ½ (1 + 3 c²)
    /// ```
    ///
    /// In units of M_b² = m₀ E_p / 6; 2 TE + TM = 3 always.
    ///
    /// # Reference
    ///
    /// R. H. Yan, S. W. Corzine, L. A. Coldren, I. Suemune, IEEE J. Quantum Electron. 26, 213 (1990).
    #[must_use]
    pub fn polarisation(&self, kinetic_ev: f64) -> (f64, f64) {
        let kinetic = kinetic_ev.max(0.0);
        let total = self.confinement_ev + kinetic;
        let cosine2 = if total > 0.0 {
            self.confinement_ev / total
        } else {
            1.0
        };
        match self.kind {
            Hole::Heavy => (0.75 * (1.0 + cosine2), 1.5 * (1.0 - cosine2)),
            Hole::Light => (1.25 - 0.75 * cosine2, 0.5 * (1.0 + 3.0 * cosine2)),
        }
    }
}

/// All pairs of a set of wells.
///
/// # Equation
///
/// ```text
///  a(E)    = Σ C(E) |I|² P(E) (m_r / π ħ² L_z) M_b² S(E − E_ij) ,   C = π q² ħ / (n c ε₀ m₀² E) ,   M_b² = m₀ E_p/6
///  gain(E) = a(E) [f_c(E_e) − f_v(E_h)] ,   E_e = E_i + (m_r/m_i)(E − E_ij) ,   E_h = E_e − E
///  r_sp(E) = (n² E² / π² ħ³ c²) (2 TE + TM)/3 of a f_c (1 − f_v)
/// ```
///
/// The prefactor is (2/3) π α (E_p/E) m_r/(n L_z) with α the fine-structure constant. The line rounds
/// the density of states only; the inversion factor is evaluated from f_c (1 − f_v) and the one
/// common factor 1 − exp((E − ΔF)/kT), so that gain is zero exactly at the quasi-Fermi splitting.
///
/// # Reference
///
/// M. G. A. Bernard, G. Duraffourg, Phys. Status Solidi 1, 699 (1961).
#[derive(Clone, Debug)]
pub struct Staircase {
    pairs: Vec<Pair>,
    edges_ev: Vec<f64>,
    line: Line,
    refractive_index: f64,
    /// (2/3) π α E_p / (n L_z), eV/cm per unit of reduced mass.
    strength_ev_cm: f64,
}

/// Pairs with an overlap below this contribute nothing that could be seen.
const LEAST_OVERLAP: f64 = 1e-10;

impl Staircase {
    /// The emitter of `pairs`.
    ///
    /// # Arguments
    ///
    /// * `kane_energy_ev` – E_p of the wells, eV
    /// * `well_thickness_nm` – L_z, the thickness of all wells, nm
    /// * `refractive_index` – of the wells
    #[must_use]
    pub fn new(
        pairs: Vec<Pair>,
        kane_energy_ev: f64,
        well_thickness_nm: f64,
        refractive_index: f64,
        line: Line,
    ) -> Self {
        let pairs: Vec<Pair> = pairs
            .into_iter()
            .filter(|pair| pair.overlap > LEAST_OVERLAP)
            .collect();
        let mut edges_ev: Vec<f64> = pairs.iter().map(Pair::energy_ev).collect();
        edges_ev.sort_by(f64::total_cmp);
        let strength_ev_cm = 2.0 / 3.0 * std::f64::consts::PI * FINE_STRUCTURE * kane_energy_ev
            / (refractive_index * well_thickness_nm * 1e-7);
        Self {
            pairs,
            edges_ev,
            line,
            refractive_index,
            strength_ev_cm,
        }
    }

    /// Emission strengths Σ a f_c (1 − f_v) of (TE, TM) with the gain's line, then with the
    /// emission's; above the splitting those of absorption, Σ a f_v (1 − f_c), for the first.
    fn strengths(&self, o: &Occupation, photon_ev: f64) -> [(f64, f64); 2] {
        let absorbs = photon_ev > o.splitting_ev();
        let emission_line = self.emission_line(o.thermal_ev);
        let one_line = emission_line == self.line;
        let mut sums = [(0.0, 0.0); 2];
        for pair in &self.pairs {
            let edge = pair.energy_ev() - o.lowering_ev;
            let x = photon_ev - edge;
            let reduced = pair.reduced_mass();
            let electron = pair.electron_ev - o.lowering_ev + reduced / pair.electron_mass * x;
            let above_electron = (electron - o.fermi_electron_ev) / o.thermal_ev;
            let above_hole = (electron - photon_ev - o.fermi_hole_ev) / o.thermal_ev;
            // f_c (1 − f_v), and f_v (1 − f_c).
            let emits = occupation(above_electron) * occupation(-above_hole);
            let (te, tm) = pair.polarisation(x);
            let dipole = reduced * pair.overlap;
            let mut add = |index: usize, line: &Line, filled: f64| {
                let amount = dipole * line.step(x) * filled;
                sums[index].0 += amount * te;
                sums[index].1 += amount * tm;
            };
            if absorbs {
                let takes = occupation(above_hole) * occupation(-above_electron);
                add(0, &self.line, takes);
                add(1, &emission_line, emits);
            } else if one_line {
                add(0, &self.line, emits);
            } else {
                add(0, &self.line, emits);
                add(1, &emission_line, emits);
            }
        }
        if one_line && !absorbs {
            sums[1] = sums[0];
        }
        let factor = self.strength_ev_cm / photon_ev;
        sums.map(|(te, tm)| (factor * te, factor * tm))
    }
}

impl Emitter for Staircase {
    fn point(&self, occupation: &Occupation, photon_ev: f64) -> Point {
        let [(te, tm), (emits_te, emits_tm)] = self.strengths(occupation, photon_ev);
        let above = (photon_ev - occupation.splitting_ev()) / occupation.thermal_ev;
        // 1 − exp(x) below the splitting, exp(−x) − 1 above it, where the strengths are those of
        // absorption: both without overflow and exactly zero at the splitting.
        let inversion = if above > 0.0 {
            (-above).exp_m1()
        } else {
            -above.exp_m1()
        };
        Point {
            te_gain_cm: te * inversion,
            tm_gain_cm: tm * inversion,
            spontaneous_per_ev_cm3_s: modes_per_ev_cm2_s(photon_ev, self.refractive_index)
                * (2.0 * emits_te + emits_tm)
                / 3.0,
        }
    }

    fn absorption(&self, low_ev: f64, step_ev: f64, count: usize) -> Vec<(f64, f64)> {
        (0..count)
            .map(|at| {
                let photon_ev = low_ev + at as f64 * step_ev;
                let mut sums = (0.0, 0.0);
                for pair in &self.pairs {
                    let x = photon_ev - pair.energy_ev();
                    let (te, tm) = pair.polarisation(x);
                    let amount = pair.reduced_mass() * pair.overlap * self.line.step(x);
                    sums.0 += amount * te;
                    sums.1 += amount * tm;
                }
                let factor = self.strength_ev_cm / photon_ev;
                (factor * sums.0, factor * sums.1)
            })
            .collect()
    }

    fn edges_ev(&self) -> &[f64] {
        &self.edges_ev
    }

    fn line(&self) -> Line {
        self.line
    }

    fn sharp_rate_per_cm3_s(&self, o: &Occupation) -> f64 {
        self.pairs
            .iter()
            .map(|pair| {
                let edge = pair.energy_ev() - o.lowering_ev;
                let reduced = pair.reduced_mass();
                let top = (o.splitting_ev() - edge).max(0.0) + 40.0 * o.thermal_ev;
                panels(&[0.0, top], 2.0 * o.thermal_ev)
                    .iter()
                    .map(|&(x, weight)| {
                        let electron =
                            pair.electron_ev - o.lowering_ev + reduced / pair.electron_mass * x;
                        let photon = edge + x;
                        let hole = electron - photon;
                        let emits = occupation((electron - o.fermi_electron_ev) / o.thermal_ev)
                            * occupation((o.fermi_hole_ev - hole) / o.thermal_ev);
                        // (2 TE + TM)/3 = 1 whatever the polarisation factors.
                        weight * emits * self.strength_ev_cm / photon
                            * reduced
                            * pair.overlap
                            * modes_per_ev_cm2_s(photon, self.refractive_index)
                    })
                    .sum::<f64>()
            })
            .sum()
    }
}
