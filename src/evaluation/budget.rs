//! From the bulk gap to the first transition, term by term.

use super::Evaluation;
use crate::spectra::Hole;

/// The first transition as a sum, eV.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Budget {
    /// Gap of the unstrained well material at the working temperature.
    pub bulk_gap_ev: f64,
    /// What strain adds to the gap of the hole kind that takes part.
    pub strain_ev: f64,
    /// What the difference of the wells among each other adds (zero for wells of one material).
    pub between_wells_ev: f64,
    /// Electron level above the lowest conduction edge of the wells.
    pub electron_ev: f64,
    /// Hole level below the highest edge of its kind in the wells.
    pub hole_ev: f64,
    /// The first transition.
    pub transition_ev: f64,
}

/// The budget of the first transition. In a field the confinement terms count from the flat edges
/// and may be negative.
#[must_use]
pub fn budget(evaluation: &Evaluation<'_>) -> Option<Budget> {
    let first = evaluation.first_ev;
    let pair = evaluation
        .pairs
        .iter()
        .filter(|pair| pair.overlap > super::LEAST_OVERLAP)
        .min_by(|a, b| a.energy_ev().total_cmp(&b.energy_ev()))?;
    let hole_edge = |edges: &crate::materials::Edges| match pair.kind {
        Hole::Heavy => edges.heavy_ev,
        Hole::Light => edges.light_ev,
    };
    let wells = || {
        evaluation
            .profile
            .wells(evaluation.stack)
            .map(|(numbers, _)| numbers)
    };
    let smallest = wells().min_by(|a, b| {
        let gap = |edges| crate::materials::Edges::gap_ev(edges);
        gap(&a.edges).total_cmp(&gap(&b.edges))
    })?;
    let lowest = wells()
        .map(|numbers| numbers.edges.conduction_ev)
        .fold(f64::INFINITY, f64::min);
    let highest = wells()
        .map(|numbers| hole_edge(&numbers.edges))
        .fold(f64::NEG_INFINITY, f64::max);
    let strained = smallest.edges.conduction_ev - hole_edge(&smallest.edges);
    Some(Budget {
        bulk_gap_ev: smallest.crystal.gap_ev,
        strain_ev: strained - smallest.crystal.gap_ev,
        between_wells_ev: (lowest - highest) - strained,
        electron_ev: pair.electron_ev - lowest,
        hole_ev: highest - pair.hole_ev,
        transition_ev: first,
    })
}
