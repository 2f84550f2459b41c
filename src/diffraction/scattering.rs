//! How strongly a III-V crystal scatters X-rays into a (00l) reflection.
//!
//! # Equation
//!
//! ```text
//!  f(s)  = Σ a_n exp(−b_n s²) + c + f' + i f'' ,   s = sin θ/λ
//!  F_00l = 4 [ f_III + (−1)^(l/2) f_V ]            for even l; odd l do not reflect
//! ```
//!
//! with the factors of each sublattice averaged by composition. Thermal motion is left out: it
//! lowers all layers alike, by some ten per cent at room temperature.
//!
//! # References
//!
//! Factors: D. Waasmaier, A. Kirfel, Acta Cryst. A 51, 416 (1995), read from a general-purpose
//! library of crystallography. Dispersion at Cu Kα1: C. T. Chantler, J. Phys. Chem. Ref. Data 24,
//! 71 (1995), read from the tables of a general-purpose library.

use super::Reflection;
use crate::materials::{Composition, Element};
use nalgebra::Complex;

/// Wavelength of Cu Kα1, nm (G. Hölzer et al., Phys. Rev. A 56, 4554 (1997); the trade's value).
pub const COPPER_K_ALPHA1_NM: f64 = 0.1540593;
/// Classical electron radius, nm (CODATA 2022).
pub(super) const ELECTRON_RADIUS_NM: f64 = 2.8179403205e-6;

/// Scattering factor of one element.
struct Factor {
    /// Heights of the Gaussians, electrons.
    a: [f64; 5],
    /// Their widths, Å².
    b: [f64; 5],
    /// Constant, electrons.
    c: f64,
    /// Dispersion f' and f'' at Cu Kα1, electrons.
    dispersion: (f64, f64),
}

impl Factor {
    const fn new(a: [f64; 5], b: [f64; 5], c: f64, dispersion: (f64, f64)) -> Self {
        Self {
            a,
            b,
            c,
            dispersion,
        }
    }
}

fn factor(element: Element) -> Factor {
    match element {
        Element::Al => Factor::new(
            [4.730796, 2.313951, 1.54198, 1.117564, 3.154754],
            [3.628931, 43.051167, 0.09596, 108.932388, 1.555918],
            0.139509,
            (0.207, 0.245),
        ),
        Element::Ga => Factor::new(
            [15.758946, 6.841123, 4.121016, 2.714681, 2.395246],
            [3.121754, 0.226057, 12.482196, 66.203621, 0.007238],
            -0.847395,
            (-1.291, 0.770),
        ),
        Element::In => Factor::new(
            [6.196477, 18.816183, 4.050479, 1.638929, 17.962912],
            [0.042072, 6.695665, 31.00979, 103.284348, 0.610714],
            0.333097,
            (-0.018, 5.018),
        ),
        Element::P => Factor::new(
            [1.950541, 4.14693, 1.49456, 1.522042, 5.729711],
            [0.908139, 27.044952, 0.07128, 67.520187, 1.981173],
            0.155233,
            (0.286, 0.430),
        ),
        Element::As => Factor::new(
            [17.025642, 4.503441, 3.715904, 3.9372, 6.790175],
            [2.597739, 0.003012, 14.272119, 50.437996, 0.193015],
            -2.984117,
            (-0.938, 0.999),
        ),
        Element::Sb => Factor::new(
            [5.394956, 6.54957, 19.650681, 1.82782, 17.867832],
            [33.326523, 0.030974, 5.564929, 87.130966, 0.523992],
            -0.290506,
            (-0.266, 5.855),
        ),
    }
}

impl Factor {
    /// f at s = sin θ/λ, 1/nm.
    fn at(&self, s_per_nm: f64) -> Complex<f64> {
        let s2 = (0.1 * s_per_nm) * (0.1 * s_per_nm);
        let gaussians: f64 = self
            .a
            .iter()
            .zip(self.b)
            .map(|(a, b)| a * (-b * s2).exp())
            .sum();
        let (real, imaginary) = self.dispersion;
        Complex::new(gaussians + self.c + real, imaginary)
    }
}

/// Structure factors of one unit cell of eight atoms.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct StructureFactor {
    /// Of the reflection, electrons.
    pub(super) reflected: Complex<f64>,
    /// Imaginary part of the forward one: what is absorbed, electrons.
    pub(super) absorbed: f64,
}

/// The structure factor of a composition for a reflection of planes `lattice_nm`/l apart.
pub(super) fn structure_factor(
    composition: &Composition,
    reflection: Reflection,
    lattice_nm: f64,
) -> StructureFactor {
    let s_per_nm = 0.5 * f64::from(reflection.order()) / lattice_nm;
    let sublattice = |is_group_iii: bool| -> Complex<f64> {
        Element::ALL
            .into_iter()
            .filter(|element| element.is_group_iii() == is_group_iii)
            .map(|element| factor(element).at(s_per_nm) * composition.fraction(element))
            .sum()
    };
    let (group_iii, group_v) = (sublattice(true), sublattice(false));
    let in_step = reflection.order().is_multiple_of(4);
    StructureFactor {
        reflected: (if in_step {
            group_iii + group_v
        } else {
            group_iii - group_v
        }) * 4.0,
        absorbed: 4.0 * (group_iii + group_v).im,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Forward all electrons scatter together.
    #[test]
    fn forward_factors_are_numbers_of_electrons() {
        for (element, electrons) in [
            (Element::Al, 13.0),
            (Element::P, 15.0),
            (Element::Ga, 31.0),
            (Element::As, 33.0),
            (Element::In, 49.0),
            (Element::Sb, 51.0),
        ] {
            let factor = factor(element);
            let forward = factor.at(0.0).re - factor.dispersion.0;
            assert!((forward - electrons).abs() < 0.02, "{element:?}: {forward}");
            // Fewer and fewer scatter in step as the angle grows.
            assert!(factor.at(3.5).re < factor.at(2.0).re);
        }
    }

    /// Gallium and arsenic are neighbours: 002 of GaAs is all but extinct, 004 is strong.
    #[test]
    fn the_sublattices_of_gaas_cancel_in_002_and_add_in_004() {
        let gaas = Composition::parse("GaAs").expect("a formula");
        let size = |order: &str| {
            let reflection = order.parse().expect("a reflection");
            structure_factor(&gaas, reflection, 0.565325)
                .reflected
                .norm()
        };
        assert!(size("002") < 0.1 * size("004"));
    }
}
