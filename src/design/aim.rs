//! Which structures have the wavelength that is asked for: all of them.
//!
//! One move: every value at which the wavelength is met, by [`survey`]. Two moves: the
//! lines on which it is met, traced on a grid, each sampled evenly and every sample refined. Three:
//! the same at values of the third. Where there is none, the nearest structure and what binds it.
//!
//! Every solution goes through the text of its file: it is what the file says once it is read back,
//! rounding and all.

mod lines;
mod nearest;

pub use nearest::{Binding, Nearest};

use rayon::prelude::*;

use super::figures_of_merit::FiguresOfMerit;
use super::movement::Variation;
use super::progress::{Interrupted, Progress};
use super::spread::in_vacuum_nm;
use crate::evaluation::emission_nm;
use crate::numerics::survey::{Look, survey};
use crate::structure::{Bands, Medium, Overrides, Stack, Target, Wavelength, read};
use crate::units::air;

/// A wavelength that misses by less is met, nm: what rounding in the file may leave.
pub const MET_NM: f64 = 0.01;
/// Accuracy to which roots are certified before the file rounds them, nm.
const CERTIFIED_NM: f64 = 0.005;

/// What is aimed at.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Aim {
    /// Which wavelength.
    pub kind: Wavelength,
    /// How long, nm in `medium`.
    pub wavelength_nm: f64,
    /// The medium.
    pub medium: Medium,
}

impl Aim {
    /// The aim of a target.
    #[must_use]
    pub fn of(target: &Target) -> Self {
        Self {
            kind: target.kind,
            wavelength_nm: target.wavelength_nm,
            medium: target.medium,
        }
    }

    /// The wavelength in vacuum, nm.
    #[must_use]
    pub fn vacuum_nm(&self) -> f64 {
        in_vacuum_nm(self.wavelength_nm, self.medium)
    }
}

/// How closely to look.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Search {
    /// Samples along the lines of two moves.
    pub samples: usize,
    /// Values of a third move.
    pub slices: usize,
}

impl Default for Search {
    fn default() -> Self {
        Self {
            samples: 9,
            slices: 5,
        }
    }
}

/// A structure that meets the aim.
#[derive(Clone, Debug, PartialEq)]
pub struct Solution {
    /// Values of the moves as they stand in the file, in the order of the moves.
    pub values: Vec<f64>,
    /// Number of the line of solutions that it lies on, from 1; of one move 0.
    pub line: usize,
    /// The wavelength, nm in the medium of the aim.
    pub wavelength_nm: f64,
    /// The file.
    pub text: String,
    /// What tells it from the others.
    pub figures: FiguresOfMerit,
}

/// What came of an aim.
#[derive(Clone, Debug, PartialEq)]
pub struct Outcome {
    /// All solutions, along each line.
    pub solutions: Vec<Solution>,
    /// Where there is no solution, the nearest structure, if there is any structure at all.
    pub nearest: Option<Nearest>,
    /// Where there is no solution, the lowest and highest wavelength seen, nm in the medium of the
    /// aim.
    pub range_nm: Option<(f64, f64)>,
    /// Values at which the wavelength jumps over the aim: no solution, and worth knowing.
    pub jumps: usize,
    /// Solutions that a file with its digits misses by more than [`MET_NM`]: left out.
    pub unsaid: usize,
}

/// Why nothing came of an aim.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum AimError {
    /// One to three moves can be aimed with.
    #[error("{0} moves: an aim takes one, two or three")]
    Moves(usize),
    /// It was interrupted.
    #[error(transparent)]
    Interrupted(#[from] Interrupted),
}

/// Finds every structure of a variation that meets an aim.
///
/// # Arguments
///
/// * `manuscript` – the text that the structure was read from
/// * `overrides` – what was laid over it, and is laid over every solution
///
/// # Errors
///
/// [`AimError`] for a number of moves that is not 1, 2 or 3, and where `progress` says to stop.
pub fn aim(
    variation: &Variation<'_>,
    manuscript: &str,
    overrides: &Overrides,
    aim: &Aim,
    search: &Search,
    progress: &Progress<'_>,
) -> Result<Outcome, AimError> {
    let hunt = Hunt {
        variation,
        manuscript,
        overrides,
        aim,
        progress,
    };
    let found = match variation.moves.len() {
        1 => hunt.along_one()?,
        2 => hunt.over_two(&[], search.samples)?,
        3 => hunt.over_three(search)?,
        other => return Err(AimError::Moves(other)),
    };
    hunt.outcome(&found)
}

/// What a look over the moves found, in shares of their ranges from 0 to 1.
#[derive(Default)]
struct Found {
    /// Shares and the number of the line.
    solutions: Vec<(Vec<f64>, usize)>,
    /// Every structure looked at with its miss in nm, which may be a guess.
    seen: Vec<(Vec<f64>, f64)>,
    jumps: usize,
}

struct Hunt<'a> {
    variation: &'a Variation<'a>,
    manuscript: &'a str,
    overrides: &'a Overrides,
    aim: &'a Aim,
    progress: &'a Progress<'a>,
}

impl Hunt<'_> {
    fn is_mixed(&self) -> bool {
        self.variation.stack.model.bands == Bands::Mixed
    }

    fn values(&self, shares: &[f64]) -> Vec<f64> {
        let moves = self.variation.moves.iter();
        moves.zip(shares).map(|(it, &share)| it.at(share)).collect()
    }

    /// How much a structure is too long, nm in vacuum; `None` where there is none.
    fn miss_nm(&self, shares: &[f64]) -> Option<f64> {
        self.miss_with(shares, self.variation.stack.model.bands)
    }

    /// The same with the valence bands treated in another way.
    fn miss_with(&self, shares: &[f64], bands: Bands) -> Option<f64> {
        if self.progress.is_stopped() {
            return None;
        }
        let mut stack = self.variation.stack(&self.values(shares)).ok()?;
        stack.model.bands = bands;
        let found = emission_nm(&stack, self.variation.parameters, self.aim.kind);
        self.progress.step();
        Some(found.ok()?? - self.aim.vacuum_nm())
    }

    fn check_stop(&self) -> Result<(), Interrupted> {
        self.progress.check()
    }

    fn along_one(&self) -> Result<Found, Interrupted> {
        let look = Look {
            points: if self.is_mixed() { 25 } else { 49 },
            halvings: if self.is_mixed() { 2 } else { 3 },
            tolerance: CERTIFIED_NM,
        };
        let survey = survey(|share| self.miss_nm(&[share]), (0.0, 1.0), &look);
        self.check_stop()?;
        Ok(Found {
            solutions: survey.roots.iter().map(|&at| (vec![at], 0)).collect(),
            seen: survey
                .points
                .iter()
                .filter_map(|&(at, miss)| Some((vec![at], miss?)))
                .collect(),
            jumps: survey.jumps.len(),
        })
    }

    fn over_three(&self, search: &Search) -> Result<Found, Interrupted> {
        let slices = search.slices.max(2);
        let mut found = Found::default();
        for slice in 0..slices {
            let third = slice as f64 / (slices - 1) as f64;
            let of_slice = self.over_two(&[third], search.samples)?;
            let before = found.solutions.iter().map(|it| it.1).max().unwrap_or(0);
            found.solutions.extend(
                of_slice
                    .solutions
                    .into_iter()
                    .map(|(shares, line)| (shares, line + before)),
            );
            found.seen.extend(of_slice.seen);
            found.jumps += of_slice.jumps;
        }
        Ok(found)
    }

    /// Solutions as files read back, or the nearest structure.
    fn outcome(&self, found: &Found) -> Result<Outcome, AimError> {
        let solutions: Vec<Solution> = found
            .solutions
            .par_iter()
            .filter_map(|(shares, line)| self.solution(shares, *line))
            .collect();
        self.check_stop()?;
        let unsaid = found.solutions.len() - solutions.len();
        let (nearest, range_nm) = if solutions.is_empty() {
            (self.nearest(&found.seen), self.range_nm(&found.seen))
        } else {
            (None, None)
        };
        self.check_stop()?;
        Ok(Outcome {
            solutions,
            nearest,
            range_nm,
            jumps: found.jumps,
            unsaid,
        })
    }

    /// Lowest and highest wavelength of what was seen, nm in the medium of the aim.
    fn range_nm(&self, seen: &[(Vec<f64>, f64)]) -> Option<(f64, f64)> {
        let least = seen.iter().min_by(|a, b| a.1.total_cmp(&b.1))?;
        let most = seen.iter().max_by(|a, b| a.1.total_cmp(&b.1))?;
        // What was seen may be a guess.
        let exact = |it: &(Vec<f64>, f64)| self.miss_nm(&it.0).unwrap_or(it.1);
        Some((self.shown_nm(exact(least)), self.shown_nm(exact(most))))
    }

    /// A wavelength in the medium of the aim, from how much it misses in vacuum.
    fn shown_nm(&self, miss_nm: f64) -> f64 {
        let vacuum_nm = self.aim.vacuum_nm() + miss_nm;
        match self.aim.medium {
            Medium::Vacuum => vacuum_nm,
            Medium::Air => air::air_nm(vacuum_nm),
        }
    }

    fn solution(&self, shares: &[f64], line: usize) -> Option<Solution> {
        let variation = self.variation;
        let text = variation.text(self.manuscript, &self.values(shares)).ok()?;
        let reading = read(&text, variation.parameters, self.overrides).ok()?;
        let stack = conditions_of(reading.stack, variation.stack);
        let figures = FiguresOfMerit::of(&stack, variation.parameters, self.aim.kind).ok()?;
        let miss_nm = figures.wavelength_nm? - self.aim.vacuum_nm();
        let values = self.values(shares);
        let values = variation.rounded(&values);
        (miss_nm.abs() <= MET_NM).then(|| Solution {
            values,
            line,
            wavelength_nm: self.shown_nm(miss_nm),
            text,
            figures,
        })
    }
}

/// A structure as read back, under the conditions of the one it came from.
fn conditions_of(stack: Stack, original: &Stack) -> Stack {
    Stack {
        operation: original.operation.clone(),
        model: original.model,
        ..stack
    }
}
