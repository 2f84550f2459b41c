//! Occupation of the parabolic bands of a bulk crystal.

use crate::numerics::fermi::half_integral;
use crate::numerics::roots::bracketed_root;
use crate::units::HBAR2_OVER_2M0_EV_NM2;

/// Effective density of states of a parabolic band, cm⁻³.
///
/// # Equation
///
/// ```text
///  N = 2 (2π m kT / h²)^{3/2} = ¼ (m kT / π c)^{3/2} ,   c = ħ²/2m₀
/// ```
///
/// # Arguments
///
/// * `mass` – free-electron masses
/// * `thermal_ev` – kT, eV
#[must_use]
pub fn effective_density_cm3(mass: f64, thermal_ev: f64) -> f64 {
    let reciprocal_area = mass * thermal_ev / (std::f64::consts::PI * HBAR2_OVER_2M0_EV_NM2);
    0.25e21 * reciprocal_area.powf(1.5)
}

/// Parabolic bands with a common edge, one per mass (free-electron masses): one of electrons, or
/// heavy and light holes.
#[derive(Clone, Debug, PartialEq)]
pub struct BulkBands(pub Vec<f64>);

impl BulkBands {
    /// Effective density of states of all bands together, cm⁻³.
    #[must_use]
    pub fn effective_density_cm3(&self, thermal_ev: f64) -> f64 {
        self.0
            .iter()
            .map(|&mass| effective_density_cm3(mass, thermal_ev))
            .sum()
    }

    /// Carriers per volume, cm⁻³, with the quasi-Fermi level `fermi_ev` inside the band, counted
    /// from the edge away from the gap: n = N F_½(F/kT).
    #[must_use]
    pub fn density_cm3(&self, fermi_ev: f64, thermal_ev: f64) -> f64 {
        self.effective_density_cm3(thermal_ev) * half_integral(1, fermi_ev / thermal_ev)
    }

    /// The quasi-Fermi level, eV, at which the bands hold `density_cm3`, counted as in
    /// [`Self::density_cm3`]: rises without bound as the density does.
    #[must_use]
    pub fn fermi_ev(&self, density_cm3: f64, thermal_ev: f64) -> f64 {
        let filling = density_cm3 / self.effective_density_cm3(thermal_ev);
        let excess = |eta: f64| half_integral(1, eta).ln() - filling.ln();
        // F_½(η) < exp η, so that the level of a thin gas is a lower bound.
        let low = filling.ln() - 1e-6;
        let mut reach = 1.0;
        while excess(low + reach) < 0.0 {
            reach *= 2.0;
        }
        thermal_ev * bracketed_root(excess, low, low + reach, 1e-12)
    }
}

/// The density of pairs, cm⁻³, at which the quasi-Fermi splitting equals the gap: the root of
/// n(η) = p(−η), of which one side rises and the other falls.
#[must_use]
pub fn transparency_cm3(electrons: &BulkBands, holes: &BulkBands, thermal_ev: f64) -> f64 {
    let excess = |eta: f64| {
        let fermi = eta * thermal_ev;
        (electrons.density_cm3(fermi, thermal_ev) / holes.density_cm3(-fermi, thermal_ev)).ln()
    };
    let eta = bracketed_root(excess, -30.0, 30.0, 1e-13);
    electrons.density_cm3(eta * thermal_ev, thermal_ev)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units::thermal_ev;

    #[test]
    fn fermi_level_inverts_density_from_empty_to_overfull() {
        let bands = BulkBands(vec![0.47, 0.08]);
        for temperature in [20.0, 300.0] {
            let kt = thermal_ev(temperature);
            for density in [1e12, 1e17, 1e19, 1e21] {
                let back = bands.density_cm3(bands.fermi_ev(density, kt), kt);
                assert!((back / density - 1.0).abs() < 1e-9, "{density}: {back}");
            }
        }
    }

    /// Far above the edge n = (1/3π²) (m F/c)^{3/2}, the volume of the Fermi sphere.
    #[test]
    fn a_cold_gas_fills_the_fermi_sphere() {
        let (mass, fermi) = (0.067, 0.2);
        let sphere = (mass * fermi / HBAR2_OVER_2M0_EV_NM2).powf(1.5)
            / (3.0 * std::f64::consts::PI.powi(2))
            * 1e21;
        let got = BulkBands(vec![mass]).density_cm3(fermi, thermal_ev(10.0));
        assert!((got / sphere - 1.0).abs() < 1e-4, "{got} {sphere}");
    }

    #[test]
    fn bands_of_one_edge_add() {
        let kt = thermal_ev(300.0);
        let both = BulkBands(vec![0.4, 0.08]).density_cm3(0.03, kt);
        let sum = BulkBands(vec![0.4]).density_cm3(0.03, kt)
            + BulkBands(vec![0.08]).density_cm3(0.03, kt);
        assert!((both / sum - 1.0).abs() < 1e-14);
    }
}
