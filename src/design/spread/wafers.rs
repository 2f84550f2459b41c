//! Wafers as they are drawn.

use super::statistics::moments;
use super::{Request, Wanted};
use crate::design::draws::{BLOCK, Normals};
use crate::design::surrogate::Quadratic;
use rayon::prelude::*;
use std::sync::atomic::{AtomicUsize, Ordering};

/// Largest factor by which errors are scaled to reach a yield.
const LARGEST_FACTOR: f64 = 1e3;

/// Wafers that the factor for a wanted yield is found with, at most.
const FACTOR_WAFERS: usize = 100_000;

/// Wafers to be drawn.
pub(super) struct Wafers<'a> {
    pub(super) variables: usize,
    pub(super) request: &'a Request,
    pub(super) progress: &'a (dyn Fn(usize) + Sync),
}

impl Wafers<'_> {
    /// The wavelengths of `count` wafers in the order of their draws.
    pub(super) fn drawn(
        &self,
        count: usize,
        wavelength_nm: impl Fn(&[f64]) -> Option<f64> + Sync,
    ) -> Vec<Option<f64>> {
        let done = AtomicUsize::new(0);
        (0..count.div_ceil(BLOCK))
            .into_par_iter()
            .flat_map_iter(|block| {
                let size = BLOCK.min(count - block * BLOCK);
                let mut normals = Normals::of_block(self.request.seed, block as u64);
                let mut point = vec![0.0; self.variables];
                let wavelengths: Vec<Option<f64>> = (0..size)
                    .map(|wafer| {
                        point.fill_with(|| normals.draw());
                        if wafer % 64 == 63 {
                            let done = done.fetch_add(64, Ordering::Relaxed) + 64;
                            (self.progress)(done);
                        }
                        wavelength_nm(&point)
                    })
                    .collect();
                wavelengths
            })
            .collect()
    }

    /// The factor on all errors at which a share of the wafers is good, as the design stands and if
    /// its median stood on the target.
    pub(super) fn wanted(&self, share: f64, window: (f64, f64), quadratic: &Quadratic) -> Wanted {
        let centred = (quadratic.centre, window.1);
        let factor = self.factor(share, window, quadratic);
        Wanted {
            share,
            factor,
            sigma_nm: factor.map(|factor| moments(&self.scaled(factor, quadratic)).sigma_nm),
            factor_if_centred: self.factor(share, centred, quadratic),
        }
    }

    /// Wavelengths where all errors are so many times as large.
    fn scaled(&self, factor: f64, quadratic: &Quadratic) -> Vec<f64> {
        let silent = Wafers {
            progress: &|_| {},
            ..*self
        };
        let drawn = silent.drawn(self.request.draws.min(FACTOR_WAFERS), |x| {
            let scaled: Vec<f64> = x.iter().map(|x| factor * x).collect();
            Some(quadratic.at(&scaled))
        });
        drawn.into_iter().flatten().collect()
    }

    /// The share falls as the errors grow wherever the design stands inside the window: bisection
    /// on the logarithm of the factor.
    fn factor(
        &self,
        share: f64,
        (target_nm, tolerance_nm): (f64, f64),
        quadratic: &Quadratic,
    ) -> Option<f64> {
        let reached = |factor: f64| {
            let wafers = self.scaled(factor, quadratic);
            let inside = wafers
                .iter()
                .filter(|nm| (*nm - target_nm).abs() <= tolerance_nm)
                .count();
            inside as f64 >= share * wafers.len() as f64
        };
        let (mut low, mut high) = (LARGEST_FACTOR.recip(), LARGEST_FACTOR);
        if !reached(low) {
            return None;
        }
        if reached(high) {
            return Some(high);
        }
        while high / low > 1.0 + 1e-4 {
            let middle = (low * high).sqrt();
            if reached(middle) {
                low = middle;
            } else {
                high = middle;
            }
        }
        Some(low)
    }
}
