//! Materials: parameter data with their citations, alloys, temperature, strain, refractive index.
//!
//! [`Parameters`] holds the data files; a [`Composition`] and a temperature make a [`Crystal`], the
//! numbers of one unstrained material; a crystal [on a substrate](Crystal::on) has [`Edges`].

mod composition;
mod crystal;
mod parameters;

pub use composition::Composition;
pub use crystal::{Crystal, Edges, Sense};
pub use parameters::{Offsets, Parameters};
