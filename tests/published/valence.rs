//! Valence bands mixed: between hard walls, and the matrix elements of given overlaps.

use crate::judgement::Check;
use crate::{Answer, Problem};
use serde::Deserialize;
use stepwell::materials::Crystal;
use stepwell::numerics::block::{BlockChain, Ladder};
use stepwell::profile::Strained;
use stepwell::subbands::{Dipole, interval};

/// One uniform unstrained layer between hard walls; levels are hole energies from its band edge.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct ValenceWalls {
    name: String,
    luttinger: [f64; 3],
    /// Far larger than any level: four bands are left.
    split_off_ev: f64,
    length_nm: f64,
    check: Vec<Check>,
}

/// Intervals of the coarser of two grids, whose energies are extrapolated.
const INTERVALS: usize = 120;
/// Levels looked for.
const LEVELS: usize = 20;

impl ValenceWalls {
    fn chain(&self, intervals: usize, k_per_nm: f64) -> BlockChain {
        let crystal = Crystal {
            lattice_nm: 1.0,
            gap_ev: 1.0,
            gap_x_ev: f64::INFINITY,
            gap_l_ev: f64::INFINITY,
            valence_edge_ev: 0.0,
            split_off_ev: self.split_off_ev,
            electron_mass: 1.0,
            luttinger: self.luttinger,
            kane_energy_ev: 0.0,
            ac_ev: 0.0,
            av_ev: 0.0,
            b_ev: 0.0,
            c11_gpa: 1.0,
            c12_gpa: 0.5,
        };
        let numbers = Strained {
            crystal,
            edges: crystal.on(1.0),
        };
        let length_nm = self.length_nm / intervals as f64;
        let mut run = interval(&numbers, 0.0, length_nm, k_per_nm, 1.0);
        run.intervals = intervals;
        BlockChain::new(vec![run])
    }

    fn ladder(&self, intervals: usize, k_per_nm: f64) -> Result<Ladder, String> {
        self.chain(intervals, k_per_nm)
            .lowest(LEVELS, -1e-9)
            .map_err(|error| error.to_string())
    }

    /// The level of a kind and a number of half waves at zero wave number: `heavy`, or the lower
    /// (`light`) and the upper (`split_off`) of the two that stand beside it.
    fn zone_centre_ev(&self, intervals: usize, kind: &str, half_waves: usize) -> Answer {
        let ladder = self.ladder(intervals, 0.0)?;
        let content = |vector: &[f64]| -> [f64; 2] {
            let mut sums = [0.0; 3];
            for (node, values) in vector.chunks_exact(3).enumerate() {
                let phase = std::f64::consts::PI * (half_waves * (node + 1)) as f64;
                let sine = (phase / intervals as f64).sin();
                for (sum, value) in sums.iter_mut().zip(values) {
                    *sum += sine * value;
                }
            }
            let scale = 2.0 * self.length_nm / (intervals * intervals) as f64;
            let [heavy, light, split_off] = sums.map(|sum| scale * sum * sum);
            [heavy, light + split_off]
        };
        let (family, place) = match kind {
            "heavy" => (0, 0),
            "light" => (1, 0),
            "split_off" => (1, 1),
            other => return Err(format!("no band is called {other}")),
        };
        ladder
            .vectors
            .iter()
            .zip(&ladder.energies)
            .filter(|(vector, _)| content(vector)[family] > 0.5)
            .nth(place)
            .map(|(_, &energy)| energy)
            .ok_or_else(|| format!("{kind} {half_waves} is not among the {LEVELS} first"))
    }

    fn level_ev(&self, intervals: usize, check: &Check) -> Answer {
        let words: Vec<&str> = check.quantity.split(' ').collect();
        let number = |word: &str| -> Result<usize, String> {
            word.parse().map_err(|_| format!("which level is {word}?"))
        };
        match words[..] {
            ["level", which, "ev"] => {
                let k_per_nm = check.at.ok_or("at which wave number?")?;
                let ladder = self.ladder(intervals, k_per_nm)?;
                let index = number(which)?.checked_sub(1).ok_or("levels count from 1")?;
                ladder
                    .energies
                    .get(index)
                    .copied()
                    .ok_or_else(|| "too high".to_owned())
            }
            [kind, which, "ev"] => self.zone_centre_ev(intervals, kind, number(which)?),
            _ => Err(format!("unknown quantity {}", check.quantity)),
        }
    }
}

impl Problem for ValenceWalls {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let coarse = self.level_ev(INTERVALS, check)?;
        let fine = self.level_ev(2 * INTERVALS, check)?;
        Ok(fine + (fine - coarse) / 3.0)
    }
}

/// A valence state by its overlaps with an electron envelope.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct DipoleProblem {
    name: String,
    #[serde(default)]
    heavy: f64,
    #[serde(default)]
    light: f64,
    #[serde(default)]
    split_off: f64,
    check: Vec<Check>,
}

impl Problem for DipoleProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let dipole = Dipole::of_overlaps(self.heavy, self.light, self.split_off);
        // |M|² = m0 Ep/2 is three times Mb² = m0 Ep/6.
        Ok(match check.quantity.as_str() {
            "te_factor" => dipole.te,
            "tm_factor" => dipole.tm,
            "te_share_of_m2" => dipole.te / 3.0,
            "tm_share_of_m2" => dipole.tm / 3.0,
            "polarisation_sum_of_m2" => (2.0 * dipole.te + dipole.tm) / 3.0,
            other => return Err(format!("unknown quantity {other}")),
        })
    }
}
