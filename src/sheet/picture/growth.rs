//! The two panels over the carrier density.

use super::{line_key, word_key};
use crate::evaluation::{GainPeak, Spectrum};
use crate::sheet::figure::{Axis, Curve, Dash, Ink, Key, Mark, Naming, Panel, Place, Rule};
use crate::sheet::number::{significant, typeset};

const HEIGHT_PX: f64 = 220.0;
const TE_INK: Ink = Ink::Colour(0);
const TM_INK: Ink = Ink::Colour(1);
/// Points of the logarithmic law.
const LAW_POINTS: usize = 60;

/// Peak gain against density with the logarithmic law.
pub(super) fn peak_panel(spectrum: &Spectrum) -> Panel {
    let te = spectrum.runs.iter().map(|run| run.te);
    let tm = spectrum.runs.iter().map(|run| run.tm);
    let (te_mark, tm_mark) = (Mark::Disc, Mark::Diamond);
    let mark_key = |name: &str, ink: Ink, mark: Mark| Key {
        name: name.to_owned(),
        ink,
        mark: Some(mark),
        ..Key::default()
    };
    let mut panel = Panel {
        title: "Peak gain".to_owned(),
        plot_height_px: HEIGHT_PX,
        x: density_axis(spectrum),
        y: Axis {
            heavy_zero: true,
            includes: Some(0.0),
            ..Axis::new("peak gain", "cm⁻¹")
        },
        curves: vec![
            peaks(spectrum, te, TE_INK, te_mark),
            peaks(spectrum, tm, TM_INK, tm_mark),
        ],
        keys: vec![
            mark_key("TE", TE_INK, te_mark),
            mark_key("TM", TM_INK, tm_mark),
        ],
        ..Panel::default()
    };
    if let Some((polarisation, fit)) = spectrum.fit {
        let last_cm3 = spectrum.runs.last().map_or(0.0, |run| run.density_cm3);
        let ratio = last_cm3 / fit.transparency_cm3;
        let law = (0..=LAW_POINTS).map(|step| {
            let along = step as f64 / LAW_POINTS as f64;
            let log_ratio = along * ratio.ln();
            (
                fit.transparency_cm3 * log_ratio.exp(),
                fit.g0_cm * log_ratio,
            )
        });
        panel.curves.push(Curve {
            dash: Dash::Long,
            width_px: 1.2,
            naming: Naming::Nowhere,
            ..Curve::through("", law)
        });
        let law_name = format!("g₀ ln(N/Nₜᵣ), {polarisation}");
        panel.keys.push(line_key(law_name, Ink::Black, Dash::Long));
        panel
            .keys
            .push(word_key(format!("g₀ = {} cm⁻¹", significant(fit.g0_cm, 4))));
        panel.keys.push(word_key(format!(
            "Nₜᵣ = {} cm⁻³",
            typeset(fit.transparency_cm3, 4)
        )));
    }
    if let Some(transparency) = spectrum.transparency {
        panel.rules.push(Rule {
            at: Place::X(transparency.density_cm3),
            name: "transparency".to_owned(),
            ink: Ink::Grey,
            dash: Dash::Dotted,
            width_px: 1.4,
        });
    }
    panel
}

/// Marks at the peaks of one polarisation.
fn peaks(
    spectrum: &Spectrum,
    peaks: impl Iterator<Item = Option<GainPeak>>,
    ink: Ink,
    mark: Mark,
) -> Curve {
    let densities = spectrum.runs.iter().map(|run| run.density_cm3);
    Curve {
        ink,
        width_px: 0.0,
        mark: Some(mark),
        naming: Naming::Nowhere,
        points: densities
            .zip(peaks.map(|peak| peak.map(|it| it.gain_cm)))
            .collect(),
        ..Curve::default()
    }
}

/// Radiative current of all wells against density.
pub(super) fn current_panel(spectrum: &Spectrum) -> Panel {
    let currents = spectrum.runs.iter().map(|run| {
        let current = run.spontaneous.map(|it| it.current_a_cm2);
        (run.density_cm3, current)
    });
    Panel {
        title: "Radiative current of all wells".to_owned(),
        plot_height_px: HEIGHT_PX,
        x: density_axis(spectrum),
        y: Axis {
            includes: Some(0.0),
            ..Axis::new("radiative current", "A cm⁻²")
        },
        curves: vec![Curve {
            mark: Some(Mark::Disc),
            width_px: 1.2,
            naming: Naming::Nowhere,
            points: currents.collect(),
            ..Curve::default()
        }],
        ..Panel::default()
    }
}

/// The densities asked for, and transparency where it lies near them.
fn density_axis(spectrum: &Spectrum) -> Axis {
    /// Transparency further off than this ratio would press the densities together.
    const NEAR: f64 = 4.0;
    let axis = Axis::new("carrier density", "cm⁻³").logarithmic();
    let (Some(first), Some(last)) = (spectrum.runs.first(), spectrum.runs.last()) else {
        return axis;
    };
    let (mut from, mut to) = (first.density_cm3, last.density_cm3);
    let transparency = spectrum.transparency.map(|it| it.density_cm3);
    let of_fit = spectrum.fit.map(|(_, fit)| fit.transparency_cm3);
    for density_cm3 in transparency.into_iter().chain(of_fit) {
        if (from / NEAR..to * NEAR).contains(&density_cm3) {
            (from, to) = (from.min(density_cm3), to.max(density_cm3));
        }
    }
    axis.over(from / 1.12, to * 1.12)
}
