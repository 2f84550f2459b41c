//! The design sheet: one record, and what is made of it.
//!
//! A [`Document`] is the record as JSON. Pages and tables are made of it and of nothing else: every
//! number on them is looked up in it by its place, so that they cannot say anything that it does not.
//!
//! ```text
//! Ordered, House -> document (JSON) -> content (headings, tables, numbers) -> page, PDF
//!                          \-> layers.csv, changes, verification
//! ```

mod cautions;
mod changes;
mod companions;
mod content;
mod document;
mod figures;
mod html;
mod inspect;
mod once;
mod pdf;
mod summary;
mod table;

pub use changes::{Change, Since, Unreadable};
pub use companions::Standing;
pub use document::{Document, Origins};
pub use figures::Figures;
pub use inspect::{Deviation, Inspection, Kept, inspect, kept};
pub use pdf::Paper;
pub use summary::{inspection, inspection_json, summary};
