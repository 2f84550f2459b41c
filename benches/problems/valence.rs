//! One 3×3 valence block of an 8 nm well between barriers of 10 nm, 279 nodes, 8 states over the
//! in-plane wave number.

use stepwell::materials::Parameters;
use stepwell::numerics::block::{BlockChain, BlockRun, Hold, Ladder, Trail};
use stepwell::profile::Profile;
use stepwell::structure::{self, Overrides};
use stepwell::subbands::interval;

/// In0.53Ga0.47As between InP.
const STRUCTURE: &str = r#"
format = 1
[substrate]
material = "InP"
[[layers]]
role = "barrier"
material = "InP"
thickness_nm = 10
[[layers]]
role = "well"
material = "In0.53Ga0.47As"
thickness_nm = 8
[[layers]]
role = "barrier"
material = "InP"
thickness_nm = 10
"#;
/// Intervals of 0.1 nm in each layer.
const INTERVALS: [usize; 3] = [100, 80, 100];
const STEP_NM: f64 = 0.1;
/// Wave numbers up to 1/nm.
pub(crate) const WAVE_NUMBERS: usize = 80;
/// States wanted at each.
pub(crate) const STATES: usize = 8;

/// The block at every wave number.
pub(crate) struct Valence {
    /// Runs of the chain at every wave number, from 1/80 per nm on.
    runs: Vec<Vec<BlockRun>>,
    chain: BlockChain,
    /// Hole energy below which no state may lie, eV.
    floor_ev: f64,
    start: Ladder,
}

impl Valence {
    /// The problem with its states at zone centre.
    pub(crate) fn new() -> Self {
        let parameters = Parameters::shipped();
        let reading = structure::read(STRUCTURE, &parameters, &Overrides::default())
            .expect("the structure above is sound");
        let profile = Profile::new(&reading.stack, &parameters).expect("it has a well");
        let at = |k_per_nm: f64| -> Vec<BlockRun> {
            let layers = profile.layers.iter().zip(INTERVALS);
            layers
                .map(|(layer, intervals)| BlockRun {
                    intervals,
                    ..interval(&layer.lower, 0.0, STEP_NM, k_per_nm, 1.0)
                })
                .collect()
        };
        let floor_ev = profile
            .layers
            .iter()
            .map(|layer| -layer.lower.edges.heavy_ev.max(layer.lower.edges.light_ev))
            .fold(f64::INFINITY, f64::min);
        let mut chain = BlockChain::new(at(0.0));
        let start = chain.lowest(STATES, floor_ev).expect("certified");
        let runs = (1..=WAVE_NUMBERS)
            .map(|step| at(step as f64 / WAVE_NUMBERS as f64))
            .collect();
        Self {
            runs,
            chain,
            floor_ev,
            start,
        }
    }

    /// Energies of the states at every wave number, hole energies in eV, rising; certified.
    pub(crate) fn solve(&mut self) -> Vec<Vec<f64>> {
        let mut trail = Trail::new(&self.chain, &self.start, 0.0);
        let mut energies_ev = Vec::with_capacity(self.runs.len());
        for (step, runs) in self.runs.iter().enumerate() {
            self.chain.runs_mut().copy_from_slice(runs);
            let at = (step + 1) as f64;
            if !trail.step(&mut self.chain, at, Hold::Lowest(STATES), self.floor_ev) {
                let found = self.chain.lowest(STATES, self.floor_ev);
                trail = Trail::new(&self.chain, &found.expect("certified"), at);
            }
            energies_ev.push(trail.energies().collect());
        }
        energies_ev
    }

    /// Number of unknowns.
    pub(crate) fn size(&self) -> usize {
        3 * self.chain.nodes()
    }

    /// Hole energy below which no state lies, eV.
    pub(crate) fn floor_ev(&self) -> f64 {
        self.floor_ev
    }

    /// The matrix at one of the wave numbers: (row, column, value), upper triangle.
    pub(crate) fn entries(&mut self, step: usize) -> Vec<(usize, usize, f64)> {
        self.chain.runs_mut().copy_from_slice(&self.runs[step]);
        self.chain.entries()
    }
}
