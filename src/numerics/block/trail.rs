//! States followed from problem to neighbouring problem.

use super::kernel::{Columns, Step, combine, products, projections};
use super::neighbours::{NEAR, groups};
use super::{BlockChain, LANES, Ladder, Lanes, load, unload};

/// Largest residual of an accepted state: the energy is good to its square over the distance of the
/// next level.
pub(super) const LARGEST_RESIDUAL: f64 = 3e-6;
/// Largest share of any other state in the vector of an accepted one: its residual over the distance
/// of that state.
const LARGEST_SHARE: f64 = 1e-4;
/// How far above the highest state asked for its shift stands at least.
pub(super) const LEAST_MARGIN: f64 = 4.0 * LARGEST_RESIDUAL;
/// Steps of inverse iteration that a slice may take.
const ROUNDS: usize = 4;
/// Problems that the next one is extrapolated from.
pub(super) const MEMORY: usize = 3;

/// What must hold of the states of a slice.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Hold {
    /// So many are the lowest eigenvalues, none missed. States beyond them only help where states
    /// exchange their characters.
    Lowest(usize),
    /// Each is the state nearest to its own energy and vector, wherever it stands in the order. That
    /// none was missed between them is not known.
    Character,
}

/// States of a chain that changes with a parameter.
///
/// # Method
///
/// Energies and vectors of the latest three slices are continued by a parabola, and one step of
/// inverse iteration is taken in every lane until the residuals are small. Near neighbours are then
/// separated inside their span.
///
/// The lowest states are accepted if their energies rise strictly, none lies below a floor, and
/// exactly as many levels as states lie below a point just above them: then none was missed and none
/// found twice. The highest of them is given a shift a little too high, so that the count at its
/// shift is the one that decides.
#[derive(Clone, Debug)]
pub struct Trail {
    pub(super) states: usize,
    pub(super) chunks: Vec<Chunk>,
    /// The parameter at the slices, oldest first.
    at: [f64; MEMORY],
    /// Energies by lane at the slices, oldest first.
    energies: [Vec<f64>; MEMORY],
    /// Up to how many slices back each state is a straight continuation of itself.
    pub(super) unbroken: Vec<usize>,
    /// Lanes by rising energy.
    order: Vec<usize>,
    /// How far the highest state asked for lay off its forecast.
    surprise: f64,
    /// What a step writes on: nothing is allocated for it.
    draft: Draft,
}

/// The next slice on its way, a value a lane.
#[derive(Clone, Debug, Default)]
pub(super) struct Draft {
    /// Energies as the slices before lead to.
    pub(super) forecast: Vec<f64>,
    /// Energies now.
    pub(super) energies: Vec<f64>,
    /// Residuals now.
    pub(super) residuals: Vec<f64>,
    /// Where the last sweep was taken.
    pub(super) shifts: Vec<f64>,
    /// Levels below the shifts.
    pub(super) below: Vec<usize>,
    /// Lanes by rising energy.
    pub(super) order: Vec<usize>,
    /// Lanes that have not settled, rising.
    pub(super) pending: Vec<usize>,
}

impl Draft {
    fn sort(&mut self) {
        let Self {
            order, energies, ..
        } = self;
        sort(order, energies);
    }

    fn energy(&self, rank: usize) -> f64 {
        self.energies[self.order[rank]]
    }
}

/// Up to [`LANES`] states.
#[derive(Clone, Debug)]
pub(super) struct Chunk {
    /// Vectors at the slices, oldest first.
    pub(super) slices: [Columns; MEMORY],
    /// Vectors on their way to the next slice, and their workspace.
    pub(super) next: [Columns; 2],
}

/// A count of levels at an energy.
type Count = (f64, usize);

impl Trail {
    /// States to be followed, from the `ladder` of `chain` at a parameter.
    #[must_use]
    pub fn new(chain: &BlockChain, ladder: &Ladder, at: f64) -> Self {
        let states = ladder.energies.len();
        let chunks = ladder
            .vectors
            .chunks(LANES)
            .map(|vectors| {
                let mut columns = chain.columns();
                // Free lanes repeat the first state: they must only stay finite.
                for lane in 0..LANES {
                    load(&mut columns, lane, vectors.get(lane).unwrap_or(&vectors[0]));
                }
                Chunk {
                    slices: [columns.clone(), columns.clone(), columns],
                    next: [chain.columns(), chain.columns()],
                }
            })
            .collect();
        Self {
            states,
            chunks,
            at: [at; MEMORY],
            energies: std::array::from_fn(|_| ladder.energies.clone()),
            unbroken: vec![1; states],
            order: (0..states).collect(),
            surprise: 0.0,
            draft: Draft::default(),
        }
    }

    /// Number of states carried.
    #[must_use]
    pub fn states(&self) -> usize {
        self.states
    }

    /// Energies of the latest slice, rising.
    pub fn energies(&self) -> impl Iterator<Item = f64> {
        self.order
            .iter()
            .map(|&lane| self.energies[MEMORY - 1][lane])
    }

    /// Σ f u over the nodes for each of the three functions of the latest vectors, state by state in
    /// rising energy.
    ///
    /// # Arguments
    ///
    /// * `weighted` – f, a value a node
    #[must_use]
    pub fn projections(&self, weighted: &[f64]) -> Vec<[f64; 3]> {
        let sums: Vec<[Lanes; 3]> = self
            .chunks
            .iter()
            .map(|chunk| projections(weighted, &chunk.slices[MEMORY - 1]))
            .collect();
        let of_lane = |&lane: &usize| sums[lane / LANES].map(|row| row[lane % LANES]);
        self.order.iter().map(of_lane).collect()
    }

    /// Follows the states to the problem that `chain` holds now. Returns whether all that `hold` asks
    /// for was met; if not, the trail stays where it was.
    ///
    /// # Arguments
    ///
    /// * `at` – the parameter of the problem
    /// * `floor` – no eigenvalue may lie below it
    pub fn step(&mut self, chain: &mut BlockChain, at: f64, hold: Hold, floor: f64) -> bool {
        let mut draft = std::mem::take(&mut self.draft);
        let held = self.drafted(chain, at, hold, floor, &mut draft);
        if held {
            self.accept(chain, at, &draft);
        }
        self.draft = draft;
        held
    }

    /// Brings the workspace to the problem of `chain`; whether all was met.
    fn drafted(
        &mut self,
        chain: &mut BlockChain,
        at: f64,
        hold: Hold,
        floor: f64,
        draft: &mut Draft,
    ) -> bool {
        let required = match hold {
            Hold::Lowest(count) => count.min(self.states),
            Hold::Character => self.states,
        };
        self.forecast(at, &mut draft.forecast);
        draft.energies.clone_from(&draft.forecast);
        draft.order.clone_from(&self.order);
        draft.residuals.clear();
        draft.residuals.resize(self.states, f64::INFINITY);
        draft.below.resize(self.states, 0);
        draft.pending.clear();
        draft.pending.extend(0..self.states);
        draft.sort();
        let watched = match hold {
            Hold::Lowest(_) => watch(&draft.order, &draft.energies, required, self.surprise),
            Hold::Character => None,
        };
        let mut counted = None;
        for _ in 0..ROUNDS {
            draft.shifts.clone_from(&draft.energies);
            if let (Some((lane, shift)), None) = (watched, counted) {
                draft.shifts[lane] = shift;
            }
            self.sweep(chain, draft);
            counted = counted.or(watched.map(|(lane, shift)| (shift, draft.below[lane])));
            draft.sort();
            let held = apart(&draft.order, &draft.energies, required);
            self.separate(chain, draft, held);
            draft.sort();
            let held = apart(&draft.order, &draft.energies, required);
            draft.pending.clear();
            for rank in 0..held {
                let lane = draft.order[rank];
                let allowed = allowed(rank, |rank| draft.energy(rank), self.states);
                let settled = draft.residuals[lane] < allowed;
                if !settled {
                    draft.pending.push(lane);
                }
            }
            draft.pending.sort_unstable();
            if draft.pending.is_empty() || !draft.energy(0).is_finite() {
                break;
            }
        }
        let held = apart(&draft.order, &draft.energies, required);
        let rising = (1..held).all(|rank| draft.energy(rank) > draft.energy(rank - 1));
        let found = draft.pending.is_empty() && rising;
        let certified = match hold {
            Hold::Character => found && chain.count_below(floor) == 0,
            Hold::Lowest(_) => {
                (found && complete(chain, &draft.order, &draft.energies, held, counted))
                    || self.mend(chain, draft, required, floor)
            }
        };
        let highest = draft.order[required - 1];
        self.surprise = (draft.energies[highest] - draft.forecast[highest]).abs();
        certified && draft.energy(0) > floor
    }

    /// Continues the slices to a parameter: the vectors into the workspace, the energies by lane.
    fn forecast(&mut self, at: f64, energies: &mut Vec<f64>) {
        let [x0, x1, x2] = self.at;
        // Of the parabola through three slices, of the line through two, and of the last alone.
        let parabola = [
            (at - x1) * (at - x2) / ((x0 - x1) * (x0 - x2)),
            (at - x0) * (at - x2) / ((x1 - x0) * (x1 - x2)),
            (at - x0) * (at - x1) / ((x2 - x0) * (x2 - x1)),
        ];
        let line = [0.0, (at - x2) / (x1 - x2), (at - x1) / (x2 - x1)];
        let last = [0.0, 0.0, 1.0];
        let shares = |lane: usize| match self.unbroken.get(lane) {
            Some(3..) => parabola,
            Some(2) => line,
            _ => last,
        };
        for (index, chunk) in self.chunks.iter_mut().enumerate() {
            let shares: [[f64; MEMORY]; LANES] =
                std::array::from_fn(|lane| shares(index * LANES + lane));
            let weights: [Lanes; MEMORY] =
                std::array::from_fn(|slice| std::array::from_fn(|lane| shares[lane][slice]));
            combine(&mut chunk.next[0], &chunk.slices, &weights);
        }
        energies.clear();
        energies.extend((0..self.states).map(|lane| -> f64 {
            let shares = shares(lane);
            (0..MEMORY)
                .filter(|&slice| shares[slice] != 0.0)
                .map(|slice| shares[slice] * self.energies[slice][lane])
                .sum()
        }));
    }

    /// One step of inverse iteration for the states that have not settled: energies and residuals move
    /// on, levels below the shifts are counted.
    fn sweep(&mut self, chain: &mut BlockChain, draft: &mut Draft) {
        let Draft {
            energies,
            residuals,
            shifts,
            below,
            pending,
            ..
        } = draft;
        let mut take = |lanes: &[usize], step: &Step| {
            for (place, &lane) in lanes.iter().enumerate() {
                energies[lane] = shifts[lane] + step.rise[place];
                residuals[lane] = step.residual[place];
                below[lane] = step.below[place];
            }
        };
        if pending.len() == self.states {
            for (chunk, lanes) in self.chunks.iter_mut().zip(pending.chunks(LANES)) {
                let [from, to] = &mut chunk.next;
                take(lanes, &chain.step(&spread(lanes, shifts), from, to));
                std::mem::swap(from, to);
            }
            return;
        }
        // Few are left: they are packed together.
        let (mut from, mut to) = (chain.columns(), chain.columns());
        for lanes in pending.chunks(LANES) {
            for place in 0..LANES {
                let lane = lanes[place.min(lanes.len() - 1)];
                let own = &self.chunks[lane / LANES].next[0];
                for (to, from) in from.iter_mut().zip(own) {
                    for row in 0..3 {
                        to[row][place] = from[row][lane % LANES];
                    }
                }
            }
            take(lanes, &chain.step(&spread(lanes, shifts), &from, &mut to));
            for (place, &lane) in lanes.iter().enumerate() {
                let own = &mut self.chunks[lane / LANES].next[0];
                for (to, from) in own.iter_mut().zip(&to) {
                    for row in 0..3 {
                        to[row][lane % LANES] = from[row][place];
                    }
                }
            }
        }
    }

    /// Separates those of the lowest states to be held, and near neighbours of theirs, whose vectors in
    /// the workspace are not pure.
    fn separate(&mut self, chain: &BlockChain, draft: &mut Draft, held: usize) {
        let Draft {
            energies,
            residuals,
            order,
            ..
        } = draft;
        let rising = order.iter().map(|&lane| (energies[lane], residuals[lane]));
        for group in groups(rising.take_while(|level| level.0.is_finite()), held) {
            let lanes = &order[group];
            let vector = |&lane: &usize| unload(&self.chunks[lane / LANES].next[0], lane % LANES);
            let (ladder, rest) = chain.separate(lanes.iter().map(vector).collect());
            let states = ladder.energies.iter().zip(&ladder.vectors).zip(rest);
            for (&lane, ((&energy, vector), residual)) in lanes.iter().zip(states) {
                energies[lane] = energy;
                residuals[lane] = residual;
                load(&mut self.chunks[lane / LANES].next[0], lane % LANES, vector);
            }
        }
    }

    /// Takes the workspace as the latest slice, in the sense of the one before it.
    fn accept(&mut self, chain: &BlockChain, at: f64, draft: &Draft) {
        self.order.clone_from(&draft.order);
        for (index, chunk) in self.chunks.iter_mut().enumerate() {
            let alike = products(&chain.runs, &chunk.next[0], &chunk.slices[MEMORY - 1]);
            let sense = alike.map(|alike| if alike < 0.0 { -1.0 } else { 1.0 });
            if sense.contains(&-1.0) {
                for row in chunk.next[0].iter_mut().flatten() {
                    for lane in 0..LANES {
                        row[lane] *= sense[lane];
                    }
                }
            }
            let lanes = self.unbroken[index * LANES..].iter_mut().take(LANES);
            for (unbroken, alike) in lanes.zip(alike) {
                // Where a state has changed its character there is nothing to continue.
                *unbroken = if alike.abs() < 0.7 {
                    1
                } else {
                    (*unbroken + 1).min(MEMORY)
                };
            }
            chunk.slices.rotate_left(1);
            std::mem::swap(&mut chunk.slices[MEMORY - 1], &mut chunk.next[0]);
        }
        self.at.rotate_left(1);
        self.at[MEMORY - 1] = at;
        self.energies.rotate_left(1);
        self.energies[MEMORY - 1].clone_from(&draft.energies);
    }
}

/// The shifts of some lanes, free places filled with the last of them.
fn spread(lanes: &[usize], shifts: &[f64]) -> Lanes {
    std::array::from_fn(|place| shifts[lanes[place.min(lanes.len() - 1)]])
}

/// Sorts lanes by energy; what is not a number stands last.
pub(super) fn sort(order: &mut [usize], energies: &[f64]) {
    let key = |lane: usize| {
        if energies[lane].is_nan() {
            f64::INFINITY
        } else {
            energies[lane]
        }
    };
    order.sort_unstable_by(|&a, &b| key(a).total_cmp(&key(b)).then(a.cmp(&b)));
}

/// The residual that a state may have: small beside its distance from others. Those too near for that
/// have been separated in their span.
fn allowed(rank: usize, energy: impl Fn(usize) -> f64, states: usize) -> f64 {
    let own = energy(rank);
    let far = |other: &f64| *other >= NEAR;
    let above = (rank + 1..states)
        .map(|other| energy(other) - own)
        .find(far);
    let below = (0..rank).rev().map(|other| own - energy(other)).find(far);
    let distance = above
        .unwrap_or(f64::INFINITY)
        .min(below.unwrap_or(f64::INFINITY));
    LARGEST_RESIDUAL.min(LARGEST_SHARE * distance)
}

/// How many of the lowest states, at least those required, stand apart from the next one: where
/// states required and not required meet, both are held.
fn apart(order: &[usize], energies: &[f64], required: usize) -> usize {
    (required..order.len())
        .find(|&next| energies[order[next]] - energies[order[next - 1]] > 4.0 * LEAST_MARGIN)
        .unwrap_or(order.len())
}

/// The lane of the highest state to be held with a shift above its forecast, but nearer to it than
/// to its neighbours; `None` where there is no room.
fn watch(
    order: &[usize],
    energies: &[f64],
    required: usize,
    surprise: f64,
) -> Option<(usize, f64)> {
    let held = apart(order, energies, required);
    let lane = order[held - 1];
    let room = order
        .get(held)
        .map_or(f64::INFINITY, |&next| energies[next] - energies[lane]);
    let below = held
        .checked_sub(2)
        .map_or(f64::INFINITY, |at| energies[lane] - energies[order[at]]);
    let margin = (2.0 * surprise)
        .max(LEAST_MARGIN)
        .min(0.25 * room.min(below));
    (margin >= LEAST_MARGIN).then(|| (lane, energies[lane] + margin))
}

/// Whether exactly so many states lie below a point just above them.
fn complete(
    chain: &BlockChain,
    order: &[usize],
    energies: &[f64],
    held: usize,
    counted: Option<Count>,
) -> bool {
    let last = energies[order[held - 1]];
    let next = order
        .get(held)
        .map_or(f64::INFINITY, |&lane| energies[lane]);
    let count = counted
        .filter(|&(point, _)| point > last + LARGEST_RESIDUAL && point < next)
        .map_or_else(
            || chain.count_below(last + LEAST_MARGIN),
            |(_, count)| count,
        );
    count == held
}
