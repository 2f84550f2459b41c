//! What mixed bands emit and amplify.

use crate::recipe::{BARRIER, STEP, WELL, barrier, read, shipped, text, well};
use stepwell::evaluation::{Evaluation, Remark, Spectrum};
use stepwell::materials::Parameters;
use stepwell::spectra::{Point, modes_per_ev_cm2_s};
use stepwell::structure::{Lineshape, Stack};

fn evaluated<T>(stack: &Stack, then: impl FnOnce(&Evaluation<'_>, &Spectrum) -> T) -> T {
    let parameters = Parameters::shipped();
    let evaluation = Evaluation::new(stack, &parameters).expect("levels");
    let spectrum = evaluation.spectrum().expect("an index");
    then(&evaluation, &spectrum)
}

/// Largest distance of two spectra on their own energies, over the largest gain in either.
fn apart(a: &Spectrum, b: &Spectrum) -> f64 {
    let mut most: f64 = 0.0;
    assert_eq!(a.runs.len(), b.runs.len());
    for (a, b) in a.runs.iter().zip(&b.runs) {
        let peak = |points: &[Point]| {
            points
                .iter()
                .map(|point| point.te_gain_cm.max(point.tm_gain_cm))
                .fold(0.0, f64::max)
        };
        let scale = peak(&a.points).max(peak(&b.points));
        assert!(scale > 100.0, "no gain to speak of: {scale}");
        for (a, b) in a.points.iter().zip(&b.points) {
            let miss = (a.te_gain_cm - b.te_gain_cm)
                .abs()
                .max((a.tm_gain_cm - b.tm_gain_cm).abs());
            assert!(miss.is_finite());
            most = most.max(miss / scale);
        }
    }
    most
}

/// Sign and detailed balance of every run of three shipped structures, with the lines that emission
/// uses too: g = r_sp (π² ħ³ c²/(n² E²)) [1 − exp((E − ΔF)/kT)].
#[test]
fn gain_ends_at_the_splitting_and_balances_emission() {
    let mut changes = 0;
    for (name, text) in shipped() {
        if !["estuary-980", "estuary-1310", "estuary-tensile"].contains(&name.as_str()) {
            continue;
        }
        for lineshape in [Lineshape::Sech, Lineshape::Gaussian] {
            let mut stack = read(&text);
            stack.model.lineshape = lineshape;
            evaluated(&stack, |evaluation, spectrum| {
                let kt = evaluation.thermal_ev();
                for run in &spectrum.runs {
                    let mean = |point: &Point| (2.0 * point.te_gain_cm + point.tm_gain_cm) / 3.0;
                    let most = run.points.iter().map(|p| mean(p).abs()).fold(0.0, f64::max);
                    let mut positive = false;
                    for (photon, point) in spectrum.photon_ev.iter().zip(&run.points) {
                        let above = (photon - run.splitting_ev) / kt;
                        let sign = if above < 0.0 { 1.0 } else { -1.0 };
                        for gain in [point.te_gain_cm, point.tm_gain_cm] {
                            assert!(sign * gain >= 0.0, "{name}: {gain} at {photon}");
                        }
                        changes += usize::from(positive && mean(point) < 0.0);
                        positive = mean(point) > 1e-3 * most;
                        let modes = modes_per_ev_cm2_s(*photon, spectrum.refractive_index);
                        let balance = point.spontaneous_per_ev_cm3_s / modes * -above.exp_m1();
                        assert!(
                            (balance - mean(point)).abs() <= 1e-12 * most,
                            "{name}: {balance} {point:?} at {photon}"
                        );
                    }
                }
            });
        }
    }
    assert!(changes > 10, "only {changes} spectra that end with gain");
}

/// One block counted twice amplifies as both blocks do.
#[test]
fn one_block_counted_twice_amplifies_as_both() {
    let above = [well(7.0, WELL), barrier(60.0, BARRIER)];
    let file = |below: &[_]| {
        let mut layers = below.to_vec();
        layers.extend(above);
        read(&text(&layers, ""))
    };
    let once = file(&[barrier(60.0, BARRIER)]);
    let twice = file(&[barrier(40.0, BARRIER), barrier(20.0, BARRIER)]);
    evaluated(&once, |one, spectrum_of_one| {
        evaluated(&twice, |two, spectrum_of_two| {
            let blocks = [one, two].map(|it| it.mixed.as_ref().expect("mixed bands").blocks.len());
            assert_eq!(blocks, [1, 2]);
            let miss = apart(spectrum_of_one, spectrum_of_two);
            assert!(miss < 1e-5, "{miss} of the peak");
        });
    });
}

fn wells(thickness_nm: &[f64]) -> Stack {
    let mut layers = vec![barrier(60.0, BARRIER)];
    for (index, &nm) in thickness_nm.iter().enumerate() {
        let last = index + 1 == thickness_nm.len();
        layers.push(well(nm, WELL));
        layers.push(barrier(if last { 60.0 } else { 45.0 }, BARRIER));
    }
    read(&text(&layers, ""))
}

/// Five equal wells that do not feel each other are recognised, said to be so, and amplify as one of
/// them; and as the five solved whole, which a millionth of a nanometre forces.
#[test]
fn five_far_wells_amplify_as_one_and_as_the_whole() {
    let equal_wells = |evaluation: &Evaluation<'_>| {
        let remarked = evaluation
            .remarks
            .iter()
            .any(|remark| matches!(remark, Remark::EqualWells { count: 5 }));
        let count = evaluation.mixed.as_ref().expect("mixed bands").equal_wells;
        assert_eq!(remarked, count == 5);
        count
    };
    evaluated(&wells(&[5.0; 5]), |five, spectrum_of_five| {
        assert_eq!(equal_wells(five), 5);
        let states = |evaluation: &Evaluation<'_>| {
            evaluation
                .mixed
                .as_ref()
                .map_or(0, |mixed| mixed.zone_centre.len())
        };
        let count = states(five);
        assert!(count >= 10);
        evaluated(&wells(&[5.0]), |one, spectrum_of_one| {
            assert_eq!((equal_wells(one), 5 * states(one)), (1, count));
            let miss = apart(spectrum_of_one, spectrum_of_five);
            assert!(miss < 1e-5, "{miss} of the peak apart from one well");
        });
        let nearly = [5.0, 5.0, 5.000_001, 5.0, 5.0];
        evaluated(&wells(&nearly), |whole, spectrum_of_whole| {
            assert_eq!((equal_wells(whole), states(whole)), (1, count));
            let miss = apart(spectrum_of_whole, spectrum_of_five);
            assert!(miss < 2e-4, "{miss} of the peak apart from the whole");
        });
    });
}

/// Coupled wells are never taken for single ones.
#[test]
fn coupled_wells_are_solved_whole() {
    let layers = [
        barrier(60.0, BARRIER),
        well(6.0, WELL),
        barrier(4.0, BARRIER),
        well(6.0, WELL),
        barrier(60.0, BARRIER),
    ];
    evaluated(&read(&text(&layers, "")), |evaluation, _| {
        let mixed = evaluation.mixed.as_ref().expect("mixed bands");
        assert_eq!(mixed.equal_wells, 1);
        assert!(mixed.zone_centre[0].energy_ev - mixed.zone_centre[1].energy_ev > 1e-5);
    });
    let other = [
        barrier(60.0, BARRIER),
        well(6.0, WELL),
        barrier(30.0, BARRIER),
        well(6.0, STEP),
        barrier(60.0, BARRIER),
    ];
    evaluated(&read(&text(&other, "")), |evaluation, _| {
        assert_eq!(
            evaluation.mixed.as_ref().expect("mixed bands").equal_wells,
            1
        );
    });
}
