//! Subbands with heavy, light and split-off holes mixed.

mod along;
mod centre;
mod form;
mod matrix;

pub use along::LARGEST_WAVE_NUMBER_PER_NM;
pub use form::interval;
pub use matrix::valence_hamiltonian;

use rayon::prelude::*;

use super::{CLUSTER_EV, COARSEST_STEP_NM, Level, SingleBands, Uncertified};
use crate::numerics::clusters::clusters;
use crate::profile::Profile;
use along::{Track, extrapolated, follow, wave_numbers};
use centre::Centre;
use form::Grid;

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

impl From<[f64; 3]> for Projection {
    fn from([heavy, light, split_off]: [f64; 3]) -> Self {
        Self {
            heavy,
            light,
            split_off,
        }
    }
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
    let electron_ev: Vec<f64> = single
        .electron
        .iter()
        .map(|level| level.energy_ev)
        .collect();
    let electron_clusters = clusters(&electron_ev, CLUSTER_EV);
    let steps = tracks.iter().map(Vec::len).min().unwrap_or(0);
    let blocks: Vec<Vec<Slice>> = tracks
        .chunks(2)
        .map(|pair| {
            (0..steps)
                .map(|at| extrapolated(&pair[0][at], &pair[1][at], &electron_clusters))
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

#[cfg(test)]
mod tests {
    use super::*;

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
}
