//! One quantity said another way: a gap as wavelength and energy, a mismatch of one kind as the
//! other, a linewidth in nm as one in meV.
//!
//! [`restate`] takes a [`Quantity`] and what its author says about it ([`About`]), and gives every
//! other way to say it. What a quantity does not say by itself (which kind of mismatch, in which
//! sense, over which thickness) is asked for and never assumed.

mod light;
mod quantity;
mod strain;

pub use quantity::{Quantity, Unclear};
pub use strain::Kind;

use crate::materials::{Composition, Elements, Parameters, Sense};
use crate::units::{CELSIUS_ZERO_K, thermal_ev};

/// Temperature where none is said, K.
const ROOM_K: f64 = 300.0;

/// What its author says about a quantity.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct About {
    /// Whether a wavelength was read in air.
    pub in_air: bool,
    /// Whether a wavelength or an energy is the peak of bulk photoluminescence, not the gap.
    pub is_photoluminescence: bool,
    /// Temperature, K.
    pub temperature_k: Option<f64>,
    /// The line that a width belongs to, wavelength in vacuum, nm: the quantity is then a width.
    pub around_nm: Option<f64>,
    /// The thickness that carriers share, nm.
    pub over_nm: Option<f64>,
    /// The kind of a mismatch.
    pub kind: Option<Kind>,
    /// The substrate.
    pub substrate: Option<Composition>,
    /// The layer whose stiffness counts, where it is known.
    pub layer: Option<Composition>,
    /// Elements of an alloy whose composition is asked for.
    pub alloy: Option<Elements>,
    /// In-plane strain (a_s − a)/a of that alloy; negative is compressive.
    pub strain: Option<f64>,
}

/// One way to say it.
#[derive(Clone, Debug, PartialEq)]
pub struct Statement {
    /// What it is.
    pub name: String,
    /// Its value.
    pub value: Value,
}

/// A value.
#[derive(Clone, Debug, PartialEq)]
pub enum Value {
    /// A number with its unit.
    Number(f64, &'static str),
    /// Words.
    Words(String),
}

/// Every way to say a quantity.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Restatement {
    /// The ways, as given first.
    pub statements: Vec<Statement>,
    /// What they hang on.
    pub notes: Vec<String>,
}

impl Restatement {
    fn number(&mut self, name: impl Into<String>, value: f64, unit: &'static str) {
        self.statements.push(Statement {
            name: name.into(),
            value: Value::Number(value, unit),
        });
    }

    fn words(&mut self, name: impl Into<String>, words: impl Into<String>) {
        self.statements.push(Statement {
            name: name.into(),
            value: Value::Words(words.into()),
        });
    }

    fn note(&mut self, words: impl Into<String>) {
        self.notes.push(words.into());
    }

    /// The number of that name, if there is one.
    #[must_use]
    pub fn value(&self, name: &str) -> Option<f64> {
        self.statements
            .iter()
            .find_map(|statement| match statement.value {
                Value::Number(value, _) if statement.name == name => Some(value),
                _ => None,
            })
    }
}

/// Says a quantity in every other way.
///
/// # Errors
///
/// [`Unclear`] where something must be said first, or has no answer.
pub fn restate(
    quantity: Quantity,
    about: &About,
    parameters: &Parameters,
) -> Result<Restatement, Unclear> {
    if let Some(unclear) = beside_the_point(quantity, about) {
        return Err(unclear);
    }
    match (quantity, about.around_nm) {
        (Quantity::Wavelength(_) | Quantity::Energy(_), Some(line_nm)) => {
            light::width(quantity, line_nm)
        }
        (Quantity::Wavelength(_) | Quantity::Energy(_), None) => {
            light::photon(quantity, about, parameters)
        }
        (Quantity::Mismatch(ppm, sense), _) => strain::mismatch(ppm, sense, about, parameters),
        (Quantity::Strain(percent, sense), _) => strain::strain(percent, sense, about, parameters),
        (Quantity::Temperature(kelvin), _) => Ok(temperature(kelvin)),
        (Quantity::SheetDensity(_) | Quantity::VolumeDensity(_), _) => density(quantity, about),
    }
}

/// What is said about a quantity and does not bear on it: nothing is left out in silence, since who
/// says it has something else in mind.
fn beside_the_point(quantity: Quantity, about: &About) -> Option<Unclear> {
    let is_light = matches!(quantity, Quantity::Wavelength(_) | Quantity::Energy(_));
    let is_width = is_light && about.around_nm.is_some();
    let is_photon = is_light && !is_width;
    let is_strained = matches!(quantity, Quantity::Mismatch(..) | Quantity::Strain(..));
    let what = match quantity {
        _ if is_width => "a width",
        Quantity::Wavelength(_) => "a wavelength",
        Quantity::Energy(_) => "an energy",
        Quantity::Temperature(_) => "a temperature",
        Quantity::Mismatch(..) => "a mismatch",
        Quantity::Strain(..) => "a strain",
        Quantity::SheetDensity(_) | Quantity::VolumeDensity(_) => "a density",
    };
    let of_alloy = is_photon && about.alloy.is_some();
    let said = [
        (
            "--air",
            about.in_air,
            is_photon && matches!(quantity, Quantity::Wavelength(_)),
        ),
        ("--pl", about.is_photoluminescence, is_photon),
        (
            "--at",
            about.temperature_k.is_some(),
            is_photon || is_strained,
        ),
        ("--around", about.around_nm.is_some(), is_light),
        (
            "--over",
            about.over_nm.is_some(),
            matches!(
                quantity,
                Quantity::SheetDensity(_) | Quantity::VolumeDensity(_)
            ),
        ),
        (
            "--mismatch",
            about.kind.is_some(),
            matches!(quantity, Quantity::Mismatch(..)),
        ),
        ("--on", about.substrate.is_some(), is_strained || of_alloy),
        ("--layer", about.layer.is_some(), is_strained),
        ("--alloy", about.alloy.is_some(), is_photon),
        ("--strain", about.strain.is_some(), of_alloy),
    ];
    let (flag, ..) = said
        .into_iter()
        .find(|(_, is_said, bears)| *is_said && !bears)?;
    let help = match flag {
        "--air" if matches!(quantity, Quantity::Energy(_)) => {
            "an energy is the same in air: leave it out"
        }
        "--air" if is_width => "a width belongs to a line in vacuum: leave it out",
        "--on" if is_photon => "leave it out, or ask for the composition too: --alloy InGaAsP",
        _ => "leave it out",
    };
    Some(Unclear::new(
        format!("{flag} says nothing about {what}"),
        help,
    ))
}

fn temperature(kelvin: f64) -> Restatement {
    let mut said = Restatement::default();
    said.number("temperature", kelvin, "K");
    said.number("temperature", kelvin - CELSIUS_ZERO_K, "°C");
    said.number("thermal energy kT", 1e3 * thermal_ev(kelvin), "meV");
    said
}

fn density(quantity: Quantity, about: &About) -> Result<Restatement, Unclear> {
    let Some(over_nm) = about.over_nm else {
        return Err(Unclear::new(
            "a density per area and one per volume differ by a thickness",
            "say it: --over 5.5nm, of one well or of all wells together",
        ));
    };
    let over_cm = 1e-7 * over_nm;
    let (sheet, volume) = match quantity {
        Quantity::SheetDensity(sheet) => (sheet, sheet / over_cm),
        Quantity::VolumeDensity(volume) => (volume * over_cm, volume),
        _ => {
            return Err(Unclear::new(
                "this is no density",
                "give one per cm-2 or cm-3",
            ));
        }
    };
    let mut said = Restatement::default();
    said.number("density per area", sheet, "cm⁻²");
    said.number("density per volume", volume, "cm⁻³");
    said.number("over a thickness of", over_nm, "nm");
    said.note("The same thickness on both sides: one well with the density of one well, all wells with that of all.");
    Ok(said)
}

/// The word of a sense with a size, for names.
fn with_sense(name: &str, sense: Sense) -> String {
    format!("{name}, {}", sense.word())
}
