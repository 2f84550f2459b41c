//! What was grown, from photoluminescence and X-ray, against what was ordered.
//!
//! # Equation
//!
//! Unknowns u (shifts of thicknesses and shares) have independent normal priors of sigma s_j about
//! 0, data d_i have normal errors σ_i, those of photoluminescence the model's own error included.
//! The most likely u makes
//!
//! ```text
//!  Σ ((d_i − f_i(u))/σ_i)² + Σ (u_j/s_j)²
//! ```
//!
//! least; f is the full model. With v = u/s and J = ∂(f/σ)/∂v there, the covariance of v is
//! (JᵀJ + 1)⁻¹ (Gauss and Newton's; Rodgers, Inverse Methods for Atmospheric Sounding (2000),
//! chapter 2).
//!
//! # What the data cannot tell
//!
//! An eigenvector of JᵀJ with eigenvalue λ is a combination of unknowns whose variance the data
//! lower by the factor 1/(1 + λ). Where λ < 1 they say less than was known before: the combination is
//! undetermined, and what is estimated along it is the prior. It takes another datum, or an
//! assumption that leaves an unknown out.
//!
//! # Correction
//!
//! The next order moves against the estimate by a share of it (exponential smoothing, the steady
//! state of a Kalman filter; R. E. Kalman, J. Basic Eng. 82, 35 (1960)), so that noise is not
//! chased. Where the estimate is smaller than its own sigma there is no correction.

use super::house_offset::HouseOffset;
use super::spread::in_vacuum_nm;
use super::unknown::{Unknown, every_cause};
use crate::diffraction::{Diffraction, NoReflection, Reflection};
use crate::evaluation::{Evaluation, Failure};
use crate::materials::Parameters;
use crate::structure::{
    MeanMismatch, Measured, MismatchKind, PhotoluminescenceMap, PlPeak, Returned, Stack, Wavelength,
};
use crate::units::{photon_ev, wavelength_nm};
use nalgebra::{DMatrix, DVector, SymmetricEigen};

/// Temperature of the wafer on the diffractometer, K. Mismatches of compounds on each other change
/// by a few ppm per 10 K, below what a wafer is measured to.
const DIFFRACTOMETER_K: f64 = 300.0;
/// Steps of derivatives, in prior sigmas.
const STEP: f64 = 0.2;
/// Most steps of the iteration.
const MOST_ITERATIONS: usize = 12;
/// Longest step of the iteration, in prior sigmas.
const LONGEST_STEP: f64 = 2.0;
/// A component of a direction smaller than this share of it is not named.
const LEAST_COMPONENT: f64 = 0.15;
/// Prior error of the temperature of a bench, K (common practice).
const BENCH_K: f64 = 3.0;

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

/// Which number was measured.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Datum {
    /// Peak of photoluminescence, nm in vacuum.
    Pl,
    /// Period, nm.
    Period,
    /// Mean mismatch, ppm, positive where compressive.
    Mismatch(MismatchKind),
}

impl Datum {
    /// Its name in reports.
    #[must_use]
    pub fn name(self) -> &'static str {
        match self {
            Self::Pl => "photoluminescence",
            Self::Period => "period",
            Self::Mismatch(MismatchKind::Perpendicular) => "perpendicular mismatch",
            Self::Mismatch(MismatchKind::Relaxed) => "relaxed mismatch",
        }
    }

    /// Its unit.
    #[must_use]
    pub fn unit(self) -> &'static str {
        match self {
            Self::Pl | Self::Period => "nm",
            Self::Mismatch(_) => "ppm",
        }
    }
}

/// One number that was measured beside what the order gives.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Deviation {
    /// Which.
    pub datum: Datum,
    /// As measured.
    pub measured: f64,
    /// What the model gives for the order, the house offset included.
    pub ordered: f64,
    /// What it gives for the estimate.
    pub estimated: f64,
    /// Error of the measurement alone.
    pub measurement_sigma: f64,
    /// Whether that was given; else it is common practice.
    pub sigma_given: bool,
    /// Error in all, that of the model included.
    pub sigma: f64,
}

impl Deviation {
    /// Measured less ordered, in sigmas.
    #[must_use]
    pub fn in_sigmas(&self) -> f64 {
        (self.measured - self.ordered) / self.sigma
    }
}

/// One unknown as it came out.
#[derive(Clone, Debug, PartialEq)]
pub struct Estimate {
    /// Its name.
    pub name: String,
    /// Its unit; empty for a fraction.
    pub unit: &'static str,
    /// The element that gives way, for a share.
    pub gives_way: Option<&'static str>,
    /// As ordered.
    pub ordered: f64,
    /// Most likely value.
    pub value: f64,
    /// Its one-sigma error.
    pub sigma: f64,
    /// Its error before anything was measured.
    pub prior_sigma: f64,
}

/// A combination of unknowns that the data do not determine.
#[derive(Clone, Debug, PartialEq)]
pub struct Direction {
    /// Names of the unknowns, how far each goes with one sigma of the combination, and its unit.
    pub components: Vec<(String, f64, &'static str)>,
    /// The share of its prior sigma that is left.
    pub left: f64,
}

/// One thing that may have gone wrong by itself.
#[derive(Clone, Debug, PartialEq)]
pub struct SingleCause {
    /// What: `well.thickness`, `growth rate`, `bench temperature`.
    pub name: String,
    /// Its unit; empty for a fraction.
    pub unit: &'static str,
    /// The amount that explains the data best.
    pub amount: f64,
    /// Its error.
    pub sigma: f64,
    /// What it leaves of each datum, in sigmas, in the order of the deviations.
    pub leaves: Vec<f64>,
    /// Sum of their squares.
    pub chi_square: f64,
    /// The amount in sigmas of what is usual.
    pub unusual: f64,
}

/// A change for the next order.
#[derive(Clone, Debug, PartialEq)]
pub struct Correction {
    /// Of what.
    pub name: String,
    /// Its unit; empty for a fraction.
    pub unit: &'static str,
    /// By how much to move the order.
    pub change: f64,
    /// Error of that.
    pub sigma: f64,
}

/// Everything that came out.
#[derive(Clone, Debug, PartialEq)]
pub struct Reconciliation {
    /// The data.
    pub deviations: Vec<Deviation>,
    /// Sum of squares of the deviations of the order, in sigmas.
    pub ordered_chi_square: f64,
    /// The same of the estimate, the priors not counted.
    pub estimated_chi_square: f64,
    /// The unknowns.
    pub estimates: Vec<Estimate>,
    /// Their correlations, in the same order.
    pub correlation: Vec<Vec<f64>>,
    /// What the data cannot tell.
    pub undetermined: Vec<Direction>,
    /// Single causes, the most likely first.
    pub causes: Vec<SingleCause>,
    /// Share of the estimate that a correction takes.
    pub damping: f64,
    /// Changes for the next order; none where something is undetermined.
    pub corrections: Vec<Correction>,
    /// Unknowns whose estimate is smaller than its sigma.
    pub silent: Vec<String>,
    /// The peak to be expected after the corrections, nm in vacuum, with its error from the
    /// estimate; `None` without photoluminescence or corrections.
    pub expected_pl_nm: Option<(f64, f64)>,
    /// The house offset that was counted in.
    pub offset: HouseOffset,
}

/// Why nothing came out.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum ReconcileError {
    /// No unknown.
    #[error("nothing may have moved: there is no unknown to estimate")]
    NoUnknown,
    /// X-ray data of a stack without a period.
    #[error(
        "the wells of the structure do not repeat: there is no period for X-ray data to speak of"
    )]
    NoPeriod,
    /// The reflection is out of reach.
    #[error(transparent)]
    NoReflection(#[from] NoReflection),
    /// No photoluminescence.
    #[error("the structure emits no photoluminescence peak")]
    NoEmission,
    /// The model failed.
    #[error(transparent)]
    Failure(#[from] Failure),
}

/// Unknowns and data.
struct Problem<'a> {
    stack: Stack,
    parameters: &'a Parameters,
    data: Vec<(Datum, Measured)>,
    /// Errors of the data, the model's included.
    sigmas: Vec<f64>,
    offset_mev: f64,
    reflection: Reflection,
}

impl Problem<'_> {
    /// What the model gives for a stack, in the order of the data.
    fn predicted(&self, stack: &Stack, pl_shift_nm: f64) -> Result<Vec<f64>, ReconcileError> {
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
    fn moved(&self, unknowns: &[Unknown], v: &DVector<f64>) -> Result<Vec<f64>, ReconcileError> {
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
    fn misses(&self, predicted: &[f64]) -> DVector<f64> {
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
fn grown(stack: &Stack, unknowns: &[Unknown], v: &DVector<f64>) -> Stack {
    let mut grown = stack.clone();
    for (unknown, v) in unknowns.iter().zip(v.iter()) {
        unknown.shift(&mut grown, v * unknown.prior_sigma);
    }
    grown
}

/// The most likely unknowns.
struct Posterior {
    /// In prior sigmas.
    v: DVector<f64>,
    predicted: Vec<f64>,
    jacobian: DMatrix<f64>,
    /// (JᵀJ + 1)⁻¹.
    covariance: DMatrix<f64>,
}

fn posterior(problem: &Problem<'_>, unknowns: &[Unknown]) -> Result<Posterior, ReconcileError> {
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

/// What was grown, what the data cannot tell, what may have caused it, what to change.
///
/// # Arguments
///
/// * `damping` – share of the estimate that a correction takes, above 0 to 1
///
/// # Errors
///
/// [`ReconcileError`] where there is nothing to estimate, or the model has no answer.
pub fn reconcile(
    stack: &Stack,
    parameters: &Parameters,
    readings: &Readings,
    unknowns: &[Unknown],
    offset: &HouseOffset,
    damping: f64,
) -> Result<Reconciliation, ReconcileError> {
    if unknowns.is_empty() {
        return Err(ReconcileError::NoUnknown);
    }
    let problem = problem(stack, parameters, readings, offset);
    let ordered = problem.predicted(&problem.stack, 0.0)?;
    let found = posterior(&problem, unknowns)?;
    let deviations: Vec<Deviation> = problem
        .data
        .iter()
        .enumerate()
        .map(|(index, (datum, measured))| Deviation {
            datum: *datum,
            measured: measured.value,
            ordered: ordered[index],
            estimated: found.predicted[index],
            measurement_sigma: measured.sigma,
            sigma_given: measured.sigma_given,
            sigma: problem.sigmas[index],
        })
        .collect();
    let estimates: Vec<Estimate> = unknowns
        .iter()
        .enumerate()
        .map(|(index, unknown)| Estimate {
            name: unknown.name.clone(),
            unit: unknown.unit(),
            gives_way: unknown.gives_way().map(crate::materials::Element::symbol),
            ordered: unknown.ordered,
            value: unknown.ordered + unknown.prior_sigma * found.v[index],
            sigma: unknown.prior_sigma * found.covariance[(index, index)].sqrt(),
            prior_sigma: unknown.prior_sigma,
        })
        .collect();
    let undetermined = undetermined(unknowns, &found.jacobian);
    let mut result = Reconciliation {
        ordered_chi_square: problem.misses(&ordered).norm_squared(),
        estimated_chi_square: problem.misses(&found.predicted).norm_squared(),
        deviations,
        correlation: correlation(&found.covariance),
        causes: causes(&problem, unknowns)?,
        damping,
        corrections: Vec::new(),
        silent: Vec::new(),
        expected_pl_nm: None,
        offset: offset.clone(),
        estimates,
        undetermined,
    };
    if result.undetermined.is_empty() {
        correct(&mut result, &problem, unknowns, &found)?;
    }
    Ok(result)
}

/// The peak that the model gives by itself at the bench's temperature, nm in vacuum, for the
/// structure that X-ray data alone make most likely (without them: as ordered).
///
/// # Errors
///
/// As [`reconcile`].
pub fn modelled_pl_nm(
    stack: &Stack,
    parameters: &Parameters,
    readings: &Readings,
    unknowns: &[Unknown],
) -> Result<f64, ReconcileError> {
    let none = HouseOffset {
        family: String::new(),
        runs: 0,
        offset_mev: 0.0,
        sigma_mev: 0.0,
    };
    let without_pl = Readings {
        pl_nm: None,
        ..*readings
    };
    let problem = problem(stack, parameters, &without_pl, &none);
    let grown = if problem.data.is_empty() {
        problem.stack.clone()
    } else {
        grown(&problem.stack, unknowns, &posterior(&problem, unknowns)?.v)
    };
    Evaluation::new(&grown, parameters)?
        .wavelength_nm(Wavelength::Photoluminescence)
        .ok_or(ReconcileError::NoEmission)
}

fn problem<'a>(
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

fn correlation(covariance: &DMatrix<f64>) -> Vec<Vec<f64>> {
    let count = covariance.nrows();
    let sigma = |index: usize| covariance[(index, index)].sqrt();
    (0..count)
        .map(|row| {
            (0..count)
                .map(|column| covariance[(row, column)] / (sigma(row) * sigma(column)))
                .collect()
        })
        .collect()
}

/// Eigenvectors of JᵀJ below 1, the least determined first.
fn undetermined(unknowns: &[Unknown], jacobian: &DMatrix<f64>) -> Vec<Direction> {
    let eigen = SymmetricEigen::new(jacobian.transpose() * jacobian);
    let mut found: Vec<(f64, Direction)> = Vec::new();
    for (index, &value) in eigen.eigenvalues.iter().enumerate() {
        let value = value.max(0.0);
        if value >= 1.0 {
            continue;
        }
        let left = (1.0 + value).sqrt().recip();
        let vector = eigen.eigenvectors.column(index);
        // Of the two senses the one in which its largest component grows.
        let largest = vector.iter().fold(0.0f64, |largest, &it| {
            if it.abs() > largest.abs() {
                it
            } else {
                largest
            }
        });
        let components = unknowns
            .iter()
            .zip(vector.iter())
            .filter(|(_, component)| component.abs() > LEAST_COMPONENT)
            .map(|(unknown, component)| {
                let goes = component * largest.signum() * left * unknown.prior_sigma;
                (unknown.name.clone(), goes, unknown.unit())
            })
            .collect();
        found.push((value, Direction { components, left }));
    }
    found.sort_by(|a, b| a.0.total_cmp(&b.0));
    found.into_iter().map(|(_, direction)| direction).collect()
}

/// A single cause before it is fitted.
struct Suspect {
    name: String,
    unit: &'static str,
    /// What is usual of it, one sigma.
    usual: f64,
    acts: Act,
}

enum Act {
    Unknowns(Vec<(Unknown, f64)>),
    BenchTemperature,
    BenchWavelength,
}

impl Suspect {
    fn predicted(&self, problem: &Problem<'_>, amount: f64) -> Result<Vec<f64>, ReconcileError> {
        let mut stack = problem.stack.clone();
        match &self.acts {
            Act::Unknowns(unknowns) => {
                for (unknown, per_amount) in unknowns {
                    unknown.shift(&mut stack, amount * per_amount);
                }
                problem.predicted(&stack, 0.0)
            }
            Act::BenchTemperature => {
                stack.operation.temperature_k = (stack.operation.temperature_k + amount).max(1.0);
                problem.predicted(&stack, 0.0)
            }
            Act::BenchWavelength => problem.predicted(&stack, amount),
        }
    }
}

/// Each possible cause by itself, with the amount that explains the data best.
fn causes(problem: &Problem<'_>, unknowns: &[Unknown]) -> Result<Vec<SingleCause>, ReconcileError> {
    let mut found = Vec::new();
    for suspect in suspects(problem, unknowns) {
        let derivative = |at: f64| -> Result<DVector<f64>, ReconcileError> {
            let step = STEP * suspect.usual;
            let above = problem.misses(&suspect.predicted(problem, at + step)?);
            let below = problem.misses(&suspect.predicted(problem, at - step)?);
            Ok((below - above) / (2.0 * step))
        };
        let slope = derivative(0.0)?;
        let weight = slope.norm_squared();
        // What moves no datum by a hundredth of its error within what is usual explains nothing.
        if weight.sqrt() * suspect.usual < 1e-2 {
            continue;
        }
        let mut amount = 0.0;
        let mut misses = problem.misses(&suspect.predicted(problem, amount)?);
        for _ in 0..6 {
            let step = slope.dot(&misses) / weight;
            amount += step.clamp(-10.0 * suspect.usual, 10.0 * suspect.usual);
            misses = problem.misses(&suspect.predicted(problem, amount)?);
            if step.abs() < 1e-3 * suspect.usual {
                break;
            }
        }
        found.push(SingleCause {
            name: suspect.name,
            unit: suspect.unit,
            amount,
            sigma: weight.sqrt().recip(),
            chi_square: misses.norm_squared(),
            unusual: amount / suspect.usual,
            leaves: misses.iter().copied().collect(),
        });
    }
    let cost = |cause: &SingleCause| cause.chi_square + cause.unusual * cause.unusual;
    found.sort_by(|a, b| cost(a).total_cmp(&cost(b)));
    Ok(found)
}

fn suspects(problem: &Problem<'_>, unknowns: &[Unknown]) -> Vec<Suspect> {
    let mut suspects: Vec<Suspect> = every_cause(&problem.stack, unknowns)
        .into_iter()
        .map(|(name, moved)| {
            let first = &moved[0];
            // A rate is said in per cent, all else in the unit of the unknown.
            let (unit, usual, per_amount): (_, _, fn(&Unknown) -> f64) = if moved.len() > 1 {
                let percent = 100.0 * first.prior_sigma / first.ordered;
                ("%", percent, |unknown| 0.01 * unknown.ordered)
            } else {
                (first.unit(), first.prior_sigma, |_| 1.0)
            };
            Suspect {
                name,
                unit,
                usual,
                acts: Act::Unknowns(
                    moved
                        .into_iter()
                        .map(|unknown| {
                            let per_amount = per_amount(&unknown);
                            (unknown, per_amount)
                        })
                        .collect(),
                ),
            }
        })
        .collect();
    let pl = problem
        .data
        .iter()
        .position(|(datum, _)| *datum == Datum::Pl);
    if let Some(index) = pl {
        suspects.push(Suspect {
            name: "bench temperature".to_owned(),
            unit: "K",
            usual: BENCH_K,
            acts: Act::BenchTemperature,
        });
        suspects.push(Suspect {
            name: "model or bench wavelength".to_owned(),
            unit: "nm",
            usual: problem.sigmas[index],
            acts: Act::BenchWavelength,
        });
    }
    suspects
}

/// Fills in what to change, and what peak is to be expected then.
fn correct(
    result: &mut Reconciliation,
    problem: &Problem<'_>,
    unknowns: &[Unknown],
    found: &Posterior,
) -> Result<(), ReconcileError> {
    let mut next = found.v.clone();
    for (index, estimate) in result.estimates.iter().enumerate() {
        let shift = estimate.value - estimate.ordered;
        if shift.abs() < estimate.sigma {
            result.silent.push(estimate.name.clone());
            continue;
        }
        next[index] *= 1.0 - result.damping;
        result.corrections.push(Correction {
            name: estimate.name.clone(),
            unit: estimate.unit,
            change: -result.damping * shift,
            sigma: result.damping * estimate.sigma,
        });
    }
    let pl = problem
        .data
        .iter()
        .position(|(datum, _)| *datum == Datum::Pl);
    if let Some(index) = pl
        && !result.corrections.is_empty()
    {
        let expected = problem.moved(unknowns, &next)?[index];
        let row = found.jacobian.row(index);
        let variance = (row * &found.covariance * row.transpose())[(0, 0)];
        result.expected_pl_nm = Some((expected, problem.sigmas[index] * variance.sqrt()));
    }
    Ok(())
}
