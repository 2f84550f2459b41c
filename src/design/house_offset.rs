//! By how much the model is known to miss in one alloy family.
//!
//! # Equation
//!
//! Each family has an offset of its own, drawn from a normal law about 0 whose sigma s₀ is the
//! model's error on a first design; runs of the family scatter about it with τ. With n runs of mean
//! offset d̄ in the ledger,
//!
//! ```text
//!  1/s² = 1/s₀² + n/τ²       offset = s² n d̄/τ²       error of the next run = √(s² + τ²)
//! ```
//!
//! so that an empty ledger leaves s₀ (and τ), one run brings the error near τ, and no run is
//! believed to the last meV. From three runs on τ is their own standard deviation, the common value
//! counting as one run more.

use crate::structure::{Ledger, Stack, Substance};
use crate::units::photon_ev;

/// Scatter of the model's miss from run to run of one family, nm (common practice: growth and bench
/// repeat to 1 to 3 nm).
const SCATTER_NM: f64 = 2.0;

/// The offset of a family.
#[derive(Clone, Debug, PartialEq)]
pub struct HouseOffset {
    /// The family: `AlGaInAs on InP`.
    pub family: String,
    /// Runs of the ledger that it rests on.
    pub runs: usize,
    /// Measured less modelled photon energy to be expected, meV.
    pub offset_mev: f64,
    /// Its error for the next run, meV.
    pub sigma_mev: f64,
}

/// The family of a stack: its first well and its substrate.
#[must_use]
pub fn family(stack: &Stack) -> String {
    let name = |material: &crate::structure::Material| match &material.substance {
        Substance::Alloy(composition) => composition.family(),
        Substance::Own { .. } => material.name.clone(),
    };
    let well = stack.wells().next().map(|layer| name(&layer.material));
    format!("{} on {}", well.unwrap_or_default(), name(&stack.substrate))
}

impl HouseOffset {
    /// The offset of the family of a stack.
    ///
    /// # Arguments
    ///
    /// * `model_nm` – error of the model on a first design, nm
    /// * `at_nm` – wavelength at which errors in nm become errors in meV, nm
    #[must_use]
    pub fn of(stack: &Stack, ledger: &Ledger, model_nm: f64, at_nm: f64) -> Self {
        let family = family(stack);
        let offsets: Vec<f64> = ledger
            .entries
            .iter()
            .map(|(_, entry)| entry)
            .filter(|entry| entry.family == family && entry.bands == stack.model.bands.word())
            .map(crate::structure::LedgerEntry::offset_mev)
            .collect();
        let mev_per_nm = 1e3 * photon_ev(at_nm) / at_nm;
        let first = (mev_per_nm * model_nm).powi(2);
        let usual = (mev_per_nm * SCATTER_NM).powi(2);
        let count = offsets.len() as f64;
        let mean = offsets.iter().sum::<f64>() / count.max(1.0);
        let scatter = if offsets.len() < 3 {
            usual
        } else {
            let squares: f64 = offsets.iter().map(|offset| (offset - mean).powi(2)).sum();
            (usual + squares) / count
        };
        let precision = if first > 0.0 {
            first.recip() + count / scatter
        } else {
            f64::INFINITY
        };
        let variance = precision.recip();
        Self {
            family,
            runs: offsets.len(),
            offset_mev: variance * count * mean / scatter,
            sigma_mev: if first > 0.0 {
                (variance + scatter).sqrt()
            } else {
                0.0
            },
        }
    }
}
