//! Levels too close to be told apart by counting: their common span, separated inside it.

use super::{CLUSTER, Chain, ORTHOGONAL_BELOW, State};
use crate::numerics::general::general_vectors;
use nalgebra::{DMatrix, SymmetricEigen};

impl Chain {
    /// `count` states that share one narrow bracket around `centre`: their span by inverse
    /// iteration, separated inside it.
    pub(super) fn common_span(&self, centre: f64, count: usize) -> Vec<State> {
        // Close to the centre of the bracket, so that its levels are nearer than any neighbour, and
        // a little off it, which keeps the factorisation away from zero pivots.
        let shift = centre - CLUSTER / 64.0;
        let (diagonal, link) = self.pencil(shift);
        let factors = Factors::new(&diagonal, &link);
        let weights = self.weights();
        let mut basis = general_vectors(count, self.nodes);
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
        self.separate(shift, &basis)
    }

    /// Rayleigh-Ritz: the states inside the span of an orthonormal basis, with T linearised at
    /// `energy`.
    fn separate(&self, energy: f64, basis: &[Vec<f64>]) -> Vec<State> {
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
    pub(super) fn orthogonal_clusters(&self, states: &mut [State]) {
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
                    .zip(self.separate(centre, &basis))
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
