//! The page, the document and the table of the command `restate`.

use super::number::{plain, power, significant};
use super::page::{Page, padded};
use crate::restatement::{Restatement, Value};
use crate::source::Colour;

/// Significant digits: beyond what any wafer holds, short of rounding noise.
const DIGITS: usize = 8;

/// Every way to say it, as text of 80 columns.
#[must_use]
pub fn restatement(said: &Restatement, asked: &str, colour: Colour) -> String {
    let mut page = Page::new(colour);
    page.heading(asked);
    let widest = said
        .statements
        .iter()
        .map(|statement| statement.name.chars().count())
        .max()
        .unwrap_or(0);
    for statement in &said.statements {
        let value = match &statement.value {
            Value::Number(value, unit) => format!("{} {unit}", number(*value)),
            Value::Words(words) => words.clone(),
        };
        let lead = padded(&format!("  {}", statement.name), widest + 4);
        if lead.chars().count() + value.chars().count() <= super::page::COLUMNS {
            page.ready(&format!("{lead}{value}"));
        } else {
            page.paragraph(2, &statement.name);
            page.paragraph(4, &value);
        }
    }
    page.gap();
    for note in &said.notes {
        page.paragraph(2, note);
    }
    page.finish()
}

fn number(value: f64) -> String {
    if value != 0.0 && !(1e-3..1e7).contains(&value.abs()) {
        power(value, DIGITS)
    } else {
        plain(significant(value, DIGITS).parse().unwrap_or(value))
    }
}
