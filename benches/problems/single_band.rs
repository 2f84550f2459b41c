//! Three wells in 60 nm, masses constant or depending on energy: all levels below the barriers.

use stepwell::numerics::chain::{Chain, Run, State, Workspace};

/// ħ²/2m₀, eV nm² (CODATA 2022, to the digits that a speed needs).
const HBAR2_OVER_2M0_EV_NM2: f64 = 0.038_099_821;
/// Layers from the substrate up, nm, barriers and wells by turns: whole multiples of 0.8 nm.
const THICKNESSES_NM: [f64; 7] = [13.6, 8.0, 4.0, 8.0, 4.8, 8.0, 13.6];
/// Edge of the barriers above that of the wells, eV.
pub(crate) const DEPTH_EV: f64 = 0.365;
/// Masses of wells and barriers at their edges (GaAs and AlGaAs, in round numbers).
const MASSES: [f64; 2] = [0.067, 0.09];
/// Gaps of wells and barriers, eV: what softens the masses.
const GAPS_EV: [f64; 2] = [1.42, 1.8];

/// The problem on a grid to be solved, and on two coarse ones to start from.
pub(crate) struct SingleBand {
    coarse: [Chain; 2],
    /// The matrix to be solved.
    pub(crate) fine: Chain,
    /// h² of the coarse grids and of the fine one, nm².
    squares: [f64; 3],
    work: Workspace,
}

impl SingleBand {
    /// The problem with `nodes` inner nodes: 599 or 2399.
    pub(crate) fn new(nodes: usize, softened: bool) -> Self {
        let fine_nm = 60.0 / (nodes + 1) as f64;
        let coarse_nm = if nodes > 1000 { [0.4, 0.2] } else { [0.8, 0.4] };
        let fine = chain(fine_nm, softened);
        assert_eq!(fine.nodes(), nodes, "a multiple of the coarse grids");
        Self {
            coarse: coarse_nm.map(|step_nm| chain(step_nm, softened)),
            fine,
            squares: [coarse_nm[0].powi(2), coarse_nm[1].powi(2), fine_nm.powi(2)],
            work: Workspace::default(),
        }
    }

    /// Every level below the barriers with its vector, certified. The coarsest grid is solved from
    /// nothing; what it says of its own error starts the next, and both start the last.
    pub(crate) fn solve(&mut self) -> Vec<State> {
        let work = &mut self.work;
        let [x0, x1, x] = self.squares;
        let [first, second] = &self.coarse;
        let count = self.fine.count_below(DEPTH_EV);
        let lower = first.lowest_with(work, count, None).expect("certified");
        let slopes: Vec<f64> = lower.iter().map(|state| first.shift(state) / x0).collect();
        let guesses: Vec<f64> = lower
            .iter()
            .zip(&slopes)
            .map(|(state, slope)| state.energy + slope * (x1 - x0))
            .collect();
        let upper = second
            .lowest_with(work, count, Some(&guesses))
            .expect("certified");
        let guesses: Vec<f64> = lower
            .iter()
            .zip(&slopes)
            .zip(&upper)
            .map(|((lower, slope), upper)| {
                // The first power of h² from the shifts, extrapolated; the second from the energies.
                let own = second.shift(upper) / x1;
                let slope = own + (own - slope) * x1 / (x0 - x1);
                let change = upper.energy - lower.energy - slope * (x1 - x0);
                let curvature = change / (x1 * x1 - x0 * x0);
                upper.energy + slope * (x - x1) + curvature * (x * x - x1 * x1)
            })
            .collect();
        self.fine
            .lowest_with(work, count, Some(&guesses))
            .expect("certified")
    }
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
                softening: if softened {
                    GAPS_EV[barrier].recip()
                } else {
                    0.0
                },
            }
        })
        .collect();
    Chain::new(runs)
}
