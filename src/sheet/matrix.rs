//! A Hamiltonian as a file that other programs read.

use super::number::exact;
use super::stamp::Stamp;
use crate::subbands::{Band, Hamiltonian};
use std::fmt::Write as _;

/// The matrix in the Matrix Market format (coordinate, real, symmetric: the lower triangle), what it
/// is in comments.
///
/// Source of the format: R. F. Boisvert, R. Pozo, K. A. Remington, NISTIR 5935 (1996).
#[must_use]
pub fn matrix_market(matrix: &Hamiltonian, band: Band, stamp: &Stamp) -> String {
    let size = matrix.diagonal.len();
    let mut text = String::from("%%MatrixMarket matrix coordinate real symmetric\n");
    let levels = if band == Band::Electron {
        "its lowest eigenvalues are the levels"
    } else {
        "its highest eigenvalues are the levels"
    };
    let _ = writeln!(
        text,
        "% {} Hamiltonian on the finest grid, eV; {levels}, before extrapolation",
        band.word()
    );
    if let Some(energy_ev) = matrix.masses_at_ev {
        let _ = writeln!(
            text,
            "% masses depend on energy and are taken at that of level 1, {} eV: only that level is an eigenvalue",
            exact(energy_ev)
        );
    }
    let _ = writeln!(text, "% {}", stamp.line());
    let _ = writeln!(text, "{size} {size} {}", size + matrix.second.len());
    for (index, entry) in matrix.diagonal.iter().enumerate() {
        let _ = writeln!(text, "{0} {0} {1}", index + 1, exact(*entry));
        if let Some(beside) = matrix.second.get(index) {
            let _ = writeln!(text, "{} {} {}", index + 2, index + 1, exact(*beside));
        }
    }
    text
}
