//! Numbers become text here, and nowhere else: pages for a terminal, JSON, comma-separated
//! values, figures.
//!
//! Writers read the records of `evaluation` and `design` and compute no physics.

mod aim;
mod chart;
pub mod csv;
pub mod figure;
mod findings;
pub mod json;
mod levels;
mod materials;
mod matrix;
mod number;
pub mod order;
mod page;
mod picture;
mod reconcile;
mod remark;
mod restatement;
mod spectrum;
mod spread;
mod stamp;
mod starting;
mod strain;
mod table;
mod weigh;
mod xray;

pub use aim::aim;
pub use chart::{chart, chart_part};
pub use findings::findings;
pub use levels::levels;
pub use materials::{descriptions, families};
pub use matrix::{matrix_market, valence_matrix_market};
pub use picture::{chart_figure, levels_figure, rocking_figure, spectrum_figure, weigh_figure};
pub use reconcile::{Wafer, reconcile};
pub use remark::{complaint, remark};
pub use restatement::restatement;
pub use spectrum::spectrum;
pub use spread::{spread, spread_figure};
pub use stamp::{Stamp, Switches, sha256};
pub use starting::starting_structures;
pub use weigh::weigh;
pub use xray::xray;
