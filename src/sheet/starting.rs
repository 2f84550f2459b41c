//! The list of structures to start from.

use super::page::Page;
use super::table::{Table, words};
use crate::source::Colour;

/// Names with what each is for, as text of 80 columns.
#[must_use]
pub fn starting_structures(entries: &[(&str, String)], colour: Colour) -> String {
    let mut page = Page::new(colour);
    page.heading("Structures to start from");
    let mut table = Table::new([words("name"), words("what it is")]);
    for (name, purpose) in entries {
        table.row([(*name).to_owned(), purpose.clone()]);
    }
    page.table(&table);
    page.heading("Next");
    page.paragraph(2, "stepwell new NAME > my.toml");
    page.finish()
}
