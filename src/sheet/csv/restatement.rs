//! The table of `restate`.

use super::{Cell, CsvTable};
use crate::restatement::{Restatement, Value};

/// Every way to say a quantity.
#[must_use]
pub fn restatement(said: &Restatement) -> Vec<CsvTable> {
    let mut table = CsvTable::new("restatement", &["name", "value", "unit"]);
    table.rows = said
        .statements
        .iter()
        .map(|statement| match &statement.value {
            Value::Number(value, unit) => row![statement.name.as_str(), *value, *unit],
            Value::Words(words) => row![statement.name.as_str(), words.as_str(), ""],
        })
        .collect();
    vec![table]
}
