//! The problems that speed is measured on, each the same for every method.

pub mod single_band;
pub mod spectrum;
pub mod valence;
