//! How wafers scatter, and what is made of those that come back: the linear law against random
//! wafers, and known structures found again from simulated photoluminescence and X-ray.

use rayon::prelude::*;
use stepwell::design::{
    HouseOffset, MODEL_NM, Reactor, Readings, Reconciliation, Request, Solving, Spread, Unknown,
    estimate, reconcile, spread, unknowns,
};
use stepwell::diffraction::{Diffraction, MultiWell, Reflection};
use stepwell::evaluation::Evaluation;
use stepwell::materials::Parameters;
use stepwell::structure::{
    Assumptions, Fluxes, Growth, Ledger, MeanMismatch, Measured, MismatchKind, Overrides, Stack,
    Wavelength, read,
};

/// Two wells of a ternary: fast to solve, and determined by photoluminescence and X-ray.
const TERNARY: &str = r#"
format = 1
[substrate]
material = "InP"
[[layers]]
role = "confinement"
material = "InP"
thickness_nm = 40
[[layers]]
role = "barrier"
material = "In0.85Ga0.15As0.33P0.67"
thickness_nm = 10
[[layers]]
repeat = 2
layers = [
  { role = "well", material = "In0.62Ga0.38As", thickness_nm = 6 },
  { role = "barrier", material = "In0.85Ga0.15As0.33P0.67", thickness_nm = 10 },
]
[[layers]]
role = "confinement"
material = "InP"
thickness_nm = 40
[operation]
temperature_c = 23
[model]
bands = "single"
"#;

/// The same with wells of a quaternary: one unknown too many.
fn quaternary() -> String {
    TERNARY.replace("In0.62Ga0.38As\"", "In0.72Ga0.28As0.8P0.2\"")
}

/// The first of them with mixed bands.
fn mixed_bands() -> String {
    TERNARY.replace("bands = \"single\"", "bands = \"mixed\"")
}

fn stack(text: &str) -> Stack {
    read(text, &Parameters::shipped(), &Overrides::default())
        .unwrap_or_else(|faults| panic!("{faults:#?}"))
        .stack
}

/// Standard normal deviates of a small generator, enough for drawing cases (sum of twelve uniform
/// ones; the linear congruential constants are Knuth's).
struct Deviates(u64);

impl Deviates {
    fn uniform(&mut self) -> f64 {
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 11) as f64 / (1u64 << 53) as f64
    }

    fn draw(&mut self) -> f64 {
        (0..12).map(|_| self.uniform()).sum::<f64>() - 6.0
    }
}

fn growth() -> Growth {
    Growth {
        rate_percent: 0.5,
        flux_percent: Fluxes {
            ga: 0.2,
            indium: 0.2,
            ..Fluxes::default()
        },
        group_v_fraction: 0.001,
        ..Growth::default()
    }
}

fn request() -> Request {
    Request {
        kind: Wavelength::Photoluminescence,
        draws: 20_000,
        seed: 3,
        solving: Solving::Quadratic,
        wanted_yield: None,
        window: None,
        model_nm: MODEL_NM,
    }
}

fn scattered(stack: &Stack, growth: &Growth, request: &Request) -> Spread {
    let parameters = Parameters::shipped();
    let reactor = Reactor::new(stack, growth);
    spread(&reactor, stack, &parameters, request, &|_| {}).expect("a spread")
}

#[test]
fn random_wafers_follow_the_linear_law_where_errors_are_small() {
    let stack = stack(TERNARY);
    let found = scattered(&stack, &growth(), &request());
    let error = found.linear.sigma_nm / (2.0 * 20_000f64).sqrt();
    assert!(found.linear.sigma_nm > 0.5, "{:?}", found.linear);
    assert!(
        (found.sampled.sigma_nm - found.linear.sigma_nm).abs()
            < 4.0 * error + 0.01 * found.linear.sigma_nm,
        "{:?} against {:?}",
        found.sampled,
        found.linear
    );
    let of_the_mean = found.linear.sigma_nm / 20_000f64.sqrt();
    assert!((found.sampled.mean_nm - found.linear.mean_nm).abs() < 4.0 * of_the_mean + 0.02);
    let miss = found.miss.expect("checked");
    assert!(miss.worst_nm < 0.02 * found.linear.sigma_nm, "{miss:?}");
}

#[test]
fn wafers_solved_one_by_one_agree_with_the_quadratic() {
    let stack = stack(TERNARY);
    let few = Request {
        draws: 300,
        ..request()
    };
    let by_law = scattered(&stack, &growth(), &few);
    let each = Request {
        solving: Solving::EachWafer,
        ..few
    };
    let one_by_one = scattered(&stack, &growth(), &each);
    assert_eq!(one_by_one.lost, 0);
    // The same draws: they differ by the miss of the law alone.
    for ((_, law), (_, solved)) in by_law.quantiles.iter().zip(&one_by_one.quantiles) {
        assert!((law - solved).abs() < 0.02, "{law} against {solved}");
    }
}

/// The design by mixed bands, the wafers about it by single ones: the middle is that of the full
/// model, the slopes are nearly so, and what is said of the miss is what it is.
#[test]
fn with_mixed_bands_the_middle_is_full_and_the_miss_is_measured() {
    let mixed = stack(&mixed_bands());
    let parameters = Parameters::shipped();
    let found = scattered(&mixed, &growth(), &request());
    let evaluation = Evaluation::new(&mixed, &parameters).expect("levels");
    let full = evaluation.wavelength_nm(Wavelength::Photoluminescence);
    assert_eq!(Some(found.nominal_nm), full);
    let by_single = scattered(&stack(TERNARY), &growth(), &request());
    assert!((found.nominal_nm - by_single.nominal_nm).abs() > 1e-3);
    let ratio = found.linear.sigma_nm / by_single.linear.sigma_nm;
    assert!((ratio - 1.0).abs() < 0.02, "{ratio}");
    let miss = found.miss.expect("checked");
    assert_eq!(miss.checked + miss.unsolved, 8);
    assert!(miss.worst_nm < 0.2 * found.linear.sigma_nm, "{miss:?}");
    // One sigma more of the strongest variable, in full.
    let reactor = Reactor::new(&mixed, &growth());
    let strongest = &found.sensitivities[0];
    let place = reactor
        .variables
        .iter()
        .position(|variable| variable.cause == strongest.variable.cause)
        .expect("a variable");
    let mut point = vec![0.0; reactor.variables.len()];
    point[place] = 1.0;
    let moved = reactor.grown(&point);
    let solved = Evaluation::new(&moved, &parameters).expect("levels");
    let solved_nm = solved
        .wavelength_nm(Wavelength::Photoluminescence)
        .expect("a peak");
    let miss_nm = solved_nm - found.nominal_nm - strongest.nm;
    assert!(
        miss_nm.abs() < 0.1 * strongest.nm.abs(),
        "{miss_nm} of {}",
        strongest.nm
    );
}

#[test]
fn the_yield_of_a_centred_window_is_that_of_the_normal_law() {
    let stack = stack(TERNARY);
    let nominal_nm = scattered(&stack, &growth(), &request()).nominal_nm;
    let sigma_nm = scattered(&stack, &growth(), &request()).linear.sigma_nm;
    let within_two = Request {
        window: Some((nominal_nm, 2.0 * sigma_nm)),
        wanted_yield: Some(0.6827),
        ..request()
    };
    let found = scattered(&stack, &growth(), &within_two);
    let good = found.good.expect("a window");
    assert!((good.linear - 0.9545).abs() < 1e-3, "{good:?}");
    assert!(
        (good.sampled - good.linear).abs() < 4.0 * good.standard_error + 2e-3,
        "{good:?}"
    );
    assert!(good.with_model < good.sampled, "{good:?}");
    // One sigma inside the window is what 68.27 % take: errors twice as large.
    let factor = found
        .wanted
        .and_then(|wanted| wanted.factor)
        .expect("in reach");
    assert!((factor - 2.0).abs() < 0.05, "{factor}");
}

#[test]
fn a_window_that_the_design_misses_is_out_of_reach() {
    let stack = stack(TERNARY);
    let nominal_nm = scattered(&stack, &growth(), &request()).nominal_nm;
    let beside = Request {
        window: Some((nominal_nm + 30.0, 5.0)),
        wanted_yield: Some(0.9),
        ..request()
    };
    let found = scattered(&stack, &growth(), &beside);
    assert_eq!(found.wanted.expect("asked for").factor, None);
}

/// A model without error, and no ledger.
fn no_offset(stack: &Stack) -> HouseOffset {
    HouseOffset::of(stack, &Ledger::default(), 0.0, 1310.0)
}

/// What a diffractometer sees of the wells.
fn by_xray(stack: &Stack, parameters: &Parameters) -> MultiWell {
    Diffraction::new(stack, parameters, Reflection::default(), 300.0)
        .expect("in reach")
        .multi_well
        .expect("two wells")
}

/// What a bench and a diffractometer would give for a stack.
fn seen(stack: &Stack, parameters: &Parameters, noise: [f64; 3]) -> Readings {
    let pl_nm = Evaluation::new(stack, parameters)
        .expect("levels")
        .wavelength_nm(Wavelength::Photoluminescence)
        .expect("a peak");
    let xray = by_xray(stack, parameters);
    let with = |value: f64, sigma: f64, noise: f64| Measured {
        value: value + sigma * noise,
        sigma,
        sigma_given: true,
    };
    Readings {
        pl_nm: Some(with(pl_nm, 1.0, noise[0])),
        temperature_k: Some(stack.operation.temperature_k),
        reflection: Reflection::default(),
        period_nm: Some(with(xray.period_nm, 0.05, noise[1])),
        mismatch: Some(MeanMismatch {
            kind: MismatchKind::Perpendicular,
            ppm: with(xray.mean.perpendicular_ppm(), 60.0, noise[2]),
        }),
    }
}

fn found(stack: &Stack, readings: &Readings, unknowns: &[Unknown]) -> Reconciliation {
    let parameters = Parameters::shipped();
    reconcile(
        stack,
        &parameters,
        readings,
        unknowns,
        &no_offset(stack),
        0.7,
    )
    .expect("an estimate")
}

#[test]
fn known_structures_are_found_again_within_their_stated_sigma() {
    const CASES: u64 = 500;
    let parameters = Parameters::shipped();
    let ordered = stack(TERNARY);
    let assumptions = Assumptions {
        thickness_sigma_percent: 5.0,
        share_sigma: 0.01,
        ..Assumptions::default()
    };
    let unknowns = unknowns(&ordered, &assumptions).expect("named");
    let names: Vec<&str> = unknowns.iter().map(|it| it.name.as_str()).collect();
    assert_eq!(names, ["well.thickness", "barrier.thickness", "well.Ga"]);
    let misses: Vec<Vec<f64>> = (0..CASES)
        .into_par_iter()
        .map(|case| {
            let mut deviates = Deviates(9_000 + 7_919 * case);
            for _ in 0..10 {
                deviates.uniform();
            }
            let mut grown = ordered.clone();
            let truth: Vec<f64> = unknowns
                .iter()
                .map(|unknown| {
                    let shift = unknown.prior_sigma * deviates.draw();
                    unknown.shift(&mut grown, shift);
                    unknown.ordered + shift
                })
                .collect();
            let noise = [deviates.draw(), deviates.draw(), deviates.draw()];
            let readings = seen(&grown, &parameters, noise);
            let offset = no_offset(&ordered);
            estimate(&ordered, &parameters, &readings, &unknowns, &offset)
                .expect("an estimate")
                .iter()
                .zip(truth)
                .map(|(estimate, truth)| (estimate.value - truth) / estimate.sigma)
                .collect()
        })
        .collect();
    for (unknown, name) in names.iter().enumerate() {
        let inside = misses
            .iter()
            .filter(|miss| miss[unknown].abs() < 1.0)
            .count();
        let coverage = inside as f64 / CASES as f64;
        // 68.27 % of a normal law, four standard errors of 500 cases (2.1 %) to either side.
        assert!((coverage - 0.6827).abs() < 0.083, "{name}: {coverage}");
        let mean = misses.iter().map(|miss| miss[unknown]).sum::<f64>() / CASES as f64;
        assert!(
            mean.abs() < 4.0 / (CASES as f64).sqrt(),
            "{name}: bias {mean}"
        );
    }
}

#[test]
fn a_wafer_that_came_out_as_ordered_asks_for_no_correction() {
    let ordered = stack(TERNARY);
    let unknowns = unknowns(&ordered, &Assumptions::default()).expect("named");
    let readings = seen(&ordered, &Parameters::shipped(), [0.3, -0.2, 0.4]);
    let result = found(&ordered, &readings, &unknowns);
    assert!(result.undetermined.is_empty(), "{:#?}", result.undetermined);
    assert!(result.corrections.is_empty(), "{:#?}", result.corrections);
    assert_eq!(result.silent.len(), 3);
}

#[test]
fn a_wide_well_is_found_named_and_corrected_in_part() {
    let ordered = stack(TERNARY);
    let unknowns = unknowns(&ordered, &Assumptions::default()).expect("named");
    let mut grown = ordered.clone();
    unknowns[0].shift(&mut grown, 0.6);
    let readings = seen(&grown, &Parameters::shipped(), [0.0; 3]);
    let result = found(&ordered, &readings, &unknowns);
    let well = &result.estimates[0];
    assert!((well.value - 6.6).abs() < 2.0 * well.sigma, "{well:?}");
    let cause = &result.causes[0];
    assert_eq!(cause.name, "well.thickness", "{:#?}", result.causes);
    assert!((cause.amount - 0.6).abs() < 0.01, "{cause:?}");
    assert!(cause.chi_square < 0.1, "{cause:?}");
    let correction = result
        .corrections
        .iter()
        .find(|it| it.name == "well.thickness")
        .expect("worth one");
    assert!(
        (correction.change + 0.7 * (well.value - well.ordered)).abs() < 1e-12,
        "{correction:?}"
    );
    let (expected_nm, _) = result.expected_pl_nm.expect("a peak");
    let pl = &result.deviations[0];
    assert!(
        expected_nm < pl.measured && expected_nm > pl.ordered,
        "{expected_nm} between {} and {}",
        pl.ordered,
        pl.measured
    );
}

/// What came back of a wafer of mixed bands, explained by the full model: the same structure is found
/// from its own data, and data of the estimate are what the full model gives for it.
#[test]
fn mixed_bands_find_their_own_structure_again() {
    let ordered = stack(&mixed_bands());
    let parameters = Parameters::shipped();
    let unknowns = unknowns(&ordered, &Assumptions::default()).expect("named");
    let mut grown = ordered.clone();
    for (unknown, sigmas) in unknowns.iter().zip([0.6, -0.4, 0.5]) {
        unknown.shift(&mut grown, sigmas * unknown.prior_sigma);
    }
    let readings = seen(&grown, &parameters, [0.0; 3]);
    let result = found(&ordered, &readings, &unknowns);
    for (estimate, sigmas) in result.estimates.iter().zip([0.6, -0.4, 0.5]) {
        let truth = estimate.ordered + sigmas * estimate.prior_sigma;
        // The prior pulls towards the order, by less than the data leave open.
        assert!(
            (estimate.value - truth).abs() < estimate.sigma,
            "{estimate:?} of {truth}"
        );
    }
    assert!(result.estimated_chi_square < 0.1, "{result:#?}");
    let followed = result.followed_miss_nm.expect("mixed bands");
    assert!(followed < 0.5, "{followed}");
    let by_single = found(
        &stack(TERNARY),
        &seen(&stack(TERNARY), &parameters, [0.0; 3]),
        &unknowns,
    );
    assert_eq!(by_single.followed_miss_nm, None);
}

#[test]
fn a_quaternary_well_has_one_unknown_too_many_until_an_assumption_settles_it() {
    let ordered = stack(&quaternary());
    let free = unknowns(&ordered, &Assumptions::default()).expect("named");
    assert_eq!(free.len(), 4);
    let readings = seen(&ordered, &Parameters::shipped(), [1.0, 0.0, 1.0]);
    let open = found(&ordered, &readings, &free);
    assert!(!open.undetermined.is_empty());
    assert!(open.corrections.is_empty(), "{:#?}", open.corrections);
    let names: Vec<&str> = open.undetermined[0]
        .components
        .iter()
        .map(|(name, ..)| name.as_str())
        .collect();
    assert!(names.len() > 1, "a combination: {names:?}");
    let settled = Assumptions {
        barrier_ratio_fixed: true,
        moved: Some(vec![
            (0..0, "well.thickness".to_owned()),
            (0..0, "well.Ga".to_owned()),
        ]),
        ..Assumptions::default()
    };
    let few = unknowns(&ordered, &settled).expect("named");
    assert!(found(&ordered, &readings, &few).undetermined.is_empty());
}

#[test]
fn relaxed_and_perpendicular_mismatch_tell_the_same() {
    let ordered = stack(TERNARY);
    let parameters = Parameters::shipped();
    let unknowns = unknowns(&ordered, &Assumptions::default()).expect("named");
    let readings = seen(&ordered, &parameters, [0.5, -0.5, 1.5]);
    let mean = by_xray(&ordered, &parameters).mean;
    let scale = mean.relaxed_ppm() / mean.perpendicular_ppm();
    let relaxed = readings.mismatch.map(|it| MeanMismatch {
        kind: MismatchKind::Relaxed,
        ppm: Measured {
            value: scale * it.ppm.value,
            sigma: scale * it.ppm.sigma,
            sigma_given: true,
        },
    });
    let one = found(&ordered, &readings, &unknowns);
    let other = found(
        &ordered,
        &Readings {
            mismatch: relaxed,
            ..readings
        },
        &unknowns,
    );
    for (one, other) in one.estimates.iter().zip(&other.estimates) {
        assert!(
            (one.value - other.value).abs() < 0.02 * one.sigma,
            "{one:?} {other:?}"
        );
    }
}

#[test]
fn a_ledger_moves_the_offset_and_tightens_it() {
    let stack = stack(TERNARY);
    let entry = |run: &str, measured_nm: f64| {
        format!(
            "\n[[offsets]]\nfamily = \"GaInAs on InP\"\nrun = \"{run}\"\nmodelled_nm = 1500.0\n\
             measured_nm = {measured_nm:?}\ntemperature_k = 296.15\nbands = \"single\"\nstructure = \"ordered\"\n"
        )
    };
    let read = |entries: &[(&str, f64)]| {
        let mut text = Ledger::HEAD.to_owned();
        for (run, measured_nm) in entries {
            text.push_str(&entry(run, *measured_nm));
        }
        Ledger::read(&text).expect("sound")
    };
    let of = |entries: &[(&str, f64)]| HouseOffset::of(&stack, &read(entries), 10.0, 1500.0);
    let none = of(&[]);
    assert_eq!((none.runs, none.family.as_str()), (0, "GaInAs on InP"));
    assert!(none.offset_mev.abs() < 1e-12);
    let one = of(&[("A", 1510.0)]);
    let three = of(&[("A", 1510.0), ("B", 1511.0), ("C", 1509.0)]);
    // 10 nm at 1500 nm are 5.5 meV.
    assert!(one.offset_mev < -5.0 && one.offset_mev > -5.6, "{one:?}");
    assert!(three.sigma_mev < one.sigma_mev && one.sigma_mev < 0.4 * none.sigma_mev);
}
