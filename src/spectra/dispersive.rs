//! Gain and emission between electron parabolas and mixed valence bands: a sum over the in-plane
//! wave number.

#![expect(
    clippy::inline_always,
    reason = "only what is inlined is compiled for the vectors of the caller"
)]

use std::f64::consts::PI;

use pulp::{Arch, NullaryFnOnce};

use super::{Emitter, Line, Occupation, Point, modes_per_ev_cm2_s};
use crate::numerics::fermi::occupation;
use crate::structure::Lineshape;
use crate::units::{FINE_STRUCTURE, HBAR2_OVER_2M0_EV_NM2};

/// One sample of a pair of an electron level and a valence state at one in-plane wave number.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Sample {
    /// Electron energy without shrinkage, eV.
    pub electron_ev: f64,
    /// Valence energy, eV.
    pub hole_ev: f64,
    /// (ħ²/2m₀) k dk |M_TE|²/M_b², eV: the TE strength times the share of states.
    pub te: f64,
    /// The same for TM.
    pub tm: f64,
}

/// Every pair over the wave number.
///
/// # Equation
///
/// ```text
///  g(E) = C(E)/L_z Σ ∫ k dk/2π |M|² Line(x) [f_c(E_c + x/2) − f_v(E_v − x/2)] ,   x = E − E_cv(k)
/// ```
///
/// Each block counts once and the electron spins are inside |M|². The energy off the line is shared
/// half and half, so that the two Fermi arguments always differ by E: gain is zero exactly at the
/// quasi-Fermi splitting whatever the line, and detailed balance holds.
///
/// # Method
///
/// On even photon energies every exponential of a sample is a geometric series: no exponential is
/// evaluated inside the loop, and eight energies are carried at once.
#[derive(Clone, Debug)]
pub struct Dispersive {
    samples: Vec<Sample>,
    edges_ev: Vec<f64>,
    line: Line,
    refractive_index: f64,
    /// (2/3) π α E_p / (n L_z), eV/cm per unit of reduced mass.
    strength_ev_cm: f64,
    /// Highest transition energy that the wave numbers reach, eV.
    reach_ev: f64,
}

const LANES: usize = 8;
type Lanes = [f64; LANES];
/// Occupation exponentials are held below this, so that their products stay finite.
const LARGE: f64 = 1e150;

impl Dispersive {
    /// The emitter of `samples`.
    ///
    /// # Arguments
    ///
    /// * `edges_ev` – lowest transition energies of the pairs, eV
    /// * `reach_ev` – highest transition energy that the samples cover, eV
    /// * `kane_energy_ev`, `well_thickness_nm`, `refractive_index` – of all wells
    #[must_use]
    pub fn new(
        samples: Vec<Sample>,
        mut edges_ev: Vec<f64>,
        reach_ev: f64,
        kane_energy_ev: f64,
        well_thickness_nm: f64,
        refractive_index: f64,
        line: Line,
    ) -> Self {
        edges_ev.sort_by(f64::total_cmp);
        let strength_ev_cm = 2.0 / 3.0 * PI * FINE_STRUCTURE * kane_energy_ev
            / (refractive_index * well_thickness_nm * 1e-7);
        Self {
            samples,
            edges_ev,
            line,
            refractive_index,
            strength_ev_cm,
            reach_ev,
        }
    }

    /// Highest transition energy that the wave numbers reach, eV.
    #[must_use]
    pub fn reach_ev(&self) -> f64 {
        self.reach_ev
    }

    /// Σ w Line(x) f_c (1 − f_v) and Σ w Line(x) f_v (1 − f_c), each for TE and TM, on even photon
    /// energies.
    fn sums(&self, line: Line, o: &Occupation, low: f64, step: f64, count: usize) -> Vec<[f64; 4]> {
        let blocks = Arch::new().dispatch(Sums {
            samples: &self.samples,
            line,
            occupation: o,
            low,
            step,
            blocks: count.div_ceil(LANES),
        });
        (0..count)
            .map(|at| std::array::from_fn(|kind| blocks[at / LANES][kind][at % LANES]))
            .collect()
    }
}

/// The sums over the samples at [`LANES`] photon energies at a time, run with the widest vectors of
/// the machine: the operations, and so the results, are the same with any.
struct Sums<'a> {
    samples: &'a [Sample],
    line: Line,
    occupation: &'a Occupation,
    low: f64,
    step: f64,
    blocks: usize,
}

impl NullaryFnOnce for Sums<'_> {
    type Output = Vec<[Lanes; 4]>;

    #[inline(always)]
    fn call(self) -> Self::Output {
        match self.line.shape {
            Lineshape::Sech => self.over_samples(Sech::new),
            Lineshape::Gaussian => self.over_samples(Gaussian::new),
            Lineshape::Lorentzian => self.over_samples(Lorentzian::new),
        }
    }
}

impl Sums<'_> {
    /// # Arguments
    ///
    /// * `series` – the line from its scale, the place of the first energy and the step, eV
    #[inline(always)]
    fn over_samples<S: Series>(&self, series: impl Fn(f64, f64, f64) -> S) -> Vec<[Lanes; 4]> {
        let (o, low, step) = (self.occupation, self.low, self.step);
        let mut sums = vec![[[0.0; LANES]; 4]; self.blocks];
        let scale = self.line.scale_ev();
        // Beyond this the line is below 1e-15 of its peak; a Lorentzian never is.
        let reach = match self.line.shape {
            Lineshape::Sech => 36.0 * scale,
            Lineshape::Gaussian => 8.5 * scale,
            Lineshape::Lorentzian => f64::INFINITY,
        };
        let block_step = step * LANES as f64;
        let grow: Lanes =
            std::array::from_fn(|lane| (0.5 * lane as f64 * step / o.thermal_ev).exp());
        let grow_block = (0.5 * block_step / o.thermal_ev).exp();
        for sample in self.samples {
            let electron = sample.electron_ev - o.lowering_ev;
            let centre = electron - sample.hole_ev;
            let first = ((centre - reach - low) / block_step).max(0.0);
            let end = ((centre + reach - low) / block_step + 1.0).min(self.blocks as f64);
            if first >= end {
                continue;
            }
            let (first, end) = (first as usize, end as usize);
            let x = low + (first * LANES) as f64 * step - centre;
            let u = ((electron + 0.5 * x - o.fermi_electron_ev) / o.thermal_ev).exp();
            let v = ((o.fermi_hole_ev - sample.hole_ev + 0.5 * x) / o.thermal_ev).exp();
            let mut u = grow.map(|grow| u * grow);
            let mut v = grow.map(|grow| v * grow);
            let mut line = series(scale, x, step);
            let (te, tm) = (sample.te, sample.tm);
            for block in &mut sums[first..end] {
                let (above, below) = line.next();
                for lane in 0..LANES {
                    let (a, b) = (u[lane].min(LARGE), v[lane].min(LARGE));
                    let emits = above[lane] / (below[lane] * (1.0 + a) * (1.0 + b));
                    let takes = emits * (a * b);
                    block[0][lane] += te * emits;
                    block[1][lane] += tm * emits;
                    block[2][lane] += te * takes;
                    block[3][lane] += tm * takes;
                    u[lane] *= grow_block;
                    v[lane] *= grow_block;
                }
            }
        }
        sums
    }
}

/// The line on even energies, [`LANES`] at a time, as a numerator and a denominator.
trait Series {
    fn next(&mut self) -> (Lanes, Lanes);
}

/// exp(x/g) and its factor to the next block.
struct Sech {
    value: Lanes,
    grow: f64,
    unit: f64,
}

impl Sech {
    #[inline(always)]
    fn new(scale: f64, x: f64, step: f64) -> Self {
        let (first, step) = ((x / scale).exp(), (step / scale).exp());
        let mut value = [first; LANES];
        for lane in 1..LANES {
            value[lane] = value[lane - 1] * step;
        }
        Self {
            value,
            grow: (step * step * step * step) * (step * step * step * step),
            unit: 2.0 / (PI * scale),
        }
    }
}

impl Series for Sech {
    #[inline(always)]
    fn next(&mut self) -> (Lanes, Lanes) {
        let value = self.value;
        self.value = value.map(|y| y * self.grow);
        (value.map(|y| self.unit * y), value.map(|y| 1.0 + y * y))
    }
}

/// The line, its factor to the next block, and the factor of that.
struct Gaussian {
    value: Lanes,
    ratio: Lanes,
    grow: f64,
}

impl Gaussian {
    #[inline(always)]
    fn new(scale: f64, x: f64, step: f64) -> Self {
        let t: Lanes = std::array::from_fn(|lane| (x + lane as f64 * step) / scale);
        let step = LANES as f64 * step / scale;
        Self {
            value: t.map(|t| (-0.5 * t * t).exp() / (scale * (2.0 * PI).sqrt())),
            ratio: t.map(|t| (-step * (t + 0.5 * step)).exp()),
            grow: (-step * step).exp(),
        }
    }
}

impl Series for Gaussian {
    #[inline(always)]
    fn next(&mut self) -> (Lanes, Lanes) {
        let value = self.value;
        for lane in 0..LANES {
            self.value[lane] *= self.ratio[lane];
            self.ratio[lane] *= self.grow;
        }
        (value, [1.0; LANES])
    }
}

/// x/Γ and its step to the next block.
struct Lorentzian {
    value: Lanes,
    grow: f64,
    unit: f64,
}

impl Lorentzian {
    #[inline(always)]
    fn new(scale: f64, x: f64, step: f64) -> Self {
        Self {
            value: std::array::from_fn(|lane| (x + lane as f64 * step) / scale),
            grow: LANES as f64 * step / scale,
            unit: 1.0 / (PI * scale),
        }
    }
}

impl Series for Lorentzian {
    #[inline(always)]
    fn next(&mut self) -> (Lanes, Lanes) {
        let value = self.value;
        self.value = value.map(|t| t + self.grow);
        ([self.unit; LANES], value.map(|t| 1.0 + t * t))
    }
}

impl Emitter for Dispersive {
    fn point(&self, occupation: &Occupation, photon_ev: f64) -> Point {
        self.sample(occupation, photon_ev, 1e-4, 1)[0]
    }

    fn sample(&self, o: &Occupation, low_ev: f64, step_ev: f64, count: usize) -> Vec<Point> {
        let gain = self.sums(self.line, o, low_ev, step_ev, count);
        let emission_line = self.emission_line(o.thermal_ev);
        let emission = (emission_line != self.line)
            .then(|| self.sums(emission_line, o, low_ev, step_ev, count));
        (0..count)
            .map(|at| {
                let photon = low_ev + at as f64 * step_ev;
                let factor = self.strength_ev_cm / photon;
                let above = (photon - o.splitting_ev()) / o.thermal_ev;
                let [te, tm, taken_te, taken_tm] = gain[at];
                let (te_gain, tm_gain) = if above > 0.0 {
                    let inversion = (-above).exp_m1();
                    (taken_te * inversion, taken_tm * inversion)
                } else {
                    let inversion = -above.exp_m1();
                    (te * inversion, tm * inversion)
                };
                let emits = emission.as_ref().map_or([te, tm], |e| [e[at][0], e[at][1]]);
                Point {
                    te_gain_cm: factor * te_gain,
                    tm_gain_cm: factor * tm_gain,
                    spontaneous_per_ev_cm3_s: factor
                        * modes_per_ev_cm2_s(photon, self.refractive_index)
                        * (2.0 * emits[0] + emits[1])
                        / 3.0,
                }
            })
            .collect()
    }

    fn absorption(&self, low_ev: f64, step_ev: f64, count: usize) -> Vec<(f64, f64)> {
        // No electrons and no holes: f_v (1 − f_c) = 1.
        let empty = Occupation {
            fermi_electron_ev: f64::NEG_INFINITY,
            fermi_hole_ev: f64::INFINITY,
            lowering_ev: 0.0,
            thermal_ev: 1.0,
        };
        self.sums(self.line, &empty, low_ev, step_ev, count)
            .into_iter()
            .enumerate()
            .map(|(at, [_, _, te, tm])| {
                let factor = self.strength_ev_cm / (low_ev + at as f64 * step_ev);
                (factor * te, factor * tm)
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
        self.samples
            .iter()
            .map(|sample| {
                let electron = sample.electron_ev - o.lowering_ev;
                let photon = electron - sample.hole_ev;
                let emits = occupation((electron - o.fermi_electron_ev) / o.thermal_ev)
                    * occupation((o.fermi_hole_ev - sample.hole_ev) / o.thermal_ev);
                emits * self.strength_ev_cm / photon * (2.0 * sample.te + sample.tm) / 3.0
                    * modes_per_ev_cm2_s(photon, self.refractive_index)
            })
            .sum()
    }
}

/// Electron parabolas and one block of valence states, ready to be sampled.
#[derive(Clone, Copy, Debug)]
pub struct Dispersion<'a> {
    /// In-plane wave numbers rising from zero, 1/nm.
    pub k_per_nm: &'a [f64],
    /// Valence energies at each of them, eV.
    pub hole_ev: &'a [f64],
}

/// Cubic interpolation of values at rising nodes that never overshoots them.
///
/// # Arguments
///
/// * `interval` – between which nodes, `within` – how far up it, from 0 to 1
///
/// # Reference
///
/// F. N. Fritsch, J. Butland, SIAM J. Sci. Stat. Comput. 5, 300 (1984).
fn between(nodes: &[f64], values: &[f64], interval: usize, within: f64) -> f64 {
    let length = |at: usize| nodes[at + 1] - nodes[at];
    let secant = |at: usize| (values[at + 1] - values[at]) / length(at);
    let slope = |node: usize| {
        if node == 0 {
            return secant(0);
        }
        if node + 1 >= values.len() {
            return secant(node - 1);
        }
        let (below, above) = (secant(node - 1), secant(node));
        if below * above <= 0.0 {
            return 0.0;
        }
        let (l, r) = (length(node - 1), length(node));
        // Weighted harmonic mean of the neighbouring secants.
        3.0 * (l + r) / ((2.0 * r + l) / below + (r + 2.0 * l) / above)
    };
    let (a, b) = (values[interval], values[interval + 1]);
    let scale = length(interval);
    let (slope_a, slope_b) = (scale * slope(interval), scale * slope(interval + 1));
    let (t, r) = (within, 1.0 - within);
    a * r * r * (1.0 + 2.0 * t) + slope_a * t * r * r + b * t * t * (1.0 + 2.0 * r)
        - slope_b * t * t * r
}

/// Two-point Gauss nodes on [0, 1].
const GAUSS: [f64; 2] = [0.211_324_865_405_187_1, 0.788_675_134_594_812_9];

impl Dispersion<'_> {
    /// Visits wave numbers with their weight k dk, each interval cut until neither the valence energy
    /// nor that of the transition moves by more than it may between nodes.
    ///
    /// # Arguments
    ///
    /// * `electron_mass` – in-plane mass of the electron parabola
    /// * `transition_step_ev`, `hole_step_ev` – how far the energies may move
    /// * `visit` – called with k, the weight k dk (1/nm²), the interval and the place within it
    pub fn over_k(
        &self,
        electron_mass: f64,
        transition_step_ev: f64,
        hole_step_ev: f64,
        mut visit: impl FnMut(f64, f64, usize, f64),
    ) {
        for interval in 0..self.k_per_nm.len().saturating_sub(1) {
            let (k0, k1) = (self.k_per_nm[interval], self.k_per_nm[interval + 1]);
            let hole = (self.hole_ev[interval + 1] - self.hole_ev[interval]).abs();
            let electron = HBAR2_OVER_2M0_EV_NM2 * (k1 * k1 - k0 * k0) / electron_mass;
            let wanted = (hole / hole_step_ev).max((hole + electron) / transition_step_ev);
            let parts = wanted.ceil().clamp(1.0, 64.0);
            let width = (k1 - k0) / parts;
            let mut part = 0.0;
            while part < parts {
                for node in GAUSS {
                    let within = (part + node) / parts;
                    let k = k0 + within * (k1 - k0);
                    visit(k, 0.5 * k * width, interval, within);
                }
                part += 1.0;
            }
        }
    }

    /// The valence energy at a place of an interval, eV.
    #[must_use]
    pub fn hole_at(&self, interval: usize, within: f64) -> f64 {
        between(self.k_per_nm, self.hole_ev, interval, within)
    }

    /// Any other quantity sampled on the same wave numbers.
    #[must_use]
    pub fn at(&self, values: &[f64], interval: usize, within: f64) -> f64 {
        between(self.k_per_nm, values, interval, within)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::spectra::Point;

    fn emitter(shape: Lineshape) -> Dispersive {
        let samples = (0..300)
            .map(|index| {
                let k = (f64::from(index) + 0.5) * 2e-3;
                let kinetic = HBAR2_OVER_2M0_EV_NM2 * k * k;
                Sample {
                    electron_ev: 0.9 + kinetic / 0.05,
                    hole_ev: -kinetic / 0.15,
                    te: HBAR2_OVER_2M0_EV_NM2 * k * 2e-3 * 1.3,
                    tm: HBAR2_OVER_2M0_EV_NM2 * k * 2e-3 * 0.4,
                }
            })
            .collect();
        let line = Line::new(shape, 100.0);
        Dispersive::new(samples, vec![0.9], 1.2, 25.0, 8.0, 3.4, line)
    }

    /// The geometric series against the sum written out.
    #[test]
    fn series_agree_with_the_sum_written_out() {
        for shape in [Lineshape::Sech, Lineshape::Gaussian, Lineshape::Lorentzian] {
            for (kt, lowering) in [(0.026, 0.03), (0.002, 0.0)] {
                let emitter = emitter(shape);
                let o = Occupation {
                    fermi_electron_ev: 0.97 - lowering,
                    fermi_hole_ev: -0.01,
                    lowering_ev: lowering,
                    thermal_ev: kt,
                };
                let (low, step) = (0.82, 1.7e-3);
                let points = emitter.sample(&o, low, step, 150);
                let peak = points
                    .iter()
                    .map(|p| p.te_gain_cm.abs())
                    .fold(0.0, f64::max);
                for (at, point) in points.iter().enumerate() {
                    let photon = low + at as f64 * step;
                    let mut te = 0.0;
                    for sample in &emitter.samples {
                        let electron = sample.electron_ev - o.lowering_ev;
                        let x = photon - (electron - sample.hole_ev);
                        let fc = occupation((electron + 0.5 * x - o.fermi_electron_ev) / kt);
                        let fv = occupation((sample.hole_ev - 0.5 * x - o.fermi_hole_ev) / kt);
                        te += sample.te * emitter.line.density_per_ev(x) * (fc - fv);
                    }
                    let exact = te * emitter.strength_ev_cm / photon;
                    let miss = (point.te_gain_cm - exact).abs();
                    assert!(
                        miss < 1e-11 * peak,
                        "{shape:?} {at}: {} {exact}",
                        point.te_gain_cm
                    );
                }
            }
        }
    }

    #[test]
    fn gain_vanishes_at_the_splitting_and_nowhere_above() {
        let emitter = emitter(Lineshape::Lorentzian);
        let o = Occupation {
            fermi_electron_ev: 0.98,
            fermi_hole_ev: -0.005,
            lowering_ev: 0.0,
            thermal_ev: 0.026,
        };
        let at = |photon| -> Point { emitter.point(&o, photon) };
        assert!(at(o.splitting_ev()).te_gain_cm == 0.0);
        assert!(at(o.splitting_ev() - 1e-6).te_gain_cm > 0.0);
        assert!(at(o.splitting_ev() + 1e-6).tm_gain_cm < 0.0);
    }

    #[test]
    fn interpolation_meets_its_nodes_and_does_not_overshoot() {
        let nodes = [0.0, 1.0, 2.0, 4.0, 4.5];
        let values = [0.0, -0.1, -0.5, -0.5, -2.0];
        let between = |values: &[f64], interval, within| between(&nodes, values, interval, within);
        for interval in 0..4 {
            assert!((between(&values, interval, 0.0) - values[interval]).abs() < 1e-15);
            assert!((between(&values, interval, 1.0) - values[interval + 1]).abs() < 1e-15);
            for step in 0..=10 {
                let got = between(&values, interval, f64::from(step) / 10.0);
                assert!(got <= values[interval] + 1e-12 && got >= values[interval + 1] - 1e-12);
            }
        }
    }
}
