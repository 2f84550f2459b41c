//! Unknowns and data, and the most likely unknowns.

use super::{Datum, Readings, ReconcileError};
use crate::design::house_offset::HouseOffset;
use crate::design::unknown::Unknown;
use crate::diffraction::{Diffraction, Reflection};
use crate::evaluation::Evaluation;
use crate::materials::Parameters;
use crate::structure::{Measured, MismatchKind, Stack, Wavelength};
use crate::units::{photon_ev, wavelength_nm};
use nalgebra::{DMatrix, DVector};

/// Temperature of the wafer on the diffractometer, K. Mismatches of compounds on each other change
/// by a few ppm per 10 K, below what a wafer is measured to.
const DIFFRACTOMETER_K: f64 = 300.0;

/// Steps of derivatives, in prior sigmas.
pub(super) const STEP: f64 = 0.2;

/// Most steps of the iteration.
const MOST_ITERATIONS: usize = 12;

/// Longest step of the iteration, in prior sigmas.
const LONGEST_STEP: f64 = 2.0;

/// Unknowns and data.
pub(super) struct Problem<'a> {
    pub(super) stack: Stack,
    pub(super) parameters: &'a Parameters,
    pub(super) data: Vec<(Datum, Measured)>,
    /// Errors of the data, the model's included.
    pub(super) sigmas: Vec<f64>,
    pub(super) offset_mev: f64,
    pub(super) reflection: Reflection,
}

impl Problem<'_> {
    /// What the model gives for a stack, in the order of the data.
    pub(super) fn predicted(
        &self,
        stack: &Stack,
        pl_shift_nm: f64,
    ) -> Result<Vec<f64>, ReconcileError> {
        let wants_xray = self.data.iter().any(|(datum, _)| *datum != Datum::Pl);
        let multi_well = if wants_xray {
            let seen = Diffraction::new(stack, self.parameters, self.reflection, DIFFRACTOMETER_K)?;
            Some(seen.multi_well.ok_or(ReconcileError::NoPeriod)?)
        } else {
            None
        };
        self.data
            .iter()
            .map(|(datum, _)| match (datum, &multi_well) {
                (Datum::Period, Some(seen)) => Ok(seen.period_nm),
                (Datum::Mismatch(MismatchKind::Perpendicular), Some(seen)) => {
                    Ok(seen.mean.perpendicular_ppm())
                }
                (Datum::Mismatch(MismatchKind::Relaxed), Some(seen)) => Ok(seen.mean.relaxed_ppm()),
                (Datum::Pl, _) | (_, None) => {
                    let peak_nm = Evaluation::new(stack, self.parameters)?
                        .wavelength_nm(Wavelength::Photoluminescence)
                        .ok_or(ReconcileError::NoEmission)?;
                    let photon = photon_ev(peak_nm) + 1e-3 * self.offset_mev;
                    Ok(wavelength_nm(photon) + pl_shift_nm)
                }
            })
            .collect()
    }

    /// The same with the unknowns at so many prior sigmas.
    pub(super) fn moved(
        &self,
        unknowns: &[Unknown],
        v: &DVector<f64>,
    ) -> Result<Vec<f64>, ReconcileError> {
        self.predicted(&grown(&self.stack, unknowns, v), 0.0)
    }

    /// Derivatives of the predictions, in sigmas of the data for a prior sigma of each unknown.
    fn jacobian(
        &self,
        unknowns: &[Unknown],
        v: &DVector<f64>,
    ) -> Result<DMatrix<f64>, ReconcileError> {
        let mut jacobian = DMatrix::zeros(self.data.len(), unknowns.len());
        for unknown in 0..unknowns.len() {
            let side = |step: f64| {
                let mut moved = v.clone();
                moved[unknown] += step;
                self.moved(unknowns, &moved)
            };
            let (above, below) = (side(STEP)?, side(-STEP)?);
            for datum in 0..self.data.len() {
                jacobian[(datum, unknown)] =
                    (above[datum] - below[datum]) / (2.0 * STEP * self.sigmas[datum]);
            }
        }
        Ok(jacobian)
    }

    /// Measured less predicted, in sigmas.
    pub(super) fn misses(&self, predicted: &[f64]) -> DVector<f64> {
        DVector::from_iterator(
            self.data.len(),
            self.data
                .iter()
                .zip(predicted)
                .zip(&self.sigmas)
                .map(|(((_, measured), predicted), sigma)| (measured.value - predicted) / sigma),
        )
    }
}

/// The stack with unknowns at so many prior sigmas.
pub(super) fn grown(stack: &Stack, unknowns: &[Unknown], v: &DVector<f64>) -> Stack {
    let mut grown = stack.clone();
    for (unknown, v) in unknowns.iter().zip(v.iter()) {
        unknown.shift(&mut grown, v * unknown.prior_sigma);
    }
    grown
}

/// The most likely unknowns.
pub(super) struct Posterior {
    /// In prior sigmas.
    pub(super) v: DVector<f64>,
    pub(super) predicted: Vec<f64>,
    pub(super) jacobian: DMatrix<f64>,
    /// (JᵀJ + 1)⁻¹.
    pub(super) covariance: DMatrix<f64>,
}

pub(super) fn posterior(
    problem: &Problem<'_>,
    unknowns: &[Unknown],
) -> Result<Posterior, ReconcileError> {
    let count = unknowns.len();
    let one = DMatrix::<f64>::identity(count, count);
    let inverse = |jacobian: &DMatrix<f64>| {
        (jacobian.transpose() * jacobian + &one)
            .cholesky()
            .expect("a square and the unit matrix make a positive definite one")
            .inverse()
    };
    let mut v = DVector::zeros(count);
    let mut predicted = problem.moved(unknowns, &v)?;
    // The derivatives change little along the way: they are taken at the start and once more at the
    // end, where they make the covariance.
    let mut jacobian = problem.jacobian(unknowns, &v)?;
    let mut covariance = inverse(&jacobian);
    for _ in 0..MOST_ITERATIONS {
        let gradient = jacobian.transpose() * problem.misses(&predicted) - &v;
        let step = &covariance * gradient;
        let length = step.norm();
        let factor = if length > LONGEST_STEP {
            LONGEST_STEP / length
        } else {
            1.0
        };
        v += factor * step;
        predicted = problem.moved(unknowns, &v)?;
        if length < 1e-3 {
            break;
        }
        if length > 0.5 {
            jacobian = problem.jacobian(unknowns, &v)?;
            covariance = inverse(&jacobian);
        }
    }
    let jacobian = problem.jacobian(unknowns, &v)?;
    let covariance = inverse(&jacobian);
    Ok(Posterior {
        v,
        predicted,
        jacobian,
        covariance,
    })
}

pub(super) fn problem<'a>(
    stack: &Stack,
    parameters: &'a Parameters,
    readings: &Readings,
    offset: &HouseOffset,
) -> Problem<'a> {
    let mut stack = stack.clone();
    if let Some(temperature_k) = readings.temperature_k {
        stack.operation.temperature_k = temperature_k;
    }
    let mut data = Vec::new();
    let mut sigmas = Vec::new();
    if let Some(pl) = readings.pl_nm {
        let nm_per_mev = 1e-3 * pl.value / photon_ev(pl.value);
        data.push((Datum::Pl, pl));
        sigmas.push(pl.sigma.hypot(nm_per_mev * offset.sigma_mev));
    }
    if let Some(period) = readings.period_nm {
        data.push((Datum::Period, period));
        sigmas.push(period.sigma);
    }
    if let Some(mismatch) = readings.mismatch {
        data.push((Datum::Mismatch(mismatch.kind), mismatch.ppm));
        sigmas.push(mismatch.ppm.sigma);
    }
    Problem {
        stack,
        parameters,
        data,
        sigmas,
        offset_mev: offset.offset_mev,
        reflection: readings.reflection,
    }
}
