//! Judgement of a design: what an evaluation means for the wafer.

mod check;

pub use check::{Carrier, Finding, Limits, Measure, Standing, check};
