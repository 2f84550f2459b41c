//! What a reader wants of a spectrum: peaks, widths, totals, transparency, the logarithmic law.

use super::{Emitter, Occupation, Point};
use crate::numerics::quadrature::panels;
use crate::numerics::roots::{bracketed_root, highest_peak};

/// The highest point of a spectrum, per unit of photon energy.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Peak {
    /// Photon energy, eV.
    pub photon_ev: f64,
    /// Its height, in the unit of the spectrum.
    pub height: f64,
}

/// Photon energies to which a peak is refined, eV.
const PEAK_TOLERANCE_EV: f64 = 1e-8;

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
    let (photon_ev, height) = highest_peak(
        |photon_ev| polarisation(&emitter.point(occupation, photon_ev)),
        low,
        high,
        points(low, high, step),
        PEAK_TOLERANCE_EV,
    );
    (height > 0.0).then_some(Peak { photon_ev, height })
}

/// Nodes that span a range at a step, within reason.
fn points(low: f64, high: f64, step: f64) -> usize {
    let wanted = ((high - low) / step).ceil() + 1.0;
    // The bound keeps a cold, wide spectrum from taking seconds.
    wanted.clamp(9.0, 4000.0) as usize
}

/// Range of photon energies in which a spectrum emits: the lowest edge less 15 half widths to the
/// highest occupied edge, or the quasi-Fermi splitting if that is higher, plus 12 kT.
fn emission_range(emitter: &dyn Emitter, occupation: &Occupation) -> Option<(f64, f64)> {
    let edges = emitter.edges_ev();
    let (lowest, highest) = (edges.first()?, edges.last()?);
    let line = emitter.emission_line(occupation.thermal_ev);
    let low = (lowest - occupation.lowering_ev - 15.0 * line.half_width_ev).max(1e-3);
    let high = (highest - occupation.lowering_ev).max(occupation.splitting_ev())
        + 12.0 * occupation.thermal_ev;
    Some((low, high))
}

/// The peak of spontaneous emission.
pub fn emission_peak(emitter: &dyn Emitter, occupation: &Occupation) -> Option<Peak> {
    let (low, high) = emission_range(emitter, occupation)?;
    let edges = emitter.edges_ev();
    // Beyond the splitting, or the lowest edge, emission only falls.
    let top = occupation
        .splitting_ev()
        .max(edges[0] - occupation.lowering_ev)
        + 30.0 * occupation.thermal_ev;
    let width = emitter.emission_line(occupation.thermal_ev).half_width_ev;
    let high = high.min(top.max(low + width));
    let step = (0.4 * width).min(0.5 * occupation.thermal_ev);
    let (photon_ev, height) = highest_peak(
        |photon_ev| {
            emitter
                .point(occupation, photon_ev)
                .spontaneous_per_ev_cm3_s
        },
        low,
        high,
        points(low, high, step),
        PEAK_TOLERANCE_EV,
    );
    (height > 0.0).then_some(Peak { photon_ev, height })
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
pub fn total_rate_per_cm3_s(emitter: &dyn Emitter, occupation: &Occupation) -> f64 {
    let Some((low, high)) = emission_range(emitter, occupation) else {
        return 0.0;
    };
    let kt = occupation.thermal_ev;
    let splitting = occupation.splitting_ev();
    let width = emitter.emission_line(kt).half_width_ev;
    // Features are as wide as the line or kT; edges and the splitting are where they stand.
    let fine = (1.5 * width).min(3.0 * kt);
    let mut breaks = vec![low];
    breaks.extend(
        emitter
            .edges_ev()
            .iter()
            .map(|edge| edge - occupation.lowering_ev),
    );
    breaks.push(splitting);
    breaks.push(high);
    breaks.retain(|at| (low..=high).contains(at));
    breaks.sort_by(f64::total_cmp);
    breaks.dedup_by(|a, b| (*a - *b).abs() < 0.2 * fine);
    // What lies 45 kT above the splitting and the lowest edge is empty.
    let lowest = emitter.edges_ev()[0] - occupation.lowering_ev;
    let end = (splitting.max(lowest) + 45.0 * kt).min(high);
    breaks.retain(|&at| at < end);
    breaks.push(end);
    let nodes = panels(&breaks, fine);
    let photons: Vec<f64> = nodes.iter().map(|node| node.0).collect();
    emitter
        .sample(occupation, &photons)
        .iter()
        .zip(&nodes)
        .map(|(point, node)| node.1 * point.spontaneous_per_ev_cm3_s)
        .sum()
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
