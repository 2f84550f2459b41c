//! A figure of a structure over two of its numbers.
//!
//! Points are numbered row by row from the lowest values up. They are computed in blocks, each
//! block in parallel and handed on in order: what has been handed on can be kept, and a chart taken
//! up again after it. No number hangs on the number of threads or on where a chart was cut.

use std::ops::Range;

use rayon::prelude::*;

use super::movement::Variation;
use super::progress::{Interrupted, Progress};
use crate::coherence::{CriticalThickness, StrainBudget};
use crate::evaluation::{Evaluation, Outline};
use crate::structure::{Stack, Wavelength};

/// Points of a block.
const BLOCK: usize = 64;

/// What a chart shows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ChartFigure {
    /// A wavelength, nm in vacuum.
    Wavelength(Wavelength),
    /// The larger of the peaks of TE and TM gain at the working density, cm⁻¹.
    PeakGain,
    /// Transparency density, cm⁻³.
    Transparency,
    /// Peak of TE gain less peak of TM gain at the working density, cm⁻¹.
    PolarisationDifference,
    /// Strain of the well that uses most of its critical thickness, %, tensile positive.
    Strain,
    /// Thickness of that well over its critical thickness, grown over.
    CriticalShare,
}

impl ChartFigure {
    /// Every figure.
    pub const ALL: [Self; 8] = [
        Self::Wavelength(Wavelength::Transition),
        Self::Wavelength(Wavelength::Photoluminescence),
        Self::Wavelength(Wavelength::Gain),
        Self::PeakGain,
        Self::Transparency,
        Self::PolarisationDifference,
        Self::Strain,
        Self::CriticalShare,
    ];

    /// The word for it on the command line.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Wavelength(kind) => kind.word(),
            Self::PeakGain => "peak-gain",
            Self::Transparency => "transparency",
            Self::PolarisationDifference => "te-tm",
            Self::Strain => "strain",
            Self::CriticalShare => "critical",
        }
    }

    /// Its name with the unit at the end, as the head of a column.
    #[must_use]
    pub fn key(self) -> &'static str {
        match self {
            Self::Wavelength(Wavelength::Transition) => "transition_nm",
            Self::Wavelength(Wavelength::Photoluminescence) => "pl_nm",
            Self::Wavelength(Wavelength::Gain) => "gain_peak_nm",
            Self::PeakGain => "peak_gain_cm",
            Self::Transparency => "transparency_cm3",
            Self::PolarisationDifference => "te_less_tm_gain_cm",
            Self::Strain => "well_tensile_percent",
            Self::CriticalShare => "critical_share_buried",
        }
    }
}

/// One point of a chart. What does not exist is `None`.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct ChartPoint {
    /// The figure.
    pub value: Option<f64>,
    /// The wavelength of the target's kind, nm in vacuum; only where there is a target.
    pub wavelength_nm: Option<f64>,
    /// Strain of the well that uses most of its critical thickness, %, tensile positive.
    pub tensile_percent: Option<f64>,
    /// Thickness of that well over the critical thickness of a free surface; infinite where no
    /// thickness is coherent.
    pub critical_share_free: Option<f64>,
    /// The same of a layer that is grown over.
    pub critical_share_buried: Option<f64>,
    /// First heavy-hole level less first light-hole level, meV.
    pub heavy_less_light_mev: Option<f64>,
}

/// A figure over two moves of a structure.
#[derive(Debug)]
pub struct Chart<'a> {
    /// The structure with two moves: across and up.
    pub variation: &'a Variation<'a>,
    /// What is shown.
    pub figure: ChartFigure,
    /// Kind of the target's wavelength, if there is a target.
    pub target: Option<Wavelength>,
    /// Points across and up, at least two each.
    pub points: (usize, usize),
}

impl Chart<'_> {
    /// Values across, rising.
    #[must_use]
    pub fn across(&self) -> Vec<f64> {
        self.axis(0, self.points.0)
    }

    /// Values up, rising.
    #[must_use]
    pub fn up(&self) -> Vec<f64> {
        self.axis(1, self.points.1)
    }

    fn axis(&self, index: usize, count: usize) -> Vec<f64> {
        let steps = (count - 1) as f64;
        (0..count)
            .map(|at| self.variation.moves[index].at(at as f64 / steps))
            .collect()
    }

    /// Number of points.
    #[must_use]
    pub fn count(&self) -> usize {
        self.points.0 * self.points.1
    }

    /// Values across and up of a point.
    #[must_use]
    pub fn place(&self, point: usize) -> (f64, f64) {
        let at = |index: usize, place: usize, count: usize| {
            self.variation.moves[index].at(place as f64 / (count - 1) as f64)
        };
        let (across, up) = self.points;
        (at(0, point % across, across), at(1, point / across, up))
    }

    /// The points of one of `parts` equal parts, counted from 1.
    #[must_use]
    pub fn part(&self, part: usize, parts: usize) -> Range<usize> {
        let end = |part: usize| part * self.count() / parts;
        end(part - 1)..end(part)
    }

    /// Computes points in order and hands them on block by block.
    ///
    /// # Arguments
    ///
    /// * `hand_on` – takes each block; an error of it ends the chart
    ///
    /// # Errors
    ///
    /// [`Interrupted`] as `progress` says (the block that was in work is dropped), or what
    /// `hand_on` returns.
    pub fn compute<E: From<Interrupted>>(
        &self,
        points: Range<usize>,
        progress: &Progress<'_>,
        mut hand_on: impl FnMut(&[ChartPoint]) -> Result<(), E>,
    ) -> Result<(), E> {
        let mut from = points.start;
        while from < points.end {
            let to = (from + BLOCK).min(points.end);
            let block: Vec<Option<ChartPoint>> = (from..to)
                .into_par_iter()
                .map(|point| {
                    if progress.is_stopped() {
                        return None;
                    }
                    let point = self.point(point);
                    progress.step();
                    Some(point)
                })
                .collect();
            let block: Option<Vec<ChartPoint>> = block.into_iter().collect();
            hand_on(&block.ok_or(Interrupted)?)?;
            from = to;
        }
        Ok(())
    }

    /// One point.
    #[must_use]
    pub fn point(&self, point: usize) -> ChartPoint {
        let (across, up) = self.place(point);
        self.variation
            .stack(&[across, up])
            .map_or_else(|_| ChartPoint::default(), |stack| self.of_stack(&stack))
    }

    fn of_stack(&self, stack: &Stack) -> ChartPoint {
        let mut point = strain_of(stack, self.variation);
        self.fill(stack, &mut point);
        match self.figure {
            ChartFigure::Strain => point.value = point.tensile_percent,
            ChartFigure::CriticalShare => point.value = point.critical_share_buried,
            _ => {}
        }
        point
    }

    /// What the levels say of a point, with no more work than the figure and the target need.
    fn fill(&self, stack: &Stack, point: &mut ChartPoint) {
        let parameters = self.variation.parameters;
        let figure = match self.figure {
            ChartFigure::Wavelength(kind) => Some(kind),
            ChartFigure::Strain | ChartFigure::CriticalShare => None,
            ChartFigure::PeakGain
            | ChartFigure::Transparency
            | ChartFigure::PolarisationDifference => Some(Wavelength::Gain),
        };
        let needs = |kind: Wavelength| figure == Some(kind) || self.target == Some(kind);
        if needs(Wavelength::Gain) {
            if let Ok(evaluation) = Evaluation::new(stack, parameters) {
                point.value = self.of_evaluation(&evaluation);
                point.wavelength_nm = self.target.and_then(|kind| evaluation.wavelength_nm(kind));
                point.heavy_less_light_mev = evaluation.outline().heavy_less_light_mev;
            }
            return;
        }
        let outline = if needs(Wavelength::Photoluminescence) {
            Outline::of_emission(stack, parameters)
        } else {
            Outline::of_transition(stack, parameters)
        };
        if let Ok(outline) = outline {
            point.value = figure.and_then(|kind| outline.wavelength_nm(kind));
            point.wavelength_nm = self.target.and_then(|kind| outline.wavelength_nm(kind));
            point.heavy_less_light_mev = outline.heavy_less_light_mev;
        }
    }

    fn of_evaluation(&self, evaluation: &Evaluation<'_>) -> Option<f64> {
        let density_cm3 = evaluation.stack.operation.working_density_cm3;
        match self.figure {
            ChartFigure::Wavelength(kind) => evaluation.wavelength_nm(kind),
            ChartFigure::PeakGain => Some(evaluation.highest_gain(density_cm3)?.1.gain_cm),
            ChartFigure::Transparency => evaluation.transparency_cm3(),
            ChartFigure::PolarisationDifference => {
                let [te, tm] = evaluation
                    .gain_peaks_at(density_cm3)
                    .map(|peak| peak.map(|peak| peak.gain_cm));
                if te.is_none() && tm.is_none() {
                    return None;
                }
                Some(te.unwrap_or(0.0) - tm.unwrap_or(0.0))
            }
            ChartFigure::Strain | ChartFigure::CriticalShare => None,
        }
    }
}

/// The strain of the well that uses most of its critical thickness.
fn strain_of(stack: &Stack, variation: &Variation<'_>) -> ChartPoint {
    let budget = StrainBudget::new(stack, variation.parameters);
    let Some(well) = budget.tightest_well() else {
        return ChartPoint::default();
    };
    let share = |limit: CriticalThickness| match limit {
        CriticalThickness::Unlimited => 0.0,
        CriticalThickness::UpTo { thickness_nm } => well.thickness_nm / thickness_nm,
        CriticalThickness::NoneCoherent => f64::INFINITY,
    };
    // The mismatch of the relaxed layer is positive where the layer is compressed.
    let sign = if well.mismatch.relaxed > 0.0 {
        -1.0
    } else {
        1.0
    };
    ChartPoint {
        tensile_percent: Some(sign * well.mismatch.strain_percent()),
        critical_share_free: Some(share(well.critical.overlayer)),
        critical_share_buried: Some(share(well.critical.buried)),
        ..ChartPoint::default()
    }
}
