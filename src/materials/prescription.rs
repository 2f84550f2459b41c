//! Compositions asked for by what they must have: a gap, a strain, or both.

use super::{Composition, Elements, Parameters};

/// Why no single composition was found.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum SolveError {
    /// Nothing yet.
    #[error("{0}")]
    Unreachable(String),
}

/// The composition of these elements that has a strained gap and an in-plane strain at 300 K.
///
/// # Errors
///
/// See [`SolveError`].
pub fn solve_composition(
    parameters: &Parameters,
    elements: &Elements,
    substrate_lattice_nm: f64,
    gap_nm: Option<f64>,
    in_plane_strain: Option<f64>,
) -> Result<Composition, SolveError> {
    let _ = (parameters, substrate_lattice_nm, gap_nm, in_plane_strain);
    Err(SolveError::Unreachable(elements.to_string()))
}
