//! Limits in which the answer is known: the single band, the bulk crystal, mirror images, the sum
//! rules of the zone centre, bands that do not mix.

use crate::hamiltonian::bulk_ev;
use crate::recipe::{
    self, BARRIER, Layer, Numbers, STEP, WELL, barrier, mixed_bands, read, shipped, solved, well,
};
use stepwell::evaluation::Evaluation;
use stepwell::materials::Parameters;
use stepwell::structure::Bands;
use stepwell::subbands::{MixedBands, Slice};
use stepwell::units::HBAR2_OVER_2M0_EV_NM2;

/// Largest distance of two energies or two matrix elements of two tracks over the wave number.
fn apart(a: &[Slice], b: &[Slice]) -> (f64, f64) {
    assert_eq!(a.len(), b.len());
    let mut most: (f64, f64) = (0.0, 0.0);
    for (a, b) in a.iter().zip(b) {
        assert_eq!(a.energy_ev.len(), b.energy_ev.len());
        for (a, b) in a.energy_ev.iter().zip(&b.energy_ev) {
            most.0 = most.0.max((a - b).abs());
        }
        for (a, b) in a.dipoles.iter().flatten().zip(b.dipoles.iter().flatten()) {
            most.1 = most.1.max((a.te - b.te).abs()).max((a.tm - b.tm).abs());
        }
    }
    assert!(most.0.is_finite() && most.1.is_finite());
    most
}

/// At zero wave number the heavy hole stands alone: every level of the single band is there, on
/// every structure that is shipped.
#[test]
fn heavy_holes_at_zero_wave_number_are_those_of_the_single_band() {
    let mut compared = 0;
    for (name, text) in shipped() {
        solved(&read(&text), 0.0, |_, bands, states| {
            let heavy: Vec<f64> = states
                .zone_centre
                .iter()
                .filter(|state| state.heavy > 0.5)
                .map(|state| state.energy_ev)
                .collect();
            assert_eq!(heavy.len(), bands.heavy.len(), "{name}");
            for (mixed, single) in heavy.iter().zip(&bands.heavy) {
                let miss = (mixed - single.energy_ev).abs();
                assert!(miss < 1e-6, "{name}: off by {miss} eV");
                compared += 1;
            }
            for state in &states.zone_centre {
                let sum = state.heavy + state.light + state.split_off;
                assert!((sum - 1.0).abs() < 1e-9, "{name}: shares sum to {sum}");
                // Levels of equal wells may mix inside their span; heavy and light do not.
                assert!(
                    state.heavy < 1e-6 || state.heavy > 1.0 - 1e-6,
                    "{name}: {state:?}"
                );
            }
        });
    }
    assert!(compared > 30, "only {compared} levels");
}

/// A well of 200 nm under a barrier of 1.5 meV has the top of the bulk bands as its highest state:
/// never above it, and below it by its confinement only.
#[test]
fn a_thick_layer_has_the_bands_of_the_bulk() {
    for (strain, third) in [(0.0, 3.7), (-0.008, 3.7), (0.008, 3.7), (-0.008, 4.6)] {
        let inside = Numbers {
            valence_edge_ev: 0.0,
            split_off_ev: 0.3,
            luttinger: [10.5, 3.7, third],
            strain,
        };
        let outside = Numbers {
            valence_edge_ev: -1.5e-3,
            ..inside
        };
        let layers = [
            barrier(60.0, outside),
            well(200.0, inside),
            barrier(60.0, outside),
        ];
        let states = mixed_bands(&layers, 0.08);
        let mut compared = 0;
        for (at, &k_per_nm) in states.k_per_nm.iter().enumerate().step_by(8) {
            // Under strain the highest state of a wave number need not lie at kz = 0.
            let top = |kz: f64| bulk_ev(&inside, k_per_nm, kz)[5];
            let scan = |from: f64, step: f64| -> f64 {
                (0..=60)
                    .map(|index| from + step * f64::from(index))
                    .max_by(|&a, &b| top(a).total_cmp(&top(b)))
                    .expect("a scan has points")
            };
            let rough = scan(0.0, 0.02);
            let bulk = top(scan((rough - 0.02).max(0.0), 0.04 / 60.0));
            let highest = states.blocks[0][at].energy_ev[0];
            assert!(
                highest < bulk + 1e-7 && highest > bulk - 2e-4,
                "strain {strain}, {k_per_nm}/nm: {highest} against {bulk}"
            );
            compared += 1;
        }
        let (first, last) = (
            &states.blocks[0][0],
            &states.blocks[0][states.k_per_nm.len() - 1],
        );
        assert!(compared > 4 && first.energy_ev[0] - last.energy_ev[0] > 0.08);
    }
}

fn symmetric(outer: &[Layer]) -> Vec<Layer> {
    let mut layers = outer.to_vec();
    layers.extend([well(7.0, WELL), barrier(60.0, BARRIER)]);
    layers
}

/// In a stack that is its own mirror image both blocks are equal. One barrier told as two layers
/// hides the mirror, so that both blocks are solved.
#[test]
fn both_blocks_of_a_symmetric_well_are_equal() {
    let one = mixed_bands(&symmetric(&[barrier(60.0, BARRIER)]), 0.15);
    let split = [barrier(40.0, BARRIER), barrier(20.0, BARRIER)];
    let both = mixed_bands(&symmetric(&split), 0.15);
    assert_eq!((one.blocks.len(), one.degeneracy), (1, 2.0));
    assert_eq!((both.blocks.len(), both.degeneracy), (2, 1.0));
    for block in &both.blocks {
        let (energy, dipole) = apart(block, &one.blocks[0]);
        assert!(energy < 1e-7 && dipole < 1e-4, "{energy} eV, {dipole}");
    }
}

/// Grown upside down, a lopsided stack has its blocks exchanged.
#[test]
fn reversing_a_stack_exchanges_its_blocks() {
    let layers = [
        barrier(60.0, BARRIER),
        well(5.0, WELL),
        Layer {
            role: "step",
            ..barrier(3.0, STEP)
        },
        barrier(60.0, BARRIER),
    ];
    let mut reversed = layers;
    reversed.reverse();
    let (up, down) = (mixed_bands(&layers, 0.1), mixed_bands(&reversed, 0.1));
    let own = apart(&up.blocks[0], &up.blocks[1]).0;
    assert!(
        own > 1e-3,
        "the blocks of a lopsided stack are {own} eV apart"
    );
    for (this, that) in [(0, 1), (1, 0)] {
        let (energy, dipole) = apart(&up.blocks[this], &down.blocks[that]);
        assert!(energy < 1e-7 && dipole < 1e-4, "{energy} eV, {dipole}");
    }
}

/// At zero wave number (2 TE + TM)/3 is the overlap of all components, a heavy hole has TE = 3/2 of
/// its overlap and no TM, and a light hole with next to no split-off share 1/2 and 2.
#[test]
fn matrix_elements_at_zero_wave_number_keep_their_sum_rules() {
    let layers = [
        barrier(60.0, BARRIER),
        well(8.0, WELL),
        barrier(60.0, BARRIER),
    ];
    let plain = |numbers: Numbers| Numbers {
        split_off_ev: 20.0,
        ..numbers
    };
    let alone = layers.map(|layer| Layer {
        numbers: plain(layer.numbers),
        ..layer
    });
    let mut seen = [0, 0, 0];
    for (layers, mixes) in [(layers, true), (alone, false)] {
        let states = mixed_bands(&layers, 0.0);
        let slice = &states.blocks[0][0];
        for (number, state) in states.zone_centre.iter().enumerate() {
            let miss = (slice.energy_ev[number] - state.energy_ev).abs();
            assert!(miss < 1e-6, "state {number} is {miss} eV off");
            for (row, overlaps) in slice.dipoles.iter().zip(&states.overlaps) {
                let (dipole, overlap) = (row[number], overlaps[number]);
                let mean = (2.0 * dipole.te + dipole.tm) / 3.0;
                assert!((mean - overlap).abs() < 1e-6, "{mean} {overlap} {state:?}");
                let wanted = if state.heavy > 0.5 {
                    seen[0] += 1;
                    (1.5 * overlap, 0.0)
                } else if mixes {
                    // The share of the split-off band breaks the ratio, or would not be seen.
                    let broken = (dipole.tm - 4.0 * dipole.te).abs() > 0.1 * overlap;
                    seen[1] += usize::from(broken && overlap > 0.1);
                    continue;
                } else {
                    seen[2] += 1;
                    (0.5 * overlap, 2.0 * overlap)
                };
                // An admixture of amplitude s changes TE by some √2 s of the overlap.
                let slack = 1e-6 + 3.0 * state.split_off.sqrt() * overlap;
                assert!(slack < 0.02, "{state:?}");
                assert!((dipole.te - wanted.0).abs() < slack, "{dipole:?} {overlap}");
                assert!((dipole.tm - wanted.1).abs() < slack, "{dipole:?} {overlap}");
            }
        }
    }
    assert!(seen.iter().all(|&seen| seen > 0), "{seen:?}");
}

/// With γ2 = γ3 = 0 and one γ1 nothing mixes: every state is a parabola of mass 1/γ1, and carriers
/// fill the mixed bands as they fill the single ones.
#[test]
fn bands_that_do_not_mix_are_parabolas() {
    const FIRST: f64 = 5.0;
    let numbers = |valence_edge_ev: f64| Numbers {
        valence_edge_ev,
        split_off_ev: 0.35,
        luttinger: [FIRST, 0.0, 0.0],
        strain: 0.0,
    };
    let layers = [
        barrier(60.0, numbers(-0.2)),
        well(6.0, numbers(0.0)),
        barrier(60.0, numbers(-0.2)),
    ];
    let mut stack = read(&recipe::text(&layers, ""));
    solved(&stack, 0.3, |_, _, states: &MixedBands| {
        let steps = &states.blocks[0];
        assert!(steps.len() > 40 && steps[0].energy_ev.len() > 3);
        for (slice, k) in steps.iter().zip(&states.k_per_nm) {
            let fall = HBAR2_OVER_2M0_EV_NM2 * FIRST * k * k;
            for (state, energy) in slice.energy_ev.iter().enumerate() {
                let miss = (steps[0].energy_ev[state] - fall - energy).abs();
                assert!(miss < 1e-7, "state {state} at {k}/nm: off by {miss} eV");
            }
        }
    });
    let parameters = Parameters::shipped();
    let mut transparency = |bands| {
        stack.model.bands = bands;
        let evaluation = Evaluation::new(&stack, &parameters).expect("levels");
        evaluation.transparency_cm3().expect("enough carriers")
    };
    let (mixed, single) = (transparency(Bands::Mixed), transparency(Bands::Single));
    assert!(
        (mixed / single - 1.0).abs() < 1e-4,
        "{mixed} against {single} per cm³"
    );
}
