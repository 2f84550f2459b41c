//! Where an alloy would unmix.
//!
//! # Equation
//!
//! The delta-lattice-parameter model takes the bond energy of any III-V alloy from its lattice
//! constant alone,
//!
//! ```text
//!  G = −K a^(−5/2) + R T Σ x ln x ,     K = 1.15e7 cal/mol Å^(5/2) ,
//! ```
//!
//! the sum over both sublattices. An alloy is unstable against small changes of composition where
//! the matrix of second derivatives of G by the free fractions is not positive; the temperature at
//! which it ceases to be is the largest root of det(E + R T S) = 0, E and S being those of the bond
//! energy and of the mixing entropy.
//!
//! It is the free alloy that is meant. A coherent film is held together by its substrate, and growth
//! is no equilibrium: alloys far inside the gap are grown, with wider lines.
//!
//! # References
//!
//! G. B. Stringfellow, J. Cryst. Growth 27, 21 (1974) (the model and K, from memory); 58, 194 (1982)
//! (quaternaries).

use super::{Composition, Offsets, Parameters};
use nalgebra::{DMatrix, DVector};

/// K, cal/mol Å^(5/2).
const BOND_CAL_A: f64 = 1.15e7;
/// Gas constant, cal/(mol K).
const GAS_CAL_K: f64 = 1.987204;
/// Step of the second differences.
const STEP: f64 = 1e-4;

impl Parameters {
    /// Temperature below which the free alloy is unstable against unmixing, K; 0 for compounds.
    #[must_use]
    pub fn spinodal_k(&self, composition: &Composition) -> f64 {
        let directions = free_directions(composition);
        if directions.is_empty() {
            return 0.0;
        }
        let energy = |moves: &[(usize, f64)]| {
            let mut moved = *composition;
            for &(direction, by) in moves {
                let (is_group_iii, from, to) = directions[direction];
                let fractions = if is_group_iii {
                    &mut moved.group_iii
                } else {
                    &mut moved.group_v
                };
                fractions[from] -= by;
                fractions[to] += by;
            }
            // Vegard: the lattice constant is bilinear, so that a step past an end does no harm.
            let lattice_a = 10.0 * self.crystal(&moved, 300.0, Offsets::Table).lattice_nm;
            -BOND_CAL_A * lattice_a.powf(-2.5)
        };
        let count = directions.len();
        let bonds = DMatrix::from_fn(count, count, |i, j| {
            let at = |a: f64, b: f64| energy(&[(i, a * STEP), (j, b * STEP)]);
            (at(1.0, 1.0) - at(1.0, -1.0) - at(-1.0, 1.0) + at(-1.0, -1.0)) / (4.0 * STEP * STEP)
        });
        let entropy = DMatrix::from_fn(count, count, |i, j| {
            let ((one, from, to), (other, _, to_other)) = (directions[i], directions[j]);
            let fractions = if one {
                composition.group_iii
            } else {
                composition.group_v
            };
            // All directions of a sublattice lead away from one element.
            let shared = if one == other {
                1.0 / fractions[from]
            } else {
                0.0
            };
            shared
                + if one == other && to == to_other {
                    1.0 / fractions[to]
                } else {
                    0.0
                }
        });
        // det(E + R T S) = 0: the eigenvalues of −L⁻¹ E L⁻ᵀ with S = L Lᵀ are R T.
        let Some(cholesky) = entropy.cholesky() else {
            return 0.0;
        };
        let Some(inverse) = cholesky.l().try_inverse() else {
            return 0.0;
        };
        let reduced = -(&inverse * bonds * inverse.transpose());
        let eigenvalues: DVector<f64> = reduced.symmetric_eigenvalues();
        eigenvalues.max().max(0.0) / GAS_CAL_K
    }
}

/// Free moves of the composition: on a sublattice (group III or not), from its first element to
/// each other one present.
fn free_directions(composition: &Composition) -> Vec<(bool, usize, usize)> {
    [(true, composition.group_iii), (false, composition.group_v)]
        .into_iter()
        .flat_map(|(is_group_iii, fractions)| {
            let mut present = (0..3).filter(move |&place| fractions[place] > 0.0);
            let first = present.next().unwrap_or(0);
            present.map(move |other| (is_group_iii, first, other))
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn spinodal_k(formula: &str) -> f64 {
        let composition = Composition::parse(formula).expect("a formula");
        Parameters::shipped().spinodal_k(&composition)
    }

    /// For a small misfit the model is a regular solution with Ω = 4.375 K Δa²/ā^4.5, which unmixes
    /// below Ω/2R at equal fractions (Stringfellow 1974).
    #[test]
    fn a_ternary_is_nearly_a_regular_solution() {
        for (formula, ends_a) in [
            ("In0.5Ga0.5As", [6.0583, 5.65325]),
            ("In0.5Ga0.5P", [5.8697, 5.4505]),
            ("GaAs0.5Sb0.5", [5.65325, 6.0959]),
            ("Al0.5Ga0.5As", [5.6611, 5.65325]),
        ] {
            let (sum, difference): (f64, f64) = (ends_a[0] + ends_a[1], ends_a[0] - ends_a[1]);
            let omega = 4.375 * BOND_CAL_A * difference.powi(2) / (0.5 * sum).powf(4.5);
            let regular = omega / (2.0 * GAS_CAL_K);
            let got = spinodal_k(formula);
            assert!(
                (got / regular - 1.0).abs() < 0.01,
                "{formula}: {got} {regular}"
            );
        }
    }

    #[test]
    fn compounds_are_stable_and_dilute_alloys_nearly_so() {
        assert_eq!(spinodal_k("GaAs"), 0.0);
        assert!(spinodal_k("In0.02Ga0.98As") < 0.1 * spinodal_k("In0.5Ga0.5As"));
    }

    /// The middle of InGaAsP on InP lies deeper in the gap than InGaAs or InP by themselves.
    #[test]
    fn mixing_on_both_sublattices_unmixes_sooner() {
        let quaternary = spinodal_k("In0.74Ga0.26As0.56P0.44");
        assert!(quaternary > spinodal_k("In0.74Ga0.26As"));
        assert!(quaternary > spinodal_k("InAs0.56P0.44"));
    }
}
