//! Judgement of a design: what an evaluation means for the wafer.

mod check;
mod wafer;

pub use check::{Carrier, Finding, Measure, Standing, check};
pub use wafer::{StrainLimits, WaferFinding};
