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
//! With u_old normalised and (M − ε W) u = W u_old, p = uᵀ W u_old, N = uᵀ W u, the Rayleigh quotient
//! of u is ε + p/N and its residual √((1 − p²/N)/N): both come free.
//!
//! States are accepted only if all residuals are small, their energies rise strictly (near
//! neighbours being separated inside their span), none lies below a floor, and exactly as many
//! levels as states lie below a point just above them: then none was missed and none found twice.
//! Where that fails the levels are isolated by inertia alone, and spanned together where they are
//! too close for that.
//!
//! # Reference
//!
//! B. N. Parlett, The Symmetric Eigenvalue Problem (1980), chapters 3 and 4.

use std::ops::Range;

use nalgebra::{DMatrix, SymmetricEigen};

/// Shifts that one sweep carries.
pub const LANES: usize = 8;
type Lanes = [f64; LANES];
/// A symmetric or general 3×3 matrix.
pub type Three = [[f64; 3]; 3];

/// Levels closer than this are spanned together.
const CLUSTER: f64 = 1e-7;
/// Levels closer than this are separated inside their span at every step.
const GROUP: f64 = 5e-5;
/// Largest residual of an accepted state: the energy is good to its square over the distance of the
/// next level.
const LARGEST_RESIDUAL: f64 = 3e-6;

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

/// Eigenvalues with their vectors, as one sweep leaves them.
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
    /// S⁻¹ of every node: 00 01 02 11 12 22.
    inverse: Vec<[Lanes; 6]>,
    /// S⁻¹ B of every node, row by row.
    carried: Vec<[Lanes; 9]>,
    /// Right-hand sides and solutions.
    vectors: Vec<[Lanes; 3]>,
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
            carried: vec![[[0.0; LANES]; 9]; nodes],
            vectors: vec![[[0.0; LANES]; 3]; nodes],
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

    /// Visits every inner node from the lower wall up: its diagonal form, its length, and the
    /// coupling to the next node (of the last node: to the wall, not used).
    fn over_nodes(runs: &[BlockRun], mut visit: impl FnMut(usize, &Three, f64, &Three)) {
        let mut node = 0;
        for (index, run) in runs.iter().enumerate() {
            let inner = sum(&run.lower, &run.upper);
            for _ in 1..run.intervals {
                visit(node, &inner, run.length, &run.coupling);
                node += 1;
            }
            if let Some(next) = runs.get(index + 1) {
                let length = 0.5 * (run.length + next.length);
                visit(node, &sum(&run.upper, &next.lower), length, &next.coupling);
                node += 1;
            }
        }
    }

    /// The symmetric matrix W^−½ M W^−½ as (row, column, value), upper triangle with the diagonal,
    /// unknowns node by node.
    #[must_use]
    pub fn entries(&self) -> Vec<(usize, usize, f64)> {
        let mut entries = Vec::new();
        let mut weights = Vec::with_capacity(self.nodes);
        Self::over_nodes(&self.runs, |_, _, weight, _| weights.push(weight));
        Self::over_nodes(&self.runs, |node, diagonal, weight, coupling| {
            for a in 0..3 {
                for b in a..3 {
                    entries.push((3 * node + a, 3 * node + b, diagonal[a][b] / weight));
                }
            }
            if let Some(next) = weights.get(node + 1) {
                let scale = (weight * next).sqrt();
                for (a, row) in coupling.iter().enumerate() {
                    for (b, value) in row.iter().enumerate() {
                        entries.push((3 * node + a, 3 * node + 3 + b, value / scale));
                    }
                }
            }
        });
        entries.retain(|entry| entry.2 != 0.0);
        entries
    }

    /// Factorises at [`LANES`] shifts; returns the number of eigenvalues below each.
    fn factorise(&mut self, shifts: &Lanes) -> [usize; LANES] {
        let mut below = [0u64; LANES];
        let (inverse, carried) = (&mut self.inverse, &mut self.carried);
        // B of the node below, zero under the first node.
        let mut last: Three = [[0.0; 3]; 3];
        let mut before = [[0.0; LANES]; 9];
        Self::over_nodes(&self.runs, |node, d, weight, b| {
            let out = &mut inverse[node];
            let out_carried = &mut carried[node];
            for lane in 0..LANES {
                let shift = shifts[lane] * weight;
                let x = |row: usize, column: usize| before[3 * row + column][lane];
                let down = |a: usize, c: usize| {
                    last[0][a] * x(0, c) + last[1][a] * x(1, c) + last[2][a] * x(2, c)
                };
                let s00 = d[0][0] - shift - down(0, 0);
                let s01 = d[0][1] - down(0, 1);
                let s02 = d[0][2] - down(0, 2);
                let s11 = d[1][1] - shift - down(1, 1);
                let s12 = d[1][2] - down(1, 2);
                let s22 = d[2][2] - shift - down(2, 2);
                let c00 = s11 * s22 - s12 * s12;
                let c01 = s02 * s12 - s01 * s22;
                let c02 = s01 * s12 - s02 * s11;
                let c11 = s00 * s22 - s02 * s02;
                let c12 = s01 * s02 - s00 * s12;
                let c22 = s00 * s11 - s01 * s01;
                let determinant = s00 * c00 + s01 * c01 + s02 * c02;
                // Negative eigenvalues from the signs of the leading minors.
                let (first, second, third) = (
                    s00.to_bits() >> 63,
                    c22.to_bits() >> 63,
                    determinant.to_bits() >> 63,
                );
                below[lane] += first + (first ^ second) + (second ^ third);
                let scale = 1.0 / determinant;
                let i = [
                    c00 * scale,
                    c01 * scale,
                    c02 * scale,
                    c11 * scale,
                    c12 * scale,
                    c22 * scale,
                ];
                for (place, value) in out.iter_mut().zip(i) {
                    place[lane] = value;
                }
                let rows = [[i[0], i[1], i[2]], [i[1], i[3], i[4]], [i[2], i[4], i[5]]];
                for (row, values) in rows.iter().enumerate() {
                    for column in 0..3 {
                        out_carried[3 * row + column][lane] = values[0] * b[0][column]
                            + values[1] * b[1][column]
                            + values[2] * b[2][column];
                    }
                }
            }
            before = *out_carried;
            last = *b;
        });
        below.map(|count| usize::try_from(count).expect("a count of eigenvalues"))
    }

    /// Numbers of eigenvalues below [`LANES`] energies.
    pub fn counts_below(&mut self, energies: &Lanes) -> [usize; LANES] {
        self.factorise(energies)
    }

    /// Number of eigenvalues below one energy.
    pub fn count_below(&mut self, energy: f64) -> usize {
        self.factorise(&[energy; LANES])[0]
    }

    /// One step of inverse iteration in each lane, from `self.vectors` (normalised) to themselves:
    /// the steps of the Rayleigh quotient, and the residuals.
    fn iterate(&mut self) -> (Lanes, Lanes) {
        let (inverse, carried, vectors) = (&self.inverse, &self.carried, &mut self.vectors);
        let nodes = self.nodes;
        // Forward: y_i = w u_i − (S⁻¹B)ᵀ_{i−1} y_{i−1}.
        let mut y = [[0.0; LANES]; 3];
        let mut overlap = [0.0; LANES];
        let mut norm = [0.0; LANES];
        Self::over_nodes(&self.runs, |node, _, weight, _| {
            let own = &mut vectors[node];
            if node > 0 {
                let x = &carried[node - 1];
                for lane in 0..LANES {
                    let (a, b, c) = (y[0][lane], y[1][lane], y[2][lane]);
                    for row in 0..3 {
                        own[row][lane] = weight * own[row][lane]
                            - (x[row][lane] * a + x[3 + row][lane] * b + x[6 + row][lane] * c);
                    }
                }
            } else {
                for row in own.iter_mut() {
                    for value in row.iter_mut() {
                        *value *= weight;
                    }
                }
            }
            y = *own;
        });
        // Backward: u_i = S⁻¹ y_i − (S⁻¹B)_i u_{i+1}; W u_old, which p needs, is rebuilt from y.
        let mut weights = WeightsDown::new(&self.runs);
        let mut above = [[0.0; LANES]; 3];
        for node in (0..nodes).rev() {
            let weight = weights.next_weight();
            let i = &inverse[node];
            let x = &carried[node];
            let below = if node > 0 {
                Some((vectors[node - 1], &carried[node - 1]))
            } else {
                None
            };
            let own = &mut vectors[node];
            for lane in 0..LANES {
                let (y0, y1, y2) = (own[0][lane], own[1][lane], own[2][lane]);
                let (u0, u1, u2) = (above[0][lane], above[1][lane], above[2][lane]);
                let v0 = i[0][lane] * y0 + i[1][lane] * y1 + i[2][lane] * y2
                    - (x[0][lane] * u0 + x[1][lane] * u1 + x[2][lane] * u2);
                let v1 = i[1][lane] * y0 + i[3][lane] * y1 + i[4][lane] * y2
                    - (x[3][lane] * u0 + x[4][lane] * u1 + x[5][lane] * u2);
                let v2 = i[2][lane] * y0 + i[4][lane] * y1 + i[5][lane] * y2
                    - (x[6][lane] * u0 + x[7][lane] * u1 + x[8][lane] * u2);
                let (mut r0, mut r1, mut r2) = (y0, y1, y2);
                if let Some((y, x)) = &below {
                    let (a, b, c) = (y[0][lane], y[1][lane], y[2][lane]);
                    r0 += x[0][lane] * a + x[3][lane] * b + x[6][lane] * c;
                    r1 += x[1][lane] * a + x[4][lane] * b + x[7][lane] * c;
                    r2 += x[2][lane] * a + x[5][lane] * b + x[8][lane] * c;
                }
                overlap[lane] += r0 * v0 + r1 * v1 + r2 * v2;
                norm[lane] += weight * (v0 * v0 + v1 * v1 + v2 * v2);
                own[0][lane] = v0;
                own[1][lane] = v1;
                own[2][lane] = v2;
            }
            above = *own;
        }
        let scale: Lanes = std::array::from_fn(|lane| norm[lane].sqrt().recip());
        for own in vectors.iter_mut() {
            for row in own.iter_mut() {
                for lane in 0..LANES {
                    row[lane] *= scale[lane];
                }
            }
        }
        let steps = std::array::from_fn(|lane| overlap[lane] / norm[lane]);
        let residuals = std::array::from_fn(|lane| {
            let rest = (1.0 - overlap[lane] * overlap[lane] / norm[lane]).max(0.0);
            (rest / norm[lane]).sqrt()
        });
        (steps, residuals)
    }

    /// Continues two ladders in a straight line, energies and vectors: `behind`, one step behind
    /// `last`, becomes the ladder one step ahead of it. [`BlockChain::follow`] begins there.
    ///
    /// # Arguments
    ///
    /// * `ratio` – the step to come over the step behind
    pub fn advance(&self, behind: &mut Ladder, last: &Ladder, ratio: f64) {
        behind.energies.resize(last.energies.len(), f64::NAN);
        behind.vectors.resize(last.vectors.len(), Vec::new());
        let ladder = behind.energies.iter_mut().zip(&mut behind.vectors);
        for ((energy, vector), (&energy_last, vector_last)) in
            ladder.zip(last.energies.iter().zip(&last.vectors))
        {
            let alike = if vector.is_empty() {
                0.0
            } else {
                self.product(vector, vector_last)
            };
            // Where a state has changed its character there is no straight line to follow.
            if alike.abs() < 0.7 {
                *energy = energy_last;
                vector.clone_from(vector_last);
                continue;
            }
            *energy = energy_last + ratio * (energy_last - *energy);
            let sense = ratio * alike.signum();
            for (value, last) in vector.iter_mut().zip(vector_last) {
                *value = (1.0 + ratio) * last - sense * *value;
            }
            let scale = self.product(vector, vector).sqrt().recip();
            for value in vector.iter_mut() {
                *value *= scale;
            }
        }
    }

    /// Follows the `ladder` of a neighbouring problem to the lowest eigenvalues of this one: one
    /// lane a state, from its energy and vector. Returns whether every state asked for is
    /// certified; if not, the ladder is of no use.
    ///
    /// # Arguments
    ///
    /// * `required` – how many states, from the lowest, must be certified; those beyond only help
    ///   where states exchange their characters
    /// * `floor` – no eigenvalue may lie below it: checked wherever a lane is free
    pub fn follow(&mut self, ladder: &mut Ladder, required: usize, floor: f64) -> bool {
        let required = required.min(ladder.energies.len());
        for _ in 0..6 {
            // Between the last state asked for and the next one known, where the count must agree.
            let point = above(&ladder.energies, required);
            let Some(sweep) = self.sweep(ladder, floor, point) else {
                return false;
            };
            if !ladder.energies[..required]
                .iter()
                .all(|energy| energy.is_finite())
            {
                return false;
            }
            let residuals = self.separate(ladder, sweep.residuals);
            if residuals[..required]
                .iter()
                .all(|&residual| residual < LARGEST_RESIDUAL)
            {
                let energies = &ladder.energies[..required];
                let last = energies[required - 1];
                let (point, count) = match sweep.count {
                    Some(count) if point > last + LARGEST_RESIDUAL => (point, count),
                    _ => {
                        let point = above(&ladder.energies, required);
                        (point, self.count_below(point))
                    }
                };
                return count == required
                    && point > last + LARGEST_RESIDUAL
                    && energies.windows(2).all(|pair| pair[1] > pair[0]);
            }
        }
        false
    }

    /// Follows states of a neighbouring problem by their character, wherever they stand in the order:
    /// each converges to the state nearest its energy and vector. Returns whether all did, to
    /// different states; that none was missed is not known.
    pub fn pursue(&mut self, ladder: &mut Ladder, floor: f64) -> bool {
        for _ in 0..8 {
            let Some(sweep) = self.sweep(ladder, floor, floor) else {
                return false;
            };
            if !ladder.energies.iter().all(|energy| energy.is_finite()) {
                return false;
            }
            let mut order: Vec<usize> = (0..ladder.energies.len()).collect();
            order.sort_by(|&a, &b| ladder.energies[a].total_cmp(&ladder.energies[b]));
            ladder.energies = order.iter().map(|&index| ladder.energies[index]).collect();
            ladder.vectors = order
                .iter()
                .map(|&index| ladder.vectors[index].clone())
                .collect();
            let residuals = order.iter().map(|&index| sweep.residuals[index]).collect();
            let residuals = self.separate(ladder, residuals);
            if residuals
                .iter()
                .all(|&residual| residual < LARGEST_RESIDUAL)
            {
                return ladder.energies.windows(2).all(|pair| pair[1] > pair[0]);
            }
        }
        false
    }

    /// One step of inverse iteration for every state of a ladder, [`LANES`] at a time; `None` if a
    /// state lies below the floor. Free lanes count the levels below the floor and below `point`.
    fn sweep(&mut self, ladder: &mut Ladder, floor: f64, point: f64) -> Option<Sweep> {
        let states = ladder.energies.len();
        let mut sweep = Sweep {
            residuals: Vec::with_capacity(states),
            count: None,
        };
        let mut first = 0;
        // Later chunks overwrite the count: any of them is as good.
        while first < states {
            let own = (states - first).min(LANES);
            let mut shifts: Lanes = [floor; LANES];
            shifts[..own].copy_from_slice(&ladder.energies[first..first + own]);
            if own + 1 < LANES {
                shifts[own + 1] = point;
            }
            self.load(&ladder.vectors[first..first + own]);
            let counts = self.factorise(&shifts);
            if own < LANES && counts[own] != 0 {
                return None;
            }
            if own + 1 < LANES {
                sweep.count = Some(counts[own + 1]);
            }
            let (steps, residuals) = self.iterate();
            for lane in 0..own {
                ladder.energies[first + lane] += steps[lane];
            }
            self.store(&mut ladder.vectors[first..first + own]);
            sweep.residuals.extend_from_slice(&residuals[..own]);
            first += own;
        }
        Some(sweep)
    }

    /// Separates the states of each group of near neighbours inside their span; returns all
    /// residuals.
    fn separate(&self, ladder: &mut Ladder, mut residuals: Vec<f64>) -> Vec<f64> {
        for group in groups(&ladder.energies) {
            if group.len() == 1 || !ladder.energies[group.clone()].iter().all(|e| e.is_finite()) {
                continue;
            }
            let basis = &mut ladder.vectors[group.clone()];
            self.orthonormalise(basis);
            let images: Vec<Vec<f64>> = basis.iter().map(|vector| self.image(vector)).collect();
            let size = basis.len();
            let dot = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| a * b).sum::<f64>();
            let form = DMatrix::from_fn(size, size, |a, b| dot(&basis[a], &images[b]));
            let eigen = SymmetricEigen::new(0.5 * (&form + form.transpose()));
            let mut order: Vec<usize> = (0..size).collect();
            order.sort_by(|&a, &b| eigen.eigenvalues[a].total_cmp(&eigen.eigenvalues[b]));
            let mix = |vectors: &[Vec<f64>], column: usize| {
                let mut mixed = vec![0.0; 3 * self.nodes];
                for (row, vector) in vectors.iter().enumerate() {
                    let share = eigen.eigenvectors[(row, column)];
                    for (value, part) in mixed.iter_mut().zip(vector) {
                        *value += share * part;
                    }
                }
                mixed
            };
            let states: Vec<(f64, Vec<f64>, f64)> = order
                .iter()
                .map(|&column| {
                    let (energy, vector) = (eigen.eigenvalues[column], mix(basis, column));
                    let residual = self.residual(energy, &vector, &mix(&images, column));
                    (energy, vector, residual)
                })
                .collect();
            for (level, (energy, vector, residual)) in group.zip(states) {
                ladder.energies[level] = energy;
                ladder.vectors[level] = vector;
                residuals[level] = residual;
            }
        }
        residuals
    }

    /// M u.
    fn image(&self, vector: &[f64]) -> Vec<f64> {
        let mut image = vec![0.0; vector.len()];
        Self::over_nodes(&self.runs, |node, diagonal, _, coupling| {
            let at = 3 * node;
            for row in 0..3 {
                for column in 0..3 {
                    image[at + row] += diagonal[row][column] * vector[at + column];
                    if node + 1 < self.nodes {
                        image[at + row] += coupling[row][column] * vector[at + 3 + column];
                        image[at + 3 + column] += coupling[row][column] * vector[at + row];
                    }
                }
            }
        });
        image
    }

    /// Size of M u − ε W u, measured with W⁻¹.
    fn residual(&self, energy: f64, vector: &[f64], image: &[f64]) -> f64 {
        let mut square = 0.0;
        Self::over_nodes(&self.runs, |node, _, weight, _| {
            for at in 3 * node..3 * node + 3 {
                let rest = image[at] - energy * weight * vector[at];
                square += rest * rest / weight;
            }
        });
        square.sqrt()
    }

    fn load(&mut self, vectors: &[Vec<f64>]) {
        for (lane, vector) in vectors.iter().enumerate() {
            for (place, values) in self.vectors.iter_mut().zip(vector.chunks_exact(3)) {
                for row in 0..3 {
                    place[row][lane] = values[row];
                }
            }
        }
        // Free lanes repeat the first vector: they must only stay finite.
        for place in &mut self.vectors {
            for row in place.iter_mut() {
                for lane in vectors.len()..LANES {
                    row[lane] = row[0];
                }
            }
        }
    }

    fn store(&self, vectors: &mut [Vec<f64>]) {
        for (lane, vector) in vectors.iter_mut().enumerate() {
            for (values, place) in vector.chunks_exact_mut(3).zip(&self.vectors) {
                for row in 0..3 {
                    values[row] = place[row][lane];
                }
            }
        }
    }

    /// The `count` lowest eigenvalues from nothing: isolated by inertia, certified by it.
    ///
    /// # Arguments
    ///
    /// * `floor` – an energy below which no eigenvalue may lie
    ///
    /// # Errors
    ///
    /// [`Uncertified`] if an eigenvalue lies below the floor, or a level can't be told apart.
    pub fn lowest(&mut self, count: usize, floor: f64) -> Result<Ladder, Uncertified> {
        let count = count.min(3 * self.nodes);
        if count == 0 {
            return Ok(Ladder::default());
        }
        if self.count_below(floor) != 0 {
            return Err(Uncertified {
                level: 1,
                energy: floor,
            });
        }
        self.levels(0..count, floor)
    }

    /// The eigenvalues with the numbers `range`, counted from 0, found from nothing.
    ///
    /// # Arguments
    ///
    /// * `low` – an energy below the first of them
    ///
    /// # Errors
    ///
    /// [`Uncertified`] if a level can't be told apart.
    pub fn levels(&mut self, range: Range<usize>, low: f64) -> Result<Ladder, Uncertified> {
        let range = range.start..range.end.min(3 * self.nodes);
        if range.is_empty() {
            return Ok(Ladder::default());
        }
        let brackets = self.isolate(range.clone(), low);
        let shared = |index: usize| {
            (index > 0 && brackets[index - 1] == brackets[index])
                || brackets.get(index + 1) == Some(&brackets[index])
        };
        let alone: Vec<usize> = (0..brackets.len())
            .filter(|&index| !shared(index))
            .collect();
        let mut found: Vec<Option<(f64, Vec<f64>)>> = vec![None; brackets.len()];
        for chunk in alone.chunks(LANES) {
            let own: Vec<(usize, (f64, f64))> = chunk
                .iter()
                .map(|&index| (range.start + index, brackets[index]))
                .collect();
            for (&index, state) in chunk.iter().zip(self.singles(&own)) {
                found[index] = Some(state);
            }
        }
        let mut ladder = Ladder::default();
        for (index, state) in found.into_iter().enumerate() {
            if let Some((energy, vector)) = state {
                ladder.energies.push(energy);
                ladder.vectors.push(vector);
            } else if ladder.energies.len() <= index {
                let count = brackets
                    .iter()
                    .filter(|&&other| other == brackets[index])
                    .count();
                let span = self.span(brackets[index], count);
                ladder.energies.extend(span.energies);
                ladder.vectors.extend(span.vectors);
            }
        }
        self.certify(&ladder, range.start)?;
        Ok(ladder)
    }

    /// Counts between the levels (and around clusters) must agree with their numbers.
    fn certify(&mut self, ladder: &Ladder, first: usize) -> Result<(), Uncertified> {
        let energies = &ladder.energies;
        let mut points = Vec::with_capacity(energies.len() + 1);
        for (index, &energy) in energies.iter().enumerate() {
            match energies.get(index + 1) {
                Some(above) if above - energy < CLUSTER => {}
                Some(above) => points.push((0.5 * (energy + above), first + index + 1)),
                None => points.push((energy + CLUSTER, first + index + 1)),
            }
        }
        points.push((energies[0] - CLUSTER, first));
        for chunk in points.chunks(LANES) {
            let lanes: Lanes = std::array::from_fn(|lane| chunk[lane.min(chunk.len() - 1)].0);
            let counts = self.factorise(&lanes);
            for (&(energy, wanted), got) in chunk.iter().zip(counts) {
                if got != wanted {
                    return Err(Uncertified {
                        level: wanted.max(1),
                        energy,
                    });
                }
            }
        }
        Ok(())
    }

    /// Brackets of the eigenvalues numbered `range`: each holds one, or is narrow and shared.
    fn isolate(&mut self, range: Range<usize>, low: f64) -> Vec<(f64, f64)> {
        let mut reach = 0.25;
        while self.count_below(low + reach) < range.end {
            reach *= 2.0;
        }
        let (bottom, top) = (self.count_below(low), self.count_below(low + reach));
        let mut known = vec![(low, bottom), (low + reach, top)];
        loop {
            let mut wanted = Vec::new();
            for pair in known.windows(2) {
                let ((low, below), (high, above)) = (pair[0], pair[1]);
                // One level needs a bracket narrow enough for inverse iteration to stay in it.
                let wide = above > below + 1 && high - low > 0.5 * CLUSTER;
                let loose = above == below + 1 && high - low > 2e-3;
                if below < range.end && above > range.start && (wide || loose) {
                    let parts = (above - below + 1).clamp(2, LANES);
                    wanted.extend(
                        (1..parts).map(|part| low + (high - low) * part as f64 / parts as f64),
                    );
                }
            }
            if wanted.is_empty() {
                break;
            }
            for energies in wanted.chunks(LANES) {
                let lanes: Lanes =
                    std::array::from_fn(|lane| energies[lane.min(energies.len() - 1)]);
                let counts = self.factorise(&lanes);
                known.extend(energies.iter().copied().zip(counts));
            }
            known.sort_by(|a, b| a.0.total_cmp(&b.0));
            known.dedup_by(|a, b| a.0 == b.0);
        }
        range
            .map(|level| {
                let above = known.partition_point(|&(_, below)| below <= level);
                (known[above - 1].0, known[above].0)
            })
            .collect()
    }

    /// The one state in each of up to [`LANES`] brackets, given with its number: inverse iteration,
    /// the bracket halved by counts until the iteration stays inside it.
    fn singles(&mut self, wanted: &[(usize, (f64, f64))]) -> Vec<(f64, Vec<f64>)> {
        /// Counts put a level on one side of a shift; rounding may leave it on the shift.
        const SLACK: f64 = 1e-12;
        let own = wanted.len();
        let mut brackets: Vec<(f64, f64)> = wanted.iter().map(|&(_, bracket)| bracket).collect();
        let mut energies: Vec<f64> = brackets.iter().map(|b| 0.5 * (b.0 + b.1)).collect();
        let mut vectors = vec![self.start_vectors(1).remove(0); own];
        let mut best: Vec<Option<(f64, Vec<f64>)>> = vec![None; own];
        for round in 0..200 {
            // Two steps at a fixed shift turn the general start vector towards the level.
            let settled = round % 3 == 2;
            let shifts: Lanes = std::array::from_fn(|lane| {
                let lane = lane.min(own - 1);
                let (low, high) = brackets[lane];
                let inside = energies[lane] > low && energies[lane] < high;
                if settled && inside {
                    energies[lane]
                } else {
                    0.5 * (low + high)
                }
            });
            let counts = self.factorise(&shifts);
            self.load(&vectors);
            let (steps, residuals) = self.iterate();
            self.store(&mut vectors);
            for lane in 0..own {
                let (low, high) = &mut brackets[lane];
                if counts[lane] > wanted[lane].0 {
                    *high = high.min(shifts[lane]);
                } else {
                    *low = low.max(shifts[lane]);
                }
                energies[lane] = shifts[lane] + steps[lane];
                let inside = energies[lane] > *low - SLACK && energies[lane] < *high + SLACK;
                if best[lane].is_none() && residuals[lane] < 1e-9 && inside {
                    best[lane] = Some((energies[lane], vectors[lane].clone()));
                }
            }
            if best.iter().all(Option::is_some) {
                break;
            }
        }
        // What has not settled is left to the certificate, which refuses it.
        best.into_iter()
            .zip(energies.into_iter().zip(vectors))
            .map(|(best, last)| best.unwrap_or(last))
            .collect()
    }

    /// General vectors to start inverse iteration from.
    fn start_vectors(&self, count: usize) -> Vec<Vec<f64>> {
        let mut seed = 0x9e37_79b9_7f4a_7c15_u64;
        let mut vectors: Vec<Vec<f64>> = (0..count)
            .map(|_| {
                (0..3 * self.nodes)
                    .map(|_| {
                        // A fixed sequence (xorshift): the same bytes in every run.
                        seed ^= seed << 13;
                        seed ^= seed >> 7;
                        seed ^= seed << 17;
                        (seed >> 11) as f64 / (1u64 << 53) as f64 - 0.5
                    })
                    .collect()
            })
            .collect();
        self.orthonormalise(&mut vectors);
        vectors
    }

    /// Σ w a b.
    #[must_use]
    pub fn product(&self, a: &[f64], b: &[f64]) -> f64 {
        let mut total = 0.0;
        Self::over_nodes(&self.runs, |node, _, weight, _| {
            let at = 3 * node;
            total += weight * (a[at] * b[at] + a[at + 1] * b[at + 1] + a[at + 2] * b[at + 2]);
        });
        total
    }

    /// Gram-Schmidt, twice for rounding.
    fn orthonormalise(&self, vectors: &mut [Vec<f64>]) {
        for index in 0..vectors.len() {
            let (done, rest) = vectors.split_at_mut(index);
            let own = &mut rest[0];
            for _ in 0..2 {
                for other in done.iter() {
                    let share = self.product(other, own);
                    for (value, part) in own.iter_mut().zip(other) {
                        *value -= share * part;
                    }
                }
                let scale = self.product(own, own).sqrt().recip();
                for value in own.iter_mut() {
                    *value *= scale;
                }
            }
        }
    }

    /// The `count` states that share a narrow bracket: inverse iteration on a block of vectors, then
    /// separation inside their span.
    fn span(&mut self, bracket: (f64, f64), count: usize) -> Ladder {
        let mut basis = self.start_vectors(count);
        // A shift a little off the cluster keeps pivots away from zero.
        self.factorise(&[0.5 * (bracket.0 + bracket.1) - 3.0 * CLUSTER; LANES]);
        for _ in 0..6 {
            for chunk in basis.chunks_mut(LANES) {
                self.load(chunk);
                self.iterate();
                self.store(chunk);
            }
            self.orthonormalise(&mut basis);
        }
        let energies = vec![0.5 * (bracket.0 + bracket.1); count];
        let mut ladder = Ladder {
            energies,
            vectors: basis,
        };
        self.separate(&mut ladder, vec![0.0; count]);
        ladder
    }
}

/// What one sweep over a ladder tells.
struct Sweep {
    /// Residual of each state.
    residuals: Vec<f64>,
    /// Eigenvalues below the point asked for, where a lane was free to count them.
    count: Option<usize>,
}

/// A point above the first `required` of some energies: half way to the next one known, or a little
/// above the last.
fn above(energies: &[f64], required: usize) -> f64 {
    let last = energies[required - 1];
    match energies.get(required) {
        Some(next) if next - last > 4.0 * LARGEST_RESIDUAL => 0.5 * (last + next),
        _ => last + 4.0 * LARGEST_RESIDUAL,
    }
}

/// Ranges of levels with neighbours closer than [`GROUP`].
fn groups(energies: &[f64]) -> Vec<Range<usize>> {
    let mut groups = Vec::new();
    let mut start = 0;
    for level in 1..=energies.len() {
        let apart = level == energies.len() || energies[level] - energies[level - 1] >= GROUP;
        if apart {
            groups.push(start..level);
            start = level;
        }
    }
    groups
}

fn sum(a: &Three, b: &Three) -> Three {
    std::array::from_fn(|row| std::array::from_fn(|column| a[row][column] + b[row][column]))
}

/// Node lengths from the upper wall down.
struct WeightsDown<'a> {
    runs: &'a [BlockRun],
    run: usize,
    left: usize,
}

impl<'a> WeightsDown<'a> {
    fn new(runs: &'a [BlockRun]) -> Self {
        let run = runs.len() - 1;
        Self {
            runs,
            run,
            left: runs[run].intervals - 1,
        }
    }

    fn next_weight(&mut self) -> f64 {
        if self.left > 0 {
            self.left -= 1;
            return self.runs[self.run].length;
        }
        let above = self.runs[self.run].length;
        self.run -= 1;
        self.left = self.runs[self.run].intervals - 1;
        0.5 * (above + self.runs[self.run].length)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A deterministic sequence in [0, 1).
    fn random(seed: &mut u64) -> f64 {
        *seed = seed
            .wrapping_mul(6364136223846793005)
            .wrapping_add(1442695040888963407);
        (*seed >> 33) as f64 / (1u64 << 31) as f64
    }

    /// Three coupled functions with masses of their own, a potential and a coupling with slope.
    fn chain(seed: &mut u64) -> BlockChain {
        let runs = (0..5)
            .map(|_| {
                let length = 0.3 + 0.2 * random(seed);
                let mut run = BlockRun {
                    intervals: 6 + (8.0 * random(seed)) as usize,
                    length,
                    lower: [[0.0; 3]; 3],
                    upper: [[0.0; 3]; 3],
                    coupling: [[0.0; 3]; 3],
                };
                for a in 0..3 {
                    let link = (0.05 + 0.3 * random(seed)) / length;
                    run.lower[a][a] = link + 0.2 * length * random(seed);
                    run.upper[a][a] = run.lower[a][a];
                    run.coupling[a][a] = -link;
                    for b in a + 1..3 {
                        let (slope, mix) = (0.1 * random(seed), 0.05 * length * random(seed));
                        run.lower[a][b] = mix - slope;
                        run.upper[a][b] = mix + slope;
                        for (row, column, sign) in [(a, b, 1.0), (b, a, -1.0)] {
                            run.coupling[row][column] = sign * slope;
                        }
                        run.lower[b][a] = run.lower[a][b];
                        run.upper[b][a] = run.upper[a][b];
                    }
                }
                run
            })
            .collect();
        BlockChain::new(runs)
    }

    fn dense(chain: &BlockChain) -> Vec<f64> {
        let size = 3 * chain.nodes();
        let mut matrix = DMatrix::zeros(size, size);
        for (row, column, value) in chain.entries() {
            matrix[(row, column)] = value;
            matrix[(column, row)] = value;
        }
        let mut values: Vec<f64> = SymmetricEigen::new(matrix)
            .eigenvalues
            .iter()
            .copied()
            .collect();
        values.sort_by(f64::total_cmp);
        values
    }

    #[test]
    fn random_chains_agree_with_a_dense_solver() {
        let mut seed = 3;
        for _ in 0..20 {
            let mut chain = chain(&mut seed);
            let exact = dense(&chain);
            let floor = exact[0] - 0.3;
            let ladder = chain.lowest(11, floor).expect("certified");
            for (got, want) in ladder.energies.iter().zip(&exact) {
                assert!((got - want).abs() < 1e-10, "{got} {want}");
            }
            assert_eq!(chain.count_below(0.5 * (exact[6] + exact[7])), 7);
            for (a, left) in ladder.vectors.iter().enumerate() {
                for (b, right) in ladder.vectors.iter().enumerate() {
                    let wanted = f64::from(u8::from(a == b));
                    let got = chain.product(left, right);
                    assert!((got - wanted).abs() < 1e-5, "{a} {b} {got}");
                }
            }
            // A small change is followed from the states before it.
            for run in chain.runs_mut() {
                run.lower[0][1] += 1e-4;
                run.lower[1][0] += 1e-4;
                run.upper[2][2] += 3e-4;
            }
            let exact = dense(&chain);
            let mut followed = ladder.clone();
            assert!(chain.follow(&mut followed, 11, floor));
            for (got, want) in followed.energies.iter().zip(&exact) {
                assert!((got - want).abs() < 1e-8, "{got} {want}");
            }
        }
    }

    /// States that leave a level out, or hold one twice, are refused, not believed.
    #[test]
    fn a_missed_level_is_noticed() {
        let mut seed = 11;
        let mut chain = chain(&mut seed);
        let floor = dense(&chain)[0] - 0.3;
        let ladder = chain.lowest(5, floor).expect("certified");
        assert!(chain.follow(&mut ladder.clone(), 5, floor));
        for missing in 0..4 {
            let mut gap = ladder.clone();
            gap.energies.remove(missing);
            gap.vectors.remove(missing);
            assert!(
                !chain.follow(&mut gap, 4, floor),
                "level {missing} left out"
            );
        }
        assert!(
            chain.lowest(4, dense(&chain)[2]).is_err(),
            "levels below the floor"
        );
    }

    /// Two copies of a chain joined by a high barrier: pairs too close for counting.
    #[test]
    fn pairs_of_far_copies_are_spanned_together() {
        let part = |intervals, potential: f64| {
            let length = 0.4;
            let mut run = BlockRun {
                intervals,
                length,
                lower: [[0.0; 3]; 3],
                upper: [[0.0; 3]; 3],
                coupling: [[0.0; 3]; 3],
            };
            for (a, mass) in [0.4, 0.08, 0.2].into_iter().enumerate() {
                let link = 0.0381 / mass / length;
                run.lower[a][a] = link + 0.5 * potential * length;
                run.upper[a][a] = run.lower[a][a];
                run.coupling[a][a] = -link;
            }
            run
        };
        let well = || part(20, 0.0);
        let mut chain = BlockChain::new(vec![
            part(30, 0.8),
            well(),
            part(90, 0.8),
            well(),
            part(30, 0.8),
        ]);
        let exact = dense(&chain);
        let ladder = chain.lowest(8, -0.1).expect("certified");
        for (got, want) in ladder.energies.iter().zip(&exact) {
            assert!((got - want).abs() < 1e-10, "{got} {want}");
        }
    }
}
