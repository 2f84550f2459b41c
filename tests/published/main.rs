//! The program against published numbers: one trial for each row of the files in `reference/`.
//!
//! A file states its citation, how its numbers are known and why its tolerances are what they are;
//! its problems state what is solved, and each problem holds the rows that are compared. A row that
//! the program is known to miss says why (`expected_miss`) and fails once it is met, so that the
//! list of misses stays true. The table in `reference/README.md` is compared with what comes out;
//! `UPDATE_REFERENCE=1 cargo test --release --test published` writes it anew.

mod bands;
mod judgement;
mod optics;
mod stacks;
mod strain;
mod table;
mod valence;
mod wafer;

use judgement::{Check, Verdict};
use libtest_mimic::{Arguments, Trial};
use serde::Deserialize;
use std::{fs, path::PathBuf};

/// One file of `reference/`.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Reference {
    citation: String,
    known: String,
    tolerance_reason: String,
    floor: String,
    #[serde(default)]
    constants: Vec<bands::Constants>,
    #[serde(default)]
    walls: Vec<bands::Walls>,
    #[serde(default)]
    fermi_integral: Vec<bands::FermiIntegral>,
    #[serde(default)]
    subband: Vec<bands::SubbandProblem>,
    #[serde(default)]
    bulk_bands: Vec<bands::BulkBandsProblem>,
    #[serde(default)]
    stack: Vec<stacks::StackProblem>,
    #[serde(default)]
    pair: Vec<optics::PairProblem>,
    #[serde(default)]
    bulk: Vec<optics::BulkProblem>,
    #[serde(default)]
    valence_walls: Vec<valence::ValenceWalls>,
    #[serde(default)]
    dipole: Vec<valence::DipoleProblem>,
    #[serde(default)]
    film: Vec<strain::FilmProblem>,
    #[serde(default)]
    balance: Vec<strain::BalanceProblem>,
    #[serde(default)]
    bragg: Vec<wafer::BraggProblem>,
    #[serde(default)]
    diffraction: Vec<wafer::DiffractionProblem>,
    /// Problems of this file named in the order in which a quantity must rise.
    #[serde(default)]
    order: Vec<Order>,
}

/// A ranking: the quantity rises from each problem to the next.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Order {
    quantity: String,
    rising: Vec<String>,
    expected_miss: Option<String>,
}

/// What the program answers, or why it cannot.
type Answer = Result<f64, String>;

/// One kind of problem: it has a name, rows, and an answer to each.
trait Problem {
    fn name(&self) -> &str;
    fn checks(&self) -> &[Check];
    fn answer(&self, check: &Check) -> Answer;
}

/// A row that has been compared.
struct Compared {
    file: String,
    title: String,
    verdict: Verdict,
}

fn main() {
    let arguments = Arguments::from_args();
    let mut rows = Vec::new();
    let mut trials = Vec::new();
    for (name, text) in files() {
        let head: toml::Table = text.parse().expect("a reference file is TOML");
        // The material data have their own trials, which run every row of these files.
        if head.get("floor").and_then(toml::Value::as_str) == Some("materials") {
            continue;
        }
        let reference: Reference =
            toml::from_str(&text).unwrap_or_else(|error| panic!("{name}: {error}"));
        let compared = compare(&name, &reference);
        assert!(!compared.is_empty(), "{name} holds no row");
        rows.extend(compared);
    }
    assert!(!rows.is_empty(), "no reference file");
    let shown = table::of(&rows);
    trials.push(Trial::test("README.md shows what is computed", move || {
        table::is_shown(&shown)
    }));
    trials.extend(rows.into_iter().map(|row| {
        let title = format!("{}: {}", row.file, row.title);
        Trial::test(title, move || row.verdict.outcome())
    }));
    libtest_mimic::run(&arguments, trials).exit();
}

fn folder() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("reference")
}

fn files() -> Vec<(String, String)> {
    let mut files: Vec<(String, String)> = fs::read_dir(folder())
        .expect("the folder of references")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|it| it == "toml"))
        .map(|path| {
            let name = path.file_stem().expect("a name").to_string_lossy();
            (name.into_owned(), fs::read_to_string(&path).expect("text"))
        })
        .collect();
    files.sort();
    files
}

fn each<P: Problem>(problems: &[P]) -> impl Iterator<Item = &dyn Problem> {
    problems.iter().map(|problem| problem as &dyn Problem)
}

fn compare(file: &str, reference: &Reference) -> Vec<Compared> {
    for statement in [
        &reference.citation,
        &reference.known,
        &reference.tolerance_reason,
        &reference.floor,
    ] {
        assert!(!statement.is_empty(), "{file} leaves a statement empty");
    }
    let problems: Vec<&dyn Problem> = each(&reference.constants)
        .chain(each(&reference.walls))
        .chain(each(&reference.fermi_integral))
        .chain(each(&reference.subband))
        .chain(each(&reference.bulk_bands))
        .chain(each(&reference.stack))
        .chain(each(&reference.pair))
        .chain(each(&reference.bulk))
        .chain(each(&reference.valence_walls))
        .chain(each(&reference.dipole))
        .chain(each(&reference.film))
        .chain(each(&reference.balance))
        .chain(each(&reference.bragg))
        .chain(each(&reference.diffraction))
        .collect();
    let mut compared = Vec::new();
    for problem in &problems {
        assert!(
            !problem.checks().is_empty(),
            "{file}: {} holds no row",
            problem.name()
        );
        for check in problem.checks() {
            compared.push(Compared {
                file: file.to_owned(),
                title: format!("{}, {}", problem.name(), check.title()),
                verdict: Verdict::of(check, problem.answer(check)),
            });
        }
    }
    for order in &reference.order {
        compared.push(Compared {
            file: file.to_owned(),
            title: format!("{} rises: {}", order.quantity, order.rising.join(" < ")),
            verdict: ranked(&problems, order),
        });
    }
    compared
}

fn ranked(problems: &[&dyn Problem], order: &Order) -> Verdict {
    let check = Check::asking(&order.quantity);
    let values: Result<Vec<f64>, String> = order
        .rising
        .iter()
        .map(|name| {
            problems
                .iter()
                .find(|problem| problem.name() == name)
                .ok_or_else(|| format!("no problem is named {name}"))?
                .answer(&check)
        })
        .collect();
    Verdict::of_order(values, order.expected_miss.as_deref())
}
