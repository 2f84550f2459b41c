//! The mismatch of a layer to its substrate, in the two kinds that orders and X-rays speak of.
//!
//! # Equation
//!
//! ```text
//!  relaxed        f  = (a − a_s)/a_s       of the free alloy: what a composition has
//!  perpendicular  f⊥ = (a⊥ − a_s)/a_s      of the coherent layer: what a 004 reflection sees
//!  in-plane strain ε∥ = (a_s − a)/a = −f/(1 + f)
//!
//!  a⊥ = a (1 − 2 (C12/C11) ε∥)    so that    f⊥ = (1 + 2 C12/C11) f    exactly
//! ```
//!
//! The two differ by a factor near 2: a number of ppm without its kind means nothing. Both are
//! positive where the free layer is wider than the substrate, which is compressive.
//!
//! # Reference
//!
//! J. Hornstra, W. J. Bartels, J. Cryst. Growth 44, 513 (1978), for (001).

use super::{Crystal, Sense};

/// Mismatch of a coherent layer to a (001) substrate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Mismatch {
    /// (a − a_s)/a_s of the relaxed layer; positive is compressive.
    pub relaxed: f64,
    /// (a⊥ − a_s)/a_s of the coherent layer; positive is compressive.
    pub perpendicular: f64,
}

impl Mismatch {
    /// The mismatch of a crystal to a substrate of the lattice constant `substrate_lattice_nm`.
    #[must_use]
    pub fn of(crystal: &Crystal, substrate_lattice_nm: f64) -> Self {
        let relaxed = (crystal.lattice_nm - substrate_lattice_nm) / substrate_lattice_nm;
        Self::from_relaxed(relaxed, crystal.c12_gpa / crystal.c11_gpa)
    }

    /// From the perpendicular mismatch of a layer of the stiffness ratio C12/C11.
    #[must_use]
    pub fn from_perpendicular(perpendicular: f64, c12_over_c11: f64) -> Self {
        Self {
            relaxed: perpendicular / (1.0 + 2.0 * c12_over_c11),
            perpendicular,
        }
    }

    /// From the relaxed mismatch of a layer of the stiffness ratio C12/C11.
    #[must_use]
    pub fn from_relaxed(relaxed: f64, c12_over_c11: f64) -> Self {
        Self {
            relaxed,
            perpendicular: (1.0 + 2.0 * c12_over_c11) * relaxed,
        }
    }

    /// In-plane strain (a_s − a)/a of the coherent layer; negative is compressive.
    #[must_use]
    pub fn in_plane_strain(&self) -> f64 {
        -self.relaxed / (1.0 + self.relaxed)
    }

    /// Size of the in-plane strain, %.
    #[must_use]
    pub fn strain_percent(&self) -> f64 {
        100.0 * self.in_plane_strain().abs()
    }

    /// Size of the relaxed mismatch, ppm.
    #[must_use]
    pub fn relaxed_ppm(&self) -> f64 {
        1e6 * self.relaxed.abs()
    }

    /// Size of the perpendicular mismatch, ppm.
    #[must_use]
    pub fn perpendicular_ppm(&self) -> f64 {
        1e6 * self.perpendicular.abs()
    }

    /// The sense of both; below 1e-9 there is none.
    #[must_use]
    pub fn sense(&self) -> Sense {
        if self.relaxed.abs() < 1e-9 {
            Sense::Matched
        } else if self.relaxed > 0.0 {
            Sense::Compressive
        } else {
            Sense::Tensile
        }
    }
}

impl Crystal {
    /// Lattice constant along growth of the layer grown coherently on a (001) substrate, nm.
    #[must_use]
    pub fn perpendicular_lattice_nm(&self, substrate_lattice_nm: f64) -> f64 {
        substrate_lattice_nm * (1.0 + Mismatch::of(self, substrate_lattice_nm).perpendicular)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::materials::{Composition, Offsets, Parameters};

    fn crystal(formula: &str) -> Crystal {
        let composition = Composition::parse(formula).expect("a formula");
        Parameters::shipped().crystal(&composition, 300.0, Offsets::Table)
    }

    /// The two kinds follow from the strain tensor that the band edges are made with.
    #[test]
    fn both_kinds_agree_with_the_strain_of_the_band_edges() {
        for (film, substrate) in [
            ("In0.2Ga0.8As", "GaAs"),
            ("GaAs0.8P0.2", "GaAs"),
            ("In0.7Ga0.3As", "InP"),
            ("GaSb", "InAs"),
        ] {
            let (film, substrate_nm) = (crystal(film), crystal(substrate).lattice_nm);
            let mismatch = Mismatch::of(&film, substrate_nm);
            let edges = film.on(substrate_nm);
            assert!((mismatch.in_plane_strain() - edges.in_plane_strain).abs() < 1e-15);
            assert_eq!(mismatch.sense(), edges.sense());
            let perpendicular_strain = -2.0 * film.c12_gpa / film.c11_gpa * edges.in_plane_strain;
            let stretched_nm = film.lattice_nm * (1.0 + perpendicular_strain);
            assert!((film.perpendicular_lattice_nm(substrate_nm) - stretched_nm).abs() < 1e-15);
        }
    }

    #[test]
    fn each_kind_is_found_from_the_other() {
        let film = crystal("In0.6Ga0.4As");
        let mismatch = Mismatch::of(&film, crystal("InP").lattice_nm);
        let ratio = film.c12_gpa / film.c11_gpa;
        let from_relaxed = Mismatch::from_relaxed(mismatch.relaxed, ratio);
        let from_perpendicular = Mismatch::from_perpendicular(mismatch.perpendicular, ratio);
        assert!((from_relaxed.perpendicular - mismatch.perpendicular).abs() < 1e-16);
        assert!((from_perpendicular.relaxed - mismatch.relaxed).abs() < 1e-16);
    }
}
