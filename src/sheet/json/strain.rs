//! The strain budget in the document of `levels`.

use crate::coherence::{ActiveStrain, Balance, CriticalBand, LayerStrain, StrainBudget};
use crate::materials::Mismatch;
use serde::Serialize;

#[derive(Serialize)]
pub(super) struct StrainEntry {
    layers: Vec<LayerEntry>,
    active: Option<ActiveEntry>,
    balance: Option<BalanceEntry>,
}

#[derive(Serialize)]
struct LayerEntry {
    role: &'static str,
    formula: String,
    count: usize,
    thickness_nm: f64,
    #[serde(flatten)]
    film: FilmEntry,
}

/// Wells and barriers together.
#[derive(Serialize)]
struct ActiveEntry {
    thickness_nm: f64,
    force_n_m: f64,
    #[serde(flatten)]
    film: FilmEntry,
}

#[derive(Serialize)]
struct FilmEntry {
    #[serde(flatten)]
    mismatch: MismatchEntry,
    strain_thickness_percent_nm: f64,
    /// `null` where there is no limit, or no coherent thickness: `critical_share` tells which.
    critical_single_nm: Option<f64>,
    critical_buried_nm: Option<f64>,
    critical_energy_nm: Option<f64>,
    /// Thickness over that of the force balance that holds for it; `null` where none is coherent.
    critical_share: f64,
}

#[derive(Serialize)]
struct MismatchEntry {
    strain_percent: f64,
    strain: &'static str,
    relaxed_mismatch_ppm: f64,
    perpendicular_mismatch_ppm: f64,
}

#[derive(Serialize)]
struct BalanceEntry {
    formula: String,
    count: usize,
    thickness_nm: f64,
    thickness_factor: Option<f64>,
    #[serde(flatten)]
    wanted: Option<MismatchEntry>,
}

impl From<&StrainBudget> for StrainEntry {
    fn from(budget: &StrainBudget) -> Self {
        Self {
            layers: budget.layers.iter().map(LayerEntry::from).collect(),
            active: budget.active.as_ref().map(ActiveEntry::from),
            balance: budget.balance.as_ref().map(BalanceEntry::from),
        }
    }
}

impl From<&LayerStrain> for LayerEntry {
    fn from(layer: &LayerStrain) -> Self {
        Self {
            role: layer.role.word(),
            formula: layer.formula.clone(),
            count: layer.count,
            thickness_nm: layer.thickness_nm,
            film: FilmEntry::new(
                &layer.mismatch,
                &layer.critical,
                layer.strain_thickness_percent_nm(),
                layer.critical_share(),
            ),
        }
    }
}

impl From<&ActiveStrain> for ActiveEntry {
    fn from(active: &ActiveStrain) -> Self {
        Self {
            thickness_nm: active.thickness_nm,
            force_n_m: active.force_n_m.abs(),
            film: FilmEntry::new(
                &active.mean,
                &active.critical,
                active.strain_thickness_percent_nm(),
                active.critical_share(),
            ),
        }
    }
}

impl FilmEntry {
    fn new(
        mismatch: &Mismatch,
        critical: &CriticalBand,
        strain_thickness_percent_nm: f64,
        critical_share: f64,
    ) -> Self {
        Self {
            mismatch: MismatchEntry::from(mismatch),
            strain_thickness_percent_nm,
            critical_single_nm: critical.overlayer.thickness_nm(),
            critical_buried_nm: critical.buried.thickness_nm(),
            critical_energy_nm: critical.energy_balance.thickness_nm(),
            critical_share,
        }
    }
}

impl From<&Mismatch> for MismatchEntry {
    fn from(mismatch: &Mismatch) -> Self {
        Self {
            strain_percent: mismatch.strain_percent(),
            strain: mismatch.sense().word(),
            relaxed_mismatch_ppm: mismatch.relaxed_ppm(),
            perpendicular_mismatch_ppm: mismatch.perpendicular_ppm(),
        }
    }
}

impl From<&Balance> for BalanceEntry {
    fn from(balance: &Balance) -> Self {
        Self {
            formula: balance.formula.clone(),
            count: balance.count,
            thickness_nm: balance.thickness_nm,
            thickness_factor: balance.thickness_factor,
            wanted: balance.mismatch.as_ref().map(MismatchEntry::from),
        }
    }
}
