//! Levels from nothing: isolated by inertia, certified by it.

use std::ops::Range;

use super::{BlockChain, CLUSTER, LANES, Ladder, Lanes, Uncertified, load, unload};
use crate::numerics::clusters::clusters;
use crate::numerics::general::general_vectors;

/// Levels closer than this have no vectors of their own.
const INSEPARABLE: f64 = 20.0 * CLUSTER;

impl BlockChain {
    /// The `count` lowest eigenvalues from nothing: isolated by inertia, certified by it.
    ///
    /// # Arguments
    ///
    /// * `floor` – an energy below which no eigenvalue may lie
    ///
    /// # Errors
    ///
    /// [`Uncertified`] if an eigenvalue lies below the floor, or a level can't be told apart.
    pub fn lowest(&mut self, count: usize, floor: f64) -> Result<Ladder, Uncertified> {
        let count = count.min(3 * self.nodes);
        if count == 0 {
            return Ok(Ladder::default());
        }
        if self.count_below(floor) != 0 {
            return Err(Uncertified {
                level: 1,
                energy: floor,
            });
        }
        self.levels(0..count, floor)
    }

    /// The eigenvalues with the numbers `range`, counted from 0, found from nothing, and those that stand
    /// too close to the last of them to be told apart.
    ///
    /// # Arguments
    ///
    /// * `low` – an energy below the first of them
    ///
    /// # Errors
    ///
    /// [`Uncertified`] if a level can't be told apart.
    pub fn levels(&mut self, range: Range<usize>, low: f64) -> Result<Ladder, Uncertified> {
        let range = range.start..range.end.min(3 * self.nodes);
        if range.is_empty() {
            return Ok(Ladder::default());
        }
        let mut brackets = self.isolate(range.clone(), low);
        // What shares the bracket of the last level can't be left out.
        let last = brackets[brackets.len() - 1];
        let below = self.count_below(last.1);
        brackets.extend((range.end..below).map(|_| last));
        let shared = |index: usize| {
            (index > 0 && brackets[index - 1] == brackets[index])
                || brackets.get(index + 1) == Some(&brackets[index])
        };
        let alone: Vec<usize> = (0..brackets.len())
            .filter(|&index| !shared(index))
            .collect();
        let mut found: Vec<Option<(f64, Vec<f64>)>> = vec![None; brackets.len()];
        for chunk in alone.chunks(LANES) {
            let own: Vec<(usize, (f64, f64))> = chunk
                .iter()
                .map(|&index| (range.start + index, brackets[index]))
                .collect();
            for (&index, state) in chunk.iter().zip(self.singles(&own)) {
                found[index] = Some(state);
            }
        }
        let near: Vec<f64> = brackets
            .iter()
            .zip(&found)
            .map(|(bracket, state)| {
                let middle = 0.5 * (bracket.0 + bracket.1);
                state.as_ref().map_or(middle, |&(energy, _)| energy)
            })
            .collect();
        let mut ladder = Ladder::default();
        for cluster in clusters(&near, INSEPARABLE) {
            match found[cluster.start].take() {
                Some((energy, vector)) if cluster.len() == 1 => {
                    ladder.energies.push(energy);
                    ladder.vectors.push(vector);
                }
                _ => {
                    let span = self.span(&near[cluster]);
                    ladder.energies.extend(span.energies);
                    ladder.vectors.extend(span.vectors);
                }
            }
        }
        self.certify(&ladder, range.start, last.1)?;
        Ok(ladder)
    }

    /// Counts between the levels (and around clusters) must agree with their numbers, up to the `top` of
    /// the last bracket.
    fn certify(&self, ladder: &Ladder, first: usize, top: f64) -> Result<(), Uncertified> {
        let energies = &ladder.energies;
        let mut points = Vec::with_capacity(energies.len() + 1);
        for (index, &energy) in energies.iter().enumerate() {
            match energies.get(index + 1) {
                Some(above) if above - energy < CLUSTER => {}
                Some(above) => points.push((0.5 * (energy + above), first + index + 1)),
                None => points.push((top.max(energy), first + index + 1)),
            }
        }
        points.push((energies[0] - CLUSTER, first));
        for chunk in points.chunks(LANES) {
            let lanes: Lanes = std::array::from_fn(|lane| chunk[lane.min(chunk.len() - 1)].0);
            let counts = self.counts_below(&lanes);
            for (&(energy, wanted), got) in chunk.iter().zip(counts) {
                if got != wanted {
                    return Err(Uncertified {
                        level: wanted.max(1),
                        energy,
                    });
                }
            }
        }
        Ok(())
    }

    /// Brackets of the eigenvalues numbered `range`: each holds one, or is narrow and shared.
    fn isolate(&self, range: Range<usize>, low: f64) -> Vec<(f64, f64)> {
        let mut reach = 0.25;
        while self.count_below(low + reach) < range.end {
            reach *= 2.0;
        }
        let (bottom, top) = (self.count_below(low), self.count_below(low + reach));
        let mut known = vec![(low, bottom), (low + reach, top)];
        loop {
            let mut wanted = Vec::new();
            for pair in known.windows(2) {
                let ((low, below), (high, above)) = (pair[0], pair[1]);
                // One level needs a bracket narrow enough for inverse iteration to stay in it.
                let wide = above > below + 1 && high - low > 0.5 * CLUSTER;
                let loose = above == below + 1 && high - low > 2e-3;
                if below < range.end && above > range.start && (wide || loose) {
                    let parts = (above - below + 1).clamp(2, LANES);
                    wanted.extend(
                        (1..parts).map(|part| low + (high - low) * part as f64 / parts as f64),
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
        range
            .map(|level| {
                let above = known.partition_point(|&(_, below)| below <= level);
                (known[above - 1].0, known[above].0)
            })
            .collect()
    }

    /// The one state in each of up to [`LANES`] brackets, given with its number: inverse iteration,
    /// the bracket halved by counts until the iteration stays inside it.
    fn singles(&mut self, wanted: &[(usize, (f64, f64))]) -> Vec<(f64, Vec<f64>)> {
        /// Counts put a level on one side of a shift; rounding may leave it on the shift.
        const SLACK: f64 = 1e-12;
        let own = wanted.len();
        let mut brackets: Vec<(f64, f64)> = wanted.iter().map(|&(_, bracket)| bracket).collect();
        let mut energies: Vec<f64> = brackets.iter().map(|b| 0.5 * (b.0 + b.1)).collect();
        let start = self.start_vectors(1).remove(0);
        let (mut from, mut to) = (self.columns(), self.columns());
        for lane in 0..LANES {
            load(&mut from, lane, &start);
        }
        let mut best: Vec<Option<(f64, Vec<f64>)>> = vec![None; own];
        for round in 0..200 {
            // Two steps at a fixed shift turn the general start vector towards the level.
            let settled = round % 3 == 2;
            let shifts: Lanes = std::array::from_fn(|lane| {
                let lane = lane.min(own - 1);
                let (low, high) = brackets[lane];
                let inside = energies[lane] > low && energies[lane] < high;
                if settled && inside {
                    energies[lane]
                } else {
                    0.5 * (low + high)
                }
            });
            let step = self.step(&shifts, &from, &mut to);
            std::mem::swap(&mut from, &mut to);
            for lane in 0..own {
                let (low, high) = &mut brackets[lane];
                if step.below[lane] > wanted[lane].0 {
                    *high = high.min(shifts[lane]);
                } else {
                    *low = low.max(shifts[lane]);
                }
                energies[lane] = shifts[lane] + step.rise[lane];
                let inside = energies[lane] > *low - SLACK && energies[lane] < *high + SLACK;
                if best[lane].is_none() && step.residual[lane] < 1e-9 && inside {
                    best[lane] = Some((energies[lane], unload(&from, lane)));
                }
            }
            if best.iter().all(Option::is_some) {
                break;
            }
        }
        // What has not settled is left to the certificate, which refuses it.
        best.into_iter()
            .enumerate()
            .map(|(lane, best)| best.unwrap_or_else(|| (energies[lane], unload(&from, lane))))
            .collect()
    }

    /// General vectors to start inverse iteration from.
    fn start_vectors(&self, count: usize) -> Vec<Vec<f64>> {
        let mut vectors = general_vectors(count, 3 * self.nodes);
        self.orthonormalise(&mut vectors);
        vectors
    }

    /// The states near some energies too close for counting: inverse iteration on a span a little
    /// larger, and separation inside it, until they have settled. What has not is left to the
    /// certificate.
    fn span(&mut self, near: &[f64]) -> Ladder {
        /// Vectors beyond those wanted: the states next to them must not mix in.
        const GUARDS: usize = 4;
        const LARGEST_RESIDUAL: f64 = 1e-9;
        let (low, high) = (near[0], near[near.len() - 1]);
        let count = near.len();
        let mut basis = self.start_vectors((count + GUARDS).min(3 * self.nodes));
        // A shift a little off the cluster keeps pivots away from zero.
        let shifts = [low - 3.0 * CLUSTER; LANES];
        let (mut from, mut to) = (self.columns(), self.columns());
        let mut nearest = Ladder::default();
        for _ in 0..12 {
            for chunk in basis.chunks_mut(LANES) {
                for (lane, vector) in chunk.iter().enumerate() {
                    load(&mut from, lane, vector);
                }
                self.step(&shifts, &from, &mut to);
                for (lane, vector) in chunk.iter_mut().enumerate() {
                    *vector = unload(&to, lane);
                }
            }
            let (ladder, residuals) = self.separate(basis);
            let distance = |energy: f64| (low - energy).max(energy - high);
            let mut order: Vec<usize> = (0..ladder.energies.len()).collect();
            order.sort_by(|&a, &b| {
                distance(ladder.energies[a]).total_cmp(&distance(ladder.energies[b]))
            });
            order.truncate(count);
            order.sort_unstable();
            nearest = Ladder {
                energies: order.iter().map(|&at| ladder.energies[at]).collect(),
                vectors: order.iter().map(|&at| ladder.vectors[at].clone()).collect(),
            };
            if order.iter().all(|&at| residuals[at] < LARGEST_RESIDUAL) {
                break;
            }
            basis = ladder.vectors;
        }
        nearest
    }
}
