//! Every file in `structures/` is accepted and survives being written and read again; every case
//! in `tests/rejected/` is refused with exactly the messages written in it under the faults.
//!
//! A case states a message in a comment below the faulty line, its `^` under the first character
//! of the fault:
//!
//! ```toml
//! thickness_nm = 80000
//! #              ^ a well of 80000 nm: possible is 0.2 to 500 nm
//! ```
//!
//! A fault in the first or second column is marked by `#^`. Cases of one file are parted by `+++`.

use std::fs;
use std::path::{Path, PathBuf};

use libtest_mimic::{Arguments, Failed, Trial};
use stepwell::materials::Parameters;
use stepwell::source::{Colour, Diagnostic, Place, report};
use stepwell::structure::{self, Overrides, Reading};

fn main() {
    let trials = accepted().chain(rejected()).collect();
    libtest_mimic::run(&Arguments::from_args(), trials).exit();
}

fn toml_files(folder: &str) -> Vec<PathBuf> {
    let mut files: Vec<_> = fs::read_dir(folder)
        .unwrap_or_else(|error| panic!("{folder}: {error}"))
        .map(|entry| entry.expect("entry").path())
        .filter(|path| {
            path.extension()
                .is_some_and(|extension| extension == "toml")
        })
        .collect();
    files.sort();
    assert!(!files.is_empty(), "{folder} holds no case");
    files
}

fn read(text: &str) -> Result<Reading, Vec<Diagnostic>> {
    structure::read(text, &Parameters::shipped(), &Overrides::default())
}

fn accepted() -> impl Iterator<Item = Trial> {
    toml_files("structures").into_iter().map(|path| {
        Trial::test(format!("accepts {}", path.display()), move || {
            let text = fs::read_to_string(&path)?;
            let reading = read(&text).map_err(|faults| shown(&path, &text, &faults))?;
            let written = structure::write(&reading.stack);
            let again = read(&written).map_err(|faults| shown(&path, &written, &faults))?;
            if again.stack != reading.stack {
                return Err(format!(
                    "written and read again, it is another:\n{written}\n{:#?}\n{:#?}",
                    reading.stack, again.stack
                )
                .into());
            }
            if structure::write(&again.stack) == written {
                Ok(())
            } else {
                Err("written twice, it differs".into())
            }
        })
    })
}

fn rejected() -> impl Iterator<Item = Trial> {
    toml_files("tests/rejected").into_iter().flat_map(|path| {
        let text = fs::read_to_string(&path).expect("case file");
        let cases: Vec<String> = text.split("\n+++\n").map(str::to_owned).collect();
        cases.into_iter().enumerate().map(move |(number, case)| {
            let path = path.clone();
            let name = format!("rejects {} #{}", path.display(), number + 1);
            Trial::test(name, move || is_refused(&path, &case))
        })
    })
}

/// Place and message of every fault that a case states, in the order of the text.
fn stated(case: &str) -> Vec<(Place, String)> {
    let mut expected = Vec::new();
    let mut faulty_line = 0;
    for (number, line) in case.lines().enumerate() {
        let mark = line
            .strip_prefix('#')
            .and_then(|rest| rest.trim_start().strip_prefix("^ "));
        match mark {
            None => faulty_line = number + 1,
            Some(message) => {
                let place = Place {
                    line: faulty_line,
                    column: 1 + line.find('^').expect("just seen"),
                };
                expected.push((place, message.to_owned()));
            }
        }
    }
    expected
}

fn is_refused(path: &Path, case: &str) -> Result<(), Failed> {
    let mut expected = stated(case);
    if expected.is_empty() {
        return Err("the case states no `#^ message`".into());
    }
    let Err(faults) = read(case) else {
        return Err("the file was accepted".into());
    };
    let mut got: Vec<(Place, String)> = faults
        .iter()
        .map(|fault| {
            let Place { line, column } = fault.place(case);
            // The first column is taken by the `#` of the mark.
            let column = column.max(2);
            (Place { line, column }, fault.message.clone())
        })
        .collect();
    expected.sort();
    got.sort();
    if got != expected {
        let difference = format!("expected {expected:#?}\ngot {got:#?}\n");
        return Err((difference + shown(path, case, &faults).message().unwrap_or_default()).into());
    }
    match faults.iter().find(|fault| fault.help.is_none()) {
        Some(fault) => Err(format!("no advice with: {}", fault.message).into()),
        None => Ok(()),
    }
}

fn shown(path: &Path, text: &str, faults: &[Diagnostic]) -> Failed {
    report(faults, &path.display().to_string(), text, Colour::Never).into()
}
