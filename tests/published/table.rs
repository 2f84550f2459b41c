//! The tables in `reference/README.md`.

use crate::{Compared, folder};
use libtest_mimic::Failed;
use std::fmt::Write as _;
use std::{env, fs};

const START: &str = "<!-- computed: start -->";
const END: &str = "<!-- computed: end -->";

/// What a problem solved with mixed bands adds to the name of the same one with single bands.
const MIXED: &str = ", mixed bands";

/// Rows asked of both kinds of bands, side by side.
fn of_both_bands(rows: &[Compared]) -> String {
    let mut text =
        "| file | row | published | single | mixed |\n|---|---|---|---|---|\n".to_owned();
    for mixed in rows.iter().filter(|row| row.title.contains(MIXED)) {
        let title = mixed.title.replacen(MIXED, "", 1);
        let single = rows
            .iter()
            .find(|row| row.file == mixed.file && row.title == title);
        if let Some(single) = single {
            let shown = |row: &Compared| {
                let mark = if row.verdict.met { "" } else { " (missed)" };
                format!("{}{mark}", row.verdict.computed)
            };
            let _ = writeln!(
                text,
                "| {} | {title} | {} | {} | {} |",
                mixed.file,
                mixed.verdict.published,
                shown(single),
                shown(mixed)
            );
        }
    }
    text
}

/// The tables of rows, of misses, and of single against mixed bands.
pub(crate) fn of(rows: &[Compared]) -> String {
    let mut text = String::new();
    let misses: Vec<&Compared> = rows.iter().filter(|row| !row.verdict.met).collect();
    let _ = writeln!(
        text,
        "{} rows, {} met, {} missed.\n\n### Missed\n",
        rows.len(),
        rows.len() - misses.len(),
        misses.len()
    );
    let _ = writeln!(text, "| file | row | published | computed | why |");
    let _ = writeln!(text, "|---|---|---|---|---|");
    for row in misses {
        let verdict = &row.verdict;
        let _ = writeln!(
            text,
            "| {} | {} | {} | {} | {} |",
            row.file,
            row.title,
            verdict.published,
            verdict.computed,
            verdict.expected_miss.as_deref().unwrap_or("not known yet")
        );
    }
    let _ = writeln!(
        text,
        "\n### Single bands against mixed ones\n\n{}",
        of_both_bands(rows).trim_end()
    );
    let _ = writeln!(text, "\n### Every row\n");
    let _ = writeln!(text, "| file | row | published | computed | |");
    let _ = writeln!(text, "|---|---|---|---|---|");
    for row in rows {
        let verdict = &row.verdict;
        let _ = writeln!(
            text,
            "| {} | {} | {} | {} | {} |",
            row.file,
            row.title,
            verdict.published,
            verdict.computed,
            if verdict.met { "met" } else { "missed" }
        );
    }
    text
}

/// Whether the README holds exactly these tables; writes them where that is asked for.
pub(crate) fn is_shown(shown: &str) -> Result<(), Failed> {
    let path = folder().join("README.md");
    let text = fs::read_to_string(&path)?;
    let outside = || -> Option<(&str, &str, &str)> {
        let (before, rest) = text.split_once(START)?;
        let (inside, after) = rest.split_once(END)?;
        Some((before, inside.trim(), after))
    };
    let (before, inside, after) =
        outside().ok_or_else(|| format!("README.md has no {START} … {END}"))?;
    if inside == shown.trim() {
        return Ok(());
    }
    if env::var_os("UPDATE_REFERENCE").is_some() {
        let text = format!("{before}{START}\n{}\n{END}{after}", shown.trim());
        return Ok(fs::write(&path, text)?);
    }
    let stale = shown
        .lines()
        .find(|line| !inside.lines().any(|it| it == *line))
        .unwrap_or("a row that is no longer there");
    Err(
        format!("reference/README.md does not show: {stale}\n(UPDATE_REFERENCE=1 writes it)")
            .into(),
    )
}
