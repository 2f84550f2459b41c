//! The blocks on a grid.

use super::{Projection, ZoneCentre};
use crate::numerics::block::{BlockChain, BlockRun, Three};
use crate::profile::{Cells, Profile, Strained};
use crate::subbands::Nodes;
use crate::units::HBAR2_OVER_2M0_EV_NM2;

/// One grid with what a block needs of it.
pub(super) struct Grid {
    pub(super) cells: Vec<Cells>,
    pub(super) nodes: Nodes,
    /// Hole energy below which no state may lie: the highest hole edge, upside down.
    pub(super) floor: f64,
    /// Share of every node's length inside wells and steps.
    in_wells: Vec<f64>,
}

impl Grid {
    pub(super) fn new(profile: &Profile<'_>, cells: Vec<Cells>) -> Self {
        let highest = cells
            .iter()
            .map(|cell| cell.numbers.edges.heavy_ev.max(cell.numbers.edges.light_ev) + cell.tilt_ev)
            .fold(f64::NEG_INFINITY, f64::max);
        let nodes = Nodes::of(profile, &cells);
        let inside: Vec<f64> = cells
            .iter()
            .flat_map(|cell| {
                let counts = profile.sections[cell.section].in_wells;
                std::iter::repeat_n(if counts { cell.length_nm } else { 0.0 }, cell.intervals)
            })
            .collect();
        let in_wells = inside
            .windows(2)
            .zip(&nodes.weights_nm)
            .map(|(pair, weight)| 0.5 * (pair[0] + pair[1]) / weight)
            .collect();
        Self {
            cells,
            nodes,
            floor: -highest - 1e-9,
            in_wells,
        }
    }

    /// A chain for this grid, its forms still to be set.
    pub(super) fn chain(&self) -> BlockChain {
        let empty: Three = [[0.0; 3]; 3];
        let runs = self
            .cells
            .iter()
            .map(|cell| BlockRun {
                intervals: cell.intervals,
                length: cell.length_nm,
                lower: empty,
                upper: empty,
                coupling: empty,
            })
            .collect();
        BlockChain::new(runs)
    }

    /// Sets the forms of a block at an in-plane wave number.
    pub(super) fn set(&self, chain: &mut BlockChain, k_per_nm: f64, sign: f64) {
        for (run, cell) in chain.runs_mut().iter_mut().zip(&self.cells) {
            *run = BlockRun {
                intervals: cell.intervals,
                ..interval(&cell.numbers, cell.tilt_ev, cell.length_nm, k_per_nm, sign)
            };
        }
    }

    /// Shares of a valence vector; energy and error are left at zero.
    pub(super) fn shares(&self, vector: &[f64]) -> ZoneCentre {
        let mut parts = [0.0; 3];
        let mut in_wells = 0.0;
        for ((values, weight), inside) in vector
            .chunks_exact(3)
            .zip(&self.nodes.weights_nm)
            .zip(&self.in_wells)
        {
            let mut here = 0.0;
            for (part, value) in parts.iter_mut().zip(values) {
                *part += weight * value * value;
                here += weight * value * value;
            }
            in_wells += inside * here;
        }
        let [heavy, light, split_off] = parts;
        ZoneCentre {
            energy_ev: 0.0,
            heavy,
            light,
            split_off,
            error_ev: 0.0,
            in_wells,
            near_edge: false,
        }
    }

    /// Heavy, light and split-off overlaps of an electron envelope with a valence vector.
    pub(super) fn projection(&self, electron: &[f64], vector: &[f64]) -> Projection {
        let mut sums = [0.0; 3];
        for ((value, weight), parts) in electron
            .iter()
            .zip(&self.nodes.weights_nm)
            .zip(vector.chunks_exact(3))
        {
            let scaled = value * weight;
            for (sum, part) in sums.iter_mut().zip(parts) {
                *sum += scaled * part;
            }
        }
        Projection {
            heavy: sums[0],
            light: sums[1],
            split_off: sums[2],
        }
    }
}

/// The forms of one interval of uniform material, upside down: hole energies count upwards.
///
/// # Arguments
///
/// * `numbers` – material and edges of the interval
/// * `tilt_ev` – potential energy of an electron in a field at its middle, eV
/// * `length_nm` – its length, nm
/// * `k_per_nm` – in-plane wave number, 1/nm
/// * `sign` – +1 or −1, which of the two blocks
#[must_use]
pub fn interval(
    numbers: &Strained,
    tilt_ev: f64,
    length_nm: f64,
    k_per_nm: f64,
    sign: f64,
) -> BlockRun {
    use std::f64::consts::SQRT_2;
    const SQRT_3: f64 = 1.732_050_807_568_877_2;
    const SQRT_6: f64 = 2.449_489_742_783_178;
    let (k, s) = (k_per_nm, sign);
    let unit = HBAR2_OVER_2M0_EV_NM2;
    let [g1, g2, g3] = numbers.crystal.luttinger;
    let axial = 0.5 * (g2 + g3);
    let minus = -(g1 - 2.0 * g2) - 1.0;
    let plus = -6.0 * g3 - minus;
    let edges = &numbers.edges;
    let mean = edges.valence_mean_ev + tilt_ev;
    let (shear, k2) = (edges.shear_ev, k * k);
    let spike = s * k / 3.0 * (plus - minus) * unit;
    let mixing = s * k / (3.0 * SQRT_2) * unit;
    // (row, column, c0, c2, cp, cm, cd)
    let entries = [
        (
            0,
            0,
            mean - shear - unit * (g1 + g2) * k2,
            unit * (g1 - 2.0 * g2),
            0.0,
            0.0,
            0.0,
        ),
        (
            1,
            1,
            mean + shear - unit * (g1 - g2) * k2,
            unit * (g1 + 2.0 * g2),
            0.0,
            0.0,
            -spike,
        ),
        (
            2,
            2,
            mean - numbers.crystal.split_off_ev - unit * g1 * k2,
            unit * g1,
            0.0,
            0.0,
            spike,
        ),
        (
            0,
            1,
            -s * SQRT_3 * axial * k2 * unit,
            0.0,
            k / SQRT_3 * plus * unit,
            k / SQRT_3 * minus * unit,
            0.0,
        ),
        (
            0,
            2,
            s * SQRT_6 * axial * k2 * unit,
            0.0,
            k / SQRT_6 * plus * unit,
            k / SQRT_6 * minus * unit,
            0.0,
        ),
        (
            1,
            2,
            SQRT_2 * (shear + unit * g2 * k2),
            2.0 * SQRT_2 * g2 * unit,
            mixing * (plus + 2.0 * minus),
            mixing * (2.0 * plus + minus),
            0.0,
        ),
    ];
    let dz = length_nm;
    let empty: Three = [[0.0; 3]; 3];
    let mut run = BlockRun {
        intervals: 1,
        length: dz,
        lower: empty,
        upper: empty,
        coupling: empty,
    };
    for (a, b, c0, c2, cp, cm, cd) in entries {
        let even = 0.5 * c0 * dz - c2 / dz;
        let odd = 0.5 * (cp - cm) - cd;
        let slope = 0.5 * (cp + cm);
        run.lower[a][b] = -(even - odd);
        run.upper[a][b] = -(even + odd);
        run.coupling[a][b] = -(c2 / dz + slope);
        if a != b {
            run.lower[b][a] = run.lower[a][b];
            run.upper[b][a] = run.upper[a][b];
            run.coupling[b][a] = -(c2 / dz - slope);
        }
    }
    run
}
