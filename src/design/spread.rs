//! From errors of growth to the wavelength of wafers, and the share of them that is good.
//!
//! # Linear
//!
//! With independent growth variables in units of their sigmas, the wavelength is λ₀ + Σ g_i x_i and
//! normal, with σ² = Σ g_i²: each variable's share of the variance is g_i²/σ².
//!
//! # Sampled
//!
//! Wafers are drawn from the growth variables, grown ([`Reactor`](super::Reactor)) and their
//! wavelengths read off a quadratic of all variables, cross terms included, whose coefficients are
//! central differences over ±√3 σ (with those nodes the mean and the variance of each variable by
//! itself are those of Gauss and Hermite's three-point rule). The quadratic is checked against full
//! solves of wafers of its own drawing, and the miss is part of the record. `Solving::EachWafer`
//! leaves the quadratic out.
//!
//! With mixed bands the design is solved in full and the wafers about it by single bands
//! ([`Anchored`](super::anchored)); the check is against the full model, so that the miss holds both
//! simplifications.

mod layers;
mod statistics;
mod wafers;

pub use layers::LayerSpread;
pub use statistics::{Histogram, Moments, Yield};

use super::anchored::Anchored;
use super::draws::Normals;
use super::reactor::{Reactor, Variable};
use super::surrogate::{Quadratic, points};
use crate::evaluation::{Failure, emission_nm};
use crate::materials::Parameters;
use crate::structure::{Bands, Medium, Stack, Target, Wavelength};
use crate::units::air;
use layers::layers;
use rayon::prelude::*;
use statistics::{histogram, moments, quantile, shares};
use wafers::Wafers;

/// Error of the calculated wavelength where nobody states it, nm (common practice for a first
/// design without house offsets: 5 to 20 nm).
pub const MODEL_NM: f64 = 10.0;

/// Wafers whose full solution is compared with the quadratic.
const CHECKED: usize = 32;

/// The same with mixed bands, which take a hundred times as long.
const CHECKED_MIXED: usize = 8;

/// The block of draws that the check takes, far from those of the wafers.
const CHECK_BLOCK: u64 = u64::MAX;

/// Shares of the wafers whose wavelengths are reported.
const QUANTILES: [f64; 7] = [0.01, 0.05, 0.16, 0.5, 0.84, 0.95, 0.99];

/// √3: from the middle to the outer nodes of Gauss and Hermite's three-point rule, in sigmas.
const STEP: f64 = 1.732_050_807_568_877_2;

/// How the wavelength of a wafer is had.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Solving {
    /// From a quadratic whose miss is measured.
    Quadratic,
    /// By solving each wafer in full.
    EachWafer,
}

/// What is asked.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Request {
    /// Of which wavelength.
    pub kind: Wavelength,
    /// How many wafers.
    pub draws: usize,
    /// Of the generator.
    pub seed: u64,
    /// How each is solved.
    pub solving: Solving,
    /// A yield from 0 to 1 for which the errors are wanted.
    pub wanted_yield: Option<f64>,
    /// The window in vacuum: target and tolerance, nm.
    pub window: Option<(f64, f64)>,
    /// Error of the model, nm.
    pub model_nm: f64,
}

/// Why there is no spread.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum SpreadError {
    /// No variable with an error acts on the stack.
    #[error("nothing varies: no error in [growth] acts on a layer of this stack")]
    NothingVaries,
    /// The wafer as designed emits nothing of the kind.
    #[error("the design has no {0} wavelength: there is nothing to spread")]
    NoEmission(&'static str),
    /// A wafer within the errors can't be solved.
    #[error(
        "a wafer within the errors has no {0} wavelength: the errors are too large for this design"
    )]
    Lost(&'static str),
    /// The design can't be evaluated.
    #[error(transparent)]
    Failure(#[from] Failure),
}

/// The effect of one variable.
#[derive(Clone, Debug, PartialEq)]
pub struct Sensitivity {
    /// The variable and its sigma.
    pub variable: Variable,
    /// Shift of the wavelength with one sigma more, nm.
    pub nm: f64,
    /// Its share of the linear variance.
    pub share: f64,
}

/// How well the quadratic stands for full solutions; with mixed bands that of single bands.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Miss {
    /// Structures solved for its coefficients.
    pub solved: usize,
    /// Random wafers solved in full to check it.
    pub checked: usize,
    /// Random wafers that the full model did not solve.
    pub unsolved: usize,
    /// Root mean square of the miss over them, nm.
    pub rms_nm: f64,
    /// The largest, nm.
    pub worst_nm: f64,
}

/// Errors that a wanted yield takes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Wanted {
    /// The yield.
    pub share: f64,
    /// The factor on every sigma of growth at which it is reached; `None` where no factor does it,
    /// because the design itself stands outside of the window.
    pub factor: Option<f64>,
    /// The sigma of the wavelength that goes with it, nm.
    pub sigma_nm: Option<f64>,
    /// The factor if the design stood in the middle of the window.
    pub factor_if_centred: Option<f64>,
}

/// Everything that came out.
#[derive(Clone, Debug, PartialEq)]
pub struct Spread {
    /// What was asked.
    pub request: Request,
    /// The wavelength as designed, nm in vacuum.
    pub nominal_nm: f64,
    /// The variables, the strongest first.
    pub sensitivities: Vec<Sensitivity>,
    /// The linear law.
    pub linear: Moments,
    /// Of the wafers drawn.
    pub sampled: Moments,
    /// Wavelengths below which so large a share of the wafers lies: (share, nm).
    pub quantiles: Vec<(f64, f64)>,
    /// The wafers drawn.
    pub histogram: Histogram,
    /// The miss of the quadratic; `None` where each wafer was solved.
    pub miss: Option<Miss>,
    /// Wafers without a wavelength, which count as bad ones.
    pub lost: usize,
    /// The share of good wafers, where there is a window.
    pub good: Option<Yield>,
    /// Errors that the wanted yield takes.
    pub wanted: Option<Wanted>,
    /// What growth does to the layers.
    pub layers: Vec<LayerSpread>,
}

/// The stack under the conditions of a target.
#[must_use]
pub fn posed(stack: &Stack, target: &Target) -> Stack {
    let mut posed = stack.clone();
    if let Some(temperature_k) = target.temperature_k {
        posed.operation.temperature_k = temperature_k;
    }
    if let Some(density_cm3) = target.density_cm3 {
        posed.operation.working_density_cm3 = density_cm3;
    }
    posed
}

/// The wavelength of a target, nm in vacuum.
#[must_use]
pub fn vacuum_nm(target: &Target) -> f64 {
    in_vacuum_nm(target.wavelength_nm, target.medium)
}

/// A wavelength in vacuum, nm, from that in a medium.
#[must_use]
pub fn in_vacuum_nm(wavelength_nm: f64, medium: Medium) -> f64 {
    match medium {
        Medium::Vacuum => wavelength_nm,
        Medium::Air => air::vacuum_nm(wavelength_nm),
    }
}

/// The wavelength of a kind, nm in vacuum; `None` where the structure emits none.
///
/// # Errors
///
/// What [`crate::evaluation::Evaluation::new`] says.
pub fn wavelength_nm(
    stack: &Stack,
    parameters: &Parameters,
    kind: Wavelength,
) -> Result<Option<f64>, Failure> {
    emission_nm(stack, parameters, kind)
}

/// Sensitivities, distribution and yield of a stack.
///
/// # Arguments
///
/// * `progress` – is told now and then how many wafers are done
///
/// # Errors
///
/// [`SpreadError`] if nothing varies, or if the design or a wafer near it has no wavelength.
pub fn spread(
    reactor: &Reactor<'_>,
    stack: &Stack,
    parameters: &Parameters,
    request: &Request,
    progress: &(dyn Fn(usize) + Sync),
) -> Result<Spread, SpreadError> {
    let variables = reactor.variables.len();
    if variables == 0 {
        return Err(SpreadError::NothingVaries);
    }
    let kind = request.kind;
    let anchored =
        Anchored::at(stack, parameters, kind)?.ok_or(SpreadError::NoEmission(kind.word()))?;
    let nominal_nm = anchored.anchor_nm;
    let solved = |point: &[f64]| wavelength_nm(&reactor.grown(point), parameters, kind);
    let places = points(variables, STEP);
    let values = places
        .par_iter()
        .map(|point| {
            let near = anchored.wavelength_nm(reactor.grown(point))?;
            near.ok_or(SpreadError::Lost(kind.word()))
        })
        .collect::<Result<Vec<f64>, SpreadError>>()?;
    let quadratic = Quadratic::through(&values, variables, STEP);
    let sensitivities = sensitivities(&reactor.variables, &quadratic.slopes);
    let linear = Moments {
        mean_nm: nominal_nm,
        sigma_nm: length(&quadratic.slopes),
    };
    let wafers = Wafers {
        variables,
        request,
        progress,
    };
    let (drawn, miss) = match request.solving {
        Solving::Quadratic => {
            let checked = match stack.model.bands {
                Bands::Single => CHECKED,
                Bands::Mixed => CHECKED_MIXED,
            };
            let miss = miss(&quadratic, request.seed, (places.len(), checked), &solved)?;
            (
                wafers.drawn(request.draws, |x| Some(quadratic.at(x))),
                Some(miss),
            )
        }
        Solving::EachWafer => (
            wafers.drawn(request.draws, |x| solved(x).ok().flatten()),
            None,
        ),
    };
    let lost = drawn.iter().filter(|nm| nm.is_none()).count();
    let mut sorted: Vec<f64> = drawn.into_iter().flatten().collect();
    if sorted.is_empty() {
        return Err(SpreadError::Lost(kind.word()));
    }
    sorted.sort_by(f64::total_cmp);
    let quantiles: Vec<(f64, f64)> = QUANTILES
        .into_iter()
        .map(|share| (share, quantile(&sorted, share)))
        .collect();
    let good = request
        .window
        .map(|window| shares(&sorted, lost, window, linear, request.model_nm));
    let wanted = match (request.wanted_yield, request.window) {
        (Some(share), Some(window)) => Some(wafers.wanted(share, window, &quadratic)),
        _ => None,
    };
    Ok(Spread {
        request: *request,
        nominal_nm,
        sensitivities,
        linear,
        sampled: moments(&sorted),
        quantiles,
        histogram: histogram(&sorted),
        miss,
        lost,
        good,
        wanted,
        layers: layers(reactor, stack),
    })
}

/// The sensitivities by single bands alone, the strongest first; `None` where a wafer near the
/// design has no such wavelength.
#[must_use]
pub(super) fn linear(
    reactor: &Reactor<'_>,
    parameters: &Parameters,
    kind: Wavelength,
) -> Option<Vec<Sensitivity>> {
    let variables = reactor.variables.len();
    let grown = |variable: usize, step: f64| {
        let mut point = vec![0.0; variables];
        point[variable] = step;
        let mut stack = reactor.grown(&point);
        stack.model.bands = Bands::Single;
        wavelength_nm(&stack, parameters, kind).ok().flatten()
    };
    let slopes = (0..variables).into_par_iter().map(|variable| {
        let (above, below) = (grown(variable, STEP)?, grown(variable, -STEP)?);
        Some((above - below) / (2.0 * STEP))
    });
    let slopes = slopes.collect::<Option<Vec<f64>>>()?;
    Some(sensitivities(&reactor.variables, &slopes))
}

fn length(vector: &[f64]) -> f64 {
    vector.iter().map(|x| x * x).sum::<f64>().sqrt()
}

fn sensitivities(variables: &[Variable], slopes: &[f64]) -> Vec<Sensitivity> {
    let variance: f64 = slopes.iter().map(|nm| nm * nm).sum();
    let mut sensitivities: Vec<Sensitivity> = variables
        .iter()
        .zip(slopes)
        .map(|(variable, &nm)| Sensitivity {
            variable: *variable,
            nm,
            share: if variance > 0.0 {
                nm * nm / variance
            } else {
                0.0
            },
        })
        .collect();
    sensitivities.sort_by(|a, b| b.nm.abs().total_cmp(&a.nm.abs()));
    sensitivities
}

/// The miss of the quadratic over wafers of its own drawing.
fn miss(
    quadratic: &Quadratic,
    seed: u64,
    (solved_before, wanted): (usize, usize),
    solved: &(impl Fn(&[f64]) -> Result<Option<f64>, Failure> + Sync),
) -> Result<Miss, SpreadError> {
    let mut normals = Normals::of_block(seed, CHECK_BLOCK);
    let wafers: Vec<Vec<f64>> = (0..wanted)
        .map(|_| quadratic.slopes.iter().map(|_| normals.draw()).collect())
        .collect();
    let solutions: Vec<Result<Option<f64>, Failure>> = wafers
        .par_iter()
        .map(|wafer| Ok(solved(wafer)?.map(|nm| quadratic.at(wafer) - nm)))
        .collect();
    let misses: Vec<f64> = solutions
        .iter()
        .filter_map(|solution| solution.as_ref().ok().copied().flatten())
        .collect();
    // One wafer that the full model can't solve is said; none solved is a failure of the model.
    if misses.is_empty()
        && let Some(failure) = solutions.into_iter().find_map(Result::err)
    {
        return Err(failure.into());
    }
    Ok(Miss {
        solved: solved_before,
        checked: misses.len(),
        unsolved: wanted - misses.len(),
        rms_nm: length(&misses) / (misses.len().max(1) as f64).sqrt(),
        worst_nm: misses.iter().fold(0.0, |worst, miss| worst.max(miss.abs())),
    })
}
