//! The table `[target]`: the wavelength that the design is for.

use super::keys::{DENSITY, Key, Kind, Table, number};
use super::number::exact;
use super::reader::{Field, Findings, Values};
use crate::source::Diagnostic;
use crate::units::CELSIUS_ZERO_K;
use std::fmt::Write as _;

/// Of what a wavelength is: the three differ by up to tens of nm.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Emission {
    /// The edge of the first transition, without gap shrinkage.
    Transition,
    /// The peak of photoluminescence at low injection, what a wafer map measures.
    Pl,
    /// The peak of the larger of TE and TM gain at a density, with gap shrinkage.
    Gain,
}

impl Emission {
    /// Every kind.
    pub const ALL: [Self; 3] = [Self::Transition, Self::Pl, Self::Gain];

    /// The word for it in files and reports.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Transition => "transition",
            Self::Pl => "pl",
            Self::Gain => "gain",
        }
    }
}

/// In what a wavelength is measured.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Medium {
    /// Vacuum.
    Vacuum,
    /// Standard air.
    Air,
}

impl Medium {
    /// Both.
    pub const ALL: [Self; 2] = [Self::Vacuum, Self::Air];

    /// The word for it in files and reports.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Vacuum => "vacuum",
            Self::Air => "air",
        }
    }
}

/// The wavelength that a design is for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Target {
    /// Of what.
    pub kind: Emission,
    /// The wavelength in `medium`, nm.
    pub wavelength_nm: f64,
    /// In what it is measured.
    pub medium: Medium,
    /// Temperature at which it holds, K.
    pub temperature_k: f64,
    /// Density at which a gain peak is meant, cm⁻³; `None`: the working density.
    pub density_cm3: Option<f64>,
    /// How far the wavelength of a good wafer may lie from the target, nm; `None`: not said.
    pub tolerance_nm: Option<f64>,
}

/// `[target]`.
pub(super) static TARGET: Table = Table {
    path: "target",
    doc: "The wavelength that the design is for; its kind and its temperature are part of it.",
    keys: &[
        Key {
            name: "kind",
            kind: Kind::Word(|| Emission::ALL.map(Emission::word).to_vec()),
            default: "",
            doc: "of what: first transition, photoluminescence peak or gain peak",
        },
        Key {
            name: "wavelength_nm",
            kind: number("nm", (200.0, 20_000.0), (400.0, 5_000.0)),
            default: "",
            doc: "the wavelength",
        },
        Key {
            name: "medium",
            kind: Kind::Word(|| Medium::ALL.map(Medium::word).to_vec()),
            default: "vacuum",
            doc: "in what it is measured",
        },
        Key {
            name: "temperature_c",
            kind: number("C", (-272.15, 726.85), (-73.15, 176.85)),
            default: "",
            doc: "temperature at which it holds, Celsius",
        },
        Key {
            name: "temperature_k",
            kind: number("K", (1.0, 1000.0), (200.0, 450.0)),
            default: "",
            doc: "the same in kelvin; give one of the two",
        },
        Key {
            name: "density_cm3",
            kind: Kind::Number(DENSITY),
            default: "the working density",
            doc: "density at which a gain peak is meant",
        },
        Key {
            name: "tolerance_nm",
            kind: number("nm", (1e-3, 500.0), (0.5, 30.0)),
            default: "",
            doc: "how far from it a good wafer may lie, to either side",
        },
    ],
};

/// The table as it stands in the file.
pub(super) struct TargetTable {
    kind: Field<String>,
    wavelength_nm: Field<f64>,
    medium: Field<String>,
    temperature_c: Field<f64>,
    temperature_k: Field<f64>,
    density_cm3: Field<f64>,
    tolerance_nm: Field<f64>,
}

impl From<Values> for TargetTable {
    fn from(mut values: Values) -> Self {
        Self {
            kind: values.text("kind"),
            wavelength_nm: values.number("wavelength_nm"),
            medium: values.text("medium"),
            temperature_c: values.number("temperature_c"),
            temperature_k: values.number("temperature_k"),
            density_cm3: values.number("density_cm3"),
            tolerance_nm: values.number("tolerance_nm"),
        }
    }
}

/// The target that the table states; `None` without a table or after a complaint.
pub(super) fn target(field: &Field<TargetTable>, findings: &mut Findings) -> Option<Target> {
    let given = field.as_ref()?;
    let table = given.value.as_ref()?;
    let missing: Vec<&str> = [
        ("`kind`", table.kind.is_none()),
        ("`wavelength_nm`", table.wavelength_nm.is_none()),
        (
            "`temperature_c`",
            table.temperature_c.is_none() && table.temperature_k.is_none(),
        ),
    ]
    .into_iter()
    .filter_map(|(name, absent)| absent.then_some(name))
    .collect();
    if !missing.is_empty() {
        findings.faults.push(
            Diagnostic::new(
                given.span.clone(),
                format!("the target has no {}", missing.join(", no ")),
            )
            .with_help("a wavelength means something with its kind and its temperature"),
        );
    }
    let number = |field: &Field<f64>| field.as_ref().and_then(|given| given.value);
    let word = |field: &Field<String>| field.as_ref().and_then(|given| given.value.clone());
    let kind = word(&table.kind);
    let medium = word(&table.medium);
    Some(Target {
        kind: Emission::ALL
            .into_iter()
            .find(|it| Some(it.word()) == kind.as_deref())?,
        wavelength_nm: number(&table.wavelength_nm)?,
        medium: Medium::ALL
            .into_iter()
            .find(|it| Some(it.word()) == medium.as_deref())
            .unwrap_or(Medium::Vacuum),
        temperature_k: one_temperature_k(&table.temperature_c, &table.temperature_k, findings)?,
        density_cm3: number(&table.density_cm3),
        tolerance_nm: number(&table.tolerance_nm),
    })
}

/// The temperature of two keys of which one may be given, K; `None` without one.
pub(super) fn one_temperature_k(
    celsius: &Field<f64>,
    kelvin: &Field<f64>,
    findings: &mut Findings,
) -> Option<f64> {
    if let (Some(celsius), Some(kelvin)) = (celsius, kelvin) {
        let key = if celsius.key.start > kelvin.key.start {
            &celsius.key
        } else {
            &kelvin.key
        };
        findings.faults.push(
            Diagnostic::new(
                key.clone(),
                "the temperature is given twice: `temperature_c` and `temperature_k`",
            )
            .with_help("keep one of them"),
        );
    }
    let number = |field: &Field<f64>| field.as_ref().and_then(|given| given.value);
    number(kelvin).or_else(|| number(celsius).map(|celsius| celsius + CELSIUS_ZERO_K))
}

/// The table as a file says it.
pub(super) fn write(target: &Target, text: &mut String) {
    let _ = writeln!(
        text,
        "\n[target]\nkind = \"{}\"\nwavelength_nm = {}\nmedium = \"{}\"\ntemperature_k = {}",
        target.kind.word(),
        exact(target.wavelength_nm),
        target.medium.word(),
        exact(target.temperature_k)
    );
    if let Some(density_cm3) = target.density_cm3 {
        let _ = writeln!(text, "density_cm3 = {}", exact(density_cm3));
    }
    if let Some(tolerance_nm) = target.tolerance_nm {
        let _ = writeln!(text, "tolerance_nm = {}", exact(tolerance_nm));
    }
}
