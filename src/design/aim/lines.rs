//! Lines of solutions over two moves: traced on a grid, sampled evenly, every sample refined.
//!
//! With mixed bands a wavelength takes a hundred times as long as with single ones, and differs from
//! it by little that changes slowly. Lines are therefore traced with single bands and what mixing
//! changes at a few places; a sample counts once the mixed wavelength itself meets the aim. The
//! wavelength of a gain peak, whose existence hangs on how the bands are treated, is traced as it is.

use rayon::prelude::*;

use super::{CERTIFIED_NM, Found, Hunt};
use crate::design::progress::Interrupted;
use crate::numerics::contour::{Grid, Line};
use crate::numerics::roots::bracketed_root;
use crate::structure::{Bands, Wavelength};

/// Points along each side of the grid that lines are traced on, and where each takes long.
const FINE: usize = 33;
const ROUGH: usize = 13;
/// Points along each side of the grid of what mixing changes.
const CHANGES: usize = 5;
/// How often a place is corrected until its own wavelength meets the aim.
const CORRECTIONS: usize = 6;

impl Hunt<'_> {
    /// The lines of solutions over the first two moves, the others at given shares.
    pub(super) fn over_two(&self, others: &[f64], samples: usize) -> Result<Found, Interrupted> {
        let at = |(x, y): (f64, f64)| -> Vec<f64> { [&[x, y], others].concat() };
        let exact = |place: (f64, f64)| self.miss_nm(&at(place));
        let single = |place: (f64, f64)| self.miss_with(&at(place), Bands::Single);
        let is_guessed = self.is_mixed() && self.aim.kind != Wavelength::Gain;
        let takes_long = self.is_mixed() && !is_guessed;
        let axis = even(if takes_long { ROUGH } else { FINE });
        let sparse = even(CHANGES);
        let changes = if is_guessed {
            over(&sparse, &|place| Some(exact(place)? - single(place)?))
        } else {
            Vec::new()
        };
        let surface = Surface {
            exact: &exact,
            guess: if is_guessed { &single } else { &exact },
            changes: Grid {
                x: &sparse,
                y: &sparse,
                values: &changes,
            },
            reach: 1.0 / (axis.len() - 1) as f64,
        };
        let values = over(&axis, &|place| surface.about(place));
        self.check_stop()?;
        let seen = (0..values.len())
            .filter_map(|index| Some((at(place(&axis, index)), values[index]?)))
            .collect();
        let grid = Grid {
            x: &axis,
            y: &axis,
            values: &values,
        };
        let mut lines = grid.lines(0.0);
        lines.par_iter_mut().for_each(|line| surface.lengthen(line));
        let refined: Vec<Option<(Vec<f64>, usize)>> = sampled(&lines, samples)
            .par_iter()
            .map(|sample| {
                let place = surface.refined(sample.at, sample.along)?;
                Some((at(place), sample.line))
            })
            .collect();
        self.check_stop()?;
        Ok(Found {
            jumps: refined.iter().filter(|it| it.is_none()).count(),
            solutions: refined.into_iter().flatten().collect(),
            seen,
        })
    }
}

/// Shares from 0 to 1.
fn even(count: usize) -> Vec<f64> {
    (0..count)
        .map(|at| at as f64 / (count - 1) as f64)
        .collect()
}

/// The place of a point of a square grid, counted row by row.
fn place(axis: &[f64], index: usize) -> (f64, f64) {
    (axis[index % axis.len()], axis[index / axis.len()])
}

/// A function over a square grid.
fn over(axis: &[f64], function: &(dyn Fn((f64, f64)) -> Option<f64> + Sync)) -> Vec<Option<f64>> {
    (0..axis.len() * axis.len())
        .into_par_iter()
        .map(|index| function(place(axis, index)))
        .collect()
}

type Miss<'a> = &'a (dyn Fn((f64, f64)) -> Option<f64> + Sync);

/// A miss over two shares.
struct Surface<'a> {
    /// The miss itself, nm.
    exact: Miss<'a>,
    /// One that bends like it and is sooner there, nm.
    guess: Miss<'a>,
    /// Exact less guess, on a wide grid; empty where they are the same.
    changes: Grid<'a>,
    /// One square of the grid that lines are traced on.
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
    /// The miss as far as the wide grid knows it; where it does not, the guess.
    fn about(&self, place: (f64, f64)) -> Option<f64> {
        Some((self.guess)(place)? + self.change(place))
    }

    fn change(&self, place: (f64, f64)) -> f64 {
        if self.changes.values.is_empty() {
            return 0.0;
        }
        self.changes.at(place.0, place.1).unwrap_or(0.0)
    }

    /// The solution nearest to a point of a line, looked for across the line.
    fn refined(&self, at: (f64, f64), along: (f64, f64)) -> Option<(f64, f64)> {
        let mut place = at;
        for _ in 0..CORRECTIONS {
            let miss = (self.exact)(place)?;
            if miss.abs() <= 0.4 * CERTIFIED_NM {
                return Some(place);
            }
            let change = miss - (self.guess)(place)?;
            place = self.crossing(place, along, &|at| Some((self.guess)(at)? + change))?;
        }
        None
    }

    /// Where a miss vanishes nearest to a place, looked for across a line; at a bound of one share,
    /// along that bound.
    fn crossing(&self, at: (f64, f64), along: (f64, f64), miss_nm: Miss<'_>) -> Option<(f64, f64)> {
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
        let miss = |step: f64| miss_nm(place(step));
        let here = miss(0.0)?;
        let mut sizes = [0.1, 0.3, 1.0, 2.0].into_iter();
        let end = sizes.find_map(|size| {
            let steps = [size * self.reach, -size * self.reach];
            steps
                .into_iter()
                .find(|&step| miss(step).is_some_and(|there| (there > 0.0) != (here > 0.0)))
        })?;
        // Far below what counts is zero: what is left would be spent on nothing.
        let settled = |step: f64| match miss(step) {
            Some(miss) if miss.abs() <= 0.02 * CERTIFIED_NM => 0.0,
            Some(miss) => miss,
            None => f64::NAN,
        };
        let step = bracketed_root(settled, 0.0, end, 1e-9);
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
                match self.crossing(ahead, along, &|place| self.about(place)) {
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
