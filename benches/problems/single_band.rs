//! Three wells in 60 nm, masses constant or depending on energy: all levels below the barriers.

use stepwell::numerics::chain::{Chain, Run, State, Workspace};

/// ħ²/2m₀, eV nm² (CODATA 2022, to the digits that a speed needs).
const HBAR2_OVER_2M0_EV_NM2: f64 = 0.038_099_821;
/// Layers from the substrate up, nm, barriers and wells by turns: whole multiples of 0.8 nm.
const THICKNESSES_NM: [f64; 7] = [13.6, 8.0, 4.0, 8.0, 4.8, 8.0, 13.6];
/// Edge of the barriers above that of the wells, eV.
pub const DEPTH_EV: f64 = 0.365;
/// Masses of wells and barriers at their edges (GaAs and AlGaAs, in round numbers).
const MASSES: [f64; 2] = [0.067, 0.09];
/// Gaps of wells and barriers, eV: what softens the masses.
const GAPS_EV: [f64; 2] = [1.42, 1.8];

/// Grids of the problem, the finest last: each has half the step of the one before, except the last.
pub struct SingleBand {
    coarse: Vec<Chain>,
    pub fine: Chain,
    /// Steps of the grids, nm.
    steps_nm: Vec<f64>,
    work: Workspace,
}

impl SingleBand {
    /// The problem with `nodes` inner nodes: 599 or 2399.
    pub fn new(nodes: usize, softened: bool) -> Self {
        let fine_nm = 60.0 / (nodes + 1) as f64;
        let steps_nm = if nodes > 1000 {
            vec![0.4, 0.2, 0.1, fine_nm]
        } else {
            vec![0.8, 0.4, 0.2, fine_nm]
        };
        let mut grids: Vec<Chain> = steps_nm.iter().map(|&step| chain(step, softened)).collect();
        let fine = grids.pop().expect("four grids");
        assert_eq!(fine.nodes(), nodes);
        Self {
            coarse: grids,
            fine,
            steps_nm,
            work: Workspace::default(),
        }
    }

    /// Every level below the barriers with its vector, certified. The coarsest grid is solved from
    /// nothing; what each grid says of its own error, and then the grids together, start the next.
    pub fn solve(&mut self) -> Vec<State> {
        let work = &mut self.work;
        let count = self.fine.count_below(DEPTH_EV);
        let coarsest = &self.coarse[0];
        let states = coarsest.lowest(work, count, None).expect("certified");
        let halved = |state: &State| state.energy - 0.75 * coarsest.shift(state);
        let mut guesses: Vec<f64> = states.iter().map(halved).collect();
        let mut ladders: Vec<Vec<f64>> = Vec::with_capacity(self.coarse.len());
        ladders.push(states.iter().map(|state| state.energy).collect());
        for grid in &self.coarse[1..] {
            ladders.push(grid.energies(work, &guesses).expect("certified"));
            guesses = ahead(&ladders, &self.steps_nm);
        }
        self.fine
            .lowest(work, count, Some(&guesses))
            .expect("certified")
    }
}

/// Energies on the next grid: the polynomial in h² through those on the grids before.
fn ahead(ladders: &[Vec<f64>], steps_nm: &[f64]) -> Vec<f64> {
    let squares: Vec<f64> = steps_nm.iter().map(|step| step * step).collect();
    let next = squares[ladders.len()];
    let share = |own: usize| -> f64 {
        (0..ladders.len())
            .filter(|&other| other != own)
            .map(|other| (next - squares[other]) / (squares[own] - squares[other]))
            .product()
    };
    let shares: Vec<f64> = (0..ladders.len()).map(share).collect();
    (0..ladders[0].len())
        .map(|level| {
            let terms = ladders.iter().zip(&shares);
            terms.map(|(ladder, share)| share * ladder[level]).sum()
        })
        .collect()
}

fn chain(step_nm: f64, softened: bool) -> Chain {
    let runs = THICKNESSES_NM
        .iter()
        .enumerate()
        .map(|(at, thickness_nm)| {
            let barrier = 1 - at % 2;
            let intervals = (thickness_nm / step_nm).round();
            Run {
                intervals: intervals as usize,
                length: thickness_nm / intervals,
                stiffness: HBAR2_OVER_2M0_EV_NM2 / MASSES[barrier],
                potential: barrier as f64 * DEPTH_EV,
                softening: if softened { GAPS_EV[barrier].recip() } else { 0.0 },
            }
        })
        .collect();
    Chain::new(runs)
}
