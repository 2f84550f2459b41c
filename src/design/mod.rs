//! Judgement of a design: what an evaluation means for the wafer, which structures meet a target,
//! and how they compare.

mod check;
mod draws;
mod movement;
mod reactor;
mod spread;
mod surrogate;

pub use check::{Carrier, Finding, Limits, Measure, Standing, check};
pub use movement::{Immovable, Impossible, Move, Quantity, Variation};
pub use reactor::{Cause, Reactor, Variable};
pub use spread::{
    Histogram, LayerSpread, MODEL_NM, Miss, Moments, Request, Sensitivity, Solving, Spread,
    SpreadError, Wanted, Yield, posed, spread, vacuum_nm, wavelength_nm,
};
