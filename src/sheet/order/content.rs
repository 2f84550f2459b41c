//! What stands on a sheet, in reading order: headings, pairs, lists, tables, figures. Pages of every
//! kind are made of it.
//!
//! A number is a place in the record with so many decimals: it cannot differ from it.

mod grower;
mod house;

use super::document::Document;
use crate::sheet::number::{fixed, plain, typeset};
use crate::sheet::page::tidy;
use serde::Serialize;
use serde_json::Value;

/// A sheet as it is read.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub(super) struct Content {
    /// Names the page.
    pub(super) name: String,
    /// Which copy it is.
    pub(super) copy: String,
    /// In reading order.
    pub(super) sections: Vec<Section>,
}

/// A heading with what stands under it.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub(super) struct Section {
    pub(super) heading: String,
    pub(super) blocks: Vec<Block>,
}

/// Something under a heading.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "snake_case")]
pub(super) enum Block {
    /// Words.
    Paragraph(Line),
    /// Names with what there is to say about them.
    Pairs(Vec<(String, Vec<Line>)>),
    /// A list under its own name.
    List {
        name: Line,
        items: Vec<Line>,
        /// Whether the order of the items says something.
        is_ranked: bool,
    },
    /// A table.
    Table(Table),
    /// A figure of the sheet, by its number.
    Figure(usize),
}

/// A table with its heads.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub(super) struct Table {
    pub(super) caption: Line,
    pub(super) heads: Vec<&'static str>,
    /// Parts of the width that the columns take.
    pub(super) widths: Vec<u32>,
    pub(super) rows: Vec<Row>,
}

/// A row of a table.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "snake_case")]
pub(super) enum Row {
    /// One cell a column, each of some lines; the first is the head of the row.
    Cells {
        cells: Vec<Vec<Line>>,
        /// Whether it differs from an earlier revision.
        is_changed: bool,
    },
    /// Words across the table.
    Banner(Line),
}

/// Pieces of text on one line.
pub(super) type Line = Vec<Span>;

/// A piece of text.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "snake_case")]
pub(super) enum Span {
    /// Words of the program.
    Words(String),
    /// Words of the user.
    Said(String),
    /// A number of the record.
    Number {
        /// Where it stands.
        at: String,
        /// Every digit of it.
        exact: String,
        /// As it is printed.
        text: String,
    },
    /// Common practice, not said by the file.
    Practice,
    /// Not there, and asked for.
    Asked,
    /// Not there, and left blank.
    Blank,
}

/// How a number is printed.
#[derive(Clone, Copy, Debug)]
pub(super) enum Digits {
    /// So many decimals.
    Fixed(usize),
    /// As a person would write it.
    Plain,
    /// Mantissa and power of ten, so many digits.
    Power(usize),
}

/// Everything of the sheet.
pub(super) fn content(document: &Document) -> Content {
    let mut sections = grower::sections(document);
    if document.map_at("/house").is_some() {
        house::add(document, &mut sections);
    }
    sections.push(grower::stamp(document));
    let reader = capitalised(document.audience().word());
    Content {
        name: tidy(&document.name()),
        copy: match document.text_at("/order/status/value") {
            "" => format!("{reader}’s copy"),
            status => format!("{reader}’s copy · {status}"),
        },
        sections,
    }
}

fn capitalised(word: &str) -> String {
    let mut letters = word.chars();
    letters.next().map_or(String::new(), |first| {
        first.to_uppercase().chain(letters).collect()
    })
}

pub(super) fn words(text: impl Into<String>) -> Span {
    Span::Words(text.into())
}

/// Words of the user without what turns the direction of writing.
pub(super) fn said(text: &str) -> Span {
    Span::Said(tidy(text))
}

impl Document {
    /// The number at a place; blank where there is none.
    pub(super) fn shown(&self, at: impl Into<String>, digits: Digits) -> Span {
        let at = at.into();
        let Some(number) = self.value.pointer(&at).filter(|it| it.is_number()) else {
            return Span::Blank;
        };
        let value = number.as_f64().unwrap_or(f64::NAN);
        let text = match digits {
            Digits::Fixed(decimals) => fixed(value, decimals),
            Digits::Plain => plain(value),
            Digits::Power(digits) => {
                let text = typeset(value, digits);
                // A table reads better where every density has its mantissa.
                if text.starts_with("10") {
                    format!("1×{text}")
                } else {
                    text
                }
            }
        };
        Span::Number {
            exact: number.to_string(),
            at,
            // A hyphen at the head of a number is a minus.
            text: text.replace('-', "−"),
        }
    }

    /// The mark of a field that is common practice.
    pub(super) fn practice(&self, path: &str) -> impl Iterator<Item = Span> + use<> {
        let is_practice = self.text_at(&format!("/order/{path}/origin")) == "common practice";
        let mark = is_practice.then(|| [words(" "), Span::Practice]);
        mark.into_iter().flatten()
    }

    /// A field of the order with its unit, marked where the file does not say it (lists are marked
    /// at their names); `None` where an order does without it.
    pub(super) fn field(&self, path: &str, unit: &str) -> Option<Vec<Line>> {
        let at = format!("/order/{path}");
        let origin = self.text_at(&format!("{at}/origin"));
        let mark = || self.practice(path);
        let unit = if unit.is_empty() {
            String::new()
        } else {
            format!(" {unit}")
        };
        match self.value.pointer(&format!("{at}/value")) {
            Some(Value::String(text)) => {
                let line = std::iter::once(said(text)).chain(mark());
                Some(vec![line.collect()])
            }
            Some(Value::Number(number)) => {
                let value = number.as_f64().unwrap_or(f64::NAN);
                let digits = if value.abs() >= 1e6 {
                    Digits::Power(6)
                } else {
                    Digits::Plain
                };
                let number = self.shown(format!("{at}/value"), digits);
                let line = [number, words(unit)].into_iter().chain(mark());
                Some(vec![line.collect()])
            }
            Some(Value::Array(items)) => {
                let items = items.iter().filter_map(Value::as_str);
                Some(items.map(|item| vec![said(item)]).collect())
            }
            _ if origin == "asked for" => Some(vec![vec![Span::Asked]]),
            _ => None,
        }
    }
}
