//! The program as a user meets it: words in, files and exit code out.

use assert_cmd::Command;
use serde_json::Value;
use std::collections::BTreeSet;
use std::fs;
use std::io::Read as _;
use std::path::{Path, PathBuf};
use std::process::{Output, Stdio};
use unicode_width::UnicodeWidthStr as _;

fn stepwell(words: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_stepwell"));
    command.args(words).env_remove("NO_COLOR");
    command
}

fn run(words: &[&str]) -> Output {
    stepwell(words).output().expect("the program runs")
}

fn text(bytes: &[u8]) -> &str {
    std::str::from_utf8(bytes).expect("UTF-8")
}

/// Standard output of a run that must end well.
fn result(words: &[&str]) -> String {
    let output = run(words);
    let errors = text(&output.stderr);
    assert_eq!(output.status.code(), Some(0), "{words:?}\n{errors}");
    text(&output.stdout).to_owned()
}

/// Exit code and standard error of a run that must end badly, saying nothing on standard output.
fn refusal(words: &[&str]) -> (i32, String) {
    let output = run(words);
    assert!(
        output.stdout.is_empty(),
        "{words:?}: {}",
        text(&output.stdout)
    );
    let code = output.status.code().expect("a code");
    (code, text(&output.stderr).to_owned())
}

fn structures() -> Vec<String> {
    let mut paths: Vec<String> = fs::read_dir("structures")
        .expect("the folder")
        .map(|entry| entry.expect("an entry").path().display().to_string())
        .filter(|path| Path::new(path).extension().is_some_and(|it| it == "toml"))
        .collect();
    paths.sort();
    assert!(paths.len() >= 8, "{paths:?}");
    paths
}

const PUMP: &str = "structures/estuary-980.toml";
const TENSILE: &str = "structures/estuary-tensile.toml";

/// A well with nothing to hold the electrons: GaAs between layers of a smaller gap.
const NO_WELL: &str = r#"
format = 1
[substrate]
material = "GaAs"
[[layers]]
role = "barrier"
material = "In0.1Ga0.9As"
thickness_nm = 40
[[layers]]
role = "well"
material = "GaAs"
thickness_nm = 8
[[layers]]
role = "barrier"
material = "In0.1Ga0.9As"
thickness_nm = 40
"#;

fn folder() -> tempfile::TempDir {
    tempfile::tempdir().expect("a folder")
}

fn put(folder: &tempfile::TempDir, name: &str, content: &str) -> String {
    let path = folder.path().join(name);
    fs::write(&path, content).expect("written");
    shown(&path)
}

fn shown(path: &Path) -> String {
    path.to_str().expect("UTF-8").to_owned()
}

fn fits_the_page(words: &[&str], page: &str) {
    for line in page.lines() {
        assert!(
            line.width() <= 80,
            "{words:?}: {} columns\n{line}",
            line.width()
        );
        assert_eq!(line, line.trim_end(), "{words:?}: blanks at the end");
    }
}

#[test]
fn every_command_answers_for_every_structure_inside_80_columns() {
    for path in structures() {
        for command in ["levels", "spectrum", "check"] {
            let words = [command, path.as_str()];
            let output = run(&words);
            let codes: &[i32] = if command == "check" { &[0, 5] } else { &[0] };
            let code = output.status.code().expect("a code");
            assert!(codes.contains(&code), "{words:?}: {code}");
            let page = text(&output.stdout);
            assert!(page.contains("Stamp"), "{words:?}");
            fits_the_page(&words, page);
            fits_the_page(&words, text(&output.stderr));
        }
    }
}

#[test]
fn other_pages_fit_80_columns_too() {
    for words in [
        &[][..],
        &["--help"],
        &["-h"],
        &["levels", "--help"],
        &["spectrum", "--help"],
        &["check", "--help"],
        &["materials", "--help"],
        &["new", "--help"],
        &["new"],
        &["materials"],
        &[
            "materials",
            "Al0.3Ga0.2In0.5As",
            "--on",
            "InP",
            "--at",
            "85C",
        ],
        &["materials", "--used-by", "structures/estuary-1550.toml"],
        &["levels", "structures/estuary-980.toml", "--bands", "mixed"],
        &[
            "spectrum",
            PUMP,
            "--density",
            "1e14,9.87654e17,1e20",
            "--at",
            "600K",
        ],
    ] {
        fits_the_page(words, &result(words));
    }
}

#[test]
fn a_bare_call_says_what_to_do_next() {
    let page = result(&[]);
    assert!(page.lines().count() <= 10, "{page}");
    assert!(page.contains("stepwell new"));
    assert!(page.contains("stepwell levels"));
}

#[test]
fn a_new_file_is_the_shipped_one_and_works() {
    for path in structures() {
        let name = Path::new(&path)
            .file_stem()
            .and_then(|it| it.to_str())
            .expect("a name");
        let shipped = fs::read_to_string(&path).expect("the file");
        assert_eq!(result(&["new", name]), shipped);
        assert!(result(&["new"]).contains(name));
    }
}

#[test]
fn standard_input_is_a_file_too() {
    let content = fs::read_to_string(PUMP).expect("the file");
    let from_input = stepwell(&["levels", "-"])
        .write_stdin(content)
        .output()
        .expect("runs");
    assert_eq!(text(&from_input.stdout), result(&["levels", PUMP]));
}

#[test]
fn same_input_same_bytes() {
    let folder = folder();
    for command in ["levels", "spectrum", "check"] {
        for flag in [None, Some("--json")] {
            let words: Vec<&str> = [command, TENSILE].into_iter().chain(flag).collect();
            let first = run(&words);
            let second = run(&words);
            assert_eq!(text(&first.stdout), text(&second.stdout));
            assert_eq!(text(&first.stderr), text(&second.stderr));
        }
    }
    for (command, flag, name) in [
        ("levels", "--csv", "a.csv"),
        ("levels", "--figure", "a.svg"),
        ("levels", "--matrix", "a.mtx"),
        ("spectrum", "--csv", "b.csv"),
        ("spectrum", "--figure", "b.svg"),
    ] {
        let path = shown(&folder.path().join(name));
        let content = || {
            result(&[command, TENSILE, flag, &path, "--force"]);
            fs::read_to_string(&path).expect("written")
        };
        assert_eq!(content(), content(), "{command} {flag}");
    }
}

#[test]
fn exit_codes_mean_something() {
    let folder = folder();
    let no_well = put(&folder, "no-well.toml", NO_WELL);
    let broken = put(&folder, "broken.toml", "format = 1\n[[layers]\n");
    let faulty = put(
        &folder,
        "faulty.toml",
        &NO_WELL.replace("thickness_nm = 8", "thicknes_nm = 8"),
    );
    for (words, code, says) in [
        (&["levels", no_well.as_str()][..], 1, "no electron level"),
        (&["level", PUMP], 2, "levels"),
        (&["levels"], 2, "FILE"),
        (&["levels", PUMP, "--at", "85"], 2, "85C or 85K"),
        (&["levels", PUMP, "--at", "5000K"], 2, "1 to 1000 K"),
        (&["levels", PUMP, "--at", "85F"], 2, "the unit is C or K"),
        (&["spectrum", PUMP, "--density", "3e-18"], 2, "--density"),
        (&["spectrum", PUMP, "--density", "lots"], 2, "3e18"),
        (
            &["levels", PUMP, "--bands", "mixde"],
            2,
            "did you mean `mixed`",
        ),
        (&["levels", PUMP, "--matrix-of", "heavy"], 2, "--matrix"),
        (
            &["levels", PUMP, "--matrix", "x.mtx", "--matrix-of", "heavi"],
            2,
            "did you mean `heavy`",
        ),
        (&["estuary-980"], 2, "stepwell new estuary-980"),
        (&[PUMP], 2, "stepwell levels"),
        (&["new", "estuary-1311"], 2, "estuary-1310"),
        (&["completions", "sh"], 2, "bash"),
        (&["materials", "Al0.3Ga0.8As"], 2, "Al0.3Ga0.8As"),
        (&["materials", "InP", "--used-by", PUMP], 2, "--used-by"),
        (&["levels", "not-there.toml"], 3, "there is no file"),
        (&["levels", "estuary-980"], 3, "stepwell new estuary-980"),
        (&["levels", "src"], 3, "is a folder"),
        (&["levels", broken.as_str()], 3, "broken.toml:2"),
        (&["levels", faulty.as_str()], 3, "thickness_nm"),
        (
            &["levels", PUMP, "--materials", PUMP],
            3,
            "estuary-980.toml",
        ),
    ] {
        let (got, errors) = refusal(words);
        assert_eq!(got, code, "{words:?}\n{errors}");
        assert!(
            errors.contains(says),
            "{words:?}: `{says}` not in\n{errors}"
        );
        assert!(!errors.contains("panicked"), "{errors}");
    }
}

#[test]
fn check_tells_inside_from_outside() {
    let folder = folder();
    let no_well = put(&folder, "no-well.toml", NO_WELL);
    let unbound = run(&["check", &no_well]);
    assert_eq!(unbound.status.code(), Some(5));
    assert!(text(&unbound.stdout).contains("no-levels"));

    // GaSb holds its electrons by 0.4 eV and its holes by 0.14 eV; at 400 C that is 2.5 kT: worth a
    // look by itself, outside where the house says 4 kT.
    let shipped = fs::read_to_string("structures/estuary-2300.toml").expect("shipped");
    let plain = put(&folder, "plain.toml", &shipped);
    let limited = put(
        &folder,
        "limited.toml",
        &format!("{shipped}\n[limits]\nbarrier_kt_min = 4\n"),
    );
    assert_eq!(run(&["check", &plain]).status.code(), Some(0));
    assert_eq!(run(&["check", &limited]).status.code(), Some(0));
    for (path, code, standing) in [(plain, 0, "look"), (limited, 5, "outside")] {
        let hot = run(&["check", &path, "--at", "400C", "--json"]);
        assert_eq!(hot.status.code(), Some(code));
        let document: Value = serde_json::from_slice(&hot.stdout).expect("JSON");
        let findings = document["findings"].as_array().expect("findings");
        let barrier = |code: &str| {
            let found = findings.iter().find(|finding| finding["code"] == code);
            found.unwrap_or_else(|| panic!("{code} in {document}"))
        };
        assert_eq!(barrier("hole-barrier")["standing"], standing);
        assert_eq!(barrier("electron-barrier")["standing"], "ok");
        let measure = &barrier("hole-barrier")["measures"][0];
        assert_eq!(measure["limit"], 4.0);
        assert!(measure["value"].as_f64().expect("a number") < 4.0);
    }
}

#[test]
fn remarks_go_to_standard_error_and_quiet_leaves_them_out() {
    let spoken = run(&["spectrum", PUMP]);
    let quiet = run(&["spectrum", PUMP, "--quiet"]);
    assert!(text(&spoken.stderr).starts_with("remark: "));
    assert!(quiet.stderr.is_empty());
    assert_eq!(spoken.stdout, quiet.stdout);
}

#[test]
fn a_default_temperature_is_said_in_page_document_and_remark() {
    let folder = folder();
    let content = fs::read_to_string(TENSILE).expect("the file");
    let bare = content
        .lines()
        .filter(|line| !line.starts_with("temperature"))
        .collect::<Vec<_>>()
        .join("\n");
    let path = put(&folder, "bare.toml", &bare);
    let output = run(&["levels", &path]);
    assert!(text(&output.stderr).contains("no temperature is given"));
    assert!(text(&output.stdout).contains("300 K (26.85 °C), the default"));
    let document = document(&["levels", &path, "--json"]);
    assert_eq!(document["stamp"]["temperature_is_default"], true);
    let document = self::document(&["levels", &path, "--json", "--at", "300K"]);
    assert_eq!(document["stamp"]["temperature_is_default"], false);
}

#[test]
fn files_are_never_written_over_without_force() {
    let folder = folder();
    for (command, flag, name) in [
        ("levels", "--csv", "levels.csv"),
        ("levels", "--figure", "levels.svg"),
        ("levels", "--matrix", "levels.mtx"),
        ("spectrum", "--csv", "spectrum.csv"),
        ("spectrum", "--figure", "spectrum.svg"),
        ("check", "--csv", "check.csv"),
    ] {
        let path = put(&folder, name, "mine");
        let (code, errors) = refusal(&[command, TENSILE, flag, &path]);
        assert_eq!(code, 2);
        assert!(errors.contains("--force"), "{errors}");
        assert_eq!(fs::read_to_string(&path).expect("still there"), "mine");
        result(&[command, TENSILE, flag, &path, "--force"]);
        assert!(fs::read_to_string(&path).expect("written").len() > 100);
    }
    let leftovers: Vec<PathBuf> = fs::read_dir(folder.path())
        .expect("the folder")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| {
            path.file_name()
                .is_some_and(|it| it.to_string_lossy().starts_with('.'))
        })
        .collect();
    assert!(leftovers.is_empty(), "{leftovers:?}");
}

#[test]
fn a_file_that_can_not_be_written_is_named() {
    let folder = folder();
    let nowhere = shown(&folder.path().join("none/levels.csv"));
    let (code, errors) = refusal(&["levels", TENSILE, "--csv", &nowhere]);
    assert_eq!(code, 2);
    assert!(errors.contains("make the folder first"), "{errors}");
    assert!(!errors.contains("remark"), "before any work: {errors}");
    let (code, errors) = refusal(&["levels", TENSILE, "--matrix", &shown(folder.path())]);
    assert_eq!(code, 2);
    assert!(errors.contains("is a folder"), "{errors}");
    let twice = shown(&folder.path().join("a.svg"));
    let (code, errors) = refusal(&["levels", TENSILE, "--figure", &twice, "--csv", &twice]);
    assert_eq!(code, 2);
    assert!(errors.contains("asked for twice"), "{errors}");
}

#[cfg(unix)]
#[test]
fn the_path_of_a_file_does_not_steer_the_terminal() {
    let folder = folder();
    let path = put(&folder, "a\u{1b}[2J\u{202e}b.toml", "format = 1\nno = 1\n");
    let (code, errors) = refusal(&["levels", &path]);
    assert_eq!(code, 3);
    assert!(
        errors.contains("a\u{fffd}[2J\u{fffd}b.toml:2:1"),
        "{errors}"
    );
    assert!(!errors.contains(['\u{1b}', '\u{202e}']), "{errors}");
}

#[test]
fn words_in_a_table_are_no_formulas() {
    let folder = folder();
    let path = put(
        &folder,
        "=cmd().toml",
        &fs::read_to_string(TENSILE).expect("the file"),
    );
    let table = shown(&folder.path().join("weigh.csv"));
    stepwell(&[
        "weigh",
        "=cmd().toml",
        "-",
        "--quiet",
        "--bands",
        "single",
        "--csv",
        &table,
    ])
    .current_dir(folder.path())
    .write_stdin(fs::read_to_string(&path).expect("the file"))
    .assert()
    .success();
    let text = fs::read_to_string(&table).expect("written");
    let heads = text.lines().nth(1).expect("heads");
    assert!(heads.contains(",'=cmd()"), "{heads}");
    let row = text.lines().find(|line| line.starts_with("nm_per_k,"));
    let row = row.expect("a row of numbers");
    assert!(!row.contains('\''), "{row}");
}

#[test]
fn too_large_a_file_is_told_its_size() {
    let folder = folder();
    let path = put(&folder, "large.csv", &"#\n".repeat(3 << 20));
    let (code, errors) = refusal(&["materials", "GaAs", "--materials", &path]);
    assert_eq!(code, 3);
    let words = errors.split_whitespace().collect::<Vec<_>>().join(" ");
    assert!(
        words.contains("has 6291456 bytes, and at most 4194304 are read"),
        "{errors}"
    );
    assert!(
        words.contains("→ check that") && !words.contains("structure file"),
        "{errors}"
    );
}

#[test]
fn a_design_sheet_is_told_from_a_structure() {
    let folder = folder();
    let sheet = put(
        &folder,
        "sheet.json",
        r#"{"kind": "design sheet", "format": 1}"#,
    );
    let (code, errors) = refusal(&["levels", &sheet]);
    assert_eq!(code, 3);
    assert!(errors.contains("is a design sheet"), "{errors}");
    assert!(errors.contains("stepwell check"), "{errors}");
    assert!(!errors.contains("-->"), "{errors}");
}

#[test]
fn a_folder_in_place_of_a_folder_or_a_file_has_a_remedy() {
    let folder = folder();
    let file = put(&folder, "file", "mine");
    let (code, errors) = refusal(&[
        "levels",
        TENSILE,
        "--quiet",
        "--csv",
        &format!("{file}/in/"),
    ]);
    assert!([1, 2].contains(&code), "{errors}");
    assert!(errors.contains("→ choose another place"), "{errors}");
}

#[test]
fn a_target_is_judged_at_its_own_temperature() {
    let folder = folder();
    let content = fs::read_to_string(PUMP).expect("the file");
    let head = content.split("[target]").next().expect("a part");
    let target = "\n[target]\nkind = \"transition\"\nwavelength_nm = 970\n";
    let path = put(&folder, "pump.toml", &format!("{head}{target}"));
    let judged = |words: &[&str]| -> Value {
        let words = [&["check", path.as_str(), "--json"], words].concat();
        let findings: Value = serde_json::from_slice(&run(&words).stdout).expect("JSON");
        let all = findings["findings"].as_array().expect("findings");
        let found = all.iter().find(|it| it["code"] == "target");
        found.expect("the target").clone()
    };
    assert_eq!(judged(&[]), judged(&["--at", "80C"]));
}

#[cfg(unix)]
#[test]
fn what_is_no_plain_file_is_written_to_and_stays() {
    result(&["levels", TENSILE, "--csv", "/dev/null", "--quiet"]);
    result(&[
        "levels",
        TENSILE,
        "--csv",
        "/dev/null",
        "--quiet",
        "--force",
    ]);
    let kind = fs::metadata("/dev/null").expect("there").file_type();
    assert!(!kind.is_file());
}

#[test]
fn a_closed_pipe_is_no_error() {
    let mut child = std::process::Command::new(env!("CARGO_BIN_EXE_stepwell"))
        .args(["spectrum", TENSILE, "--json", "--quiet"])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("runs");
    let mut out = child.stdout.take().expect("a pipe");
    let mut first = [0; 16];
    out.read_exact(&mut first).expect("the document begins");
    drop(out);
    let output = child.wait_with_output().expect("ends");
    assert_eq!(output.status.code(), Some(0));
    assert_eq!(text(&output.stderr), "");
}

#[test]
fn no_colour_goes_into_a_pipe() {
    for words in [
        &["levels", PUMP][..],
        &["--help"],
        &["nonsense"],
        &["levels", "none.toml"],
    ] {
        let output = run(words);
        let escapes = |bytes: &[u8]| bytes.contains(&0x1b);
        assert!(
            !escapes(&output.stdout) && !escapes(&output.stderr),
            "{words:?}"
        );
    }
}

#[test]
fn a_title_does_not_steer_the_terminal() {
    let folder = folder();
    let content = fs::read_to_string(TENSILE).expect("the file");
    let hostile = content.replace(
        "title = \"Estuary tensile 808\"",
        r#"title = "a\u001b[2Jb""#,
    );
    assert_ne!(hostile, content);
    let path = put(&folder, "hostile.toml", &hostile);
    for flag in [None, Some("--json")] {
        let words: Vec<&str> = ["levels", path.as_str()].into_iter().chain(flag).collect();
        let output = run(&words);
        assert!(!output.stdout.contains(&0x1b) && !output.stderr.contains(&0x1b));
    }
}

fn document(words: &[&str]) -> Value {
    let text = result(words);
    for word in ["NaN", "inf", "Infinity"] {
        assert!(!text.contains(word), "{word} in {words:?}");
    }
    serde_json::from_str(&text).expect("one JSON document")
}

fn keys(value: &Value) -> BTreeSet<&str> {
    let object = value
        .as_object()
        .unwrap_or_else(|| panic!("an object, not {value}"));
    object.keys().map(String::as_str).collect()
}

#[track_caller]
fn has_keys(value: &Value, expected: &str) {
    let expected: BTreeSet<&str> = expected.split_whitespace().collect();
    assert_eq!(keys(value), expected);
}

const STAMP: &str = "program input_sha256 parameters_sha256 parameter_files temperature_k \
                     temperature_is_default densities_cm3 working_density_cm3 model seed";

#[test]
fn the_document_of_levels_has_its_keys() {
    for path in structures() {
        let document = document(&["levels", &path, "--json", "--quiet", "--bands", "single"]);
        has_keys(
            &document,
            "format stamp title temperature_k shrinkage_mev wells layers strain_budget electron heavy_hole light_hole \
             valence dispersion transitions emission",
        );
        assert_eq!(document["format"], 1);
        assert_eq!(document["shrinkage_mev"], 0);
        has_keys(&document["stamp"], STAMP);
        has_keys(&document["wells"], "count thickness_nm");
        let numbers = "formula gap_ev lattice_nm strain_percent strain conduction_edge_ev \
                       heavy_hole_edge_ev light_hole_edge_ev electron_mass luttinger";
        for layer in document["layers"].as_array().expect("a list") {
            has_keys(layer, &format!("{numbers} role thickness_nm grade_to"));
            if !layer["grade_to"].is_null() {
                has_keys(&layer["grade_to"], numbers);
            }
            assert!(layer["strain_percent"].as_f64().expect("a number") >= 0.0);
            assert_eq!(layer["luttinger"].as_array().map(Vec::len), Some(3));
        }
        let electrons = document["electron"].as_array().expect("a list");
        assert!(!electrons.is_empty());
        for (index, level) in electrons.iter().enumerate() {
            has_keys(level, "level energy_ev in_plane_mass error_ev");
            assert_eq!(level["level"], index + 1);
        }
        let transitions = document["transitions"].as_array().expect("a list");
        let energies: Vec<f64> = transitions
            .iter()
            .map(|transition| {
                has_keys(transition, "electron hole energy_ev wavelength_nm overlap");
                assert!(transition["overlap"].as_f64().expect("a number") > 0.01);
                transition["energy_ev"].as_f64().expect("a number")
            })
            .collect();
        assert!(energies.is_sorted(), "{energies:?}");
        let emission = &document["emission"];
        has_keys(
            emission,
            "first_transition_nm pl_nm gain_peak_nm gain_peak_unshrunk_nm",
        );
        assert_eq!(
            emission["first_transition_nm"],
            transitions[0]["wavelength_nm"]
        );
    }
}

#[test]
fn the_document_of_mixed_bands_fills_valence_and_dispersion() {
    let document = document(&["levels", TENSILE, "--json", "--quiet", "--bands", "mixed"]);
    let valence = document["valence"].as_array().expect("a list");
    assert!(!valence.is_empty());
    for state in valence {
        has_keys(state, "level energy_ev heavy light split_off");
        let share = |name: &str| state[name].as_f64().expect("a number");
        let sum = share("heavy") + share("light") + share("split_off");
        assert!((sum - 1.0).abs() < 1e-6, "{sum}");
    }
    let dispersion = document["dispersion"].as_array().expect("a list");
    assert!(dispersion.len() > 10);
    has_keys(&dispersion[0], "k_per_nm energy_ev");
    assert_eq!(dispersion[0]["k_per_nm"], 0.0);
    let first = &document["transitions"][0]["hole"];
    assert!(first.as_str().expect("a name").starts_with('v'), "{first}");
}

#[test]
fn the_document_of_spectrum_has_its_keys() {
    let document = document(&[
        "spectrum",
        "structures/estuary-660.toml",
        "--json",
        "--quiet",
    ]);
    has_keys(
        &document,
        "format stamp title temperature_k refractive_index absorption pl fit transparency runs",
    );
    has_keys(&document["stamp"], STAMP);
    has_keys(&document["absorption"], "photon_ev te_cm tm_cm");
    has_keys(&document["pl"], "peak_nm fwhm_mev");
    has_keys(
        &document["fit"],
        "polarization g0_cm transparency_cm3 residual_cm",
    );
    has_keys(&document["transparency"], "density_cm3 wavelength_nm");
    let transparency = document["transparency"]["density_cm3"]
        .as_f64()
        .expect("a number");
    let runs = document["runs"].as_array().expect("a list");
    assert_eq!(runs.len(), 5);
    let mut below = 0;
    for run in runs {
        has_keys(
            run,
            "density_cm3 sheet_density_cm2 fermi_electron_ev fermi_hole_ev splitting_ev shrinkage_mev \
             te tm spontaneous photon_ev te_gain_cm tm_gain_cm spontaneous_per_ev_cm3_s",
        );
        has_keys(&run["te"], "peak_gain_cm peak_nm peak_ev");
        has_keys(&run["tm"], "peak_gain_cm peak_nm peak_ev");
        has_keys(&run["spontaneous"], "peak_nm total_per_cm3_s current_a_cm2");
        let density = run["density_cm3"].as_f64().expect("a number");
        // Below transparency a peak does not exist.
        assert_eq!(run["te"]["peak_gain_cm"].is_null(), density < transparency);
        below += usize::from(density < transparency);
        let lengths: BTreeSet<usize> = [
            "photon_ev",
            "te_gain_cm",
            "tm_gain_cm",
            "spontaneous_per_ev_cm3_s",
        ]
        .iter()
        .map(|key| run[*key].as_array().map_or(0, Vec::len))
        .collect();
        assert_eq!(lengths.len(), 1, "lists of one length: {lengths:?}");
        assert!(!lengths.contains(&0));
    }
    assert!(
        below > 0,
        "a density below transparency is part of this test"
    );
}

#[test]
fn flags_go_before_the_file_and_show_in_the_stamp() {
    let words = ["spectrum", TENSILE, "--json", "--quiet"];
    let plain = document(&words);
    let changed = document(
        &[
            &words[..],
            &["--at", "85C", "--density", "2e18,3e18", "--density", "4e18"],
        ]
        .concat(),
    );
    assert_eq!(changed["temperature_k"], 358.15);
    assert_eq!(
        changed["stamp"]["densities_cm3"],
        serde_json::json!([2e18, 3e18, 4e18])
    );
    assert_eq!(
        plain["stamp"]["input_sha256"],
        changed["stamp"]["input_sha256"]
    );
    assert_ne!(
        plain["stamp"]["temperature_k"],
        changed["stamp"]["temperature_k"]
    );
}

#[test]
fn a_file_of_parameters_changes_results_and_stamp() {
    let folder = folder();
    let overlay = put(
        &folder,
        "house.toml",
        "[binary.GaAs]\nme_gamma = 0.070\nsource.default = \"house calibration\"\n",
    );
    let output = run(&[
        "levels",
        TENSILE,
        "--json",
        "--quiet",
        "--materials",
        &overlay,
    ]);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let changed: Value = serde_json::from_slice(&output.stdout).expect("JSON");
    let plain = document(&["levels", TENSILE, "--json", "--quiet"]);
    assert_ne!(
        plain["stamp"]["parameters_sha256"],
        changed["stamp"]["parameters_sha256"]
    );
    assert_ne!(
        plain["electron"][0]["energy_ev"],
        changed["electron"][0]["energy_ev"]
    );
    assert_eq!(changed["stamp"]["parameter_files"][1], overlay);
}

#[test]
fn the_stamp_is_the_sum_that_others_compute() {
    // Of the empty text (FIPS 180-4, example values).
    assert_eq!(
        stepwell::sheet::sha256(b""),
        "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855"
    );
    let bytes = fs::read(PUMP).expect("the file");
    let document = document(&["levels", PUMP, "--json", "--quiet"]);
    assert_eq!(
        document["stamp"]["input_sha256"],
        stepwell::sheet::sha256(&bytes)
    );
}

/// Head and rows of a CSV file whose first line is the stamp.
fn table(path: &Path) -> (Vec<String>, Vec<Vec<String>>) {
    let content = fs::read_to_string(path).expect("written");
    assert!(content.starts_with("# stepwell "), "{content}");
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(content.as_bytes());
    let head = reader
        .headers()
        .expect("a head")
        .iter()
        .map(str::to_owned)
        .collect();
    let rows = reader
        .records()
        .map(|row| row.expect("a row").iter().map(str::to_owned).collect())
        .collect();
    (head, rows)
}

#[test]
fn a_folder_takes_every_table_with_units_in_the_heads() {
    let folder = folder();
    let into = format!("{}/tables/", folder.path().display());
    result(&["levels", PUMP, "--csv", &into, "--quiet"]);
    result(&["spectrum", PUMP, "--csv", &into, "--quiet"]);
    for (name, head) in [
        (
            "levels",
            "kind level energy_ev from_edge_mev in_plane_mass in_wells_percent error_ev near_edge \
                    heavy_percent light_percent split_off_percent",
        ),
        (
            "transitions",
            "electron hole energy_ev wavelength_nm overlap",
        ),
        ("budget", "term adds_mev sum_ev sum_nm"),
        (
            "strain",
            "layer formula count thickness_nm strain_percent strain relaxed_mismatch_ppm \
             perpendicular_mismatch_ppm critical_single_nm critical_buried_nm critical_energy_nm \
             critical_share",
        ),
        ("emission", "of_what shrinkage_mev wavelength_nm"),
        (
            "edges",
            "position_nm layer role conduction_edge_ev heavy_hole_edge_ev light_hole_edge_ev",
        ),
        (
            "spectrum",
            "density_cm3 photon_ev wavelength_nm te_gain_cm tm_gain_cm spontaneous_per_ev_cm3_s",
        ),
        ("absorption", "photon_ev wavelength_nm te_cm tm_cm"),
        ("landmarks", "figure value unit"),
        (
            "densities",
            "density_cm3 sheet_density_cm2 shrinkage_mev fermi_electron_ev fermi_hole_ev \
                       splitting_ev te_peak_gain_cm te_peak_nm tm_peak_gain_cm tm_peak_nm \
                       spontaneous_peak_nm spontaneous_total_per_cm3_s radiative_current_a_cm2",
        ),
    ] {
        let (got, rows) = table(&Path::new(&into).join(format!("{name}.csv")));
        assert_eq!(got, head.split_whitespace().collect::<Vec<_>>(), "{name}");
        assert!(!rows.is_empty(), "{name}");
        for cell in rows.iter().flatten() {
            assert!(!["NaN", "inf", "-inf"].contains(&cell.as_str()), "{name}");
        }
    }
    let (head, rows) = table(&Path::new(&into).join("envelopes.csv"));
    assert_eq!(head[..2], ["position_nm", "e1_per_sqrt_nm"]);
    assert!(rows.len() > 100);
}

#[test]
fn csv_and_json_hold_the_same_numbers() {
    let folder = folder();
    let path = folder.path().join("levels.csv");
    result(&["levels", PUMP, "--csv", &shown(&path), "--quiet"]);
    let (_, rows) = table(&path);
    let document = document(&["levels", PUMP, "--json", "--quiet"]);
    let energy: f64 = rows[0][2].parse().expect("a number");
    assert_eq!(Some(energy), document["electron"][0]["energy_ev"].as_f64());
}

/// Eigenvalues of a symmetric matrix of three diagonals below an energy: negative pivots of its
/// factorisation (Sylvester's law of inertia).
fn count_below(diagonal: &[f64], second: &[f64], energy: f64) -> usize {
    let mut count = 0;
    let mut pivot = f64::INFINITY;
    for (index, entry) in diagonal.iter().enumerate() {
        let beside = if index == 0 { 0.0 } else { second[index - 1] };
        pivot = entry - energy - beside * beside / pivot;
        count += usize::from(pivot < 0.0);
    }
    count
}

#[test]
fn the_matrix_has_the_levels_as_eigenvalues() {
    let folder = folder();
    let document = document(&["levels", TENSILE, "--json", "--quiet"]);
    for (band, key) in [
        ("electron", "electron"),
        ("heavy", "heavy_hole"),
        ("light", "light_hole"),
    ] {
        let path = shown(&folder.path().join(format!("{band}.mtx")));
        result(&[
            "levels",
            TENSILE,
            "--quiet",
            "--matrix",
            &path,
            "--matrix-of",
            band,
        ]);
        let content = fs::read_to_string(&path).expect("written");
        assert!(content.starts_with("%%MatrixMarket matrix coordinate real symmetric\n"));
        let mut lines = content.lines().filter(|line| !line.starts_with('%'));
        let size: Vec<usize> = lines
            .next()
            .expect("the size")
            .split(' ')
            .map(|number| number.parse().expect("a count"))
            .collect();
        let (mut diagonal, mut second) = (vec![0.0; size[0]], vec![0.0; size[0] - 1]);
        let mut entries = 0;
        for line in lines {
            let parts: Vec<&str> = line.split(' ').collect();
            let place = |part: &str| part.parse::<usize>().expect("a place") - 1;
            let (row, column) = (place(parts[0]), place(parts[1]));
            let value: f64 = parts[2].parse().expect("a number");
            if row == column {
                diagonal[row] = value;
            } else {
                assert_eq!(row, column + 1, "the lower triangle");
                second[column] = value;
            }
            entries += 1;
        }
        assert_eq!((size[1], size[2]), (size[0], entries));
        let level = document[key][0]["energy_ev"].as_f64().expect("a number");
        // The finest grid alone, before extrapolation, is good to 1e-4 eV here.
        let (below, above) = (level - 1e-4, level + 1e-4);
        let expected = if band == "electron" { 0 } else { size[0] - 1 };
        assert_eq!(count_below(&diagonal, &second, below), expected, "{band}");
        assert_eq!(
            count_below(&diagonal, &second, above),
            expected + 1,
            "{band}"
        );
    }
}

/// Eigenvalues below an energy of a symmetric matrix given by its lower band, `band[row][distance]`:
/// negative pivots of its factorisation.
fn count_below_band(mut band: Vec<Vec<f64>>, energy: f64) -> usize {
    let width = band[0].len();
    let mut count = 0;
    for at in 0..band.len() {
        let pivot = band[at][0] - energy;
        count += usize::from(pivot < 0.0);
        for row in at + 1..(at + width).min(band.len()) {
            let factor = band[row][row - at] / pivot;
            for column in at + 1..=row {
                let upper = band[column][column - at];
                band[row][row - column] -= factor * upper;
            }
        }
    }
    count
}

#[test]
fn the_valence_matrix_has_the_dispersion_as_eigenvalues() {
    let folder = folder();
    let document = document(&["levels", TENSILE, "--json", "--quiet"]);
    let dispersion = document["dispersion"].as_array().expect("mixed bands");
    for (block, k_per_nm) in [("valence", 0.0), ("valence", 0.3), ("valence-mirror", 0.3)] {
        let path = shown(&folder.path().join(format!("{block}-{k_per_nm}.mtx")));
        let at_k = k_per_nm.to_string();
        let words = ["levels", TENSILE, "--quiet", "--matrix", &path];
        result(&[&words[..], &["--matrix-of", block, "--at-k", &at_k]].concat());
        let content = fs::read_to_string(&path).expect("written");
        let mut lines = content.lines().filter(|line| !line.starts_with('%'));
        let size: usize = lines
            .next()
            .and_then(|line| line.split(' ').next())
            .and_then(|number| number.parse().ok())
            .expect("the size");
        let mut band = vec![vec![0.0; 6]; size];
        for line in lines {
            let parts: Vec<f64> = line
                .split(' ')
                .map(|it| it.parse().expect("a number"))
                .collect();
            let (row, column) = (parts[0] as usize - 1, parts[1] as usize - 1);
            band[row][row - column] = parts[2];
        }
        let slice = dispersion
            .iter()
            .find(|slice| (slice["k_per_nm"].as_f64().expect("k") - k_per_nm).abs() < 1e-9)
            .expect("a slice");
        let level = |state: usize| slice["energy_ev"][state].as_f64().expect("a number");
        assert!(level(0) - level(1) > 1e-3, "the two highest stand apart");
        // The finest grid alone, before extrapolation, is good to 2e-4 eV here.
        for state in 0..2 {
            for (energy, above) in [
                (level(state) + 2e-4, state),
                (level(state) - 2e-4, state + 1),
            ] {
                let count = count_below_band(band.clone(), energy);
                assert_eq!(
                    size - count,
                    above,
                    "{block} at {k_per_nm}/nm, state {state}"
                );
            }
        }
    }
    let bad = [
        (["valence", "--at-k", "2.5"], "0 to 2"),
        (["valence", "--at-k", "-0.1"], "0 to 2"),
        (["valence", "--at-k", "nan"], "0 to 2"),
        (["heavy", "--at-k", "0.1"], "--matrix-of valence"),
    ];
    let path = shown(&folder.path().join("never.mtx"));
    for (words, wanted) in bad {
        let start = ["levels", TENSILE, "--matrix", &path, "--matrix-of"];
        let (code, errors) = refusal(&[&start[..], &words[..]].concat());
        assert!(code == 2 && errors.contains(wanted), "{code} {errors}");
        assert!(!folder.path().join("never.mtx").exists());
    }
}

#[test]
fn figures_are_documents_of_their_own() {
    let folder = folder();
    for command in ["levels", "spectrum"] {
        let path = folder.path().join(format!("{command}.svg"));
        result(&[command, PUMP, "--figure", &shown(&path), "--quiet"]);
        let figure = fs::read_to_string(&path).expect("written");
        assert!(figure.starts_with("<svg") && figure.trim_end().ends_with("</svg>"));
        assert!(figure.contains("Estuary 980"));
    }
}

#[test]
fn equal_wells_are_one_row() {
    let page = result(&["levels", "structures/estuary-1310.toml", "--quiet"]);
    let rows = |name: &str| {
        page.lines()
            .filter(|line| line.trim_start().starts_with(name))
            .count()
    };
    assert!(page.contains("e1-e6 (×6)"), "{page}");
    assert_eq!(rows("e2 "), 0);
    assert!(page.contains("6 × well"));
}

#[test]
fn materials_say_sources_and_standing() {
    let page = result(&["materials", "In0.2Ga0.8As", "--on", "GaAs", "--at", "25C"]);
    for part in ["heavy-hole edge", "V2001", "J. R. Meyer", "298.15 K"] {
        assert!(page.contains(part), "{part} in\n{page}");
    }
    let document = document(&["materials", "--used-by", PUMP, "--json"]);
    let formulas: Vec<&str> = document["materials"]
        .as_array()
        .expect("a list")
        .iter()
        .filter_map(|material| material["formula"].as_str())
        .collect();
    assert_eq!(formulas[0], "GaAs");
    assert!(formulas.contains(&"Ga0.81In0.19As"), "{formulas:?}");
}

#[test]
fn editors_and_shells_are_served() {
    let schema: Value = serde_json::from_str(&result(&["schema"])).expect("JSON");
    for path in structures() {
        let content = fs::read_to_string(&path).expect("the file");
        let file: toml::Value = toml::from_str(&content).expect("TOML");
        let instance = serde_json::to_value(file).expect("JSON");
        let validator = jsonschema::validator_for(&schema).expect("a schema");
        assert!(validator.is_valid(&instance), "{path}");
    }
    for shell in ["bash", "zsh", "fish", "elvish", "powershell"] {
        assert!(
            result(&["completions", shell]).contains("stepwell"),
            "{shell}"
        );
    }
    let manual = result(&["manual"]);
    for section in [
        "COMMANDS",
        "ROLES",
        "KEYS",
        "EXIT STATUS",
        "ENVIRONMENT",
        "EXAMPLES",
    ] {
        let head = manual
            .lines()
            .find(|line| line.starts_with(".SH") && line.contains(section));
        assert!(head.is_some(), "{section}");
    }
    for key in [
        "thickness_nm",
        "grade_to",
        "conduction\\_share",
        "valence\\_edge\\_ev",
    ] {
        let plain = manual.replace("\\_", "_");
        assert!(plain.contains(&key.replace("\\_", "_")), "{key}");
    }
}
