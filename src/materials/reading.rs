//! Walks a parameter file and enters its numbers in the table, each with its source and its place.

use super::Elements;
use super::quantity::{BINARY_KEYS, Key, TERNARY_KEYS, find};
use super::table::{
    Alternate, BOWING_TERMS, Entry, FRAME, Material, OVERLAID, Places, SHIPPED_NAME, Table,
};
use crate::source::Diagnostic;
use std::collections::BTreeMap;
use std::ops::Range;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// Walks one file.
pub(super) struct Reader<'a> {
    text: &'a str,
    /// The name of a file laid over; none for the shipped one.
    overlay: Option<&'a str>,
    pub(super) faults: Vec<Diagnostic>,
    pub(super) places: Places,
}

type Member<'t, 'i> = (
    &'t Spanned<std::borrow::Cow<'i, str>>,
    &'t Spanned<DeValue<'i>>,
);

impl<'a> Reader<'a> {
    pub(super) fn new(text: &'a str, overlay: Option<&'a str>) -> Self {
        Self {
            text,
            overlay,
            faults: Vec::new(),
            places: BTreeMap::new(),
        }
    }

    fn fault(&mut self, span: Range<usize>, message: impl Into<String>, help: impl Into<String>) {
        self.faults
            .push(Diagnostic::new(span, message).with_help(help));
    }

    pub(super) fn read(&mut self, table: &mut Table) {
        let document = match DeTable::parse(self.text) {
            Ok(document) => document.into_inner(),
            Err(error) => {
                self.fault(
                    error.span().unwrap_or(0..0),
                    error.message().to_owned(),
                    "parameter files are TOML",
                );
                return;
            }
        };
        // sources first: entries refer to them
        if let Some((_, sources)) = document
            .iter()
            .find(|(word, _)| word.get_ref().as_ref() == "sources")
        {
            self.sources(sources, table);
        }
        for (word, value) in &document {
            match word.get_ref().as_ref() {
                "binary" => self.materials(value, table, false),
                "ternary" => self.materials(value, table, true),
                "sources" => {}
                "units" => self.units(value),
                // the rest of the shipped file has readers of its own
                _ if self.overlay.is_none() => {}
                other => self.unknown(
                    word.span(),
                    "table",
                    other,
                    ["binary", "ternary", "sources", "units"].into_iter(),
                ),
            }
        }
    }

    fn unknown<'w>(
        &mut self,
        span: Range<usize>,
        kind: &str,
        word: &str,
        known: impl Iterator<Item = &'w str> + Clone,
    ) {
        let nearest = known
            .clone()
            .map(|candidate| {
                let likeness =
                    strsim::jaro_winkler(&candidate.to_lowercase(), &word.to_lowercase());
                (candidate, likeness)
            })
            .filter(|&(_, likeness)| likeness > 0.7)
            .max_by(|a, b| a.1.total_cmp(&b.1));
        let help = match nearest {
            Some((candidate, _)) => format!("did you mean {candidate:?}?"),
            None => format!("known are {}", known.collect::<Vec<_>>().join(", ")),
        };
        self.fault(span, format!("there is no {kind} {word:?}"), help);
    }

    /// Units that a file states must be those that the program takes its numbers in.
    fn units(&mut self, value: &Spanned<DeValue<'_>>) {
        let Some(members) = self.members(value, "units by key") else {
            return;
        };
        for (word, value) in members {
            let text = word.get_ref().as_ref();
            let Some(key) = find(BINARY_KEYS, text).or_else(|| find(TERNARY_KEYS, text)) else {
                let known = BINARY_KEYS.iter().chain(TERNARY_KEYS).map(|key| key.word);
                self.unknown(word.span(), "quantity", text, known);
                continue;
            };
            if let Some(unit) = self.words(value, "a unit")
                && unit != key.unit
            {
                self.fault(
                    value.span(),
                    format!("{text} is taken in {}, not in {unit}", key.unit),
                    "convert the numbers",
                );
            }
        }
    }

    fn sources(&mut self, sources: &Spanned<DeValue<'_>>, table: &mut Table) {
        let Some(members) = self.members(sources, "citations by key") else {
            return;
        };
        for (word, value) in members {
            if let Some(citation) = self.words(value, "a citation") {
                let key = word.get_ref().to_string();
                if self.overlay.is_some() && table.sources.contains_key(&key) {
                    self.fault(
                        word.span(),
                        format!("the source {key:?} stands in {SHIPPED_NAME} already"),
                        "choose another key for it",
                    );
                } else {
                    table.sources.insert(key, citation);
                }
            }
        }
    }

    fn materials(&mut self, value: &Spanned<DeValue<'_>>, table: &mut Table, ternary: bool) {
        let Some(members) = self.members(value, "materials by name") else {
            return;
        };
        for (word, value) in members {
            let name = word.get_ref().as_ref();
            let elements = Elements::parse(name)
                .ok()
                .filter(|elements| elements.free_fractions() == usize::from(ternary));
            let Some(elements) = elements else {
                let known: Vec<String> = if ternary {
                    &table.ternaries
                } else {
                    &table.binaries
                }
                .values()
                .map(|material| material.name.clone())
                .collect();
                let kind = if ternary { "ternary" } else { "compound" };
                self.unknown(word.span(), kind, name, known.iter().map(String::as_str));
                continue;
            };
            let Some(members) = self.members(value, "numbers by key") else {
                continue;
            };
            let place = if ternary {
                &mut table.ternaries
            } else {
                &mut table.binaries
            };
            let material = place.entry(elements).or_insert_with(|| Material {
                name: name.to_owned(),
                ends: None,
                entries: BTreeMap::new(),
                alternates: Vec::new(),
            });
            self.material(&members, material, &table.sources, ternary, word.span());
        }
    }

    fn material(
        &mut self,
        members: &[Member<'_, '_>],
        material: &mut Material,
        sources: &BTreeMap<String, String>,
        ternary: bool,
        place: Range<usize>,
    ) {
        let keys = if ternary { TERNARY_KEYS } else { BINARY_KEYS };
        if ternary {
            self.ends(members, material, place.clone());
        }
        let gives = |word: &str| {
            members
                .iter()
                .any(|(key, _)| key.get_ref().as_ref() == word)
        };
        if self.overlay.is_some() && (gives("alpha_gamma") || gives("beta_gamma")) {
            // Varshni's law is wanted: the coth law beneath would hide it
            material.entries.remove("coth_a");
            material.entries.remove("coth_theta");
        }
        let source = self.attributes(members, "source", keys);
        let status = self.attributes(members, "status", keys);
        for (word, value) in members {
            let text = word.get_ref().as_ref();
            if text == "alt" {
                self.alternates(value, material);
            }
            if FRAME.contains(&text) {
                continue;
            }
            let Some(key) = find(keys, text) else {
                self.unknown(
                    word.span(),
                    &format!("quantity of {}", material.name),
                    text,
                    keys.iter().map(|key| key.word),
                );
                continue;
            };
            let Some(value) = self.numbers(value, ternary) else {
                continue;
            };
            let attribute =
                |of: &BTreeMap<String, String>| of.get(text).or_else(|| of.get("default")).cloned();
            let Some(source) = attribute(&source) else {
                self.fault(
                    word.span(),
                    format!("{text} of {} has no source", material.name),
                    format!(
                        "say where it comes from: [{}.{}.source] default = \"...\"",
                        if ternary { "ternary" } else { "binary" },
                        material.name
                    ),
                );
                continue;
            };
            if self.overlay.is_none() && !sources.contains_key(&source) {
                self.fault(
                    word.span(),
                    format!(
                        "{text} of {} cites the unknown source {source:?}",
                        material.name
                    ),
                    "add it to [sources]",
                );
            }
            let status = attribute(&status).unwrap_or_else(|| OVERLAID.to_owned());
            // nobody has judged the new number against values that stood beside the old one
            if self.overlay.is_some() {
                material
                    .alternates
                    .retain(|alternate| !alternate.keys.iter().any(|other| other == text));
            }
            self.places
                .insert((material.name.clone(), text.to_owned()), word.span());
            material.entries.insert(
                text.to_owned(),
                Entry {
                    key,
                    value,
                    source,
                    status,
                },
            );
        }
    }

    /// The compounds between which a ternary lies.
    fn ends(&mut self, members: &[Member<'_, '_>], material: &mut Material, place: Range<usize>) {
        let end = |reader: &mut Self, wanted: &str| {
            members
                .iter()
                .find(|(word, _)| word.get_ref().as_ref() == wanted)
                .and_then(|(_, value)| {
                    let text = reader.words(value, "the name of a compound")?;
                    Some((text, value.span()))
                })
        };
        let ends = (end(self, "end_x"), end(self, "end_1mx"));
        match (ends, &material.ends) {
            ((None, None), Some(_)) => {}
            ((Some((first, span)), Some((second, _))), known) => {
                let same = known
                    .as_ref()
                    .is_none_or(|known| known[0] == first && known[1] == second);
                if !same {
                    self.fault(
                        span,
                        format!("{} has its ends the other way elsewhere", material.name),
                        "leave end_x and end_1mx out: they stand in the file beneath",
                    );
                } else if !are_ends(&material.name, &first, &second) {
                    self.fault(
                        span,
                        format!("{first} and {second} are not the ends of {}", material.name),
                        "name the two compounds that the ternary lies between",
                    );
                } else {
                    material.ends = Some([first, second]);
                }
            }
            _ => self.fault(
                place,
                format!(
                    "{} does not say between which compounds it lies",
                    material.name
                ),
                "give end_x and end_1mx",
            ),
        }
    }

    /// A table `source` or `status`: a word per key, and one for all others under `default`.
    fn attributes(
        &mut self,
        members: &[Member<'_, '_>],
        which: &str,
        keys: &'static [Key],
    ) -> BTreeMap<String, String> {
        let mut words = BTreeMap::new();
        let Some((_, value)) = members
            .iter()
            .find(|(word, _)| word.get_ref().as_ref() == which)
        else {
            return words;
        };
        let Some(members) = self.members(value, "words by key") else {
            return words;
        };
        for (word, value) in members {
            let text = word.get_ref().as_ref();
            if text != "default" && find(keys, text).is_none() {
                let known = keys.iter().map(|key| key.word).chain(["default"]);
                self.unknown(word.span(), "quantity", text, known);
            } else if let Some(attribute) = self.words(value, "words") {
                words.insert(text.to_owned(), attribute);
            }
        }
        words
    }

    fn alternates(&mut self, value: &Spanned<DeValue<'_>>, material: &mut Material) {
        let DeValue::Array(list) = value.get_ref() else {
            self.fault(value.span(), "alt is a list of tables", "write [[...alt]]");
            return;
        };
        for item in list {
            let Some(members) = self.members(item, "an alternative value") else {
                continue;
            };
            let mut alternate = Alternate {
                keys: Vec::new(),
                values: Vec::new(),
                form: None,
                source: String::new(),
                trusted: String::new(),
                note: String::new(),
            };
            for (word, value) in members {
                match (word.get_ref().as_ref(), value.get_ref()) {
                    ("keys", DeValue::Array(list)) => {
                        alternate.keys = list
                            .iter()
                            .filter_map(|item| item.get_ref().as_str().map(str::to_owned))
                            .collect();
                    }
                    ("values", DeValue::Array(list)) => {
                        alternate.values =
                            list.iter().filter_map(|item| self.number(item)).collect();
                    }
                    ("form", DeValue::String(text)) => alternate.form = Some(text.to_string()),
                    ("source", DeValue::String(text)) => alternate.source = text.to_string(),
                    ("trusted", DeValue::String(text)) => alternate.trusted = text.to_string(),
                    ("note", DeValue::String(text)) => alternate.note = text.to_string(),
                    (other, _) => self.unknown(
                        word.span(),
                        "part of an alternative value",
                        other,
                        ["keys", "values", "form", "source", "trusted", "note"].into_iter(),
                    ),
                }
            }
            material.alternates.push(alternate);
        }
    }

    fn members<'t, 'i>(
        &mut self,
        value: &'t Spanned<DeValue<'i>>,
        what: &str,
    ) -> Option<Vec<Member<'t, 'i>>> {
        if let DeValue::Table(table) = value.get_ref() {
            Some(table.iter().collect())
        } else {
            let message = format!("{what} expected, not {}", value.get_ref().type_str());
            self.fault(value.span(), message, "write a table");
            None
        }
    }

    fn words(&mut self, value: &Spanned<DeValue<'_>>, what: &str) -> Option<String> {
        match value.get_ref() {
            DeValue::String(text) if !text.trim().is_empty() => Some(text.to_string()),
            other => {
                let message = format!("{what} expected, not {}", other.type_str());
                self.fault(value.span(), message, "write it in quotes");
                None
            }
        }
    }

    /// A number, or the coefficients of a bowing.
    fn numbers(&mut self, value: &Spanned<DeValue<'_>>, bowing: bool) -> Option<Vec<f64>> {
        let DeValue::Array(list) = value.get_ref() else {
            return Some(vec![self.number(value)?]);
        };
        if !bowing || list.is_empty() || list.len() > BOWING_TERMS {
            self.fault(
                value.span(),
                "a list does not fit here",
                if bowing {
                    "a bowing is a number or a list of one to three coefficients c0 + c1*x + c2*x^2"
                } else {
                    "write one number"
                },
            );
            return None;
        }
        list.iter().map(|item| self.number(item)).collect()
    }

    fn number(&mut self, value: &Spanned<DeValue<'_>>) -> Option<f64> {
        let number = match value.get_ref() {
            DeValue::Float(float) => float.as_str().parse::<f64>().ok(),
            DeValue::Integer(integer) if integer.radix() == 10 => integer.as_str().parse().ok(),
            _ => None,
        };
        let finite = number.filter(|number| number.is_finite());
        if finite.is_none() {
            let shown = self.text.get(value.span()).unwrap_or_default();
            let message = format!("a finite number expected, not {shown}");
            self.fault(value.span(), message, "write a number, e.g. 1.519");
        }
        finite
    }
}

/// Whether two compounds are those between which a ternary lies.
fn are_ends(name: &str, first: &str, second: &str) -> bool {
    let (Ok(whole), Ok(first), Ok(second)) = (
        Elements::parse(name),
        Elements::parse(first),
        Elements::parse(second),
    ) else {
        return false;
    };
    first != second
        && first.free_fractions() == 0
        && second.free_fractions() == 0
        && first.is_within(&whole)
        && second.is_within(&whole)
}
