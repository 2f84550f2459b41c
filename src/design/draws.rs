//! Normal deviates that do not depend on who draws them.
//!
//! Draws come in blocks. Block k of a seed is stream k of the generator ChaCha8 (a keyed counter, so
//! that any block can be had without those before it), whose words become pairs of normal deviates
//! by the transform of G. E. P. Box, M. E. Muller, Ann. Math. Stat. 29, 610 (1958). Threads share
//! the blocks out as they like and the result is the same, on every machine: the logarithm and the
//! circular functions are the portable ones of `libm`.

use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use std::f64::consts::PI;

/// Wafers in one block.
pub(super) const BLOCK: usize = 4096;

/// Standard normal deviates of one block.
#[derive(Debug)]
pub(super) struct Normals {
    generator: ChaCha8Rng,
    waiting: Option<f64>,
}

impl Normals {
    /// Those of block `block` of a seed.
    #[must_use]
    pub(super) fn of_block(seed: u64, block: u64) -> Self {
        let mut generator = ChaCha8Rng::seed_from_u64(seed);
        generator.set_stream(block);
        Self {
            generator,
            waiting: None,
        }
    }

    /// Uniform in (0, 1].
    fn uniform(&mut self) -> f64 {
        const STEP: f64 = 1.0 / (1u64 << 53) as f64;
        ((self.generator.next_u64() >> 11) + 1) as f64 * STEP
    }

    /// The next deviate.
    pub(super) fn draw(&mut self) -> f64 {
        if let Some(second) = self.waiting.take() {
            return second;
        }
        let length = libm::sqrt(-2.0 * libm::log(self.uniform()));
        let angle = 2.0 * PI * self.uniform();
        self.waiting = Some(length * libm::sin(angle));
        length * libm::cos(angle)
    }
}

/// The share of a standard normal variable that lies below `x`.
///
/// Φ(x) = ½ erfc(−x/√2).
#[must_use]
pub(super) fn normal_below(x: f64) -> f64 {
    0.5 * libm::erfc(-x * std::f64::consts::FRAC_1_SQRT_2)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn moments_are_those_of_the_normal_law() {
        let mut normals = Normals::of_block(7, 3);
        let count = 200_000;
        let draws: Vec<f64> = (0..count).map(|_| normals.draw()).collect();
        let moment =
            |power: i32| draws.iter().map(|x| x.powi(power)).sum::<f64>() / f64::from(count);
        // Standard errors: 1/√n, √2/√n, √15/√n, √96/√n.
        let error = |variance: f64| 4.0 * (variance / f64::from(count)).sqrt();
        assert!(moment(1).abs() < error(1.0));
        assert!((moment(2) - 1.0).abs() < error(2.0));
        assert!(moment(3).abs() < error(15.0));
        assert!((moment(4) - 3.0).abs() < error(96.0));
    }

    #[test]
    fn blocks_and_seeds_differ_and_repeat() {
        let first = |seed, block| Normals::of_block(seed, block).draw().to_bits();
        assert_eq!(first(1, 0), first(1, 0));
        assert_ne!(first(1, 0), first(1, 1));
        assert_ne!(first(1, 0), first(2, 0));
    }

    #[test]
    fn the_normal_law_has_its_known_shares() {
        // M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions (1964), table 26.1.
        for (x, share) in [(0.0, 0.5), (1.0, 0.841344746), (-2.0, 0.022750132)] {
            assert!((normal_below(x) - share).abs() < 1e-9, "{x}");
        }
    }
}
