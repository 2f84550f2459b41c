//! Judgement of a design: what an evaluation means for the wafer, which structures meet a target,
//! and how they compare.

mod aim;
mod anchored;
mod chart;
mod check;
mod draws;
mod figures_of_merit;
mod house_offset;
mod movement;
mod order;
mod progress;
mod reactor;
mod reconcile;
mod spread;
mod surrogate;
mod unknown;
mod wafer;
mod weigh;

pub use aim::{Aim, AimError, Binding, MET_NM, Nearest, Outcome, Search, Solution, aim};
pub use chart::{Chart, ChartFigure, ChartPoint};
pub use check::{Carrier, Finding, Measure, Scatter, Standing, check};
pub use figures_of_merit::{FiguresOfMerit, ShareDrift};
pub use house_offset::{HouseOffset, family};
pub use movement::{Immovable, Impossible, Move, Quantity, Variation};
pub use order::{
    Audience, Conduction, Counts, Gap, House, Ordered, OrderedEnd, OrderedLayer, Period, PlTarget,
    SPREAD_DRAWS, SPREAD_SEED, Targets, XrayTarget,
};
pub use progress::{Interrupted, Progress};
pub use reactor::{Cause, Reactor, Variable};
pub use reconcile::{
    Correction, Datum, Deviation, Direction, Estimate, LimitedFigure, Readings, ReconcileError,
    Reconciliation, SingleCause, estimate, modelled_pl_nm, reconcile,
};
pub use spread::{
    Histogram, LayerSpread, MODEL_NM, Miss, Moments, Request, Sensitivity, Solving, Spread,
    SpreadError, Wanted, Yield, in_vacuum_nm, posed, spread, vacuum_nm, wavelength_nm,
};
pub use unknown::{Moved, Unknown, unknowns};
pub use wafer::{StrainLimits, WaferFinding};
pub use weigh::{Contender, Equal, Matter, Weighed, weigh};
