//! What stays in the house: levels, spectra, yield, findings, sources, and what could not be had.

use crate::design::reactor::Reactor;
use crate::design::spread::{
    MODEL_NM, Request, Solving, Spread, SpreadError, posed, spread, vacuum_nm,
};
use crate::design::{Finding, check};
use crate::evaluation::{Evaluation, Failure, Spectrum};
use crate::materials::{Composition, Parameters};
use crate::structure::{Bands, Remark, Stack, Wavelength};

/// Wafers drawn for the yield of a sheet.
pub const SPREAD_DRAWS: usize = 20_000;
/// Seed that they are drawn with.
pub const SPREAD_SEED: u64 = 1;

/// Something that a sheet leaves blank, and why.
#[derive(Clone, Debug, PartialEq)]
pub enum Gap {
    /// The file does not say how growth varies.
    NoGrowth,
    /// The spread came to nothing.
    Spread(SpreadError),
    /// No level, or no spectrum, came out.
    Failed(Failure),
    /// The program has no computation of it.
    NoThreshold,
}

/// What stays in the house.
#[derive(Debug)]
pub struct House<'a> {
    /// Levels and wavelengths, or why there are none.
    pub evaluation: Result<Evaluation<'a>, Failure>,
    /// Spectra, where there are levels.
    pub spectrum: Option<Result<Spectrum, Failure>>,
    /// Sensitivities and yield.
    pub spread: Result<Spread, Gap>,
    /// What a check finds.
    pub findings: Vec<Finding>,
    /// Every alloy in use, the substrate first.
    pub alloys: Vec<Composition>,
}

impl<'a> House<'a> {
    /// Computes all of it.
    ///
    /// # Arguments
    ///
    /// * `remarks` – what the reader of the file remarked
    /// * `progress` – is told now and then how many wafers of the yield are drawn
    #[must_use]
    pub fn new(
        stack: &'a Stack,
        parameters: &'a Parameters,
        remarks: &[Remark],
        progress: &(dyn Fn(usize) + Sync),
    ) -> Self {
        let evaluation = Evaluation::new(stack, parameters);
        let spectrum = evaluation.as_ref().ok().map(Evaluation::spectrum);
        Self {
            spectrum,
            spread: wafers(stack, parameters, progress),
            findings: check(stack, parameters, remarks),
            alloys: alloys(stack),
            evaluation,
        }
    }

    /// Everything that is left blank.
    #[must_use]
    pub fn gaps(&self) -> Vec<Gap> {
        let failed = |failure: &Failure| Gap::Failed(failure.clone());
        let mut gaps: Vec<Gap> = self
            .evaluation
            .as_ref()
            .err()
            .map(failed)
            .into_iter()
            .collect();
        let of_spectrum = self.spectrum.as_ref().and_then(|it| it.as_ref().err());
        gaps.extend(of_spectrum.map(failed));
        gaps.extend(self.spread.as_ref().err().cloned());
        gaps.push(Gap::NoThreshold);
        gaps
    }
}

/// Wafers as growth varies. Wavelengths of transition and photoluminescence are solved for with
/// single valence bands, which shift with growth as mixed ones do and take a hundredth of the time.
fn wafers(
    stack: &Stack,
    parameters: &Parameters,
    progress: &(dyn Fn(usize) + Sync),
) -> Result<Spread, Gap> {
    let growth = stack.growth.ok_or(Gap::NoGrowth)?;
    let target = stack.target;
    let mut stack = target.map_or_else(|| stack.clone(), |target| posed(stack, &target));
    let kind = target.map_or(Wavelength::Photoluminescence, |target| target.kind);
    if kind != Wavelength::Gain {
        stack.model.bands = Bands::Single;
    }
    let request = Request {
        kind,
        draws: SPREAD_DRAWS,
        seed: SPREAD_SEED,
        solving: Solving::Quadratic,
        wanted_yield: None,
        window: target.and_then(|target| Some((vacuum_nm(&target), target.tolerance_nm?))),
        model_nm: growth.model_nm.unwrap_or(MODEL_NM),
    };
    let reactor = Reactor::new(&stack, &growth);
    spread(&reactor, &stack, parameters, &request, progress).map_err(Gap::Spread)
}

/// Every alloy of a stack once, the substrate first.
fn alloys(stack: &Stack) -> Vec<Composition> {
    let mut alloys: Vec<Composition> = Vec::new();
    let of_layers = stack.layers.iter().flat_map(crate::structure::Layer::ends);
    for material in std::iter::once(&stack.substrate).chain(of_layers) {
        if let Some(composition) = material.substance.composition()
            && !alloys.contains(composition)
        {
            alloys.push(*composition);
        }
    }
    alloys
}
