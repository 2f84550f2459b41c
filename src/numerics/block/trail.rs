//! States followed from problem to neighbouring problem.

use super::kernel::{Columns, combine, products, projections};
use super::neighbours::groups;
use super::{BlockChain, LANES, Ladder, Lanes, load, unload};

/// Largest residual of an accepted state: the energy is good to its square over the distance of the
/// next level.
const LARGEST_RESIDUAL: f64 = 3e-6;
/// How far above the highest state asked for its shift stands at least.
const LEAST_MARGIN: f64 = 4.0 * LARGEST_RESIDUAL;
/// Steps of inverse iteration that a slice may take.
const ROUNDS: usize = 6;
/// Problems that the next one is extrapolated from.
const MEMORY: usize = 3;

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
    states: usize,
    chunks: Vec<Chunk>,
    /// The parameter at the slices, oldest first.
    at: [f64; MEMORY],
    /// Energies by lane at the slices, oldest first.
    energies: [Vec<f64>; MEMORY],
    /// Up to how many slices back each state is a straight continuation of itself.
    unbroken: Vec<usize>,
    /// Lanes by rising energy.
    order: Vec<usize>,
    /// How far the highest state asked for lay off its forecast.
    surprise: f64,
}

/// Up to [`LANES`] states.
#[derive(Clone, Debug)]
struct Chunk {
    /// Vectors at the slices, oldest first.
    slices: [Columns; MEMORY],
    /// Vectors on their way to the next slice, and their workspace.
    next: [Columns; 2],
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

    /// Latest vectors by rising energy, three values a node.
    #[must_use]
    pub fn vectors(&self) -> Vec<Vec<f64>> {
        let vector =
            |&lane: &usize| unload(&self.chunks[lane / LANES].slices[MEMORY - 1], lane % LANES);
        self.order.iter().map(vector).collect()
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
        let forecast = self.forecast(at);
        let mut energies = forecast.clone();
        let required = match hold {
            Hold::Lowest(count) => count.min(self.states),
            Hold::Character => self.states,
        };
        let mut order = self.order.clone();
        for round in 0..ROUNDS {
            sort(&mut order, &energies);
            let surprise = if round == 0 { self.surprise } else { 0.0 };
            let mut shifts = energies.clone();
            let watch = match hold {
                Hold::Lowest(_) => watch(&order, &energies, required, surprise),
                Hold::Character => None,
            };
            if let Some((lane, shift)) = watch {
                shifts[lane] = shift;
            }
            let (mut residuals, below) = self.sweep(chain, &shifts, &mut energies);
            let counted = watch.map(|(lane, shift)| (shift, below[lane]));
            sort(&mut order, &energies);
            let found = &order[..required];
            if !found.iter().all(|&lane| energies[lane].is_finite()) {
                return false;
            }
            if found
                .iter()
                .any(|&lane| residuals[lane] >= LARGEST_RESIDUAL)
            {
                continue;
            }
            self.separate(chain, &order, &mut energies, &mut residuals);
            sort(&mut order, &energies);
            let found = &order[..required];
            if found
                .iter()
                .any(|&lane| residuals[lane] >= LARGEST_RESIDUAL)
            {
                continue;
            }
            let rising = |pair: &[usize]| energies[pair[1]] > energies[pair[0]];
            let distinct = found.windows(2).all(rising) && energies[found[0]] > floor;
            let complete = match hold {
                Hold::Lowest(_) => complete(chain, &order, &energies, required, counted),
                Hold::Character => chain.count_below(floor) == 0,
            };
            if !(distinct && complete) {
                return false;
            }
            let highest = found[required - 1];
            self.surprise = (energies[highest] - forecast[highest]).abs();
            self.order = order;
            self.accept(chain, at, energies);
            return true;
        }
        false
    }

    /// Continues the slices to a parameter: the vectors into the workspace, the energies by lane.
    fn forecast(&mut self, at: f64) -> Vec<f64> {
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
        (0..self.states)
            .map(|lane| {
                let shares = shares(lane);
                (0..MEMORY)
                    .filter(|&slice| shares[slice] != 0.0)
                    .map(|slice| shares[slice] * self.energies[slice][lane])
                    .sum()
            })
            .collect()
    }

    /// One step of inverse iteration for every state: the energies move on; returns the residuals and
    /// the numbers of levels below the shifts.
    fn sweep(
        &mut self,
        chain: &mut BlockChain,
        shifts: &[f64],
        energies: &mut [f64],
    ) -> (Vec<f64>, Vec<usize>) {
        let mut residuals = Vec::with_capacity(self.states);
        let mut below = Vec::with_capacity(self.states);
        let chunks = self.chunks.iter_mut().zip(shifts.chunks(LANES));
        for ((chunk, shifts), energies) in chunks.zip(energies.chunks_mut(LANES)) {
            let lanes = std::array::from_fn(|lane| shifts[lane.min(shifts.len() - 1)]);
            let [from, to] = &mut chunk.next;
            let step = chain.step(&lanes, from, to);
            std::mem::swap(from, to);
            for (lane, energy) in energies.iter_mut().enumerate() {
                *energy = lanes[lane] + step.step[lane];
                residuals.push(step.residual[lane]);
                below.push(step.below[lane]);
            }
        }
        (residuals, below)
    }

    /// Separates near neighbours among the vectors in the workspace.
    fn separate(
        &mut self,
        chain: &BlockChain,
        order: &[usize],
        energies: &mut [f64],
        residuals: &mut [f64],
    ) {
        let rising = order.iter().map(|&lane| (energies[lane], residuals[lane]));
        for group in groups(rising.take_while(|level| level.0.is_finite())) {
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
    fn accept(&mut self, chain: &BlockChain, at: f64, energies: Vec<f64>) {
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
        self.energies[MEMORY - 1] = energies;
    }
}

/// Sorts lanes by energy; what is not a number stands last.
fn sort(order: &mut [usize], energies: &[f64]) {
    let key = |lane: usize| {
        if energies[lane].is_nan() {
            f64::INFINITY
        } else {
            energies[lane]
        }
    };
    order.sort_by(|&a, &b| key(a).total_cmp(&key(b)));
}

/// The lane of the highest state asked for with a shift above its forecast, but nearer to it than to
/// the next state; `None` where there is no room.
fn watch(
    order: &[usize],
    energies: &[f64],
    required: usize,
    surprise: f64,
) -> Option<(usize, f64)> {
    let lane = order[required - 1];
    let room = order
        .get(required)
        .map_or(f64::INFINITY, |&next| energies[next] - energies[lane]);
    let below = required
        .checked_sub(2)
        .map_or(f64::INFINITY, |at| energies[lane] - energies[order[at]]);
    let margin = (2.0 * surprise)
        .max(LEAST_MARGIN)
        .min(0.25 * room.min(below));
    (margin >= LEAST_MARGIN).then(|| (lane, energies[lane] + margin))
}

/// Whether exactly the states asked for lie below a point just above them.
fn complete(
    chain: &BlockChain,
    order: &[usize],
    energies: &[f64],
    required: usize,
    counted: Option<Count>,
) -> bool {
    let last = energies[order[required - 1]];
    let (point, count) = counted
        .filter(|&(point, _)| point > last + LARGEST_RESIDUAL)
        .unwrap_or_else(|| {
            let point = match order.get(required).map(|&next| energies[next]) {
                Some(next) if next - last > LEAST_MARGIN => 0.5 * (last + next),
                _ => last + LEAST_MARGIN,
            };
            (point, chain.count_below(point))
        });
    point > last + LARGEST_RESIDUAL && count == required
}
