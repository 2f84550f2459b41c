//! Subbands one band at a time: finite differences, extrapolated, certified by node counts.

use super::{
    CLUSTER_EV, COARSEST_STEP_NM, LARGEST_MASS_CORRECTION, MOST_HALVINGS, NEAR_EDGE_EV, Nodes,
    Uncertified, WANTED_ERROR_EV,
};
use crate::numerics::chain::{Chain, LEAST_SOFTENING_FACTOR, Run, Workspace};
use crate::profile::{Cells, Profile, Section, Strained};
use crate::units::HBAR2_OVER_2M0_EV_NM2;

/// A band that is solved for by itself.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Band {
    /// The conduction band.
    Electron,
    /// The heavy-hole band.
    Heavy,
    /// The light-hole band.
    Light,
}

impl Band {
    /// The word for it in messages.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Electron => "electron",
            Self::Heavy => "heavy-hole",
            Self::Light => "light-hole",
        }
    }

    /// The band's edge in a strained layer, eV.
    #[must_use]
    pub fn edge_ev(self, numbers: &Strained) -> f64 {
        match self {
            Self::Electron => numbers.edges.conduction_ev,
            Self::Heavy => numbers.edges.heavy_ev,
            Self::Light => numbers.edges.light_ev,
        }
    }

    /// Mass along growth at the band edge.
    fn growth_mass(self, numbers: &Strained) -> f64 {
        match self {
            Self::Electron => numbers.crystal.electron_mass,
            Self::Heavy => numbers.crystal.heavy_mass_growth(),
            Self::Light => numbers.crystal.light_mass_growth(),
        }
    }

    /// Reciprocal in-plane mass of the uncoupled band at its edge: for holes 1/(γ1 ± γ2).
    fn reciprocal_plane_mass(self, numbers: &Strained) -> f64 {
        let [first, second, _] = numbers.crystal.luttinger;
        match self {
            Self::Electron => numbers.crystal.electron_mass.recip(),
            Self::Heavy => first + second,
            Self::Light => first - second,
        }
    }

    /// +1 where energies count upwards from the edge, −1 where they count downwards (holes).
    fn sign(self) -> f64 {
        if self == Self::Electron { 1.0 } else { -1.0 }
    }
}

/// One level of one band.
#[derive(Clone, Debug, PartialEq)]
pub struct Level {
    /// Energy, eV (of a hole too: an electron's energy).
    pub energy_ev: f64,
    /// In-plane mass, free-electron masses.
    pub in_plane_mass: f64,
    /// Estimate of the numerical error of the energy, eV.
    pub error_ev: f64,
    /// Share of the level inside the wells and the steps that belong to them.
    pub in_wells: f64,
    /// Whether the level lies within [`NEAR_EDGE_EV`] of the edge that confines it.
    pub near_edge: bool,
    /// Whether the energy-dependent mass met its lower bound somewhere in the region.
    pub mass_bounded: bool,
    /// φ on the inner nodes, ∫ φ² dz = 1, in nm^−½.
    pub envelope: Vec<f64>,
    /// φ on the grid of twice the step, to extrapolate what follows from envelopes.
    pub(super) coarser: Vec<f64>,
    /// Whether the level has a near neighbour, so that its envelope is only one choice inside their
    /// span, and may be another on another grid.
    crowded: bool,
    /// Relative size of the correction that the grid's error made to the in-plane mass.
    mass_correction: f64,
}

impl Level {
    /// Whether no other level of its band is so near that only their span has a meaning.
    #[must_use]
    pub fn is_alone(&self) -> bool {
        !self.crowded
    }
}

/// Levels of the three bands on common nodes.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct SingleBands {
    /// Nodes of the envelopes.
    pub nodes: Nodes,
    /// How often the coarsest step was halved for `nodes`.
    pub(super) halvings: u32,
    /// Nodes of twice the step.
    pub(super) coarser: Nodes,
    /// Electron levels, rising.
    pub electron: Vec<Level>,
    /// Heavy-hole levels, from the band edge down.
    pub heavy: Vec<Level>,
    /// Light-hole levels, from the band edge down.
    pub light: Vec<Level>,
}

impl SingleBands {
    /// The levels of a band.
    #[must_use]
    pub fn of(&self, band: Band) -> &[Level] {
        match band {
            Band::Electron => &self.electron,
            Band::Heavy => &self.heavy,
            Band::Light => &self.light,
        }
    }
}

/// Squared overlaps |<electron|hole>|² of every pair, rows the electron levels.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Overlaps(pub Vec<Vec<f64>>);

impl SingleBands {
    /// Squared overlaps of the electron levels with those of a hole band, extrapolated from two
    /// grids as the energies are.
    #[must_use]
    pub fn overlaps(&self, band: Band) -> Overlaps {
        let size = |nodes: &Nodes, a: &[f64], b: &[f64]| {
            let terms = a.iter().zip(b).zip(&nodes.weights_nm);
            terms
                .map(|((a, b), weight)| a * b * weight)
                .sum::<f64>()
                .abs()
        };
        let square = |electron: &Level, hole: &Level| {
            let fine = size(&self.nodes, &electron.envelope, &hole.envelope);
            if electron.crowded || hole.crowded {
                return fine * fine;
            }
            let coarse = size(&self.coarser, &electron.coarser, &hole.coarser);
            // A forbidden overlap is rounding on both grids: nothing to extrapolate there.
            let overlap = if fine > 1e-4 {
                fine + (fine - coarse) / 3.0
            } else {
                fine
            };
            (overlap * overlap).min(1.0)
        };
        Overlaps(
            self.electron
                .iter()
                .map(|electron| {
                    self.of(band)
                        .iter()
                        .map(|hole| square(electron, hole))
                        .collect()
                })
                .collect(),
        )
    }
}

/// Levels of electrons, heavy and light holes that belong to the wells.
///
/// # Equation
///
/// ```text
///  −(ħ²/2m₀) d/dz [ 1/m(z,E) dφ/dz ] + V(z) φ = E φ
/// ```
///
/// with V the band edge (plus the field's q F (z − z_c)), holes upside down. The electron mass
/// depends on energy as m_e [1 + (E − V)/E_g], the bracket kept above 0.1 and E_g the gap of the
/// strained layer; that of holes, 1/(γ1 ∓ 2 γ2), does not.
///
/// # Discretisation
///
/// Three grids, each of half the step of the one before, with nodes on every layer boundary
/// ([`Chain`]). The error of each is a series in h²; the first two terms are extrapolated away and
/// the size of the last correction is given as the error. Grids are refined until that is below
/// 1e-6 eV and the masses hardly move.
///
/// # Which levels belong to the wells
///
/// Without a field those below (holes: above) the edges of every layer outside the outermost wells
/// and the steps next to them, a graded layer counting with both ends. In a field those that lie by
/// more than half in wells and steps.
///
/// # Errors
///
/// [`Uncertified`] if node counts cannot certify that each level was found once.
///
/// # References
///
/// D. J. BenDaniel, C. B. Duke, Phys. Rev. 152, 683 (1966); D. F. Nelson, R. C. Miller,
/// D. A. Kleinman, Phys. Rev. B 35, 7770 (1987).
pub fn single(profile: &Profile<'_>, nonparabolic: bool) -> Result<SingleBands, Uncertified> {
    let mut finest = 2;
    let mut work = Workspace::default();
    loop {
        let grids: Vec<Vec<Cells>> = (finest - 2..=finest)
            .map(|halvings| profile.grid(COARSEST_STEP_NM, halvings))
            .collect();
        let mut ladder = |band| levels(&mut work, profile, &grids, band, nonparabolic);
        let bands = SingleBands {
            electron: ladder(Band::Electron)?,
            heavy: ladder(Band::Heavy)?,
            light: ladder(Band::Light)?,
            nodes: Nodes::of(profile, &grids[2]),
            coarser: Nodes::of(profile, &grids[1]),
            halvings: finest,
        };
        let settled = [&bands.electron, &bands.heavy, &bands.light]
            .into_iter()
            .flatten()
            .all(|level| {
                level.error_ev < WANTED_ERROR_EV && level.mass_correction < LARGEST_MASS_CORRECTION
            });
        if settled || finest == MOST_HALVINGS {
            return Ok(bands);
        }
        finest += 1;
    }
}

/// The matrix of one band on the finest grid that [`single`] used: symmetric, of three diagonals,
/// its eigenvalues energies in eV (of a hole too: an electron's energy, so that its levels are the
/// highest eigenvalues).
#[derive(Clone, Debug, PartialEq)]
pub struct Hamiltonian {
    /// Main diagonal, eV, one entry an inner node.
    pub diagonal: Vec<f64>,
    /// Second diagonal, eV, one entry fewer.
    pub second: Vec<f64>,
    /// The energy at which masses that depend on energy were taken: that of level 1, eV. `None`
    /// where they do not.
    pub masses_at_ev: Option<f64>,
}

/// The matrix W^−½ K W^−½ of a band, for a look from outside: the problem K φ = E W φ with W the
/// interval lengths of the nodes, made symmetric.
///
/// With masses that depend on energy the problem is not linear: the matrix at the energy of level 1
/// has that level as an eigenvalue, up to the error of the grid, and no other.
#[must_use]
pub fn hamiltonian(
    profile: &Profile<'_>,
    bands: &SingleBands,
    band: Band,
    nonparabolic: bool,
) -> Hamiltonian {
    let chain = chain(
        &profile.grid(COARSEST_STEP_NM, bands.halvings),
        band,
        nonparabolic,
    );
    let softened = chain.runs().iter().any(|run| run.softening > 0.0);
    let first_ev = bands.of(band).first().map(|level| level.energy_ev);
    let masses_at_ev = first_ev.filter(|_| softened);
    let (diagonal, second) = chain.matrix(band.sign() * masses_at_ev.unwrap_or(0.0));
    let signed = |entries: Vec<f64>| entries.into_iter().map(|it| band.sign() * it).collect();
    Hamiltonian {
        diagonal: signed(diagonal),
        second: signed(second),
        masses_at_ev,
    }
}

/// The chain of a band on a grid, energies counted upwards from the edge (holes upside down).
#[must_use]
fn chain(cells: &[Cells], band: Band, nonparabolic: bool) -> Chain {
    let runs = cells
        .iter()
        .map(|cell| {
            let softening = if band == Band::Electron && nonparabolic {
                // A layer without a gap has no meaning here; it must only not divide by zero.
                cell.numbers.edges.gap_ev().max(1e-3).recip()
            } else {
                0.0
            };
            Run {
                intervals: cell.intervals,
                length: cell.length_nm,
                stiffness: HBAR2_OVER_2M0_EV_NM2 / band.growth_mass(&cell.numbers),
                potential: band.sign() * (band.edge_ev(&cell.numbers) + cell.tilt_ev),
                softening,
            }
        })
        .collect();
    Chain::new(runs)
}

/// Energy (counted upwards from the band edge) up to which levels are looked for.
pub(super) fn limit(profile: &Profile<'_>, band: Band) -> f64 {
    let edges = profile
        .outside()
        .map(|numbers| band.sign() * band.edge_ev(numbers));
    if profile.slope_ev_nm == 0.0 {
        return edges.fold(f64::INFINITY, f64::min);
    }
    // In a field: up to the highest potential outside the wells.
    profile
        .sections
        .iter()
        .filter(|section| section.outside)
        .flat_map(|section: &Section| {
            let tilt = |position_nm| profile.slope_ev_nm * (position_nm - profile.centre_nm);
            [
                band.edge_ev(&profile.at(section, 0.0)) + tilt(section.bottom_nm),
                band.edge_ev(&profile.at(section, 1.0)) + tilt(section.top_nm),
            ]
        })
        .map(|edge| band.sign() * edge)
        .fold(f64::NEG_INFINITY, f64::max)
}

fn levels(
    work: &mut Workspace,
    profile: &Profile<'_>,
    grids: &[Vec<Cells>],
    band: Band,
    nonparabolic: bool,
) -> Result<Vec<Level>, Uncertified> {
    /// Levels this close above the limit on the finest grid may fall below it by extrapolation.
    const MARGIN_EV: f64 = 1e-3;

    let limit = limit(profile, band);
    let chains: Vec<Chain> = grids
        .iter()
        .map(|cells| chain(cells, band, nonparabolic))
        .collect();
    let count = chains[2]
        .count_below(limit + MARGIN_EV)
        .min(chains[0].nodes());
    let uncertified = |error: crate::numerics::chain::Uncertified| Uncertified {
        band: band.word(),
        level: error.level,
        energy_ev: band.sign() * error.energy,
    };
    let mut solve = |chain: &Chain, guesses: Option<&[f64]>| {
        chain.lowest_with(work, count, guesses).map_err(uncertified)
    };
    let energies = |states: &[crate::numerics::chain::State]| -> Vec<f64> {
        states.iter().map(|state| state.energy).collect()
    };
    let coarse = solve(&chains[0], None)?;
    // What a grid says of its own error leads to the next.
    let halved: Vec<f64> = coarse
        .iter()
        .map(|state| state.energy - 0.75 * chains[0].shift(state))
        .collect();
    let coarse = energies(&coarse);
    let half = solve(&chains[1], Some(&halved))?;
    let middle = energies(&half);
    let guesses: Vec<f64> = middle
        .iter()
        .zip(&coarse)
        .map(|(middle, coarse)| middle + (middle - coarse) / 4.0)
        .collect();
    let fine = solve(&chains[2], Some(&guesses))?;

    let extrapolated: Vec<(f64, f64)> = (0..count)
        .map(|index| {
            let first = middle[index] + (middle[index] - coarse[index]) / 3.0;
            let second = fine[index].energy + (fine[index].energy - middle[index]) / 3.0;
            // The correction that the last term made, and what rounding leaves.
            let error_ev = (second - first).abs() / 15.0 + 1e-9;
            (second + (second - first) / 15.0, error_ev)
        })
        .collect();
    let crowded = |index: usize| {
        let near = |other: usize| (middle[other] - middle[index]).abs() < CLUSTER_EV;
        (index > 0 && near(index - 1)) || (index + 1 < count && near(index + 1))
    };
    let found = fine
        .into_iter()
        .zip(half)
        .enumerate()
        .map(|(index, (fine, half))| {
            let (energy, error_ev) = extrapolated[index];
            let shares = Shares::new(profile, &grids[2], &chains[2], band, energy, &fine.envelope);
            let (mut reciprocal_mass, mut in_wells) = (shares.reciprocal_mass, shares.in_wells);
            let coarser = half.envelope;
            let half = Shares::new(profile, &grids[1], &chains[1], band, energy, &coarser);
            let correction = (reciprocal_mass - half.reciprocal_mass) / 3.0;
            let mass_correction = (correction / reciprocal_mass).abs();
            // Members of a cluster may be mixed differently on the two grids; where their wells are
            // alike that does not matter.
            if !crowded(index) || mass_correction < 3e-3 {
                reciprocal_mass += correction;
            }
            if !crowded(index) {
                in_wells += (in_wells - half.in_wells) / 3.0;
            }
            Level {
                energy_ev: band.sign() * energy,
                in_plane_mass: reciprocal_mass.recip(),
                error_ev,
                in_wells,
                near_edge: false,
                mass_bounded: shares.mass_bounded,
                envelope: fine.envelope,
                coarser,
                crowded: crowded(index),
                mass_correction,
            }
        });
    let in_field = profile.slope_ev_nm != 0.0;
    let mut levels: Vec<Level> = found
        .filter(|level| {
            if in_field {
                level.in_wells > 0.5
            } else {
                band.sign() * level.energy_ev < limit
            }
        })
        .map(|level| Level {
            near_edge: !in_field && (limit - band.sign() * level.energy_ev) < NEAR_EDGE_EV,
            ..level
        })
        .collect();
    // Levels of far wells nearer to each other than the grids are may cross in the extrapolation.
    levels.sort_by(|a, b| (band.sign() * a.energy_ev).total_cmp(&(band.sign() * b.energy_ev)));
    Ok(levels)
}

/// What follows from an envelope.
struct Shares {
    /// <φ| 1/m |φ> in the plane.
    reciprocal_mass: f64,
    /// Share inside the wells and the steps that belong to them.
    in_wells: f64,
    /// Whether the energy-dependent mass meets its lower bound somewhere.
    mass_bounded: bool,
}

impl Shares {
    fn new(
        profile: &Profile<'_>,
        cells: &[Cells],
        chain: &Chain,
        band: Band,
        energy: f64,
        envelope: &[f64],
    ) -> Self {
        let at = |node: usize| {
            if node == 0 {
                0.0
            } else {
                envelope.get(node - 1).map_or(0.0, |value| value * value)
            }
        };
        let mut shares = Self {
            reciprocal_mass: 0.0,
            in_wells: 0.0,
            mass_bounded: false,
        };
        let mut node = 0;
        for (cell, run) in cells.iter().zip(chain.runs()) {
            let mut share = 0.0;
            for _ in 0..cell.intervals {
                share += 0.5 * cell.length_nm * (at(node) + at(node + 1));
                node += 1;
            }
            let factor = run.factor(energy);
            shares.mass_bounded |= run.softening > 0.0 && factor <= LEAST_SOFTENING_FACTOR;
            shares.reciprocal_mass += share * band.reciprocal_plane_mass(&cell.numbers)
                / if run.softening > 0.0 { factor } else { 1.0 };
            if profile.sections[cell.section].in_wells {
                shares.in_wells += share;
            }
        }
        shares
    }
}
