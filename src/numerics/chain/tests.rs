use super::*;
use nalgebra::{DMatrix, SymmetricEigen};

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

/// What halving the intervals changes is what the shift says, at steps of mass and of interval too.
#[test]
fn the_shift_of_a_level_is_that_of_its_grid() {
    let soft = |nm, per_nm, potential, mass, softening| Run {
        softening,
        ..run(nm, per_nm, potential, mass)
    };
    for softening in [0.0, 0.7] {
        let grid = |per_nm| {
            Chain::new(vec![
                soft(20.0, per_nm, 0.3, 0.09, softening),
                soft(8.0, 0.7 * per_nm, 0.0, 0.06, 1.3 * softening),
                soft(3.0, per_nm, 0.3, 0.09, softening),
                soft(5.0, per_nm, 0.05, 0.05, 1.5 * softening),
                soft(20.0, per_nm, 0.35, 0.12, softening),
            ])
        };
        let (coarse, fine) = (grid(10.0), grid(20.0));
        let lower = coarse.lowest(4, None).expect("certified");
        let upper = fine.lowest(4, None).expect("certified");
        for (a, b) in lower.iter().zip(&upper) {
            let ratio = (a.energy - b.energy) / (0.75 * coarse.shift(a));
            assert!((ratio - 1.0).abs() < 0.02, "{} {ratio}", a.energy);
        }
    }
}
