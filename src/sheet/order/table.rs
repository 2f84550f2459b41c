//! The layer table of a sheet as comma-separated values.

use super::document::Document;
use crate::sheet::csv::{CsvTable, SheetCell};
use serde_json::Value;

const HEADS: [&str; 21] = [
    "number",
    "role",
    "end",
    "formula",
    "al",
    "ga",
    "in",
    "p",
    "as",
    "sb",
    "thickness_nm",
    "thickness_tolerance_nm",
    "strain_percent",
    "strain",
    "relaxed_mismatch_ppm",
    "perpendicular_mismatch_ppm",
    "gap_nm",
    "conduction",
    "dopant",
    "density_cm3",
    "period",
];

/// A line that is one cell in any spreadsheet: nothing in it separates or quotes, and behind its `#`
/// nothing can begin as a formula does.
fn of_one_cell(line: &str) -> String {
    line.replace([',', ';', '"', '\'', '\t', '|'], "")
}

impl Document {
    /// The layers from the substrate up; a graded layer takes two rows, one for each end.
    ///
    /// The first line, behind `#`, says what the numbers hang on. Words of the user that a
    /// spreadsheet would take for a formula are kept from it by an apostrophe.
    #[must_use]
    pub fn layers_csv(&self) -> String {
        let mut table = CsvTable::of_sheet("layers", &HEADS);
        for index in 0..self.list_at("/layers").len() {
            let at = format!("/layers/{index}");
            let upper = format!("{at}/grade_to");
            if self.map_at(&upper).is_some() {
                table.push(self.layer_cells(&at, &at, "lower"));
                table.push(self.layer_cells(&at, &upper, "upper"));
            } else {
                table.push(self.layer_cells(&at, &at, "both"));
            }
        }
        let stamp = format!(
            "{} / {} / gaps and strains and mismatches at {} K / structure sha256 {} / parameters sha256 {}",
            self.name(),
            self.text_at("/stamp/program"),
            self.number_at("/targets/pl_temperature_k")
                .unwrap_or(f64::NAN),
            self.text_at("/stamp/structure_sha256"),
            self.text_at("/stamp/parameters_sha256"),
        );
        table.text_under(&of_one_cell(&stamp))
    }

    fn layer_cells(&self, layer: &str, end: &str, word: &str) -> Vec<SheetCell> {
        let number =
            |at: &str, key: &str| SheetCell::number(self.number_at(&format!("{at}/{key}")));
        let said = |at: &str, key: &str| SheetCell::said(self.text_at(&format!("{at}/{key}")));
        let fractions = self.map_at(&format!("{end}/composition"));
        let fraction = |symbol: &str| {
            let found = fractions.map(|it| it.get(symbol).and_then(Value::as_f64).unwrap_or(0.0));
            SheetCell::number(found)
        };
        let whole = |key: &str| self.number_at(&format!("{layer}/{key}")).unwrap_or(0.0);
        let period = if self.map_at(&format!("{layer}/period")).is_some() {
            format!("{} of {}", whole("period/place"), whole("period/of"))
        } else {
            String::new()
        };
        vec![
            number(layer, "number"),
            said(layer, "role"),
            SheetCell::said(word),
            said(end, "formula"),
            fraction("Al"),
            fraction("Ga"),
            fraction("In"),
            fraction("P"),
            fraction("As"),
            fraction("Sb"),
            number(layer, "thickness_nm"),
            number(layer, "thickness_tolerance_nm"),
            number(end, "strain_percent"),
            said(end, "strain"),
            number(end, "relaxed_mismatch_ppm"),
            number(end, "perpendicular_mismatch_ppm"),
            number(end, "gap_nm"),
            said(layer, "conduction"),
            said(layer, "dopant"),
            number(layer, "density_cm3"),
            SheetCell::said(&period),
        ]
    }
}
