//! Remarks beside a result.

use super::page::{COLUMNS, bold, wrapped};
use crate::source::Colour;

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
        words.push_str(&format!(" ({name}, line {line})"));
    }
    let mut text = String::new();
    let lead = "remark: ";
    for (place, line) in wrapped(&words, COLUMNS - lead.len()).iter().enumerate() {
        let margin = if place == 0 { bold(lead, colour) } else { " ".repeat(lead.len()) };
        text.push_str(&format!("{margin}{line}\n"));
    }
    for (place, line) in advice
        .map(|advice| wrapped(advice, COLUMNS - lead.len() - 2))
        .into_iter()
        .flatten()
        .enumerate()
    {
        let mark = if place == 0 { "→ " } else { "  " };
        text.push_str(&format!("{}{mark}{line}\n", " ".repeat(lead.len())));
    }
    text
}
