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
    /// What mixing of the valence bands adds (zero where heavy and light holes are taken each by
    /// itself, or the first hole is heavy).
    pub mixing_ev: f64,
    /// The first transition: the sum of all others.
    pub transition_ev: f64,
}

impl Budget {
    /// The terms in the order in which they add up, with their names.
    #[must_use]
    pub fn terms(&self) -> [(&'static str, f64); 6] {
        [
            ("gap of the well material, unstrained", self.bulk_gap_ev),
            ("strain", self.strain_ev),
            ("wells that differ from each other", self.between_wells_ev),
            ("confinement of the electron", self.electron_ev),
            ("confinement of the hole", self.hole_ev),
            ("mixing of the valence bands", self.mixing_ev),
        ]
    }
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
        mixing_ev: first - pair.energy_ev(),
        transition_ev: first,
    })
}
