//! Levels that were missed while states were followed.

use std::ops::Range;

use super::trail::{Draft, LARGEST_RESIDUAL, LEAST_MARGIN, MEMORY, Trail, sort};
use super::{BlockChain, LANES, Ladder, load, unload};

impl Trail {
    /// Finds by counts where levels were missed between the settled ones, searches them from nothing,
    /// and gives them the lanes of states that met others. Returns whether the lowest levels, at least
    /// those required, are then complete.
    pub(super) fn mend(
        &mut self,
        chain: &mut BlockChain,
        draft: &mut Draft,
        required: usize,
        floor: f64,
    ) -> bool {
        let Draft {
            energies,
            residuals,
            order,
            ..
        } = draft;
        let kept = self.different(chain, order, energies, residuals);
        let segments = segments(kept.iter().map(|&lane| energies[lane]), floor);
        let mut counts = Vec::with_capacity(segments.len());
        for part in segments.chunks(LANES) {
            let points = std::array::from_fn(|place| part[place.min(part.len() - 1)].point);
            counts.extend_from_slice(&chain.counts_below(&points)[..part.len()]);
        }
        let (mut lanes, mut fresh) = (Vec::new(), Ladder::default());
        let (mut low, mut below) = (floor, chain.count_below(floor));
        if below != 0 {
            return false;
        }
        for (segment, count) in segments.iter().zip(counts) {
            let own = &kept[segment.levels.clone()];
            if count < below + own.len() {
                return false;
            }
            if count == below + own.len() {
                lanes.extend_from_slice(own);
            } else {
                let upper = count.min(self.states);
                let Some(found) = exactly(chain, below..upper, low) else {
                    return false;
                };
                fresh.energies.extend(found.energies);
                fresh.vectors.extend(found.vectors);
            }
            (low, below) = (segment.point, count.min(self.states));
            if below >= required {
                break;
            }
        }
        if below < required {
            let Some(found) = exactly(chain, below..required, low) else {
                return false;
            };
            fresh.energies.extend(found.energies);
            fresh.vectors.extend(found.vectors);
            below = required;
        }
        let free: Vec<usize> = (0..self.states)
            .filter(|lane| !lanes.contains(lane))
            .collect();
        for (&lane, (energy, vector)) in free.iter().zip(fresh.energies.iter().zip(&fresh.vectors))
        {
            load(&mut self.chunks[lane / LANES].next[0], lane % LANES, vector);
            energies[lane] = *energy;
        }
        // What is left only stands by, above all that is known, as it was before.
        let known = fresh.energies.iter().copied();
        let highest = known
            .chain(lanes.iter().map(|&lane| energies[lane]))
            .fold(floor, f64::max);
        let mut next = highest;
        for &lane in &free[fresh.energies.len()..] {
            let beyond = is_settled(residuals[lane]) && energies[lane] > highest;
            if !beyond {
                next += 8.0 * LEAST_MARGIN;
                energies[lane] = next;
                self.unbroken[lane] = 0;
                let chunk = &mut self.chunks[lane / LANES];
                let lane = lane % LANES;
                for (to, from) in chunk.next[0].iter_mut().zip(&chunk.slices[MEMORY - 1]) {
                    for row in 0..3 {
                        to[row][lane] = from[row][lane];
                    }
                }
            }
        }
        sort(order, energies);
        let distinct = |pair: &[usize]| energies[pair[1]] > energies[pair[0]];
        order[..below].windows(2).all(distinct)
    }

    /// Lanes by rising energy that have settled, each on a state of its own.
    fn different(
        &self,
        chain: &BlockChain,
        order: &[usize],
        energies: &[f64],
        residuals: &[f64],
    ) -> Vec<usize> {
        let vector = |lane: usize| unload(&self.chunks[lane / LANES].next[0], lane % LANES);
        let mut kept: Vec<usize> = Vec::with_capacity(self.states);
        for &lane in order {
            if !(energies[lane].is_finite() && is_settled(residuals[lane])) {
                continue;
            }
            let near = |&&other: &&usize| energies[lane] - energies[other] < 2.0 * LARGEST_RESIDUAL;
            let same = |&other: &usize| chain.product(&vector(lane), &vector(other)).abs() > 0.5;
            if !kept.iter().rev().take_while(near).any(same) {
                kept.push(lane);
            }
        }
        kept
    }
}

fn is_settled(residual: f64) -> bool {
    residual < LARGEST_RESIDUAL
}

/// Levels that a count can't tell apart, and a point above them.
struct Segment {
    levels: Range<usize>,
    point: f64,
}

/// Cuts rising levels wherever there is room for a count between them.
fn segments(energies: impl Iterator<Item = f64>, floor: f64) -> Vec<Segment> {
    let energies: Vec<f64> = energies.collect();
    let mut segments = Vec::new();
    let (mut start, mut low) = (0, floor);
    for end in 1..=energies.len() {
        let last = energies[end - 1];
        let room = energies.get(end).map_or(f64::INFINITY, |next| next - last);
        if room > 4.0 * LARGEST_RESIDUAL {
            let point = last + (0.5 * room).min(LEAST_MARGIN);
            if last > low {
                segments.push(Segment {
                    levels: start..end,
                    point,
                });
                (start, low) = (end, point);
            }
        }
    }
    segments
}

/// The levels of a range from nothing, and no other; `None` where they can't be certified.
fn exactly(chain: &mut BlockChain, range: Range<usize>, low: f64) -> Option<Ladder> {
    let mut ladder = chain.levels(range.clone(), low).ok()?;
    ladder.energies.truncate(range.len());
    ladder.vectors.truncate(range.len());
    Some(ladder)
}
