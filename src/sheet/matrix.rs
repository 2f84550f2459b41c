//! A Hamiltonian as a file that other programs read.

use super::number::exact;
use super::stamp::Stamp;
use crate::subbands::{Band, Hamiltonian};
use nalgebra_sparse::CscMatrix;
use std::fmt::Write as _;

/// The matrix of one band in the Matrix Market format, what it is in comments.
#[must_use]
pub fn matrix_market(matrix: &Hamiltonian, band: Band, stamp: &Stamp) -> String {
    let levels = if band == Band::Electron {
        "its lowest eigenvalues are the levels"
    } else {
        "its highest eigenvalues are the levels"
    };
    let mut comments = vec![format!(
        "{} Hamiltonian on the finest grid, eV; {levels}, before extrapolation",
        band.word()
    )];
    comments.extend(matrix.masses_at_ev.map(|energy_ev| {
        format!(
            "masses depend on energy and are taken at that of level 1, {} eV: only that level is an eigenvalue",
            exact(energy_ev)
        )
    }));
    let diagonal = matrix.diagonal.iter().enumerate();
    let below = matrix.second.iter().enumerate();
    let entries: Vec<(usize, usize, f64)> = diagonal
        .map(|(at, &value)| (at, at, value))
        .chain(below.map(|(at, &value)| (at + 1, at, value)))
        .collect();
    market(&comments, matrix.diagonal.len(), &entries, stamp)
}

/// The lower triangle of a block of the mixed valence bands in the Matrix Market format.
///
/// # Arguments
///
/// * `k_per_nm` – in-plane wave number, 1/nm
/// * `block` – the word for the block
#[must_use]
pub fn valence_matrix_market(
    matrix: &CscMatrix<f64>,
    k_per_nm: f64,
    block: &str,
    stamp: &Stamp,
) -> String {
    let comments = [
        format!(
            "{block} block on the finest grid at {} per nm in the plane, eV; its highest eigenvalues are the states, before extrapolation",
            exact(k_per_nm)
        ),
        "heavy, light and split-off holes in turn, node by node".to_owned(),
    ];
    let entries: Vec<(usize, usize, f64)> = matrix
        .triplet_iter()
        .map(|(row, column, &value)| (row, column, value))
        .collect();
    market(&comments, matrix.nrows(), &entries, stamp)
}

/// A symmetric matrix by its lower triangle: coordinate format, places counted from 1.
///
/// Source of the format: R. F. Boisvert, R. Pozo, K. A. Remington, NISTIR 5935 (1996).
fn market(
    comments: &[String],
    size: usize,
    entries: &[(usize, usize, f64)],
    stamp: &Stamp,
) -> String {
    let mut text = String::from("%%MatrixMarket matrix coordinate real symmetric\n");
    for comment in comments {
        let _ = writeln!(text, "% {comment}");
    }
    let _ = writeln!(text, "% {}", stamp.line());
    let _ = writeln!(text, "{size} {size} {}", entries.len());
    for (row, column, value) in entries {
        let _ = writeln!(text, "{} {} {}", row + 1, column + 1, exact(*value));
    }
    text
}
