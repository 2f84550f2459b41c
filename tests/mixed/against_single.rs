//! How far the single bands are from the mixed ones on the structures that are shipped: the table of
//! `DEVELOPERS.md`. `UPDATE_REFERENCE=1 cargo test --release --test mixed` writes it anew.

use crate::recipe::shipped;
use std::fmt::Write as _;
use std::{env, fs, path::PathBuf};
use stepwell::evaluation::Evaluation;
use stepwell::materials::Parameters;
use stepwell::structure::{self, Bands, Overrides};

const START: &str = "<!-- single against mixed: start -->";
const END: &str = "<!-- single against mixed: end -->";

/// What is compared, with as many decimals as are shown.
const FIGURES: [(&str, usize); 5] = [
    ("first transition, nm", 1),
    ("transparency, 1e18 cm⁻³", 2),
    ("peak TE, cm⁻¹", 0),
    ("peak TM, cm⁻¹", 0),
    ("gain peak, nm", 0),
];

/// The figures of a structure at its working density; `None` where there is no gain.
fn figures(text: &str, bands: Bands) -> [Option<f64>; 5] {
    let parameters = Parameters::shipped();
    let overrides = Overrides {
        bands: Some(bands),
        ..Overrides::default()
    };
    let mut stack = structure::read(text, &parameters, &overrides)
        .expect("a shipped structure is accepted")
        .stack;
    stack.operation.densities_cm3 = vec![stack.operation.working_density_cm3];
    let evaluation = Evaluation::new(&stack, &parameters).expect("levels");
    let run = evaluation.spectrum().expect("an index").runs.remove(0);
    let emission = evaluation.emission();
    [
        Some(emission.first_transition_nm),
        evaluation.transparency_cm3().map(|density| 1e-18 * density),
        run.te.map(|peak| peak.gain_cm),
        run.tm.map(|peak| peak.gain_cm),
        emission.gain_peak_nm,
    ]
}

fn table() -> String {
    let mut text =
        "| structure | figure | single | mixed | single over mixed |\n|---|---|---|---|---|\n"
            .to_owned();
    // Its hundred states take a quarter of a minute to follow.
    for (name, file) in shipped()
        .into_iter()
        .filter(|(name, _)| name != "estuary-bulk")
    {
        let single = figures(&file, Bands::Single);
        let mixed = figures(&file, Bands::Mixed);
        for (((figure, decimals), single), mixed) in FIGURES.into_iter().zip(single).zip(mixed) {
            let shown = |value: Option<f64>| {
                value.map_or_else(|| "none".to_owned(), |value| format!("{value:.decimals$}"))
            };
            let ratio = match (single, mixed) {
                (Some(single), Some(mixed)) => format!("{:.3}", single / mixed),
                _ => String::new(),
            };
            let _ = writeln!(
                text,
                "| {name} | {figure} | {} | {} | {ratio} |",
                shown(single),
                shown(mixed)
            );
        }
    }
    text
}

#[test]
fn the_table_of_single_and_mixed_bands_is_what_comes_out() {
    let path = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("DEVELOPERS.md");
    let text = fs::read_to_string(&path).expect("the notes of developers");
    let (before, rest) = text.split_once(START).expect("where the table starts");
    let (shown, after) = rest.split_once(END).expect("where the table ends");
    let table = table();
    if env::var_os("UPDATE_REFERENCE").is_some() {
        let text = format!("{before}{START}\n{table}{END}{after}");
        fs::write(&path, text).expect("the notes can be written");
        return;
    }
    for (shown, computed) in shown.trim().lines().zip(table.lines()) {
        assert_eq!(
            shown, computed,
            "(UPDATE_REFERENCE=1 writes the table anew)"
        );
    }
    assert_eq!(shown.trim().lines().count(), table.lines().count());
}
