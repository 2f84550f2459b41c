//! Judgement of a design: what an evaluation means for the wafer, which structures meet a target,
//! and how they compare.

mod aim;
mod chart;
mod check;
mod figures_of_merit;
mod movement;
mod progress;
mod weigh;

pub use aim::{Aim, AimError, Binding, MET_NM, Nearest, Outcome, Search, Solution, aim};
pub use chart::{Chart, ChartFigure, ChartPoint};
pub use check::{Carrier, Finding, Limits, Measure, Standing, check};
pub use figures_of_merit::{FiguresOfMerit, ShareDrift};
pub use movement::{Immovable, Impossible, Move, Quantity, Variation};
pub use progress::{Interrupted, Progress};
pub use weigh::{Contender, Equal, Matter, Weighed, weigh};
