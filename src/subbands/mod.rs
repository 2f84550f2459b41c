//! Levels and envelopes of the wells.

mod mixed;
mod single;

pub use mixed::{
    Dipole, LARGEST_WAVE_NUMBER_PER_NM, MixedBands, Slice, ZoneCentre, interval, mixed,
    valence_hamiltonian,
};
pub use single::{Band, Hamiltonian, Level, Overlaps, SingleBands, hamiltonian, single};

use crate::profile::{Cells, Profile};

/// Levels of nearly identical wells come in clusters closer than this, eV: the members are
/// orthogonal, but only sums over a cluster mean anything.
pub const CLUSTER_EV: f64 = 3e-4;
/// Levels nearer than this to the edge that confines them are marked, eV.
pub const NEAR_EDGE_EV: f64 = 3e-3;
/// Longest interval of the coarsest grid, nm.
const COARSEST_STEP_NM: f64 = 0.5;
/// Every level is refined until its own estimate of its error is below this, eV.
const WANTED_ERROR_EV: f64 = 1e-6;
/// Grids are refined until in-plane masses are corrected by less than this, relatively.
const LARGEST_MASS_CORRECTION: f64 = 1e-3;
/// Grids are not refined beyond 2^−MOST_HALVINGS of the coarsest step.
const MOST_HALVINGS: u32 = 5;

/// Why no levels came out.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[error("{band} level {level}{} could not be certified by node counts", near(*.energy_ev))]
pub struct Uncertified {
    /// Which band.
    pub band: &'static str,
    /// Number of the level from the band edge.
    pub level: usize,
    /// Where it was looked for, eV; not a number where the search lost its way.
    pub energy_ev: f64,
}

fn near(energy_ev: f64) -> String {
    if energy_ev.is_finite() {
        format!(" near {energy_ev:.6} eV")
    } else {
        String::new()
    }
}

/// The inner nodes of the finest grid.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Nodes {
    /// Position above the substrate, nm.
    pub positions_nm: Vec<f64>,
    /// Length that belongs to each node, nm: ∫ f dz = Σ weight f.
    pub weights_nm: Vec<f64>,
}

impl Nodes {
    fn of(profile: &Profile<'_>, cells: &[Cells]) -> Self {
        let (low, _) = profile.walls_nm();
        let lengths: Vec<f64> = cells
            .iter()
            .flat_map(|cell| std::iter::repeat_n(cell.length_nm, cell.intervals))
            .collect();
        let mut position = low;
        let positions_nm = lengths[..lengths.len() - 1]
            .iter()
            .map(|length| {
                position += length;
                position
            })
            .collect();
        let weights_nm = lengths
            .windows(2)
            .map(|pair| 0.5 * (pair[0] + pair[1]))
            .collect();
        Self {
            positions_nm,
            weights_nm,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::Uncertified;

    #[test]
    fn an_energy_is_said_where_there_is_one() {
        let said = |energy_ev| {
            let band = "valence in-plane";
            let level = 1;
            Uncertified {
                band,
                level,
                energy_ev,
            }
            .to_string()
        };
        assert!(said(-0.25).contains("level 1 near -0.250000 eV could"));
        assert!(said(f64::NAN).contains("level 1 could"));
        assert!(said(f64::INFINITY).contains("level 1 could"));
    }
}
