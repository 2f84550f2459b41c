//! What gaps and strains mean: parameter data, and the lattice that layers grow on.

use super::Impossible;
use super::shares::{distance, nearest};
use crate::materials::{Composition, Offsets, Parameters, SolveError, solve_composition};
use crate::numerics::roots::bracketed_root;
use crate::structure::Substance;
use crate::units::{photon_ev, wavelength_nm};

/// Temperature at which gaps and strains are meant, K.
const PRESCRIPTION_K: f64 = 300.0;
/// Compositions closer than this in every share are the same to a reader of the file.
const SAME_SHARE: f64 = 1e-4;

/// The parameter data and the substrate of a structure.
#[derive(Clone, Copy, Debug)]
pub(super) struct Ground<'a> {
    pub(super) parameters: &'a Parameters,
    lattice_nm: f64,
}

impl<'a> Ground<'a> {
    pub(super) fn new(parameters: &'a Parameters, substrate: &Substance) -> Self {
        let crystal = substrate.crystal(parameters, PRESCRIPTION_K, Offsets::Table);
        Self {
            parameters,
            lattice_nm: crystal.lattice_nm,
        }
    }

    /// Gap of the strained bulk layer as a wavelength (nm) and in-plane strain (negative is
    /// compressive) of a composition.
    pub(super) fn gap_and_strain(&self, composition: &Composition) -> (f64, f64) {
        let edges = self
            .parameters
            .crystal(composition, PRESCRIPTION_K, Offsets::Table)
            .on(self.lattice_nm);
        (wavelength_nm(edges.gap_ev()), edges.in_plane_strain)
    }

    /// The composition of the elements of `original` with a gap (as a wavelength, nm), a strain, or
    /// both; of several the one nearest to it.
    pub(super) fn with_gap_and_strain(
        &self,
        original: &Composition,
        gap_nm: Option<f64>,
        strain: Option<f64>,
    ) -> Result<Composition, Impossible> {
        match self.solved(original, gap_nm, strain) {
            Err(SolveError::Several { solutions, .. }) => nearest(original, solutions),
            other => Ok(other?),
        }
    }

    /// Whether a reader of a file that asks for the gap, the strain, or both of a composition comes
    /// back to it.
    pub(super) fn is_found_by(&self, composition: &Composition, gap: bool, strain: bool) -> bool {
        let (gap_nm, in_plane) = self.gap_and_strain(composition);
        let back = self.solved(
            composition,
            gap.then_some(gap_nm),
            strain.then_some(in_plane),
        );
        back.is_ok_and(|back| distance(&back, composition) < SAME_SHARE)
    }

    fn solved(
        &self,
        original: &Composition,
        gap_nm: Option<f64>,
        strain: Option<f64>,
    ) -> Result<Composition, SolveError> {
        let elements = original.elements();
        solve_composition(self.parameters, &elements, self.lattice_nm, gap_nm, strain)
    }

    /// The composition on a straight line that has a strain.
    pub(super) fn with_strain_on(
        &self,
        line: &[Composition; 2],
        strain: f64,
    ) -> Result<Composition, Impossible> {
        let lattice_nm = |composition: &Composition| {
            self.parameters
                .crystal(composition, PRESCRIPTION_K, Offsets::Table)
                .lattice_nm
        };
        // Vegard's law: the lattice constant is linear along the line.
        let wanted_nm = self.lattice_nm / (1.0 + strain);
        let ends = line.map(|end| lattice_nm(&end));
        let share = (wanted_nm - ends[0]) / (ends[1] - ends[0]);
        if !(-1e-9..=1.0 + 1e-9).contains(&share) {
            return Err(Impossible::Composition(format!(
                "no {} of that share has that strain",
                line[0].towards(&line[1], 0.5).family()
            )));
        }
        Ok(line[0].towards(&line[1], share.clamp(0.0, 1.0)))
    }

    /// The composition on a straight line that has a gap (as a wavelength, nm); of several the one
    /// nearest to `original`.
    pub(super) fn with_gap_on(
        &self,
        line: &[Composition; 2],
        gap_nm: f64,
        original: &Composition,
    ) -> Result<Composition, Impossible> {
        /// Points at which a line is looked at before roots are refined.
        const SCAN: usize = 64;
        let at = |share: f64| line[0].towards(&line[1], share);
        let target_ev = photon_ev(gap_nm);
        let miss = |share: f64| photon_ev(self.gap_and_strain(&at(share)).0) - target_ev;
        let misses: Vec<f64> = (0..=SCAN)
            .map(|point| miss(point as f64 / SCAN as f64))
            .collect();
        let found = (0..SCAN)
            .filter(|&point| (misses[point] <= 0.0) != (misses[point + 1] <= 0.0))
            .map(|point| {
                let share = |point: usize| point as f64 / SCAN as f64;
                at(bracketed_root(miss, share(point), share(point + 1), 1e-12))
            })
            .collect();
        nearest(original, found)
    }
}
