//! Gain and emission between the parabolic bands of a bulk crystal: the square root of the
//! three-dimensional density of states, rounded by the line.

use super::{Emitter, Line, Occupation, Point, modes_per_ev_cm2_s};
use crate::carriers::bulk::{BulkBand, BulkBands, transparency_cm3};
use crate::materials::{Crystal, Edges};
use crate::numerics::fermi::occupation;
use crate::numerics::quadrature::panels;
use crate::structure::Lineshape;
use crate::units::{FINE_STRUCTURE, HBAR2_OVER_2M0_EV_NM2};

/// A bulk crystal that absorbs and emits.
///
/// # Equation
///
/// With x = E − E_g of a hole band, c = ħ²/2m₀, α the fine-structure constant:
///
/// ```text
///  a(E)    = Σ_h (2/3) α (E_p/(n E)) m_r √(m_r/c) s(x) ,   s(x) = ∫₀^∞ √x′ L(x − x′) dx′
///  gain(E) = a(E) [f_c(E_e) − f_v(E_h)] ,   E_e = E_c + (m_r/m_e) x ,   E_h = E_e − E
///  r_sp(E) = (n² E² / π² ħ³ c²) a f_c (1 − f_v)
/// ```
///
/// It is the staircase with the joint density of states (1/2π²)(2 m_r/ħ²)^{3/2} √x in place of
/// m_r/(π ħ² L_z), and a polarisation factor of 1 for TE and TM. Gain is zero exactly at the
/// quasi-Fermi splitting, whatever the line. Hole masses are spherical means,
///
/// ```text
///  m_h = 1/(γ1 ∓ 2 γ_s) ,   γ_s = (2 γ2 + 3 γ3)/5
/// ```
///
/// Without strain heavy and light holes share one edge. Under strain each has its own; masses and
/// polarisation factors stay those of the average over all directions.
///
/// # References
///
/// A. Baldereschi, N. O. Lipari, Phys. Rev. B 8, 2697 (1973) (spherical masses); G. Lasher,
/// F. Stern, Phys. Rev. 133, A553 (1964).
#[derive(Clone, Debug)]
pub struct Bulk {
    /// Gaps to the two hole bands, the narrower first, eV.
    edges_ev: [f64; 2],
    conduction_ev: f64,
    electron_mass: f64,
    /// Mass and edge (eV) of the heavy and the light hole.
    holes: [(f64, f64); 2],
    line: Line,
    refractive_index: f64,
    /// (2/3) α E_p / (n √c), in √eV/cm per mass to the power 3/2.
    strength: f64,
}

/// Heavy and light hole mass of the spherical means.
fn spherical_masses(luttinger: [f64; 3]) -> [f64; 2] {
    let [first, second, third] = luttinger;
    let mean = (2.0 * second + 3.0 * third) / 5.0;
    [-2.0, 2.0].map(|sign| (first + sign * mean).recip())
}

impl Bulk {
    /// The unstrained crystal with its line.
    #[must_use]
    pub fn new(crystal: &Crystal, refractive_index: f64, line: Line) -> Self {
        let valence_ev = crystal.valence_edge_ev;
        let edges_ev = [valence_ev + crystal.gap_ev, valence_ev, valence_ev];
        Self::with_edges(crystal, edges_ev, refractive_index, line)
    }

    /// The crystal strained on a substrate: heavy and light holes each on its edge.
    #[must_use]
    pub fn strained(crystal: &Crystal, edges: &Edges, refractive_index: f64, line: Line) -> Self {
        let edges_ev = [edges.conduction_ev, edges.heavy_ev, edges.light_ev];
        Self::with_edges(crystal, edges_ev, refractive_index, line)
    }

    fn with_edges(
        crystal: &Crystal,
        [conduction_ev, heavy_ev, light_ev]: [f64; 3],
        refractive_index: f64,
        line: Line,
    ) -> Self {
        let [heavy, light] = spherical_masses(crystal.luttinger);
        let mut edges_ev = [heavy_ev, light_ev].map(|edge| conduction_ev - edge);
        edges_ev.sort_by(f64::total_cmp);
        Self {
            edges_ev,
            conduction_ev,
            electron_mass: crystal.electron_mass,
            holes: [(heavy, heavy_ev), (light, light_ev)],
            line,
            refractive_index,
            strength: 2.0 / 3.0 * FINE_STRUCTURE * crystal.kane_energy_ev
                / (refractive_index * HBAR2_OVER_2M0_EV_NM2.sqrt())
                * 1e7,
        }
    }

    /// The gap, eV.
    #[must_use]
    pub fn gap_ev(&self) -> f64 {
        self.edges_ev[0]
    }

    /// The same crystal with the line of infinite lifetime, or another.
    #[must_use]
    pub fn with_line(&self, line: Line) -> Self {
        Self {
            line,
            ..self.clone()
        }
    }

    /// The conduction band.
    #[must_use]
    pub fn electrons(&self) -> BulkBands {
        BulkBands::of_one_edge(&[self.electron_mass])
    }

    /// Heavy and light holes.
    #[must_use]
    pub fn holes(&self) -> BulkBands {
        let top_ev = self.conduction_ev - self.gap_ev();
        let band = |(mass, edge_ev): (f64, f64)| BulkBand {
            mass,
            edge_ev: top_ev - edge_ev,
        };
        BulkBands(self.holes.map(band).to_vec())
    }

    /// The carriers at a density of pairs, with the gap lowered by `lowering_ev`.
    #[must_use]
    pub fn occupation(&self, density_cm3: f64, lowering_ev: f64, thermal_ev: f64) -> Occupation {
        let electrons = self.electrons().fermi_ev(density_cm3, thermal_ev);
        let holes = self.holes().fermi_ev(density_cm3, thermal_ev);
        Occupation {
            fermi_electron_ev: self.conduction_ev - lowering_ev + electrons,
            fermi_hole_ev: self.conduction_ev - self.gap_ev() - holes,
            lowering_ev,
            thermal_ev,
        }
    }

    /// The density at which the quasi-Fermi splitting equals the gap, cm⁻³, at kT in eV.
    #[must_use]
    pub fn transparency_cm3(&self, thermal_ev: f64) -> f64 {
        transparency_cm3(&self.electrons(), &self.holes(), thermal_ev)
    }

    /// Reduced mass and gap (eV) with each hole.
    fn pairs(&self) -> [(f64, f64); 2] {
        self.holes.map(|(hole, edge_ev)| {
            let reduced = self.electron_mass * hole / (self.electron_mass + hole);
            (reduced, self.conduction_ev - edge_ev)
        })
    }

    /// Σ_h over f_c (1 − f_v), or over f_v (1 − f_c), of the strength at a photon energy, cm⁻¹.
    fn strength_cm(&self, o: &Occupation, photon_ev: f64, line: &Line, absorbs: bool) -> f64 {
        self.pairs()
            .iter()
            .map(|&(reduced, gap_ev)| {
                let x = photon_ev - (gap_ev - o.lowering_ev);
                let electron =
                    self.conduction_ev - o.lowering_ev + reduced / self.electron_mass * x;
                let above_electron = (electron - o.fermi_electron_ev) / o.thermal_ev;
                let above_hole = (electron - photon_ev - o.fermi_hole_ev) / o.thermal_ev;
                let filled = if absorbs {
                    occupation(above_hole) * occupation(-above_electron)
                } else {
                    occupation(above_electron) * occupation(-above_hole)
                };
                reduced.powf(1.5) * filled * rounded_root(line, x)
            })
            .sum::<f64>()
            * self.strength
            / photon_ev
    }
}

impl Emitter for Bulk {
    fn point(&self, occupation: &Occupation, photon_ev: f64) -> Point {
        let above = (photon_ev - occupation.splitting_ev()) / occupation.thermal_ev;
        // As for the staircase: without overflow, and exactly zero at the splitting.
        let (absorbs, inversion) = if above > 0.0 {
            (true, (-above).exp_m1())
        } else {
            (false, -above.exp_m1())
        };
        let gain_cm = self.strength_cm(occupation, photon_ev, &self.line, absorbs) * inversion;
        let line = self.emission_line(occupation.thermal_ev);
        Point {
            te_gain_cm: gain_cm,
            tm_gain_cm: gain_cm,
            spontaneous_per_ev_cm3_s: modes_per_ev_cm2_s(photon_ev, self.refractive_index)
                * self.strength_cm(occupation, photon_ev, &line, false),
        }
    }

    fn absorption(&self, low_ev: f64, step_ev: f64, count: usize) -> Vec<(f64, f64)> {
        (0..count)
            .map(|at| {
                let photon_ev = low_ev + at as f64 * step_ev;
                let states: f64 = self
                    .pairs()
                    .iter()
                    .map(|(mass, gap)| mass.powf(1.5) * rounded_root(&self.line, photon_ev - gap))
                    .sum();
                let absorbed_cm = self.strength / photon_ev * states;
                (absorbed_cm, absorbed_cm)
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
        let edge = self.gap_ev() - o.lowering_ev;
        let top = (o.splitting_ev() - edge).max(0.0) + 40.0 * o.thermal_ev;
        let sharp = Line {
            half_width_ev: 0.0,
            ..self.line
        };
        // In u = √x the square root is smooth; where a second band begins it has a corner.
        let widest = o.thermal_ev.sqrt();
        let second = (self.edges_ev[1] - self.edges_ev[0]).sqrt();
        let mut ends = vec![0.0, top.sqrt()];
        if second > 0.0 && second < ends[1] {
            ends.insert(1, second);
        }
        panels(&ends, widest)
            .iter()
            .map(|&(u, weight)| {
                let photon = edge + u * u;
                2.0 * u
                    * weight
                    * modes_per_ev_cm2_s(photon, self.refractive_index)
                    * self.strength_cm(o, photon, &sharp, false)
            })
            .sum()
    }
}

/// s(x) = ∫₀^∞ √x′ L(x − x′) dx′, √eV: the square root that the line rounds, √x for a sharp line.
///
/// The Lorentzian has the closed form Re √(x + iΓ) (the harmonic function with these boundary
/// values). For the others x′ = u² makes the integrand even and smooth on the whole line, where the
/// trapezoidal rule converges exponentially, at a step that follows the nearest pole of the sech.
/// Error below 1e-11 of the value at the edge.
fn rounded_root(line: &Line, x_ev: f64) -> f64 {
    use std::f64::consts::PI;
    /// The line is nothing beyond this many times its scale.
    const REACH: f64 = 40.0;
    let scale = line.scale_ev();
    if scale <= 0.0 {
        return x_ev.max(0.0).sqrt();
    }
    let x = x_ev / scale;
    if line.shape == Lineshape::Lorentzian {
        let modulus = x.hypot(1.0);
        let part = if x > 0.0 {
            0.5 * (modulus + x)
        } else {
            0.5 / (modulus - x)
        };
        return (scale * part).sqrt();
    }
    if x < -700.0 {
        return 0.0;
    }
    let pole = (0.5 * (x.hypot(0.5 * PI) - x)).sqrt();
    let step = (2.0 * PI * pole / 30.0).min(0.15);
    // Far below the edge the tail that falls from u = 0 outwards is all there is.
    let first = (x - REACH).max(0.0).sqrt();
    let last = (x.max(0.0) + REACH).sqrt();
    let mut index = (first / step).floor().max(0.0);
    let mut sum = 0.0;
    while index * step <= last {
        let u = index * step;
        // 2 u² du on the half line; u = 0 contributes nothing.
        sum += u * u * line.density_per_ev(scale * (x - u * u));
        index += 1.0;
    }
    2.0 * step * sum * scale * scale.sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units::thermal_ev;

    const SHAPES: [Lineshape; 3] = [Lineshape::Sech, Lineshape::Gaussian, Lineshape::Lorentzian];

    fn crystal() -> Crystal {
        Crystal {
            lattice_nm: 0.56,
            gap_ev: 1.4,
            gap_x_ev: f64::INFINITY,
            gap_l_ev: f64::INFINITY,
            valence_edge_ev: -0.8,
            split_off_ev: 0.34,
            electron_mass: 0.067,
            luttinger: [6.98, 2.06, 2.93],
            kane_energy_ev: 28.8,
            ac_ev: -7.0,
            av_ev: 1.2,
            b_ev: -2.0,
            c11_gpa: 120.0,
            c12_gpa: 55.0,
        }
    }

    fn bulk(shape: Lineshape, intraband_fs: f64) -> Bulk {
        Bulk::new(&crystal(), 3.6, Line::new(shape, intraband_fs))
    }

    /// ∫ √x′ L dx′ by panels in √x′, to a far end with the tail added in closed form.
    fn by_panels(line: &Line, x: f64) -> f64 {
        let scale = line.scale_ev();
        let far = 4e4 * scale;
        let inner: f64 = panels(&[0.0, far.sqrt()], 0.05 * scale.sqrt())
            .iter()
            .map(|&(u, w)| 2.0 * w * u * u * line.density_per_ev(x - u * u))
            .sum();
        // Beyond, a Lorentzian is (Γ/π) x′^−2 (1 + 2x/x′ + …): its tail with √x′ is elementary.
        let tail = match line.shape {
            Lineshape::Lorentzian => {
                scale / std::f64::consts::PI * (2.0 / far.sqrt() + 4.0 / 3.0 * x / far.powf(1.5))
            }
            Lineshape::Sech | Lineshape::Gaussian => 0.0,
        };
        inner + tail
    }

    #[test]
    fn the_rounded_root_is_the_convolution() {
        for shape in SHAPES {
            let line = Line::new(shape, 100.0);
            for x in [-0.05, -0.01, 0.0, 0.004, 0.03, 0.3] {
                let (got, want) = (rounded_root(&line, x), by_panels(&line, x));
                assert!(
                    (got - want).abs() < 1e-9 * want + 1e-12,
                    "{shape:?} at {x}: {got} {want}"
                );
            }
        }
    }

    #[test]
    fn a_sharp_line_leaves_the_square_root() {
        for shape in SHAPES {
            let line = Line::new(shape, 1e6);
            assert!((rounded_root(&line, 0.09) - 0.3).abs() < 1e-9, "{shape:?}");
            assert!(rounded_root(&line, -0.09) < 1e-5);
        }
        let none = Line {
            shape: Lineshape::Sech,
            half_width_ev: 0.0,
        };
        assert!((rounded_root(&none, 0.25) - 0.5).abs() < 1e-15);
    }

    /// Wells so many that their steps lie dense are the bulk: the sum over k_z of steps of height
    /// m_r/(π ħ² L) is the square root. The strength agrees with that of the staircase.
    #[test]
    fn dense_stairs_make_the_bulk() {
        use crate::spectra::{Hole, Pair, Staircase};
        let line = Line::new(Lineshape::Gaussian, 200.0);
        let crystal = crystal();
        let length_nm = 3000.0;
        let [heavy, light] = spherical_masses(crystal.luttinger);
        let mut pairs = Vec::new();
        for (kind, mass) in [(Hole::Heavy, heavy), (Hole::Light, light)] {
            for n in 1..1500 {
                let k = std::f64::consts::PI * f64::from(n) / length_nm;
                let energy = |m: f64| HBAR2_OVER_2M0_EV_NM2 * k * k / m;
                pairs.push(Pair {
                    electron: 0,
                    kind,
                    hole: 0,
                    electron_ev: crystal.valence_edge_ev
                        + crystal.gap_ev
                        + energy(crystal.electron_mass),
                    hole_ev: crystal.valence_edge_ev - energy(mass),
                    electron_mass: crystal.electron_mass,
                    hole_mass: mass,
                    overlap: 1.0,
                    confinement_ev: 0.0,
                });
            }
        }
        let stairs = Staircase::new(pairs, crystal.kane_energy_ev, length_nm, 3.6, line);
        let bulk = Bulk::new(&crystal, 3.6, line);
        let photon = 1.47;
        let (te, tm) = stairs.absorption(photon, 1e-3, 1)[0];
        let (want, _) = bulk.absorption(photon, 1e-3, 1)[0];
        let mean = (2.0 * te + tm) / 3.0;
        assert!((mean / want - 1.0).abs() < 5e-3, "{mean} {want}");
    }

    #[test]
    fn gain_ends_at_the_splitting_and_emission_obeys_detailed_balance() {
        let kt = thermal_ev(300.0);
        for shape in SHAPES {
            let bulk = bulk(shape, 100.0);
            let occupation = bulk.occupation(4e18, 0.03, kt);
            let splitting = occupation.splitting_ev();
            assert!(bulk.point(&occupation, splitting).te_gain_cm.abs() < f64::MIN_POSITIVE);
            let emitting = bulk.with_line(bulk.emission_line(kt));
            let mut seen = 0;
            for step in 0..60 {
                let photon = 1.33 + 0.005 * f64::from(step);
                let point = bulk.point(&occupation, photon);
                assert_eq!(
                    point.te_gain_cm > 0.0,
                    photon < splitting,
                    "{shape:?} {photon}"
                );
                let emitted = emitting.point(&occupation, photon);
                let balance = emitted.spontaneous_per_ev_cm3_s / modes_per_ev_cm2_s(photon, 3.6)
                    * -((photon - splitting) / kt).exp_m1();
                assert!(
                    (balance - emitted.te_gain_cm).abs() < 1e-9 * emitted.te_gain_cm.abs(),
                    "{shape:?} {photon}"
                );
                seen += i32::from(point.te_gain_cm > 0.0);
            }
            assert!(seen > 5);
        }
    }

    /// At the transparency density the splitting is the gap, and a broadened rate is the sharp one
    /// where kT is many line widths.
    #[test]
    fn transparency_and_total_rate() {
        let kt = thermal_ev(300.0);
        let bulk = bulk(Lineshape::Gaussian, 1000.0);
        let density = bulk.transparency_cm3(kt);
        let occupation = bulk.occupation(density, 0.02, kt);
        let edge = bulk.gap_ev() - 0.02;
        assert!((occupation.splitting_ev() - edge).abs() < 1e-9);
        let broad = crate::spectra::landmarks::View::new(&bulk, &occupation)
            .expect("a transition")
            .total_rate_per_cm3_s();
        let sharp = bulk.sharp_rate_per_cm3_s(&occupation);
        assert!((broad / sharp - 1.0).abs() < 1e-3, "{broad} {sharp}");
    }
}
