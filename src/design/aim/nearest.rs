//! The structure that comes nearest where none meets the aim.

use rayon::prelude::*;

use super::Hunt;

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
    /// The nearest structure around the best one seen: a search along the moves with halved steps.
    pub(super) fn nearest(&self, shares: &[f64], miss_nm: f64) -> Nearest {
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
