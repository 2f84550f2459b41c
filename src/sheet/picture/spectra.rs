//! Gain and spontaneous emission against photon energy, and what grows with the density.

use super::gain::{emission_panel, gain_panel};
use super::growth::{current_panel, peak_panel};
use super::short_stamp;
use crate::evaluation::{Evaluation, Run, Spectrum};
use crate::sheet::figure::{Figure, Ink, Joint, Row};
use crate::sheet::number::{fixed, plain, typeset};
use crate::sheet::stamp::Stamp;

/// Gain and spontaneous emission at every density over one axis of photon energy; below them peak
/// gain and radiative current against density.
#[must_use]
pub fn spectrum_figure(evaluation: &Evaluation<'_>, spectrum: &Spectrum, stamp: &Stamp) -> Figure {
    let densities = Densities::of(&spectrum.runs);
    Figure {
        title: format!("{}: gain and emission", evaluation.stack.title),
        caption: caption(evaluation),
        stamp: short_stamp(stamp),
        description: description(spectrum),
        rows: vec![
            Row {
                panels: vec![gain_panel(spectrum, &densities)],
                joint: Joint::SharedAxis,
            },
            Row {
                panels: vec![emission_panel(spectrum, &densities)],
                joint: Joint::Apart,
            },
            Row {
                panels: vec![peak_panel(spectrum), current_panel(spectrum)],
                joint: Joint::Apart,
            },
        ],
    }
}

fn caption(evaluation: &Evaluation<'_>) -> String {
    let shrinkage = if evaluation.stack.model.shrinkage_mev > 0.0 {
        "with gap shrinkage (absorption without carriers, and the photoluminescence peak, without)"
    } else {
        "without gap shrinkage"
    };
    format!(
        "Gain of the well material, not yet times a confinement factor, {shrinkage}. Negative gain is \
         absorption; rings mark the quasi-Fermi splitting, below which a density gives gain.",
    )
}

fn description(spectrum: &Spectrum) -> String {
    let of_run = |run: &Run| {
        let density = typeset(run.density_cm3, 3);
        run.te.map_or_else(
            || format!("no gain at {density} cm⁻³"),
            |peak| {
                format!(
                    "TE gain {} cm⁻¹ at {} nm for {density} cm⁻³",
                    fixed(peak.gain_cm, 0),
                    fixed(peak.peak_nm, 1)
                )
            },
        )
    };
    let runs: Vec<String> = spectrum.runs.iter().map(of_run).collect();
    format!("Peaks by density: {}.", runs.join("; "))
}

/// How the densities are written, and their inks.
pub(super) struct Densities {
    count: usize,
    /// Whether they are written in units of 10¹⁸ cm⁻³, the scale of lasers.
    in_1e18: bool,
}

impl Densities {
    fn of(runs: &[Run]) -> Self {
        let near_1e18 = |run: &Run| (1e17..1e20).contains(&run.density_cm3);
        Self {
            count: runs.len(),
            in_1e18: runs.iter().all(near_1e18),
        }
    }

    /// What stands before the densities in a legend.
    pub(super) fn head(&self) -> &'static str {
        if self.in_1e18 {
            "density in 10¹⁸ cm⁻³:"
        } else {
            "density in cm⁻³:"
        }
    }

    pub(super) fn written(&self, density_cm3: f64) -> String {
        if self.in_1e18 {
            // As many digits as anybody asks for; 1e18 times a decimal is not exact.
            plain((density_cm3 / 1e14).round() / 1e4)
        } else {
            typeset(density_cm3, 3)
        }
    }

    pub(super) fn ink(&self, step: usize) -> Ink {
        Ink::Ramp {
            step,
            of: self.count,
        }
    }
}
