//! Judgement of a design: what an evaluation means for the wafer, which structures meet a target,
//! and how they compare.

mod check;
mod movement;
mod wafer;

pub use check::{Carrier, Finding, Measure, Standing, check};
pub use movement::{Immovable, Impossible, Move, Quantity, Variation};
pub use wafer::{StrainLimits, WaferFinding};
