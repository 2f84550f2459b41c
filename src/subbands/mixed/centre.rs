//! States at zero in-plane wave number: which belong to the wells.

use super::form::Grid;
use super::{ZoneCentre, uncertified};
use crate::numerics::block::{BlockChain, LANES, Ladder};
use crate::profile::Profile;
use crate::subbands::single::limit;
use crate::subbands::{Band, CLUSTER_EV, NEAR_EDGE_EV, SingleBands, Uncertified};

/// States carried beyond those that may belong to the wells, at least.
const LEAST_GUARDS: usize = 2;

/// Zone-centre states that belong to the wells, and the ladders to follow from.
pub(super) struct Centre {
    pub(super) states: Vec<ZoneCentre>,
    /// Index of each state in the three ladders.
    pub(super) places: Vec<[usize; 3]>,
    /// Whether states are followed by their character: in a field box states stand between them, and
    /// only the order of all states could be certified by counting.
    pub(super) by_character: bool,
    pub(super) ladders: Vec<Ladder>,
}

impl Centre {
    pub(super) fn new(profile: &Profile<'_>, grids: &[Grid]) -> Result<Self, Uncertified> {
        let in_field = profile.slope_ev_nm != 0.0;
        let heavy_edge = profile
            .outside()
            .map(|n| n.edges.heavy_ev)
            .fold(f64::NEG_INFINITY, f64::max);
        let light_edge = profile
            .outside()
            .map(|n| n.edges.light_ev)
            .fold(f64::NEG_INFINITY, f64::max);
        let mut chains: Vec<BlockChain> = grids
            .iter()
            .map(|grid| {
                let mut chain = grid.chain();
                grid.set(&mut chain, 0.0, 1.0);
                chain
            })
            .collect();
        // Hole energies between which states may belong to the wells.
        let (low, high) = if in_field {
            let bottom = grids[2]
                .cells
                .iter()
                .filter(|cell| profile.sections[cell.section].in_wells)
                .map(|cell| {
                    let edges = &cell.numbers.edges;
                    -(edges.heavy_ev.max(edges.light_ev) + cell.tilt_ev)
                })
                .fold(f64::INFINITY, f64::min);
            let top = limit(profile, Band::Heavy).max(limit(profile, Band::Light));
            (bottom, top)
        } else {
            (grids[2].floor, -heavy_edge.min(light_edge) + 1e-3)
        };
        let wanted = chains[2].count_below(low)..chains[2].count_below(high);
        // States beyond them fill the lanes of the last sweep, to take over where characters are
        // exchanged.
        let carried = (wanted.end + LEAST_GUARDS).next_multiple_of(LANES);
        let ladders: Vec<Ladder> = chains
            .iter_mut()
            .zip(grids)
            .map(|(chain, grid)| {
                if in_field {
                    // A coarser grid may put the first of them a little lower.
                    chain.levels(wanted.clone(), low - 0.05)
                } else {
                    chain.lowest(carried, grid.floor)
                }
                .map_err(|error| uncertified(error, 0.0))
            })
            .collect::<Result<_, _>>()?;
        let places = if in_field {
            same_by_likeness(grids, &ladders)
        } else {
            same_by_family(grids, &ladders)
        };
        let mut found: Vec<(ZoneCentre, [usize; 3])> = Vec::new();
        for place in places {
            let [coarse, middle, fine] = [0, 1, 2].map(|grid| ladders[grid].energies[place[grid]]);
            let first = middle + (middle - coarse) / 3.0;
            let second = fine + (fine - middle) / 3.0;
            let energy_ev = -(second + (second - first) / 15.0);
            let shares = grids[2].shares(&ladders[2].vectors[place[2]]);
            let edge = if shares.heavy > 0.5 {
                heavy_edge
            } else {
                light_edge
            };
            if (in_field && shares.in_wells > 0.5 && shares.split_off < 0.5)
                || (!in_field && energy_ev > edge)
            {
                let error_ev = (second - first).abs() / 15.0 + 1e-9;
                let near_edge = !in_field && energy_ev - edge < NEAR_EDGE_EV;
                found.push((
                    ZoneCentre {
                        energy_ev,
                        error_ev,
                        near_edge,
                        ..shares
                    },
                    place,
                ));
            }
        }
        found.sort_by(|a, b| b.0.energy_ev.total_cmp(&a.0.energy_ev));
        let (states, places) = found.into_iter().unzip();
        Ok(Self {
            states,
            places,
            by_character: in_field,
            ladders,
        })
    }

    /// |<e|v>|² of all components, extrapolated from two grids where no neighbour is near.
    pub(super) fn overlaps(&self, grids: &[Grid], single: &SingleBands) -> Vec<Vec<f64>> {
        let crowded = |energies: &[f64], index: usize| {
            let near = |other: f64| (other - energies[index]).abs() < CLUSTER_EV;
            (index > 0 && near(energies[index - 1]))
                || energies.get(index + 1).is_some_and(|&other| near(other))
        };
        single
            .electron
            .iter()
            .map(|level| {
                self.places
                    .iter()
                    .map(|&place| {
                        let fine = grids[2]
                            .projection(&level.envelope, &self.ladders[2].vectors[place[2]])
                            .overlap();
                        let coarse = grids[1]
                            .projection(&level.coarser, &self.ladders[1].vectors[place[1]])
                            .overlap();
                        let single_choice = level.is_alone()
                            && !crowded(&self.ladders[2].energies, place[2])
                            && fine > 1e-6;
                        let overlap = if single_choice {
                            fine + (fine - coarse) / 3.0
                        } else {
                            fine
                        };
                        overlap.clamp(0.0, 1.0)
                    })
                    .collect()
            })
            .collect()
    }
}

/// Places of one state in the ladders of the three grids, state by state. At k = 0 the heavy hole
/// stands alone: heavy states and the others cross freely from grid to grid, so that each family is
/// numbered by itself.
fn same_by_family(grids: &[Grid], ladders: &[Ladder]) -> Vec<[usize; 3]> {
    let families: Vec<[Vec<usize>; 2]> = ladders
        .iter()
        .zip(grids)
        .map(|(ladder, grid)| {
            let (heavy, other) = (0..ladder.energies.len())
                .partition(|&index| grid.shares(&ladder.vectors[index]).heavy > 0.5);
            [heavy, other]
        })
        .collect();
    (0..2)
        .flat_map(|family| {
            let members = families
                .iter()
                .map(|grid| grid[family].len())
                .min()
                .unwrap_or(0);
            let families = &families;
            (0..members)
                .map(move |member| [0, 1, 2].map(|grid: usize| families[grid][family][member]))
        })
        .collect()
}

/// The same where states are picked from the middle of the order: by the likeness of their vectors.
fn same_by_likeness(grids: &[Grid], ladders: &[Ladder]) -> Vec<[usize; 3]> {
    // Every second node of a grid is one of the grid before it.
    let likest = |grid: usize, fine: &[f64], stride: usize| {
        let likeness = |vector: &[f64]| -> f64 {
            vector
                .chunks_exact(3)
                .zip(fine.chunks_exact(3).skip(stride - 1).step_by(stride))
                .zip(&grids[grid].nodes.weights_nm)
                .map(|((a, b), weight)| weight * (a[0] * b[0] + a[1] * b[1] + a[2] * b[2]))
                .sum::<f64>()
                .abs()
        };
        let ladder = &ladders[grid];
        (0..ladder.vectors.len())
            .max_by(|&a, &b| likeness(&ladder.vectors[a]).total_cmp(&likeness(&ladder.vectors[b])))
            .unwrap_or(0)
    };
    (0..ladders[2].energies.len())
        .filter(|&index| grids[2].shares(&ladders[2].vectors[index]).in_wells > 0.5)
        .map(|index| {
            let fine = &ladders[2].vectors[index];
            [likest(0, fine, 4), likest(1, fine, 2), index]
        })
        .collect()
}
