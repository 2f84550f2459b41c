//! No state is missed, none is found twice, none is spurious, and errors fall as they should.

use crate::hamiltonian::dense;
use crate::recipe::{BARRIER, Random, STEP, WELL, barrier, read, shipped, solved, text, well};
use rayon::prelude::*;
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

/// The dispersion that the program follows from wave number to wave number is what a search from
/// nothing finds at each of them.
#[test]
fn the_dispersion_is_what_a_search_from_nothing_finds() {
    const NEAR_EV: f64 = 1e-3;
    let layers = [
        barrier(60.0, BARRIER),
        well(9.0, WELL),
        barrier(2.5, BARRIER),
        well(5.0, STEP),
        barrier(60.0, BARRIER),
    ];
    let stack = read(&text(&layers, ""));
    solved(&stack, 0.12, |profile, bands, states| {
        let grids: Vec<Vec<Cells>> = (0..8)
            .map(|halvings| profile.grid(COARSEST_NM, halvings))
            .collect();
        let nodes = bands.nodes.positions_nm.len();
        let finest = grids
            .iter()
            .position(|cells| cells.iter().map(|cell| cell.intervals).sum::<usize>() == nodes + 1)
            .expect("the grid of the envelopes");
        let count = states.zone_centre.len();
        assert!(count > 4 && states.blocks.len() == 2 && states.k_per_nm.len() > 40);
        let (mut compared, mut crowded) = (0, 0);
        for at in (1..states.k_per_nm.len()).step_by(9) {
            let k_per_nm = states.k_per_nm[at];
            for (block, sign) in states.blocks.iter().zip([1.0, -1.0]) {
                let [coarse, fine] = [finest - 1, finest].map(|grid| {
                    chain(&grids[grid], k_per_nm, sign)
                        .lowest(count + 1, highest_edge(&grids[grid]) - 1e-9)
                        .expect("certified")
                        .energies
                });
                for (state, got) in block[at].energy_ev.iter().enumerate() {
                    // Neighbours nearer than the grids are to each other may cross between these:
                    // their order then says little.
                    let alone = |other: usize| {
                        let distance = (fine[other] - fine[state]).abs();
                        let moved = |state: usize| (fine[state] - coarse[state]).abs();
                        distance > NEAR_EV + 4.0 * moved(state).max(moved(other))
                    };
                    if !(alone(state + 1) && (state == 0 || alone(state - 1))) {
                        crowded += 1;
                        continue;
                    }
                    compared += 1;
                    let want = -(fine[state] + (fine[state] - coarse[state]) / 3.0);
                    assert!(
                        (got - want).abs() < 1e-7,
                        "state {state} of block {sign} at {k_per_nm}/nm: {got} {want}"
                    );
                }
            }
        }
        assert!(compared > 2 * crowded, "{compared} compared, {crowded} not");
    });
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

/// Five hundred random stacks, strained, of up to three wells: everything is certified, heavy holes
/// at zero wave number are those of the single band, and states keep their order.
#[test]
fn five_hundred_random_stacks_are_certified() {
    let parameters = Parameters::shipped();
    let mut random = Random(7);
    let stacks: Vec<_> = (0..500).map(|_| random.layers()).collect();
    let certify = |(number, layers): (usize, &Vec<_>)| {
        let mut slices_seen = 0;
        let file = text(layers, "");
        let stack = read(&file);
        let profile = Profile::new(&stack, &parameters).expect("wells between barriers");
        let bands = stepwell::subbands::single(&profile, true).expect("certified levels");
        let states = stepwell::subbands::mixed(&profile, &bands, 0.002)
            .unwrap_or_else(|error| panic!("stack {number}: {error}\n{file}"));
        let heavy: Vec<f64> = states
            .zone_centre
            .iter()
            .filter(|state| state.heavy > 0.5)
            .map(|state| state.energy_ev)
            .collect();
        // Heavy and light holes that cross hand each other nothing at zero wave number.
        assert_eq!(heavy.len(), bands.heavy.len(), "stack {number}\n{file}");
        for (mixed, single) in heavy.iter().zip(&bands.heavy) {
            let miss = (mixed - single.energy_ev).abs();
            assert!(miss < 1e-6, "stack {number}: off by {miss} eV\n{file}");
        }
        for slice in states.blocks.iter().flatten() {
            assert!(
                slice.energy_ev.windows(2).all(|pair| pair[0] >= pair[1]),
                "stack {number}: {:?}\n{file}",
                slice.energy_ev
            );
            slices_seen += 1;
        }
        // States are picked by character at zero wave number and counted from the top along it: a
        // zone-centre state is among these unless states of no well stand above it.
        if let Some(lowest) = states
            .blocks
            .first()
            .and_then(|block| block[0].energy_ev.last())
        {
            for state in states
                .zone_centre
                .iter()
                .filter(|it| it.energy_ev > lowest + 1e-5)
            {
                let nearest = states.blocks[0][0]
                    .energy_ev
                    .iter()
                    .map(|energy| (energy - state.energy_ev).abs())
                    .fold(f64::INFINITY, f64::min);
                // The split-off band lies deep, where grids err most, and states that cross between
                // grids are told apart by less along the wave number: three grids and two then part.
                let crowded = states.blocks[0][0]
                    .energy_ev
                    .iter()
                    .filter(|&energy| (energy - state.energy_ev).abs() < 5e-4)
                    .count()
                    > 1;
                let apart = match (crowded, state.split_off > 0.5) {
                    (true, _) => 5e-4,
                    (false, true) => 2e-4,
                    (false, false) => 5e-5,
                };
                assert!(
                    nearest < apart,
                    "stack {number}: {nearest} eV from {state:?} {:?} {:?}\n{file}",
                    states.blocks[0][0],
                    states.zone_centre
                );
            }
        }
        (states.zone_centre.len(), slices_seen)
    };
    let (states_seen, slices_seen) = stacks
        .par_iter()
        .enumerate()
        .map(certify)
        .reduce(|| (0, 0), |a, b| (a.0 + b.0, a.1 + b.1));
    assert!(
        states_seen > 2000 && slices_seen > 2000,
        "only {states_seen} states, {slices_seen} slices"
    );
}

/// Five coupled wells in which a family of heavy holes stands within a microvolt of each other: its
/// members stay apart at every wave number, so that what the family amplifies runs smoothly. (States
/// that are not would count one of them twice and another not at all.) At the second gap levels too
/// close to be told apart stand where the search ends.
#[test]
fn families_of_coupled_wells_keep_all_their_members() {
    let file = |gap_nm: f64, thickness_nm: f64| {
        format!(
            "format = 1
            layers = [
              {{ role = 'confinement', material = 'q', thickness_nm = 60 }},
              {{ repeat = 5, layers = [
                {{ role = 'barrier', material = 'q', thickness_nm = 10 }},
                {{ role = 'well', material = 'well', thickness_nm = {thickness_nm} }},
              ] }},
              {{ role = 'barrier', material = 'q', thickness_nm = 10 }},
              {{ role = 'confinement', material = 'q', thickness_nm = 60 }},
              {{ role = 'cladding', material = 'InP', thickness_nm = 500 }},
            ]
            [substrate]
            material = 'InP'
            [materials.well]
            alloy = 'InGaAsP'
            gap_nm = {gap_nm}
            compressive_percent = 1.0
            [materials.q]
            alloy = 'InGaAsP'
            gap_nm = 1250
            matched = true
            "
        )
    };
    for (gap_nm, thickness_nm) in [(1640.0, 8.28), (1640.0, 8.295), (1607.0, 7.0)] {
        let stack = read(&file(gap_nm, thickness_nm));
        solved(&stack, 0.05, |_, bands, states| {
            let family = states
                .zone_centre
                .iter()
                .take_while(|state| states.zone_centre[0].energy_ev - state.energy_ev < 1e-4)
                .count();
            assert_eq!(family, 5, "{gap_nm} {thickness_nm}");
            for electron in 0..bands.electron.len() {
                let sums: Vec<f64> = states.blocks[0]
                    .iter()
                    .map(|slice| {
                        slice.dipoles[electron][..family]
                            .iter()
                            .map(|it| it.te)
                            .sum()
                    })
                    .collect();
                for (at, pair) in sums.windows(2).enumerate() {
                    assert!(
                        (pair[1] - pair[0]).abs() < 0.02,
                        "{gap_nm} {thickness_nm}: electron {electron}, {pair:?} at slice {at}"
                    );
                }
            }
        });
    }
}
