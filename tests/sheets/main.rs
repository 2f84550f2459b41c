//! Design sheets as their readers meet them: what stands on the page stands in the record, the
//! grower is not told what the device is for, and a sheet edited by hand is found out.

mod golden;
mod hostile;
mod kept;
mod page;
mod record;
mod secrets;

use assert_cmd::Command;
use serde_json::Value;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Output;

/// Two wells of a ternary that are quick to solve, without an order.
const PLAIN: &str = r#"
format = 1
title = "Estuary gauge laser"
[substrate]
material = "InP"
[materials.gainwell]
alloy = "InGaAs"
compressive_percent = 0.6
[materials.guide]
formula = "Ga0.15In0.85As0.33P0.67"
[[layers]]
role = "confinement"
material = "InP"
grade_to = "guide"
thickness_nm = 40
[[layers]]
role = "barrier"
material = "guide"
thickness_nm = 10
[[layers]]
repeat = 2
layers = [
  { role = "well", material = "gainwell", thickness_nm = 6 },
  { role = "barrier", material = "guide", thickness_nm = 10 },
]
[[layers]]
role = "cladding"
material = "InP"
thickness_nm = 400
acceptors_cm3 = 1e18
dopant = "Zn"
[operation]
temperature_c = 85
densities_cm3 = [2.25e18, 3.75e18]
[model]
bands = "single"
"#;

fn stepwell(words: &[&str]) -> Output {
    let mut command = Command::new(env!("CARGO_BIN_EXE_stepwell"));
    command.args(words).output().expect("the program runs")
}

fn text(bytes: &[u8]) -> &str {
    std::str::from_utf8(bytes).expect("UTF-8")
}

/// A folder for one sheet and what it is made from.
struct Desk {
    folder: tempfile::TempDir,
}

impl Desk {
    fn new() -> Self {
        Self {
            folder: tempfile::tempdir().expect("a folder"),
        }
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    fn shown(&self, name: &str) -> String {
        self.path(name).to_str().expect("UTF-8").to_owned()
    }

    fn put(&self, name: &str, content: &str) -> String {
        fs::write(self.path(name), content).expect("written");
        self.shown(name)
    }

    fn read(&self, name: &str) -> String {
        fs::read_to_string(self.path(name)).unwrap_or_else(|error| panic!("{name}: {error}"))
    }

    fn record(&self, name: &str) -> Value {
        serde_json::from_str(&self.read(name)).expect("JSON")
    }

    /// Makes a sheet, which must go well; returns what was said on both outputs.
    fn sheet(&self, structure: &str, reader: &str, out: &str, more: &[&str]) -> (String, String) {
        let out = self.shown(out);
        let mut words = vec!["sheet", structure, "--for", reader, "--out", &out];
        words.extend(more);
        let output = stepwell(&words);
        let (said, remarks) = (text(&output.stdout), text(&output.stderr));
        assert_eq!(output.status.code(), Some(0), "{words:?}\n{remarks}");
        (said.to_owned(), remarks.to_owned())
    }
}

/// The shipped structures with an order, and one that asks for everything.
fn structures(desk: &Desk) -> Vec<String> {
    vec![
        "structures/estuary-1310.toml".to_owned(),
        "structures/estuary-980.toml".to_owned(),
        "structures/every-key.toml".to_owned(),
        desk.put("plain.toml", PLAIN),
    ]
}

fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder)
        .expect("a folder")
        .map(|entry| entry.expect("an entry").file_name())
        .map(|name| name.to_str().expect("UTF-8").to_owned())
        .collect();
    names.sort();
    names
}
