//! The commands `spread` and `reconcile` as a user runs them.

use assert_cmd::Command;
use serde_json::Value;
use std::fs;
use std::path::{Path, PathBuf};
use tempfile::TempDir;

/// A shipped structure with a window and errors of growth.
const ADDED: &str = r#"
[model]
bands = "single"
[target]
kind = "transition"
wavelength_nm = 1290
temperature_c = 25
tolerance_nm = 6
[growth]
rate_percent = 1.0
flux_percent = { In = 0.3, Ga = 0.3, Al = 0.3 }
"#;

const RETURNED: &str = r#"
[returned]
run = "E-0417"
[returned.pl]
peak_nm = 1305.0
temperature_c = 23
medium = "air"
[returned.xray]
period_nm = 14.80
mean_mismatch_ppm = 2500
mismatch = "perpendicular"
sense = "compressive"
[assume]
barrier_ratio_fixed = true
moved = ["well.thickness", "well.Al"]
"#;

/// The shipped structure without its target, its growth and its limits.
fn layers() -> String {
    let shipped = fs::read_to_string("structures/estuary-1310.toml").expect("shipped");
    let (layers, _) = shipped.split_once("\n[target]").expect("a target");
    layers.to_owned()
}

struct Desk {
    folder: TempDir,
}

impl Desk {
    fn new() -> Self {
        let desk = Self {
            folder: TempDir::new().expect("a folder"),
        };
        desk.file("my.toml", &format!("{}{ADDED}", layers()));
        desk.file("returned.toml", RETURNED);
        desk
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    fn file(&self, name: &str, text: &str) {
        fs::write(self.path(name), text).expect("written");
    }

    fn text(&self, name: &str) -> String {
        fs::read_to_string(self.path(name)).expect("there")
    }

    /// Exit code, standard output and standard error.
    fn run(&self, words: &[&str]) -> (i32, String, String) {
        self.run_with_threads(words, "2")
    }

    fn run_with_threads(&self, words: &[&str], threads: &str) -> (i32, String, String) {
        let output = Command::cargo_bin("stepwell")
            .expect("built")
            .current_dir(self.folder.path())
            .env("RAYON_NUM_THREADS", threads)
            .args(words)
            .output()
            .expect("runs");
        let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("UTF-8");
        (
            output.status.code().expect("an exit code"),
            text(output.stdout),
            text(output.stderr),
        )
    }

    fn json(&self, words: &[&str]) -> Value {
        let (code, out, err) = self.run(words);
        assert_eq!(code, 0, "{err}");
        serde_json::from_str(&out).expect("JSON")
    }
}

fn number(document: &Value, path: &str) -> f64 {
    document
        .pointer(path)
        .and_then(Value::as_f64)
        .unwrap_or_else(|| panic!("no number at {path}"))
}

#[test]
fn wafers_are_the_same_bytes_for_any_number_of_threads() {
    let desk = Desk::new();
    let words = [
        "spread", "my.toml", "--draws", "20000", "--yield", "90", "--json", "--quiet",
    ];
    let one = desk.run_with_threads(&words, "1");
    let two = desk.run_with_threads(&words, "2");
    assert_eq!(one.0, 0, "{}", one.2);
    assert_eq!(one, two);
    let other_seed = desk.run(&[&words[..], &["--seed", "2"]].concat());
    assert_ne!(one.1, other_seed.1, "the seed counts");
}

#[test]
fn a_spread_holds_what_it_promises() {
    let desk = Desk::new();
    let document = desk.json(&["spread", "my.toml", "--draws", "20000", "--json"]);
    assert_eq!(number(&document, "/format") as i64, 1);
    assert_eq!(number(&document, "/stamp/seed") as i64, 1);
    assert_eq!(number(&document, "/draws") as i64, 20_000);
    let linear = number(&document, "/linear/sigma_nm");
    let sampled = number(&document, "/sampled/sigma_nm");
    assert!((linear / sampled - 1.0).abs() < 0.05, "{linear} {sampled}");
    let sensitivities = document["sensitivities"].as_array().expect("a list");
    let squares: f64 = sensitivities
        .iter()
        .map(|it| it["nm"].as_f64().expect("nm").powi(2))
        .sum();
    assert!((squares.sqrt() - linear).abs() < 1e-9);
    let sizes: Vec<f64> = sensitivities
        .iter()
        .map(|it| it["nm"].as_f64().expect("nm").abs())
        .collect();
    assert!(sizes.is_sorted_by(|a, b| a >= b), "{sizes:?}");
    let wafers: i64 = document["histogram"]["counts"]
        .as_array()
        .expect("a list")
        .iter()
        .filter_map(Value::as_i64)
        .sum();
    assert_eq!(wafers, 20_000);
    let good = number(&document, "/yield/sampled");
    assert!((0.0..=1.0).contains(&good));
}

#[test]
fn a_spread_draws_its_figure_and_writes_its_tables_once() {
    let desk = Desk::new();
    let words = [
        "spread", "my.toml", "--draws", "1000", "--figure", "s.svg", "--csv", "tables/",
    ];
    let (code, page, err) = desk.run(&words);
    assert_eq!(code, 0, "{err}");
    assert!(page.contains("In flux") && page.contains("Yield"), "{page}");
    for line in page.lines() {
        assert!(line.chars().count() <= 80, "{line}");
    }
    assert!(desk.text("s.svg").starts_with("<svg"));
    for name in ["sensitivities", "histogram", "quantiles", "yield", "layers"] {
        let table = desk.text(&format!("tables/{name}.csv"));
        assert!(table.starts_with("# stepwell"), "{name}");
        assert!(table.lines().count() > 2, "{name}");
    }
    let (code, _, err) = desk.run(&words);
    assert_eq!(code, 2);
    assert!(err.contains("--force"), "{err}");
}

#[test]
fn a_spread_without_errors_or_window_says_what_to_write() {
    let desk = Desk::new();
    desk.file("bare.toml", &layers());
    let (code, _, err) = desk.run(&["spread", "bare.toml"]);
    assert_eq!(code, 3);
    assert!(err.contains("[growth]"), "{err}");
    let words = ["spread", "my.toml", "--kind", "pl", "--yield", "90"];
    let (code, _, err) = desk.run(&words);
    assert_eq!(code, 3);
    assert!(err.contains("window"), "{err}");
    for (words, part) in [
        (["spread", "my.toml", "--draws", "5"], "--draws"),
        (["spread", "my.toml", "--yield", "101"], "--yield"),
        (["spread", "my.toml", "--kind", "colour"], "--kind"),
    ] {
        let (code, _, err) = desk.run(&words);
        assert_eq!(code, 2, "{err}");
        assert!(err.contains(part), "{err}");
    }
}

#[test]
fn a_temperature_without_an_effect_is_refused_in_the_structure_file() {
    let desk = Desk::new();
    let text = desk.text("my.toml") + "temperature_k = 1.0\n";
    desk.file("warm.toml", &text);
    let (code, _, err) = desk.run(&["spread", "warm.toml"]);
    assert_eq!(code, 3);
    assert!(err.contains("nothing that hangs on it"), "{err}");
    assert!(err.contains("warm.toml:") && err.contains('^'), "{err}");
}

#[test]
fn a_wafer_is_reconciled_and_its_document_has_its_keys() {
    let desk = Desk::new();
    let document = desk.json(&["reconcile", "my.toml", "returned.toml", "--json"]);
    for key in [
        "format",
        "stamp",
        "estimate",
        "correlation",
        "undetermined",
        "causes",
        "correction",
        "house_offset",
        "assumed",
    ] {
        assert!(document.get(key).is_some(), "{key}");
    }
    let estimate = document["estimate"].as_array().expect("a list");
    assert_eq!(estimate.len(), 2);
    for it in estimate {
        assert!(it["sigma"].as_f64() < it["prior_sigma"].as_f64(), "{it}");
    }
    let well = &estimate[0];
    // The period grew by 2.07 %, and the wells with it.
    let ratio = number(well, "/value") / number(well, "/ordered");
    assert!((ratio - 14.80 / 14.50).abs() < 0.005, "{ratio}");
    let (code, page, _) = desk.run(&["reconcile", "my.toml", "returned.toml"]);
    assert_eq!(code, 0);
    for line in page.lines() {
        assert!(line.chars().count() <= 80, "{line}");
    }
}

/// The run that ships with its structure: as a peak, as the map beside it, and held against limits
/// that the correction keeps or does not.
#[test]
fn the_shipped_run_is_explained_corrected_and_held_against_limits() {
    let desk = Desk::new();
    let shipped = fs::read_to_string("structures/estuary-1310.toml").expect("shipped");
    let run = fs::read_to_string("structures/returned/e-0417.toml").expect("shipped");
    desk.file("ordered.toml", &shipped);
    desk.file("run.toml", &run);
    let words = |file| ["reconcile", file, "run.toml", "--bands", "single", "--json"];
    let document = desk.json(&words("ordered.toml"));
    assert_eq!(document["next_is_outside"], false);
    let figures = document["limits"].as_array().expect("a list");
    let figure = |layers: &str, name: &str| {
        let found = figures
            .iter()
            .find(|it| it["layers"] == layers && it["name"] == name);
        found.unwrap_or_else(|| panic!("{layers} {name}: {figures:#?}"))
    };
    let strain = figure("6 × well", "strain_thickness_percent_nm");
    let [ordered, grown, next] =
        ["ordered", "grown", "next"].map(|key| strain[key].as_f64().expect("a number"));
    // Most of the way back: 70 % of the estimate is corrected.
    assert!((ordered - 5.5).abs() < 0.01 && grown > ordered, "{strain}");
    assert!(
        (next - ordered - 0.3 * (grown - ordered)).abs() < 0.01,
        "{strain}"
    );
    assert_eq!(
        (&strain["limit"], &strain["standing"]),
        (&8.0.into(), &"ok".into())
    );
    let correction = &document["correction"][0];
    let sum = number(correction, "/ordered") + number(correction, "/change");
    assert!((number(correction, "/order_next") - sum).abs() < 1e-12);
    // A limit between what was ordered and what will come: the correction does not reach it.
    let between = format!("{:.4}", 0.5 * (ordered + next));
    desk.file(
        "limited.toml",
        &shipped.replace(
            "strain_thickness_percent_nm_max = 8",
            &format!("strain_thickness_percent_nm_max = {between}"),
        ),
    );
    let (code, out, err) = desk.run(&words("limited.toml"));
    assert_eq!(code, 5, "{err}");
    let limited: Value = serde_json::from_str(&out).expect("JSON");
    assert_eq!(limited["next_is_outside"], true);
    let (_, page, _) = desk.run(&words("limited.toml")[..5]);
    assert!(page.contains("It is outside"), "{page}");
    // The same run by its map.
    let map = fs::read_to_string("structures/returned/e-0417.csv").expect("shipped");
    desk.file("e-0417.csv", &map);
    let by_map = run.replace("peak_nm = 1308.6 ", "map = \"e-0417.csv\" ");
    assert_ne!(by_map, run);
    desk.file("run.toml", &by_map);
    let by_map = desk.json(&words("ordered.toml"));
    let value = |document: &Value| number(&document["estimate"][0], "/value");
    assert!((value(&by_map) - value(&document)).abs() < 1e-3);
    assert!(by_map["assumed"].to_string().contains("decimal commas"));
}

#[test]
fn a_reconciled_wafer_is_the_same_bytes_for_any_number_of_threads() {
    let desk = Desk::new();
    let words = ["reconcile", "my.toml", "returned.toml", "--json", "--quiet"];
    let one = desk.run_with_threads(&words, "1");
    assert_eq!(one.0, 0, "{}", one.2);
    assert_eq!(one, desk.run_with_threads(&words, "2"));
}

#[test]
fn what_is_open_is_named_and_ends_with_its_own_code() {
    let desk = Desk::new();
    let open = RETURNED.split("[assume]").next().expect("a part");
    desk.file("open.toml", open);
    let (code, page, err) = desk.run(&["reconcile", "my.toml", "open.toml"]);
    assert_eq!(code, 4, "{err}");
    assert!(page.contains("What the data do not tell"), "{page}");
    assert!(page.contains("barrier_ratio_fixed"), "{page}");
    assert!(!page.contains("For the next order"), "{page}");
}

#[test]
fn data_that_no_structure_explains_end_without_a_correction() {
    let desk = Desk::new();
    for (said, misread) in [
        ("peak_nm = 1305.0", "peak_nm = 1480.0"),
        ("period_nm = 14.80", "period_nm = 24.80"),
    ] {
        desk.file("far.toml", &RETURNED.replace(said, misread));
        let (code, page, _) = desk.run(&["reconcile", "my.toml", "far.toml"]);
        assert_eq!(code, 4, "{misread}");
        assert!(page.contains("No structure near the order"), "{page}");
        assert!(!page.contains("For the next order"), "{page}");
    }
}

#[test]
fn faults_of_returned_data_are_shown_at_their_places() {
    let desk = Desk::new();
    desk.file(
        "bad.toml",
        &RETURNED.replace("medium = \"air\"", "medium = \"water\""),
    );
    let (code, out, err) = desk.run(&["reconcile", "my.toml", "bad.toml"]);
    assert_eq!((code, out.as_str()), (3, ""));
    assert!(err.contains("bad.toml:7:10") && err.contains('^'), "{err}");
    desk.file("named.toml", &RETURNED.replace("well.Al\"", "wall.Al\""));
    let (code, _, err) = desk.run(&["reconcile", "my.toml", "named.toml"]);
    assert_eq!(code, 3);
    assert!(
        err.contains("named.toml:15:") && err.contains("did you mean `well`?"),
        "{err}"
    );
}

#[test]
fn a_map_gives_the_peak_and_says_what_was_taken_for_granted() {
    let desk = Desk::new();
    desk.file(
        "with-map.toml",
        &RETURNED.replace("peak_nm = 1305.0", "map = \"map.csv\""),
    );
    desk.file(
        "map.csv",
        "\u{feff}x;y;Peak (nm)\r\n0,0;0,0;1304,5\r\n5,0;0,0;1305,0\r\n0,0;5,0;1306,5\r\n",
    );
    let by_map = desk.json(&["reconcile", "my.toml", "with-map.toml", "--json"]);
    let by_hand = desk.json(&["reconcile", "my.toml", "returned.toml", "--json"]);
    assert_eq!(by_map["estimate"], by_hand["estimate"]);
    let assumed = by_map["assumed"].to_string();
    for part in [
        "byte-order mark",
        "decimal commas",
        "semicolons",
        "median of 3",
    ] {
        assert!(assumed.contains(part), "{assumed}");
    }
    desk.file("map.csv", "x,y,peak\n0,0,13105\n");
    let (code, _, err) = desk.run(&["reconcile", "my.toml", "with-map.toml"]);
    assert_eq!(code, 3);
    assert!(err.contains("map.csv:1:1"), "{err}");
}

#[test]
fn a_ledger_grows_and_is_rewritten_with_force_only() {
    let desk = Desk::new();
    let words = "reconcile my.toml returned.toml --ledger house.toml --record --quiet";
    let words: Vec<&str> = words.split(' ').collect();
    let (code, _, err) = desk.run(&words);
    assert_eq!(code, 0, "{err}");
    let first = desk.text("house.toml");
    assert_eq!(first.matches("[[offsets]]").count(), 1);
    // The same run a second time.
    let (code, _, err) = desk.run(&words);
    assert_eq!(code, 2);
    assert!(err.contains("--force"), "{err}");
    assert_eq!(desk.text("house.toml"), first);
    // By hand a comment, and another run behind it.
    desk.file("house.toml", &format!("{first}\n# bench 2 from here\n"));
    desk.file("returned.toml", &RETURNED.replace("0417", "0418"));
    assert_eq!(desk.run(&words).0, 0);
    let second = desk.text("house.toml");
    assert!(second.starts_with(&first) && second.contains("# bench 2"));
    assert_eq!(second.matches("[[offsets]]").count(), 2);
    // Replaced with force: still two.
    let (code, _, err) = desk.run(&[&words[..], &["--force"]].concat());
    assert_eq!(code, 0, "{err}");
    assert_eq!(desk.text("house.toml").matches("[[offsets]]").count(), 2);
    // It is not its own witness, and counts for the next one.
    let as_document = [&words[..5], &["--json"]].concat();
    let document = desk.json(&as_document);
    assert_eq!(number(&document, "/house_offset/runs") as i64, 1);
    desk.file("returned.toml", &RETURNED.replace("0417", "0419"));
    let document = desk.json(&as_document);
    assert_eq!(number(&document, "/house_offset/runs") as i64, 2);
    assert!(number(&document, "/house_offset/sigma_mev") < 4.0);
}

#[test]
fn a_ledger_that_is_not_there_is_a_fault_unless_it_is_to_be_made() {
    let desk = Desk::new();
    let words = "reconcile my.toml returned.toml --ledger none.toml";
    let (code, _, err) = desk.run(&words.split(' ').collect::<Vec<_>>());
    assert_eq!(code, 3, "{err}");
    assert!(!Path::new(&desk.path("none.toml")).exists());
}
