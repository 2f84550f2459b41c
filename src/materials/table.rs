//! The parameter table: numbers with their sources as the data files state them.
//!
//! [`Table::shipped`] reads the file inside the program; [`Table::lay_over`] lays a user's file
//! with the same keys over it.

use super::quantity::{BINARY_KEYS, Key, TERNARY_KEYS, find};
use super::{Element, Elements};
use crate::source::Diagnostic;
use std::collections::BTreeMap;
use std::ops::Range;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// Name of the shipped file, as errors and stamps give it.
pub const SHIPPED_NAME: &str = "iii_v.toml";
/// The shipped file.
pub(super) const SHIPPED: &str = include_str!("data/iii_v.toml");
/// Status of a number from a file laid over, unless that file says otherwise.
const OVERLAID: &str = "U";
/// Words in a material's table that are no quantities.
const FRAME: [&str; 5] = ["end_x", "end_1mx", "source", "status", "alt"];
/// Coefficients that a bowing may have: constant, slope and curvature in the composition.
pub(super) const BOWING_TERMS: usize = 3;

/// One number, or the coefficients of one bowing, with its source.
#[derive(Clone, Debug, PartialEq)]
pub struct Entry {
    /// The key of the quantity.
    pub key: &'static Key,
    /// The number; of a bowing C(x) = c₀ + c₁ x + …, x the fraction of the first end, its coefficients.
    pub value: Vec<f64>,
    /// The citation's key in the list of sources, or the citation itself.
    pub source: String,
    /// How the number is known: a key of the status codes.
    pub status: String,
}

/// Another published value, not in use, and why.
#[derive(Clone, Debug, PartialEq)]
pub struct Alternate {
    /// The keys concerned.
    pub keys: Vec<String>,
    /// Their values, one per key; empty where `form` says it.
    pub values: Vec<f64>,
    /// A closed form or a statement in place of values.
    pub form: Option<String>,
    /// The citation's key.
    pub source: String,
    /// Which of the two to trust.
    pub trusted: String,
    /// Why.
    pub note: String,
}

/// A compound, or the bowings of a ternary.
#[derive(Clone, Debug, PartialEq)]
pub struct Material {
    /// Its name in the file, e.g. `GaAs`, `InGaAs`.
    pub name: String,
    /// Of a ternary the compounds at x = 1 and x = 0.
    pub ends: Option<[String; 2]>,
    /// Its numbers by key, in alphabetical order.
    pub entries: BTreeMap<String, Entry>,
    /// Values not in use.
    pub alternates: Vec<Alternate>,
}

/// All numbers of compounds and ternaries.
#[derive(Clone, Debug, PartialEq)]
pub struct Table {
    /// Citations by key.
    pub sources: BTreeMap<String, String>,
    /// Compounds by their elements.
    pub binaries: BTreeMap<Elements, Material>,
    /// Ternaries by their elements.
    pub ternaries: BTreeMap<Elements, Material>,
    /// Names of the files laid over, in order.
    pub overlays: Vec<String>,
}

impl Table {
    /// The table inside the program.
    ///
    /// # Errors
    ///
    /// Whatever is wrong with the file; a test makes sure that nothing is.
    pub(super) fn shipped() -> Result<Self, Vec<Diagnostic>> {
        let mut table = Self {
            sources: BTreeMap::new(),
            binaries: BTreeMap::new(),
            ternaries: BTreeMap::new(),
            overlays: Vec::new(),
        };
        let mut reader = Reader::new(SHIPPED, None);
        reader.read(&mut table);
        let mut faults = reader.faults;
        faults.extend(table.gaps_and_nonsense(SHIPPED_NAME, &reader.places));
        if faults.is_empty() {
            Ok(table)
        } else {
            Err(faults)
        }
    }

    /// Lays the numbers of another file over the table.
    ///
    /// # Errors
    ///
    /// Every fault of the file at its place: unknown tables, materials and keys with the nearest
    /// known word, values that are no finite numbers, numbers without a source, and numbers that
    /// no crystal can have.
    pub(super) fn lay_over(mut self, text: &str, name: &str) -> Result<Self, Vec<Diagnostic>> {
        let mut reader = Reader::new(text, Some(name));
        reader.read(&mut self);
        let mut faults = reader.faults;
        if faults.is_empty() {
            faults.extend(self.gaps_and_nonsense(name, &reader.places));
        }
        if faults.is_empty() {
            self.overlays.push(name.to_owned());
            Ok(self)
        } else {
            Err(faults)
        }
    }

    /// The citation behind a source: the text that its key stands for, or the source itself.
    #[must_use]
    pub fn citation<'a>(&'a self, source: &'a str) -> &'a str {
        self.sources.get(source).map_or(source, String::as_str)
    }

    /// What is missing, or cannot be: each by material, quantity and file.
    fn gaps_and_nonsense(&self, file: &str, places: &Places) -> Vec<Diagnostic> {
        let mut faults = Vec::new();
        for (cation, anion) in compounds() {
            let name = format!("{}{}", cation.symbol(), anion.symbol());
            let Some(material) = self.binaries.get(&pair(&[cation], &[anion])) else {
                let message = format!("{file} has no compound {name}");
                faults.push(Diagnostic::new(0..0, message));
                continue;
            };
            for key in BINARY_KEYS.iter().filter(|key| key.required) {
                if !material.entries.contains_key(key.word) {
                    let message = format!("{file} has no {} ({}) of {name}", key.word, key.meaning);
                    faults.push(Diagnostic::new(0..0, message));
                }
            }
            for (words, message) in impossible(material) {
                let place = words
                    .iter()
                    .find_map(|&word| places.get(&(material.name.clone(), word.to_owned())));
                faults.push(
                    Diagnostic::new(
                        place.cloned().unwrap_or(0..0),
                        format!("{name} in {file}: {message}"),
                    )
                    .with_help("numbers laid over and those beneath them must make a crystal"),
                );
            }
        }
        faults
    }
}

/// Cations and anions of the nine compounds.
pub(super) fn compounds() -> impl Iterator<Item = (Element, Element)> {
    Element::ALL[..3]
        .iter()
        .flat_map(|&cation| Element::ALL[3..].iter().map(move |&anion| (cation, anion)))
}

/// The set of these elements.
pub(super) fn pair(group_iii: &[Element], group_v: &[Element]) -> Elements {
    let mut set = Elements {
        group_iii: [false; 3],
        group_v: [false; 3],
    };
    for element in group_iii {
        set.group_iii[element.place()] = true;
    }
    for element in group_v {
        set.group_v[element.place()] = true;
    }
    set
}

/// What no crystal can have, conditions on numbers that are all there: the keys concerned, and why.
fn impossible(material: &Material) -> Vec<(Vec<&'static str>, String)> {
    // a number that is not there is a fault of its own, and NaN fails no comparison below
    let number = |word: &str| {
        let entry = material.entries.get(word);
        entry.map_or(f64::NAN, |entry| entry.value[0])
    };
    let mut faults = Vec::new();
    let positive = [
        "a_300",
        "delta_so",
        "me_gamma",
        "ep",
        "c11",
        "c12",
        "coth_theta",
    ];
    for word in positive {
        let value = number(word);
        if value <= 0.0 {
            faults.push((vec![word], format!("{word} = {value} must be above 0")));
        }
    }
    for word in ["beta_gamma", "beta_x", "beta_l"] {
        let value = number(word);
        if value < 0.0 {
            faults.push((vec![word], format!("{word} = {value} must not be negative")));
        }
    }
    if number("coth_a").is_nan() != number("coth_theta").is_nan() {
        let message = "coth_a and coth_theta belong together".to_owned();
        faults.push((vec!["coth_a", "coth_theta"], message));
    }
    let (gamma1, gamma2) = (number("gamma1"), number("gamma2"));
    if gamma2 <= 0.0 || gamma1 <= 2.0 * gamma2 {
        faults.push((
            vec!["gamma1", "gamma2"],
            format!(
                "gamma1 = {gamma1} and gamma2 = {gamma2} give no heavy hole: gamma1 > 2 gamma2 > 0"
            ),
        ));
    }
    let (c11, c12) = (number("c11"), number("c12"));
    if c11 <= c12 {
        faults.push((
            vec!["c11", "c12"],
            format!("c11 = {c11} and c12 = {c12} make no stable crystal: c11 > c12"),
        ));
    }
    let av = number("av");
    if av > 0.0 {
        let message =
            format!("av = {av} has the other sign: the edge moves by -av*tr, so av is negative");
        faults.push((vec!["av"], message));
    }
    faults
}

/// Where a file gives which number, by material and key.
type Places = BTreeMap<(String, String), Range<usize>>;

/// Walks one file.
struct Reader<'a> {
    text: &'a str,
    /// The name of a file laid over; none for the shipped one.
    overlay: Option<&'a str>,
    faults: Vec<Diagnostic>,
    places: Places,
}

type Member<'t, 'i> = (
    &'t Spanned<std::borrow::Cow<'i, str>>,
    &'t Spanned<DeValue<'i>>,
);

impl<'a> Reader<'a> {
    fn new(text: &'a str, overlay: Option<&'a str>) -> Self {
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

    fn read(&mut self, table: &mut Table) {
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
