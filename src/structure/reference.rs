//! The key reference of the manual, from the table of keys.

use std::fmt::Write as _;

use super::keys::{FILE, Key, Kind, Table};
use super::number::shown;
use crate::source::one_of;

/// Width of the reference, columns.
const COLUMNS: usize = 78;

/// Every key of the structure file with kind, bounds, default and meaning, as plain text of at
/// most 78 columns.
#[must_use]
pub fn key_reference() -> String {
    let mut text = String::new();
    table(&FILE, &mut text);
    text
}

fn table(of: &'static Table, text: &mut String) {
    let head = match of.path {
        "" => "The file".to_owned(),
        "layers" => "[[layers]]".to_owned(),
        path => format!("[{path}]"),
    };
    let _ = writeln!(text, "{head}");
    wrapped(of.doc, 2, text);
    for key in of.keys {
        entry(key, text);
    }
    for key in of.keys {
        match &key.kind {
            // A group holds rows again: they are explained already.
            Kind::Rows(inner) if std::ptr::eq(*inner, of) => {}
            Kind::Table(inner) | Kind::Named(inner) | Kind::Rows(inner) => {
                text.push('\n');
                table(inner, text);
            }
            _ => {}
        }
    }
}

fn entry(key: &'static Key, text: &mut String) {
    let _ = writeln!(text, "\n  {}", key.name);
    wrapped(key.doc, 6, text);
    let kind = match &key.kind {
        Kind::Text | Kind::Prose => "text in quotes".to_owned(),
        Kind::Word(words) => one_of(words()),
        Kind::Flag => "true or false".to_owned(),
        Kind::Count(lowest, highest) if lowest == highest => lowest.to_string(),
        Kind::Count(lowest, highest) => format!("whole number, {lowest} to {highest}"),
        Kind::Number(magnitude) => {
            let (lowest, highest) = magnitude.possible;
            format!(
                "number, {} to {} {}",
                shown(lowest),
                shown(highest),
                magnitude.unit
            )
        }
        Kind::Texts(most) => format!("list of 1 to {most} texts in quotes"),
        Kind::Numbers(magnitude, fewest, most) => {
            let (lowest, highest) = magnitude.possible;
            let count = if fewest == most {
                format!("{fewest}")
            } else {
                format!("{fewest} to {most}")
            };
            format!(
                "list of {count} numbers, {} to {} {}",
                shown(lowest),
                shown(highest),
                magnitude.unit
            )
        }
        Kind::Table(_) => "table".to_owned(),
        Kind::Named(_) => "tables".to_owned(),
        Kind::Rows(_) => "list of tables".to_owned(),
    };
    wrapped(kind.trim_end(), 6, text);
    if !key.default.is_empty() {
        wrapped(&format!("default: {}", key.default), 6, text);
    }
}

fn wrapped(words: &str, indent: usize, text: &mut String) {
    let mut column = 0;
    for word in words.split_whitespace() {
        let width = word.chars().count();
        if column > 0 && column + 1 + width > COLUMNS {
            text.push('\n');
            column = 0;
        }
        if column == 0 {
            let _ = write!(text, "{:indent$}{word}", "");
            column = indent + width;
        } else {
            let _ = write!(text, " {word}");
            column += 1 + width;
        }
    }
    text.push('\n');
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_reference_names_every_key_and_keeps_its_width() {
        fn names(table: &'static Table, found: &mut Vec<&'static str>) {
            for key in table.keys {
                found.push(key.name);
                match &key.kind {
                    Kind::Rows(inner) if std::ptr::eq(*inner, table) => {}
                    Kind::Table(inner) | Kind::Named(inner) | Kind::Rows(inner) => {
                        names(inner, found);
                    }
                    _ => {}
                }
            }
        }
        let mut all = Vec::new();
        names(&FILE, &mut all);
        let reference = key_reference();
        for name in all {
            assert!(reference.contains(&format!("\n  {name}\n")), "{name}");
        }
        for line in reference.lines() {
            assert!(line.chars().count() <= COLUMNS, "{line}");
        }
    }
}
