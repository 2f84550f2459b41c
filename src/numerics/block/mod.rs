//! The lowest eigenvalues of a chain of three coupled functions, certified by inertia.
//!
//! # Matrix
//!
//! Three functions stand on the same nodes of a chain of intervals between hard walls. Interval by
//! interval a symmetric form is assembled: `lower` and `upper` (3×3, symmetric) act on the values at
//! its two ends, `coupling` (3×3, row the lower end) between them. With W the lengths that belong to
//! the nodes, M u = ε W u is symmetric and block tridiagonal.
//!
//! # Method
//!
//! Block L D Lᵀ of M − ε W,
//!
//! ```text
//!  S_i = D_i − ε w_i − B_{i−1}ᵀ S_{i−1}⁻¹ B_{i−1}
//! ```
//!
//! gives the inertia (the number of eigenvalues below ε is the number of negative eigenvalues of all
//! S_i) and one step of inverse iteration. [`LANES`] shifts are carried at once: one lane a state.
//! With (M − ε W) u = W u_old, p = uᵀ W u_old, N = uᵀ W u and n = u_oldᵀ W u_old, the Rayleigh
//! quotient of u is ε + p/N and its residual √((n − p²/N)/N): both come free.
//!
//! From nothing, levels are isolated by inertia ([`BlockChain::lowest`]); from problem to neighbouring
//! problem they are followed ([`Trail`]).
//!
//! # Reference
//!
//! B. N. Parlett, The Symmetric Eigenvalue Problem (1980), chapters 3 and 4.

mod kernel;
mod mend;
mod neighbours;
mod search;
#[cfg(test)]
mod tests;
mod trail;

pub use trail::{Hold, Trail};

use kernel::{Columns, Inverse, Step, over_nodes};

/// Shifts that one sweep carries.
pub const LANES: usize = 8;
type Lanes = [f64; LANES];
/// A symmetric or general 3×3 matrix.
pub type Three = [[f64; 3]; 3];

/// Levels closer than this are spanned together.
const CLUSTER: f64 = 1e-7;

/// Equal intervals in a row.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BlockRun {
    /// Number of intervals, at least one.
    pub intervals: usize,
    /// Length of each.
    pub length: f64,
    /// Form at the lower end.
    pub lower: Three,
    /// Form at the upper end.
    pub upper: Three,
    /// Form between the ends: row the lower end, column the upper.
    pub coupling: Three,
}

/// Eigenvalues with their vectors.
#[derive(Clone, Debug, Default)]
pub struct Ladder {
    /// The eigenvalues, rising.
    pub energies: Vec<f64>,
    /// Three values a node, node by node, from the lower wall up, with Σ w u² = 1.
    pub vectors: Vec<Vec<f64>>,
}

/// What went wrong in a search for eigenvalues.
#[derive(Clone, Copy, Debug, PartialEq, thiserror::Error)]
#[error("level {level} near {energy} could not be certified")]
pub struct Uncertified {
    /// Number of the level, from 1.
    pub level: usize,
    /// Where it was looked for.
    pub energy: f64,
}

/// A chain of coupled functions with its workspace.
#[derive(Clone, Debug)]
pub struct BlockChain {
    runs: Vec<BlockRun>,
    nodes: usize,
    /// S⁻¹ of every node.
    inverse: Vec<Inverse>,
}

impl BlockChain {
    /// A chain of `runs`, from the lower wall to the upper.
    ///
    /// # Panics
    ///
    /// If there are fewer than two intervals.
    #[must_use]
    pub fn new(runs: Vec<BlockRun>) -> Self {
        let intervals: usize = runs.iter().map(|run| run.intervals).sum();
        assert!(intervals >= 2, "a node stands between two intervals");
        let nodes = intervals - 1;
        Self {
            runs,
            nodes,
            inverse: vec![[[0.0; LANES]; 6]; nodes],
        }
    }

    /// The runs, to be overwritten with those of another problem on the same intervals.
    pub fn runs_mut(&mut self) -> &mut [BlockRun] {
        &mut self.runs
    }

    /// Number of inner nodes; the matrix is three times as large.
    #[must_use]
    pub fn nodes(&self) -> usize {
        self.nodes
    }

    /// The symmetric matrix W^−½ M W^−½ as (row, column, value), upper triangle with the diagonal,
    /// unknowns node by node.
    #[must_use]
    pub fn entries(&self) -> Vec<(usize, usize, f64)> {
        let mut entries = Vec::new();
        let mut weights = Vec::with_capacity(self.nodes);
        over_nodes(&self.runs, |_, here| weights.push(here.weight));
        over_nodes(&self.runs, |node, here| {
            for a in 0..3 {
                for b in a..3 {
                    let value = here.diagonal[a][b] / here.weight;
                    entries.push((3 * node + a, 3 * node + b, value));
                }
            }
            if let Some(next) = weights.get(node + 1) {
                let scale = (here.weight * next).sqrt();
                for (a, row) in here.to_next.iter().enumerate() {
                    for (b, value) in row.iter().enumerate() {
                        entries.push((3 * node + a, 3 * node + 3 + b, value / scale));
                    }
                }
            }
        });
        entries.retain(|entry| entry.2 != 0.0);
        entries
    }

    /// Numbers of eigenvalues below [`LANES`] energies.
    #[must_use]
    pub fn counts_below(&self, energies: &Lanes) -> [usize; LANES] {
        kernel::counts(&self.runs, energies)
    }

    /// Number of eigenvalues below one energy.
    #[must_use]
    pub fn count_below(&self, energy: f64) -> usize {
        self.counts_below(&[energy; LANES])[0]
    }

    /// One step of inverse iteration in each lane.
    fn step(&mut self, shifts: &Lanes, from: &[[Lanes; 3]], to: &mut [[Lanes; 3]]) -> Step {
        kernel::step(&self.runs, shifts, &mut self.inverse, from, to)
    }

    /// Σ w a b.
    #[must_use]
    pub fn product(&self, a: &[f64], b: &[f64]) -> f64 {
        let mut total = 0.0;
        over_nodes(&self.runs, |node, here| {
            let at = 3 * node;
            let met = a[at] * b[at] + a[at + 1] * b[at + 1] + a[at + 2] * b[at + 2];
            total += here.weight * met;
        });
        total
    }

    /// M u.
    fn image(&self, vector: &[f64]) -> Vec<f64> {
        let mut image = vec![0.0; vector.len()];
        over_nodes(&self.runs, |node, here| {
            let at = 3 * node;
            for row in 0..3 {
                for column in 0..3 {
                    image[at + row] += here.diagonal[row][column] * vector[at + column];
                    if node + 1 < self.nodes {
                        let coupling = here.to_next[row][column];
                        image[at + row] += coupling * vector[at + 3 + column];
                        image[at + 3 + column] += coupling * vector[at + row];
                    }
                }
            }
        });
        image
    }

    /// Size of M u − ε W u, measured with W⁻¹.
    fn residual(&self, energy: f64, vector: &[f64], image: &[f64]) -> f64 {
        let mut square = 0.0;
        over_nodes(&self.runs, |node, here| {
            for at in 3 * node..3 * node + 3 {
                let rest = image[at] - energy * here.weight * vector[at];
                square += rest * rest / here.weight;
            }
        });
        square.sqrt()
    }

    /// Empty columns for up to [`LANES`] vectors.
    fn columns(&self) -> Columns {
        vec![[[0.0; LANES]; 3]; self.nodes]
    }
}

/// Writes a vector into a lane.
fn load(columns: &mut [[Lanes; 3]], lane: usize, vector: &[f64]) {
    for (node, values) in columns.iter_mut().zip(vector.chunks_exact(3)) {
        for row in 0..3 {
            node[row][lane] = values[row];
        }
    }
}

/// Reads a vector from a lane.
fn unload(columns: &[[Lanes; 3]], lane: usize) -> Vec<f64> {
    columns
        .iter()
        .flat_map(|node| [node[0][lane], node[1][lane], node[2][lane]])
        .collect()
}

fn sum(a: &Three, b: &Three) -> Three {
    std::array::from_fn(|row| std::array::from_fn(|column| a[row][column] + b[row][column]))
}
