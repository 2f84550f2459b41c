//! The first transition as an arrow from its hole level to its electron level.

use super::bundle::Bundle;
use crate::evaluation::Evaluation;
use crate::sheet::number::fixed;

/// Where electrons and holes meet this well or better, compared with the best place, the arrow may
/// stand.
const NEARLY_BEST: f64 = 0.9;

/// The first transition in the picture.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Arrow {
    /// Where it stands: where electron and hole are found together, nm above the substrate.
    pub(super) position_nm: f64,
    pub(super) hole_ev: f64,
    pub(super) electron_ev: f64,
    /// The levels, the energy and the wavelength.
    pub(super) text: String,
}

/// The arrow of the first transition.
pub(super) fn first_transition<'b>(
    evaluation: &Evaluation<'_>,
    electrons: &'b [Bundle],
    holes: &'b [Bundle],
) -> Option<Arrow> {
    let first = evaluation.transitions.first()?;
    let electron_ev = evaluation
        .bands
        .electron
        .get(first.electron.checked_sub(1)?)?
        .energy_ev;
    let hole_ev = electron_ev - first.energy_ev;
    let density = |bundles: &'b [Bundle], energy_ev: f64| -> Option<&'b [f64]> {
        bundles
            .iter()
            .find_map(|bundle| bundle.density_of(energy_ev))
    };
    Some(Arrow {
        position_nm: meeting_place_nm(
            evaluation,
            density(electrons, electron_ev),
            density(holes, hole_ev),
        ),
        hole_ev,
        electron_ev,
        text: format!(
            "e{}–{}: {} eV, {} nm",
            first.electron,
            first.hole,
            fixed(first.energy_ev, 4),
            fixed(first.wavelength_nm, 1)
        ),
    })
}

/// Where the product of two densities is (nearly) largest, next to the middle of the wells.
fn meeting_place_nm(
    evaluation: &Evaluation<'_>,
    electron: Option<&[f64]>,
    hole: Option<&[f64]>,
) -> f64 {
    let at = |density: Option<&[f64]>, node: usize| {
        density
            .and_then(|density| density.get(node).copied())
            .unwrap_or(1.0)
    };
    let centre_nm = evaluation.profile.centre_nm;
    let positions = evaluation.bands.nodes.positions_nm.iter().enumerate();
    let together: Vec<(f64, f64)> = positions
        .map(|(node, &position_nm)| (position_nm, at(electron, node) * at(hole, node)))
        .collect();
    let best = together.iter().map(|place| place.1).fold(0.0, f64::max);
    together
        .iter()
        .filter(|place| place.1 >= NEARLY_BEST * best)
        .map(|place| place.0)
        .min_by(|a, b| (a - centre_nm).abs().total_cmp(&(b - centre_nm).abs()))
        .unwrap_or(centre_nm)
}
