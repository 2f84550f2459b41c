//! Near neighbours, separated inside their span.

use std::ops::Range;

use nalgebra::{DMatrix, SymmetricEigen};

use super::{BlockChain, Ladder};
use crate::numerics::clusters::clusters;

/// Levels closer than this may have to be separated inside their span.
pub(super) const NEAR: f64 = 5e-5;
/// Neighbours are separated unless both residuals are this much smaller than their distance: the
/// vectors are then as pure as the inverse of it.
const PURE: f64 = 1e3;
/// No residual is known better than this: rounding may leave none at all, even of a state found twice.
const LEAST_RESIDUAL: f64 = 1e-11;

impl BlockChain {
    /// Gram-Schmidt, twice for rounding.
    pub(super) fn orthonormalise(&self, vectors: &mut [Vec<f64>]) {
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

    /// The states inside the span of some vectors, lowest first, with their residuals.
    pub(super) fn separate(&self, mut basis: Vec<Vec<f64>>) -> (Ladder, Vec<f64>) {
        self.orthonormalise(&mut basis);
        let images: Vec<Vec<f64>> = basis.iter().map(|vector| self.image(vector)).collect();
        let dot = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| a * b).sum::<f64>();
        let size = basis.len();
        let form = DMatrix::from_fn(size, size, |a, b| dot(&basis[a], &images[b]));
        let eigen = SymmetricEigen::new(0.5 * (&form + form.transpose()));
        let mut order: Vec<usize> = (0..size).collect();
        order.sort_by(|&a, &b| eigen.eigenvalues[a].total_cmp(&eigen.eigenvalues[b]));
        let mix = |vectors: &[Vec<f64>], column: usize| {
            let mut mixed = vec![0.0; vectors[0].len()];
            for (row, vector) in vectors.iter().enumerate() {
                let share = eigen.eigenvectors[(row, column)];
                for (value, part) in mixed.iter_mut().zip(vector) {
                    *value += share * part;
                }
            }
            mixed
        };
        let mut ladder = Ladder::default();
        let mut residuals = Vec::with_capacity(size);
        for column in order {
            let (energy, vector) = (eigen.eigenvalues[column], mix(&basis, column));
            residuals.push(self.residual(energy, &vector, &mix(&images, column)));
            ladder.energies.push(energy);
            ladder.vectors.push(vector);
        }
        (ladder, residuals)
    }
}

/// Ranges of two and more rising levels, each given with its residual, that are too near to each other
/// to be pure. An impure one reaches over its neighbours: the largest residual among levels that stand
/// near each other holds for all of them.
///
/// # Arguments
///
/// * `held` – how many of the lowest levels must be pure; groups of those above do not matter
pub(super) fn groups(
    levels: impl Iterator<Item = (f64, f64)> + Clone,
    held: usize,
) -> Vec<Range<usize>> {
    let mut groups = Vec::new();
    let above = levels.clone().skip(1);
    let mut pairs = levels.clone().zip(above).take(held);
    if pairs.all(|(low, high)| high.0 - low.0 >= NEAR) {
        return groups;
    }
    let (energies, residuals): (Vec<f64>, Vec<f64>) = levels.unzip();
    for near in clusters(&energies, NEAR) {
        if near.start >= held {
            break;
        }
        let largest = residuals[near.clone()]
            .iter()
            .copied()
            .fold(LEAST_RESIDUAL, f64::max);
        let impure = clusters(&energies[near.clone()], PURE * largest);
        let places = impure
            .into_iter()
            .map(|it| near.start + it.start..near.start + it.end);
        groups.extend(places.filter(|group| group.len() > 1 && group.start < held));
    }
    groups
}
