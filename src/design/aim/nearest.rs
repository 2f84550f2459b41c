//! The structure that comes nearest where none meets the aim.

use rayon::prelude::*;

use super::Hunt;

/// Part of a range down to which the nearest structure is looked for.
const FINEST: f64 = 1e-4;

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

impl Hunt<'_> {
    /// The nearest structure around the best of those seen.
    pub(super) fn nearest(&self, seen: &[(Vec<f64>, f64)]) -> Option<Nearest> {
        /// What was seen may be a guess: so many are looked at themselves.
        const TRIALS: usize = 30;
        let mut order: Vec<&(Vec<f64>, f64)> = seen.iter().collect();
        order.sort_by(|a, b| a.1.abs().total_cmp(&b.1.abs()));
        let (shares, miss_nm) = order
            .into_iter()
            .take(TRIALS)
            .find_map(|(shares, _)| Some((shares.clone(), self.miss_nm(shares)?)))?;
        let best = self.descended(shares, miss_nm);
        Some(Nearest {
            values: self.values(&best.0),
            wavelength_nm: self.shown_nm(best.1),
            miss_nm: best.1,
            binds: self.binds(&best.0),
        })
    }

    /// From a structure to ever nearer ones: a search in all directions with halved steps.
    fn descended(&self, shares: Vec<f64>, miss_nm: f64) -> (Vec<f64>, f64) {
        let directions = directions(shares.len());
        let mut best = (shares, miss_nm);
        let mut step = 0.05;
        while step > FINEST {
            let trials: Vec<(Vec<f64>, f64)> = directions
                .par_iter()
                .filter_map(|direction| {
                    let moved = best.0.iter().zip(direction);
                    let shares: Vec<f64> = moved
                        .map(|(share, along)| (share + step * along).clamp(0.0, 1.0))
                        .collect();
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
        best
    }

    /// What keeps a structure from coming nearer.
    fn binds(&self, shares: &[f64]) -> Vec<Binding> {
        let mut binds = Vec::new();
        for (index, &share) in shares.iter().enumerate() {
            if share <= FINEST {
                binds.push(Binding::Lowest(index));
            } else if share >= 1.0 - FINEST {
                binds.push(Binding::Highest(index));
            } else {
                let beyond = [-4.0, 4.0].map(|steps| {
                    let mut shares = shares.to_vec();
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
        binds
    }
}

/// All directions to the neighbours on a grid of so many sides.
fn directions(sides: usize) -> Vec<Vec<f64>> {
    let mut directions: Vec<Vec<f64>> = vec![Vec::new()];
    for _ in 0..sides {
        directions = directions
            .into_iter()
            .flat_map(|before| [-1.0, 0.0, 1.0].map(|along| [before.as_slice(), &[along]].concat()))
            .collect();
    }
    directions.retain(|direction| direction.iter().any(|along| *along != 0.0));
    directions
}
