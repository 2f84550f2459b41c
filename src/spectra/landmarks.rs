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

/// The highest gain below the quasi-Fermi splitting; `None` where no gain is positive.
///
/// # Arguments
///
/// * `polarisation` – picks the gain of a [`Point`]
pub fn gain_peak(
    emitter: &dyn Emitter,
    occupation: &Occupation,
    polarisation: impl Fn(&Point) -> f64,
) -> Option<Peak> {
    let lowest = emitter.edges_ev().first()? - occupation.lowering_ev;
    let width = emitter.line().half_width_ev;
    let low = (lowest - 12.0 * width).max(1e-3);
    let high = occupation.splitting_ev();
    if high <= low {
        return None;
    }
    // Just above transparency all gain lies between the lowest edge and the splitting.
    let window = (high - lowest).max(0.1 * width);
    let step = (0.4 * width).min(occupation.thermal_ev).min(window / 6.0);
    highest(emitter, occupation, &polarisation, (low, high), step).or_else(|| {
        // Nothing but a tail that rises towards low energies: its value at the lowest edge.
        let photon_ev = lowest.clamp(low, high);
        let height = polarisation(&emitter.point(occupation, photon_ev));
        (height > 0.0).then_some(Peak { photon_ev, height })
    })
}

/// The highest point of a spectrum in a range: a first look at a step, then closer looks around
/// the three highest points of it.
fn highest(
    emitter: &dyn Emitter,
    occupation: &Occupation,
    pick: impl Fn(&Point) -> f64,
    (low, high): (f64, f64),
    step: f64,
) -> Option<Peak> {
    /// A closer look divides the step by this.
    const CLOSER: usize = 12;

    let look = |low: f64, step: f64, count: usize| -> Vec<f64> {
        emitter
            .sample(occupation, low, step, count)
            .iter()
            .map(&pick)
            .collect()
    };
    // The bound keeps a cold, wide spectrum from taking seconds.
    let count = (((high - low) / step).ceil() + 1.0).clamp(9.0, 4000.0) as usize;
    let step = (high - low) / (count - 1) as f64;
    let heights = look(low, step, count);
    // Tops are inside the range: a tail that rises towards an end is no peak.
    let mut tops: Vec<usize> = (1..count - 1)
        .filter(|&at| heights[at - 1] <= heights[at] && heights[at + 1] < heights[at])
        .collect();
    tops.sort_by(|&a, &b| heights[b].total_cmp(&heights[a]).then(a.cmp(&b)));
    // A lower top is looked at only if a sharper peak may hide between its neighbours.
    let best = tops.first().map_or(0.0, |&at| heights[at]);
    tops.retain(|&at| heights[at] > 0.8 * best);
    tops.truncate(3);
    let refined = tops.into_iter().map(|top| {
        let (mut centre, mut step) = (low + top as f64 * step, step);
        let mut peak = Peak {
            photon_ev: centre,
            height: heights[top],
        };
        for _ in 0..3 {
            let from = (centre - step).max(low);
            let to = (centre + step).min(high);
            let fine = (to - from) / (2 * CLOSER) as f64;
            let near = look(from, fine, 2 * CLOSER + 1);
            let at = (0..near.len())
                .max_by(|&a, &b| near[a].total_cmp(&near[b]).then(b.cmp(&a)))
                .unwrap_or(CLOSER);
            centre = from + at as f64 * fine;
            peak = Peak {
                photon_ev: centre,
                height: near[at],
            };
            if at > 0 && at + 1 < near.len() {
                // The parabola through three points.
                let (below, above) = (near[at - 1] - near[at], near[at + 1] - near[at]);
                let bend = below + above;
                if bend < 0.0 {
                    let shift = 0.5 * (below - above) / bend;
                    peak.photon_ev += shift * fine;
                    peak.height -= 0.125 * (below - above).powi(2) / bend;
                }
            }
            step = fine;
        }
        peak
    });
    refined
        .max_by(|a, b| a.height.total_cmp(&b.height))
        .filter(|peak| peak.height > 0.0)
}

/// Range of photon energies in which a spectrum emits: the lowest edge less 15 half widths to the
/// highest occupied edge, or the quasi-Fermi splitting if that is higher, plus 12 kT; never further
/// than 45 kT beyond the splitting and the lowest edge, where nothing is left.
fn emission_range(emitter: &dyn Emitter, occupation: &Occupation) -> Option<(f64, f64)> {
    let edges = emitter.edges_ev();
    let lowest = edges.first()? - occupation.lowering_ev;
    let highest = edges.last()? - occupation.lowering_ev;
    let kt = occupation.thermal_ev;
    let line = emitter.emission_line(kt);
    let low = (lowest - 15.0 * line.half_width_ev).max(1e-3);
    let splitting = occupation.splitting_ev();
    let high = highest.max(splitting) + 12.0 * kt;
    Some((low, high.min(splitting.max(lowest) + 45.0 * kt)))
}

/// The peak of spontaneous emission.
pub fn emission_peak(emitter: &dyn Emitter, occupation: &Occupation) -> Option<Peak> {
    let range = emission_range(emitter, occupation)?;
    let width = emitter.emission_line(occupation.thermal_ev).half_width_ev;
    let step = (0.4 * width).min(0.5 * occupation.thermal_ev);
    highest(
        emitter,
        occupation,
        |point| point.spontaneous_per_ev_cm3_s,
        range,
        step,
    )
}

/// Full width at half maximum of spontaneous emission around its peak, eV.
pub fn emission_width_ev(emitter: &dyn Emitter, occupation: &Occupation, peak: &Peak) -> f64 {
    let excess = |photon_ev: f64| {
        emitter
            .point(occupation, photon_ev)
            .spontaneous_per_ev_cm3_s
            - 0.5 * peak.height
    };
    let width = emitter.emission_line(occupation.thermal_ev).half_width_ev;
    let step = (0.25 * width).min(0.25 * occupation.thermal_ev);
    let crossing = |direction: f64| {
        let mut inside = peak.photon_ev;
        for _ in 0..100_000 {
            let outside = (inside + direction * step).max(1e-4);
            if excess(outside) < 0.0 {
                return bracketed_root(excess, inside, outside, 1e-9);
            }
            inside = outside;
        }
        inside
    };
    crossing(1.0) - crossing(-1.0)
}

/// Total spontaneous rate, per cm³ of wells and second.
///
/// A rounded spectrum is analytic around the real axis, as far as the poles of the line and of the
/// occupations, and has died out at both ends: there the trapezoidal rule converges exponentially.
pub fn total_rate_per_cm3_s(emitter: &dyn Emitter, occupation: &Occupation) -> f64 {
    let Some((low, high)) = emission_range(emitter, occupation) else {
        return 0.0;
    };
    let width = emitter.emission_line(occupation.thermal_ev).half_width_ev;
    let step = (0.35 * width).min(0.7 * occupation.thermal_ev);
    let count = ((high - low) / step).ceil().clamp(2.0, 200_000.0) as usize;
    let step = (high - low) / count as f64;
    let points = emitter.sample(occupation, low, step, count + 1);
    step * points
        .iter()
        .map(|point| point.spontaneous_per_ev_cm3_s)
        .sum::<f64>()
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
