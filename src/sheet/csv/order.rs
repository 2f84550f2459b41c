//! Cells and rows of the tables that go to other houses.

use super::{Cell, CsvTable};

/// A cell of such a table.
#[derive(Clone, Debug, PartialEq)]
pub(in crate::sheet) struct SheetCell(Cell);

impl SheetCell {
    /// A number, blank where there is none.
    pub(in crate::sheet) fn number(value: Option<f64>) -> Self {
        Self(value.map_or(Cell::Blank, Cell::Number))
    }

    /// Words.
    pub(in crate::sheet) fn said(text: &str) -> Self {
        Self(Cell::Text(text.to_owned()))
    }
}

impl CsvTable {
    /// A table without rows.
    pub(in crate::sheet) fn of_sheet(name: &'static str, heads: &[&str]) -> Self {
        Self::new(name, heads)
    }

    /// One row more.
    pub(in crate::sheet) fn push(&mut self, row: Vec<SheetCell>) {
        self.rows.push(row.into_iter().map(|cell| cell.0).collect());
    }
}
