//! A block as a sparse matrix, for a look from outside.

use nalgebra_sparse::{CooMatrix, CscMatrix};

use super::form::Grid;
use crate::profile::Profile;
use crate::subbands::{COARSEST_STEP_NM, SingleBands};

/// The matrix W^−½ M W^−½ of a block on the finest grid that [`super::mixed`] uses: the lower triangle
/// with the diagonal, eV, unknowns node by node (heavy, light, split-off). Its eigenvalues are energies
/// of electrons, so that the states of the wells are the highest.
///
/// # Arguments
///
/// * `k_per_nm` – in-plane wave number, 1/nm
/// * `sign` – +1 or −1, which of the two blocks
#[must_use]
pub fn valence_hamiltonian(
    profile: &Profile<'_>,
    bands: &SingleBands,
    k_per_nm: f64,
    sign: f64,
) -> CscMatrix<f64> {
    let grid = Grid::new(profile, profile.grid(COARSEST_STEP_NM, bands.halvings));
    let mut chain = grid.chain();
    grid.set(&mut chain, k_per_nm, sign);
    let size = 3 * chain.nodes();
    let mut entries = CooMatrix::new(size, size);
    for (row, column, value) in chain.entries() {
        entries.push(column, row, -value);
    }
    CscMatrix::from(&entries)
}
