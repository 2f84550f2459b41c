//! What a reader wants of a spectrum: peaks, widths, totals, transparency, the logarithmic law.

use super::{Emitter, Occupation, Point};
use crate::numerics::roots::bracketed_root;

/// The highest point of a spectrum, per unit of photon energy.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Peak {
    /// Photon energy, eV.
    pub photon_ev: f64,
    /// Its height, in the unit of the spectrum.
    pub height: f64,
}

/// A spectrum sampled once over all that it emits and amplifies; every landmark starts from it.
#[derive(Debug)]
pub struct View<'a> {
    emitter: &'a dyn Emitter,
    occupation: Occupation,
    low_ev: f64,
    step_ev: f64,
    points: Vec<Point>,
}

/// A closer look at a peak divides the step by this.
const CLOSER: usize = 8;
/// No spectrum is sampled at more photon energies than this, however cold and wide.
const MOST_POINTS: f64 = 200_000.0;

impl<'a> View<'a> {
    /// Samples a spectrum from the lowest edge less 15 half widths to the highest occupied edge, or
    /// the quasi-Fermi splitting if that is higher, plus 12 kT; never further than 45 kT beyond the
    /// splitting and the lowest edge, where nothing is left. `None` if there is no transition.
    #[must_use]
    pub fn new(emitter: &'a dyn Emitter, occupation: &Occupation) -> Option<Self> {
        let edges = emitter.edges_ev();
        let lowest = edges.first()? - occupation.lowering_ev;
        let highest = edges.last()? - occupation.lowering_ev;
        let (kt, splitting) = (occupation.thermal_ev, occupation.splitting_ev());
        let width = emitter.line().half_width_ev;
        let low_ev = (lowest - 15.0 * width).max(1e-3);
        let high = (highest.max(splitting) + 12.0 * kt).min(splitting.max(lowest) + 45.0 * kt);
        let step = (0.35 * width).min(0.5 * kt);
        let intervals = ((high - low_ev) / step).ceil().clamp(8.0, MOST_POINTS);
        let step_ev = (high - low_ev) / intervals;
        let points = emitter.sample(occupation, low_ev, step_ev, intervals as usize + 1);
        Some(Self {
            emitter,
            occupation: *occupation,
            low_ev,
            step_ev,
            points,
        })
    }

    /// The highest gain below the quasi-Fermi splitting; `None` where no gain is positive.
    ///
    /// # Arguments
    ///
    /// * `polarisation` – picks the gain of a [`Point`]
    pub fn gain_peak(&self, polarisation: impl Fn(&Point) -> f64) -> Option<Peak> {
        let lowest = self.emitter.edges_ev().first()? - self.occupation.lowering_ev;
        let splitting = self.occupation.splitting_ev();
        if splitting <= self.low_ev {
            return None;
        }
        // Just above transparency all gain lies between the lowest edge and the splitting, where
        // the first look may have no point.
        let window = (splitting - lowest) / 6.0;
        let peak = if window < self.step_ev {
            let step = window.max(0.02 * self.step_ev);
            let low = (lowest - 4.0 * self.step_ev).max(self.low_ev);
            let count = ((splitting - low) / step).ceil().max(8.0);
            let step = (splitting - low) / count;
            let points = self
                .emitter
                .sample(&self.occupation, low, step, count as usize + 1);
            self.highest(low, step, &points, &polarisation)
        } else {
            // Far below the edges there is no peak, only the tail of a line.
            let tail = lowest - 4.0 * self.emitter.line().half_width_ev;
            let first = ((tail - self.low_ev) / self.step_ev).max(0.0) as usize;
            let end = ((splitting - self.low_ev) / self.step_ev).ceil() as usize + 1;
            let points = &self.points[first..end.min(self.points.len())];
            let low = self.low_ev + first as f64 * self.step_ev;
            self.highest(low, self.step_ev, points, &polarisation)
        };
        peak.or_else(|| {
            // Nothing but a tail that rises towards low energies: its value at the lowest edge.
            let photon_ev = lowest.clamp(self.low_ev, splitting);
            let height = polarisation(&self.emitter.point(&self.occupation, photon_ev));
            Some(Peak { photon_ev, height })
        })
        .filter(|peak| peak.height > 0.0)
    }

    /// The peak of spontaneous emission.
    #[must_use]
    pub fn emission_peak(&self) -> Option<Peak> {
        let emission = |point: &Point| point.spontaneous_per_ev_cm3_s;
        self.highest(self.low_ev, self.step_ev, &self.points, &emission)
    }

    /// The highest of the tops inside sampled points: the three highest are looked at more closely.
    fn highest(
        &self,
        low: f64,
        step: f64,
        points: &[Point],
        pick: &dyn Fn(&Point) -> f64,
    ) -> Option<Peak> {
        let heights: Vec<f64> = points.iter().map(pick).collect();
        // Tops are inside the range: a tail that rises towards an end is no peak.
        let mut tops: Vec<usize> = (1..heights.len().saturating_sub(1))
            .filter(|&at| heights[at - 1] <= heights[at] && heights[at + 1] < heights[at])
            .collect();
        tops.sort_by(|&a, &b| heights[b].total_cmp(&heights[a]).then(a.cmp(&b)));
        // A lower top is looked at only if a sharper peak may hide between its neighbours.
        let best = tops.first().map_or(0.0, |&at| heights[at]);
        tops.retain(|&at| heights[at] > 0.9 * best);
        tops.truncate(3);
        tops.into_iter()
            .map(|top| {
                let from = low + (top as f64 - 1.0) * step;
                let fine = step / CLOSER as f64;
                let near: Vec<f64> = self
                    .emitter
                    .sample(&self.occupation, from, fine, 2 * CLOSER + 1)
                    .iter()
                    .map(pick)
                    .collect();
                let at = (1..2 * CLOSER)
                    .max_by(|&a, &b| near[a].total_cmp(&near[b]).then(b.cmp(&a)))
                    .unwrap_or(CLOSER);
                parabola(from, fine, &near, at)
            })
            .max_by(|a, b| a.height.total_cmp(&b.height))
            .filter(|peak| peak.height > 0.0)
    }

    /// Full width at half maximum of spontaneous emission around its peak, eV.
    #[must_use]
    pub fn emission_width_ev(&self, peak: &Peak) -> f64 {
        let excess = |photon_ev: f64| {
            self.emitter
                .point(&self.occupation, photon_ev)
                .spontaneous_per_ev_cm3_s
                - 0.5 * peak.height
        };
        let height = |at: usize| self.points[at].spontaneous_per_ev_cm3_s - 0.5 * peak.height;
        let place = |at: usize| self.low_ev + at as f64 * self.step_ev;
        let centre = ((peak.photon_ev - self.low_ev) / self.step_ev).round() as usize;
        let above = (centre..self.points.len()).find(|&at| height(at) < 0.0);
        let below = (0..=centre.min(self.points.len() - 1))
            .rev()
            .find(|&at| height(at) < 0.0);
        let high = above.map_or(place(self.points.len() - 1), |at| {
            bracketed_root(
                excess,
                place(at).max(peak.photon_ev),
                place(at - 1).max(peak.photon_ev),
                1e-9,
            )
        });
        let low = below.map_or(self.low_ev, |at| {
            bracketed_root(
                excess,
                place(at).min(peak.photon_ev),
                place(at + 1).min(peak.photon_ev),
                1e-9,
            )
        });
        high - low
    }

    /// Total spontaneous rate, per cm³ of wells and second.
    ///
    /// A rounded spectrum is analytic around the real axis, as far as the poles of the line and of
    /// the occupations, and has died out at both ends: there the trapezoidal rule converges
    /// exponentially.
    #[must_use]
    pub fn total_rate_per_cm3_s(&self) -> f64 {
        let sum: f64 = self
            .points
            .iter()
            .map(|point| point.spontaneous_per_ev_cm3_s)
            .sum();
        self.step_ev * sum
    }
}

/// The top of the parabola through three even points around `at`.
fn parabola(from: f64, step: f64, heights: &[f64], at: usize) -> Peak {
    let mut peak = Peak {
        photon_ev: from + at as f64 * step,
        height: heights[at],
    };
    let (below, above) = (heights[at - 1] - heights[at], heights[at + 1] - heights[at]);
    let bend = below + above;
    if bend < 0.0 && below <= 0.0 && above <= 0.0 {
        peak.photon_ev += 0.5 * (below - above) / bend * step;
        peak.height -= 0.125 * (below - above).powi(2) / bend;
    }
    peak
}

/// The law g = g₀ ln(N/N_tr) fitted to peak gains by least squares in ln N.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LogarithmicFit {
    /// g₀, cm⁻¹.
    pub g0_cm: f64,
    /// N_tr, cm⁻³.
    pub transparency_cm3: f64,
    /// Root mean square of what the law misses, cm⁻¹.
    pub residual_cm: f64,
}

/// Fits the logarithmic law to (density in cm⁻³, peak gain in cm⁻¹); `None` for fewer than two
/// densities or a gain that does not rise.
#[must_use]
pub fn logarithmic_fit(gains: &[(f64, f64)]) -> Option<LogarithmicFit> {
    if gains.len() < 2 {
        return None;
    }
    let count = gains.len() as f64;
    let mean_x = gains.iter().map(|(density, _)| density.ln()).sum::<f64>() / count;
    let mean_y = gains.iter().map(|(_, gain)| gain).sum::<f64>() / count;
    let (mut xx, mut xy) = (0.0, 0.0);
    for (density, gain) in gains {
        let x = density.ln() - mean_x;
        xx += x * x;
        xy += x * (gain - mean_y);
    }
    let g0_cm = xy / xx;
    if !(g0_cm.is_finite() && g0_cm > 0.0) {
        return None;
    }
    let log_transparency = mean_x - mean_y / g0_cm;
    let squares: f64 = gains
        .iter()
        .map(|(density, gain)| (gain - g0_cm * (density.ln() - log_transparency)).powi(2))
        .sum();
    Some(LogarithmicFit {
        g0_cm,
        transparency_cm3: log_transparency.exp(),
        residual_cm: (squares / count).sqrt(),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_fit_returns_the_law_it_was_given() {
        let law = |density: f64| (density, 1800.0 * (density / 1.7e18).ln());
        let fit = logarithmic_fit(&[law(2e18), law(3e18), law(5e18)]).expect("a fit");
        assert!(
            (fit.g0_cm - 1800.0).abs() < 1e-6
                && (fit.transparency_cm3 / 1.7e18 - 1.0).abs() < 1e-10
        );
        assert!(fit.residual_cm < 1e-6);
        assert!(logarithmic_fit(&[law(2e18)]).is_none());
        assert!(logarithmic_fit(&[(1e18, 5.0), (2e18, 4.0)]).is_none());
    }
}
