//! Wavelengths in air and in vacuum.
//!
//! # Equation
//!
//! ```text
//!  λ_vacuum = n(λ_vacuum) λ_air
//!  n − 1 = 1e-8 [ 5792105/(238.0185 − σ²) + 167917/(57.362 − σ²) ] ,   σ = 1/λ_vacuum in 1/µm
//! ```
//!
//! for dry air at 15 °C, 101325 Pa and 450 ppm of CO₂. Fitted from 0.23 to 1.69 µm and smooth beyond;
//! the weather of a laboratory moves n by some 1e-5 (0.01 nm at 1310 nm).
//!
//! # Reference
//!
//! P. E. Ciddor, Appl. Opt. 35, 1566 (1996), equation 1 (from memory; checked against the tabulated
//! value of one line in the tests).

/// Refractive index of standard air at a wavelength in vacuum, nm.
#[must_use]
pub fn refractive_index(vacuum_nm: f64) -> f64 {
    let sigma2 = (1e3 / vacuum_nm) * (1e3 / vacuum_nm);
    1.0 + 1e-8 * (5792105.0 / (238.0185 - sigma2) + 167917.0 / (57.362 - sigma2))
}

/// Wavelength in standard air, nm, of one in vacuum.
#[must_use]
pub fn air_nm(vacuum_nm: f64) -> f64 {
    vacuum_nm / refractive_index(vacuum_nm)
}

/// Wavelength in vacuum, nm, of one in standard air.
#[must_use]
pub fn vacuum_nm(air_nm: f64) -> f64 {
    // The index hardly changes over the shift: each round gains five digits.
    (0..4).fold(air_nm, |vacuum_nm, _| air_nm * refractive_index(vacuum_nm))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Sodium D2 stands at 588.995 nm in air and 589.158 nm in vacuum (J. E. Sansonetti, W. C.
    /// Martin, J. Phys. Chem. Ref. Data 34, 1559 (2005), from memory).
    #[test]
    fn sodium_stands_where_tables_say() {
        assert!((air_nm(589.158) - 588.995).abs() < 0.001);
        assert!((vacuum_nm(588.995) - 589.158).abs() < 0.001);
    }

    /// The shifts that the trade knows: 0.27, 0.36 and 0.42 nm at 980, 1310 and 1550 nm (common
    /// practice).
    #[test]
    fn air_shortens_by_a_third_of_a_nanometre_or_so() {
        for (nm, shift_nm) in [(980.0, 0.27), (1310.0, 0.36), (1550.0, 0.42)] {
            let shift = nm - air_nm(nm);
            assert!((shift - shift_nm).abs() < 0.01, "{nm}: {shift}");
        }
    }

    #[test]
    fn each_is_the_inverse_of_the_other() {
        for nm in [300.0, 850.0, 1310.0, 2300.0, 5000.0] {
            assert!((vacuum_nm(air_nm(nm)) / nm - 1.0).abs() < 1e-14);
        }
    }
}
