//! What may change in a structure, what gives way to it, and the structure that comes of it.
//!
//! A [`Move`] names one number and its bounds. A [`Variation`] is a structure with some moves: at
//! any values of them it is a [`Stack`], or the text of a file in which nothing else has changed.
//!
//! # What gives way
//!
//! * thickness: nothing
//! * an element's share: in a material asked for by gap and strain, the strain stays and the gap
//!   gives way; in a formula, the other elements of the sublattice give way in their present ratio
//! * strain: the gap stays (a ternary has nothing left to stay)
//! * gap: the strain stays (likewise)
//!
//! Two moves of one quaternary settle it by themselves.

mod ground;
mod recipe;
mod shares;
mod variation;

pub use variation::Variation;

use std::fmt;

use crate::materials::{Element, SolveError};

/// A number that may change.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Quantity {
    /// Thickness of layers, nm.
    Thickness,
    /// Share of an element on its sublattice.
    Share(Element),
    /// In-plane strain at 300 K, %; negative is compressive.
    Strain,
    /// Gap of the strained bulk layer at 300 K as a wavelength, nm.
    Gap,
}

impl Quantity {
    /// The digits with which a value goes into a file: far below what a reactor can hold, and fine
    /// enough that no wavelength moves by 0.01 nm.
    fn rounded(self, value: f64) -> f64 {
        let per_unit = match self {
            Self::Thickness | Self::Strain => 1e5,
            Self::Share(_) => 1e6,
            Self::Gap => 1e4,
        };
        (value * per_unit).round() / per_unit
    }
}

/// A number that may change, and how far.
#[derive(Clone, Debug, PartialEq)]
pub struct Move {
    /// A material, or a role.
    pub name: String,
    /// Which of its numbers.
    pub quantity: Quantity,
    /// Lowest value, in the unit of the quantity.
    pub from: f64,
    /// Highest value.
    pub to: f64,
}

impl Move {
    /// Its name with the unit at the end: `well.thickness_nm`, `well.In`,
    /// `well.compressive_percent`, `well.gap_nm`.
    ///
    /// A strain of which some values are tensile is `tensile_percent`, negative where compressive.
    #[must_use]
    pub fn key(&self) -> String {
        let quantity = match self.quantity {
            Quantity::Thickness => "thickness_nm",
            Quantity::Share(element) => element.symbol(),
            Quantity::Strain if self.is_compressive() => "compressive_percent",
            Quantity::Strain => "tensile_percent",
            Quantity::Gap => "gap_nm",
        };
        format!("{}.{quantity}", self.name)
    }

    /// A value as its key means it: a compressive strain is written positive.
    #[must_use]
    pub fn said(&self, value: f64) -> f64 {
        if self.quantity == Quantity::Strain && self.is_compressive() {
            -value
        } else {
            value
        }
    }

    fn is_compressive(&self) -> bool {
        self.to <= 0.0
    }

    /// The value at a share of the way from its lowest to its highest.
    #[must_use]
    pub fn at(&self, share: f64) -> f64 {
        self.from + share * (self.to - self.from)
    }
}

/// Why a move means nothing in a structure.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Immovable {
    /// Neither a material nor a role.
    #[error("`{name}` is neither a material nor a role of this structure")]
    Unknown {
        /// The name.
        name: String,
        /// Names that there are.
        known: Vec<String>,
    },
    /// Layers of the name differ in thickness.
    #[error("the layers of `{name}` are not of one thickness")]
    SeveralThicknesses {
        /// The name.
        name: String,
    },
    /// Layers of the role differ in material.
    #[error("the layers of role `{name}` are not of one material")]
    SeveralMaterials {
        /// The role.
        name: String,
        /// Their materials.
        materials: Vec<String>,
    },
    /// A material of own numbers.
    #[error("`{name}` is given by its own numbers: only its thickness can move")]
    OwnNumbers {
        /// The name.
        name: String,
    },
    /// An element that the material does not have.
    #[error("`{name}` is {family}: it has no {element} to choose")]
    NoSuchShare {
        /// The name.
        name: String,
        /// Its elements.
        family: String,
        /// The element.
        element: &'static str,
    },
    /// More is asked of a material than its elements can meet.
    #[error("`{name}` is {family}; free fractions: {free}, moves: {asked}")]
    TooMany {
        /// The name.
        name: String,
        /// Its elements.
        family: String,
        /// Fractions to choose.
        free: usize,
        /// Moves.
        asked: usize,
    },
    /// A gap or strain of a material with more than two fractions to choose.
    #[error("`{name}` is {family}: a gap and a strain leave its composition open")]
    TooOpen {
        /// The name.
        name: String,
        /// Its elements.
        family: String,
    },
    /// Bounds that no file may hold.
    #[error("{key} can't run from {from} to {to}: possible is {lowest} to {highest}")]
    Bounds {
        /// The move.
        key: String,
        /// Lower bound.
        from: f64,
        /// Upper bound.
        to: f64,
        /// Lowest possible.
        lowest: f64,
        /// Highest possible.
        highest: f64,
    },
    /// The same number twice.
    #[error("{key} moves twice")]
    Twice {
        /// The move.
        key: String,
    },
}

impl Immovable {
    /// What to do about it.
    #[must_use]
    pub fn advice(&self) -> String {
        match self {
            Self::Unknown { known, .. } => format!("there are {}", known.join(", ")),
            Self::SeveralThicknesses { .. } => {
                "name a role, or a material whose layers are all alike".to_owned()
            }
            Self::SeveralMaterials { materials, .. } => {
                format!("name one of them: {}", materials.join(", "))
            }
            Self::OwnNumbers { .. } => {
                "move its thickness, or give the material as an alloy".to_owned()
            }
            Self::NoSuchShare { .. } => "move the share of one of its elements".to_owned(),
            Self::TooMany { free: 0, .. } => {
                "move its thickness, or the composition of another material".to_owned()
            }
            Self::TooMany { .. } => "leave one of them out".to_owned(),
            Self::TooOpen { .. } => "move the shares of its elements".to_owned(),
            Self::Bounds { .. } => "check the unit and the order of the bounds".to_owned(),
            Self::Twice { .. } => "keep one of them".to_owned(),
        }
    }
}

/// Why there is no structure at some values.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Impossible {
    /// No composition meets the values.
    #[error("{0}")]
    Composition(String),
    /// The well is indirect.
    #[error("a well of {0} is indirect")]
    Indirect(String),
}

impl From<SolveError> for Impossible {
    fn from(error: SolveError) -> Self {
        Self::Composition(error.to_string())
    }
}

impl fmt::Display for Move {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        formatter.write_str(&self.key())
    }
}

/// Bounds that a file may hold.
fn check_bounds(wanted: &Move) -> Result<(), Immovable> {
    let (lowest, highest) = match wanted.quantity {
        Quantity::Thickness | Quantity::Gap => (150.0, 20_000.0),
        Quantity::Share(_) => (0.0, 1.0),
        Quantity::Strain => (-5.0, 5.0),
    };
    within(wanted, lowest, highest)
}

fn within(wanted: &Move, lowest: f64, highest: f64) -> Result<(), Immovable> {
    if wanted.from >= lowest && wanted.to <= highest && wanted.from < wanted.to {
        return Ok(());
    }
    Err(Immovable::Bounds {
        key: wanted.key(),
        from: wanted.from,
        to: wanted.to,
        lowest,
        highest,
    })
}
