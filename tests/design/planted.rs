//! Structures planted at random are found again, all of them.

use crate::{Design, formula_well, moving, prescribed_well};
use proptest::prelude::*;
use proptest::test_runner::RngSeed;
use stepwell::design::{MET_NM, Move, Quantity, Search};
use stepwell::evaluation::emission_nm;
use stepwell::materials::Element;
use stepwell::structure::Wavelength;

const KINDS: [Wavelength; 3] = Wavelength::ALL;

fn configured(cases: u32, seed: u64) -> ProptestConfig {
    ProptestConfig {
        cases,
        rng_seed: RngSeed::Fixed(seed),
        failure_persistence: None,
        ..ProptestConfig::default()
    }
}

impl Design {
    fn wavelength_nm(&self, moves: &[Move], values: &[f64], kind: Wavelength) -> Option<f64> {
        let stack = self.variation(moves.to_vec()).stack(values).ok()?;
        emission_nm(&stack, &self.parameters, kind).ok()?
    }

    /// Whether two values of one move are one solution to all that a file can tell: between them
    /// the wavelength does not leave the target.
    fn is_one(&self, moved: &Move, ends: (f64, f64), kind: Wavelength, target_nm: f64) -> bool {
        (0..=8).all(|at| {
            let value = ends.0 + (ends.1 - ends.0) * f64::from(at) / 8.0;
            self.wavelength_nm(std::slice::from_ref(moved), &[value], kind)
                .is_some_and(|nm| (nm - target_nm).abs() < 2.0 * MET_NM)
        })
    }
}

proptest! {
    #![proptest_config(configured(24, 1))]
    /// One move of a quaternary: thickness, strain, gap, or an element.
    #[test]
    fn one_planted_value_is_found(
        thickness_nm in 4.0f64..11.0,
        gap_nm in 1330.0f64..1480.0,
        strain_percent in -1.4f64..0.9,
        kind in 0usize..3,
        which in 0usize..3,
    ) {
        let kind = KINDS[kind];
        let (quantity, planted, from, to) = [
            (Quantity::Thickness, thickness_nm, 3.0, 12.0),
            (Quantity::Gap, gap_nm, 1250.0, 1550.0),
            (Quantity::Strain, strain_percent, -1.5, 1.0),
        ][which];
        let design = Design::new(prescribed_well(thickness_nm, gap_nm, strain_percent, "single"));
        let moved = moving("well", quantity, from, to);
        let target_nm = design.wavelength_nm(std::slice::from_ref(&moved), &[planted], kind);
        // A gain peak needs a density above transparency.
        prop_assume!(target_nm.is_some());
        let target_nm = target_nm.expect("assumed");
        let outcome = design.aimed(vec![moved.clone()], kind, target_nm);
        let is_found = outcome.solutions.iter().any(|solution| {
            design.is_one(&moved, (planted, solution.values[0]), kind, target_nm)
        });
        prop_assert!(is_found, "{planted} {:?}", outcome.solutions.iter().map(|it| it.values[0]).collect::<Vec<_>>());
    }
}

proptest! {
    #![proptest_config(configured(8, 2))]
    /// Over the strain, from compressed to stretched, a wavelength turns and has kinks where holes
    /// change places: wherever a close look sees it pass the target, there is a solution.
    #[test]
    fn all_solutions_of_a_turning_wavelength_are_found(
        thickness_nm in 4.0f64..10.0,
        gap_nm in 1350.0f64..1480.0,
        share in 0.05f64..0.95,
        kind in 0usize..2,
    ) {
        const STEPS: usize = 800;
        let kind = KINDS[kind];
        let design = Design::new(prescribed_well(thickness_nm, gap_nm, -0.5, "single"));
        let moved = moving("well", Quantity::Strain, -1.5, 1.5);
        let at = |step: usize| -1.5 + 3.0 * step as f64 / STEPS as f64;
        let seen: Vec<Option<f64>> = (0..=STEPS)
            .map(|step| design.wavelength_nm(std::slice::from_ref(&moved), &[at(step)], kind))
            .collect();
        let values = || seen.iter().copied().flatten();
        let (low, high) = (values().fold(f64::INFINITY, f64::min), values().fold(0.0, f64::max));
        let target_nm = low + share * (high - low);
        let outcome = design.aimed(vec![moved], kind, target_nm);
        for step in 0..STEPS {
            let (Some(a), Some(b)) = (seen[step], seen[step + 1]) else { continue };
            // A peak that jumps from one hole to the other passes over the target.
            let is_passed = (a > target_nm) != (b > target_nm) && (a - b).abs() < 1.0;
            let near = |value: f64| (at(step) - 0.004..=at(step + 1) + 0.004).contains(&value);
            let is_found = outcome.solutions.iter().any(|it| near(it.values[0]));
            prop_assert!(!is_passed || is_found, "{target_nm} nm near {}", at(step));
        }
        let least = (0..STEPS).filter(|&step| seen[step].is_some()).count();
        prop_assert!(least > STEPS / 2, "{least} points");
    }
}

proptest! {
    #![proptest_config(configured(8, 3))]
    /// Two moves: the planted pair lies on the curve through the samples.
    #[test]
    fn a_planted_pair_lies_on_the_line_of_solutions(
        thickness_nm in 4.5f64..10.0,
        indium in 0.12f64..0.24,
        kind in 0usize..3,
    ) {
        let kind = KINDS[kind];
        let design = Design::new(formula_well(thickness_nm, (indium * 1e3).round() / 1e3));
        let moves = vec![
            moving("well", Quantity::Thickness, 3.0, 12.0),
            moving("well", Quantity::Share(Element::In), 0.1, 0.26),
        ];
        let planted = [thickness_nm, indium];
        let target_nm = design.wavelength_nm(&moves, &planted, kind);
        prop_assume!(target_nm.is_some());
        let target_nm = target_nm.expect("assumed");
        let search = Search { samples: 40, ..Search::default() };
        let outcome = design.searched(moves.clone(), kind, target_nm, &search);
        let share = |values: &[f64]| -> [f64; 2] {
            [0, 1].map(|index| {
                let moved = &moves[index];
                (values[index] - moved.from) / (moved.to - moved.from)
            })
        };
        let point = share(&planted);
        let nearest = outcome
            .solutions
            .windows(2)
            .filter(|pair| pair[0].line == pair[1].line)
            .map(|pair| distance(point, share(&pair[0].values), share(&pair[1].values)))
            .fold(f64::INFINITY, f64::min);
        // A hundredth of a side: what the chord of a curve leaves between two samples.
        prop_assert!(nearest < 0.01, "{planted:?} is {nearest} from the line");
        for solution in &outcome.solutions {
            prop_assert!((solution.wavelength_nm - target_nm).abs() <= MET_NM);
        }
    }
}

/// From a point to a straight piece.
fn distance(point: [f64; 2], from: [f64; 2], to: [f64; 2]) -> f64 {
    let along = [to[0] - from[0], to[1] - from[1]];
    let off = [point[0] - from[0], point[1] - from[1]];
    let square = along[0].powi(2) + along[1].powi(2);
    let share = if square > 0.0 {
        ((off[0] * along[0] + off[1] * along[1]) / square).clamp(0.0, 1.0)
    } else {
        0.0
    };
    (off[0] - share * along[0]).hypot(off[1] - share * along[1])
}

/// With mixed bands lines are traced with single ones: the planted pair is found all the same.
#[test]
fn mixed_bands_find_what_was_planted_with_mixed_bands() {
    let planted = [6.2, -0.8];
    let design = Design::new(prescribed_well(6.2, 1430.0, -0.8, "mixed"));
    let moves = vec![
        moving("well", Quantity::Thickness, 5.0, 8.0),
        moving("well", Quantity::Strain, -1.2, -0.4),
    ];
    for kind in [Wavelength::Transition, Wavelength::Photoluminescence] {
        let target_nm = design
            .wavelength_nm(&moves, &planted, kind)
            .expect("a wavelength");
        // Of three samples along a line from bound to bound the middle one has the middle strain.
        let search = Search {
            samples: 3,
            ..Search::default()
        };
        let outcome = design.searched(moves.clone(), kind, target_nm, &search);
        assert_eq!(outcome.solutions.len(), 3);
        let middle = &outcome.solutions[1].values;
        assert!(
            (middle[0] - 6.2).abs() < 0.02 && (middle[1] + 0.8).abs() < 0.02,
            "{middle:?}"
        );
    }
}

#[test]
fn three_moves_give_lines_at_values_of_the_third() {
    let design = Design::new(prescribed_well(6.0, 1430.0, -0.8, "single"));
    let moves = vec![
        moving("well", Quantity::Thickness, 4.0, 9.0),
        moving("well", Quantity::Strain, -1.2, -0.4),
        moving("well", Quantity::Gap, 1410.0, 1450.0),
    ];
    let search = Search {
        samples: 3,
        slices: 3,
    };
    let outcome = design.searched(moves, Wavelength::Photoluminescence, 1300.0, &search);
    let gaps: Vec<f64> = outcome.solutions.iter().map(|it| it.values[2]).collect();
    assert_eq!(
        gaps,
        [
            1410.0, 1410.0, 1410.0, 1430.0, 1430.0, 1430.0, 1450.0, 1450.0, 1450.0
        ]
    );
    let lines: Vec<usize> = outcome.solutions.iter().map(|it| it.line).collect();
    assert_eq!(lines, [1, 1, 1, 2, 2, 2, 3, 3, 3]);
    // A narrower gap needs a narrower well.
    assert!(outcome.solutions[0].values[0] > outcome.solutions[8].values[0]);
}
