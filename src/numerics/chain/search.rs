//! The lowest levels: from guesses, or isolated by counting; certified.

use super::shooting::Workspace;
use super::{CLUSTER, CONVERGED, Chain, LANES, Lanes, State, Uncertified};

/// Distance of a point above the last level at which levels are counted.
const CEILING: f64 = 1e-5;
/// Most rounds of Rayleigh-quotient iteration.
const MOST_ROUNDS: usize = 12;
/// Largest share of a neighbour in a vector.
const LARGEST_SHARE: f64 = 1e-5;
/// Levels without a known neighbour are taken to be this far from the next.
const USUAL_DISTANCE: f64 = 1e-2;

impl Chain {
    /// The `count` lowest eigenvalues with their vectors, rising.
    ///
    /// # Arguments
    ///
    /// * `count` – how many; at most the number of inner nodes
    /// * `guesses` – energies to start from (of a coarser chain, say), rising, one for each level
    ///   looked for; without them the levels are isolated by counting
    ///
    /// # Errors
    ///
    /// [`Uncertified`] if a level cannot be told from its neighbours by counting.
    pub fn lowest(&self, count: usize, guesses: Option<&[f64]>) -> Result<Vec<State>, Uncertified> {
        self.lowest_with(&mut Workspace::default(), count, guesses)
    }

    /// The same in room that is kept from one chain to the next.
    ///
    /// # Errors
    ///
    /// [`Uncertified`] if a level cannot be told from its neighbours by counting.
    pub fn lowest_with(
        &self,
        work: &mut Workspace,
        count: usize,
        guesses: Option<&[f64]>,
    ) -> Result<Vec<State>, Uncertified> {
        let count = count.min(self.nodes);
        if count == 0 {
            return Ok(Vec::new());
        }
        work.prepare(self);
        if let Some(guesses) = guesses.filter(|guesses| guesses.len() >= count) {
            let mut refined = self.rayleigh(work, &guesses[..count], Wanted::States);
            let told_apart = refined.tells_all();
            self.orthogonal_clusters(&mut refined.states);
            if told_apart || self.certifies(&refined.states) {
                return Ok(refined.states);
            }
        }
        let brackets = self.isolate(count);
        self.from_brackets(work, &brackets)
    }

    /// The energies alone of as many of the lowest eigenvalues as there are `guesses`, certified like
    /// [`Chain::lowest`]: what a coarse chain is asked for to start a finer one.
    ///
    /// # Errors
    ///
    /// [`Uncertified`] if a level cannot be told from its neighbours by counting.
    pub fn energies(&self, work: &mut Workspace, guesses: &[f64]) -> Result<Vec<f64>, Uncertified> {
        let count = guesses.len().min(self.nodes);
        work.prepare(self);
        let refined = self.rayleigh(work, &guesses[..count], Wanted::Energies);
        let states = if refined.tells_all() {
            refined.states
        } else {
            self.lowest_with(work, count, Some(guesses))?
        };
        Ok(states.iter().map(|state| state.energy).collect())
    }

    /// Brackets (low, high) of the `count` lowest eigenvalues: isolated, or narrower than
    /// [`CLUSTER`]/8 where several share one.
    fn isolate(&self, count: usize) -> Vec<(f64, f64)> {
        let floor = self.floor();
        let mut reach = 0.25;
        while self.count_below(floor + reach) < count {
            reach *= 2.0;
        }
        // (energy, count below it), rising: every sweep adds points.
        let mut known = vec![(floor, 0), (floor + reach, self.count_below(floor + reach))];
        loop {
            let mut wanted: Vec<f64> = Vec::new();
            for pair in known.windows(2) {
                let ((low, below), (high, above)) = (pair[0], pair[1]);
                if above > below + 1 && below < count && high - low > CLUSTER / 8.0 {
                    let parts = (above - below + 1).min(LANES);
                    wanted.extend(
                        (1..parts.max(2))
                            .map(|part| low + (high - low) * part as f64 / parts.max(2) as f64),
                    );
                }
            }
            if wanted.is_empty() {
                break;
            }
            for energies in wanted.chunks(LANES) {
                let lanes: Lanes =
                    std::array::from_fn(|lane| energies[lane.min(energies.len() - 1)]);
                let counts = self.counts_below(&lanes);
                known.extend(energies.iter().copied().zip(counts));
            }
            known.sort_by(|a, b| a.0.total_cmp(&b.0));
            known.dedup_by(|a, b| a.0 == b.0);
        }
        (0..count)
            .map(|level| {
                let above = known.partition_point(|&(_, below)| below <= level);
                (known[above - 1].0, known[above].0)
            })
            .collect()
    }

    /// States from brackets: Rayleigh quotients where a bracket holds one level, a common span where
    /// it holds several.
    fn from_brackets(
        &self,
        work: &mut Workspace,
        brackets: &[(f64, f64)],
    ) -> Result<Vec<State>, Uncertified> {
        let shared = |level: usize| {
            let own = brackets[level];
            (level > 0 && brackets[level - 1] == own) || brackets.get(level + 1) == Some(&own)
        };
        let alone: Vec<usize> = (0..brackets.len())
            .filter(|&level| !shared(level))
            .collect();
        let mut found: Vec<Option<State>> = vec![None; brackets.len()];
        for levels in alone.chunks(LANES) {
            for (&level, state) in levels.iter().zip(self.singles(work, brackets, levels)) {
                found[level] = Some(state);
            }
        }
        let mut states: Vec<State> = Vec::with_capacity(brackets.len());
        for (level, state) in found.into_iter().enumerate() {
            let bracket = brackets[level];
            if let Some(state) = state {
                states.push(state);
            } else if states.len() <= level {
                let count = brackets.iter().filter(|&&other| other == bracket).count();
                states.extend(self.common_span(0.5 * (bracket.0 + bracket.1), count));
            }
        }
        self.orthogonal_clusters(&mut states);
        if self.certifies(&states) {
            return Ok(states);
        }
        // Counts tell where: the first level at which they disagree.
        let wrong = (0..states.len())
            .find(|&index| {
                if !states[index].energy.is_finite() {
                    return true;
                }
                let between = states.get(index + 1).map_or_else(
                    || states[index].energy + CLUSTER,
                    |above| 0.5 * (states[index].energy + above.energy),
                );
                self.count_below(between) != index + 1
            })
            .unwrap_or(0);
        Err(Uncertified {
            level: wrong + 1,
            energy: states[wrong].energy,
        })
    }

    /// The states of up to [`LANES`] levels, each alone in its bracket: Rayleigh-quotient steps as
    /// long as they stay in it, halves where they leave, the bracket narrowed by every count.
    fn singles(
        &self,
        work: &mut Workspace,
        brackets: &[(f64, f64)],
        levels: &[usize],
    ) -> Vec<State> {
        /// Rounding may leave a level on the end of its bracket.
        const SLACK: f64 = 1e-12;
        const ROUNDS: usize = 100;
        let mut own: Vec<(f64, f64)> = levels.iter().map(|&level| brackets[level]).collect();
        let mut energies: Vec<f64> = own.iter().map(|(low, high)| 0.5 * (low + high)).collect();
        for round in 1..=ROUNDS {
            let shifts: Lanes = std::array::from_fn(|lane| energies[lane.min(own.len() - 1)]);
            let sweep = work.sweep(self, &shifts);
            let mut outside = [false; LANES];
            for (lane, (low, high)) in own.iter_mut().enumerate() {
                if sweep.counts[lane] > levels[lane] {
                    *high = high.min(shifts[lane]);
                } else {
                    *low = low.max(shifts[lane]);
                }
                let next = shifts[lane] + sweep.steps[lane];
                let stays = next > *low - SLACK && next < *high + SLACK;
                energies[lane] = if stays { next } else { 0.5 * (*low + *high) };
                outside[lane] = !stays;
            }
            let good = Wanted::States.are_met(&energies, &sweep.steps);
            if good
                .iter()
                .zip(outside)
                .all(|(&good, outside)| good && !outside)
            {
                break;
            }
            if round == ROUNDS {
                for lane in (0..own.len()).filter(|&lane| outside[lane] || !good[lane]) {
                    energies[lane] = f64::NAN;
                }
            }
        }
        let envelopes = work.envelopes(self, own.len());
        energies
            .into_iter()
            .zip(envelopes)
            .map(|(energy, envelope)| State { energy, envelope })
            .collect()
    }

    /// Whether counts certify that `states` are the lowest levels, each found once.
    fn certifies(&self, states: &[State]) -> bool {
        // (energy, levels below it): between levels, and just above the last.
        let mut points: Vec<(f64, usize)> = Vec::with_capacity(states.len() + 1);
        let mut continues = false;
        for (index, state) in states.iter().enumerate() {
            if !state.energy.is_finite() {
                return false;
            }
            // One level found twice looks like a cluster: the whole of one must lie where its
            // members do, which counts half-way to its neighbours do not tell.
            let goes_on = states
                .get(index + 1)
                .is_some_and(|above| above.energy - state.energy < CLUSTER);
            if goes_on && !continues {
                points.push((state.energy - 0.25 * CLUSTER, index));
            } else if continues && !goes_on {
                points.push((state.energy + 0.25 * CLUSTER, index + 1));
            }
            continues = goes_on;
            match states.get(index + 1) {
                Some(above) if above.energy < state.energy => return false,
                // Inside a cluster only the whole is certified; its vectors are orthogonal.
                Some(above) if above.energy - state.energy < CLUSTER => {
                    if self.product(&state.envelope, &above.envelope).abs() > 1e-6 {
                        return false;
                    }
                }
                Some(above) => points.push((0.5 * (state.energy + above.energy), index + 1)),
                None => points.push((state.energy + 0.25 * CLUSTER, index + 1)),
            }
        }
        if let Some(first) = states.first() {
            points.push((first.energy - 0.25 * CLUSTER, 0));
        }
        points.chunks(LANES).all(|chunk| {
            let lanes: Lanes = std::array::from_fn(|lane| chunk[lane.min(chunk.len() - 1)].0);
            let counts = self.counts_below(&lanes);
            chunk
                .iter()
                .zip(counts)
                .all(|(&(_, wanted), got)| wanted == got)
        })
    }

    /// Rayleigh-quotient iteration from each guess, [`LANES`] at a time; the envelopes are left empty
    /// where only energies are wanted. The energy of one that did not converge is no number.
    fn rayleigh(&self, work: &mut Workspace, guesses: &[f64], wanted: Wanted) -> Refined {
        let mut refined = Refined {
            states: Vec::with_capacity(guesses.len()),
            brackets: Vec::with_capacity(guesses.len()),
            ceiling: None,
        };
        for chunk in guesses.chunks(LANES) {
            let own = chunk.len();
            let mut energies: Lanes = std::array::from_fn(|lane| chunk[lane.min(own - 1)]);
            let mut rounds = 0;
            let (shifts, sweep) = loop {
                let mut shifts = energies;
                // Free lanes count the levels below a point just above the last.
                shifts[own..].fill(energies[own - 1] + CEILING);
                let sweep = work.sweep(self, &shifts);
                for lane in 0..own {
                    energies[lane] += sweep.steps[lane];
                }
                rounds += 1;
                let good = wanted.are_met(&energies[..own], &sweep.steps);
                if good.iter().all(|&good| good) {
                    break (shifts, sweep);
                }
                if rounds == MOST_ROUNDS {
                    // One that still moves is no level: its energy says so, and none certifies it.
                    for (energy, _) in energies.iter_mut().zip(good).filter(|(_, good)| !good) {
                        *energy = f64::NAN;
                    }
                    break (shifts, sweep);
                }
            };
            let mut envelopes = match wanted {
                Wanted::Energies => vec![Vec::new(); own],
                Wanted::States => work.envelopes(self, own),
            };
            for (lane, envelope) in envelopes.drain(..).enumerate() {
                refined.states.push(State {
                    energy: energies[lane],
                    envelope,
                });
                let (shift, reach) = (shifts[lane], sweep.reach[lane]);
                refined.brackets.push((shift - reach, shift + reach));
            }
            refined.ceiling = (own < LANES).then(|| (shifts[own], sweep.counts[own]));
        }
        refined
    }
}

/// What an iteration is for.
#[derive(Clone, Copy, Debug)]
enum Wanted {
    Energies,
    States,
}

impl Wanted {
    /// Which Rayleigh-quotient steps were so small that the energy after them (and the vector before
    /// them) is good. A step over the distance of the next level is about the share of that level in
    /// the vector; the energy is wrong by the square of this share times the distance.
    fn are_met(self, energies: &[f64], steps: &Lanes) -> [bool; LANES] {
        std::array::from_fn(|lane| {
            let Some(energy) = energies.get(lane) else {
                return true;
            };
            let distance =
                |other: Option<&f64>| other.map_or(USUAL_DISTANCE, |other| (other - energy).abs());
            let below = distance(lane.checked_sub(1).and_then(|below| energies.get(below)));
            let nearest = below.min(distance(energies.get(lane + 1)));
            let most = match self {
                Self::States => LARGEST_SHARE * nearest,
                Self::Energies => (CONVERGED * nearest).sqrt().min(0.1 * nearest),
            };
            steps[lane].abs() < CONVERGED.max(most)
        })
    }
}

/// What Rayleigh-quotient iteration leaves.
struct Refined {
    states: Vec<State>,
    /// An eigenvalue lies in each of these.
    brackets: Vec<(f64, f64)>,
    /// A point above the last of them and the number of eigenvalues below it.
    ceiling: Option<(f64, usize)>,
}

impl Refined {
    /// Whether the states are the lowest, each found once: brackets that do not touch hold one level
    /// each, and no more levels than these lie below a point above them.
    fn tells_all(&self) -> bool {
        let found = self.states.iter().all(|state| state.energy.is_finite());
        let apart = self
            .brackets
            .windows(2)
            .all(|pair| pair[0].1 + CLUSTER < pair[1].0);
        let last = self.brackets.last().map_or(f64::NAN, |bracket| bracket.1);
        found
            && apart
            && self
                .ceiling
                .is_some_and(|(point, count)| last < point && count == self.states.len())
    }
}
