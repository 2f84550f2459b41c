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

/// One parabolic band.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BulkBand {
    /// Free-electron masses.
    pub mass: f64,
    /// How far its edge lies from the one nearest the gap, eV, at least zero.
    pub edge_ev: f64,
}

/// Parabolic bands of one kind of carrier: one of electrons, or heavy and light holes, their edges
/// common or, under strain, apart.
#[derive(Clone, Debug, PartialEq)]
pub struct BulkBands(pub Vec<BulkBand>);

impl BulkBands {
    /// Bands with a common edge, one per mass (free-electron masses).
    #[must_use]
    pub fn of_one_edge(masses: &[f64]) -> Self {
        let band = |&mass: &f64| BulkBand { mass, edge_ev: 0.0 };
        Self(masses.iter().map(band).collect())
    }

    /// Effective density of states of all bands together, cm⁻³, as if they had one edge.
    #[must_use]
    pub fn effective_density_cm3(&self, thermal_ev: f64) -> f64 {
        self.0
            .iter()
            .map(|band| effective_density_cm3(band.mass, thermal_ev))
            .sum()
    }

    /// Carriers per volume, cm⁻³, with the quasi-Fermi level `fermi_ev` inside the band, counted
    /// from the edge nearest the gap away from it: n = Σ N F_½((F − E)/kT).
    #[must_use]
    pub fn density_cm3(&self, fermi_ev: f64, thermal_ev: f64) -> f64 {
        self.0
            .iter()
            .map(|band| {
                effective_density_cm3(band.mass, thermal_ev)
                    * half_integral(1, (fermi_ev - band.edge_ev) / thermal_ev)
            })
            .sum()
    }

    /// The quasi-Fermi level, eV, at which the bands hold `density_cm3`, counted as in
    /// [`Self::density_cm3`]: rises without bound as the density does.
    #[must_use]
    pub fn fermi_ev(&self, density_cm3: f64, thermal_ev: f64) -> f64 {
        let filling = density_cm3 / self.effective_density_cm3(thermal_ev);
        let excess = |eta: f64| (self.density_cm3(eta * thermal_ev, thermal_ev) / density_cm3).ln();
        // F_½(η) < exp η, so that the level of a thin gas of one edge is a lower bound.
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
        let bands = BulkBands::of_one_edge(&[0.47, 0.08]);
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
        let got = BulkBands::of_one_edge(&[mass]).density_cm3(fermi, thermal_ev(10.0));
        assert!((got / sphere - 1.0).abs() < 1e-4, "{got} {sphere}");
    }

    #[test]
    fn bands_of_one_edge_add() {
        let kt = thermal_ev(300.0);
        let both = BulkBands::of_one_edge(&[0.4, 0.08]).density_cm3(0.03, kt);
        let sum = BulkBands::of_one_edge(&[0.4]).density_cm3(0.03, kt)
            + BulkBands::of_one_edge(&[0.08]).density_cm3(0.03, kt);
        assert!((both / sum - 1.0).abs() < 1e-14);
    }

    /// A band far beyond the level holds next to nothing; one at half the level less than one at
    /// the edge.
    #[test]
    fn bands_apart_fill_one_after_the_other() {
        let kt = thermal_ev(300.0);
        let apart = |edge_ev: f64| {
            BulkBands(vec![
                BulkBand {
                    mass: 0.4,
                    edge_ev: 0.0,
                },
                BulkBand { mass: 0.1, edge_ev },
            ])
        };
        let alone = BulkBands::of_one_edge(&[0.4]).density_cm3(0.0, kt);
        let far = apart(1.0).density_cm3(0.0, kt);
        assert!((far / alone - 1.0).abs() < 1e-12);
        assert!(apart(0.02).density_cm3(0.0, kt) > far);
        let fermi = apart(0.06).fermi_ev(3e18, kt);
        assert!((apart(0.06).density_cm3(fermi, kt) / 3e18 - 1.0).abs() < 1e-9);
    }
}
