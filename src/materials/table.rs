//! The parameter table: numbers with their sources as the data files state them.
//!
//! [`Table::shipped`] reads the file inside the program; [`Table::lay_over`] lays a user's file
//! with the same keys over it.

use super::quantity::{BINARY_KEYS, Key};
use super::reading::Reader;
use super::{Element, Elements};
use crate::source::Diagnostic;
use std::collections::BTreeMap;
use std::ops::Range;

/// Name of the shipped file, as errors and stamps give it.
pub const SHIPPED_NAME: &str = "iii_v.toml";
/// The shipped file.
pub(super) const SHIPPED: &str = include_str!("data/iii_v.toml");
/// Status of a number from a file laid over, unless that file says otherwise.
pub(super) const OVERLAID: &str = "U";
/// Words in a material's table that are no quantities.
pub(super) const FRAME: [&str; 5] = ["end_x", "end_1mx", "source", "status", "alt"];
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
pub(super) type Places = BTreeMap<(String, String), Range<usize>>;
