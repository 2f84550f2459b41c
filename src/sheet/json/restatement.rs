//! The document of `restate`.

use super::FORMAT;
use crate::restatement::{Restatement, Value};
use crate::sheet::Stamp;
use serde::Serialize;

#[derive(Serialize)]
struct Document<'a> {
    format: u32,
    stamp: &'a Stamp,
    asked: &'a str,
    statements: Vec<Entry<'a>>,
    notes: &'a [String],
}

#[derive(Serialize)]
struct Entry<'a> {
    name: &'a str,
    value: Option<f64>,
    words: Option<&'a str>,
    unit: Option<&'static str>,
}

/// Every way to say a quantity as one JSON document.
#[must_use]
pub fn restatement(said: &Restatement, asked: &str, stamp: &Stamp) -> String {
    let statements = said.statements.iter().map(|statement| {
        let (value, words, unit) = match &statement.value {
            Value::Number(value, unit) => (Some(*value), None, Some(*unit)),
            Value::Words(words) => (None, Some(words.as_str()), None),
        };
        Entry {
            name: &statement.name,
            value,
            words,
            unit,
        }
    });
    super::text(&Document {
        format: FORMAT,
        stamp,
        asked,
        statements: statements.collect(),
        notes: &said.notes,
    })
}
