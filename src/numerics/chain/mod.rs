//! The lowest eigenvalues of a Sturm-Liouville problem on a chain of intervals, certified.
//!
//! # Equation
//!
//! ```text
//!    d  ⎛         dφ ⎞
//!  − ── ⎜ p(z, E) ── ⎟ + V(z) φ = E φ ,   φ = 0 at both ends ,   p = p₀ / max(1/10, 1 + s (E − V))
//!    dz ⎝         dz ⎠
//! ```
//!
//! with p₀, V and the softening s constant on each interval. With s = 0 the problem is linear;
//! with s ≥ 0 it is not, but p falls as E rises, so that everything below still holds.
//!
//! # Discretisation
//!
//! Nodes stand on the ends of the intervals. Integrating over half an interval on either side of
//! node i, with h the length of an interval, gives the symmetric tridiagonal pencil
//!
//! ```text
//!  T(E)[i, i]   = d_a + d_b ,   T(E)[i, i+1] = −l_b ,    l = p/h ,   d = l + ½ (V − E) h ,
//! ```
//!
//! a being the interval below node i and b the one above: T(E) = K(E) − E W with W the lengths that
//! belong to the nodes. φ and p dφ/dz are continuous. The error of an eigenvalue falls as h².
//!
//! # Counting
//!
//! The number of eigenvalues below E is the number of negative pivots of T(E), which is the number
//! of sign changes of the solution that starts at the lower wall (Sturm). The sequence needs no
//! division and [`LANES`] energies are swept at once. Since T(E) falls with E, the count is exact
//! for softened chains too: no level can be missed.
//!
//! # Vectors
//!
//! Solutions from both walls, joined where they are largest, are the vector z of a twisted
//! factorisation at E, T(E) z = γ e_k; then E − γ / (zᵀ dT/dE z) is the Rayleigh-quotient step, which
//! converges cubically. Levels are accepted only if it is certain that each was found once: the
//! residuals leave an eigenvalue in each of as many intervals that do not touch, and a count above
//! the last finds no more; or else counts between the levels say so. Levels too close for that are
//! spanned together by inverse iteration and separated inside their span.
//!
//! # References
//!
//! J. W. Demmel, Applied Numerical Linear Algebra (1997), section 5.3 (counts, Rayleigh quotients);
//! B. N. Parlett, I. S. Dhillon, Linear Algebra Appl. 267, 247 (1997) (twisted factorisations).

mod cluster;
mod search;
mod shooting;
#[cfg(test)]
mod tests;

pub use shooting::Workspace;

/// Energies that one sweep carries.
pub const LANES: usize = 8;
type Lanes = [f64; LANES];

/// Levels closer than this (in the unit of V) are separated inside their common span.
const CLUSTER: f64 = 1e-6;
/// Vectors of levels closer than this are made orthogonal. (Those of a softened chain are so only
/// as far as the difference of their energies is small.)
pub const ORTHOGONAL_BELOW: f64 = 3e-4;
/// A Rayleigh-quotient step smaller than this ends the iteration in any case; the vector belongs to
/// the energy before that step, so that its error is this over the distance of the next level.
const CONVERGED: f64 = 1e-10;

/// Equal intervals in a row.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Run {
    /// Number of intervals, at least one.
    pub intervals: usize,
    /// Length of each.
    pub length: f64,
    /// p₀.
    pub stiffness: f64,
    /// V.
    pub potential: f64,
    /// s, at least zero.
    pub softening: f64,
}

/// Least value of 1 + s (E − V).
pub const LEAST_SOFTENING_FACTOR: f64 = 0.1;

impl Run {
    /// 1 + s (E − V), kept above [`LEAST_SOFTENING_FACTOR`].
    #[must_use]
    pub fn factor(&self, energy: f64) -> f64 {
        (1.0 + self.softening * (energy - self.potential)).max(LEAST_SOFTENING_FACTOR)
    }

    fn link(&self, energy: f64) -> f64 {
        if self.softening == 0.0 {
            self.stiffness / self.length
        } else {
            self.stiffness / (self.length * self.factor(energy))
        }
    }

    /// −dl/dE, at least zero.
    fn link_fall(&self, energy: f64) -> f64 {
        let factor = 1.0 + self.softening * (energy - self.potential);
        if self.softening == 0.0 || factor <= LEAST_SOFTENING_FACTOR {
            0.0
        } else {
            self.stiffness * self.softening / (self.length * factor * factor)
        }
    }
}

/// One eigenvalue with its vector.
#[derive(Clone, Debug)]
pub struct State {
    /// The eigenvalue.
    pub energy: f64,
    /// φ on the inner nodes, from the lower wall up, with Σ w φ² = 1.
    pub envelope: Vec<f64>,
}

/// What went wrong in a search for eigenvalues.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[error("level {level} near {energy} could not be certified")]
pub struct Uncertified {
    /// Number of the level, from 1.
    pub level: usize,
    /// Where it was looked for.
    pub energy: f64,
}

/// A chain of intervals between two walls.
#[derive(Clone, Debug)]
pub struct Chain {
    runs: Vec<Run>,
    nodes: usize,
}

impl Chain {
    /// The chain of `runs`, from the lower wall to the upper.
    ///
    /// # Panics
    ///
    /// If there are fewer than two intervals: no node is left between the walls.
    #[must_use]
    pub fn new(runs: Vec<Run>) -> Self {
        let intervals: usize = runs.iter().map(|run| run.intervals).sum();
        assert!(intervals >= 2, "a node stands between two intervals");
        Self {
            runs,
            nodes: intervals - 1,
        }
    }

    /// Number of inner nodes, the size of the matrix.
    #[must_use]
    pub fn nodes(&self) -> usize {
        self.nodes
    }

    /// The runs of the chain.
    #[must_use]
    pub fn runs(&self) -> &[Run] {
        &self.runs
    }

    /// The interval lengths that belong to the inner nodes.
    #[must_use]
    pub fn weights(&self) -> Vec<f64> {
        let lengths: Vec<f64> = self
            .runs
            .iter()
            .flat_map(|run| std::iter::repeat_n(run.length, run.intervals))
            .collect();
        lengths
            .windows(2)
            .map(|pair| 0.5 * (pair[0] + pair[1]))
            .collect()
    }

    /// The symmetric matrix W^−½ K(E) W^−½: its diagonal and its second diagonal. The problem is
    /// linear, and the matrix the same at every energy, where no interval is softened.
    #[must_use]
    pub fn matrix(&self, energy: f64) -> (Vec<f64>, Vec<f64>) {
        let interval: Vec<(f64, f64)> = self
            .runs
            .iter()
            .flat_map(|run| {
                let link = run.link(energy);
                let value = (link, link + 0.5 * run.potential * run.length);
                std::iter::repeat_n(value, run.intervals)
            })
            .collect();
        let weights = self.weights();
        let diagonal = interval
            .windows(2)
            .zip(&weights)
            .map(|(pair, weight)| (pair[0].1 + pair[1].1) / weight)
            .collect();
        let second = interval[1..interval.len() - 1]
            .iter()
            .zip(weights.windows(2))
            .map(|(&(link, _), pair)| -link / (pair[0] * pair[1]).sqrt())
            .collect();
        (diagonal, second)
    }

    /// How far a level of the chain lies above that of the continuous problem, to the order h²: what
    /// halving the intervals takes away is three quarters of it.
    ///
    /// The solution φ of the continuous problem, put into T(E), leaves at a node inside a run
    /// −(h³/12)(E − V)²/p φ, and between runs, with J = p dφ/dz, J (h_b² k_b² − h_a² k_a²)/6 where
    /// k² = (E − V)/p; the shift is φ times that, summed, over φ (−T′) φ (1 where nothing is softened).
    #[must_use]
    pub fn shift(&self, state: &State) -> f64 {
        let energy = state.energy;
        let at = |node: usize| {
            // Node 0 is the lower wall, the last one the upper.
            let inner = node
                .checked_sub(1)
                .and_then(|node| state.envelope.get(node));
            inner.copied().unwrap_or(0.0)
        };
        let mut sum = 0.0;
        let mut node = 0;
        let mut strength_below = 0.0;
        for (index, run) in self.runs.iter().enumerate() {
            let stiffness = run.link(energy) * run.length;
            let excess = energy - run.potential;
            // h² k².
            let strength = run.length * run.length * excess / stiffness;
            let inner = &state.envelope[node..node + run.intervals - 1];
            let squares = inner.iter().map(|value| value * value).sum::<f64>()
                + 0.5 * (at(node).powi(2) + at(node + run.intervals).powi(2));
            sum -= run.length * squares * strength * excess / 12.0;
            if index > 0 {
                let flux = stiffness * (at(node + 1) - at(node)) / run.length
                    + 0.5 * run.length * excess * at(node);
                sum += at(node) * flux * (strength - strength_below) / 6.0;
            }
            strength_below = strength;
            node += run.intervals;
        }
        if self.runs.iter().all(|run| run.softening == 0.0) {
            return sum;
        }
        sum / self.slope(energy, &state.envelope)
    }

    /// Lowest potential of the chain: no eigenvalue lies below it.
    fn floor(&self) -> f64 {
        self.runs
            .iter()
            .map(|run| run.potential)
            .fold(f64::INFINITY, f64::min)
    }

    /// Numbers of eigenvalues below [`LANES`] energies, one sweep.
    ///
    /// # Panics
    ///
    /// Never: a count of nodes fits.
    #[must_use]
    pub fn counts_below(&self, energies: &Lanes) -> [usize; LANES] {
        const LARGE: f64 = 1e140;
        let mut changes = [0u64; LANES];
        // φ at the last node and at the one before it; the lower wall carries 0.
        let mut before = [0.0; LANES];
        let mut last = [1.0; LANES];
        let mut link_below = [0.0; LANES];
        let mut diagonal_below = [0.0; LANES];
        let mut first = true;
        let mut step = |before: &mut Lanes, last: &mut Lanes, own: &Lanes, back: &Lanes| {
            for lane in 0..LANES {
                let next = own[lane] * last[lane] - back[lane] * before[lane];
                changes[lane] += (next.to_bits() ^ last[lane].to_bits()) >> 63;
                before[lane] = last[lane];
                last[lane] = next;
            }
        };
        for run in &self.runs {
            let link: Lanes = std::array::from_fn(|lane| run.link(energies[lane]));
            let diagonal: Lanes = std::array::from_fn(|lane| {
                link[lane] + 0.5 * (run.potential - energies[lane]) * run.length
            });
            let mut left = run.intervals;
            if first {
                // The first interval ends at the first node, where φ = 1.
                first = false;
            } else {
                let own: Lanes = std::array::from_fn(|lane| {
                    (diagonal_below[lane] + diagonal[lane]) / link[lane]
                });
                let back: Lanes = std::array::from_fn(|lane| link_below[lane] / link[lane]);
                step(&mut before, &mut last, &own, &back);
            }
            left -= 1;
            let own: Lanes = std::array::from_fn(|lane| 2.0 * diagonal[lane] / link[lane]);
            while left > 0 {
                let block = left.min(32);
                for _ in 0..block {
                    step(&mut before, &mut last, &own, &[1.0; LANES]);
                }
                left -= block;
                for lane in 0..LANES {
                    if last[lane].abs() > LARGE || before[lane].abs() > LARGE {
                        last[lane] *= 1.0 / LARGE;
                        before[lane] *= 1.0 / LARGE;
                    }
                }
            }
            link_below = link;
            diagonal_below = diagonal;
        }
        changes.map(|count| usize::try_from(count).expect("a count of nodes"))
    }

    /// Number of eigenvalues below one energy.
    #[must_use]
    pub fn count_below(&self, energy: f64) -> usize {
        self.counts_below(&[energy; LANES])[0]
    }
    /// Σ w a b.
    fn product(&self, a: &[f64], b: &[f64]) -> f64 {
        let mut node = 0;
        let mut sum = 0.0;
        for (index, run) in self.runs.iter().enumerate() {
            let inner = run.intervals - 1;
            let part: f64 = (node..node + inner).map(|at| a[at] * b[at]).sum();
            sum += run.length * part;
            node += inner;
            if let Some(next) = self.runs.get(index + 1) {
                sum += 0.5 * (run.length + next.length) * a[node] * b[node];
                node += 1;
            }
        }
        sum
    }
    fn normalise(&self, vector: &mut [f64]) {
        let norm = self.product(vector, vector).sqrt();
        if norm > 0.0 {
            let scale = norm.recip();
            for value in vector.iter_mut() {
                *value *= scale;
            }
        }
    }

    /// aᵀ T(E) b.
    fn form(&self, energy: f64, a: &[f64], b: &[f64]) -> f64 {
        let mut sum = 0.0;
        self.over_intervals(a, b, |run, (a0, a1), (b0, b1)| {
            sum += run.link(energy) * (a1 - a0) * (b1 - b0)
                + 0.5 * (run.potential - energy) * run.length * (a0 * b0 + a1 * b1);
        });
        sum
    }

    /// −aᵀ (dT/dE) a.
    fn slope(&self, energy: f64, a: &[f64]) -> f64 {
        let mut sum = 0.0;
        self.over_intervals(a, a, |run, (a0, a1), _| {
            let rise = a1 - a0;
            sum += run.link_fall(energy) * rise * rise + 0.5 * run.length * (a0 * a0 + a1 * a1);
        });
        sum
    }
    /// Visits every interval with the values of two node vectors at its ends.
    fn over_intervals(
        &self,
        a: &[f64],
        b: &[f64],
        mut visit: impl FnMut(&Run, (f64, f64), (f64, f64)),
    ) {
        let at = |vector: &[f64], node: usize| {
            // Node 0 is the lower wall, the last one the upper.
            if node == 0 {
                0.0
            } else {
                vector.get(node - 1).copied().unwrap_or(0.0)
            }
        };
        let mut node = 0;
        for run in &self.runs {
            for _ in 0..run.intervals {
                visit(
                    run,
                    (at(a, node), at(a, node + 1)),
                    (at(b, node), at(b, node + 1)),
                );
                node += 1;
            }
        }
    }
}
