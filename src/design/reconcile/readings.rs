//! What was measured, in the units of the model.

use crate::design::spread::in_vacuum_nm;
use crate::diffraction::Reflection;
use crate::structure::{MeanMismatch, Measured, PhotoluminescenceMap, PlPeak, Returned};

/// What was measured, in the units of the model.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Readings {
    /// Peak of photoluminescence, nm in vacuum.
    pub pl_nm: Option<Measured>,
    /// Temperature of the wafer on the bench, K.
    pub temperature_k: Option<f64>,
    /// The reflection in which X-rays were measured.
    pub reflection: Reflection,
    /// Period, nm.
    pub period_nm: Option<Measured>,
    /// Mean mismatch of a period.
    pub mismatch: Option<MeanMismatch>,
}

impl Readings {
    /// Those of a file of returned data.
    ///
    /// # Arguments
    ///
    /// * `map` – the map of the wafer, where the file speaks of one: its median counts
    #[must_use]
    pub fn of(returned: &Returned, map: Option<&PhotoluminescenceMap>) -> Self {
        let pl_nm = returned.pl.as_ref().and_then(|pl| {
            let peak_nm = match &pl.peak {
                PlPeak::Nm(peak_nm) => *peak_nm,
                PlPeak::Map(_) => map?.median_nm(),
            };
            Some(Measured {
                value: in_vacuum_nm(peak_nm, pl.medium),
                sigma: pl.sigma_nm,
                sigma_given: pl.sigma_given,
            })
        });
        let xray = returned.xray.as_ref();
        Self {
            pl_nm,
            temperature_k: returned.pl.as_ref().map(|pl| pl.temperature_k),
            reflection: xray
                .and_then(|xray| xray.reflection.parse().ok())
                .unwrap_or_default(),
            period_nm: xray.and_then(|xray| xray.period_nm),
            mismatch: xray.and_then(|xray| xray.mismatch),
        }
    }
}
