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
//! Twisted factorisation at E gives the vector z with T(E) z = γ e_k, k where |γ| is least; then
//! E − γ / (zᵀ (−dT/dE) z) is the Rayleigh-quotient step, which converges cubically. Every level is
//! accepted only if counts between the levels certify that each was found once. Levels too close
//! for that are spanned together by inverse iteration and separated inside their span.
//!
//! # References
//!
//! J. W. Demmel, Applied Numerical Linear Algebra (1997), section 5.3 (counts, Rayleigh quotients);
//! B. N. Parlett, I. S. Dhillon, Linear Algebra Appl. 267, 247 (1997) (twisted factorisations).

use nalgebra::{DMatrix, SymmetricEigen};

/// Energies that one sweep carries.
pub const LANES: usize = 8;
type Lanes = [f64; LANES];

/// Levels closer than this (in the unit of V) are separated inside their common span.
const CLUSTER: f64 = 1e-6;
/// Vectors of levels closer than this are made orthogonal. (Those of a softened chain are so only
/// as far as the difference of their energies is small.)
pub const ORTHOGONAL_BELOW: f64 = 3e-4;
/// A Rayleigh-quotient step smaller than this ends the iteration; the vector belongs to the energy
/// before that step, so that its error is this over the distance of the next level.
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

    /// Lowest potential of the chain: no eigenvalue lies below it.
    fn floor(&self) -> f64 {
        self.runs
            .iter()
            .map(|run| run.potential)
            .fold(f64::INFINITY, f64::min)
    }

    /// Numbers of eigenvalues below [`LANES`] energies, one sweep.
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

    /// The `count` lowest eigenvalues with their vectors, rising.
    ///
    /// # Arguments
    ///
    /// * `count` – how many; at most the number of inner nodes
    /// * `guesses` – energies to start from (of a coarser chain, say), rising, one for each level
    ///   looked for; without them the levels are isolated by counting
    ///
    /// # Errors
    ///
    /// [`Uncertified`] if a level cannot be told from its neighbours by counting.
    pub fn lowest(&self, count: usize, guesses: Option<&[f64]>) -> Result<Vec<State>, Uncertified> {
        let count = count.min(self.nodes);
        if count == 0 {
            return Ok(Vec::new());
        }
        if let Some(guesses) = guesses.filter(|guesses| guesses.len() >= count) {
            let mut states = self.rayleigh(&guesses[..count]);
            self.orthogonal_clusters(&mut states);
            if self.certifies(&states) {
                return Ok(states);
            }
        }
        let brackets = self.isolate(count);
        self.from_brackets(&brackets)
    }

    /// Brackets (low, high) of the `count` lowest eigenvalues: isolated, or narrower than
    /// [`CLUSTER`]/8 where several share one.
    fn isolate(&self, count: usize) -> Vec<(f64, f64)> {
        let floor = self.floor();
        let mut reach = 0.25;
        while self.count_below(floor + reach) < count {
            reach *= 2.0;
        }
        // (energy, count below it), rising: every sweep adds points.
        let mut known = vec![(floor, 0), (floor + reach, self.count_below(floor + reach))];
        loop {
            let mut wanted: Vec<f64> = Vec::new();
            for pair in known.windows(2) {
                let ((low, below), (high, above)) = (pair[0], pair[1]);
                if above > below + 1 && below < count && high - low > CLUSTER / 8.0 {
                    let parts = (above - below + 1).min(LANES);
                    wanted.extend(
                        (1..parts.max(2))
                            .map(|part| low + (high - low) * part as f64 / parts.max(2) as f64),
                    );
                }
            }
            if wanted.is_empty() {
                break;
            }
            for energies in wanted.chunks(LANES) {
                let lanes: Lanes =
                    std::array::from_fn(|lane| energies[lane.min(energies.len() - 1)]);
                let counts = self.counts_below(&lanes);
                known.extend(energies.iter().copied().zip(counts));
            }
            known.sort_by(|a, b| a.0.total_cmp(&b.0));
            known.dedup_by(|a, b| a.0 == b.0);
        }
        (0..count)
            .map(|level| {
                let above = known.partition_point(|&(_, below)| below <= level);
                (known[above - 1].0, known[above].0)
            })
            .collect()
    }

    /// States from brackets: Rayleigh quotients where a bracket holds one level (bisected further
    /// until they stay inside), a common span where it holds several.
    fn from_brackets(&self, brackets: &[(f64, f64)]) -> Result<Vec<State>, Uncertified> {
        let mut brackets = brackets.to_vec();
        let mut found: Vec<Option<State>> = vec![None; brackets.len()];
        let shared = |brackets: &[(f64, f64)], level: usize| {
            let own = brackets[level];
            (level > 0 && brackets[level - 1] == own) || brackets.get(level + 1) == Some(&own)
        };
        for _ in 0..60 {
            let open: Vec<usize> = (0..brackets.len())
                .filter(|&level| found[level].is_none() && !shared(&brackets, level))
                .collect();
            if open.is_empty() {
                break;
            }
            let middles: Vec<f64> = open
                .iter()
                .map(|&level| 0.5 * (brackets[level].0 + brackets[level].1))
                .collect();
            for ((&level, state), &middle) in open.iter().zip(self.rayleigh(&middles)).zip(&middles)
            {
                let bracket = &mut brackets[level];
                if state.energy > bracket.0 && state.energy < bracket.1 {
                    found[level] = Some(state);
                } else if self.count_below(middle) > level {
                    bracket.1 = middle;
                } else {
                    bracket.0 = middle;
                }
            }
        }
        let mut states: Vec<State> = Vec::with_capacity(brackets.len());
        for (level, state) in found.into_iter().enumerate() {
            let bracket = brackets[level];
            if let Some(state) = state {
                states.push(state);
            } else if !shared(&brackets, level) {
                return Err(Uncertified {
                    level: level + 1,
                    energy: bracket.0,
                });
            } else if states.len() <= level {
                let count = brackets.iter().filter(|&&other| other == bracket).count();
                states.extend(self.common_span(0.5 * (bracket.0 + bracket.1), count));
            }
        }
        self.orthogonal_clusters(&mut states);
        if self.certifies(&states) {
            return Ok(states);
        }
        // Counts tell where: the first level at which they disagree.
        let wrong = (0..states.len())
            .find(|&index| {
                let between = states.get(index + 1).map_or_else(
                    || states[index].energy + CLUSTER,
                    |above| 0.5 * (states[index].energy + above.energy),
                );
                self.count_below(between) != index + 1
            })
            .unwrap_or(0);
        Err(Uncertified {
            level: wrong + 1,
            energy: states[wrong].energy,
        })
    }

    /// Whether counts certify that `states` are the lowest levels, each found once.
    fn certifies(&self, states: &[State]) -> bool {
        // (energy, levels below it): between levels, and just above the last.
        let mut points: Vec<(f64, usize)> = Vec::with_capacity(states.len() + 1);
        let mut continues = false;
        for (index, state) in states.iter().enumerate() {
            if !state.energy.is_finite() {
                return false;
            }
            // One level found twice looks like a cluster: the whole of one must lie where its
            // members do, which counts half-way to its neighbours do not tell.
            let goes_on = states
                .get(index + 1)
                .is_some_and(|above| above.energy - state.energy < CLUSTER);
            if goes_on && !continues {
                points.push((state.energy - 0.25 * CLUSTER, index));
            } else if continues && !goes_on {
                points.push((state.energy + 0.25 * CLUSTER, index + 1));
            }
            continues = goes_on;
            match states.get(index + 1) {
                Some(above) if above.energy < state.energy => return false,
                // Inside a cluster only the whole is certified; its vectors are orthogonal.
                Some(above) if above.energy - state.energy < CLUSTER => {
                    if self.product(&state.envelope, &above.envelope).abs() > 1e-6 {
                        return false;
                    }
                }
                Some(above) => points.push((0.5 * (state.energy + above.energy), index + 1)),
                None => points.push((state.energy + 0.25 * CLUSTER, index + 1)),
            }
        }
        if let Some(first) = states.first() {
            points.push((first.energy - 0.25 * CLUSTER, 0));
        }
        points.chunks(LANES).all(|chunk| {
            let lanes: Lanes = std::array::from_fn(|lane| chunk[lane.min(chunk.len() - 1)].0);
            let counts = self.counts_below(&lanes);
            chunk
                .iter()
                .zip(counts)
                .all(|(&(_, wanted), got)| wanted == got)
        })
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

    /// Rayleigh-quotient iteration from each guess, [`LANES`] at a time. The energy of one that did
    /// not converge is no number.
    fn rayleigh(&self, guesses: &[f64]) -> Vec<State> {
        let mut work = Twisted::new(self.nodes);
        let mut states = Vec::with_capacity(guesses.len());
        for chunk in guesses.chunks(LANES) {
            let mut energies: Lanes = std::array::from_fn(|lane| chunk[lane.min(chunk.len() - 1)]);
            let crowded = chunk
                .windows(2)
                .any(|pair| pair[1] - pair[0] < 4.0 * ORTHOGONAL_BELOW);
            let mut once_more = crowded;
            let mut last = [f64::INFINITY; LANES];
            for _ in 0..12 {
                let steps = work.iterate(self, &energies);
                let mut largest = 0.0f64;
                for lane in 0..LANES {
                    last[lane] = steps[lane].abs();
                    if steps[lane].is_finite() {
                        energies[lane] += steps[lane];
                        largest = largest.max(last[lane]);
                    }
                }
                if largest < CONVERGED {
                    if !once_more {
                        break;
                    }
                    once_more = false;
                }
            }
            // One that still moves is no level: its energy says so, and no certificate is given.
            states.extend((0..chunk.len()).map(|lane| State {
                energy: if last[lane] < 10.0 * CONVERGED {
                    energies[lane]
                } else {
                    f64::NAN
                },
                envelope: work.envelope(self, lane),
            }));
        }
        states
    }

    /// `count` states that share one narrow bracket around `centre`: their span by inverse
    /// iteration, separated inside it.
    fn common_span(&self, centre: f64, count: usize) -> Vec<State> {
        // Close to the centre of the bracket, so that its levels are nearer than any neighbour, and
        // a little off it, which keeps the factorisation away from zero pivots.
        let shift = centre - CLUSTER / 64.0;
        let (diagonal, link) = self.pencil(shift);
        let factors = Factors::new(&diagonal, &link);
        let weights = self.weights();
        let mut seed = 0x9e37_79b9_7f4a_7c15_u64;
        let mut basis: Vec<Vec<f64>> = (0..count)
            .map(|_| {
                (0..self.nodes)
                    .map(|_| {
                        // A fixed sequence (xorshift): a start vector only has to be general.
                        seed ^= seed << 13;
                        seed ^= seed >> 7;
                        seed ^= seed << 17;
                        (seed >> 11) as f64 / (1u64 << 53) as f64 - 0.5
                    })
                    .collect()
            })
            .collect();
        for _ in 0..4 {
            for index in 0..count {
                let (done, rest) = basis.split_at_mut(index);
                let vector = &mut rest[0];
                for (value, weight) in vector.iter_mut().zip(&weights) {
                    *value *= weight;
                }
                factors.solve(&link, vector);
                self.orthonormalise(vector, done);
            }
        }
        self.separate(shift, basis)
    }

    /// Rayleigh-Ritz: the states inside the span of an orthonormal basis, with T linearised at
    /// `energy`.
    fn separate(&self, energy: f64, basis: Vec<Vec<f64>>) -> Vec<State> {
        let size = basis.len();
        let small = DMatrix::from_fn(size, size, |a, b| self.form(energy, &basis[a], &basis[b]));
        let small = 0.5 * (&small + small.transpose());
        let eigen = SymmetricEigen::new(small);
        let mut states: Vec<State> = (0..size)
            .map(|column| {
                let mut envelope = vec![0.0; self.nodes];
                for (row, vector) in basis.iter().enumerate() {
                    let share = eigen.eigenvectors[(row, column)];
                    for (value, part) in envelope.iter_mut().zip(vector) {
                        *value += share * part;
                    }
                }
                self.normalise(&mut envelope);
                let value = self.form(energy, &envelope, &envelope);
                let slope = self.slope(energy, &envelope);
                State {
                    energy: energy + value / slope,
                    envelope,
                }
            })
            .collect();
        states.sort_by(|a, b| a.energy.total_cmp(&b.energy));
        states
    }

    /// Makes the vectors of levels closer than [`ORTHOGONAL_BELOW`] orthogonal; where they are too
    /// close to be told apart, by separating their span.
    fn orthogonal_clusters(&self, states: &mut Vec<State>) {
        states.sort_by(|a, b| a.energy.total_cmp(&b.energy));
        let mut first = 0;
        while first < states.len() {
            let reach = |limit: f64| {
                first
                    + 1
                    + states[first..]
                        .windows(2)
                        .take_while(|pair| pair[1].energy - pair[0].energy < limit)
                        .count()
            };
            let (same, near) = (reach(CLUSTER), reach(ORTHOGONAL_BELOW));
            if near == first + 1 {
                first = near;
                continue;
            }
            let mut basis: Vec<Vec<f64>> = Vec::with_capacity(near - first);
            for state in &states[first..near] {
                let mut vector = state.envelope.clone();
                self.orthonormalise(&mut vector, &basis);
                basis.push(vector);
            }
            if same == near {
                let centre = 0.5 * (states[first].energy + states[near - 1].energy);
                for (place, state) in states[first..near]
                    .iter_mut()
                    .zip(self.separate(centre, basis))
                {
                    *place = state;
                }
            } else {
                for (place, envelope) in states[first..near].iter_mut().zip(basis) {
                    place.envelope = envelope;
                }
            }
            first = near;
        }
    }

    /// Takes out of `vector` what lies in the span of an orthonormal `basis`, twice for rounding,
    /// and normalises the rest.
    fn orthonormalise(&self, vector: &mut [f64], basis: &[Vec<f64>]) {
        for _ in 0..2 {
            for other in basis {
                let share = self.product(other, vector);
                for (value, part) in vector.iter_mut().zip(other) {
                    *value -= share * part;
                }
            }
            self.normalise(vector);
        }
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

    /// Diagonal and links (positive; the second diagonal is their negative) of T(E).
    fn pencil(&self, energy: f64) -> (Vec<f64>, Vec<f64>) {
        let parts: Vec<(f64, f64)> = self
            .runs
            .iter()
            .flat_map(|run| {
                let link = run.link(energy);
                let value = (link, link + 0.5 * (run.potential - energy) * run.length);
                std::iter::repeat_n(value, run.intervals)
            })
            .collect();
        let diagonal = parts.windows(2).map(|pair| pair[0].1 + pair[1].1).collect();
        let link = parts[1..parts.len() - 1]
            .iter()
            .map(|part| part.0)
            .collect();
        (diagonal, link)
    }
}

/// L D Lᵀ of a tridiagonal matrix whose second diagonal is −link.
struct Factors {
    reciprocal: Vec<f64>,
}

impl Factors {
    fn new(diagonal: &[f64], link: &[f64]) -> Self {
        let mut reciprocal = Vec::with_capacity(diagonal.len());
        let mut last = away_from_zero(diagonal[0]).recip();
        reciprocal.push(last);
        for (own, link) in diagonal[1..].iter().zip(link) {
            last = away_from_zero(own - link * link * last).recip();
            reciprocal.push(last);
        }
        Self { reciprocal }
    }

    fn solve(&self, link: &[f64], vector: &mut [f64]) {
        for index in 1..vector.len() {
            vector[index] += link[index - 1] * self.reciprocal[index - 1] * vector[index - 1];
        }
        let last = vector.len() - 1;
        vector[last] *= self.reciprocal[last];
        for index in (0..last).rev() {
            vector[index] =
                self.reciprocal[index] * (vector[index] + link[index] * vector[index + 1]);
        }
    }
}

/// A pivot of exactly zero would make infinities meet: the least number that cannot.
fn away_from_zero(pivot: f64) -> f64 {
    if pivot.abs() < 1e-280 { 1e-280 } else { pivot }
}

/// Workspace of twisted factorisations, [`LANES`] energies at a time.
struct Twisted {
    /// Pivots from the lower wall up.
    pivots: Vec<Lanes>,
    /// Reciprocal pivots from the lower wall up, and from the upper wall down.
    up: Vec<Lanes>,
    down: Vec<Lanes>,
    vectors: Vec<Lanes>,
}

/// Coefficients of one node: its diagonal and the links below and above it.
struct Coefficients {
    diagonal: Vec<Lanes>,
    links: Vec<Lanes>,
    falls: Vec<Lanes>,
}

impl Coefficients {
    fn new(chain: &Chain, energies: &Lanes) -> Self {
        let each = |value: &dyn Fn(&Run, f64) -> f64| -> Vec<Lanes> {
            chain
                .runs
                .iter()
                .map(|run| std::array::from_fn(|lane| value(run, energies[lane])))
                .collect()
        };
        Self {
            diagonal: each(&|run, energy| {
                run.link(energy) + 0.5 * (run.potential - energy) * run.length
            }),
            links: each(&Run::link),
            falls: each(&Run::link_fall),
        }
    }
}

impl Twisted {
    fn new(nodes: usize) -> Self {
        let empty = vec![[0.0; LANES]; nodes];
        Self {
            pivots: empty.clone(),
            up: empty.clone(),
            down: empty.clone(),
            vectors: empty,
        }
    }

    /// Factorises T at each energy, leaves the vectors, and returns the Rayleigh-quotient steps.
    fn iterate(&mut self, chain: &Chain, energies: &Lanes) -> Lanes {
        let coefficients = Coefficients::new(chain, energies);
        let twist = self.factorise(chain, &coefficients);
        self.unfold(chain, &coefficients, &twist.0);
        self.steps(chain, &coefficients, &twist)
    }

    /// Pivots both ways; the node of least |γ| in each lane, and γ there.
    fn factorise(&mut self, chain: &Chain, c: &Coefficients) -> ([usize; LANES], Lanes) {
        let nodes = chain.nodes;
        let pivot = |own: &Lanes, link: &Lanes, last: &Lanes| -> Lanes {
            std::array::from_fn(|lane| {
                let value = own[lane] - link[lane] * link[lane] * last[lane];
                if value.abs() < 1e-280 { 1e-280 } else { value }
            })
        };
        let reciprocal = |pivot: &Lanes| -> Lanes { std::array::from_fn(|lane| 1.0 / pivot[lane]) };
        let sum = |a: &Lanes, b: &Lanes| -> Lanes { std::array::from_fn(|lane| a[lane] + b[lane]) };
        let mut node = 0;
        let mut last = [0.0; LANES];
        for (index, run) in chain.runs.iter().enumerate() {
            let (own, link) = (&c.diagonal[index], &c.links[index]);
            let inner = sum(own, own);
            for _ in 1..run.intervals {
                // The wall below the first node carries no pivot: `last` is 0 there.
                let value = pivot(&inner, link, &last);
                last = reciprocal(&value);
                self.pivots[node] = value;
                self.up[node] = last;
                node += 1;
            }
            if index + 1 < chain.runs.len() {
                let value = pivot(&sum(own, &c.diagonal[index + 1]), link, &last);
                last = reciprocal(&value);
                self.pivots[node] = value;
                self.up[node] = last;
                node += 1;
            }
        }
        debug_assert_eq!(node, nodes);
        let mut least = [f64::INFINITY; LANES];
        let mut least_abs = [f64::INFINITY; LANES];
        let mut place = [0u64; LANES];
        let mut last = [0.0; LANES];
        let mut visit = |node: usize, up: &Lanes, down: &Lanes, own: &Lanes| {
            for lane in 0..LANES {
                let gamma = up[lane] + down[lane] - own[lane];
                let size = gamma.abs();
                let better = size < least_abs[lane];
                least_abs[lane] = if better { size } else { least_abs[lane] };
                least[lane] = if better { gamma } else { least[lane] };
                place[lane] = if better { node as u64 } else { place[lane] };
            }
        };
        for (index, run) in chain.runs.iter().enumerate().rev() {
            let (own, link) = (&c.diagonal[index], &c.links[index]);
            let inner = sum(own, own);
            for _ in 1..run.intervals {
                node -= 1;
                let value = pivot(&inner, link, &last);
                last = reciprocal(&value);
                self.down[node] = last;
                visit(node, &self.pivots[node], &value, &inner);
            }
            if index > 0 {
                node -= 1;
                let own = sum(own, &c.diagonal[index - 1]);
                let value = pivot(&own, link, &last);
                last = reciprocal(&value);
                self.down[node] = last;
                visit(node, &self.pivots[node], &value, &own);
            }
        }
        (
            place.map(|node| usize::try_from(node).expect("a node")),
            least,
        )
    }

    /// The vectors: 1 at the twist, then outwards by the pivots.
    fn unfold(&mut self, chain: &Chain, c: &Coefficients, twist: &[usize; LANES]) {
        let mut node = 0;
        let mut value = [0.0; LANES];
        // Upwards: each lane starts at its twist and follows the pivots of the downward sweep.
        for (index, run) in chain.runs.iter().enumerate() {
            let link = &c.links[index];
            let inner = run.intervals - 1 + usize::from(index + 1 < chain.runs.len());
            for _ in 0..inner {
                for lane in 0..LANES {
                    let follow = value[lane] * link[lane] * self.down[node][lane];
                    value[lane] = if node == twist[lane] { 1.0 } else { follow };
                }
                self.vectors[node] = value;
                node += 1;
            }
        }
        let mut value = [0.0; LANES];
        for (index, run) in chain.runs.iter().enumerate().rev() {
            let link = &c.links[index];
            let inner = run.intervals - 1 + usize::from(index > 0);
            for _ in 0..inner {
                node -= 1;
                for lane in 0..LANES {
                    let follow = value[lane] * link[lane] * self.up[node][lane];
                    value[lane] = if node == twist[lane] { 1.0 } else { follow };
                    if node < twist[lane] {
                        self.vectors[node][lane] = value[lane];
                    }
                }
            }
        }
    }

    /// γ / (−zᵀ T′ z) in each lane.
    fn steps(&self, chain: &Chain, c: &Coefficients, twist: &([usize; LANES], Lanes)) -> Lanes {
        let mut slope = [0.0; LANES];
        let mut below = [0.0; LANES];
        let mut node = 0;
        for (index, run) in chain.runs.iter().enumerate() {
            let fall = &c.falls[index];
            let half = 0.5 * run.length;
            let softened = run.softening > 0.0;
            for _ in 0..run.intervals {
                let here = if node < chain.nodes {
                    self.vectors[node]
                } else {
                    [0.0; LANES]
                };
                if softened {
                    for lane in 0..LANES {
                        let rise = here[lane] - below[lane];
                        slope[lane] += fall[lane] * rise * rise
                            + half * (here[lane] * here[lane] + below[lane] * below[lane]);
                    }
                } else {
                    for lane in 0..LANES {
                        slope[lane] += half * (here[lane] * here[lane] + below[lane] * below[lane]);
                    }
                }
                below = here;
                node += 1;
            }
        }
        std::array::from_fn(|lane| twist.1[lane] / slope[lane])
    }

    fn envelope(&self, chain: &Chain, lane: usize) -> Vec<f64> {
        let mut envelope: Vec<f64> = self.vectors.iter().map(|lanes| lanes[lane]).collect();
        chain.normalise(&mut envelope);
        envelope
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use nalgebra::DMatrix;

    /// ħ²/2m₀ in eV nm², to the digits that a test needs.
    const C: f64 = 0.038_099_821_109_69;

    fn run(nm: f64, per_nm: f64, potential: f64, mass: f64) -> Run {
        let intervals = (nm * per_nm).round() as usize;
        let length = nm / intervals as f64;
        Run {
            intervals,
            length,
            stiffness: C / mass,
            potential,
            softening: 0.0,
        }
    }

    fn dense(chain: &Chain) -> Vec<f64> {
        let (diagonal, second) = chain.matrix(0.0);
        let size = diagonal.len();
        let matrix = DMatrix::from_fn(size, size, |a, b| match a.abs_diff(b) {
            0 => diagonal[a],
            1 => second[a.min(b)],
            _ => 0.0,
        });
        let mut values: Vec<f64> = SymmetricEigen::new(matrix)
            .eigenvalues
            .iter()
            .copied()
            .collect();
        values.sort_by(f64::total_cmp);
        values
    }

    /// With p₀/h = 1/m the matrix can be read:
    ///
    /// ```text
    ///  m = 1  1  ½  ½       ┌  2   −1    0  ┐
    ///  V = 0  0  0  0   →   │ −1    3   −2  │
    ///                       └  0   −2    4  ┘
    /// ```
    #[test]
    fn matrix_of_three_nodes_across_a_mass_step() {
        let half = |stiffness| Run {
            intervals: 2,
            length: 1.0,
            stiffness,
            potential: 0.0,
            softening: 0.0,
        };
        let (diagonal, second) = Chain::new(vec![half(1.0), half(2.0)]).matrix(0.0);
        assert_eq!(diagonal, [2.0, 3.0, 4.0]);
        assert_eq!(second, [-1.0, -2.0]);
    }

    /// Eigenvalues of the second-difference matrix, 2 − 2 cos(nπ/(N+1)).
    #[test]
    fn toeplitz_matrix_has_its_cosines() {
        let chain = Chain::new(vec![run(10.0, 10.0, 0.0, 0.067)]);
        let states = chain.lowest(12, None).expect("certified");
        for (n, state) in (1u8..).zip(&states) {
            let cosine = (f64::from(n) * std::f64::consts::PI / 100.0).cos();
            let exact = C / 0.067 / 0.01 * 2.0 * (1.0 - cosine);
            assert!((state.energy / exact - 1.0).abs() < 1e-11, "{n}");
        }
    }

    #[test]
    fn random_chains_agree_with_a_dense_solver() {
        let mut seed = 7u64;
        let mut random = move || {
            seed = seed
                .wrapping_mul(6364136223846793005)
                .wrapping_add(1442695040888963407);
            (seed >> 33) as f64 / (1u64 << 31) as f64
        };
        for _ in 0..30 {
            let runs: Vec<Run> = (0..7)
                .map(|_| {
                    run(
                        1.0 + 6.0 * random(),
                        4.0,
                        0.4 * random(),
                        0.03 + 0.5 * random(),
                    )
                })
                .collect();
            let chain = Chain::new(runs);
            let exact = dense(&chain);
            let states = chain.lowest(9, None).expect("certified");
            for (state, value) in states.iter().zip(&exact) {
                assert!(
                    (state.energy - value).abs() < 2e-11,
                    "{} {value}",
                    state.energy
                );
            }
            assert_eq!(chain.count_below(exact[8] + 1e-9), 9);
            // Guesses from elsewhere lead to the same levels.
            let guesses: Vec<f64> = exact[..9].iter().map(|value| value + 1e-4).collect();
            let again = chain.lowest(9, Some(&guesses)).expect("certified");
            assert!(
                again
                    .iter()
                    .zip(&states)
                    .all(|(a, b)| (a.energy - b.energy).abs() < 1e-11)
            );
        }
    }

    /// Far wells: the levels come in clusters too close for counting; vectors stay orthonormal.
    #[test]
    fn clusters_of_far_wells_are_spanned_by_orthogonal_vectors() {
        let mut runs = vec![run(20.0, 4.0, 0.3, 0.09)];
        for _ in 0..5 {
            runs.extend([run(8.0, 4.0, 0.0, 0.06), run(20.0, 4.0, 0.3, 0.09)]);
        }
        let chain = Chain::new(runs);
        let count = chain.count_below(0.299);
        let states = chain.lowest(count, None).expect("certified");
        assert_eq!(count % 5, 0);
        let exact = dense(&chain);
        for (a, state) in states.iter().enumerate() {
            assert!(
                (state.energy - exact[a]).abs() < 1e-10,
                "{} {}",
                state.energy,
                exact[a]
            );
            for (b, other) in states.iter().enumerate() {
                let wanted = f64::from(u8::from(a == b));
                let got = chain.product(&state.envelope, &other.envelope);
                assert!((got - wanted).abs() < 1e-7, "{a} {b}: {got}");
            }
        }
        let guesses: Vec<f64> = states.iter().map(|state| state.energy).collect();
        let again = chain.lowest(count, Some(&guesses)).expect("certified");
        assert!(
            again
                .iter()
                .zip(&exact)
                .all(|(a, b)| (a.energy - b).abs() < 1e-10)
        );
    }

    /// A softened chain solved at its own energies: T(E) φ = 0 level by level.
    #[test]
    fn softened_levels_are_eigenvalues_of_the_matrix_at_their_own_energy() {
        let soft = |nm, potential, mass, softening| Run {
            softening,
            ..run(nm, 4.0, potential, mass)
        };
        let chain = Chain::new(vec![
            soft(20.0, 0.4, 0.08, 0.7),
            soft(9.0, 0.0, 0.045, 1.3),
            soft(20.0, 0.35, 0.08, 0.7),
        ]);
        let count = chain.count_below(0.35);
        let states = chain.lowest(count, None).expect("certified");
        assert!(count >= 3);
        for (index, state) in states.iter().enumerate() {
            let frozen = chain
                .runs
                .iter()
                .map(|run| Run {
                    stiffness: run.stiffness / run.factor(state.energy),
                    softening: 0.0,
                    ..*run
                })
                .collect();
            let value = dense(&Chain::new(frozen))[index];
            assert!(
                (value - state.energy).abs() < 1e-10,
                "{value} {}",
                state.energy
            );
        }
    }

    /// Halving the steps must quarter the error, at a mass step of 1:6 too.
    #[test]
    fn second_order() {
        let level = |per_nm| {
            let chain = Chain::new(vec![
                run(30.0, per_nm, 0.25, 0.3),
                run(10.0, per_nm, 0.0, 0.05),
                run(30.0, per_nm, 0.25, 0.3),
            ]);
            chain.lowest(1, None).expect("certified")[0].energy
        };
        let (coarse, middle, fine) = (level(4.0), level(8.0), level(16.0));
        let order = ((coarse - middle) / (middle - fine)).log2();
        assert!((order - 2.0).abs() < 0.02, "observed order {order}");
    }
}
