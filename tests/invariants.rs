//! What must hold of any structure, whatever its numbers: random stacks of own numbers, strained,
//! of one to three wells, told to the program as files.

use proptest::prelude::*;
use proptest::test_runner::{Config, RngSeed};
use std::fmt::Write as _;
use stepwell::evaluation::Evaluation;
use stepwell::materials::Parameters;
use stepwell::numerics::chain::{Chain, Run};
use stepwell::spectra::{Emitter, Hole, Line, Occupation, Pair, Staircase, modes_per_ev_cm2_s};
use stepwell::structure::{self, Lineshape, Overrides, Stack};
use stepwell::subbands::Level;
use stepwell::units::{HBAR2_OVER_2M0_EV_NM2, thermal_ev};

/// Numbers of one layer that matter to its levels.
#[derive(Clone, Copy, Debug)]
struct Numbers {
    conduction_ev: f64,
    valence_ev: f64,
    electron_mass: f64,
    /// γ2 and what γ1 exceeds 2 γ2 by.
    gamma2: f64,
    excess: f64,
    /// In-plane strain on a substrate of 0.58 nm.
    strain: f64,
}

/// A stack between two equal barriers that are long enough for any tail.
#[derive(Clone, Debug)]
struct Recipe {
    barrier: Numbers,
    /// Wells with the barrier above each, thicknesses in nm.
    wells: Vec<(f64, Numbers, f64)>,
}

fn numbers(well: bool) -> impl Strategy<Value = Numbers> {
    let (conduction, valence) = if well {
        (0.9..1.0, -0.05..0.0)
    } else {
        (1.2..1.35, -0.3..-0.2)
    };
    (
        conduction,
        valence,
        0.03..0.09f64,
        1.0..2.8f64,
        2.0..3.5f64,
        -0.008..0.008f64,
    )
        .prop_map(
            |(conduction_ev, valence_ev, electron_mass, gamma2, excess, strain)| Numbers {
                conduction_ev,
                valence_ev,
                electron_mass,
                gamma2,
                excess,
                strain,
            },
        )
}

fn recipe() -> impl Strategy<Value = Recipe> {
    let well = (3.0..9.0f64, numbers(true), 4.0..12.0f64);
    (numbers(false), prop::collection::vec(well, 1..4))
        .prop_map(|(barrier, wells)| Recipe { barrier, wells })
}

const OUTER_NM: f64 = 70.0;

impl Recipe {
    /// Layers (role, material, thickness in nm) from the substrate up.
    fn layers(&self) -> Vec<(&'static str, String, f64)> {
        let mut layers = vec![("barrier", "barrier".to_owned(), OUTER_NM)];
        for (index, (well_nm, _, barrier_nm)) in self.wells.iter().enumerate() {
            let last = index + 1 == self.wells.len();
            layers.push(("well", format!("well{index}"), *well_nm));
            let above_nm = if last { OUTER_NM } else { *barrier_nm };
            layers.push(("barrier", "barrier".to_owned(), above_nm));
        }
        layers
    }

    fn materials(&self, shift_ev: f64) -> String {
        let mut text = String::new();
        let named = std::iter::once(("barrier".to_owned(), &self.barrier)).chain(
            self.wells
                .iter()
                .enumerate()
                .map(|(index, (_, numbers, _))| (format!("well{index}"), numbers)),
        );
        let ground = Numbers {
            strain: 0.0,
            ..self.barrier
        };
        for (name, n) in named.chain(std::iter::once(("ground".to_owned(), &ground))) {
            let _ = writeln!(
                text,
                "[materials.{name}.numbers]\nlattice_nm = {:?}\ngap_ev = {:?}\nvalence_edge_ev = {:?}\n\
                 split_off_ev = 0.3\nelectron_mass = {:?}\nluttinger = [{:?}, {:?}, {:?}]\n\
                 kane_energy_ev = 24\nac_ev = -6\nav_ev = 1\nb_ev = -1.8\nc11_gpa = 110\nc12_gpa = 52\n\
                 index = 3.4",
                0.58 / (1.0 + n.strain),
                n.conduction_ev - n.valence_ev,
                n.valence_ev + shift_ev,
                n.electron_mass,
                2.0 * n.gamma2 + n.excess,
                n.gamma2,
                n.gamma2,
            );
        }
        text
    }

    fn text(&self, layers: &[(&str, String, f64)], shift_ev: f64, model: &str) -> String {
        let rows: Vec<String> = layers
            .iter()
            .map(|(role, material, nm)| {
                format!("{{ role = {role:?}, material = {material:?}, thickness_nm = {nm:?} }}")
            })
            .collect();
        file(&rows, &self.materials(shift_ev), model)
    }

    fn stack(&self, model: &str) -> Stack {
        read(&self.text(&self.layers(), 0.0, model))
    }
}

fn file(rows: &[String], materials: &str, model: &str) -> String {
    format!(
        "format = 1\nlayers = [\n  {}\n]\n[substrate]\nmaterial = \"ground\"\n{materials}\
         [operation]\ntemperature_k = 300\ndensities_cm3 = [1e18, 4e18]\n[model]\n{model}\n",
        rows.join(",\n  ")
    )
}

fn read(text: &str) -> Stack {
    match structure::read(text, &Parameters::shipped(), &Overrides::default()) {
        Ok(reading) => reading.stack,
        Err(faults) => panic!("{}\n{text}", faults[0].message),
    }
}

const SINGLE: &str = "bands = \"single\"";
const MIXED: &str = "bands = \"mixed\"";

fn solved<T>(stack: &Stack, then: impl FnOnce(&Evaluation<'_>) -> T) -> T {
    let parameters = Parameters::shipped();
    let evaluation = Evaluation::new(stack, &parameters).expect("deep wells hold levels");
    then(&evaluation)
}

/// Energies of all three ladders, eV.
fn ladders(stack: &Stack) -> [Vec<f64>; 3] {
    solved(stack, |evaluation| {
        let bands = &evaluation.bands;
        [&bands.electron, &bands.heavy, &bands.light]
            .map(|ladder| ladder.iter().map(|level: &Level| level.energy_ev).collect())
    })
}

/// Largest distance of two lists of numbers; infinite where their lengths differ.
fn apart(a: &[f64], b: &[f64]) -> f64 {
    if a.len() != b.len() {
        return f64::INFINITY;
    }
    let distance = a.iter().zip(b).map(|(a, b)| (a - b).abs());
    // NaN must not pass for nearness.
    distance.fold(0.0, |most, it| if it <= most { most } else { it })
}

/// Two evaluations of the same physics on grids cut differently agree to their promise.
const SAME_EV: f64 = 4e-6;

fn cases(cases: u32) -> Config {
    Config {
        cases,
        failure_persistence: None,
        // The same stacks in every run.
        rng_seed: RngSeed::Fixed(1),
        ..Config::default()
    }
}

fn shape() -> impl Strategy<Value = Lineshape> {
    prop::sample::select(Lineshape::ALL.to_vec())
}

/// A pair of heavy or light holes at an edge of about an electronvolt.
fn pair() -> impl Strategy<Value = Pair> {
    (
        0.7..1.4f64,
        0.02..0.15f64,
        0.05..0.6f64,
        0.01..1.0f64,
        0.0..0.2f64,
        any::<bool>(),
    )
        .prop_map(
            |(edge_ev, electron_mass, hole_mass, overlap, confinement_ev, heavy)| Pair {
                electron: 0,
                kind: if heavy { Hole::Heavy } else { Hole::Light },
                hole: 0,
                electron_ev: edge_ev,
                hole_ev: 0.0,
                electron_mass,
                hole_mass,
                overlap,
                confinement_ev,
            },
        )
}

fn occupation() -> impl Strategy<Value = Occupation> {
    (0.6..1.6f64, -0.15..0.15f64, 0.0..0.08f64, 100.0..450.0f64).prop_map(
        |(fermi_electron_ev, fermi_hole_ev, lowering_ev, temperature_k)| Occupation {
            fermi_electron_ev,
            fermi_hole_ev,
            lowering_ev,
            thermal_ev: thermal_ev(temperature_k),
        },
    )
}

proptest! {
    #![proptest_config(cases(200))]

    /// Gain is zero exactly at the quasi-Fermi splitting, positive only below it, and never larger
    /// in size than the absorption of the empty bands.
    #[test]
    fn gain_ends_at_the_splitting_and_never_exceeds_absorption(
        pairs in prop::collection::vec(pair(), 1..6),
        occupation in occupation(),
        shape in shape(),
        intraband_fs in 30.0..400.0f64,
    ) {
        let emitter = Staircase::new(pairs, 24.0, 10.0, 3.4, Line::new(shape, intraband_fs));
        let splitting = occupation.splitting_ev();
        let at = emitter.point(&occupation, splitting);
        prop_assert_eq!((at.te_gain_cm, at.tm_gain_cm), (0.0, 0.0));
        let (low, step, count) = (0.5, 2.5e-3, 500);
        let spectrum = emitter.sample(&occupation, low, step, count);
        // With the gap lowered, a photon meets the edges that one of as much more energy met.
        let empty = emitter.absorption(low + occupation.lowering_ev, step, count);
        for (index, (point, bare)) in spectrum.iter().zip(&empty).enumerate() {
            let photon = low + step * index as f64;
            let stretch = (photon + occupation.lowering_ev) / photon * (1.0 + 1e-12);
            for (gain, bare) in [(point.te_gain_cm, bare.0), (point.tm_gain_cm, bare.1)] {
                prop_assert!(gain.abs() <= bare * stretch + f64::MIN_POSITIVE, "{gain} against {bare} at {photon}");
                let sign = if photon < splitting { 1.0 } else { -1.0 };
                prop_assert!(sign * gain >= 0.0);
            }
        }
    }

    /// g = r_sp (π² ħ³ c²/(n² E²)) [1 − exp((E − ΔF)/kT)] with the line that emission uses.
    #[test]
    fn emission_and_gain_obey_detailed_balance(
        pairs in prop::collection::vec(pair(), 1..6),
        occupation in occupation(),
        shape in shape(),
        intraband_fs in 30.0..400.0f64,
    ) {
        let line = Line::new(shape, intraband_fs).for_emission(occupation.thermal_ev);
        let emitter = Staircase::new(pairs, 24.0, 10.0, 3.4, line);
        let (low, step, count) = (0.5, 2.5e-3, 500);
        let spectrum = emitter.sample(&occupation, low, step, count);
        let mean = |point: &stepwell::spectra::Point| {
            (2.0 * point.te_gain_cm + point.tm_gain_cm) / 3.0
        };
        let most = spectrum.iter().map(|point| mean(point).abs()).fold(0.0, f64::max);
        for (index, point) in spectrum.iter().enumerate() {
            let photon = low + step * index as f64;
            let above = (photon - occupation.splitting_ev()) / occupation.thermal_ev;
            if above > 30.0 {
                // Emission is there below what its factor can carry.
                break;
            }
            let balance = point.spontaneous_per_ev_cm3_s / modes_per_ev_cm2_s(photon, 3.4)
                * -above.exp_m1();
            prop_assert!((balance - mean(point)).abs() <= 1e-12 * most, "{balance} {:?}", point);
        }
    }

    /// 2 TE + TM = 3 for either hole at any angle.
    #[test]
    fn polarisations_sum_to_three(pair in pair(), kinetic_ev in 0.0..0.5f64) {
        let (te, tm) = pair.polarisation(kinetic_ev);
        prop_assert!((2.0 * te + tm - 3.0).abs() < 1e-14);
        prop_assert!(te >= 0.0 && tm >= 0.0);
    }

    /// The states of a box are complete: any state of another band on the same nodes has overlaps
    /// whose squares sum to one.
    #[test]
    fn overlaps_with_a_complete_set_sum_to_one(
        potentials in prop::collection::vec((0.0..0.3f64, 0.03..0.5f64), 2..6),
        others in prop::collection::vec((0.0..0.3f64, 0.03..0.5f64), 6),
    ) {
        let chain = |values: &[(f64, f64)]| {
            let runs = values.iter().map(|&(potential, mass)| Run {
                intervals: 8,
                length: 0.5,
                stiffness: HBAR2_OVER_2M0_EV_NM2 / mass,
                potential,
                softening: 0.0,
            });
            Chain::new(runs.collect())
        };
        let electrons = chain(&potentials);
        let holes = chain(&others[..potentials.len()]);
        let all = electrons.lowest(electrons.nodes(), None).expect("certified");
        let weights = electrons.weights();
        for hole in holes.lowest(3, None).expect("certified") {
            let sum: f64 = all
                .iter()
                .map(|electron| {
                    let parts = electron.envelope.iter().zip(&hole.envelope).zip(&weights);
                    parts.map(|((a, b), w)| a * b * w).sum::<f64>().powi(2)
                })
                .sum();
            // Vectors of neighbours are orthogonal as far as their iteration went.
            prop_assert!((sum - 1.0).abs() < 1e-5, "{sum}");
        }
    }
}

proptest! {
    #![proptest_config(cases(14))]

    /// Bound levels are not complete: their overlaps sum to at most one.
    #[test]
    fn overlaps_of_bound_levels_sum_to_at_most_one(recipe in recipe()) {
        let stack = recipe.stack("bands = \"single\"\nnonparabolic = false");
        solved(&stack, |evaluation| {
            for band in [stepwell::subbands::Band::Heavy, stepwell::subbands::Band::Light] {
                let overlaps = evaluation.bands.overlaps(band).0;
                for row in &overlaps {
                    prop_assert!(row.iter().sum::<f64>() <= 1.0 + 1e-6);
                }
                for hole in 0..evaluation.bands.of(band).len() {
                    let sum: f64 = overlaps.iter().map(|row| row[hole]).sum();
                    prop_assert!(sum <= 1.0 + 1e-6, "{sum}");
                }
            }
            Ok(())
        })?;
    }

    /// More carriers never lower the quasi-Fermi splitting.
    #[test]
    fn splitting_rises_with_density(recipe in recipe()) {
        solved(&recipe.stack(SINGLE), |evaluation| {
            let mut last = f64::NEG_INFINITY;
            for step in 0..40 {
                let filling = evaluation.filling(1e14 * 1.5f64.powi(step));
                let splitting = filling.fermi_electron_ev - filling.fermi_hole_ev;
                prop_assert!(splitting > last);
                last = splitting;
            }
            Ok(())
        })?;
    }

    /// The zero of energy is arbitrary: levels move with it, wavelengths and gain do not.
    #[test]
    fn a_shift_of_all_energies_shifts_nothing_else(recipe in recipe(), shift_ev in -2.0..2.0f64) {
        let moved = read(&recipe.text(&recipe.layers(), shift_ev, SINGLE));
        let stack = recipe.stack(SINGLE);
        for (here, there) in ladders(&stack).iter().zip(ladders(&moved)) {
            let back: Vec<f64> = there.iter().map(|energy| energy - shift_ev).collect();
            prop_assert!(apart(here, &back) < 1e-8);
        }
        let gains = |stack: &Stack| -> Vec<f64> {
            solved(stack, |evaluation| {
                let spectrum = evaluation.spectrum().expect("an index");
                let points = spectrum.runs.into_iter().flat_map(|run| run.points);
                points.map(|point| point.te_gain_cm).collect()
            })
        };
        let (here, there) = (gains(&stack), gains(&moved));
        let most = here.iter().copied().fold(0.0, f64::max);
        prop_assert!(most > 0.0 && apart(&here, &there) < 1e-5 * most);
    }

    /// Grown upside down, without a field, a stack has the same levels.
    #[test]
    fn reversed_layers_have_the_same_levels(recipe in recipe()) {
        let mut reversed = recipe.layers();
        reversed.reverse();
        let upside_down = read(&recipe.text(&reversed, 0.0, SINGLE));
        for (a, b) in ladders(&recipe.stack(SINGLE)).iter().zip(ladders(&upside_down)) {
            prop_assert!(apart(a, &b) < SAME_EV, "{a:?} {b:?}");
        }
    }

    /// A group is its layers written out as often as it says.
    #[test]
    fn a_group_is_its_layers_written_out(recipe in recipe(), repeat in 1..4usize) {
        let layers = recipe.layers();
        let row = |(role, material, nm): &(&str, String, f64)| {
            format!("{{ role = {role:?}, material = {material:?}, thickness_nm = {nm:?} }}")
        };
        let (first, group) = (&layers[0], &layers[1..]);
        let inner: Vec<String> = group.iter().map(row).collect();
        let grouped = [
            row(first),
            format!("{{ repeat = {repeat}, layers = [{}] }}", inner.join(", ")),
        ];
        let mut written = vec![row(first)];
        for _ in 0..repeat {
            written.extend(inner.iter().cloned());
        }
        let materials = recipe.materials(0.0);
        let (grouped, written) = (
            read(&file(&grouped, &materials, SINGLE)),
            read(&file(&written, &materials, SINGLE)),
        );
        let plain = |stack: &Stack| -> Vec<(String, f64)> {
            let layers = stack.layers.iter();
            layers.map(|layer| (layer.material.name.clone(), layer.thickness_nm)).collect()
        };
        prop_assert_eq!(plain(&grouped), plain(&written));
        prop_assert_eq!(ladders(&grouped), ladders(&written));
    }

    /// Two equal wells far apart have the levels of one, twice.
    #[test]
    fn far_wells_are_single_wells(recipe in recipe()) {
        let one = Recipe { wells: vec![recipe.wells[0]], ..recipe.clone() };
        let well_nm = recipe.wells[0].0;
        let mut layers = one.layers();
        // As deep as these wells are, 60 nm leave less than 1e-9 eV between the members of a pair
        // whose level is not near the edge.
        layers.insert(2, ("barrier", "barrier".to_owned(), 60.0));
        layers.insert(3, ("well", "well0".to_owned(), well_nm));
        let two = read(&one.text(&layers, 0.0, SINGLE));
        let (single, double) = (ladders(&one.stack(SINGLE)), ladders(&two));
        for (single, double) in single.iter().zip(&double) {
            // The highest level may lie so near the edge that 60 nm are not far.
            for (index, energy) in single.iter().enumerate().take(single.len().saturating_sub(1)) {
                for member in [2 * index, 2 * index + 1] {
                    prop_assert!((double[member] - energy).abs() < SAME_EV, "{single:?} {double:?}");
                }
            }
            prop_assert!(double.len() + 1 >= 2 * single.len() && double.len() <= 2 * single.len() + 1);
        }
    }

    /// A stack written as a file and read again gives the same levels and spectra.
    #[test]
    fn written_and_read_again_it_is_the_same(recipe in recipe()) {
        let stack = recipe.stack(SINGLE);
        let again = read(&structure::write(&stack));
        let results = |stack: &Stack| {
            solved(stack, |evaluation| {
                (evaluation.transitions.clone(), evaluation.spectrum().expect("an index"))
            })
        };
        prop_assert_eq!(results(&stack), results(&again));
    }
}

proptest! {
    #![proptest_config(cases(6))]

    /// The record that users read: sign, exact zero and detailed balance of every run, single and
    /// mixed bands alike.
    #[test]
    fn spectra_keep_sign_and_balance(recipe in recipe(), mixed in any::<bool>()) {
        let stack = recipe.stack(if mixed { MIXED } else { SINGLE });
        solved(&stack, |evaluation| {
            let spectrum = evaluation.spectrum().expect("an index");
            let kt = evaluation.thermal_ev();
            for run in &spectrum.runs {
                let mean = |point: &stepwell::spectra::Point| {
                    (2.0 * point.te_gain_cm + point.tm_gain_cm) / 3.0
                };
                let most = run.points.iter().map(|p| mean(p).abs()).fold(0.0, f64::max);
                prop_assert!(most > 0.0);
                for (photon, point) in spectrum.photon_ev.iter().zip(&run.points) {
                    let above = (photon - run.splitting_ev) / kt;
                    let sign = if above < 0.0 { 1.0 } else { -1.0 };
                    prop_assert!(sign * point.te_gain_cm >= 0.0 && sign * point.tm_gain_cm >= 0.0);
                    let modes = modes_per_ev_cm2_s(*photon, spectrum.refractive_index);
                    let balance = point.spontaneous_per_ev_cm3_s / modes * -above.exp_m1();
                    prop_assert!(
                        (balance - mean(point)).abs() <= 1e-12 * most,
                        "{:e} of the peak, mixed {mixed}, {above} kT above: {balance} {point:?} at {photon}",
                        (balance - mean(point)).abs() / most
                    );
                }
            }
            Ok(())
        })?;
    }
}
