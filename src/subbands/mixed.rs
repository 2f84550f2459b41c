//! Subbands with heavy, light and split-off holes mixed.

use rayon::prelude::*;

use super::single::limit;
use super::{Band, CLUSTER_EV, COARSEST_STEP_NM, Level, Nodes, SingleBands, Uncertified};
use crate::numerics::block::{BlockChain, BlockRun, Ladder, Three};
use crate::profile::{Cells, Profile, Strained};
use crate::units::HBAR2_OVER_2M0_EV_NM2;

/// Steps of the in-plane wave number, 1/nm, and up to where each is taken: small enough to follow
/// states from one to the next, and to interpolate between.
const WAVE_NUMBER_STEPS_PER_NM: [(f64, f64); 3] = [(0.0125, 0.5), (0.025, 1.2), (0.05, 2.0)];

/// The in-plane wave numbers that may be visited, 1/nm, from zero.
fn wave_numbers() -> Vec<f64> {
    let mut k_per_nm = vec![0.0];
    let mut start = 0.0;
    for (step, end) in WAVE_NUMBER_STEPS_PER_NM {
        let count = ((end - start) / step).round() as usize;
        k_per_nm.extend((1..=count).map(|index| start + index as f64 * step));
        start = end;
    }
    k_per_nm
}

/// A state at zero in-plane wave number.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ZoneCentre {
    /// Energy, eV.
    pub energy_ev: f64,
    /// Heavy-hole share.
    pub heavy: f64,
    /// Light-hole share.
    pub light: f64,
    /// Split-off share.
    pub split_off: f64,
    /// Estimate of the numerical error of the energy, eV.
    pub error_ev: f64,
    /// Share inside the wells and the steps that belong to them.
    pub in_wells: f64,
    /// Whether it lies within [`super::NEAR_EDGE_EV`] of the edge that confines it.
    pub near_edge: bool,
}

/// Squared momentum matrix elements of one electron level and one valence state, in M_b² = m₀E_p/6,
/// summed over the electron spins and averaged over the direction in the plane.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Dipole {
    /// Light polarised in the plane.
    pub te: f64,
    /// Light polarised along growth.
    pub tm: f64,
}

impl Dipole {
    /// From the overlaps I of an electron envelope with the heavy, light and split-off envelope of a
    /// valence state of either block:
    ///
    /// ```text
    ///  |M_TE|² = (3/2) I_h² + (1/2) (I_l − √2 I_s)²      |M_TM|² = 2 (I_l + I_s/√2)²
    /// ```
    ///
    /// The sum rule (2 TE + TM)/3 = I_h² + I_l² + I_s² holds identically.
    #[must_use]
    pub fn of_overlaps(heavy: f64, light: f64, split_off: f64) -> Self {
        use std::f64::consts::SQRT_2;
        let plane = light - SQRT_2 * split_off;
        let growth = light + split_off / SQRT_2;
        Self {
            te: 1.5 * heavy * heavy + 0.5 * plane * plane,
            tm: 2.0 * growth * growth,
        }
    }
}

/// Envelope overlaps of one electron level and one valence state.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
struct Projection {
    heavy: f64,
    light: f64,
    split_off: f64,
}

impl Projection {
    fn dipole(self) -> Dipole {
        Dipole::of_overlaps(self.heavy, self.light, self.split_off)
    }

    fn overlap(self) -> f64 {
        self.heavy * self.heavy + self.light * self.light + self.split_off * self.split_off
    }
}

/// The states of one block at one in-plane wave number.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Slice {
    /// Energies, from the highest down, eV.
    pub energy_ev: Vec<f64>,
    /// Matrix elements, electron level by electron level.
    pub dipoles: Vec<Vec<Dipole>>,
}

/// The valence states of the wells over the in-plane wave number.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct MixedBands {
    /// Zone-centre states that belong to the wells, from the highest down.
    pub zone_centre: Vec<ZoneCentre>,
    /// |<e|v>|² at zero wave number, all components: rows the electron levels.
    pub overlaps: Vec<Vec<f64>>,
    /// In-plane wave numbers, 1/nm, rising from zero.
    pub k_per_nm: Vec<f64>,
    /// One block counted twice where the stack is its own mirror image, else the two blocks.
    pub blocks: Vec<Vec<Slice>>,
    /// How many states each block stands for: 2 where one is counted twice, times the number of
    /// equal wells that were solved as one.
    pub degeneracy: f64,
    /// How many equal, uncoupled wells were solved as one.
    pub equal_wells: usize,
    /// Electron levels that the matrix elements of the slices belong to.
    pub electron: Vec<Level>,
}

impl MixedBands {
    /// The bands of `wells` equal wells that do not feel each other, from those of one: every
    /// zone-centre state stands once a well, and an overlap is shared evenly among the pairs, since
    /// only sums over equal wells mean anything. The slices stay those of one well.
    #[must_use]
    pub fn of_equal_wells(self, wells: usize) -> Self {
        let each = |row: &[f64]| -> Vec<f64> {
            row.iter()
                .flat_map(|overlap| std::iter::repeat_n(overlap / wells as f64, wells))
                .collect()
        };
        let zone_centre = self
            .zone_centre
            .iter()
            .flat_map(|state| std::iter::repeat_n(*state, wells))
            .collect();
        let overlaps = self
            .overlaps
            .iter()
            .flat_map(|row| std::iter::repeat_n(each(row), wells))
            .collect();
        Self {
            zone_centre,
            overlaps,
            degeneracy: self.degeneracy * wells as f64,
            equal_wells: wells,
            ..self
        }
    }
}

/// The valence states that belong to the wells, heavy, light and split-off holes mixed.
///
/// # Equation
///
/// Six-band Luttinger-Kohn with strain in the axial approximation. With the in-plane wave number k
/// along x the mirror y → −y splits it into two real blocks, s = ±1, on envelopes (heavy, light,
/// split-off); d = d/dz, every kinetic term times ħ²/2m₀:
///
/// ```text
///  H_hh = E_v − P − Q − (γ1+γ2) k² + d (γ1−2γ2) d
///  H_ll = E_v − P + Q − (γ1−γ2) k² + d (γ1+2γ2) d − s (k/3) D′
///  H_ss = E_v − P − Δ − γ1 k² + d γ1 d + s (k/3) D′
///  H_hl = −s √3 γ̄ k² + (k/√3)(N₊ d + d N₋)
///  H_hs = +s √6 γ̄ k² + (k/√6)(N₊ d + d N₋)
///  H_ls = √2 Q + √2 (γ2 k² + 2 d γ2 d) + s k/(3√2) (2 d N₊ + 2 N₋ d + N₊ d + d N₋)
/// ```
///
/// with N₋ = −(γ1−2γ2) − 1, N₊ = −6γ3 − N₋ (the ordering of operators of Burt and Foreman, which
/// keeps spurious states out of the gap), D = N₊ − N₋ and γ̄ = (γ2+γ3)/2. At k = 0 the heavy hole
/// stands alone and is that of the single band.
///
/// # Discretisation
///
/// The weak form on the grid of the single bands, envelopes on common nodes: each interval adds
/// c₀∫ab − c₂∫a′b′ + c₊∫ab′ − c₋∫a′b − c_d∫(ab)′ for every pair of components, coefficients constant
/// on it; interface conditions are natural. Errors fall as h². Energies at k = 0 are extrapolated
/// from three grids, all else from two.
///
/// # Which states count
///
/// At k = 0 a state belongs to the wells if it lies above the edges of every layer outside them:
/// heavy edges if its heavy share is over one half, else light edges (in a field: if more than half
/// of it lies in the wells). Their number m is kept, and at each k the m highest states of each block
/// are used.
///
/// # Arguments
///
/// * `depth_ev` – the wave number runs until the highest state has fallen this far
///
/// # Errors
///
/// [`Uncertified`] where inertia, residuals and order of the states do not agree, or where a state
/// lies above the highest hole edge.
///
/// # References
///
/// B. A. Foreman, Phys. Rev. B 48, 4964 (1993); C. Y.-P. Chao, S. L. Chuang, Phys. Rev. B 46, 4110
/// (1992); C.-S. Chang, S. L. Chuang, IEEE J. Sel. Top. Quantum Electron. 1, 218 (1995).
pub fn mixed(
    profile: &Profile<'_>,
    single: &SingleBands,
    depth_ev: f64,
) -> Result<MixedBands, Uncertified> {
    let grids: Vec<Grid> = (single.halvings - 2..=single.halvings)
        .map(|halvings| Grid::new(profile, profile.grid(COARSEST_STEP_NM, halvings)))
        .collect();
    let centre = Centre::new(profile, &grids)?;
    let count = centre.states.len();
    if count == 0 {
        return Ok(MixedBands::default());
    }
    let signs: &[f64] = if profile.is_symmetric() {
        &[1.0]
    } else {
        &[1.0, -1.0]
    };
    let top = centre.states[0].energy_ev;
    let electrons = |fine: bool| -> Vec<&[f64]> {
        single
            .electron
            .iter()
            .map(|level| {
                if fine {
                    &level.envelope[..]
                } else {
                    &level.coarser[..]
                }
            })
            .collect()
    };
    let tracks: Vec<Track> = signs
        .par_iter()
        .flat_map(|&sign| {
            let track = |grid: usize| {
                let electrons = electrons(grid == 2);
                follow(
                    &grids[grid],
                    sign,
                    &centre,
                    grid,
                    &electrons,
                    top - depth_ev,
                )
            };
            let (coarse, fine) = rayon::join(|| track(1), || track(2));
            [coarse, fine]
        })
        .collect::<Result<Vec<Track>, Uncertified>>()?;
    let steps = tracks.iter().map(Vec::len).min().unwrap_or(0);
    let blocks: Vec<Vec<Slice>> = tracks
        .chunks(2)
        .map(|pair| {
            (0..steps)
                .map(|at| extrapolated(&pair[0][at], &pair[1][at]))
                .collect()
        })
        .collect();
    let overlaps = centre.overlaps(&grids, single);
    Ok(MixedBands {
        zone_centre: centre.states,
        overlaps,
        k_per_nm: wave_numbers()[..steps].to_vec(),
        degeneracy: if blocks.len() == 1 { 2.0 } else { 1.0 },
        blocks,
        equal_wells: 1,
        electron: single.electron.clone(),
    })
}

/// Slices along k on one grid.
type Track = Vec<Slice>;

/// The same slice on two grids of steps h and h/2, extrapolated, in order of energy.
fn extrapolated(coarse: &Slice, fine: &Slice) -> Slice {
    let two = |coarse: f64, fine: f64| fine + (fine - coarse) / 3.0;
    let partners = partners(coarse, fine);
    let energy_ev: Vec<f64> = partners
        .iter()
        .zip(&fine.energy_ev)
        .map(|(&partner, &energy)| two(coarse.energy_ev[partner], energy))
        .collect();
    let mut order: Vec<usize> = (0..energy_ev.len()).collect();
    order.sort_by(|&a, &b| energy_ev[b].total_cmp(&energy_ev[a]));
    Slice {
        energy_ev: order.iter().map(|&state| energy_ev[state]).collect(),
        dipoles: coarse
            .dipoles
            .iter()
            .zip(&fine.dipoles)
            .map(|(coarse, fine)| {
                order
                    .iter()
                    .map(|&state| {
                        let (coarse, fine) = (coarse[partners[state]], fine[state]);
                        // Squares both: what is forbidden must not turn negative.
                        Dipole {
                            te: two(coarse.te, fine.te).max(0.0),
                            tm: two(coarse.tm, fine.tm).max(0.0),
                        }
                    })
                    .collect()
            })
            .collect(),
    }
}

/// Which state of a coarser grid each state of the finer one was: as a rule that of its number, but
/// two that lie nearer to each other than the grids do may have crossed between them. Matrix elements
/// tell: those of a pair that crossed are alike crosswise.
fn partners(coarse: &Slice, fine: &Slice) -> Vec<usize> {
    let count = fine.energy_ev.len();
    let mut partners: Vec<usize> = (0..count).collect();
    let unlike = |of_coarse: usize, of_fine: usize| -> f64 {
        let rows = coarse.dipoles.iter().zip(&fine.dipoles);
        rows.map(|(coarse, fine)| {
            let (a, b) = (coarse[of_coarse], fine[of_fine]);
            (a.te - b.te).abs() + (a.tm - b.tm).abs()
        })
        .sum()
    };
    let moved = |state: usize| (fine.energy_ev[state] - coarse.energy_ev[state]).abs();
    let mut state = 0;
    while state + 1 < count {
        let next = state + 1;
        let gap = |slice: &Slice| (slice.energy_ev[state] - slice.energy_ev[next]).abs();
        let near = gap(coarse).max(gap(fine)) < 4.0 * moved(state).max(moved(next));
        let straight = unlike(state, state) + unlike(next, next);
        let crossed = unlike(state, next) + unlike(next, state);
        if near && crossed < 0.5 * straight {
            partners.swap(state, next);
            state += 1;
        }
        state += 1;
    }
    partners
}

/// One grid with what a block needs of it.
struct Grid {
    cells: Vec<Cells>,
    nodes: Nodes,
    /// Hole energy below which no state may lie: the highest hole edge, upside down.
    floor: f64,
    /// Share of every node's length inside wells and steps.
    in_wells: Vec<f64>,
}

impl Grid {
    fn new(profile: &Profile<'_>, cells: Vec<Cells>) -> Self {
        let highest = cells
            .iter()
            .map(|cell| cell.numbers.edges.heavy_ev.max(cell.numbers.edges.light_ev) + cell.tilt_ev)
            .fold(f64::NEG_INFINITY, f64::max);
        let nodes = Nodes::of(profile, &cells);
        let inside: Vec<f64> = cells
            .iter()
            .flat_map(|cell| {
                let counts = profile.sections[cell.section].in_wells;
                std::iter::repeat_n(if counts { cell.length_nm } else { 0.0 }, cell.intervals)
            })
            .collect();
        let in_wells = inside
            .windows(2)
            .zip(&nodes.weights_nm)
            .map(|(pair, weight)| 0.5 * (pair[0] + pair[1]) / weight)
            .collect();
        Self {
            cells,
            nodes,
            floor: -highest - 1e-9,
            in_wells,
        }
    }

    /// A chain for this grid, its forms still to be set.
    fn chain(&self) -> BlockChain {
        let empty: Three = [[0.0; 3]; 3];
        let runs = self
            .cells
            .iter()
            .map(|cell| BlockRun {
                intervals: cell.intervals,
                length: cell.length_nm,
                lower: empty,
                upper: empty,
                coupling: empty,
            })
            .collect();
        BlockChain::new(runs)
    }

    /// Sets the forms of a block at an in-plane wave number.
    fn set(&self, chain: &mut BlockChain, k_per_nm: f64, sign: f64) {
        for (run, cell) in chain.runs_mut().iter_mut().zip(&self.cells) {
            *run = BlockRun {
                intervals: cell.intervals,
                ..interval(&cell.numbers, cell.tilt_ev, cell.length_nm, k_per_nm, sign)
            };
        }
    }

    /// Shares of a valence vector; energy and error are left at zero.
    fn shares(&self, vector: &[f64]) -> ZoneCentre {
        let mut parts = [0.0; 3];
        let mut in_wells = 0.0;
        for ((values, weight), inside) in vector
            .chunks_exact(3)
            .zip(&self.nodes.weights_nm)
            .zip(&self.in_wells)
        {
            let mut here = 0.0;
            for (part, value) in parts.iter_mut().zip(values) {
                *part += weight * value * value;
                here += weight * value * value;
            }
            in_wells += inside * here;
        }
        let [heavy, light, split_off] = parts;
        ZoneCentre {
            energy_ev: 0.0,
            heavy,
            light,
            split_off,
            error_ev: 0.0,
            in_wells,
            near_edge: false,
        }
    }

    /// Heavy, light and split-off overlaps of an electron envelope with a valence vector.
    fn projection(&self, electron: &[f64], vector: &[f64]) -> Projection {
        let mut sums = [0.0; 3];
        for ((value, weight), parts) in electron
            .iter()
            .zip(&self.nodes.weights_nm)
            .zip(vector.chunks_exact(3))
        {
            let scaled = value * weight;
            for (sum, part) in sums.iter_mut().zip(parts) {
                *sum += scaled * part;
            }
        }
        Projection {
            heavy: sums[0],
            light: sums[1],
            split_off: sums[2],
        }
    }
}

/// The forms of one interval of uniform material, upside down: hole energies count upwards.
///
/// # Arguments
///
/// * `numbers` – material and edges of the interval
/// * `tilt_ev` – potential energy of an electron in a field at its middle, eV
/// * `length_nm` – its length, nm
/// * `k_per_nm` – in-plane wave number, 1/nm
/// * `sign` – +1 or −1, which of the two blocks
#[must_use]
pub fn interval(
    numbers: &Strained,
    tilt_ev: f64,
    length_nm: f64,
    k_per_nm: f64,
    sign: f64,
) -> BlockRun {
    use std::f64::consts::SQRT_2;
    const SQRT_3: f64 = 1.732_050_807_568_877_2;
    const SQRT_6: f64 = 2.449_489_742_783_178;
    let (k, s) = (k_per_nm, sign);
    let unit = HBAR2_OVER_2M0_EV_NM2;
    let [g1, g2, g3] = numbers.crystal.luttinger;
    let axial = 0.5 * (g2 + g3);
    let minus = -(g1 - 2.0 * g2) - 1.0;
    let plus = -6.0 * g3 - minus;
    let edges = &numbers.edges;
    let mean = edges.valence_mean_ev + tilt_ev;
    let (shear, k2) = (edges.shear_ev, k * k);
    let spike = s * k / 3.0 * (plus - minus) * unit;
    let mixing = s * k / (3.0 * SQRT_2) * unit;
    // (row, column, c0, c2, cp, cm, cd)
    let entries = [
        (
            0,
            0,
            mean - shear - unit * (g1 + g2) * k2,
            unit * (g1 - 2.0 * g2),
            0.0,
            0.0,
            0.0,
        ),
        (
            1,
            1,
            mean + shear - unit * (g1 - g2) * k2,
            unit * (g1 + 2.0 * g2),
            0.0,
            0.0,
            -spike,
        ),
        (
            2,
            2,
            mean - numbers.crystal.split_off_ev - unit * g1 * k2,
            unit * g1,
            0.0,
            0.0,
            spike,
        ),
        (
            0,
            1,
            -s * SQRT_3 * axial * k2 * unit,
            0.0,
            k / SQRT_3 * plus * unit,
            k / SQRT_3 * minus * unit,
            0.0,
        ),
        (
            0,
            2,
            s * SQRT_6 * axial * k2 * unit,
            0.0,
            k / SQRT_6 * plus * unit,
            k / SQRT_6 * minus * unit,
            0.0,
        ),
        (
            1,
            2,
            SQRT_2 * (shear + unit * g2 * k2),
            2.0 * SQRT_2 * g2 * unit,
            mixing * (plus + 2.0 * minus),
            mixing * (2.0 * plus + minus),
            0.0,
        ),
    ];
    let dz = length_nm;
    let empty: Three = [[0.0; 3]; 3];
    let mut run = BlockRun {
        intervals: 1,
        length: dz,
        lower: empty,
        upper: empty,
        coupling: empty,
    };
    for (a, b, c0, c2, cp, cm, cd) in entries {
        let even = 0.5 * c0 * dz - c2 / dz;
        let odd = 0.5 * (cp - cm) - cd;
        let slope = 0.5 * (cp + cm);
        run.lower[a][b] = -(even - odd);
        run.upper[a][b] = -(even + odd);
        run.coupling[a][b] = -(c2 / dz + slope);
        if a != b {
            run.lower[b][a] = run.lower[a][b];
            run.upper[b][a] = run.upper[a][b];
            run.coupling[b][a] = -(c2 / dz - slope);
        }
    }
    run
}

/// Zone-centre states that belong to the wells, and the ladders to follow from.
struct Centre {
    states: Vec<ZoneCentre>,
    /// Index of each state in the three ladders.
    places: Vec<[usize; 3]>,
    /// Whether states are followed by their character: in a field box states stand between them, and
    /// only the order of all states could be certified by counting.
    by_character: bool,
    ladders: Vec<Ladder>,
}

impl Centre {
    fn new(profile: &Profile<'_>, grids: &[Grid]) -> Result<Self, Uncertified> {
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
        let ladders: Vec<Ladder> = chains
            .iter_mut()
            .zip(grids)
            .map(|(chain, grid)| {
                if in_field {
                    // A coarser grid may put the first of them a little lower.
                    chain.levels(wanted.clone(), low - 0.05)
                } else {
                    chain.lowest(wanted.end, grid.floor)
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
                let near_edge = !in_field && energy_ev - edge < super::NEAR_EDGE_EV;
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
    fn overlaps(&self, grids: &[Grid], single: &SingleBands) -> Vec<Vec<f64>> {
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

fn uncertified(error: crate::numerics::block::Uncertified, k_per_nm: f64) -> Uncertified {
    let band = if k_per_nm == 0.0 {
        "valence zone-centre"
    } else {
        "valence in-plane"
    };
    Uncertified {
        band,
        level: error.level,
        energy_ev: -error.energy,
    }
}

/// The slices of one block on one grid, from k = 0 until the highest state has fallen to `depth`.
fn follow(
    grid: &Grid,
    sign: f64,
    centre: &Centre,
    which: usize,
    electrons: &[&[f64]],
    depth: f64,
) -> Result<Track, Uncertified> {
    /// States beyond those used, to take over where characters are exchanged.
    const GUARDS: usize = 2;
    let count = centre.states.len();
    let start = &centre.ladders[which];
    let picked: Vec<usize> = if centre.by_character {
        centre.places.iter().map(|place| place[which]).collect()
    } else {
        (0..(count + GUARDS).min(start.energies.len())).collect()
    };
    let mut chain = grid.chain();
    let mut ladder = Ladder {
        energies: picked.iter().map(|&index| start.energies[index]).collect(),
        vectors: picked
            .iter()
            .map(|&index| start.vectors[index].clone())
            .collect(),
    };
    let hold = |chain: &mut BlockChain, ladder: &mut Ladder| {
        if centre.by_character {
            chain.pursue(ladder, grid.floor)
        } else {
            chain.follow(ladder, count, grid.floor)
        }
    };
    let mut before = ladder.clone();
    let mut track = Vec::new();
    let slice = |ladder: &Ladder| Slice {
        energy_ev: ladder.energies[..count]
            .iter()
            .map(|energy| -energy)
            .collect(),
        dipoles: electrons
            .iter()
            .map(|electron| {
                ladder.vectors[..count]
                    .iter()
                    .map(|vector| grid.projection(electron, vector).dipole())
                    .collect()
            })
            .collect(),
    };
    track.push(slice(&ladder));
    let k_per_nm = wave_numbers();
    for at in 1..k_per_nm.len() {
        let (from, to) = (k_per_nm[at - 1], k_per_nm[at]);
        // Straight on from the two slices before: energies and vectors.
        let ratio = if at > 1 {
            (to - from) / (from - k_per_nm[at - 2])
        } else {
            0.0
        };
        grid.set(&mut chain, to, sign);
        let mut next = ahead(&chain, &before, &ladder, ratio);
        if !hold(&mut chain, &mut next) {
            // Smaller and smaller steps, then from nothing where even these lose the states.
            let crept = [2u32, 4, 8].into_iter().find_map(|parts| {
                let mut crept = ladder.clone();
                (1..=parts)
                    .all(|part| {
                        let k = from + (to - from) * f64::from(part) / f64::from(parts);
                        grid.set(&mut chain, k, sign);
                        hold(&mut chain, &mut crept)
                    })
                    .then_some(crept)
            });
            grid.set(&mut chain, to, sign);
            next = match crept {
                Some(crept) => crept,
                None if centre.by_character => {
                    let energy_ev = -ladder.energies[0];
                    return Err(Uncertified {
                        band: "valence in-plane",
                        level: 1,
                        energy_ev,
                    });
                }
                None => chain
                    .lowest(ladder.energies.len(), grid.floor)
                    .or_else(|_| chain.lowest(count, grid.floor))
                    .map_err(|error| uncertified(error, to))?,
            };
        }
        before = std::mem::replace(&mut ladder, next);
        track.push(slice(&ladder));
        if -ladder.energies[0] < depth {
            break;
        }
    }
    Ok(track)
}

/// Energies and vectors continued in a straight line through two slices, `ratio` being the step to
/// come over the step behind.
fn ahead(chain: &BlockChain, before: &Ladder, last: &Ladder, ratio: f64) -> Ladder {
    let mut next = before.clone();
    chain.advance(&mut next, last, ratio);
    next
}

#[cfg(test)]
mod tests {
    use super::*;

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

    /// (2 TE + TM)/3 is the sum of the squared overlaps, and heavy, light and split-off holes of unit
    /// overlap share it as symmetry has it.
    #[test]
    fn matrix_elements_keep_their_sum_rule() {
        for (overlaps, te, tm) in [
            ([1.0, 0.0, 0.0], 1.5, 0.0),
            ([0.0, 1.0, 0.0], 0.5, 2.0),
            ([0.0, 0.0, 1.0], 1.0, 1.0),
        ] {
            let [heavy, light, split_off] = overlaps;
            let dipole = Dipole::of_overlaps(heavy, light, split_off);
            assert!((dipole.te - te).abs() < 1e-15 && (dipole.tm - tm).abs() < 1e-15);
        }
        for (heavy, light, split_off) in [(0.3, -0.7, 0.2), (-0.9, 0.1, -0.4), (0.0, 0.6, 0.6)] {
            let own = Projection {
                heavy,
                light,
                split_off,
            };
            let dipole = own.dipole();
            assert!(((2.0 * dipole.te + dipole.tm) / 3.0 - own.overlap()).abs() < 1e-15);
        }
    }

    /// Several equal wells hold every state as often as there are wells, and their overlaps sum to
    /// what those of one well sum to, once for each of them.
    #[test]
    fn equal_wells_hold_the_states_of_one_so_many_times() {
        let state = |energy_ev| ZoneCentre {
            energy_ev,
            heavy: 1.0,
            light: 0.0,
            split_off: 0.0,
            error_ev: 0.0,
            in_wells: 0.9,
            near_edge: false,
        };
        let one = MixedBands {
            zone_centre: vec![state(0.1), state(0.05)],
            overlaps: vec![vec![0.9, 0.01], vec![0.02, 0.8]],
            degeneracy: 2.0,
            equal_wells: 1,
            ..MixedBands::default()
        };
        let three = one.clone().of_equal_wells(3);
        assert_eq!((three.degeneracy, three.equal_wells), (6.0, 3));
        assert_eq!((three.zone_centre.len(), three.overlaps.len()), (6, 6));
        assert!(three.zone_centre[2].energy_ev > three.zone_centre[3].energy_ev);
        let sum = |bands: &MixedBands| bands.overlaps.iter().flatten().sum::<f64>();
        assert!((sum(&three) - 3.0 * sum(&one)).abs() < 1e-12);
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
        let got = extrapolated(&coarse, &fine);
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
        let (got, exact) = (extrapolated(&slice(0.2), &slice(0.1)), slice(0.0));
        for (got, exact) in got.energy_ev.iter().zip(&exact.energy_ev) {
            assert!((got - exact).abs() < 1e-15);
        }
        for (got, exact) in got.dipoles[0].iter().zip(&exact.dipoles[0]) {
            assert!((got.te - exact.te).abs() < 1e-14 && (got.tm - exact.tm).abs() < 1e-14);
        }
    }
}
