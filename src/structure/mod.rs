//! The structure file and the validated [`Stack`] that every other module uses.
//!
//! A file has two forms. Its raw form mirrors the TOML key by key, along one table of keys
//! that also yields the editor [`schema`] and the [`key_reference`] of the manual. [`read`] makes
//! the stack of it, or names every fault at its place; no module above checks a thickness again.
//! [`write()`] says a stack as a file.

mod file;
mod growth;
mod keys;
mod layers;
mod ledger;
mod limits;
mod magnitude;
mod manuscript;
mod number;
mod order;
mod own_numbers;
mod palette;
mod photoluminescence_map;
mod reader;
mod reference;
mod remark;
mod returned;
mod schema;
mod stack;
mod syntax;
mod validate;
mod write;

pub use growth::{Fluxes, GROUP_III, Growth};
pub use ledger::{Ledger, LedgerEntry};
pub use limits::Limits;
pub use magnitude::{Refusal, check_magnitude, thickness_range_nm};
pub use manuscript::{Condition, Form, Manuscript, Selection};
pub use order::{Entry, Order, OrderField, Origin, Usual, order_fields};
pub use photoluminescence_map::{MapPoint, PhotoluminescenceMap};
pub use reference::key_reference;
pub use remark::Remark;
pub use returned::{
    Assumptions, MeanMismatch, Measured, MismatchKind, PlPeak, Returned, ReturnedPl, ReturnedXray,
    read_returned,
};
pub use schema::schema;
pub use stack::{
    Bands, Doping, Layer, Lineshape, Material, Medium, Model, Operation, Role, Stack, Substance,
    Target, Wavelength,
};
pub use write::write;

use std::ops::Range;

use crate::materials::Parameters;
use crate::source::Diagnostic;

/// Most faults of one file that are reported; a file with more is not a structure file.
const MOST_FAULTS: usize = 100;

/// What a caller lays over a file: it goes before what the file says.
///
/// Numbers that reach a program by another way than a file are checked with [`check_magnitude`],
/// so that the complaint can name where they came from; [`read`] refuses them otherwise.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Overrides {
    /// Temperature of lattice and carriers, K.
    pub temperature_k: Option<f64>,
    /// Carrier densities, cm⁻³, in place of the file's list; the highest becomes the working
    /// density. Empty: the file's.
    pub densities_cm3: Vec<f64>,
    /// Treatment of the valence bands.
    pub bands: Option<Bands>,
}

impl Overrides {
    /// Its numbers under the keys that they go before.
    fn numbers(&self) -> impl Iterator<Item = (&'static str, f64)> {
        let temperature = self.temperature_k.map(|kelvin| ("temperature_k", kelvin));
        let densities = self
            .densities_cm3
            .iter()
            .map(|density| ("densities_cm3", *density));
        temperature.into_iter().chain(densities)
    }
}

/// A file that was accepted.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// What it describes.
    pub stack: Stack,
    /// What its author should know, in the order of the file.
    pub remarks: Vec<Remark>,
}

/// Reads a structure file.
///
/// # Errors
///
/// Every fault of the file, each at its place and with advice, in the order of the text. Where the
/// TOML itself is broken, the faults of the syntax and of single values are named; what a missing
/// line would entail is not.
///
/// ```
/// use stepwell::materials::Parameters;
/// use stepwell::structure::{self, Overrides};
///
/// let text = r#"
/// format = 1
/// [substrate]
/// material = "GaAs"
/// [[layers]]
/// role = "barrier"
/// material = "Al0.3Ga0.7As"
/// thickness_nm = 30
/// [[layers]]
/// role = "well"
/// material = "GaAs"
/// thickness_nm = 8
/// [[layers]]
/// role = "barrier"
/// material = "Al0.3Ga0.7As"
/// thickness_nm = 30
/// "#;
/// let reading = structure::read(text, &Parameters::shipped(), &Overrides::default()).expect("sound");
/// assert_eq!(reading.stack.well_count(), 1);
/// ```
pub fn read(
    text: &str,
    parameters: &Parameters,
    overrides: &Overrides,
) -> Result<Reading, Vec<Diagnostic>> {
    let (values, mut findings) = values_of(text, &keys::FILE)?;
    let file = file::StructureFile::from(values);
    let stack = validate::stack(&file, text, parameters, overrides, &mut findings);
    match stack {
        Some(stack) if findings.faults.is_empty() => {
            let mut remarks = findings.remarks;
            remarks.sort_by_key(|remark| remark.span().map(|span| span.start));
            Ok(Reading { stack, remarks })
        }
        _ => Err(in_order(findings.faults)),
    }
}

/// The values of a file whose keys are those of `table`, each checked by itself, and what was found
/// on the way; where the TOML itself is broken, its faults.
fn values_of(
    text: &str,
    table: &'static keys::Table,
) -> Result<(reader::Values, reader::Findings), Vec<Diagnostic>> {
    let (found, broken) = syntax::table(text);
    let mut findings = reader::Findings::in_file_of(table);
    let values = reader::read(&found, &mut findings);
    if broken.is_empty() {
        Ok((values, findings))
    } else {
        Err(with_broken_syntax(text, broken, findings.faults))
    }
}

/// The faults of the syntax, and those of values that it left whole.
fn with_broken_syntax(
    text: &str,
    broken: Vec<Diagnostic>,
    values: Vec<Diagnostic>,
) -> Vec<Diagnostic> {
    let mut faults: Vec<Diagnostic> = broken.into_iter().take(MOST_FAULTS).collect();
    let spoilt: Vec<Range<usize>> = faults
        .iter()
        .map(|fault| syntax::spoilt(text, fault.span.start))
        .collect();
    // A value without a place stands for one that the syntax lost.
    let is_whole = |fault: &Diagnostic| {
        !fault.span.is_empty()
            && spoilt
                .iter()
                .all(|lines| !lines.contains(&fault.span.start))
    };
    faults.extend(values.into_iter().filter(is_whole));
    in_order(faults)
}

/// Faults in the order of the text, the rest of very many counted only.
fn in_order(mut faults: Vec<Diagnostic>) -> Vec<Diagnostic> {
    faults.sort_by_key(|fault| (fault.span.start, fault.span.end));
    let hidden = faults.len().saturating_sub(MOST_FAULTS);
    faults.truncate(MOST_FAULTS);
    if hidden > 0
        && let Some(last) = faults.last()
    {
        let span = last.span.clone();
        faults.push(
            Diagnostic::new(span, format!("{hidden} more faults follow"))
                .with_help("mend these first"),
        );
    }
    faults
}
