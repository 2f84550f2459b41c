//! One JSON document a command, for programs to read.
//!
//! Keys and their meaning are fixed under `"format": 1`: new keys may come, old ones stay. Energies
//! are on one scale, holes as electron energies; what does not exist is `null`.

mod design;
mod findings;
mod layout;
mod levels;
mod materials;
mod reconcile;
mod restatement;
mod spectrum;
mod spread;
mod strain;
mod xray;

pub use design::{aim, chart, weigh};
pub use findings::findings;
pub use levels::levels;
pub use materials::{descriptions, families};
pub use reconcile::reconcile;
pub use restatement::restatement;
pub use spectrum::spectrum;
pub(in crate::sheet) use spread::key as cause_key;
pub use spread::spread;
pub use xray::xray;

use serde::Serialize;

/// Version of the documents.
pub(in crate::sheet) const FORMAT: u32 = 1;

/// A document as text: an object's keys on lines of their own, lists on one.
pub(in crate::sheet) fn text(document: &impl Serialize) -> String {
    layout::text(document)
}
