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
//! chased. Where the estimate is smaller than its own sigma there is no correction. The wafer to be
//! expected then is held against the limits of strain and thickness once more.
//!
//! # Discretisation
//!
//! Derivatives are central differences over a fifth of a prior sigma. With mixed bands the most
//! likely structure is solved in full, and photoluminescence about it followed by single bands
//! ([`Anchored`](super::anchored)); single causes are followed from the order by single bands.

mod causes;
mod limits;
mod problem;
mod readings;

pub use causes::SingleCause;
pub use limits::LimitedFigure;
pub use readings::Readings;

use super::anchored::Anchored;
use super::check::Standing;
use super::house_offset::HouseOffset;
use super::unknown::Unknown;
use crate::diffraction::NoReflection;
use crate::evaluation::{Evaluation, Failure};
use crate::materials::Parameters;
use crate::structure::{Bands, MismatchKind, Stack, Wavelength};
use causes::causes;
use limits::limits;
use nalgebra::{DMatrix, SymmetricEigen};
use problem::{Posterior, Problem, grown, posterior, problem};

/// Sums of squares of none to three normal deviates that are exceeded once in a thousand times
/// (M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions (1964), table 26.8).
const POOR_FIT: [f64; 4] = [0.0, 10.828, 13.816, 16.266];
/// Prior sigmas beyond which an estimate says that the data are not of this wafer, or misread.
const FARTHEST: f64 = 5.0;
/// A component of a direction smaller than this share of it is not named.
const LEAST_COMPONENT: f64 = 0.15;

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

/// A change for the next order.
#[derive(Clone, Debug, PartialEq)]
pub struct Correction {
    /// Of what.
    pub name: String,
    /// Its unit; empty for a fraction.
    pub unit: &'static str,
    /// As ordered.
    pub ordered: f64,
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
    /// Changes for the next order; none where something is undetermined, or no structure explains the
    /// data.
    pub corrections: Vec<Correction>,
    /// Unknowns whose estimate is smaller than its sigma.
    pub silent: Vec<String>,
    /// The peak to be expected after the corrections, nm in vacuum, with its error from the
    /// estimate; `None` without photoluminescence or corrections.
    pub expected_pl_nm: Option<(f64, f64)>,
    /// What limits make of the estimate, and of the wafer after the corrections.
    pub limits: Vec<LimitedFigure>,
    /// By how much single bands, followed from the order, miss the full model at the estimate, nm;
    /// `None` without photoluminescence, or where the model has single bands.
    pub followed_miss_nm: Option<f64>,
    /// The house offset that was counted in.
    pub offset: HouseOffset,
}

impl Reconciliation {
    /// Whether the wafer to be expected after the corrections is outside a limit; `false` without
    /// corrections.
    #[must_use]
    pub fn next_is_outside(&self) -> bool {
        self.limits
            .iter()
            .any(|figure| figure.next.is_some() && figure.standing == Standing::Outside)
    }

    /// Whether a structure near the order explains the data: neither is their sum of squares one that
    /// so many normal deviates exceed less often than once in a thousand times, nor does it take an
    /// unknown that nobody would believe.
    #[must_use]
    pub fn explains_the_data(&self) -> bool {
        let is_near = |it: &Estimate| (it.value - it.ordered).abs() <= FARTHEST * it.prior_sigma;
        self.estimated_chi_square <= POOR_FIT[self.deviations.len().min(3)]
            && self.estimates.iter().all(is_near)
    }
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
    let at_order = problem.anchored(&problem.stack)?;
    let at_order = at_order.as_ref();
    let ordered = problem.predicted(problem.stack.clone(), at_order)?;
    let found = posterior(&problem, unknowns, at_order)?;
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
    let estimates = estimates(unknowns, &found);
    let undetermined = undetermined(unknowns, &found.jacobian);
    let mut result = Reconciliation {
        ordered_chi_square: problem.misses(&ordered).norm_squared(),
        estimated_chi_square: problem.misses(&found.predicted).norm_squared(),
        deviations,
        correlation: correlation(&found.covariance),
        causes: causes(&problem, unknowns, at_order, &ordered)?,
        damping,
        corrections: Vec::new(),
        silent: Vec::new(),
        expected_pl_nm: None,
        limits: Vec::new(),
        followed_miss_nm: followed_miss_nm(&problem, unknowns, at_order, &found)?,
        offset: offset.clone(),
        estimates,
        undetermined,
    };
    let next = if result.undetermined.is_empty() && result.explains_the_data() {
        correct(&mut result, &problem, unknowns, &found)?
    } else {
        None
    };
    result.limits = limits(
        &problem.stack,
        &grown(&problem.stack, unknowns, &found.v),
        next.as_ref(),
        parameters,
    );
    Ok(result)
}

/// The most likely structure alone, for many wafers: without causes and corrections it takes half
/// the time.
///
/// # Errors
///
/// As [`reconcile`].
pub fn estimate(
    stack: &Stack,
    parameters: &Parameters,
    readings: &Readings,
    unknowns: &[Unknown],
    offset: &HouseOffset,
) -> Result<Vec<Estimate>, ReconcileError> {
    if unknowns.is_empty() {
        return Err(ReconcileError::NoUnknown);
    }
    let problem = problem(stack, parameters, readings, offset);
    let at_order = problem.anchored(&problem.stack)?;
    let found = posterior(&problem, unknowns, at_order.as_ref())?;
    Ok(estimates(unknowns, &found))
}

fn estimates(unknowns: &[Unknown], found: &Posterior) -> Vec<Estimate> {
    let of = |(index, unknown): (usize, &Unknown)| Estimate {
        name: unknown.name.clone(),
        unit: unknown.unit(),
        gives_way: unknown.gives_way().map(crate::materials::Element::symbol),
        ordered: unknown.ordered,
        value: unknown.ordered + unknown.prior_sigma * found.v[index],
        sigma: unknown.prior_sigma * found.covariance[(index, index)].sqrt(),
        prior_sigma: unknown.prior_sigma,
    };
    unknowns.iter().enumerate().map(of).collect()
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
        let found = posterior(&problem, unknowns, None)?;
        grown(&problem.stack, unknowns, &found.v)
    };
    Evaluation::new(&grown, parameters)?
        .wavelength_nm(Wavelength::Photoluminescence)
        .ok_or(ReconcileError::NoEmission)
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

/// By how much the model followed from the order misses the full one at the estimate, nm.
fn followed_miss_nm(
    problem: &Problem<'_>,
    unknowns: &[Unknown],
    at_order: Option<&Anchored<'_>>,
    found: &Posterior,
) -> Result<Option<f64>, ReconcileError> {
    let (Some(index), Some(at_order), Bands::Mixed) = (
        problem.place(Datum::Pl),
        at_order,
        problem.stack.model.bands,
    ) else {
        return Ok(None);
    };
    let stack = grown(&problem.stack, unknowns, &found.v);
    let followed = problem.predicted(stack, Some(at_order))?;
    Ok(Some((followed[index] - found.predicted[index]).abs()))
}

/// Fills in what to change and what peak is to be expected then; the wafer that grows with it, if
/// anything changes.
fn correct(
    result: &mut Reconciliation,
    problem: &Problem<'_>,
    unknowns: &[Unknown],
    found: &Posterior,
) -> Result<Option<Stack>, ReconcileError> {
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
            ordered: estimate.ordered,
            change: -result.damping * shift,
            sigma: result.damping * estimate.sigma,
        });
    }
    if result.corrections.is_empty() {
        return Ok(None);
    }
    let next = grown(&problem.stack, unknowns, &next);
    if let Some((index, anchored)) = problem.place(Datum::Pl).zip(problem.anchored(&next)?) {
        let row = found.jacobian.row(index);
        let variance = (row * &found.covariance * row.transpose())[(0, 0)];
        result.expected_pl_nm = Some((
            problem.with_offset_nm(anchored.anchor_nm),
            problem.sigmas[index] * variance.sqrt(),
        ));
    }
    Ok(Some(next))
}
