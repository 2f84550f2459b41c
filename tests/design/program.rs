//! The commands `aim`, `chart` and `weigh` as a user meets them.

use crate::prescribed_well;
use serde_json::Value;
use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};
use tempfile::TempDir;

const LINK: &str = "structures/estuary-1310.toml";
const PUMP: &str = "structures/estuary-980.toml";

fn stepwell(words: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_stepwell"));
    command.args(words);
    command
}

fn output(words: &[&str]) -> Output {
    stepwell(words).output().expect("the program runs")
}

/// Standard output of a run that ends with a code.
fn ending_with(code: i32, words: &[&str]) -> String {
    let output = output(words);
    let errors = String::from_utf8_lossy(&output.stderr);
    assert_eq!(output.status.code(), Some(code), "{words:?}\n{errors}");
    String::from_utf8(output.stdout).expect("UTF-8")
}

fn done(words: &[&str]) -> String {
    ending_with(0, words)
}

/// Standard error of a run that ends with a code.
fn complaint(code: i32, words: &[&str]) -> String {
    let output = output(words);
    let errors = String::from_utf8(output.stderr).expect("UTF-8");
    assert_eq!(output.status.code(), Some(code), "{words:?}\n{errors}");
    errors
}

fn json(text: &str) -> Value {
    serde_json::from_str(text).unwrap_or_else(|error| panic!("{error}\n{text}"))
}

fn folder() -> TempDir {
    tempfile::tempdir().expect("a folder")
}

fn path(folder: &TempDir, name: &str) -> String {
    folder.path().join(name).display().to_string()
}

fn put(folder: &TempDir, name: &str, text: &str) -> String {
    let path = path(folder, name);
    fs::write(&path, text).expect("written");
    path
}

fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder)
        .expect("a folder")
        .map(|entry| entry.expect("an entry").file_name().display().to_string())
        .collect();
    names.sort();
    names
}

fn written(folder: &Path) -> Vec<PathBuf> {
    names(folder).iter().map(|name| folder.join(name)).collect()
}

/// Rows of a table without its stamp, each cell under its head.
fn rows(csv: &str) -> Vec<BTreeMap<String, String>> {
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(csv.as_bytes());
    let heads: Vec<String> = reader
        .headers()
        .expect("heads")
        .iter()
        .map(str::to_owned)
        .collect();
    reader
        .records()
        .map(|record| {
            let record = record.expect("a row");
            heads
                .iter()
                .cloned()
                .zip(record.iter().map(str::to_owned))
                .collect()
        })
        .collect()
}

fn number(row: &BTreeMap<String, String>, head: &str) -> f64 {
    let cell = row.get(head).unwrap_or_else(|| panic!("{head} in {row:?}"));
    cell.parse().unwrap_or_else(|_| panic!("{head}: {cell}"))
}

/// The wavelength of a kind as the other commands say it.
fn wavelength_nm(file: &str, kind: &str, conditions: &[&str]) -> f64 {
    let command = if kind == "gain" { "spectrum" } else { "levels" };
    let mut words = vec![command, file, "--json", "--quiet"];
    words.extend(conditions);
    let document = json(&done(&words));
    let value = match kind {
        "transition" => &document["emission"]["first_transition_nm"],
        "pl" => &document["emission"]["pl_nm"],
        _ => {
            let run = document["runs"].as_array().and_then(|runs| runs.last());
            let run = run.expect("a density");
            let gain = |polarisation: &str| run[polarisation]["peak_gain_cm"].as_f64();
            let larger = if gain("tm").unwrap_or(0.0) > gain("te").unwrap_or(0.0) {
                "tm"
            } else {
                "te"
            };
            &run[larger]["peak_nm"]
        }
    };
    value.as_f64().expect("a wavelength")
}

type Words<'a> = &'a [&'a str];

/// Lines in which two texts of equally many lines differ.
fn differing(before: &str, after: &str) -> Vec<(String, String)> {
    assert_eq!(before.lines().count(), after.lines().count());
    before
        .lines()
        .zip(after.lines())
        .filter(|(a, b)| a != b)
        .map(|(a, b)| (a.to_owned(), b.to_owned()))
        .collect()
}

#[test]
fn written_files_have_the_wavelength_and_differ_in_what_moved() {
    let folder = folder();
    let mixed = put(
        &folder,
        "mixed.toml",
        &prescribed_well(6.0, 1430.0, -1.0, "mixed"),
    );
    let cases: [(&str, &str, &str, Words<'_>, Words<'_>); 5] = [
        (
            LINK,
            "pl",
            "1310nm",
            &["well.thickness=3..9nm"],
            &["--at", "85C", "--bands", "single"],
        ),
        (
            LINK,
            "gain",
            "1360nm",
            &["well.gap=1380..1500nm"],
            &["--bands", "single", "--density", "3e18"],
        ),
        (
            PUMP,
            "transition",
            "975nm",
            &["well.In=0.15..0.25"],
            &["--bands", "single"],
        ),
        (
            &mixed,
            "pl",
            "1310nm",
            &["well.thickness=4..9nm", "well.strain=0.5..1.2%compressive"],
            &[],
        ),
        (
            &mixed,
            "gain",
            "1350nm",
            &["well.thickness=4..9nm"],
            &["--density", "4e18"],
        ),
    ];
    for (case, (file, kind, target, moves, conditions)) in cases.into_iter().enumerate() {
        let out = folder.path().join(format!("out-{case}"));
        let out_words = out.display().to_string();
        let mut words = vec![
            "aim",
            file,
            "--quiet",
            "--kind",
            kind,
            "--wavelength",
            target,
        ];
        words.extend(["--samples", "3", "--write", &out_words]);
        words.extend(moves.iter().flat_map(|it| ["--move", *it]));
        words.extend(conditions);
        done(&words);
        let files = written(&out);
        assert!(!files.is_empty(), "{words:?}");
        let before = fs::read_to_string(file).expect("the file");
        let target_nm: f64 = target.trim_end_matches("nm").parse().expect("a number");
        for path in files {
            let got_nm = wavelength_nm(path.to_str().expect("UTF-8"), kind, conditions);
            assert!(
                (got_nm - target_nm).abs() <= 0.01,
                "{}: {got_nm} nm",
                path.display()
            );
            let after = fs::read_to_string(&path).expect("a structure");
            let changes = differing(&before, &after);
            assert!(!changes.is_empty() && changes.len() <= 2, "{changes:?}");
            for (old, new) in changes {
                // What stands before and behind the value stays: key and comment.
                let ends = |line: &str| {
                    let comment = line
                        .find('#')
                        .map_or(String::new(), |at| line[at..].to_owned());
                    (line.split('=').next().map(str::to_owned), comment)
                };
                assert_eq!(ends(&old), ends(&new));
                let moved = [
                    "thickness_nm",
                    "compressive_percent",
                    "gap_nm",
                    "In0.19Ga0.81As",
                ];
                assert!(moved.iter().any(|it| old.contains(it)), "{old}");
            }
        }
    }
}

#[test]
fn every_solution_says_what_tells_it_from_the_others() {
    let folder = folder();
    let csv = path(&folder, "solutions.csv");
    let file = put(
        &folder,
        "study.toml",
        &prescribed_well(6.0, 1430.0, -1.0, "single"),
    );
    let words = [
        "aim",
        &file,
        "--quiet",
        "--bands",
        "single",
        "--kind",
        "pl",
        "--wavelength",
        "1310nm",
        "--move",
        "well.thickness=3..9nm",
        "--move",
        "well.strain=0.6..1.2%compressive",
        "--samples",
        "3",
        "--csv",
        &csv,
    ];
    let page = done(&words);
    for head in [
        "peak gain",
        "transparency",
        "barrier",
        "of critical",
        "1 % width",
        "1 K",
        "0.001 Al",
        "0.001 Ga",
        "at the expense of In",
        "gain at\n4e18 cm⁻³",
    ] {
        assert!(page.contains(head), "{head}\n{page}");
    }
    let table = rows(&fs::read_to_string(&csv).expect("a table"));
    let mut words: Vec<&str> = words[..words.len() - 2].to_vec();
    words.push("--json");
    let document = json(&done(&words));
    assert_eq!(document["target"]["density_cm3"], 4e18);
    let solutions = document["solutions"].as_array().expect("solutions");
    assert_eq!((table.len(), solutions.len()), (3, 3));
    for (row, solution) in table.iter().zip(solutions) {
        let figures = &solution["figures"];
        for (head, value) in [
            ("wavelength_nm", &solution["wavelength_nm"]),
            (
                "well.thickness_nm",
                &solution["values"]["well.thickness_nm"],
            ),
            (
                "well.compressive_percent",
                &solution["values"]["well.compressive_percent"],
            ),
            ("peak_gain_cm", &figures["peak_gain_cm"]),
            ("transparency_cm3", &figures["transparency_cm3"]),
            ("electron_barrier_kt", &figures["electron_barrier_kt"]),
            ("hole_barrier_kt", &figures["hole_barrier_kt"]),
            ("well_strain_percent", &figures["well"]["strain_percent"]),
            ("critical_share", &figures["well"]["critical_share"]),
            ("stack_critical_share", &figures["stack_critical_share"]),
            ("nm_per_percent_width", &figures["nm_per_percent_width"]),
            ("nm_per_k", &figures["nm_per_k"]),
            (
                "nm_per_thousandth_Al_for_In",
                &figures["nm_per_thousandth"][0]["nm"],
            ),
            (
                "nm_per_thousandth_Ga_for_In",
                &figures["nm_per_thousandth"][1]["nm"],
            ),
        ] {
            assert_eq!(Some(number(row, head)), value.as_f64(), "{head}");
        }
        let drift = |head: &str| number(row, head);
        // A wider well and a warmer one emit longer, more aluminium shorter.
        assert!(drift("nm_per_percent_width") > 0.0 && drift("nm_per_k") > 0.0);
        assert!(drift("nm_per_thousandth_Al_for_In") < drift("nm_per_thousandth_Ga_for_In"));
    }
}

#[test]
fn the_target_of_the_file_is_aimed_at_under_its_own_conditions() {
    let folder = folder();
    let text = prescribed_well(6.0, 1430.0, -1.0, "single")
        + "[target]\nkind = \"pl\"\nwavelength_nm = 1309.6\nmedium = \"air\"\ntemperature_c = 85\n";
    let file = put(&folder, "aimed.toml", &text);
    let out = path(&folder, "out");
    let words = [
        "aim",
        &file,
        "--quiet",
        "--json",
        "--move",
        "well.thickness=3..9nm",
        "--write",
        &out,
    ];
    let document = json(&done(&words));
    let target = &document["target"];
    assert_eq!(target["medium"], "air");
    assert!((target["temperature_k"].as_f64().expect("kelvin") - 358.15).abs() < 1e-9);
    let got_nm = document["solutions"][0]["wavelength_nm"].as_f64();
    assert!((got_nm.expect("a solution") - 1309.6).abs() <= 0.01);
    // Air shortens a wavelength by its index, 1.000270 at 1310 nm (P. E. Ciddor, Appl. Opt. 35,
    // 1566 (1996), from memory).
    let vacuum_nm = wavelength_nm(&path(&folder, "out/aimed-1.toml"), "pl", &["--at", "85C"]);
    assert!((vacuum_nm / 1309.6 - 1.000_270).abs() < 1e-5, "{vacuum_nm}");
}

#[test]
fn where_there_is_no_answer_the_nearest_is_shown_with_what_binds() {
    let words = [
        "aim",
        PUMP,
        "--quiet",
        "--bands",
        "single",
        "--wavelength",
        "1100nm",
        "--move",
        "well.thickness=4..9nm",
    ];
    let page = ending_with(4, &words);
    for words in [
        "No structure within these bounds",
        "well.thickness_nm at its end of 9 nm",
    ] {
        assert!(page.contains(words), "{words}\n{page}");
    }
    let mut words = words.to_vec();
    words.push("--json");
    let document = json(&ending_with(4, &words));
    assert_eq!(document["solutions"].as_array().map(Vec::len), Some(0));
    let nearest = &document["nearest"];
    assert_eq!(nearest["values"]["well.thickness_nm"], 9.0);
    let miss_nm = nearest["miss_nm"].as_f64().expect("a miss");
    let wavelength_nm = nearest["wavelength_nm"].as_f64().expect("a wavelength");
    assert!(miss_nm < -50.0 && (wavelength_nm - 1100.0 - miss_nm).abs() < 1e-9);
}

#[test]
fn of_two_moves_the_nearest_is_a_corner() {
    let page = ending_with(
        4,
        &[
            "aim",
            PUMP,
            "--quiet",
            "--bands",
            "single",
            "--wavelength",
            "1200nm",
            "--move",
            "well.thickness=4..9nm",
            "--move",
            "well.In=0.15..0.25",
        ],
    );
    let page: Vec<&str> = page.split_whitespace().collect();
    let page = page.join(" ");
    for words in [
        "well.thickness_nm at its end of 9 nm",
        "well.In at its end of 0.25",
    ] {
        assert!(page.contains(words), "{words}\n{page}");
    }
}

#[test]
fn faults_of_a_design_command_name_the_flag_and_the_remedy() {
    for (words, parts) in [
        (
            &["aim", LINK, "--wavelength", "1310nm"][..],
            &["--move", "well.thickness"][..],
        ),
        (
            &["aim", PUMP, "--move", "well.thickness=4..9nm"],
            &["--wavelength", "[target]"],
        ),
        (
            &[
                "aim",
                LINK,
                "--wavelength",
                "1310nm",
                "--move",
                "wall.In=0.1..0.2",
            ],
            &["`wall`", "there are"],
        ),
        (
            &[
                "aim",
                PUMP,
                "--wavelength",
                "980nm",
                "--move",
                "barrier.strain",
            ],
            &["`GaAs` is GaAs", "move its thickness"],
        ),
        (
            &[
                "aim",
                LINK,
                "--wavelength",
                "1310nm",
                "--move",
                "well.P=0.1..0.2",
            ],
            &["has no P", "one of its elements"],
        ),
        (
            &[
                "chart",
                LINK,
                "--across",
                "well.thickness=4..9nm",
                "--up",
                "well.strain=0..1%compressive",
                "--of",
                "colour",
            ],
            &["--of", "one of"],
        ),
        (
            &[
                "chart",
                LINK,
                "--across",
                "well.thickness=4..9nm",
                "--up",
                "well.strain=0..1%compressive",
                "--points",
                "1x5",
            ],
            &["--points", "60x40"],
        ),
        (&["weigh", LINK], &["second file", "--bulk"]),
    ] {
        let said = complaint(2, words);
        for part in parts {
            assert!(said.contains(part), "{words:?}: {part}\n{said}");
        }
    }
}

const PLANE: [&str; 6] = [
    "--across",
    "well.thickness=4..8nm",
    "--up",
    "well.strain=0.4%tensile..1.2%compressive",
    "--quiet",
    "--csv",
];

#[test]
fn a_chart_equals_single_runs_at_its_points() {
    let folder = folder();
    for (bands, kind) in [
        ("single", "pl"),
        ("single", "gain"),
        ("mixed", "transition"),
        ("mixed", "pl"),
    ] {
        let file = put(
            &folder,
            "plane.toml",
            &prescribed_well(6.0, 1430.0, -1.0, bands),
        );
        let csv = path(&folder, &format!("{bands}-{kind}.csv"));
        let mut words = vec!["chart", &file, "--of", kind, "--points", "3x2"];
        words.extend(PLANE);
        words.push(&csv);
        done(&words);
        let table = rows(&fs::read_to_string(&csv).expect("a table"));
        assert_eq!(table.len(), 6);
        for row in &table {
            let (thickness_nm, strain) = (
                number(row, "well.thickness_nm"),
                number(row, "well.tensile_percent"),
            );
            let single = put(
                &folder,
                "point.toml",
                &prescribed_well(thickness_nm, 1430.0, strain, bands),
            );
            let head = match kind {
                "transition" => "transition_nm",
                "pl" => "pl_nm",
                _ => "gain_peak_nm",
            };
            let (got, want) = (number(row, head), wavelength_nm(&single, kind, &[]));
            // The gap that stays is held to rounding; the file's is exact.
            assert!((got - want).abs() < 1e-3, "{bands} {kind} {row:?}: {want}");
        }
    }
}

#[test]
fn parts_put_together_are_the_bytes_of_one_run() {
    let folder = folder();
    let chart = |csv: &str, more: &[&str]| {
        let mut words = vec!["chart", PUMP, "--bands", "single", "--wavelength", "980nm"];
        words.extend(["--of", "peak-gain", "--points", "9x7"]);
        words.extend([
            "--across",
            "well.thickness=4..8nm",
            "--up",
            "well.In=0.12..0.24",
            "--quiet",
        ]);
        words.extend(["--csv", csv]);
        words.extend(more);
        words
            .iter()
            .map(|&word| word.to_owned())
            .collect::<Vec<String>>()
    };
    let words = |words: &[String]| -> Output {
        let words: Vec<&str> = words.iter().map(String::as_str).collect();
        output(&words)
    };
    let whole = path(&folder, "whole.csv");
    assert!(words(&chart(&whole, &[])).status.success());
    let parts: Vec<String> = (1..=4)
        .map(|part| path(&folder, &format!("part-{part}.csv")))
        .collect();
    for (index, part) in parts.iter().enumerate() {
        let which = format!("{}/4", index + 1);
        assert!(words(&chart(part, &["--part", &which])).status.success());
    }
    let joined = path(&folder, "joined.csv");
    let shown: Vec<&str> = parts.iter().map(String::as_str).collect();
    let mut join = vec!["--join"];
    join.extend(&shown);
    assert!(words(&chart(&joined, &join)).status.success());
    assert_eq!(
        fs::read(&joined).expect("joined"),
        fs::read(&whole).expect("whole")
    );
    // A part that is missing, and one of another chart.
    let missing = words(&chart(&path(&folder, "none.csv"), &join[..3]));
    assert_eq!(missing.status.code(), Some(3));
    assert!(String::from_utf8_lossy(&missing.stderr).contains("points are in none of the files"));
    let foreign = words(&chart(
        &path(&folder, "none.csv"),
        &["--join", &whole, "--at", "50C"],
    ));
    assert_eq!(foreign.status.code(), Some(3));
    assert!(String::from_utf8_lossy(&foreign.stderr).contains("does not belong to this chart"));
    assert!(!folder.path().join("none.csv").exists());
}

#[test]
fn no_byte_hangs_on_the_number_of_threads() {
    let folder = folder();
    let file = put(
        &folder,
        "one.toml",
        &prescribed_well(6.0, 1430.0, -1.0, "mixed"),
    );
    let single = put(
        &folder,
        "single.toml",
        &prescribed_well(6.0, 1430.0, -1.0, "single"),
    );
    let runs: [Vec<&str>; 3] = [
        vec![
            "aim",
            &single,
            "--json",
            "--quiet",
            "--kind",
            "pl",
            "--wavelength",
            "1310nm",
            "--move",
            "well.thickness=3..9nm",
            "--move",
            "well.strain=0.6..1.2%compressive",
            "--samples",
            "5",
        ],
        vec![
            "chart",
            &file,
            "--json",
            "--quiet",
            "--of",
            "pl",
            "--points",
            "4x3",
            "--across",
            "well.thickness=4..8nm",
            "--up",
            "well.strain=0..1%compressive",
        ],
        vec![
            "weigh",
            &file,
            LINK,
            "--bulk",
            "--bands",
            "single",
            "--json",
            "--quiet",
            "--at-equal",
            "current",
        ],
    ];
    for words in runs {
        let of_threads = |count: &str| {
            let run = stepwell(&words).env("RAYON_NUM_THREADS", count).output();
            let run = run.expect("the program runs");
            assert!(run.status.success(), "{words:?}");
            run.stdout
        };
        assert!(of_threads("1") == of_threads("2"), "{words:?}");
    }
}

/// Ctrl-C, on the real program: what is computed is kept whole, and going on gives the same bytes.
#[cfg(unix)]
#[test]
fn an_interrupted_chart_goes_on_to_the_same_bytes() {
    use std::time::{Duration, Instant};

    let folder = folder();
    let elsewhere = self::folder();
    let file = put(
        &elsewhere,
        "study.toml",
        &prescribed_well(6.0, 1430.0, -1.0, "single"),
    );
    let csv = path(&folder, "plane.csv");
    let partial = path(&folder, "plane.csv.partial");
    let figure = path(&folder, "plane.svg");
    let mut words = vec!["chart", &file, "--of", "pl", "--points", "100x60"];
    words.extend(PLANE);
    words.extend([csv.as_str(), "--figure", &figure]);
    let child = stepwell(&words)
        .env("RAYON_NUM_THREADS", "1")
        .stdout(std::process::Stdio::piped())
        .stderr(std::process::Stdio::piped())
        .spawn()
        .expect("the program starts");
    // The partial file has its head before the first block, and grows by whole blocks.
    let lines = || fs::read_to_string(&partial).map_or(0, |text| text.lines().count());
    let begun = Instant::now();
    while lines() < 3 {
        assert!(begun.elapsed() < Duration::from_secs(60), "no block came");
        std::thread::sleep(Duration::from_millis(5));
    }
    let signal = Command::new("kill")
        .args(["-INT", &child.id().to_string()])
        .status();
    assert!(signal.expect("a signal is sent").success());
    let ended = child.wait_with_output().expect("the program ends");
    let said = String::from_utf8_lossy(&ended.stderr);
    assert_eq!(ended.status.code(), Some(130), "{said}");
    assert!(
        said.contains("--resume") && said.contains("of 6000 points"),
        "{said}"
    );
    assert!(ended.stdout.is_empty());
    assert_eq!(names(folder.path()), ["plane.csv.partial"]);
    let kept = fs::read_to_string(&partial).expect("what was kept");
    assert!(
        kept.ends_with('\n') && rows(&kept).len() < 6000,
        "{}",
        rows(&kept).len()
    );

    // Without a word about it what was kept is neither used nor lost.
    assert!(complaint(2, &words).contains("--resume goes on with it"));
    // A row cut off, as by a full disk, is computed again.
    fs::write(&partial, &kept[..kept.len() - 7]).expect("written");
    let mut again = words.clone();
    again.push("--resume");
    done(&again);
    assert_eq!(names(folder.path()), ["plane.csv", "plane.svg"]);
    let resumed = fs::read(&csv).expect("a table");
    words.push("--force");
    done(&words);
    assert!(
        resumed == fs::read(&csv).expect("a table"),
        "not the bytes of one run"
    );
    assert_eq!(names(folder.path()), ["plane.csv", "plane.svg"]);
}

#[test]
fn a_chart_shows_what_limits_the_choice() {
    let folder = folder();
    let figure = path(&folder, "plane.svg");
    let csv = path(&folder, "plane.csv");
    let page = done(&[
        "chart",
        LINK,
        "--quiet",
        "--bands",
        "single",
        "--of",
        "pl",
        "--kind",
        "pl",
        "--wavelength",
        "1310nm",
        "--across",
        "well.thickness=3..9nm",
        "--up",
        "well.strain=0.5%tensile..1.5%compressive",
        "--points",
        "25x17",
        "--figure",
        &figure,
        "--csv",
        &csv,
    ]);
    assert!(page.contains("runs through"), "{page}");
    let svg = fs::read_to_string(&figure).expect("a figure");
    for words in [
        "target: photoluminescence peak 1310 nm",
        "no strain",
        "heavy and light hole cross",
        "beyond the critical thickness of a free surface",
        "the file",
        ">1300<",
        ">1320<",
        "thickness of well (nm)",
    ] {
        assert!(svg.contains(words), "{words}");
    }
    // The lines are where the table says: at its points on either side of them.
    let table = rows(&fs::read_to_string(&csv).expect("a table"));
    let signs = |head: &str| {
        let values = || table.iter().map(|row| number(row, head));
        (values().any(|it| it < 0.0), values().any(|it| it > 0.0))
    };
    assert_eq!(signs("well_tensile_percent"), (true, true));
    assert_eq!(signs("heavy_less_light_mev"), (true, true));
    let free = || table.iter().map(|row| number(row, "critical_share_free"));
    assert!(free().any(|it| it > 1.0) && free().any(|it| it < 1.0));
}

#[test]
fn every_figure_of_a_chart_has_values() {
    for of in [
        "transition",
        "pl",
        "gain",
        "peak-gain",
        "transparency",
        "te-tm",
        "strain",
        "critical",
    ] {
        let document = json(&done(&[
            "chart",
            PUMP,
            "--quiet",
            "--json",
            "--bands",
            "single",
            "--of",
            of,
            "--points",
            "3x2",
            "--across",
            "well.thickness=6..9nm",
            "--up",
            "well.In=0.15..0.25",
        ]));
        let values = document["points"]["value"].as_array().expect("values");
        assert_eq!(values.len(), 6);
        assert!(values.iter().all(Value::is_f64), "{of}: {values:?}");
    }
}

/// Figures of `weigh --json` under their keys, one value a column.
fn weighed(words: &[&str]) -> BTreeMap<String, Vec<Option<f64>>> {
    let document = json(&done(words));
    let rows = document["rows"].as_array().expect("rows").iter();
    rows.map(|row| {
        let values = row["values"]
            .as_array()
            .expect("values")
            .iter()
            .map(Value::as_f64);
        (
            row["figure"].as_str().expect("a key").to_owned(),
            values.collect(),
        )
    })
    .collect()
}

#[test]
fn weighing_makes_equal_what_it_says() {
    for (equal, key) in [
        ("volume", "density_cm3"),
        ("sheet", "sheet_density_cm2"),
        ("current", "radiative_current_a_cm2"),
        ("gain", "peak_gain_cm"),
    ] {
        let figures = weighed(&[
            "weigh",
            PUMP,
            LINK,
            "--bulk",
            "--bands",
            "single",
            "--density",
            "3e18",
            "--at-equal",
            equal,
            "--json",
            "--quiet",
        ]);
        for key in [
            "peak_gain_cm",
            "gain_peak_nm",
            "transparency_cm3",
            "differential_gain_cm2",
            "radiative_current_a_cm2",
            "te_gain_cm",
            "tm_gain_cm",
            "te_over_tm",
            "emission_fwhm_mev",
            "nm_per_k",
        ] {
            let values = &figures[key];
            assert!(
                values.len() == 4 && values.iter().all(Option::is_some),
                "{equal} {key}: {values:?}"
            );
        }
        let values: Vec<f64> = figures[key].iter().map(|it| it.expect("a value")).collect();
        for value in &values {
            assert!(
                (value / values[0] - 1.0).abs() < 1e-5,
                "{equal}: {values:?}"
            );
        }
    }
}

#[test]
fn weighing_tells_wells_from_bulk() {
    let folder = folder();
    let (figure, tables) = (path(&folder, "two.svg"), path(&folder, "tables/"));
    let page = done(&[
        "weigh", LINK, "--bulk", "--bands", "single", "--quiet", "--figure", &figure, "--csv",
        &tables,
    ]);
    assert!(
        page.contains("At equal density per volume, 3e18 cm⁻³"),
        "{page}"
    );
    let svg = fs::read_to_string(&figure).expect("a figure");
    for words in [
        "estuary-1310",
        "bulk, strained",
        "bulk, unstrained",
        "Density of states",
        "TE",
        "TM",
    ] {
        assert!(svg.contains(words), "{words}");
    }
    assert_eq!(
        names(&folder.path().join("tables")),
        ["spectra.csv", "states.csv", "weigh.csv"]
    );
    let read = |name: &str| {
        rows(&fs::read_to_string(folder.path().join("tables").join(name)).expect("a table"))
    };
    // Of the wells the states rise in steps, of bulk with the root of the energy.
    let states = read("states.csv");
    let of = |column: &str| -> Vec<(f64, f64)> {
        states
            .iter()
            .filter(|row| row["column"] == column)
            .map(|row| {
                (
                    number(row, "above_first_edge_ev"),
                    number(row, "states_per_ev_cm3"),
                )
            })
            .collect()
    };
    let wells = of("estuary-1310");
    assert!(
        wells
            .windows(2)
            .all(|pair| pair[0].0 == pair[1].0 || pair[0].1 == pair[1].1)
    );
    let bulk = of("bulk, strained");
    let (at, states) = bulk[bulk.len() - 1];
    for &(energy_ev, here) in bulk.iter().filter(|it| it.0 > 0.0) {
        assert!((here / states / (energy_ev / at).sqrt() - 1.0).abs() < 1e-9);
    }
    let figures: Vec<String> = read("weigh.csv")
        .iter()
        .map(|row| row["figure"].clone())
        .collect();
    assert!(
        figures.contains(&"te_over_tm".to_owned()) && figures.len() == 14,
        "{figures:?}"
    );
    assert_eq!(read("spectra.csv").len(), 3 * 401);
}
