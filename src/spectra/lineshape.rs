//! The homogeneous line and the step that it rounds.

use crate::structure::Lineshape;
use crate::units::HBAR_EV_S;

/// A line of unit area: its shape and its half width at half maximum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Line {
    /// Its shape.
    pub shape: Lineshape,
    /// Half width at half maximum, eV.
    pub half_width_ev: f64,
}

/// arccosh 2: a sech of scale g falls to one half at g arccosh 2.
const ARCCOSH_2: f64 = 1.316_957_896_924_816_6;

impl Line {
    /// The line of an intraband relaxation time τ in fs: its half width is ħ/τ.
    #[must_use]
    pub fn new(shape: Lineshape, intraband_fs: f64) -> Self {
        Self {
            shape,
            half_width_ev: HBAR_EV_S / (intraband_fs * 1e-15),
        }
    }

    /// The natural scale: g of the sech, σ of the Gaussian, Γ of the Lorentzian, eV.
    #[must_use]
    pub fn scale_ev(&self) -> f64 {
        match self.shape {
            Lineshape::Sech => self.half_width_ev / ARCCOSH_2,
            Lineshape::Gaussian => self.half_width_ev / (2.0 * std::f64::consts::LN_2).sqrt(),
            Lineshape::Lorentzian => self.half_width_ev,
        }
    }

    /// The line at a distance `x_ev` from its centre, per eV.
    ///
    /// ```text
    ///  sech 1/(π g) sech(x/g)     Gaussian exp(−x²/2σ²)/(σ √2π)     Lorentzian (Γ/π)/(x² + Γ²)
    /// ```
    #[must_use]
    pub fn density_per_ev(&self, x_ev: f64) -> f64 {
        use std::f64::consts::PI;
        let scale = self.scale_ev();
        let x = x_ev / scale;
        match self.shape {
            Lineshape::Sech => {
                let small = (-x.abs()).exp();
                2.0 * small / (1.0 + small * small) / (PI * scale)
            }
            Lineshape::Gaussian => (-0.5 * x * x).exp() / (scale * (2.0 * PI).sqrt()),
            Lineshape::Lorentzian => 1.0 / (PI * scale * (1.0 + x * x)),
        }
    }

    /// The step of the density of states rounded by the line: its integral from −∞ to `x_ev`.
    #[must_use]
    pub fn step(&self, x_ev: f64) -> f64 {
        use std::f64::consts::{FRAC_1_SQRT_2, PI};
        let x = x_ev / self.scale_ev();
        match self.shape {
            Lineshape::Sech => 2.0 / PI * x.exp().atan(),
            Lineshape::Gaussian => 0.5 * libm::erfc(-x * FRAC_1_SQRT_2),
            // 1/2 + atan(x)/π loses its digits far below; atan2 keeps them.
            Lineshape::Lorentzian => 1.0f64.atan2(-x) / PI,
        }
    }

    /// The line that emission uses at kT in eV.
    ///
    /// Below an edge emission goes as the rounded step times exp(−x/kT): the tail of a Lorentzian,
    /// or of a sech with g > 0.8 kT, makes it diverge. There the Gaussian of the same half width
    /// takes its place.
    #[must_use]
    pub fn for_emission(self, thermal_ev: f64) -> Self {
        let diverges = match self.shape {
            Lineshape::Lorentzian => true,
            Lineshape::Sech => self.scale_ev() > 0.8 * thermal_ev,
            Lineshape::Gaussian => false,
        };
        if diverges {
            Self {
                shape: Lineshape::Gaussian,
                ..self
            }
        } else {
            self
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::numerics::quadrature::panels;

    const SHAPES: [Lineshape; 3] = [Lineshape::Sech, Lineshape::Gaussian, Lineshape::Lorentzian];

    #[test]
    fn half_width_is_that_of_the_relaxation_time_and_the_half_maximum() {
        for shape in SHAPES {
            let line = Line::new(shape, 100.0);
            assert!((line.half_width_ev - 6.582_119_569e-3).abs() < 1e-12);
            let ratio = line.density_per_ev(line.half_width_ev) / line.density_per_ev(0.0);
            assert!((ratio - 0.5).abs() < 1e-14, "{shape:?} {ratio}");
        }
    }

    /// The step is the integral of the line: area 1, one half at the edge, its slope the line.
    #[test]
    fn the_step_is_the_integral_of_the_line() {
        for shape in SHAPES {
            for femtoseconds in [20.0, 100.0, 1000.0] {
                let line = Line::new(shape, femtoseconds);
                let width = line.half_width_ev;
                assert!((line.step(0.0) - 0.5).abs() < 1e-15);
                assert!((line.step(3.0 * width) + line.step(-3.0 * width) - 1.0).abs() < 1e-14);
                let area: f64 = panels(&[-2.0 * width, 0.0, 5.0 * width], 0.5 * width)
                    .iter()
                    .map(|&(x, w)| w * line.density_per_ev(x))
                    .sum();
                let steps = line.step(5.0 * width) - line.step(-2.0 * width);
                assert!((area - steps).abs() < 1e-12, "{shape:?}: {area} {steps}");
            }
            assert!(Line::new(shape, 100.0).step(1e3) > 0.999_99);
            assert!(Line::new(shape, 100.0).step(-1e3) < 1e-5);
        }
    }

    #[test]
    fn emission_keeps_a_line_whose_tail_it_can_bear() {
        let kt = 0.025;
        assert_eq!(
            Line::new(Lineshape::Sech, 100.0).for_emission(kt).shape,
            Lineshape::Sech
        );
        assert_eq!(
            Line::new(Lineshape::Sech, 20.0).for_emission(kt).shape,
            Lineshape::Gaussian
        );
        assert_eq!(
            Line::new(Lineshape::Lorentzian, 100.0)
                .for_emission(kt)
                .shape,
            Lineshape::Gaussian
        );
    }
}
