//! Files of returned data: what is accepted, and what is refused at which place.

use stepwell::design::unknowns;
use stepwell::materials::Parameters;
use stepwell::source::{Diagnostic, Place};
use stepwell::structure::{
    Assumptions, Medium, MismatchKind, Overrides, PlPeak, Stack, read, read_returned,
};

const COMPLETE: &str = r#"
[returned]
run = "E-0417"
[returned.pl]
peak_nm = 1314.2
temperature_c = 23
medium = "air"
sigma_nm = 1.5
[returned.xray]
reflection = "004"
period_nm = 14.62
period_sigma_nm = 0.03
mean_mismatch_ppm = 850
mismatch = "perpendicular"
sense = "tensile"
[assume]
barrier_ratio_fixed = true
moved = ["well.thickness", "well.Ga"]
"#;

fn faults(text: &str) -> Vec<Diagnostic> {
    match read_returned(text) {
        Ok(returned) => panic!("accepted: {returned:#?}"),
        Err(faults) => faults,
    }
}

/// One fault, at the place of `marked`, with advice.
fn one_fault(text: &str, marked: &str, message: &str) {
    let faults = faults(text);
    assert_eq!(faults.len(), 1, "{faults:#?}");
    let fault = &faults[0];
    assert!(fault.message.contains(message), "{}", fault.message);
    assert!(fault.help.is_some(), "no advice with: {}", fault.message);
    let at = text.find(marked).expect("the mark is in the text");
    let (got, want) = (fault.place(text), Place::of(text, at));
    assert_eq!(
        (got.line, got.column),
        (want.line, want.column),
        "{}",
        fault.message
    );
}

fn with(from: &str, to: &str) -> String {
    assert!(COMPLETE.contains(from), "{from}");
    COMPLETE.replace(from, to)
}

#[test]
fn a_complete_file_is_read_with_its_units_and_senses() {
    let returned = read_returned(COMPLETE).expect("sound");
    assert_eq!(returned.run, "E-0417");
    let pl = returned.pl.expect("there");
    assert_eq!(pl.peak, PlPeak::Nm(1314.2));
    assert!((pl.temperature_k - 296.15).abs() < 1e-12);
    assert_eq!((pl.medium, pl.sigma_given), (Medium::Air, true));
    let xray = returned.xray.expect("there");
    let period = xray.period_nm.expect("there");
    assert!((period.value - 14.62).abs() < 1e-12 && (period.sigma - 0.03).abs() < 1e-12);
    let mismatch = xray.mismatch.expect("there");
    assert_eq!(mismatch.kind, MismatchKind::Perpendicular);
    assert!(
        (mismatch.ppm.value + 850.0).abs() < 1e-12,
        "tensile is negative inside"
    );
    assert!(!mismatch.ppm.sigma_given);
    assert!(returned.assumptions.barrier_ratio_fixed);
}

#[test]
fn what_was_assumed_stands_where_the_file_is_silent() {
    let text = with("sigma_nm = 1.5\n", "");
    let pl = read_returned(&text).expect("sound").pl.expect("there");
    assert!(!pl.sigma_given && pl.sigma_nm > 0.0);
    let text = COMPLETE.split("[assume]").next().expect("a part");
    let returned = read_returned(text).expect("sound");
    assert_eq!(returned.assumptions, Assumptions::default());
}

#[test]
fn a_number_without_its_meaning_is_refused() {
    one_fault(
        &with("temperature_c = 23\n", ""),
        "[returned.pl]",
        "has no temperature",
    );
    one_fault(&with("medium = \"air\"\n", ""), "[returned.pl]", "`medium`");
    one_fault(
        &with("mismatch = \"perpendicular\"\n", ""),
        "mean_mismatch_ppm",
        "which it is",
    );
    one_fault(
        &with("sense = \"tensile\"\n", ""),
        "mean_mismatch_ppm",
        "no sense",
    );
    one_fault(&with("peak_nm = 1314.2\n", ""), "[returned.pl]", "neither");
    one_fault(
        &with("sigma_nm = 1.5", "map = \"a.csv\""),
        "map",
        "given twice",
    );
    one_fault(
        &with("sigma_nm = 1.5", "temperature_k = 296"),
        "temperature_k",
        "given twice",
    );
    one_fault(&with("run = \"E-0417\"\n", ""), "[returned]", "no `run`");
}

#[test]
fn misspelt_keys_and_signs_and_impossible_numbers_are_refused() {
    one_fault(
        &with("peak_nm = 1314.2", "peek_nm = 1314.2"),
        "peek_nm",
        "unknown key `peek_nm`",
    );
    one_fault(
        &with("= 850", "= -850"),
        "-850",
        "`mean_mismatch_ppm` is -850",
    );
    one_fault(&with("1314.2", "1.3142"), "1.3142", "`peak_nm` is 1.3142");
    one_fault(
        &with("\"perpendicular\"", "\"vertical\""),
        "\"vertical\"",
        "no `mismatch`",
    );
    one_fault(
        &with("[\"well.thickness\", \"well.Ga\"]", "[1, \"well.Ga\"]"),
        "1, \"well.Ga\"",
        "holds a number",
    );
    one_fault(
        "[returned]\nrun = \"A\"\n",
        "[returned]",
        "nothing was measured",
    );
    let empty = faults("");
    assert!(empty[0].message.contains("what came back"), "{empty:#?}");
}

#[test]
fn broken_toml_is_refused_at_its_place() {
    let text = with("peak_nm = 1314.2", "peak_nm = = 1314.2");
    let found = faults(&text);
    assert_eq!(found[0].place(&text).line, 5, "{found:#?}");
}

const STACK: &str = r#"
format = 1
[substrate]
material = "InP"
[materials.house.numbers]
lattice_nm = 0.5869
gap_ev = 1.2
valence_edge_ev = -1.0
split_off_ev = 0.3
electron_mass = 0.07
luttinger = [6.0, 2.0, 2.6]
kane_energy_ev = 20.0
ac_ev = -6.0
av_ev = 1.0
b_ev = -1.8
c11_gpa = 100.0
c12_gpa = 55.0
[[layers]]
role = "barrier"
material = "house"
thickness_nm = 20
[[layers]]
repeat = 2
layers = [
  { role = "well", material = "In0.7Ga0.3As0.9P0.1", thickness_nm = 6 },
  { role = "barrier", material = "house", thickness_nm = 10 },
]
"#;

fn stack() -> Stack {
    read(STACK, &Parameters::shipped(), &Overrides::default())
        .expect("sound")
        .stack
}

fn moved(words: &[&str]) -> Assumptions {
    Assumptions {
        moved: Some(
            words
                .iter()
                .map(|word| (3..9, (*word).to_owned()))
                .collect(),
        ),
        ..Assumptions::default()
    }
}

#[test]
fn names_that_mean_nothing_in_the_stack_are_refused_with_what_is_meant() {
    let stack = stack();
    for (word, message) in [
        ("well", "does not say what moved"),
        ("wel.thickness", "no layer is made of `wel`"),
        ("well.Al", "neither `thickness` nor an element"),
        ("well.depth", "neither `thickness` nor an element"),
        ("house.Ga", "its own numbers"),
    ] {
        let found = unknowns(&stack, &moved(&[word])).expect_err(word);
        assert_eq!(found.len(), 1, "{found:#?}");
        assert!(found[0].message.contains(message), "{}", found[0].message);
        assert_eq!(found[0].span, 3..9);
        assert!(found[0].help.is_some());
    }
    let twice = unknowns(&stack, &moved(&["well.Ga", "well.Ga"])).expect_err("twice");
    assert!(twice[0].message.contains("stands twice"));
    let tied = Assumptions {
        barrier_ratio_fixed: true,
        ..moved(&["barrier.thickness"])
    };
    let tied = unknowns(&stack, &tied).expect_err("tied");
    assert!(tied[0].message.contains("keep their ratio"));
}

#[test]
fn a_share_moves_against_the_largest_other_of_its_sublattice() {
    let stack = stack();
    let found = unknowns(&stack, &moved(&["well.Ga", "well.P", "well.thickness"])).expect("named");
    let gives_way: Vec<Option<&str>> = found
        .iter()
        .map(|it| it.gives_way().map(stepwell::materials::Element::symbol))
        .collect();
    assert_eq!(gives_way, [Some("In"), Some("As"), None]);
    let mut grown = stack.clone();
    found[0].shift(&mut grown, 0.01);
    let formula = grown.layers[1].material.formula();
    assert_eq!(formula, "Ga0.31In0.69P0.1As0.9");
}
