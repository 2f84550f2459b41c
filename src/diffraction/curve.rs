//! The rocking curve of a stack on its substrate.
//!
//! # Equation
//!
//! The reflected amplitude R at the top of a growing crystal obeys, for the two waves of a
//! symmetric reflection,
//!
//! ```text
//!  dR/dz = −i γ (1 + R²) + i κ R ,      κ = (4π/λ) sin θ − 2π l/a⊥ + i µ/sin θ ,
//!  γ = r_e λ F/(V sin θ)
//! ```
//!
//! with F the structure factor of a cell of volume V and µ the absorption. Without R² (a beam that
//! is not weakened by reflection) this is the kinematical sum over all planes; with it the beam dies
//! out within 1/|γ|, some µm, and no more is reflected than came. Each slice of one composition has
//! a closed form: with the roots R₁₂ of the right side, (R − R₁)/(R − R₂) turns by exp(−iγ(R₁ − R₂) t).
//!
//! The kinematical curve is right for thin strained layers and too high near the substrate's peak,
//! where thick layers reflect most of the beam. Both are given as intensity over incident intensity,
//! broadened to [`RESOLUTION_ARCSEC`].
//!
//! # References
//!
//! S. Takagi, Acta Cryst. 15, 1311 (1962); D. Taupin, Bull. Soc. Fr. Minéral. Cristallogr. 87, 469
//! (1964); V. S. Speriosu, T. Vreeland, J. Appl. Phys. 56, 1591 (1984) (kinematical); W. J. Bartels,
//! J. Hornstra, D. J. W. Lobeek, Acta Cryst. A 42, 539 (1986) (layer by layer).

use super::{ARCSEC, COPPER_K_ALPHA1_NM, Reflection};
use nalgebra::Complex;
use std::f64::consts::{LN_2, PI};

/// The imaginary unit.
const I: Complex<f64> = Complex::new(0.0, 1.0);
/// Full width at half maximum of the diffractometer, arcsec (common practice: a four-crystal
/// monochromator and an open detector).
pub const RESOLUTION_ARCSEC: f64 = 12.0;
/// Distance of the angles computed, arcsec: well below the fringes of a whole epitaxy.
const STEP_ARCSEC: f64 = 1.0;
/// Every so many of them one is kept.
const KEPT: usize = 4;
/// Air on either side of what is listed, arcsec.
const MARGIN_ARCSEC: f64 = 800.0;
/// Furthest from the substrate's peak, arcsec.
const FURTHEST_ARCSEC: f64 = 40_000.0;

/// A slice of one composition.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Slice {
    pub(super) thickness_nm: f64,
    /// Lattice constant along growth.
    pub(super) lattice_nm: f64,
    /// C11 and C12.
    pub(super) stiffness_gpa: [f64; 2],
    /// γ.
    pub(super) reflectivity_per_nm: Complex<f64>,
    /// µ/sin θ.
    pub(super) absorption_per_nm: f64,
}

impl Slice {
    /// κ at sin θ, 1/nm.
    fn detuning(&self, reflection: Reflection, sine: f64) -> Complex<f64> {
        let off = 4.0 * PI * sine / COPPER_K_ALPHA1_NM
            - 2.0 * PI * f64::from(reflection.order()) / self.lattice_nm;
        Complex::new(off, self.absorption_per_nm)
    }

    /// The amplitude at its top from that at its bottom, the beam not weakened by reflection.
    pub(super) fn kinematical(
        &self,
        below: Complex<f64>,
        reflection: Reflection,
        sine: f64,
    ) -> Complex<f64> {
        let kappa = self.detuning(reflection, sine);
        let turn = (I * kappa * self.thickness_nm).exp();
        // (e^{iκt} − 1)/κ, the sine taken apart so that nothing cancels near κ = 0.
        let half = kappa * (0.5 * self.thickness_nm);
        let own = if half.norm() < 1e-6 {
            I * self.thickness_nm
        } else {
            I * (I * half).exp() * half.sin() * 2.0 / kappa
        };
        below * turn - self.reflectivity_per_nm * own
    }

    /// Of infinite depth, kinematical.
    fn kinematical_depth(&self, reflection: Reflection, sine: f64) -> Complex<f64> {
        self.reflectivity_per_nm / self.detuning(reflection, sine)
    }

    /// The roots R₁ and R₂ of γ(1 + R²) = κR, the one that a deep crystal reaches first.
    fn roots(&self, reflection: Reflection, sine: f64) -> [Complex<f64>; 2] {
        let x = self.detuning(reflection, sine) / (self.reflectivity_per_nm * 2.0);
        let root = (x * x - 1.0).sqrt();
        let (one, other) = (x + root, x - root);
        // Their product is 1: the smaller from the larger loses no digit.
        let larger = if one.norm() > other.norm() {
            one
        } else {
            other
        };
        [larger.inv(), larger]
    }

    /// The amplitude at its top from that at its bottom.
    fn reflected(&self, below: Complex<f64>, reflection: Reflection, sine: f64) -> Complex<f64> {
        let [stable, other] = self.roots(reflection, sine);
        let phase = -I * self.reflectivity_per_nm * (stable - other) * self.thickness_nm;
        let ratio = (below - stable) / (below - other) * phase.exp();
        (stable - ratio * other) / (-ratio + 1.0)
    }
}

/// One angle of a rocking curve.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CurvePoint {
    /// ω less that of the substrate's peak, arcsec.
    pub offset_arcsec: f64,
    /// Reflected over incident intensity.
    pub intensity: f64,
    /// The same without extinction (kinematical).
    pub kinematical: f64,
}

/// A rocking curve, by rising angle.
#[derive(Clone, Debug, PartialEq)]
pub struct RockingCurve {
    /// Its points, equally spaced.
    pub points: Vec<CurvePoint>,
}

/// The curve of slices on a substrate between two offsets and a margin.
pub(super) fn of(
    substrate: &Slice,
    slices: &[Slice],
    reflection: Reflection,
    substrate_angle: f64,
    (low_arcsec, high_arcsec): (f64, f64),
) -> RockingCurve {
    let low = (low_arcsec - MARGIN_ARCSEC).max(-FURTHEST_ARCSEC);
    let high = (high_arcsec + MARGIN_ARCSEC).min(FURTHEST_ARCSEC);
    let reach = (2.0 * RESOLUTION_ARCSEC / STEP_ARCSEC) as usize;
    // Whole steps from the substrate's peak, which so is one of the angles.
    let first = (low / STEP_ARCSEC).floor() - reach as f64;
    let count = ((high - low) / STEP_ARCSEC) as usize + 2 * reach + 1;
    let computed: Vec<CurvePoint> = (0..count)
        .map(|index| {
            let offset_arcsec = (first + index as f64) * STEP_ARCSEC;
            let angle = substrate_angle + offset_arcsec / ARCSEC;
            point(substrate, slices, reflection, offset_arcsec, angle.sin())
        })
        .collect();
    let sigma = RESOLUTION_ARCSEC / (2.0 * (2.0 * LN_2).sqrt());
    let weights: Vec<f64> = (0..=2 * reach)
        .map(|place| {
            let off = (place as f64 - reach as f64) * STEP_ARCSEC / sigma;
            (-0.5 * off * off).exp()
        })
        .collect();
    let total: f64 = weights.iter().sum();
    let points = computed
        .windows(2 * reach + 1)
        .step_by(KEPT)
        .map(|window| {
            let mean = |of: fn(&CurvePoint) -> f64| {
                let sum: f64 = window.iter().zip(&weights).map(|(it, w)| of(it) * w).sum();
                sum / total
            };
            CurvePoint {
                offset_arcsec: window[reach].offset_arcsec,
                intensity: mean(|it| it.intensity),
                kinematical: mean(|it| it.kinematical),
            }
        })
        .collect();
    RockingCurve { points }
}

fn point(
    substrate: &Slice,
    slices: &[Slice],
    reflection: Reflection,
    offset_arcsec: f64,
    sine: f64,
) -> CurvePoint {
    let [mut reflected, _] = substrate.roots(reflection, sine);
    let mut kinematical = substrate.kinematical_depth(reflection, sine);
    for slice in slices {
        reflected = slice.reflected(reflected, reflection, sine);
        kinematical = slice.kinematical(kinematical, reflection, sine);
    }
    CurvePoint {
        offset_arcsec,
        intensity: reflected.norm_sqr(),
        kinematical: kinematical.norm_sqr(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn slice(thickness_nm: f64) -> Slice {
        Slice {
            thickness_nm,
            lattice_nm: 0.57,
            stiffness_gpa: [118.0, 54.0],
            reflectivity_per_nm: Complex::new(7e-4, 2e-5),
            absorption_per_nm: 1.2e-4,
        }
    }

    fn sine(offset: f64) -> f64 {
        let angle = Reflection::DEFAULT.bragg_angle(0.57).expect("a reflection");
        (angle + offset / ARCSEC).sin()
    }

    /// The closed form against a fine Runge-Kutta solution of the equation that it solves.
    #[test]
    fn a_slice_solves_its_equation() {
        let slice = slice(400.0);
        for offset in [-300.0, -20.0, 0.0, 3.0, 150.0] {
            let kappa = slice.detuning(Reflection::DEFAULT, sine(offset));
            let gamma = slice.reflectivity_per_nm;
            let slope = |r: Complex<f64>| -I * gamma * (r * r + 1.0) + I * kappa * r;
            let mut r = Complex::new(0.2, -0.1);
            let below = r;
            let steps = 4000;
            let h = slice.thickness_nm / f64::from(steps);
            for _ in 0..steps {
                let k1 = slope(r);
                let k2 = slope(r + k1 * (0.5 * h));
                let k3 = slope(r + k2 * (0.5 * h));
                let k4 = slope(r + k3 * h);
                r += (k1 + k2 * 2.0 + k3 * 2.0 + k4) * (h / 6.0);
            }
            let closed = slice.reflected(below, Reflection::DEFAULT, sine(offset));
            assert!((closed - r).norm() < 1e-8, "{offset}: {closed} {r}");
        }
    }

    /// A deep crystal reflects no more than all, nearly all at its peak, and a thick slice of its
    /// own kind on it changes nothing.
    #[test]
    fn a_deep_crystal_reflects_at_most_everything() {
        for offset in -400..=400 {
            let sine = sine(0.1 * f64::from(offset));
            let [deep, _] = slice(0.0).roots(Reflection::DEFAULT, sine);
            assert!(deep.norm() < 1.0);
            let on_itself = slice(3000.0).reflected(deep, Reflection::DEFAULT, sine);
            assert!((on_itself - deep).norm() < 1e-12);
        }
        let [peak, _] = slice(0.0).roots(Reflection::DEFAULT, sine(0.0));
        assert!(peak.norm_sqr() > 0.6);
    }

    /// Where little is reflected the kinematical sum is the limit of the whole.
    #[test]
    fn thin_slices_are_kinematical() {
        let thin = slice(5.0);
        let nothing = Complex::new(0.0, 0.0);
        for offset in [-2000.0, -100.0, 0.0, 700.0] {
            let sine = sine(offset);
            let whole = thin.reflected(nothing, Reflection::DEFAULT, sine);
            let sum = thin.kinematical(nothing, Reflection::DEFAULT, sine);
            assert!(
                (whole - sum).norm() < 1e-4 * sum.norm(),
                "{offset}: {whole} {sum}"
            );
        }
    }

    /// A slice cut in two is the slice.
    #[test]
    fn slices_follow_each_other() {
        for offset in [-500.0, 2.0, 90.0] {
            let sine = sine(offset);
            let below = Complex::new(0.1, 0.3);
            let whole = slice(70.0).kinematical(below, Reflection::DEFAULT, sine);
            let half = slice(30.0).kinematical(below, Reflection::DEFAULT, sine);
            let both = slice(40.0).kinematical(half, Reflection::DEFAULT, sine);
            assert!((whole - both).norm() < 1e-13);
        }
    }
}
