//! `--figure` through the program: a well-formed SVG document, SVG only, and no file overwritten.

use std::fs;
use std::path::Path;

use assert_cmd::Command;

fn stepwell(arguments: &[&str]) -> Command {
    let mut command = Command::cargo_bin("stepwell").expect("the program is built");
    command.args(arguments);
    command
}

/// Reads a document as XML with elements, attributes and text only: every start has its end, every
/// attribute its quotes, every ampersand its entity.
fn assert_well_formed(document: &str) {
    let mut open: Vec<&str> = Vec::new();
    let mut rest = document;
    let mut elements = 0;
    while let Some(start) = rest.find('<') {
        assert_plain(&rest[..start]);
        let end = rest[start..].find('>').expect("a tag ends") + start;
        let tag = &rest[start + 1..end];
        rest = &rest[end + 1..];
        if let Some(name) = tag.strip_prefix('/') {
            assert_eq!(open.pop(), Some(name));
            continue;
        }
        let (tag, is_whole) = tag
            .strip_suffix('/')
            .map_or((tag, false), |tag| (tag, true));
        let (name, attributes) = tag.split_once(' ').unwrap_or((tag, ""));
        assert!(
            name.chars().all(|letter| letter.is_ascii_alphabetic()),
            "{name}"
        );
        let mut quoted = attributes.split('"');
        while let Some(head) = quoted.next().filter(|head| !head.trim().is_empty()) {
            assert!(head.trim().ends_with('='), "{attributes}");
            assert_plain(quoted.next().expect("a value in quotes"));
        }
        elements += 1;
        if !is_whole {
            open.push(name);
        }
    }
    assert_plain(rest);
    assert!(open.is_empty(), "{open:?}");
    assert!(elements > 50, "{elements} elements");
    assert!(document.starts_with("<svg xmlns=\"http://www.w3.org/2000/svg\""));
}

fn assert_plain(text: &str) {
    assert!(!text.contains('>'), "{text}");
    for after in text.split('&').skip(1) {
        let entity = after.split_once(';').map(|(entity, _)| entity);
        assert!(
            matches!(entity, Some("amp" | "lt" | "gt" | "quot" | "#39")),
            "&{after}"
        );
    }
}

#[test]
fn figures_are_well_formed_and_the_same_every_time() {
    let folder = tempfile::tempdir().expect("a folder");
    for command in ["levels", "spectrum"] {
        let write = |name: &str| {
            let path = folder.path().join(format!("{command}-{name}.svg"));
            let shown = path.to_str().expect("a path in UTF-8");
            let file = "structures/estuary-980.toml";
            stepwell(&[
                command, file, "--bands", "single", "--quiet", "--figure", shown,
            ])
            .assert()
            .success();
            fs::read_to_string(&path).expect("a figure in UTF-8")
        };
        let document = write("first");
        assert_well_formed(&document);
        assert!(document.contains("Estuary 980"));
        assert_eq!(document, write("second"));
    }
}

#[test]
fn a_title_full_of_markup_stays_a_title() {
    let folder = tempfile::tempdir().expect("a folder");
    let text = fs::read_to_string("structures/estuary-980.toml").expect("a structure");
    let hostile = text.replace(
        "title = \"Estuary 980\"",
        "title = \"</svg><script>alert(1)</script> & 'x'\"",
    );
    assert_ne!(text, hostile);
    let file = folder.path().join("hostile.toml");
    fs::write(&file, hostile).expect("written");
    let figure = folder.path().join("hostile.svg");
    stepwell(&["levels", "--bands", "single", "--quiet"])
        .arg(&file)
        .arg("--figure")
        .arg(&figure)
        .assert()
        .success();
    let document = fs::read_to_string(&figure).expect("a figure");
    assert_well_formed(&document);
    assert!(!document.contains("<script"));
}

#[test]
fn an_existing_figure_is_kept_without_force() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("mine.svg");
    fs::write(&path, "mine").expect("written");
    let shown = path.to_str().expect("a path in UTF-8");
    let file = "structures/estuary-980.toml";
    let arguments = ["levels", file, "--bands", "single", "--figure", shown];
    let refused = stepwell(&arguments).assert().code(2);
    let error = String::from_utf8_lossy(&refused.get_output().stderr).into_owned();
    assert!(error.contains("--force"), "{error}");
    assert_eq!(fs::read_to_string(&path).expect("kept"), "mine");
    stepwell(&arguments).arg("--force").assert().success();
    assert_well_formed(&fs::read_to_string(&path).expect("replaced"));
}

#[test]
fn other_kinds_of_picture_are_refused_before_any_work() {
    for (given, advised) in [
        ("bands.png", "--figure bands.svg"),
        ("bands", "--figure bands.svg"),
        ("bands.svg.pdf", "--figure bands.svg.svg"),
    ] {
        let refused = stepwell(&["levels", "no such file.toml", "--figure", given])
            .assert()
            .code(2);
        let error = String::from_utf8_lossy(&refused.get_output().stderr).into_owned();
        assert!(error.contains(".svg") && error.contains(advised), "{error}");
        assert!(!Path::new(given).exists());
    }
}

/// What is drawn is also in the tables: a folder gets each of them.
#[test]
fn tables_hold_what_is_drawn() {
    let folder = tempfile::tempdir().expect("a folder");
    let shown = format!("{}/", folder.path().display());
    let file = "structures/estuary-980.toml";
    for (command, tables) in [
        (
            "levels",
            &["edges", "envelopes", "levels", "transitions", "dispersion"][..],
        ),
        (
            "spectrum",
            &["spectrum", "densities", "absorption", "landmarks"][..],
        ),
    ] {
        stepwell(&[
            command, file, "--bands", "mixed", "--quiet", "--csv", &shown,
        ])
        .assert()
        .success();
        for table in tables {
            let path = folder.path().join(format!("{table}.csv"));
            let text = fs::read_to_string(&path).unwrap_or_else(|error| panic!("{table}: {error}"));
            assert!(text.lines().count() > 4, "{table}: {text}");
        }
    }
}
