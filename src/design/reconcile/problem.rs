//! Unknowns and data, and the most likely unknowns.

use super::{Datum, Readings, ReconcileError};
use crate::design::anchored::Anchored;
use crate::design::house_offset::HouseOffset;
use crate::design::unknown::Unknown;
use crate::diffraction::{Diffraction, Reflection};
use crate::materials::Parameters;
use crate::structure::{Bands, Measured, MismatchKind, Stack, Wavelength};
use crate::units::{photon_ev, wavelength_nm};
use nalgebra::{DMatrix, DVector};

/// Temperature of the wafer on the diffractometer, K. Mismatches of compounds on each other change
/// by a few ppm per 10 K, below what a wafer is measured to.
const DIFFRACTOMETER_K: f64 = 300.0;

/// Steps of derivatives, in prior sigmas.
pub(super) const STEP: f64 = 0.2;

/// Most steps of the iteration.
const MOST_ITERATIONS: usize = 12;

/// A step longer than this asks for new derivatives, in prior sigmas.
const LONG_STEP: f64 = 0.1;

/// Most structures that are solved in full on the way to the most likely one.
const MOST_ANCHORS: usize = 4;

/// The way is at its end where an anchor is so near the next one, in prior sigmas.
const SAME_PLACE: f64 = 0.02;

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

impl<'a> Problem<'a> {
    /// The model of photoluminescence about a stack that is solved in full for it; `None` where no
    /// peak was measured.
    pub(super) fn anchored(&self, stack: &Stack) -> Result<Option<Anchored<'a>>, ReconcileError> {
        if self.place(Datum::Pl).is_none() {
            return Ok(None);
        }
        let anchored = Anchored::at(stack, self.parameters, Wavelength::Photoluminescence)?;
        Ok(Some(anchored.ok_or(ReconcileError::NoEmission)?))
    }

    /// Where a datum stands among the data.
    pub(super) fn place(&self, wanted: Datum) -> Option<usize> {
        self.data.iter().position(|(datum, _)| *datum == wanted)
    }

    /// What the model gives for a stack, in the order of the data.
    pub(super) fn predicted(
        &self,
        stack: Stack,
        anchored: Option<&Anchored<'_>>,
    ) -> Result<Vec<f64>, ReconcileError> {
        let wants_xray = self.data.iter().any(|(datum, _)| *datum != Datum::Pl);
        let multi_well = if wants_xray {
            let seen =
                Diffraction::new(&stack, self.parameters, self.reflection, DIFFRACTOMETER_K)?;
            Some(seen.multi_well.ok_or(ReconcileError::NoPeriod)?)
        } else {
            None
        };
        let peak_nm = match anchored {
            Some(anchored) => anchored.wavelength_nm(stack)?,
            None => None,
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
                    let peak_nm = peak_nm.ok_or(ReconcileError::NoEmission)?;
                    Ok(self.with_offset_nm(peak_nm))
                }
            })
            .collect()
    }

    /// A peak of the model with the house offset.
    pub(super) fn with_offset_nm(&self, peak_nm: f64) -> f64 {
        wavelength_nm(photon_ev(peak_nm) + 1e-3 * self.offset_mev)
    }

    /// The same with the unknowns at so many prior sigmas.
    fn moved(
        &self,
        unknowns: &[Unknown],
        v: &DVector<f64>,
        anchored: Option<&Anchored<'_>>,
    ) -> Result<Vec<f64>, ReconcileError> {
        self.predicted(grown(&self.stack, unknowns, v), anchored)
    }

    /// Derivatives of the predictions, in sigmas of the data for a prior sigma of each unknown.
    fn jacobian(
        &self,
        unknowns: &[Unknown],
        v: &DVector<f64>,
        anchored: Option<&Anchored<'_>>,
    ) -> Result<DMatrix<f64>, ReconcileError> {
        let mut jacobian = DMatrix::zeros(self.data.len(), unknowns.len());
        for unknown in 0..unknowns.len() {
            let side = |step: f64| {
                let mut moved = v.clone();
                moved[unknown] += step;
                self.moved(unknowns, &moved, anchored)
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
    /// What the full model gives for them.
    pub(super) predicted: Vec<f64>,
    pub(super) jacobian: DMatrix<f64>,
    /// (JᵀJ + 1)⁻¹.
    pub(super) covariance: DMatrix<f64>,
}

/// The most likely unknowns by the full model: where it was solved last, its photoluminescence is
/// followed by single bands to the next place, until that is where it was solved.
///
/// # Arguments
///
/// * `at_order` – the model about the order
pub(super) fn posterior(
    problem: &Problem<'_>,
    unknowns: &[Unknown],
    at_order: Option<&Anchored<'_>>,
) -> Result<Posterior, ReconcileError> {
    let mut anchored = at_order.copied();
    let mut v = DVector::zeros(unknowns.len());
    let mut jacobian = DMatrix::zeros(0, 0);
    for _ in 0..MOST_ANCHORS {
        let next = most_likely(problem, unknowns, anchored.as_ref(), &v)?;
        let moved = (&next.0 - &v).norm();
        (v, jacobian) = next;
        anchored = problem.anchored(&grown(&problem.stack, unknowns, &v))?;
        if moved < SAME_PLACE || problem.stack.model.bands == Bands::Single {
            break;
        }
    }
    Ok(Posterior {
        predicted: problem.moved(unknowns, &v, anchored.as_ref())?,
        covariance: covariance(&jacobian),
        jacobian,
        v,
    })
}

fn covariance(jacobian: &DMatrix<f64>) -> DMatrix<f64> {
    let count = jacobian.ncols();
    (jacobian.transpose() * jacobian + DMatrix::identity(count, count))
        .cholesky()
        .expect("a square and the unit matrix make a positive definite one")
        .inverse()
}

/// The most likely unknowns by a model of photoluminescence near one stack, by steps of Gauss and
/// Newton from `start`, and the derivatives within a tenth of a prior sigma of them.
fn most_likely(
    problem: &Problem<'_>,
    unknowns: &[Unknown],
    anchored: Option<&Anchored<'_>>,
    start: &DVector<f64>,
) -> Result<(DVector<f64>, DMatrix<f64>), ReconcileError> {
    let mut v = start.clone();
    // The derivatives change little along the way: they are taken again after a long step only.
    let mut jacobian = problem.jacobian(unknowns, &v, anchored)?;
    for _ in 0..MOST_ITERATIONS {
        let predicted = problem.moved(unknowns, &v, anchored)?;
        let gradient = jacobian.transpose() * problem.misses(&predicted) - &v;
        let step = covariance(&jacobian) * gradient;
        let length = step.norm();
        let factor = if length > LONGEST_STEP {
            LONGEST_STEP / length
        } else {
            1.0
        };
        v += factor * step;
        if length < 1e-3 {
            break;
        }
        if length > LONG_STEP {
            jacobian = problem.jacobian(unknowns, &v, anchored)?;
        }
    }
    Ok((v, jacobian))
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
