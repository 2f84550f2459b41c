//! Materials: parameter data with their citations, alloys, temperature, strain, refractive index.
//!
//! [`Parameters`] holds the data files; a [`Composition`] and a temperature make a [`Crystal`], the
//! numbers of one unstrained material; a crystal [on a substrate](Crystal::on) has [`Edges`].

mod composition;
mod composition_line;
mod crystal;
mod description;
mod formula;
mod index_data;
mod interpolation;
mod mismatch;
mod mixing;
mod offsets;
mod other_sources;
mod parameters;
mod prescription;
mod quantity;
mod reading;
mod refraction;
mod table;

pub use composition::{Composition, Element, Elements};
pub use crystal::{Crystal, Edges, Sense};
pub use description::{Description, Directness, Family, Figure, IndexFigure, Section};
pub use index_data::IndexStatement;
pub use mismatch::Mismatch;
pub use offsets::{OffsetRule, Offsets};
pub use other_sources::OtherEnergy;
pub use parameters::{MissingTernary, Parameters};
pub use prescription::{SolveError, solve_composition};
pub use quantity::{BINARY_KEYS, Key, TERNARY_KEYS};
pub use refraction::{IndexAdvice, IndexModel, Refraction};
pub use table::{Alternate, Entry, Material, SHIPPED_NAME, Table};
