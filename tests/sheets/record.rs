//! The record: its keys, its counts, its files, and what happens when something is in the way.

use super::{Desk, PLAIN, names, stepwell, structures, text};
use serde_json::Value;
use std::fs;
use stepwell::design::Ordered;
use stepwell::materials::Parameters;
use stepwell::structure::{Overrides, read};

#[test]
fn the_record_has_the_keys_that_others_build_on() {
    let desk = Desk::new();
    desk.sheet("structures/estuary-1310.toml", "grower", "out", &[]);
    let record = desk.record("out/sheet.json");
    assert_eq!(record["format"], 1);
    assert_eq!(record["copy"], "grower");
    let targets = &record["targets"];
    for key in [
        "pl_nm",
        "pl_air_nm",
        "pl_temperature_k",
        "pl_tolerance_nm",
        "xray_period_nm",
        "zero_order_arcsec",
        "total_nm",
    ] {
        assert!(targets[key].is_number(), "{key}");
    }
    let orders = targets["satellite_orders"].as_array().expect("orders");
    let angles = targets["satellites_arcsec"].as_array().expect("angles");
    assert_eq!(orders.len(), angles.len());
    assert!(orders.len() >= 4);
    assert_eq!(
        record["counts"]["words"],
        "6 wells, 5 inner barriers, 2 outer barriers"
    );
    let layers = record["layers"].as_array().expect("layers");
    assert_eq!(layers.len(), 24);
    for (index, layer) in layers.iter().enumerate() {
        assert_eq!(layer["number"], index + 1);
        let ends = [
            Some(layer),
            layer["grade_to"].as_object().map(|_| &layer["grade_to"]),
        ];
        for end in ends.into_iter().flatten() {
            let fractions = end["composition"].as_object().expect("a composition");
            let sum: f64 = fractions.values().filter_map(Value::as_f64).sum();
            // Two sublattices, each of four decimals that sum to 1.
            assert!((sum - 2.0).abs() < 1e-9, "{end}");
        }
    }
}

/// Photoluminescence in air is shorter than in vacuum by the index of air, 1.00027 (P. E. Ciddor,
/// Appl. Opt. 35, 1566 (1996)), and the period is the sum of its layers.
#[test]
fn targets_follow_from_the_layers() {
    let desk = Desk::new();
    desk.sheet("structures/estuary-1310.toml", "grower", "out", &[]);
    let record = desk.record("out/sheet.json");
    let number = |key: &str| record["targets"][key].as_f64().expect("a number");
    let ratio = number("pl_nm") / number("pl_air_nm");
    assert!((ratio - 1.00027).abs() < 1e-5, "{ratio}");
    assert!((number("xray_period_nm") - 14.5).abs() < 1e-9);
    let thickness = |layer: &Value| layer["thickness_nm"].as_f64().expect("a thickness");
    let layers = record["layers"].as_array().expect("layers");
    let total: f64 = layers.iter().map(thickness).sum();
    assert!((number("total_nm") - total).abs() < 1e-9);
    // The zero order moves by −Δf tan θ: its tolerance is that of the mean mismatch.
    let theta = record["substrate"]["theta_deg"].as_f64().expect("an angle");
    let shift = 150e-6 * theta.to_radians().tan() * 206_264.8;
    let tolerance = number("zero_order_tolerance_arcsec");
    assert!(
        (tolerance / shift - 1.0).abs() < 0.02,
        "{tolerance} {shift}"
    );
}

/// Who holds the grower's record can compute every number of it again.
#[test]
fn the_wafer_of_an_order_makes_the_same_order() {
    let desk = Desk::new();
    let parameters = Parameters::shipped();
    for path in structures(&desk) {
        let file = fs::read_to_string(&path).expect("a file");
        let reading = read(&file, &parameters, &Overrides::default()).expect("sound");
        let ordered = Ordered::new(&reading.stack, &parameters);
        let written = stepwell::structure::write(&ordered.wafer);
        let again = read(&written, &parameters, &Overrides::default()).expect("sound");
        assert_eq!(Ordered::new(&again.stack, &parameters), ordered, "{path}");
    }
}

#[test]
fn layers_in_the_table_are_those_of_the_record() {
    let desk = Desk::new();
    desk.sheet("structures/estuary-1310.toml", "grower", "out", &[]);
    let record = desk.record("out/sheet.json");
    let file = desk.read("out/layers.csv");
    let (stamp, table) = file.split_once('\n').expect("a stamp");
    assert!(stamp.starts_with("# Epitaxy order EST-1310-07 revision B / "));
    let mut reader = csv::Reader::from_reader(table.as_bytes());
    let heads = reader.headers().expect("heads").clone();
    let column = |name: &str| {
        heads
            .iter()
            .position(|head| head == name)
            .expect("a column")
    };
    let mut rows = 0;
    for row in reader.records() {
        let row = row.expect("a row");
        let number: usize = row[column("number")].parse().expect("a number");
        let layer = &record["layers"][number - 1];
        let end = if &row[column("end")] == "upper" {
            &layer["grade_to"]
        } else {
            layer
        };
        for (name, of) in [
            ("thickness_nm", layer),
            ("thickness_tolerance_nm", layer),
            ("strain_percent", end),
            ("relaxed_mismatch_ppm", end),
            ("perpendicular_mismatch_ppm", end),
            ("gap_nm", end),
            ("density_cm3", layer),
        ] {
            let cell: Option<f64> = row[column(name)].parse().ok();
            assert_eq!(cell, of[name].as_f64(), "{name} of layer {number}");
        }
        assert_eq!(&row[column("formula")], end["formula"], "layer {number}");
        rows += 1;
    }
    assert_eq!(rows, 26, "24 layers, two of them graded");
}

#[test]
fn all_files_appear_or_none_and_nothing_is_written_over() {
    let desk = Desk::new();
    let structure = desk.put("plain.toml", PLAIN);
    desk.sheet(&structure, "grower", "out", &["--quiet"]);
    let grower = [
        "layers.csv",
        "rocking-curve.svg",
        "sheet.html",
        "sheet.json",
    ];
    assert_eq!(names(&desk.path("out")), grower);
    let out = desk.shown("out");
    let words = [
        "sheet", &structure, "--for", "house", "--out", &out, "--quiet",
    ];
    let output = stepwell(&words);
    assert_eq!(output.status.code(), Some(2));
    assert!(
        text(&output.stderr).contains("--force"),
        "{}",
        text(&output.stderr)
    );
    assert_eq!(names(&desk.path("out")), grower);
    fs::create_dir(desk.path("half")).expect("made");
    desk.put("half/layers.csv", "mine");
    let half = desk.shown("half");
    let output = stepwell(&[
        "sheet", &structure, "--for", "grower", "--out", &half, "--quiet",
    ]);
    assert_eq!(output.status.code(), Some(2));
    assert_eq!(names(&desk.path("half")), ["layers.csv"]);
    assert_eq!(desk.read("half/layers.csv"), "mine");
}

/// The PDF is one of the sheet's files: listed in the record, missed where it was edited.
#[test]
fn a_pdf_is_part_of_the_sheet() {
    let desk = Desk::new();
    let structure = desk.put("plain.toml", PLAIN);
    for (paper, width) in [("a4", "595.28"), ("letter", "612")] {
        let more = ["--pdf", "--paper", paper, "--force", "--quiet"];
        desk.sheet(&structure, "grower", "out", &more);
        let pdf = fs::read(desk.path("out/sheet.pdf")).expect("a PDF");
        assert!(pdf.starts_with(b"%PDF-1.7"));
        let box_of_paper = format!("/MediaBox [0 0 {width} ");
        let stands = pdf
            .windows(box_of_paper.len())
            .any(|it| it == box_of_paper.as_bytes());
        assert!(stands, "{paper}");
    }
    let record = desk.record("out/sheet.json");
    let files = record["files"].as_array().expect("files");
    assert!(files.iter().any(|file| file["name"] == "sheet.pdf"));
    let record = desk.shown("out/sheet.json");
    assert_eq!(stepwell(&["check", &record, "-q"]).status.code(), Some(0));
    let mut pdf = fs::read(desk.path("out/sheet.pdf")).expect("a PDF");
    pdf.push(b' ');
    fs::write(desk.path("out/sheet.pdf"), pdf).expect("written");
    assert_eq!(stepwell(&["check", &record, "-q"]).status.code(), Some(5));
}

#[test]
fn faults_are_answered_with_their_remedy() {
    let desk = Desk::new();
    let structure = desk.put("plain.toml", PLAIN);
    let broken = desk.put("broken.json", "{");
    let other = desk.put("other.json", "{\"format\": 1}");
    for (words, code, expected) in [
        (vec!["sheet", &structure, "--for", "buyer"], 2, "grower"),
        (vec!["sheet", &structure], 2, "--for"),
        (
            vec!["sheet", &structure, "--for", "grower", "--since", &broken],
            3,
            "no JSON",
        ),
        (vec!["check", &other], 3, "not the record of a design"),
        (
            vec!["sheet", &structure, "--for", "grower", "--pdf"],
            2,
            "--out",
        ),
        (
            vec![
                "sheet", &structure, "--for", "grower", "--out", "x", "--pdf", "--paper", "a5",
            ],
            2,
            "a4",
        ),
        (
            vec!["sheet", &structure, "--for", "grower", "--out", &structure],
            2,
            "is a file",
        ),
    ] {
        let output = stepwell(&words);
        assert_eq!(output.status.code(), Some(code), "{words:?}");
        let said = text(&output.stderr);
        assert!(said.contains(expected), "{words:?}\n{said}");
    }
}

/// A well that holds nothing: the rest of the sheet is there, and says what is not.
#[test]
fn what_can_not_be_computed_is_left_blank_with_its_reason() {
    let desk = Desk::new();
    // A well of the largest gap of all, and one alone.
    let hill = PLAIN
        .replace("material = \"gainwell\"", "material = \"InP\"")
        .replace("repeat = 2", "repeat = 1");
    let structure = desk.put("hill.toml", &hill);
    for reader in ["grower", "house"] {
        desk.sheet(&structure, reader, "out", &["--force", "--quiet"]);
        let record = desk.record("out/sheet.json");
        assert!(record["targets"]["pl_nm"].is_null());
        assert!(record["targets"]["xray_period_nm"].is_null());
        assert!(record["targets"]["total_nm"].is_number());
        let is_plain = record["targets"]["pl_missing"] == "to be agreed";
        assert_eq!(is_plain, reader == "grower");
        for key in ["pl_missing", "xray_missing"] {
            let reason = record["targets"][key].as_str().expect("a reason");
            assert!(desk.read("out/sheet.html").contains(reason), "{reason}");
        }
    }
    let blank = desk.record("out/sheet.json");
    let blank = blank["house"]["blank"].as_array().expect("a list").len();
    assert_eq!(blank, 3, "levels, yield, threshold");
}

/// What the file does not say is asked for by name, and nothing is put in its place.
#[test]
fn what_an_order_needs_is_asked_for() {
    let desk = Desk::new();
    let nameless = PLAIN.replace("dopant = \"Zn\"", "");
    let structure = desk.put("plain.toml", &nameless);
    let (said, remarks) = desk.sheet(&structure, "grower", "out", &[]);
    assert!(remarks.contains("no [order]"), "{remarks}");
    let record = desk.record("out/sheet.json");
    let asked = record["asked_for"].as_array().expect("a list");
    let labels: Vec<&str> = asked.iter().filter_map(Value::as_str).collect();
    for label in [
        "Sheet",
        "Revision",
        "Wafers",
        "Diameter",
        "Off-cut",
        "Author",
        "Dopant of layer 7",
    ] {
        assert!(labels.contains(&label), "{label}");
        assert!(said.contains(label), "{label}");
    }
    for (path, field) in record["order"].as_object().expect("fields") {
        let is_empty = field["value"].is_null();
        let origin = field["origin"].as_str().expect("an origin");
        let says_so = ["asked for", "left out"].contains(&origin);
        assert_eq!(is_empty, says_so, "{path}");
        assert_ne!(origin, "given", "{path}");
    }
}

/// A material of own numbers has no composition to grow: it is asked for, not made up.
#[test]
fn a_composition_that_nobody_gave_is_asked_for() {
    let desk = Desk::new();
    desk.sheet("structures/every-key.toml", "grower", "out", &["--quiet"]);
    let record = desk.record("out/sheet.json");
    let asked = record["asked_for"].as_array().expect("a list");
    assert!(
        asked.iter().any(|it| it
            .as_str()
            .is_some_and(|it| it.starts_with("Composition of material-"))),
        "{asked:?}"
    );
    let layers = record["layers"].as_array().expect("layers");
    let own = layers.iter().find(|layer| layer["composition"].is_null());
    let name = own.expect("the layer")["formula"].as_str().expect("a name");
    assert!(name.starts_with("material-"), "{name}");
    let page = desk.read("out/sheet.html");
    assert!(!page.contains("<bdi>house</bdi>"));
    let structure = record["structure"].as_str().expect("a structure");
    assert!(!structure.contains("house"), "{structure}");
    let asks = format!("<bdi>{name}</bdi>: composition <span class=\"mark asked\">");
    assert!(page.contains(&asks));
}

/// Whoever sends an order that misses its own target is told so, and the order is written.
#[test]
fn an_order_beside_its_target_is_remarked() {
    let desk = Desk::new();
    for (nm, expected) in [(1000.0, true), (1300.0, false)] {
        let target = format!(
            "[target]\nkind = \"pl\"\nwavelength_nm = {nm}\nmedium = \"vacuum\"\ntemperature_c = 25\n\
             tolerance_nm = {}\n",
            if expected { 5 } else { 900 }
        );
        let structure = desk.put("aimed.toml", &format!("{PLAIN}{target}"));
        for reader in ["grower", "house"] {
            let (_, remarks) = desk.sheet(&structure, reader, "out", &["--force"]);
            assert_eq!(
                remarks.contains("OUTSIDE THE TARGET"),
                expected,
                "{remarks}"
            );
        }
    }
}

/// Layers matched to the substrate are neither tensile nor compressive on the page.
#[test]
fn a_strain_that_is_printed_as_zero_is_matched() {
    let desk = Desk::new();
    let structure = desk.put(
        "plain.toml",
        &PLAIN.replace("compressive_percent = 0.6", "matched = true"),
    );
    desk.sheet(&structure, "grower", "out", &["--quiet"]);
    let page = desk.read("out/sheet.html");
    assert!(page.contains(">0.00</data> matched"));
    for sense in ["tensile", "compressive"] {
        for zero in ["0.00", "−0.00"] {
            assert!(
                !page.contains(&format!(">{zero}</data> {sense}")),
                "{zero} {sense}"
            );
        }
    }
}

/// A thousand layers: every one of them a row, numbered without a gap.
#[test]
fn a_thousand_layers_are_a_thousand_rows() {
    let desk = Desk::new();
    let many = "[[layers]]\nrepeat = 496\nlayers = [\n\
                { role = \"cladding\", material = \"InP\", thickness_nm = 3 },\n\
                { role = \"cladding\", material = \"guide\", thickness_nm = 2 },\n]\n";
    let text = PLAIN.replacen("[[layers]]", &format!("{many}[[layers]]"), 1);
    let structure = desk.put("many.toml", &text);
    desk.sheet(&structure, "grower", "out", &["--quiet"]);
    let record = desk.record("out/sheet.json");
    let layers = record["layers"].as_array().expect("layers").len();
    assert_eq!(layers, 999);
    let page = desk.read("out/sheet.html");
    for number in 1..=layers {
        let place = format!("data-at=\"/layers/{}/number\">{number}<", number - 1);
        assert_eq!(page.matches(&place).count(), 1, "{number}");
    }
}

#[test]
fn the_same_sheet_is_the_same_bytes() {
    let desk = Desk::new();
    for out in ["one", "two"] {
        desk.sheet("structures/estuary-980.toml", "house", out, &["--quiet"]);
    }
    for name in names(&desk.path("one")) {
        let [one, two] = ["one", "two"].map(|out| desk.read(&format!("{out}/{name}")));
        assert!(one == two, "{name}");
    }
}

/// The record of a shipped order, read back, makes the very files that it was written with.
#[test]
fn shipped_orders_check_as_they_were_written() {
    let structures = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("structures");
    for name in ["estuary-980.toml", "estuary-1310.toml"] {
        let desk = Desk::new();
        let structure = structures.join(name).display().to_string();
        desk.sheet(&structure, "grower", "out", &[]);
        let record = desk.shown("out/sheet.json");
        let output = stepwell(&["check", &record, "-q"]);
        assert_eq!(output.status.code(), Some(0), "{name}: {output:?}");
    }
}
