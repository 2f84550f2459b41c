//! The materials of a file: names and formulas become substances.

use std::collections::BTreeMap;
use std::ops::Range;

use super::file::{MaterialTable, StructureFile};
use super::keys::MOST_MATERIALS;
use super::own_numbers::own_numbers;
use super::reader::{Findings, Given, brief};
use super::{Material, Remark, Substance};
use crate::materials::{Composition, Elements, Offsets, Parameters, solve_composition};
use crate::source::{Diagnostic, nearest};

/// Temperature at which gaps and strains of a prescription are meant, K.
const PRESCRIPTION_K: f64 = 300.0;

/// Every material that a file may speak of.
pub(super) struct Palette<'a> {
    text: &'a str,
    parameters: &'a Parameters,
    named: BTreeMap<String, Named>,
}

struct Named {
    key: Range<usize>,
    prescribed: bool,
    used: bool,
    substance: Option<Substance>,
}

impl<'a> Palette<'a> {
    /// The materials of the file, its substrate among them.
    pub(super) fn of(
        file: &StructureFile,
        text: &'a str,
        parameters: &'a Parameters,
        findings: &mut Findings,
    ) -> (Self, Option<Material>) {
        let mut palette = Self {
            text,
            parameters,
            named: BTreeMap::new(),
        };
        let too_many = file.materials.get(MOST_MATERIALS);
        if let Some((_, extra)) = too_many {
            findings.faults.push(
                Diagnostic::new(
                    extra.key.clone(),
                    format!("[materials] has {} names", file.materials.len()),
                )
                .with_help(format!("at most {MOST_MATERIALS} are read")),
            );
        }
        for (name, given) in file.materials.iter().take(MOST_MATERIALS) {
            Self::name_is_plain(name, &given.key, findings);
            let substance = given
                .value
                .as_ref()
                .and_then(|table| palette.given_outright(table, findings));
            let prescribed = given
                .value
                .as_ref()
                .is_some_and(|table| table.alloy.is_some());
            palette.named.insert(
                name.clone(),
                Named {
                    key: given.key.clone(),
                    prescribed,
                    used: false,
                    substance,
                },
            );
        }
        let substrate = palette.substrate(file, findings);
        let lattice_nm = substrate
            .as_ref()
            .map(|material| lattice_nm(parameters, &material.substance));
        for (name, given) in file.materials.iter().take(MOST_MATERIALS) {
            let Some(table) = &given.value else { continue };
            let Some(alloy) = &table.alloy else { continue };
            let solved = palette.prescribed(name, table, alloy, lattice_nm, findings);
            if let Some(named) = palette.named.get_mut(name) {
                named.substance = solved.map(Substance::Alloy);
            }
        }
        for (name, given) in file.materials.iter().take(MOST_MATERIALS) {
            palette.means_what_it_says(name, &given.key, findings);
        }
        (palette, substrate)
    }

    /// Names are words that options and outputs can hold.
    fn name_is_plain(name: &str, key: &Range<usize>, findings: &mut Findings) {
        let plain = name.starts_with(|letter: char| letter.is_ascii_alphabetic())
            && name.len() <= 40
            && name
                .chars()
                .all(|letter| letter.is_ascii_alphanumeric() || matches!(letter, '_' | '-'));
        if !plain {
            findings.faults.push(
                Diagnostic::new(
                    key.clone(),
                    format!("`{}` can't be the name of a material", brief(name)),
                )
                .with_help(
                    "a name begins with a letter and has up to 40 letters, digits, `_` and `-`",
                ),
            );
        }
    }

    /// A name that is a formula must be that formula's material.
    fn means_what_it_says(&self, name: &str, key: &Range<usize>, findings: &mut Findings) {
        let Ok(composition) = Composition::parse(name) else {
            return;
        };
        let another = self
            .named
            .get(name)
            .and_then(|named| named.substance)
            .is_some_and(|substance| substance != Substance::Alloy(composition));
        if another {
            findings.faults.push(
                Diagnostic::new(
                    key.clone(),
                    format!("the name `{name}` is a formula, and the material is another"),
                )
                .with_help("give it a name that is no formula, such as `well` or `guide`"),
            );
        }
    }

    /// A material by formula or by numbers; of a prescription only its form is checked.
    fn given_outright(&self, table: &MaterialTable, findings: &mut Findings) -> Option<Substance> {
        let kinds = [
            ("formula", table.formula.as_ref().map(|given| &given.key)),
            ("alloy", table.alloy.as_ref().map(|given| &given.key)),
            ("numbers", table.numbers.as_ref().map(|given| &given.key)),
        ];
        let mut present = kinds
            .iter()
            .filter_map(|(name, key)| key.map(|key| (*name, key.clone())));
        let Some((first, _)) = present.next() else {
            findings.faults.push(
                Diagnostic::new(table.span.clone(), "the material says not what it is").with_help(
                    "give `formula`, or `alloy` with `gap_nm` and a strain, or `numbers`",
                ),
            );
            return None;
        };
        if let Some((second, key)) = present.next() {
            findings.faults.push(
                Diagnostic::new(
                    key,
                    format!("the material has both `{first}` and `{second}`"),
                )
                .with_help("keep one of them"),
            );
            return None;
        }
        if table.alloy.is_none() {
            no_conditions(table, first, findings);
        }
        if let Some(given) = &table.formula {
            let composition = self.composition(given.value.as_ref()?, &given.span, findings)?;
            return Some(Substance::Alloy(composition));
        }
        own_numbers(table.numbers.as_ref()?, findings)
    }

    fn substrate(&mut self, file: &StructureFile, findings: &mut Findings) -> Option<Material> {
        const HELP: &str = "write `[substrate]` and below it `material = \"InP\"`";
        let Some(given) = &file.substrate else {
            findings
                .faults
                .push(Diagnostic::new(0..0, "the file names no substrate").with_help(HELP));
            return None;
        };
        let table = given.value.as_ref()?;
        let Some(material) = &table.material else {
            findings.faults.push(
                Diagnostic::new(table.span.clone(), "the substrate has no `material`")
                    .with_help(HELP),
            );
            return None;
        };
        let name = material.value.as_ref()?;
        if self.named.get(name).is_some_and(|named| named.prescribed) {
            findings.faults.push(
                Diagnostic::new(
                    material.span.clone(),
                    format!("the substrate `{name}` is asked for by gap or strain, which need a substrate"),
                )
                .with_help("name the substrate by its formula, such as \"InP\" or \"GaAs\""),
            );
            return None;
        }
        self.material(name, &material.span, findings)
    }

    /// The material of a name or formula that stands at `span`.
    pub(super) fn material(
        &mut self,
        name: &str,
        span: &Range<usize>,
        findings: &mut Findings,
    ) -> Option<Material> {
        let substance = if let Some(named) = self.named.get_mut(name) {
            named.used = true;
            named.substance?
        } else {
            if let Some(fault) = self.misspelt(name, span) {
                findings.faults.push(fault);
                return None;
            }
            Substance::Alloy(self.composition(name, span, findings)?)
        };
        Some(Material {
            name: name.to_owned(),
            substance,
        })
    }

    /// A complaint about a word that is no formula, or looks more like one of the names.
    fn misspelt(&self, name: &str, span: &Range<usize>) -> Option<Diagnostic> {
        if Composition::parse(name).is_ok() {
            return None;
        }
        let known = || self.named.keys().map(String::as_str);
        let meant = nearest(name, known());
        let like_a_formula = name.chars().any(|letter| letter.is_ascii_digit())
            || ["Al", "Ga", "In"]
                .iter()
                .any(|symbol| name.starts_with(symbol));
        if like_a_formula && meant.is_none() {
            return None;
        }
        let help = match meant {
            Some(meant) => format!("did you mean `{meant}`?"),
            None if self.named.is_empty() => {
                "write a formula such as \"In0.53Ga0.47As\", or name it in [materials]".to_owned()
            }
            None => format!(
                "in [materials] are {}; or write a formula such as \"In0.53Ga0.47As\"",
                known().take(12).collect::<Vec<_>>().join(", ")
            ),
        };
        let message = format!(
            "`{}` is neither a name from [materials] nor a formula",
            brief(name)
        );
        Some(Diagnostic::new(span.clone(), message).with_help(help))
    }

    /// The composition of a formula, its faults shown inside the text of the file.
    fn composition(
        &self,
        formula: &str,
        span: &Range<usize>,
        findings: &mut Findings,
    ) -> Option<Composition> {
        let parsed = Composition::parse(formula).map_err(|fault| self.inside(span, formula, fault));
        let composition = match parsed {
            Ok(composition) => composition,
            Err(fault) => {
                findings.faults.push(fault);
                return None;
            }
        };
        if let Err(missing) = self.parameters.covers(&composition) {
            findings.faults.push(
                Diagnostic::new(span.clone(), missing.to_string()).with_help(
                    "lay a parameter file with these numbers over the shipped one, or choose another alloy",
                ),
            );
            return None;
        }
        Some(composition)
    }

    /// A fault with a place in `word`, moved to where `word` stands in the file.
    fn inside(&self, span: &Range<usize>, word: &str, fault: Diagnostic) -> Diagnostic {
        let written = self.text.get(span.clone()).unwrap_or_default();
        let place = match written.find(word) {
            Some(at) if !word.is_empty() => {
                let start = span.start + at;
                start + fault.span.start..start + fault.span.end
            }
            _ => span.clone(),
        };
        Diagnostic {
            span: place,
            ..fault
        }
    }

    fn prescribed(
        &self,
        name: &str,
        table: &MaterialTable,
        alloy: &Given<String>,
        substrate_lattice_nm: Option<f64>,
        findings: &mut Findings,
    ) -> Option<Composition> {
        let family = alloy.value.as_ref()?;
        let elements = match Elements::parse(family) {
            Ok(elements) => elements,
            Err(fault) => {
                findings
                    .faults
                    .push(self.inside(&alloy.span, family, fault));
                return None;
            }
        };
        let strain = in_plane_strain(name, table, findings).ok()?;
        let gap_nm = match &table.gap_nm {
            Some(given) => Some(given.value?),
            None => None,
        };
        match solve_composition(
            self.parameters,
            &elements,
            substrate_lattice_nm?,
            gap_nm,
            strain,
        ) {
            Ok(composition) => Some(composition),
            Err(error) => {
                let help = error.help();
                findings.faults.push(
                    Diagnostic::new(alloy.span.clone(), format!("`{name}`: {error}"))
                        .with_help(help),
                );
                None
            }
        }
    }

    /// Remarks on names that no layer used and on second names of one material, and the names of
    /// the materials with numbers of their own.
    pub(super) fn remarks(&self, findings: &mut Findings) -> Vec<String> {
        let mut in_order: Vec<(&String, &Named)> = self.named.iter().collect();
        in_order.sort_by_key(|(_, named)| named.key.start);
        for (place, (name, named)) in in_order.iter().enumerate() {
            if !named.used {
                findings.remarks.push(Remark::UnusedMaterial {
                    span: named.key.clone(),
                    name: (*name).clone(),
                });
            }
            let twin = in_order[..place].iter().find(|(_, earlier)| {
                named.substance.is_some() && earlier.substance == named.substance
            });
            if let Some((first, _)) = twin {
                findings.remarks.push(Remark::SameMaterial {
                    span: named.key.clone(),
                    first: (*first).clone(),
                    second: (*name).clone(),
                });
            }
        }
        in_order
            .into_iter()
            .filter(|(_, named)| {
                named.used && matches!(named.substance, Some(Substance::Own { .. }))
            })
            .map(|(name, _)| name.clone())
            .collect()
    }
}

/// A complaint has been made.
struct Refused;

/// The lattice constant at which prescriptions are meant, nm.
fn lattice_nm(parameters: &Parameters, substance: &Substance) -> f64 {
    match substance {
        Substance::Alloy(composition) => {
            parameters
                .crystal(composition, PRESCRIPTION_K, Offsets::Table)
                .lattice_nm
        }
        Substance::Own { crystal, .. } => crystal.lattice_nm,
    }
}

/// Gap and strain ask for a composition; beside a formula or numbers they mean nothing.
fn no_conditions(table: &MaterialTable, kind: &str, findings: &mut Findings) {
    let numbers = [
        ("gap_nm", table.gap_nm.as_ref()),
        ("compressive_percent", table.compressive_percent.as_ref()),
        ("tensile_percent", table.tensile_percent.as_ref()),
    ];
    let keys = numbers
        .into_iter()
        .filter_map(|(name, given)| given.map(|given| (name, given.key.clone())))
        .chain(
            table
                .matched
                .iter()
                .map(|given| ("matched", given.key.clone())),
        );
    for (name, key) in keys {
        findings.faults.push(
            Diagnostic::new(key, format!("`{name}` does not go with `{kind}`")).with_help(
                "leave it out, or give `alloy` in place of the composition and let it be found",
            ),
        );
    }
}

/// The in-plane strain that a prescription asks for (compressive negative), if it asks for one.
///
/// # Errors
///
/// After a complaint, made here or before.
fn in_plane_strain(
    name: &str,
    table: &MaterialTable,
    findings: &mut Findings,
) -> Result<Option<f64>, Refused> {
    let matched = table.matched.as_ref().map(|given| Given {
        key: given.key.clone(),
        span: given.span.clone(),
        value: given.value.map(f64::from),
    });
    let words = [
        (
            "compressive_percent",
            -0.01,
            table.compressive_percent.as_ref(),
        ),
        ("tensile_percent", 0.01, table.tensile_percent.as_ref()),
        ("matched", 0.0, matched.as_ref()),
    ];
    let mut given: Vec<(&str, f64, &Given<f64>)> = words
        .into_iter()
        .filter_map(|(word, sign, field)| field.map(|field| (word, sign, field)))
        .collect();
    given.sort_by_key(|(_, _, field)| field.key.start);
    if let [(first, ..), .., (last, _, field)] = given.as_slice() {
        findings.faults.push(
            Diagnostic::new(
                field.key.clone(),
                format!("the strain of `{name}` has two names: `{first}` and `{last}`"),
            )
            .with_help("keep one of them"),
        );
        return Err(Refused);
    }
    let Some(&(word, sign, field)) = given.first() else {
        return Ok(None);
    };
    let value = field.value.ok_or(Refused)?;
    if word == "matched" && value == 0.0 {
        findings.faults.push(
            Diagnostic::new(
                field.span.clone(),
                "`matched = false` leaves the strain open",
            )
            .with_help("leave it out, or give `compressive_percent` or `tensile_percent`"),
        );
        return Err(Refused);
    }
    Ok(Some(sign * value))
}
