//! The tables in `reference/README.md`.

use crate::{Compared, folder};
use libtest_mimic::Failed;
use std::fmt::Write as _;
use std::{env, fs};

const START: &str = "<!-- computed: start -->";
const END: &str = "<!-- computed: end -->";

/// The tables of rows and of misses.
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
