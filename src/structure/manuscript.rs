//! The text of a structure file as its author wrote it, and the same with a few values changed.
//!
//! Values are replaced where they stand: comments, order, spaces and line ends stay.

use std::ops::Range;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::number::exact;
use super::{Role, syntax};
use crate::source::Diagnostic;

/// Which layers, or the material of which layers, is meant.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Selection {
    /// All of a material: a name from `[materials]`, or a formula as it stands in the layers.
    Material(String),
    /// All of a role.
    Role(Role),
}

/// How a file says what a material is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Form {
    /// By a formula that stands in the layers themselves.
    Inline,
    /// By `formula` under its name.
    Formula,
    /// By `alloy` and what it must have.
    Prescribed {
        /// Whether a gap is asked for.
        gap: bool,
        /// Whether a strain is.
        strain: bool,
    },
    /// By its own numbers.
    Numbers,
}

/// What a composition is said by.
#[derive(Clone, Debug, PartialEq)]
pub enum Condition {
    /// A formula.
    Formula(String),
    /// Gap and strain, each where the file asks for one.
    Prescription {
        /// Gap of the strained bulk layer as a wavelength, nm.
        gap_nm: Option<f64>,
        /// In-plane strain, %; negative is compressive.
        tensile_percent: Option<f64>,
    },
}

/// The text of a structure file.
#[derive(Debug)]
pub struct Manuscript<'a> {
    text: &'a str,
    table: DeTable<'a>,
    changes: Vec<(Range<usize>, String)>,
}

impl<'a> Manuscript<'a> {
    /// A text that is TOML.
    ///
    /// # Errors
    ///
    /// The faults of its syntax.
    pub fn new(text: &'a str) -> Result<Self, Vec<Diagnostic>> {
        let (table, faults) = syntax::table(text);
        if faults.is_empty() {
            Ok(Self {
                text,
                table,
                changes: Vec::new(),
            })
        } else {
            Err(faults)
        }
    }

    /// How the file says what a material is.
    #[must_use]
    pub fn form(&self, material: &str) -> Form {
        let Some(table) = self.material(material) else {
            return Form::Inline;
        };
        let has = |key: &str| entry(table, key).is_some();
        if has("numbers") {
            Form::Numbers
        } else if has("alloy") {
            Form::Prescribed {
                gap: has("gap_nm"),
                strain: STRAIN_KEYS.iter().any(|key| has(key)),
            }
        } else {
            Form::Formula
        }
    }

    /// The formula that a material is given by, as it is written; a name that stands in the layers is
    /// one itself.
    #[must_use]
    pub fn formula<'b>(&'b self, material: &'b str) -> Option<&'b str> {
        let Some(table) = self.material(material) else {
            return Some(material);
        };
        entry(table, "formula")?.1.get_ref().as_str()
    }

    fn material(&self, name: &str) -> Option<&DeTable<'a>> {
        let (_, materials) = entry(&self.table, "materials")?;
        let (_, table) = entry(as_table(materials)?, name)?;
        as_table(table)
    }

    /// Gives layers another thickness.
    pub fn set_thickness_nm(&mut self, of: &Selection, thickness_nm: f64) {
        let places: Vec<Range<usize>> = self
            .rows()
            .into_iter()
            .filter(|row| is_selected(row, of))
            .filter_map(|row| Some(entry(row, "thickness_nm")?.1.span()))
            .collect();
        for place in places {
            self.changes.push((place, exact(thickness_nm)));
        }
    }

    /// Gives a material another composition, said in the way of the condition.
    pub fn set_composition(&mut self, of: &Selection, material: &str, condition: &Condition) {
        let changes = match (self.material(material), condition) {
            (None, Condition::Formula(formula)) => self.inline(of, material, formula),
            (Some(table), Condition::Formula(formula)) => self.by_formula(table, formula),
            (
                Some(table),
                Condition::Prescription {
                    gap_nm,
                    tensile_percent,
                },
            ) => prescription(table, *gap_nm, *tensile_percent),
            (None, Condition::Prescription { .. }) => Vec::new(),
        };
        self.changes.extend(changes);
    }

    /// A formula in the place of one that stands in the layers.
    fn inline(&self, of: &Selection, material: &str, formula: &str) -> Vec<(Range<usize>, String)> {
        self.rows()
            .into_iter()
            .filter(|row| is_selected(row, of) || matches!(of, Selection::Material(_)))
            .flat_map(|row| ["material", "grade_to"].map(|key| entry(row, key)))
            .flatten()
            .filter(|(_, value)| as_text(value) == Some(material))
            .map(|(_, value)| (value.span(), quoted(formula)))
            .collect()
    }

    /// A formula in the place of `formula`, or of `alloy` and all that was asked of it.
    fn by_formula(&self, table: &DeTable<'a>, formula: &str) -> Vec<(Range<usize>, String)> {
        if let Some((_, value)) = entry(table, "formula") {
            return vec![(value.span(), quoted(formula))];
        }
        let mut changes = Vec::new();
        for (key, value) in table {
            match key.get_ref().as_ref() {
                "alloy" => {
                    changes.push((key.span(), "formula".to_owned()));
                    changes.push((value.span(), quoted(formula)));
                }
                _ => changes.push((
                    self.whole_entry(key.span().start..value.span().end),
                    String::new(),
                )),
            }
        }
        changes
    }

    /// An entry with what would be left of its line if that is nothing, or with a comma in an
    /// inline table.
    fn whole_entry(&self, entry: Range<usize>) -> Range<usize> {
        let before = &self.text[..entry.start];
        let line_start = before.rfind('\n').map_or(0, |at| at + 1);
        let after = &self.text[entry.end..];
        let line_end = after
            .find('\n')
            .map_or(self.text.len(), |at| entry.end + at + 1);
        let is_blank = |text: &str| text.trim().is_empty();
        if is_blank(&self.text[line_start..entry.start]) {
            // A comment on the entry goes with it.
            let rest = self.text[entry.end..line_end].trim_start();
            if is_blank(rest) || rest.starts_with('#') {
                return line_start..line_end;
            }
        }
        let lead = before.trim_end();
        if lead.ends_with(',') {
            return lead.len() - 1..entry.end;
        }
        let gap = after.len() - after.trim_start().len();
        if after.trim_start().starts_with(',') {
            return entry.start..entry.end + gap + 1;
        }
        entry
    }

    /// Every layer and group, from the substrate up, groups before their members.
    fn rows(&self) -> Vec<&DeTable<'a>> {
        let mut rows = Vec::new();
        collect_rows(&self.table, &mut rows);
        rows
    }

    /// The text with all changes.
    #[must_use]
    pub fn text(&self) -> String {
        let mut changes = self.changes.clone();
        changes.sort_by_key(|(place, _)| (place.start, place.end));
        let mut text = String::new();
        let mut at = 0;
        for (place, words) in changes {
            // Of two changes at one place the first counts.
            if place.start < at {
                continue;
            }
            text.push_str(&self.text[at..place.start]);
            text.push_str(&words);
            at = place.end;
        }
        text.push_str(&self.text[at..]);
        text
    }
}

/// Keys that say a strain.
const STRAIN_KEYS: [&str; 3] = ["compressive_percent", "tensile_percent", "matched"];

type Entry<'t, 'a> = (
    &'t Spanned<std::borrow::Cow<'a, str>>,
    &'t Spanned<DeValue<'a>>,
);

fn entry<'t, 'a>(table: &'t DeTable<'a>, key: &str) -> Option<Entry<'t, 'a>> {
    table
        .iter()
        .find(|(known, _)| known.get_ref().as_ref() == key)
}

fn as_table<'t, 'a>(value: &'t Spanned<DeValue<'a>>) -> Option<&'t DeTable<'a>> {
    match value.get_ref() {
        DeValue::Table(table) => Some(table),
        _ => None,
    }
}

fn as_text<'t>(value: &'t Spanned<DeValue<'_>>) -> Option<&'t str> {
    match value.get_ref() {
        DeValue::String(text) => Some(text),
        _ => None,
    }
}

fn collect_rows<'t, 'a>(table: &'t DeTable<'a>, rows: &mut Vec<&'t DeTable<'a>>) {
    let Some((_, layers)) = entry(table, "layers") else {
        return;
    };
    let DeValue::Array(layers) = layers.get_ref() else {
        return;
    };
    for row in layers.iter().filter_map(as_table) {
        rows.push(row);
        collect_rows(row, rows);
    }
}

fn is_selected(row: &DeTable<'_>, of: &Selection) -> bool {
    let says = |key: &str, word: &str| {
        entry(row, key).is_some_and(|(_, value)| as_text(value) == Some(word))
    };
    match of {
        Selection::Material(name) => says("material", name),
        Selection::Role(role) => says("role", role.word()),
    }
}

/// New values of the gap and strain that a material asks for.
fn prescription(
    table: &DeTable<'_>,
    gap_nm: Option<f64>,
    tensile_percent: Option<f64>,
) -> Vec<(Range<usize>, String)> {
    let mut changes = Vec::new();
    if let (Some(gap_nm), Some((_, value))) = (gap_nm, entry(table, "gap_nm")) {
        changes.push((value.span(), exact(gap_nm)));
    }
    let strain = STRAIN_KEYS.iter().find_map(|key| entry(table, key));
    if let (Some(tensile), Some((key, value))) = (tensile_percent, strain) {
        let word = if tensile < 0.0 {
            "compressive_percent"
        } else {
            "tensile_percent"
        };
        if key.get_ref().as_ref() != word {
            changes.push((key.span(), word.to_owned()));
        }
        changes.push((value.span(), exact(tensile.abs())));
    }
    changes
}

fn quoted(text: &str) -> String {
    toml::Value::String(text.to_owned()).to_string()
}

#[cfg(test)]
mod tests {
    use super::*;

    const TEXT: &str = "\
format = 1 # one\r
[materials.well]   # the well\r
alloy = \"AlGaInAs\"  # elements\r
gap_nm = 1420      # by PL\r
compressive_percent = 1.0\r
[materials.inner]\r
formula = 'In0.5Ga0.5As'\r
[[layers]]\r
role = \"barrier\"\r
material = \"InP\" # wide\r
thickness_nm = 9\r
[[layers]]\r
repeat = 2\r
layers = [ { role = \"well\", material = \"well\", thickness_nm = 5.5 }, # thin\r
 { role = \"barrier\", material = 'InP', grade_to = \"InP\", thickness_nm = 9.0 } ]\r
";

    fn changed(change: impl Fn(&mut Manuscript<'_>)) -> String {
        let mut manuscript = Manuscript::new(TEXT).expect("TOML");
        change(&mut manuscript);
        manuscript.text()
    }

    #[test]
    fn nothing_changed_is_the_text_itself() {
        assert_eq!(changed(|_| {}), TEXT);
    }

    #[test]
    fn a_thickness_changes_where_it_stands() {
        let well = Selection::Material("well".to_owned());
        let text = changed(|it| it.set_thickness_nm(&well, 4.25));
        assert_eq!(
            text,
            TEXT.replace("thickness_nm = 5.5", "thickness_nm = 4.25")
        );
        let text = changed(|it| it.set_thickness_nm(&Selection::Role(Role::Barrier), 7.0));
        let expected = TEXT.replace("= 9\r", "= 7.0\r").replace("= 9.0", "= 7.0");
        assert_eq!(text, expected);
    }

    #[test]
    fn a_strain_takes_the_name_of_its_sense() {
        let well = Selection::Material("well".to_owned());
        let condition = Condition::Prescription {
            gap_nm: Some(1400.5),
            tensile_percent: Some(0.25),
        };
        let text = changed(|it| it.set_composition(&well, "well", &condition));
        let expected = TEXT
            .replace("gap_nm = 1420  ", "gap_nm = 1400.5  ")
            .replace("compressive_percent = 1.0", "tensile_percent = 0.25");
        assert_eq!(text, expected);
    }

    #[test]
    fn a_formula_takes_the_place_of_all_that_was_asked() {
        let formula = Condition::Formula("GaAs".to_owned());
        let well = Selection::Material("well".to_owned());
        let text = changed(|it| it.set_composition(&well, "well", &formula));
        let expected = TEXT
            .replace("alloy = \"AlGaInAs\"", "formula = \"GaAs\"")
            .replace("gap_nm = 1420      # by PL\r\n", "")
            .replace("compressive_percent = 1.0\r\n", "");
        assert_eq!(text, expected);
        let inner = Selection::Material("inner".to_owned());
        let text = changed(|it| it.set_composition(&inner, "inner", &formula));
        assert_eq!(text, TEXT.replace("'In0.5Ga0.5As'", "\"GaAs\""));
        let inline = Selection::Material("InP".to_owned());
        let text = changed(|it| it.set_composition(&inline, "InP", &formula));
        let expected = TEXT
            .replace("'InP'", "\"GaAs\"")
            .replace("\"InP\"", "\"GaAs\"");
        assert_eq!(text, expected);
    }

    #[test]
    fn the_form_of_a_material_is_told() {
        let manuscript = Manuscript::new(TEXT).expect("TOML");
        let prescribed = Form::Prescribed {
            gap: true,
            strain: true,
        };
        for (name, form) in [
            ("well", prescribed),
            ("inner", Form::Formula),
            ("InP", Form::Inline),
        ] {
            assert_eq!(manuscript.form(name), form, "{name}");
        }
    }
}
