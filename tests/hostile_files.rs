//! Files that nobody means well: answered, fast, without a panic.

use std::time::{Duration, Instant};

use proptest::prelude::*;
use stepwell::materials::Parameters;
use stepwell::source::{self, Colour, Diagnostic, report};
use stepwell::structure::{self, Overrides, Reading};

/// Far above what any of these takes, far below what a user would notice as hanging.
const PATIENCE: Duration = Duration::from_millis(900);

fn read(text: &str) -> Result<Reading, Vec<Diagnostic>> {
    structure::read(text, &Parameters::shipped(), &Overrides::default())
}

/// Reads and reports, and fails if that takes long.
fn is_answered(what: &str, text: &str) -> String {
    let parameters = Parameters::shipped();
    let start = Instant::now();
    let answer = structure::read(text, &parameters, &Overrides::default());
    let Err(faults) = answer else {
        panic!("{what} was accepted");
    };
    let report = report(&faults, "hostile.toml", text, Colour::Never);
    let elapsed = start.elapsed();
    assert!(elapsed < PATIENCE, "{what} took {elapsed:?}");
    assert!(!faults.is_empty(), "{what} is refused without a word");
    assert!(
        report.len() < 200_000,
        "{what}: a report of {} bytes",
        report.len()
    );
    report
}

#[test]
fn a_megabyte_of_anything_is_answered() {
    const MEGABYTE: usize = 1 << 20;
    let fill = |piece: &str| piece.repeat(MEGABYTE / piece.len());
    for piece in [
        "[",
        "{",
        "a = [",
        "a = {a = ",
        "]",
        "\"",
        "'",
        "\"\"\"",
        "\\",
        "#",
        "=",
        ",",
        ".",
        "a.",
        "[a]\n",
        "[[layers]]\n",
        "[[layers]]\nrole = \"well\"\n",
        "x = 1\n",
        "a = 1,5\n",
        "\r",
        "\r\n",
        "é",
        "🦀",
        "\u{1b}[31m",
        "nan\n",
        "layers = [",
        "[layers.layers]\n",
        "[a.b.c.d]\n",
    ] {
        is_answered(&format!("a megabyte of {piece:?}"), &fill(piece));
        is_answered(
            &format!("a value of {piece:?}"),
            &format!("format = {}", fill(piece)),
        );
        is_answered(
            &format!("a title of {piece:?}"),
            &format!("title = \"{}\"", fill(piece)),
        );
    }
}

#[test]
fn a_megabyte_of_distinct_keys_is_answered() {
    let lines =
        |count: usize, line: &dyn Fn(usize) -> String| -> String { (0..count).map(line).collect() };
    let keys = lines(80_000, &|key| format!("key{key} = 1\n"));
    is_answered("distinct keys", &keys);
    let dotted = lines(40_000, &|key| format!("a.b{key}.c = 1\n"));
    is_answered("dotted keys", &dotted);
}

#[test]
fn many_materials_are_refused_before_any_is_solved() {
    let materials: Vec<String> = (0..10_000)
        .map(|name| {
            format!("[materials.m{name}]\nalloy = \"AlGaInAs\"\ngap_nm = 1300\nmatched = true\n")
        })
        .collect();
    let text = format!(
        "format = 1\n[substrate]\nmaterial = \"InP\"\n{}",
        materials.concat()
    );
    let report = is_answered("ten thousand materials", &text);
    assert!(report.contains("at most 200 are read"), "{report}");
}

#[test]
fn a_million_repeats_are_refused_at_once() {
    for repeat in [
        "1000000",
        "10000",
        "18446744073709551616",
        "-1",
        "0x7fffffffffffffff",
    ] {
        let text = format!(
            "format = 1\n[substrate]\nmaterial = \"GaAs\"\n[[layers]]\nrepeat = {repeat}\nlayers = [\n  {{ role = \"well\", material = \"GaAs\", thickness_nm = 8 }},\n]\n"
        );
        is_answered(repeat, &text);
    }
}

#[test]
fn carriage_returns_and_a_byte_order_mark_change_nothing() {
    let text = good();
    let windows = format!("\u{feff}{}", text.replace('\n', "\r\n"));
    let windows = source::text(windows.as_bytes()).expect("text");
    let stack = |text: &str| read(text).expect("accepted").stack;
    assert_eq!(stack(windows), stack(&text));
}

#[test]
fn faults_beyond_a_hundred_are_counted() {
    let layers = "[[layers]]\nrole = \"well\"\n".repeat(1234);
    let text = format!("format = 1\n[substrate]\nmaterial = \"GaAs\"\n{layers}");
    let faults = read(&text).expect_err("neither materials nor thicknesses");
    let last = faults.last().expect("faults");
    assert_eq!(faults.len(), 101);
    assert_eq!(last.message, "1134 more faults follow");
}

/// A file with everything in it.
fn good() -> String {
    std::fs::read_to_string("structures/every-key.toml").expect("the example")
}

/// What a mutation puts in place of a piece of the file.
fn splinter() -> impl Strategy<Value = String> {
    prop_oneof![
        Just(String::new()),
        "[\\PC]{0,6}",
        Just("\n".to_owned()),
        Just("\"".to_owned()),
        Just("[[layers]]\n".to_owned()),
        Just("[materials.well]\n".to_owned()),
        Just("= -1e400".to_owned()),
        Just("nan".to_owned()),
        Just("{ }".to_owned()),
        Just("]".to_owned()),
        Just("\"InP\"".to_owned()),
        Just("repeat = 9999\n".to_owned()),
        "-?[0-9]{1,20}(\\.[0-9]{1,3})?(e-?[0-9]{1,3})?",
    ]
}

proptest! {
    #![proptest_config(ProptestConfig { rng_seed: proptest::test_runner::RngSeed::Fixed(1), cases: 400, failure_persistence: None, ..ProptestConfig::default() })]

    /// One to four cuts, each replaced by a splinter: read, and every fault shown at its place.
    #[test]
    fn a_mutilated_file_is_answered(
        cuts in prop::collection::vec((any::<prop::sample::Index>(), 0_usize..40, splinter()), 1..5)
    ) {
        let mut text = good();
        for (index, length, splinter) in cuts {
            let boundaries: Vec<usize> = text.char_indices().map(|(at, _)| at).collect();
            let place = index.index(boundaries.len());
            let start = boundaries[place];
            let end = boundaries.get(place + length).copied().unwrap_or(text.len());
            text.replace_range(start..end, &splinter);
        }
        let start = Instant::now();
        match read(&text) {
            Ok(reading) => {
                let written = structure::write(&reading.stack);
                let again = read(&written).map_err(|faults| {
                    TestCaseError::fail(report(&faults, "written.toml", &written, Colour::Never))
                })?;
                prop_assert_eq!(again.stack, reading.stack);
            }
            Err(faults) => {
                prop_assert!(!faults.is_empty());
                for fault in &faults {
                    prop_assert!(fault.help.is_some(), "no advice with {}", fault.message);
                    prop_assert!(fault.span.end <= text.len() && fault.span.start <= fault.span.end);
                    prop_assert!(fault.show("a.toml", &text, Colour::Always).contains(&fault.message));
                }
            }
        }
        prop_assert!(start.elapsed() < PATIENCE);
    }
}
