use nalgebra::{DMatrix, SymmetricEigen};

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
        let mut trail = Trail::new(&chain, &ladder, 0.0);
        assert!(trail.step(&mut chain, 1.0, Hold::Lowest(11), floor));
        for (got, want) in trail.energies().zip(&exact) {
            assert!((got - want).abs() < 1e-8, "{got} {want}");
        }
    }
}

/// A trail whose states leave a level out finds it again by its count.
#[test]
fn a_missed_level_is_found_again() {
    let mut seed = 11;
    let mut chain = chain(&mut seed);
    let exact = dense(&chain);
    let floor = exact[0] - 0.3;
    let ladder = chain.lowest(5, floor).expect("certified");
    for missing in 0..5 {
        let mut gap = ladder.clone();
        gap.energies.remove(missing);
        gap.vectors.remove(missing);
        let mut trail = Trail::new(&chain, &gap, 0.0);
        let held = trail.step(&mut chain, 1.0, Hold::Lowest(4), floor);
        assert!(
            held,
            "level {missing} left out: {:?} of {exact:?}",
            trail.energies().collect::<Vec<_>>()
        );
        for (got, want) in trail.energies().zip(&exact) {
            assert!(
                (got - want).abs() < 1e-8,
                "level {missing} left out: {got} {want}"
            );
        }
    }
    // The same state twice, the second hiding the next.
    let mut twice = ladder.clone();
    twice.energies[2] = twice.energies[1] + 1e-7;
    twice.vectors[2] = twice.vectors[1].clone();
    let mut trail = Trail::new(&chain, &twice, 0.0);
    assert!(trail.step(&mut chain, 1.0, Hold::Lowest(5), floor));
    for (got, want) in trail.energies().zip(&exact) {
        assert!((got - want).abs() < 1e-8, "{got} {want}");
    }
    // By character nothing is made up: both would be one state.
    let mut trail = Trail::new(&chain, &twice, 0.0);
    let held = trail.step(&mut chain, 1.0, Hold::Character, floor);
    let energies: Vec<f64> = trail.energies().collect();
    assert!(!held || energies.windows(2).all(|pair| pair[1] - pair[0] > 1e-6));
    assert!(chain.lowest(4, exact[2]).is_err(), "levels below the floor");
    let mut trail = Trail::new(&chain, &ladder, 0.0);
    assert!(
        !trail.step(&mut chain, 1.0, Hold::Lowest(5), exact[2]),
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
