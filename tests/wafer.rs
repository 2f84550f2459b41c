//! The program as who orders a wafer meets it: `xray`, `restate`, and `check` against the limits of
//! a house.

use proptest::prelude::*;
use serde_json::Value;
use std::process::Output;
use stepwell::coherence::StrainBudget;
use stepwell::diffraction::{Diffraction, Reflection};
use stepwell::materials::{Parameters, Sense};
use stepwell::structure::{Overrides, Stack, read};

fn run(words: &[&str]) -> Output {
    assert_cmd::Command::new(env!("CARGO_BIN_EXE_stepwell"))
        .args(words)
        .output()
        .expect("the program runs")
}

fn document(words: &[&str]) -> Value {
    let output = run(words);
    serde_json::from_slice(&output.stdout).unwrap_or_else(|error| {
        panic!(
            "{words:?}: {error}\n{}",
            String::from_utf8_lossy(&output.stderr)
        )
    })
}

/// A structure that is not used for its levels.
fn stack(text: &str) -> Stack {
    let reading = read(text, &Parameters::shipped(), &Overrides::default());
    reading
        .unwrap_or_else(|faults| panic!("{faults:#?}\n{text}"))
        .stack
}

fn wells(count: usize, indium: f64, well_nm: f64, barrier_nm: f64, phosphorus: f64) -> String {
    let gallium = 1.0 - indium;
    let barrier = if phosphorus == 0.0 {
        "GaAs".to_owned()
    } else {
        format!("GaAs{}P{phosphorus}", 1.0 - phosphorus)
    };
    format!(
        "format = 1\n[substrate]\nmaterial = \"GaAs\"\n\
         [[layers]]\nrole = \"barrier\"\nmaterial = \"{barrier}\"\nthickness_nm = {barrier_nm}\n\
         [[layers]]\nrepeat = {count}\nlayers = [\n\
         {{ role = \"well\", material = \"In{indium}Ga{gallium}As\", thickness_nm = {well_nm} }},\n\
         {{ role = \"barrier\", material = \"{barrier}\", thickness_nm = {barrier_nm} }},\n]\n\
         [[layers]]\nrole = \"cap\"\nmaterial = \"GaAs\"\nthickness_nm = 50\n"
    )
}

fn seen(text: &str) -> Diffraction {
    let parameters = Parameters::shipped();
    Diffraction::new(&stack(text), &parameters, Reflection::DEFAULT, 300.0).expect("reflects")
}

proptest! {
    #![proptest_config(ProptestConfig { rng_seed: proptest::test_runner::RngSeed::Fixed(1), failure_persistence: None, cases: 48, ..ProptestConfig::default() })]

    /// Satellites give the period, and the zero order the mean mismatch by thickness.
    #[test]
    fn satellites_give_period_and_mean_mismatch(
        count in 2usize..12,
        indium in 0.02..0.3f64,
        well_nm in 4.0..12.0f64,
        barrier_nm in 6.0..25.0f64,
        phosphorus in 0.0..0.2f64,
    ) {
        let seen = seen(&wells(count, indium, well_nm, barrier_nm, phosphorus));
        let multi_well = seen.multi_well.as_ref().expect("wells repeat");
        prop_assert_eq!(multi_well.periods, count);
        prop_assert!((multi_well.period_nm - well_nm - barrier_nm).abs() < 1e-9);
        let sines: Vec<f64> = multi_well
            .satellites
            .iter()
            .map(|satellite| satellite.peak.theta_deg.to_radians().sin())
            .collect();
        for pair in sines.windows(2) {
            let period_nm = 0.1540593 / (2.0 * (pair[1] - pair[0]));
            prop_assert!((period_nm / multi_well.period_nm - 1.0).abs() < 1e-8);
        }
        let layer = |index: usize| {
            seen.layers.iter().find(|it| it.layer == index).expect("a layer").mismatch.perpendicular
        };
        // Periods of planes, so that the mean is harmonic: the two differ in second order.
        let mean = (well_nm * layer(1) + barrier_nm * layer(0)) / (well_nm + barrier_nm);
        let spread = (layer(1) - layer(0)).powi(2);
        prop_assert!((multi_well.mean.perpendicular - mean).abs() <= spread);
        let zero = multi_well.zero_order().expect("a zero order").peak;
        prop_assert_eq!(zero.offset_arcsec < 0.0, multi_well.mean.perpendicular > 0.0);
    }

    /// Where the strain budget finds balance, X-rays find a zero order near the substrate's peak,
    /// and both name the same sense otherwise.
    #[test]
    fn budget_and_zero_order_agree_on_the_sense(
        indium in 0.05..0.3f64,
        well_nm in 4.0..12.0f64,
        barrier_nm in 6.0..25.0f64,
        phosphorus in 0.02..0.2f64,
    ) {
        let text = wells(4, indium, well_nm, barrier_nm, phosphorus);
        let parameters = Parameters::shipped();
        let budget = StrainBudget::new(&stack(&text), &parameters);
        let period = StrainBudget::new(&stack(&wells(4, indium, well_nm, barrier_nm, 0.0)), &parameters);
        let active = budget.active.expect("wells");
        let factor = budget.balance.expect("barriers").thickness_factor.expect("tensile barriers");
        // The force weighs layers by their stiffness, the mean does not: near balance they may differ.
        if active.mean.relaxed.abs() > 2e-3 {
            prop_assert_eq!(factor > 1.0, active.mean.sense() == Sense::Compressive);
            prop_assert_eq!(active.force_n_m > 0.0, active.mean.sense() == Sense::Compressive);
        }
        let unbalanced = period.active.expect("wells");
        prop_assert!(unbalanced.mean.relaxed > active.mean.relaxed);
    }

    /// The rocking curve is bright at the places that are listed, and never above all.
    #[test]
    fn the_curve_stands_where_the_list_says(
        indium in 0.1..0.25f64,
        well_nm in 6.0..10.0f64,
        barrier_nm in 10.0..20.0f64,
    ) {
        let seen = seen(&wells(10, indium, well_nm, barrier_nm, 0.0));
        let curve = seen.rocking_curve();
        prop_assert!(curve.points.iter().all(|point| (0.0..=1.0).contains(&point.intensity)));
        let multi_well = seen.multi_well.as_ref().expect("wells repeat");
        // The strongest satellite away from the substrate's peak.
        let strongest = multi_well
            .satellites
            .iter()
            .filter(|it| it.peak.offset_arcsec.abs() > 600.0 && it.order.abs() <= 3)
            .max_by(|a, b| a.intensity.total_cmp(&b.intensity))
            .expect("a satellite");
        let half = 0.5 * multi_well.spacing_arcsec;
        let peak = curve
            .points
            .iter()
            .filter(|it| (it.offset_arcsec - strongest.peak.offset_arcsec).abs() < half)
            .filter(|it| it.offset_arcsec.abs() > 300.0)
            .max_by(|a, b| a.kinematical.total_cmp(&b.kinematical))
            .expect("points");
        let miss = (peak.offset_arcsec - strongest.peak.offset_arcsec).abs();
        prop_assert!(miss < 0.6 * multi_well.fringe_arcsec, "{miss} of {}", multi_well.fringe_arcsec);
    }
}

#[test]
fn xray_answers_for_every_reflection_and_keeps_its_keys() {
    let file = "structures/estuary-1310.toml";
    for reflection in ["002", "004", "006"] {
        let document = document(&[
            "xray",
            file,
            "--reflection",
            reflection,
            "--json",
            "--quiet",
        ]);
        assert_eq!(document["reflection"], reflection);
        assert_eq!(document["multi_well"]["periods"], 6);
        let satellites = document["multi_well"]["satellites"]
            .as_array()
            .expect("a list");
        let zero = satellites
            .iter()
            .find(|it| it["order"] == 0)
            .expect("a zero order");
        assert_eq!(
            zero["offset_arcsec"],
            document["multi_well"]["zero_order_arcsec"]
        );
        for layer in document["layers"].as_array().expect("a list") {
            let offset = layer["offset_arcsec"].as_f64().expect("a number");
            match layer["strain"].as_str() {
                Some("compressive") => assert!(offset < 0.0),
                Some("tensile") => assert!(offset > 0.0),
                _ => assert!(offset.abs() < 1e-3),
            }
        }
    }
    for (reflection, says) in [
        ("003", "extinct"),
        ("008", "half the wavelength"),
        ("4", "004"),
    ] {
        let output = run(&["xray", file, "--reflection", reflection]);
        assert_ne!(output.status.code(), Some(0), "{reflection}");
        assert!(
            String::from_utf8_lossy(&output.stderr).contains(says),
            "{reflection}"
        );
    }
}

/// The number of that name in the answer to `restate`.
fn said(words: &[&str], name: &str, unit: &str) -> f64 {
    let mut all = vec!["restate"];
    all.extend(words);
    all.push("--json");
    let document = document(&all);
    let statements = document["statements"].as_array().expect("a list");
    statements
        .iter()
        .find(|it| it["name"] == name && it["unit"] == unit)
        .and_then(|it| it["value"].as_f64())
        .unwrap_or_else(|| panic!("{name} {unit}: {statements:#?}"))
}

#[track_caller]
fn assert_close(got: f64, want: f64, tolerance: f64) {
    assert!((got - want).abs() <= tolerance, "{got} is not {want}");
}

#[test]
fn restate_goes_there_and_back() {
    let air = said(&["1310nm"], "photon, air", "nm");
    let words = format!("{air}nm");
    assert_close(
        said(&[&words, "--air"], "photon, vacuum", "nm"),
        1310.0,
        1e-6,
    );
    let peak = said(
        &["1100nm", "--at", "25C"],
        "as a gap: bulk photoluminescence at 298.15 K, vacuum",
        "nm",
    );
    let words = format!("{peak}nm");
    assert_close(
        said(
            &[&words, "--pl", "--at", "25C"],
            "gap at 298.15 K, vacuum",
            "nm",
        ),
        1100.0,
        1e-6,
    );
    // The peak lies kT/2 above the gap: 12.5 nm at 1.10 µm and 300 K (common practice).
    assert_close(
        1100.0
            - said(
                &["1100nm"],
                "as a gap: bulk photoluminescence at 300 K, vacuum",
                "nm",
            ),
        12.5,
        0.3,
    );
    let seen = said(
        &["850ppm", "tensile", "--mismatch", "relaxed", "--on", "InP"],
        "perpendicular mismatch, tensile",
        "ppm",
    );
    let words = format!("{seen}ppm");
    let back = said(
        &[
            &words,
            "tensile",
            "--mismatch",
            "perpendicular",
            "--on",
            "InP",
        ],
        "relaxed mismatch, tensile",
        "ppm",
    );
    assert_close(back, 850.0, 1e-8);
    let mev = said(&["35nm", "--around", "1310nm"], "width", "meV");
    // Δλ = λ² ΔE/hc.
    assert_close(mev, 35.0 * 1239.841984e3 / (1310.0 * 1310.0), 0.01);
    assert_close(
        said(&["2e12cm-2", "--over", "5nm"], "density per volume", "cm⁻³"),
        4e18,
        1e6,
    );
    assert_close(said(&["-40C"], "temperature", "K"), 233.15, 1e-9);
}

/// The gap of the answer is the one asked for, at the temperature asked for.
#[test]
fn restate_finds_the_composition_of_a_gap() {
    for at in ["300K", "85C"] {
        let words = [
            "1250nm", "--at", at, "--alloy", "InGaAsP", "--strain", "matched", "--on", "InP",
        ];
        let gap = said(&words, "its strained gap", "eV");
        let photon = said(&words, "photon, energy", "eV");
        assert_close(gap, photon, 2e-6);
    }
    // Quaternary on InP by the measured curve of Nahory et al. 1978: y = 0.327 has 1.1274 eV
    // (1.1 µm); the tabulated bowings put the gap some tens of meV above, so that y is larger.
    let arsenic = said(
        &[
            "1250nm", "--alloy", "InGaAsP", "--strain", "matched", "--on", "InP",
        ],
        "As",
        "",
    );
    assert!((0.5..0.75).contains(&arsenic), "{arsenic}");
}

#[test]
fn restate_asks_for_what_is_not_said() {
    for (words, asks) in [
        (&["850ppm", "--on", "InP"][..], "--mismatch"),
        (&["850ppm", "--mismatch", "relaxed"], "--on InP"),
        (
            &["-850ppm", "--mismatch", "relaxed", "--on", "InP"],
            "compressive or",
        ),
        (&["2e12cm-2"], "--over"),
        (&["1310"], "1310nm"),
        (
            &["1250nm", "--alloy", "InGaAsP", "--on", "InP"],
            "--strain matched",
        ),
        (
            &[
                "1250nm", "--alloy", "InGaAsP", "--on", "InP", "--strain", "1%",
            ],
            "1%compressive",
        ),
        (
            &["850ppm", "--mismatch", "relaxd", "--on", "InP"],
            "relaxed",
        ),
        (&["1,31um"], "1.31um"),
        (&["0.9eV", "--air"], "the same in air"),
        (&["35nm", "--around", "1310nm", "--air"], "in vacuum"),
        (&["1310nm", "--mismatch", "relaxed"], "says nothing"),
        (&["1310nm", "--over", "5nm"], "says nothing"),
        (&["1310nm", "--on", "InP"], "--alloy"),
        (&["85C", "--at", "25C"], "a temperature"),
        (
            &["1%compressive", "--mismatch", "relaxed", "--on", "InP"],
            "a strain",
        ),
    ] {
        let mut all = vec!["restate"];
        all.extend(words);
        let output = run(&all);
        assert_eq!(output.status.code(), Some(2), "{words:?}");
        assert!(output.stdout.is_empty());
        let errors = String::from_utf8_lossy(&output.stderr).into_owned();
        assert!(errors.contains(asks), "{words:?}: {errors}");
    }
}

/// Findings of `check` on a text, by their codes, and the exit code.
fn findings(text: &str) -> (Vec<Value>, i32) {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("case.toml");
    std::fs::write(&path, text).expect("written");
    let output = run(&["check", &path.display().to_string(), "--json"]);
    let document: Value = serde_json::from_slice(&output.stdout).expect("JSON");
    let findings = document["findings"].as_array().expect("a list").clone();
    (findings, output.status.code().expect("a code"))
}

fn standing<'a>(findings: &'a [Value], code: &str) -> Vec<&'a str> {
    findings
        .iter()
        .filter(|finding| finding["code"] == code)
        .filter_map(|finding| finding["standing"].as_str())
        .collect()
}

/// Every limit of the house, once kept and once broken by the same structure.
#[test]
fn each_limit_of_the_house_is_compared() {
    let structure = format!(
        "{}[[layers]]\nrole = \"contact\"\nmaterial = \"In0.02Ga0.98As\"\nthickness_nm = 20\nacceptors_cm3 = 1e19\n",
        wells(3, 0.2, 8.0, 20.0, 0.0)
    );
    for (limit, code, kept, broken) in [
        ("strain_percent_max", "strain", 1.5, 1.0),
        ("strain_thickness_percent_nm_max", "strain", 12.0, 10.0),
        ("critical_share_max", "strain", 0.7, 0.4),
        ("net_strain_percent_max", "stack-strain", 0.5, 0.1),
        ("mismatch_ppm_max", "bulk-mismatch", 2000.0, 1000.0),
        ("layer_nm_min", "thin-layer", 2.0, 10.0),
        ("well_nm_min", "thin-layer", 5.0, 9.0),
        ("barrier_kt_min", "hole-barrier", 0.5, 50.0),
        ("coupling_mev_max", "coupling", 100.0, 1e-9),
        ("acceptor_setback_nm_min", "doping", 60.0, 80.0),
    ] {
        let check = |value: f64| findings(&format!("{structure}[limits]\n{limit} = {value}\n"));
        let (inside, _) = check(kept);
        assert!(
            !standing(&inside, code).contains(&"outside"),
            "{limit}: {inside:#?}"
        );
        let (outside, ending) = check(broken);
        assert!(
            standing(&outside, code).contains(&"outside"),
            "{limit}: {outside:#?}"
        );
        assert_eq!(ending, 5);
    }
    let (findings, ending) = findings(&format!("{structure}[limits]\nwithout_elements = \"In\"\n"));
    assert!(standing(&findings, "forbidden-element").contains(&"outside"));
    assert_eq!(ending, 5);
}

#[test]
fn too_thick_a_layer_is_outside_without_any_limit() {
    let (sound, _) = findings(&wells(1, 0.2, 8.0, 20.0, 0.0));
    assert_eq!(standing(&sound, "strain"), ["stated"]);
    let (thick, _) = findings(&wells(1, 0.2, 20.0, 20.0, 0.0));
    assert_eq!(
        standing(&thick, "strain"),
        ["look"],
        "over force balance, under energy balance"
    );
    let (torn, ending) = findings(&wells(1, 0.2, 80.0, 20.0, 0.0));
    assert_eq!(standing(&torn, "strain"), ["outside"]);
    assert_eq!(ending, 5);
}

#[test]
fn remarks_for_the_grower_come_where_they_belong() {
    let (same, _) = findings(&wells(2, 0.2, 8.0, 10.0, 0.0));
    assert!(standing(&same, "group-v-change").is_empty());
    assert!(
        standing(&same, "other-source").contains(&"look"),
        "the offset rule on GaAs: {same:#?}"
    );
    let (phosphide, _) = findings(&wells(2, 0.2, 8.0, 10.0, 0.1));
    assert_eq!(standing(&phosphide, "group-v-change"), ["stated"]);
    let two_alloys = wells(2, 0.2, 8.0, 10.0, 0.0).replace(
        "role = \"cap\"\nmaterial = \"GaAs\"",
        "role = \"cap\"\nmaterial = \"In0.19Ga0.81As\"",
    );
    let (similar, _) = findings(&two_alloys);
    assert_eq!(standing(&similar, "similar-alloys"), ["look"]);
    let one_sided = wells(2, 0.2, 8.0, 10.0, 0.0).replacen("\"barrier\"", "\"confinement\"", 1);
    let (fence, _) = findings(&one_sided);
    assert_eq!(standing(&fence, "barrier-count"), ["look"]);
}

/// The tolerance of [target] against the scatter of [growth]: sigma is that of the linear law.
#[test]
fn a_tolerance_below_the_scatter_of_growth_is_said() {
    let structure = format!(
        "{}[model]\nbands = \"single\"\n",
        wells(2, 0.2, 8.0, 20.0, 0.0)
    );
    let growth = "[growth]\nrate_percent = 1\nflux_percent = { In = 1, Ga = 1 }\n";
    let with = |tolerance_nm: f64, growth: &str| {
        format!(
            "{structure}[target]\nkind = \"pl\"\nwavelength_nm = 990\nmedium = \"vacuum\"\n\
             tolerance_nm = {tolerance_nm}\n{growth}"
        )
    };
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("case.toml");
    std::fs::write(&path, with(5.0, growth)).expect("written");
    let path = path.display().to_string();
    let spread = document(&["spread", &path, "--draws", "1000", "--json", "--quiet"]);
    let sigma_nm = spread["linear"]["sigma_nm"].as_f64().expect("a number");
    assert!(sigma_nm > 0.5, "{sigma_nm}");
    for (sigmas, expected) in [(2.1, "ok"), (1.5, "look"), (0.9, "outside")] {
        let (found, ending) = findings(&with(sigmas * sigma_nm, growth));
        assert_eq!(standing(&found, "growth-scatter"), [expected]);
        assert_eq!(
            ending == 5,
            standing(&found, "target") == ["outside"] || expected == "outside"
        );
        let finding = found
            .iter()
            .find(|finding| finding["code"] == "growth-scatter")
            .expect("there");
        assert_eq!(finding["advice"].is_null(), expected == "ok");
        let measure = |name: &str| {
            let measures = finding["measures"].as_array().expect("a list");
            let found = measures.iter().find(|it| it["name"] == name);
            found.and_then(|it| it["value"].as_f64()).expect("a number")
        };
        assert_close(measure("sigma_nm"), sigma_nm, 1e-9);
        // The share of a normal law within so many sigmas.
        let share = 100.0 * libm::erf(sigmas / std::f64::consts::SQRT_2);
        assert_close(measure("inside_if_centred_percent"), share, 1e-6);
    }
    let (unstated, _) = findings(
        &with(5.0, "")
            .replace("kind = \"pl\"\n", "")
            .replace("medium = \"vacuum\"\n", ""),
    );
    assert_eq!(standing(&unstated, "target-assumed"), ["look"]);
    let (silent, _) = findings(&with(5.0, ""));
    assert!(standing(&silent, "target-assumed").is_empty());
    assert!(standing(&silent, "growth-scatter").is_empty());
}

/// The promise of [target] against the layers: kept, broken, finer than a map can tell, and without
/// a tolerance.
#[test]
fn the_promise_of_the_file_is_recomputed() {
    let structure = wells(2, 0.2, 8.0, 20.0, 0.0);
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("case.toml");
    std::fs::write(&path, &structure).expect("written");
    let levels = document(&["levels", &path.display().to_string(), "--json", "--quiet"]);
    let photoluminescence_nm = levels["emission"]["pl_nm"].as_f64().expect("a peak");
    let check = |wavelength_nm: f64, more: &str| {
        let target = format!("[target]\nkind = \"pl\"\nwavelength_nm = {wavelength_nm}\n{more}");
        let (findings, _) = findings(&format!("{structure}{target}"));
        standing(&findings, "target").concat()
    };
    assert_eq!(
        check(photoluminescence_nm + 2.0, "tolerance_nm = 3\n"),
        "ok"
    );
    assert_eq!(
        check(photoluminescence_nm + 4.0, "tolerance_nm = 3\n"),
        "outside"
    );
    assert_eq!(check(photoluminescence_nm, "tolerance_nm = 0.5\n"), "look");
    assert_eq!(check(photoluminescence_nm, ""), "look");
    // 1000 nm in air is 0.27 nm longer in vacuum: inside by one measure, outside by the other.
    let air = "medium = \"air\"\ntolerance_nm = 1.1\n";
    assert_eq!(check(photoluminescence_nm + 1.0, air), "outside");
    assert_eq!(check(photoluminescence_nm - 1.0, air), "ok");
}
