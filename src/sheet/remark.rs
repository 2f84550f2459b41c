//! What goes beside a result, or in its place.

use super::page::{COLUMNS, bold, wrapped};
use crate::source::Colour;
use std::fmt::Write as _;

/// A remark with what to do about it, as lines of at most 80 columns.
///
/// # Arguments
///
/// * `place` – name of the file and line where it belongs, if to one place
#[must_use]
pub fn remark(
    message: &str,
    advice: Option<&str>,
    place: Option<(&str, usize)>,
    colour: Colour,
) -> String {
    let mut words = message.to_owned();
    if let Some((name, line)) = place {
        let _ = write!(words, " ({name}, line {line})");
    }
    entry("remark: ", &words, advice, colour)
}

/// What went wrong with what to do about it, as lines of at most 80 columns.
#[must_use]
pub fn complaint(message: &str, remedy: Option<&str>, colour: Colour) -> String {
    entry("error: ", message, remedy, colour)
}

fn entry(lead: &str, words: &str, advice: Option<&str>, colour: Colour) -> String {
    let margin = lead.len();
    let mut lines = wrapped(words, COLUMNS - margin);
    if let Some(advice) = advice {
        let marks = std::iter::once("→ ").chain(std::iter::repeat("  "));
        let words = wrapped(advice, COLUMNS - margin - 2);
        lines.extend(marks.zip(words).map(|(mark, line)| format!("{mark}{line}")));
    }
    let mut text = bold(lead, colour);
    text.push_str(&lines.join(&format!("\n{}", " ".repeat(margin))));
    text.push('\n');
    text
}
