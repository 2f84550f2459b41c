//! Which structures have the wavelength that is asked for: all of them.
//!
//! One move: every value at which the wavelength is met, by [`survey`]. Two moves: the
//! lines on which it is met, traced on a grid, each sampled evenly and every sample refined. Three:
//! the same at values of the third. Where there is none, the nearest structure and what binds it.
//!
//! Every solution goes through the text of its file: it is what the file says once it is read back,
//! rounding and all.

use rayon::prelude::*;

use super::figures_of_merit::FiguresOfMerit;
use super::movement::Variation;
use super::progress::{Interrupted, Progress};
use crate::evaluation::Evaluation;
use crate::numerics::contour::{Grid, Line};
use crate::numerics::roots::bracketed_root;
use crate::numerics::survey::{Look, survey};
use crate::structure::{Bands, Medium, Overrides, Stack, Target, Wavelength, read};
use crate::units::{air, wavelength_nm};

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
        match self.medium {
            Medium::Vacuum => self.wavelength_nm,
            Medium::Air => air::vacuum_nm(self.wavelength_nm),
        }
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

/// The structure that comes nearest where none meets the aim.
#[derive(Clone, Debug, PartialEq)]
pub struct Nearest {
    /// Values of the moves.
    pub values: Vec<f64>,
    /// Its wavelength, nm in the medium of the aim.
    pub wavelength_nm: f64,
    /// By how much it misses, nm: positive if it is too long.
    pub miss_nm: f64,
    /// What keeps it from coming nearer.
    pub binds: Vec<Binding>,
}

/// What keeps a structure from coming nearer to the aim.
#[derive(Clone, Debug, PartialEq)]
pub enum Binding {
    /// A move at its lowest value.
    Lowest(usize),
    /// A move at its highest value.
    Highest(usize),
    /// Beyond it there is no level, no such composition, or no peak.
    Existence(usize),
    /// The wavelength turns.
    Turn,
}

/// What came of an aim.
#[derive(Clone, Debug, PartialEq)]
pub struct Outcome {
    /// All solutions, along each line.
    pub solutions: Vec<Solution>,
    /// Where there is no solution, the nearest structure, if there is any structure at all.
    pub nearest: Option<Nearest>,
    /// Lowest and highest wavelength seen, nm in the medium of the aim.
    pub range_nm: Option<(f64, f64)>,
    /// Values at which the wavelength jumps over the aim: no solution, and worth knowing.
    pub jumps: usize,
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
    /// Every structure looked at with its miss in nm.
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
        if self.progress.is_stopped() {
            return None;
        }
        let stack = self.variation.stack(&self.values(shares)).ok()?;
        let found = wavelength_of(&stack, self.variation, self.aim.kind);
        self.progress.step();
        Some(found? - self.aim.vacuum_nm())
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

    /// The lines of solutions over the first two moves, the others at given shares.
    fn over_two(&self, others: &[f64], samples: usize) -> Result<Found, Interrupted> {
        let count = if self.is_mixed() { 13 } else { 33 };
        let axis: Vec<f64> = (0..count)
            .map(|at| at as f64 / (count - 1) as f64)
            .collect();
        let at = |x: f64, y: f64| -> Vec<f64> { [&[x, y], others].concat() };
        let values: Vec<Option<f64>> = (0..count * count)
            .into_par_iter()
            .map(|place| self.miss_nm(&at(axis[place % count], axis[place / count])))
            .collect();
        self.check_stop()?;
        let seen = values
            .iter()
            .enumerate()
            .filter_map(|(place, miss)| {
                Some((at(axis[place % count], axis[place / count]), (*miss)?))
            })
            .collect();
        let grid = Grid {
            x: &axis,
            y: &axis,
            values: &values,
        };
        let surface = Surface {
            miss_nm: &|x, y| self.miss_nm(&at(x, y)),
            reach: 1.0 / (count - 1) as f64,
        };
        let mut lines = grid.lines(0.0);
        for line in &mut lines {
            surface.lengthen(line);
        }
        let wanted = sampled(&lines, samples);
        let refined: Vec<Option<(f64, f64, usize)>> = wanted
            .par_iter()
            .map(|sample| {
                let (x, y) = surface.refined(sample.at, sample.along)?;
                Some((x, y, sample.line))
            })
            .collect();
        self.check_stop()?;
        let jumps = refined.iter().filter(|it| it.is_none()).count();
        Ok(Found {
            solutions: refined
                .into_iter()
                .flatten()
                .map(|(x, y, line)| (at(x, y), line))
                .collect(),
            seen,
            jumps,
        })
    }

    /// Solutions as files read back, or the nearest structure.
    fn outcome(&self, found: &Found) -> Result<Outcome, AimError> {
        let solutions: Vec<Solution> = found
            .solutions
            .par_iter()
            .filter_map(|(shares, line)| self.solution(shares, *line))
            .collect();
        self.check_stop()?;
        let misses = || found.seen.iter().map(|it| it.1);
        let least = misses().fold(f64::INFINITY, f64::min);
        let most = misses().fold(f64::NEG_INFINITY, f64::max);
        let nearest = if solutions.is_empty() {
            let best = found
                .seen
                .iter()
                .min_by(|a, b| a.1.abs().total_cmp(&b.1.abs()));
            best.map(|(shares, miss)| self.nearest(shares, *miss))
        } else {
            None
        };
        Ok(Outcome {
            solutions,
            nearest,
            range_nm: (least <= most).then(|| (self.shown_nm(least), self.shown_nm(most))),
            jumps: found.jumps,
        })
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

    /// The nearest structure around the best one seen: a search along the moves with halved steps.
    fn nearest(&self, shares: &[f64], miss_nm: f64) -> Nearest {
        const FINEST: f64 = 1e-4;
        let mut best = (shares.to_vec(), miss_nm);
        let mut step = 0.05;
        while step > FINEST {
            let trials: Vec<(Vec<f64>, f64)> = (0..2 * shares.len())
                .into_par_iter()
                .filter_map(|trial| {
                    let mut shares = best.0.clone();
                    let sign = if trial % 2 == 0 { step } else { -step };
                    shares[trial / 2] = (shares[trial / 2] + sign).clamp(0.0, 1.0);
                    let miss_nm = self.miss_nm(&shares)?;
                    Some((shares, miss_nm))
                })
                .collect();
            let better = trials
                .into_iter()
                .min_by(|a, b| a.1.abs().total_cmp(&b.1.abs()))
                .filter(|trial| trial.1.abs() < best.1.abs());
            match better {
                Some(trial) => best = trial,
                None => step *= 0.5,
            }
        }
        let mut binds = Vec::new();
        for (index, &share) in best.0.iter().enumerate() {
            if share <= FINEST {
                binds.push(Binding::Lowest(index));
            } else if share >= 1.0 - FINEST {
                binds.push(Binding::Highest(index));
            } else {
                let beyond = [-4.0, 4.0].map(|steps| {
                    let mut shares = best.0.clone();
                    shares[index] = (share + steps * FINEST).clamp(0.0, 1.0);
                    self.miss_nm(&shares)
                });
                if beyond.iter().any(Option::is_none) {
                    binds.push(Binding::Existence(index));
                }
            }
        }
        if binds.is_empty() {
            binds.push(Binding::Turn);
        }
        Nearest {
            values: self.values(&best.0),
            wavelength_nm: self.shown_nm(best.1),
            miss_nm: best.1,
            binds,
        }
    }
}

/// The wavelength of a structure of a variation, nm in vacuum.
fn wavelength_of(stack: &Stack, variation: &Variation<'_>, kind: Wavelength) -> Option<f64> {
    let evaluation = Evaluation::new(stack, variation.parameters).ok()?;
    match kind {
        Wavelength::Transition => Some(wavelength_nm(evaluation.first_transition_ev())),
        other => evaluation.wavelength_nm(other),
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

/// A miss over two shares.
struct Surface<'a> {
    miss_nm: &'a (dyn Fn(f64, f64) -> Option<f64> + Sync),
    /// One square of the grid.
    reach: f64,
}

/// A point of a line of solutions before it is refined.
struct Sample {
    at: (f64, f64),
    /// Direction of the line there.
    along: (f64, f64),
    /// Number of the line, from 1.
    line: usize,
}

impl Surface<'_> {
    /// The solution nearest to a point of a line, looked for across the line; at a bound of one
    /// share, along that bound.
    fn refined(&self, at: (f64, f64), along: (f64, f64)) -> Option<(f64, f64)> {
        const EDGE: f64 = 1e-9;
        let is_bound = |share: f64| !(EDGE..=1.0 - EDGE).contains(&share);
        let across = match (is_bound(at.0), is_bound(at.1)) {
            (true, false) => (0.0, 1.0),
            (false, true) => (1.0, 0.0),
            _ => (-along.1, along.0),
        };
        let place = |step: f64| {
            let inside = |share: f64, direction: f64| (share + step * direction).clamp(0.0, 1.0);
            (inside(at.0, across.0), inside(at.1, across.1))
        };
        let miss = |step: f64| {
            let (x, y) = place(step);
            (self.miss_nm)(x, y)
        };
        let here = miss(0.0)?;
        if here.abs() <= 1e-6 {
            return Some(at);
        }
        let mut bracket = None;
        for size in [0.1, 0.3, 1.0, 2.0] {
            let steps = [size * self.reach, -size * self.reach];
            bracket = steps
                .into_iter()
                .find(|&step| miss(step).is_some_and(|there| (there > 0.0) != (here > 0.0)));
            if bracket.is_some() {
                break;
            }
        }
        let end = bracket?;
        let step = bracketed_root(|step| miss(step).unwrap_or(f64::NAN), 0.0, end, 1e-9);
        (miss(step)?.abs() <= CERTIFIED_NM).then(|| place(step))
    }

    /// Continues the open ends of a line that stop short of the bounds, to where there is no
    /// structure any more.
    fn lengthen(&self, line: &mut Line) {
        if line.closed {
            return;
        }
        for _ in 0..2 {
            line.points.reverse();
            let mut step = 0.5 * self.reach;
            while step > 0.05 * self.reach {
                let [.., before, last] = line.points.as_slice() else {
                    break;
                };
                let is_bound = |share: f64| share <= 0.0 || share >= 1.0;
                if is_bound(last.0) || is_bound(last.1) {
                    break;
                }
                let along = direction(*before, *last);
                let ahead = (
                    (last.0 + step * along.0).clamp(0.0, 1.0),
                    (last.1 + step * along.1).clamp(0.0, 1.0),
                );
                match self.refined(ahead, along) {
                    Some(next) if direction(*last, next) != (0.0, 0.0) => line.points.push(next),
                    _ => step *= 0.5,
                }
                if line.points.len() > 10_000 {
                    break;
                }
            }
        }
    }
}

fn direction(from: (f64, f64), to: (f64, f64)) -> (f64, f64) {
    let (x, y) = (to.0 - from.0, to.1 - from.1);
    let length = x.hypot(y);
    if length > 0.0 {
        (x / length, y / length)
    } else {
        (0.0, 0.0)
    }
}

/// Points evenly along all lines, the ends of open ones among them, each line at least one.
fn sampled(lines: &[Line], samples: usize) -> Vec<Sample> {
    let measured: Vec<Vec<f64>> = lines.iter().map(|line| line.lengths((1.0, 1.0))).collect();
    let length = |lengths: &Vec<f64>| lengths.last().copied().unwrap_or(0.0);
    let total: f64 = measured.iter().map(length).sum();
    let mut wanted = Vec::new();
    for (index, (line, lengths)) in lines.iter().zip(&measured).enumerate() {
        let whole = length(lengths);
        let share = whole / total.max(f64::MIN_POSITIVE);
        let count = ((samples as f64 * share).round() as usize).max(1);
        for at in 0..count {
            let along = if line.closed || count == 1 {
                (at as f64 + 0.5) / count as f64
            } else {
                at as f64 / (count - 1) as f64
            } * whole;
            let near = 1e-3 * whole;
            let before = line.at((along - near).max(0.0), lengths);
            let after = line.at((along + near).min(whole), lengths);
            wanted.push(Sample {
                at: line.at(along, lengths),
                along: direction(before, after),
                line: index + 1,
            });
        }
    }
    wanted
}
