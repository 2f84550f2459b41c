//! States along the in-plane wave number.

use std::ops::Range;

use super::centre::Centre;
use super::form::Grid;
use super::{Dipole, Projection, Slice, uncertified};
use crate::numerics::block::{BlockChain, Hold, Ladder, Trail};
use crate::numerics::clusters::clusters;
use crate::subbands::{CLUSTER_EV, Uncertified};

/// Steps of the in-plane wave number, 1/nm, and up to where each is taken: small enough to follow
/// states from one to the next, and to interpolate between.
const WAVE_NUMBER_STEPS_PER_NM: [(f64, f64); 3] = [
    (0.0125, 0.5),
    (0.025, 1.2),
    (0.05, LARGEST_WAVE_NUMBER_PER_NM),
];
/// Where the in-plane wave numbers end, 1/nm.
pub const LARGEST_WAVE_NUMBER_PER_NM: f64 = 2.0;

/// Valence states closer than this are all but equal, eV: far below any line width.
const EQUAL_EV: f64 = 2e-5;

/// States whose matrix elements, summed over the electron levels, differ by less belong to one family.
const ONE_FAMILY: f64 = 0.2;
/// Sums of matrix elements are corrected by no more than this share of them.
const LARGEST_CORRECTION: f64 = 0.05;

/// The in-plane wave numbers that may be visited, 1/nm, from zero.
pub(super) fn wave_numbers() -> Vec<f64> {
    let mut k_per_nm = vec![0.0];
    let mut start = 0.0;
    for (step, end) in WAVE_NUMBER_STEPS_PER_NM {
        let count = ((end - start) / step).round() as usize;
        k_per_nm.extend((1..=count).map(|index| start + index as f64 * step));
        start = end;
    }
    k_per_nm
}

/// Slices along k on one grid.
pub(super) type Track = Vec<Slice>;

/// The same slice on two grids of steps h and h/2, extrapolated, in order of energy.
///
/// Matrix elements of states closer than [`CLUSTER_EV`] mean something only in sums, and their members
/// may be mixed differently on the two grids: those of the finer one are scaled so that the sum over a
/// cluster of electron levels and one of valence states is extrapolated. Squares all of them, they stay
/// positive. States that are all but equal share theirs evenly: they are mixed anew at every wave
/// number, and what is interpolated between wave numbers must be smooth.
///
/// # Arguments
///
/// * `electrons` – clusters of electron levels, rows of the matrix elements
pub(super) fn extrapolated(coarse: &Slice, fine: &Slice, electrons: &[Range<usize>]) -> Slice {
    let two = |coarse: f64, fine: f64| fine + (fine - coarse) / 3.0;
    let partners = partners(coarse, fine);
    let energies: Vec<f64> = partners
        .iter()
        .zip(&fine.energy_ev)
        .map(|(&partner, &energy)| two(coarse.energy_ev[partner], energy))
        .collect();
    let mut order: Vec<usize> = (0..energies.len()).collect();
    order.sort_by(|&a, &b| energies[b].total_cmp(&energies[a]));
    let energy_ev: Vec<f64> = order.iter().map(|&state| energies[state]).collect();
    let mut dipoles: Vec<Vec<Dipole>> = fine
        .dipoles
        .iter()
        .map(|row| order.iter().map(|&state| row[state]).collect())
        .collect();
    // A large correction is none of the grid: states have changed hands between clusters.
    let factor = |coarse: f64, fine: f64| {
        let correction = (fine - coarse) / (3.0 * fine);
        if correction.abs() < LARGEST_CORRECTION {
            1.0 + correction
        } else {
            1.0
        }
    };
    for holes in clusters(&energy_ev, CLUSTER_EV) {
        for electrons in electrons {
            let mut sums = [Dipole::default(); 2];
            for electron in electrons.clone() {
                for &state in &order[holes.clone()] {
                    let pair = [
                        coarse.dipoles[electron][partners[state]],
                        fine.dipoles[electron][state],
                    ];
                    for (sum, dipole) in sums.iter_mut().zip(pair) {
                        sum.te += dipole.te;
                        sum.tm += dipole.tm;
                    }
                }
            }
            let (te, tm) = (
                factor(sums[0].te, sums[1].te),
                factor(sums[0].tm, sums[1].tm),
            );
            for row in &mut dipoles[electrons.clone()] {
                for dipole in &mut row[holes.clone()] {
                    dipole.te *= te;
                    dipole.tm *= tm;
                }
            }
        }
    }
    for equals in clusters(&energy_ev, EQUAL_EV) {
        for row in &mut dipoles {
            let members = &mut row[equals.clone()];
            let share = |value: fn(&Dipole) -> f64| {
                members.iter().map(value).sum::<f64>() / members.len() as f64
            };
            let even = Dipole {
                te: share(|dipole| dipole.te),
                tm: share(|dipole| dipole.tm),
            };
            members.fill(even);
        }
    }
    Slice { energy_ev, dipoles }
}

/// Which state of a coarser grid each state of the finer one was: as a rule that of its number, but
/// states that lie nearer to each other than the grids do may have crossed between them, whole families
/// of them where wells are coupled. Matrix elements tell, summed over the electron levels: where the
/// pairs that are likest are much liker than those of equal number, they are taken.
fn partners(coarse: &Slice, fine: &Slice) -> Vec<usize> {
    let count = fine.energy_ev.len();
    let mut partners: Vec<usize> = (0..count).collect();
    let strength = |slice: &Slice, state: usize| {
        slice.dipoles.iter().fold((0.0, 0.0), |sum, row| {
            (sum.0 + row[state].te, sum.1 + row[state].tm)
        })
    };
    let unlike = |of_coarse: usize, of_fine: usize| -> f64 {
        let (a, b) = (strength(coarse, of_coarse), strength(fine, of_fine));
        (a.0 - b.0).abs() + (a.1 - b.1).abs()
    };
    let moved = |state: usize| (fine.energy_ev[state] - coarse.energy_ev[state]).abs();
    let near = |state: usize| {
        let gap = |slice: &Slice| (slice.energy_ev[state] - slice.energy_ev[state + 1]).abs();
        gap(coarse).max(gap(fine)) < 4.0 * moved(state).max(moved(state + 1))
    };
    let mut start = 0;
    for end in 1..=count {
        if end < count && near(end - 1) {
            continue;
        }
        let straight: f64 = (start..end).map(|state| unlike(state, state)).sum();
        // The likest pairs first, those of near numbers before others.
        let mut pairs: Vec<(usize, usize)> = (start..end)
            .flat_map(|coarse| (start..end).map(move |fine| (coarse, fine)))
            .collect();
        let rank = |&(coarse, fine): &(usize, usize)| {
            unlike(coarse, fine) + 1e-6 * coarse.abs_diff(fine) as f64
        };
        pairs.sort_by(|a, b| rank(a).total_cmp(&rank(b)));
        let mut likest: Vec<Option<usize>> = vec![None; end - start];
        let mut taken = vec![false; end - start];
        let mut crossed = 0.0;
        for (coarse, fine) in pairs {
            if likest[fine - start].is_none() && !taken[coarse - start] {
                likest[fine - start] = Some(coarse);
                taken[coarse - start] = true;
                crossed += unlike(coarse, fine);
            }
        }
        if crossed < 0.5 * straight {
            for (fine, coarse) in likest.into_iter().enumerate() {
                partners[start + fine] = coarse.unwrap_or(start + fine);
            }
            // Members of one family are as like as each other: they keep their order.
            for low in start..end {
                for high in low + 1..end {
                    let (a, b) = (partners[low], partners[high]);
                    let apart = unlike(b, low) + unlike(a, high) - unlike(a, low) - unlike(b, high);
                    if a > b && apart < ONE_FAMILY {
                        partners.swap(low, high);
                    }
                }
            }
        }
        start = end;
    }
    partners
}

/// The slices of one block on one grid, from k = 0 until the highest state has fallen to `depth`.
///
/// # Arguments
///
/// * `which` – index of the grid among the three of `centre`
/// * `electrons` – envelopes of the electron levels on this grid
///
/// # Errors
///
/// [`Uncertified`] where neither following nor a search from nothing can be certified.
pub(super) fn follow(
    grid: &Grid,
    sign: f64,
    centre: &Centre,
    which: usize,
    electrons: &[&[f64]],
    depth: f64,
) -> Result<Track, Uncertified> {
    let count = centre.states.len();
    let start = &centre.ladders[which];
    let picked: Vec<usize> = if centre.by_character {
        centre.places.iter().map(|place| place[which]).collect()
    } else {
        (0..start.energies.len()).collect()
    };
    let hold = if centre.by_character {
        Hold::Character
    } else {
        Hold::Lowest(count)
    };
    let weighted: Vec<Vec<f64>> = electrons
        .iter()
        .map(|electron| {
            let nodes = electron.iter().zip(&grid.nodes.weights_nm);
            nodes.map(|(value, weight)| value * weight).collect()
        })
        .collect();
    let slice = |trail: &Trail| Slice {
        energy_ev: trail.energies().take(count).map(|energy| -energy).collect(),
        dipoles: weighted
            .iter()
            .map(|electron| {
                let sums = trail.projections(electron);
                let states = sums[..count].iter();
                states
                    .map(|&sums| Projection::from(sums).dipole())
                    .collect()
            })
            .collect(),
    };
    let mut chain = grid.chain();
    let ladder = Ladder {
        energies: picked.iter().map(|&index| start.energies[index]).collect(),
        vectors: picked
            .iter()
            .map(|&index| start.vectors[index].clone())
            .collect(),
    };
    let mut trail = Trail::new(&chain, &ladder, 0.0);
    let mut track = vec![slice(&trail)];
    for pair in wave_numbers().windows(2) {
        let (from, to) = (pair[0], pair[1]);
        grid.set(&mut chain, to, sign);
        if !trail.step(&mut chain, to, hold, grid.floor) {
            trail = if centre.by_character {
                creep(grid, sign, &trail, &mut chain, (from, to)).ok_or_else(|| Uncertified {
                    band: "valence in-plane",
                    level: 1,
                    energy_ev: -trail.energies().next().unwrap_or(f64::NAN),
                })?
            } else {
                let ladder = chain
                    .lowest(trail.states(), grid.floor)
                    .or_else(|_| chain.lowest(count, grid.floor))
                    .map_err(|error| uncertified(error, to))?;
                Trail::new(&chain, &ladder, to)
            };
        }
        track.push(slice(&trail));
        if trail
            .energies()
            .next()
            .is_none_or(|highest| -highest < depth)
        {
            break;
        }
    }
    Ok(track)
}

/// Follows states by their character in smaller and smaller steps; `None` if even these lose them.
fn creep(
    grid: &Grid,
    sign: f64,
    trail: &Trail,
    chain: &mut BlockChain,
    (from, to): (f64, f64),
) -> Option<Trail> {
    let crept = [2u32, 4, 8].into_iter().find_map(|parts| {
        let mut crept = trail.clone();
        (1..=parts)
            .all(|part| {
                let k_per_nm = from + (to - from) * f64::from(part) / f64::from(parts);
                grid.set(chain, k_per_nm, sign);
                crept.step(chain, k_per_nm, Hold::Character, grid.floor)
            })
            .then_some(crept)
    });
    grid.set(chain, to, sign);
    crept
}

#[cfg(test)]
mod tests {
    use super::*;

    /// One cluster of electron levels.
    const ONE_LEVEL: [Range<usize>; 1] = [const { 0..1 }];
    const TWO_LEVELS: [Range<usize>; 1] = [const { 0..2 }];

    #[test]
    fn wave_numbers_rise_in_the_steps_that_states_can_be_followed_over() {
        let k_per_nm = wave_numbers();
        let (first, last) = (k_per_nm[0], k_per_nm[k_per_nm.len() - 1]);
        assert!(first == 0.0 && (last - 2.0).abs() < 1e-12);
        for pair in k_per_nm.windows(2) {
            let (step, _) = WAVE_NUMBER_STEPS_PER_NM
                .into_iter()
                .find(|&(_, end)| pair[1] <= end + 1e-9)
                .expect("a step for every wave number");
            assert!((pair[1] - pair[0] - step).abs() < 1e-12, "{pair:?}");
        }
    }

    /// Two states that cross from one grid to the next are not extrapolated into each other.
    #[test]
    fn states_that_cross_between_grids_keep_their_partners() {
        let heavy = Dipole { te: 1.5, tm: 0.0 };
        let light = Dipole { te: 0.5, tm: 2.0 };
        let slice = |states: &[(f64, Dipole)]| Slice {
            energy_ev: states.iter().map(|state| state.0).collect(),
            dipoles: vec![states.iter().map(|state| state.1).collect()],
        };
        let far = (-0.3, heavy);
        let coarse = slice(&[(-0.1, heavy), (-0.1001, light), far]);
        let fine = slice(&[(-0.1004, light), (-0.1006, heavy), far]);
        let exact = slice(&[(-0.1005, light), (-0.1008, heavy), far]);
        let got = extrapolated(&coarse, &fine, &ONE_LEVEL);
        for (got, exact) in got.energy_ev.iter().zip(&exact.energy_ev) {
            assert!((got - exact).abs() < 1e-12, "{got} {exact}");
        }
        assert_eq!(got.dipoles, exact.dipoles);
        // Far apart, a change of character is a change of character.
        let apart = slice(&[(-0.05, light), (-0.1004, heavy), far]);
        assert_eq!(
            partners(&apart, &slice(&[(-0.05, heavy), (-0.1004, light), far])),
            [0, 1, 2]
        );
    }

    /// Two wells that do not feel each other may be told apart on one grid and mixed on the other: the
    /// sum over all four pairs is what it is.
    #[test]
    fn sums_over_clusters_do_not_hang_on_how_their_members_are_mixed() {
        let slice = |dipoles: [[f64; 2]; 2]| Slice {
            energy_ev: vec![-0.1, -0.1 - 1e-9],
            dipoles: dipoles
                .map(|row| row.map(|te| Dipole { te, tm: 0.0 }).to_vec())
                .to_vec(),
        };
        let (apart, mixed) = (
            slice([[1.5, 0.0], [0.0, 1.5]]),
            slice([[0.75, 0.75], [0.75, 0.75]]),
        );
        for (coarse, fine) in [(&apart, &mixed), (&mixed, &apart)] {
            let got = extrapolated(coarse, fine, &TWO_LEVELS);
            let sum: f64 = got.dipoles.iter().flatten().map(|dipole| dipole.te).sum();
            assert!((sum - 3.0).abs() < 1e-12, "{sum}");
        }
    }

    /// Errors that go as h² leave nothing behind.
    #[test]
    fn two_grids_remove_an_error_of_second_order() {
        let slice = |step: f64| {
            let square = step * step;
            Slice {
                energy_ev: vec![-0.2 + 0.7 * square, -0.4 - 0.1 * square],
                dipoles: vec![vec![
                    Dipole {
                        te: 1.4 + square,
                        tm: 0.0,
                    },
                    Dipole {
                        te: 0.5,
                        tm: 2.0 - 3.0 * square,
                    },
                ]],
            }
        };
        let (got, exact) = (
            extrapolated(&slice(0.2), &slice(0.1), &ONE_LEVEL),
            slice(0.0),
        );
        for (got, exact) in got.energy_ev.iter().zip(&exact.energy_ev) {
            assert!((got - exact).abs() < 1e-15);
        }
        for (got, exact) in got.dipoles[0].iter().zip(&exact.dipoles[0]) {
            assert!((got.te - exact.te).abs() < 1e-14 && (got.tm - exact.tm).abs() < 1e-14);
        }
    }
}
