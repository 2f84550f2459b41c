//! No state is missed, none is found twice, none is spurious, and errors fall as they should.

use crate::hamiltonian::dense;
use crate::recipe::{BARRIER, STEP, WELL, barrier, read, shipped, text, well};
use stepwell::materials::Parameters;
use stepwell::numerics::block::{BlockChain, Hold, Trail};
use stepwell::profile::{Cells, Profile};
use stepwell::subbands::interval;

/// Longest interval of the coarsest grid that the program uses, nm.
const COARSEST_NM: f64 = 0.5;

/// The chain of a block on a grid, hole energies upwards.
fn chain(cells: &[Cells], k_per_nm: f64, sign: f64) -> BlockChain {
    let chain = BlockChain::new(
        cells
            .iter()
            .map(|cell| {
                let mut run = interval(&cell.numbers, cell.tilt_ev, cell.length_nm, k_per_nm, sign);
                run.intervals = cell.intervals;
                run
            })
            .collect(),
    );
    assert!(chain.count_below(-100.0) == 0);
    chain
}

/// Hole energy of the highest hole edge of a grid.
fn highest_edge(cells: &[Cells]) -> f64 {
    -cells
        .iter()
        .map(|cell| cell.numbers.edges.heavy_ev.max(cell.numbers.edges.light_ev))
        .fold(f64::NEG_INFINITY, f64::max)
}

/// Counting and following against a dense solver of the same matrix.
#[test]
fn states_of_every_wave_number_are_those_of_a_dense_solver() {
    const STATES: usize = 10;
    let layers = [
        barrier(9.0, BARRIER),
        well(6.0, WELL),
        barrier(2.0, STEP),
        barrier(9.0, BARRIER),
    ];
    let stack = read(&text(&layers, ""));
    let parameters = Parameters::shipped();
    let profile = Profile::new(&stack, &parameters).expect("a well");
    let cells = profile.grid(2.0, 0);
    let floor = highest_edge(&cells) - 1e-9;
    for sign in [1.0, -1.0] {
        let mut followed: Option<Trail> = None;
        for step in 0..=24 {
            let k_per_nm = 0.0125 * f64::from(step);
            let mut chain = chain(&cells, k_per_nm, sign);
            let mut trail = followed.take().unwrap_or_else(|| {
                let ladder = chain.lowest(STATES + 2, floor).expect("certified");
                Trail::new(&chain, &ladder, -1.0)
            });
            assert!(
                trail.step(&mut chain, k_per_nm, Hold::Lowest(STATES), floor),
                "lost at {k_per_nm}/nm"
            );
            let energies: Vec<f64> = trail.energies().collect();
            if step % 6 == 0 {
                let exact = dense(&chain);
                let found = chain.lowest(STATES, floor).expect("certified");
                for (index, want) in exact[..STATES].iter().enumerate() {
                    let (got, tracked) = (found.energies[index], energies[index]);
                    assert!((got - want).abs() < 1e-9, "{got} {want} at {k_per_nm}/nm");
                    assert!(
                        (tracked - want).abs() < 1e-8,
                        "{tracked} {want} at {k_per_nm}/nm"
                    );
                }
                for pair in exact[..40].windows(2) {
                    let between = 0.5 * (pair[0] + pair[1]);
                    let below = exact.iter().filter(|&&energy| energy < between).count();
                    assert_eq!(chain.count_below(between), below);
                }
            }
            followed = Some(trail);
        }
    }
}

/// Raw energies converge with the square of the step, extrapolated ones with its fourth power, at
/// zero wave number and far from it.
#[test]
fn errors_fall_with_the_square_of_the_step_and_its_fourth_power_once_extrapolated() {
    let layers = [
        barrier(60.0, BARRIER),
        well(8.0, WELL),
        barrier(2.0, STEP),
        barrier(60.0, BARRIER),
    ];
    let stack = read(&text(&layers, ""));
    let parameters = Parameters::shipped();
    let profile = Profile::new(&stack, &parameters).expect("a well");
    for k_per_nm in [0.0, 0.5] {
        let raw: Vec<Vec<f64>> = (0..5)
            .map(|halvings| {
                let cells = profile.grid(COARSEST_NM, halvings);
                chain(&cells, k_per_nm, -1.0)
                    .lowest(3, highest_edge(&cells) - 1e-9)
                    .expect("certified")
                    .energies
            })
            .collect();
        for state in 0..3 {
            let raw: Vec<f64> = raw.iter().map(|grid| grid[state]).collect();
            let extrapolated: Vec<f64> = raw
                .windows(2)
                .map(|pair| pair[1] + (pair[1] - pair[0]) / 3.0)
                .collect();
            // The last three of a series on halved steps give its order.
            let order = |values: &[f64]| -> f64 {
                let [.., a, b, c] = values else {
                    panic!("three steps")
                };
                ((a - b) / (b - c)).abs().log2()
            };
            let (second, fourth) = (order(&raw), order(&extrapolated));
            assert!(
                (second - 2.0).abs() < 0.03 && (fourth - 4.0).abs() < 0.25,
                "state {state} at {k_per_nm}/nm: orders {second} and {fourth}"
            );
        }
    }
}

/// With the ordering of the operators that the blocks use no state lies above the highest hole edge,
/// however large the wave number: counted on three grids of every structure that is shipped.
#[test]
fn no_state_lies_above_the_highest_edge() {
    let parameters = Parameters::shipped();
    for (name, text) in shipped() {
        let stack = read(&text);
        let profile = Profile::new(&stack, &parameters).expect("a well");
        for halvings in 0..3 {
            let cells = profile.grid(COARSEST_NM, halvings);
            let edge = highest_edge(&cells);
            for (k_per_nm, sign) in
                (0..=8).flat_map(|step| [1.0, -1.0].map(|sign| (0.25 * f64::from(step), sign)))
            {
                let chain = chain(&cells, k_per_nm, sign);
                assert_eq!(
                    chain.count_below(edge - 1e-9),
                    0,
                    "{name}: above the edge at {k_per_nm}/nm, {halvings} halvings"
                );
                assert!(chain.count_below(edge + 1.5) > 0);
            }
        }
    }
}
