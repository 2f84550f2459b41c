//! Sheets that were kept: edited ones are found out, and revisions are told apart.

use super::{Desk, PLAIN, stepwell, text};
use std::fs;

fn check(desk: &Desk, name: &str) -> (i32, String) {
    let output = stepwell(&["check", &desk.shown(name), "--quiet"]);
    let code = output.status.code().expect("a code");
    assert!(code == 0 || code == 5, "{}", text(&output.stderr));
    (code, text(&output.stdout).to_owned())
}

#[test]
fn an_untouched_sheet_agrees() {
    let desk = Desk::new();
    for (structure, reader) in [("estuary-1310", "grower"), ("every-key", "house")] {
        let structure = format!("structures/{structure}.toml");
        desk.sheet(&structure, reader, reader, &["--quiet"]);
        let (code, said) = check(&desk, &format!("{reader}/sheet.json"));
        assert_eq!(code, 0, "{said}");
        assert!(said.contains("agree with the structure"), "{said}");
    }
}

/// Every way in which a hand may touch a sheet, and what is said of it.
#[test]
fn a_sheet_edited_by_hand_is_found_out() {
    let desk = Desk::new();
    desk.sheet("structures/estuary-980.toml", "grower", "out", &["--quiet"]);
    let record = desk.read("out/sheet.json");
    for (from, to, expected) in [
        (
            "\"thickness_nm\": 7.5",
            "\"thickness_nm\": 7.6",
            "layer 5: thickness_nm",
        ),
        ("\"In\": 0.19", "\"In\": 0.20", "layer 5: composition In"),
        (
            "\"pl_tolerance_nm\": 5",
            "\"pl_tolerance_nm\": 50",
            "targets pl_tolerance_nm",
        ),
        (
            "\"dopant\": \"C\"",
            "\"dopant\": \"Zn\"",
            "layer 10: dopant",
        ),
        (
            "thickness_nm = 7.5",
            "thickness_nm = 7.6",
            "is not the one on the sheet",
        ),
        ("EST-980-02", "EST-980-03", "EST-980-03"),
    ] {
        let edited = record.replacen(from, to, 1);
        assert_ne!(edited, record, "{from}");
        desk.put("out/edited.json", &edited);
        let (code, said) = check(&desk, "out/edited.json");
        assert_eq!(code, 5, "{from}: {said}");
        assert!(said.contains(expected), "{from}: {said}");
    }
}

#[test]
fn an_edited_page_or_table_is_found_out() {
    let desk = Desk::new();
    desk.sheet("structures/estuary-980.toml", "grower", "out", &["--quiet"]);
    for name in ["sheet.html", "layers.csv", "rocking-curve.svg"] {
        let whole = desk.read(&format!("out/{name}"));
        desk.put(&format!("out/{name}"), &whole.replacen('7', "8", 1));
        let (code, said) = check(&desk, "out/sheet.json");
        assert_eq!(code, 5, "{name}: {said}");
        let line = said.lines().find(|line| line.contains(name));
        assert!(
            line.is_some_and(|line| line.contains("is not the one")),
            "{said}"
        );
        desk.put(&format!("out/{name}"), &whole);
    }
    assert_eq!(check(&desk, "out/sheet.json").0, 0);
    fs::remove_file(desk.path("out/layers.csv")).expect("removed");
    let (code, said) = check(&desk, "out/sheet.json");
    assert!(code == 5 && said.contains("is missing"), "{said}");
    fs::create_dir(desk.path("out/layers.csv")).expect("made");
    let (code, said) = check(&desk, "out/sheet.json");
    assert!(code == 5 && said.contains("is no file"), "{said}");
}

/// A record that no longer names a file, or names the sum of an edited one, is found out.
#[test]
fn files_taken_out_of_the_record_are_missed() {
    let desk = Desk::new();
    desk.sheet("structures/estuary-980.toml", "grower", "out", &["--quiet"]);
    let record = desk.record("out/sheet.json");
    let mut emptied = record.clone();
    emptied["files"] = serde_json::json!([]);
    let mut without = record.clone();
    without.as_object_mut().expect("a record").remove("files");
    let mut elsewhere = record.clone();
    elsewhere["files"][0]["name"] = serde_json::json!("../sheet.html");
    for edited in [emptied, without, elsewhere] {
        desk.put("out/edited.json", &edited.to_string());
        let (code, said) = check(&desk, "out/edited.json");
        assert_eq!(code, 5, "{said}");
        assert!(said.contains("is not named under `files`"), "{said}");
    }
    // A table that was edited together with its sum.
    let table = desk.read("out/layers.csv");
    let edited = table.replacen("7.5", "7.6", 1);
    assert_ne!(edited, table);
    desk.put("out/layers.csv", &edited);
    let sum = |text: &str| stepwell::sheet::sha256(text.as_bytes());
    let lie = desk
        .read("out/sheet.json")
        .replace(&sum(&table), &sum(&edited));
    desk.put("out/sheet.json", &lie);
    let (code, said) = check(&desk, "out/sheet.json");
    assert!(
        code == 5 && said.contains("is not what is made of this record"),
        "{said}"
    );
}

/// Of two values of one key readers take one or the other: neither is believed.
#[test]
fn a_key_that_stands_twice_is_refused() {
    let desk = Desk::new();
    desk.sheet("structures/estuary-980.toml", "grower", "out", &["--quiet"]);
    let twice = desk.read("out/sheet.json").replacen(
        "\"thickness_nm\"",
        "\"thickness_nm\": 9.9, \"thickness_nm\"",
        1,
    );
    let path = desk.put("out/twice.json", &twice);
    let output = stepwell(&["check", &path, "--quiet"]);
    assert_eq!(output.status.code(), Some(3));
    let said: Vec<&str> = text(&output.stderr).split_whitespace().collect();
    let said = said.join(" ");
    assert!(
        said.contains("the key `thickness_nm` stands twice"),
        "{said}"
    );
}

#[test]
fn the_findings_are_a_document_too() {
    let desk = Desk::new();
    desk.sheet("structures/estuary-980.toml", "grower", "out", &["--quiet"]);
    let edited = desk.read("out/sheet.json").replacen("7.5", "7.51", 1);
    let path = desk.put("out/sheet.json", &edited);
    let output = stepwell(&["check", &path, "--json", "--quiet"]);
    assert_eq!(output.status.code(), Some(5));
    let found: serde_json::Value = serde_json::from_slice(&output.stdout).expect("JSON");
    assert_eq!(found["agrees"], false);
    assert!(!found["deviations"].as_array().expect("a list").is_empty());
}

#[test]
fn a_revision_tells_what_changed_in_words_and_in_the_table() {
    let desk = Desk::new();
    let order = "[order]\nid = \"E-1\"\nrevision = \"A\"\n";
    let first = desk.put("a.toml", &format!("{PLAIN}{order}"));
    desk.sheet(&first, "grower", "a", &["--quiet"]);
    let second = format!("{PLAIN}{order}")
        .replace("revision = \"A\"", "revision = \"B\"\nquantity = 3")
        .replace("thickness_nm = 400", "thickness_nm = 450")
        .replace("acceptors_cm3 = 1e18", "acceptors_cm3 = 2e18");
    let second = desk.put("b.toml", &second);
    let since = desk.shown("a/sheet.json");
    let (said, remarks) = desk.sheet(&second, "grower", "b", &["--since", &since]);
    assert!(!remarks.contains("same revision"), "{remarks}");
    let expected = [
        "layer 7, cladding: thickness 400 nm → 450 nm (+50 nm)",
        "layer 7, cladding: tolerance 20 nm → 22.5 nm (+2.5 nm)",
        "layer 7, cladding: doping 1e18 cm⁻³ → 2e18 cm⁻³ (+1e18 cm⁻³)",
        "total thickness 482 nm → 532 nm (+50 nm)",
        "wafers nothing → 3",
    ];
    let record = desk.record("b/sheet.json");
    let changes = record["changes"].as_array().expect("changes");
    let told: Vec<&str> = changes
        .iter()
        .filter_map(|it| it["words"].as_str())
        .collect();
    assert_eq!(told, expected);
    for change in expected {
        assert!(said.contains(change), "{said}");
    }
    let page = desk.read("b/sheet.html");
    assert!(page.contains("Changes since revision A"));
    assert_eq!(page.matches("class=\"changed\"").count(), 1);
    let row = page.find("class=\"changed\"").expect("a row");
    assert!(page[row..].starts_with("class=\"changed\">\n<th scope=\"row\" role=\"rowheader\" data-head=\"No.\"><span class=\"line\"><data value=\"7\""));
    // What it says of the present is checked, too.
    let (code, words) = check(&desk, "b/sheet.json");
    assert_eq!(code, 0, "{words}");
    assert!(
        words.contains("not checked: which earlier sheet"),
        "{words}"
    );
    let mut orphan = desk.record("b/sheet.json");
    orphan["since"] = serde_json::Value::Null;
    desk.put("b/orphan.json", &orphan.to_string());
    let (code, words) = check(&desk, "b/orphan.json");
    assert!(
        code == 5 && words.contains("names no earlier sheet"),
        "{words}"
    );
    let lie = desk
        .read("b/sheet.json")
        .replace("\"after\": 450.0", "\"after\": 440.0");
    desk.put("b/lie.json", &lie);
    let (code, words) = check(&desk, "b/lie.json");
    assert_eq!(code, 5);
    assert!(words.contains("change of layer 7"), "{words}");
}

#[test]
fn a_change_under_the_same_revision_is_remarked() {
    let desk = Desk::new();
    let order = "[order]\nid = \"E-1\"\nrevision = \"A\"\n";
    let first = desk.put("a.toml", &format!("{PLAIN}{order}"));
    desk.sheet(&first, "grower", "a", &["--quiet"]);
    let since = desk.shown("a/sheet.json");
    let (said, remarks) = desk.sheet(&first, "grower", "same", &["--since", &since]);
    assert!(!remarks.contains("same revision"), "{remarks}");
    assert!(
        said.contains("Nothing that is ordered has changed"),
        "{said}"
    );
    let other = format!("{PLAIN}{order}").replace("thickness_nm = 400", "thickness_nm = 450");
    let other = desk.put("b.toml", &other);
    let (_, remarks) = desk.sheet(&other, "grower", "b", &["--since", &since]);
    assert!(remarks.contains("same revision"), "{remarks}");
}
