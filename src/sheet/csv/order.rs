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

    /// Words, which no spreadsheet takes for a formula.
    pub(in crate::sheet) fn said(text: &str) -> Self {
        Self(Cell::Text(harmless(text)))
    }
}

/// Words as they are, behind an apostrophe where they begin as formulas do.
fn harmless(text: &str) -> String {
    let tidy = crate::sheet::page::tidy(text);
    if tidy
        .trim_start()
        .starts_with(['=', '+', '-', '@', '|', '%'])
    {
        format!("'{tidy}")
    } else {
        tidy
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

#[cfg(test)]
mod tests {
    use super::harmless;

    #[test]
    fn no_words_begin_as_formulas_do() {
        for formula in ["=1+1", "+1", "-1", "@A1", " =cmd", "\t=1", "|x", "%y"] {
            let cell = harmless(formula);
            assert!(
                !cell
                    .trim_start()
                    .starts_with(['=', '+', '-', '@', '|', '%']),
                "{cell}"
            );
        }
        assert_eq!(harmless("Si"), "Si");
        assert_eq!(harmless("In0.53Ga0.47As"), "In0.53Ga0.47As");
    }
}
