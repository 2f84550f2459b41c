//! The problems that speed is measured on, each the same for every method.

pub(crate) mod single_band;
pub(crate) mod spectrum;
pub(crate) mod valence;
