//! How thick a strained film may grow before it is no longer coherent, and how strains balance;
//! [`StrainBudget`] draws up both for a stack.
//!
//! # Force on a dislocation
//!
//! A threading dislocation bends and lays down a misfit line where the force of the strain exceeds
//! the tension of the line. For 60° dislocations on {111} (both cosines ½) the two are equal at
//!
//! ```text
//!            b (1 − ν/4)
//!  h = ───────────────────── (ln(h/b) + 1) ,   b = a/√2 ,   ν = C12/(C11 + C12)
//!       G π f (1 + ν) · ½
//! ```
//!
//! with f the mismatch of the relaxed film and G = 8 for a film with a free surface (one line), 4
//! for a film that is grown over (a line at either face), 2 for a layer of a long superlattice. With
//! x = h/b this is x = α (ln x + 1): the right side touches the left at x = α = 1, so that there are
//! two roots for α > 1, the larger of which is the critical thickness, and none for α < 1. Then the
//! continuum theory knows no coherent thickness at all, and says so instead of giving a number.
//!
//! # Energy of a dislocation
//!
//! Equating the energies of film and dislocation gives the much larger
//!
//! ```text
//!  h = (1 − ν)/(1 + ν) · 1/(16 π √2) · b²/(a f²) · ln(h/b) ,   b = 0.4 nm ,
//! ```
//!
//! a contrast to the first and no limit to design by. It has a root where h/(b ln(h/b)) reaches its
//! least value e.
//!
//! # Balance
//!
//! The energy of coherent layers at the in-plane constant a∥ is Σ t A (a∥ − a)²/a², A = C11 + C12 −
//! 2 C12²/C11. It is least, and the mean in-plane stress zero, at a∥ = Σ (t A/a) / Σ (t A/a²); two
//! layers balance on a substrate a_s where t₁ A₁ (a_s − a₁)/a₁² + t₂ A₂ (a_s − a₂)/a₂² = 0.
//!
//! # References
//!
//! J. W. Matthews, A. E. Blakeslee, J. Cryst. Growth 27, 118 (1974); J. W. Matthews, J. Vac. Sci.
//! Technol. 12, 126 (1975); I. J. Fritz et al., Appl. Phys. Lett. 46, 967 (1985) (the factors G);
//! R. People, J. C. Bean, Appl. Phys. Lett. 47, 322 (1985), erratum 49, 229 (1986);
//! N. J. Ekins-Daukes, K. Kawaguchi, J. Zhang, Cryst. Growth Des. 2, 287 (2002).

mod budget;

pub use budget::{ActiveStrain, Balance, CriticalBand, LayerStrain, StrainBudget};

use crate::materials::Crystal;
use crate::numerics::roots::bracketed_root;
use std::f64::consts::{E, PI, SQRT_2};

/// What lies over and beside a strained film.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Setting {
    /// A free surface: one misfit line.
    Overlayer,
    /// Grown over: a line at either face.
    Buried,
    /// One layer of a long strained superlattice.
    Superlattice,
}

impl Setting {
    /// The factor G of the force balance.
    fn lines(self) -> f64 {
        match self {
            Self::Overlayer => 8.0,
            Self::Buried => 4.0,
            Self::Superlattice => 2.0,
        }
    }
}

/// How thick a film may be.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum CriticalThickness {
    /// There is no mismatch, and no limit.
    Unlimited,
    /// Up to this thickness, nm.
    UpTo {
        /// The thickness, nm.
        thickness_nm: f64,
    },
    /// The mismatch is so large that the theory has no coherent thickness.
    NoneCoherent,
}

impl CriticalThickness {
    /// The thickness in nm where there is one.
    #[must_use]
    pub fn thickness_nm(self) -> Option<f64> {
        match self {
            Self::UpTo { thickness_nm } => Some(thickness_nm),
            Self::Unlimited | Self::NoneCoherent => None,
        }
    }

    /// Whether a film of that thickness is coherent.
    #[must_use]
    pub fn holds(self, film_nm: f64) -> bool {
        match self {
            Self::Unlimited => true,
            Self::UpTo { thickness_nm } => film_nm <= thickness_nm,
            Self::NoneCoherent => false,
        }
    }
}

/// Mismatches below this count as none.
const LEAST_MISMATCH: f64 = 1e-9;
/// Burgers vector of the energy balance as published, nm.
const ENERGY_BALANCE_BURGERS_NM: f64 = 0.4;

/// A film on its substrate, as a dislocation sees it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Film {
    /// Size of the mismatch (a − a_s)/a_s of the relaxed film, never negative.
    pub mismatch: f64,
    /// Lattice constant of the relaxed film, nm.
    pub lattice_nm: f64,
    /// Poisson's ratio C12/(C11 + C12).
    pub poisson_ratio: f64,
}

impl Film {
    /// The film of a crystal on a substrate of the lattice constant `substrate_lattice_nm`.
    #[must_use]
    pub fn new(crystal: &Crystal, substrate_lattice_nm: f64) -> Self {
        Self {
            mismatch: ((crystal.lattice_nm - substrate_lattice_nm) / substrate_lattice_nm).abs(),
            lattice_nm: crystal.lattice_nm,
            poisson_ratio: crystal.c12_gpa / (crystal.c11_gpa + crystal.c12_gpa),
        }
    }

    /// Critical thickness by the balance of forces: the limit to design by.
    #[must_use]
    pub fn force_balance(&self, setting: Setting) -> CriticalThickness {
        if self.mismatch < LEAST_MISMATCH {
            return CriticalThickness::Unlimited;
        }
        let burgers_nm = self.lattice_nm / SQRT_2;
        let poisson = self.poisson_ratio;
        let alpha =
            (1.0 - 0.25 * poisson) / (setting.lines() * PI * self.mismatch * (1.0 + poisson) * 0.5);
        if alpha < 1.0 {
            return CriticalThickness::NoneCoherent;
        }
        // The larger root of x = α (ln x + 1), right of the touching point x = α.
        let excess = |x: f64| x - alpha * (x.ln() + 1.0);
        CriticalThickness::UpTo {
            thickness_nm: burgers_nm * root_above(excess, alpha),
        }
    }

    /// Critical thickness by the balance of energies: a contrast, several times too generous.
    #[must_use]
    pub fn energy_balance(&self) -> CriticalThickness {
        if self.mismatch < LEAST_MISMATCH {
            return CriticalThickness::Unlimited;
        }
        let poisson = self.poisson_ratio;
        let beta = (1.0 - poisson) / (1.0 + poisson) / (16.0 * PI * SQRT_2)
            * ENERGY_BALANCE_BURGERS_NM
            / (self.lattice_nm * self.mismatch * self.mismatch);
        if beta < E {
            return CriticalThickness::NoneCoherent;
        }
        // The larger root of x = β ln x, right of the touching point x = β.
        let excess = |x: f64| x - beta * x.ln();
        CriticalThickness::UpTo {
            thickness_nm: ENERGY_BALANCE_BURGERS_NM * root_above(excess, beta),
        }
    }
}

/// The root above `low` of a function that is not positive there and rises without bound.
fn root_above(excess: impl Fn(f64) -> f64, low: f64) -> f64 {
    let mut high = 2.0 * low;
    while excess(high) < 0.0 {
        high *= 2.0;
    }
    bracketed_root(excess, low, high, 1e-14 * high)
}

/// Stiffness of a layer against in-plane strain on (001), C11 + C12 − 2 C12²/C11, GPa.
#[must_use]
pub fn plane_stiffness_gpa(crystal: &Crystal) -> f64 {
    let (c11, c12) = (crystal.c11_gpa, crystal.c12_gpa);
    c11 + c12 - 2.0 * c12 * c12 / c11
}

/// Stress per strain times the weight with which a layer enters the balance, GPa/nm².
fn weight(crystal: &Crystal) -> f64 {
    plane_stiffness_gpa(crystal) / (crystal.lattice_nm * crystal.lattice_nm)
}

/// The in-plane lattice constant, nm, at which layers (crystal, thickness in nm) have no mean
/// in-plane stress; `None` without layers.
///
/// Its mismatch to the substrate is the strain of the stack as a whole.
#[must_use]
pub fn stress_free_lattice_nm(layers: &[(Crystal, f64)]) -> Option<f64> {
    let sum = |of: &dyn Fn(&Crystal) -> f64| -> f64 {
        layers
            .iter()
            .map(|(crystal, thickness_nm)| of(crystal) * thickness_nm)
            .sum()
    };
    let weights = sum(&weight);
    (weights > 0.0).then(|| sum(&|crystal| weight(crystal) * crystal.lattice_nm) / weights)
}

/// Thickness, nm, of `partner` that balances `thickness_nm` of `layer` on a substrate, so that the
/// mean in-plane stress is zero; `None` where the partner is not strained the other way.
#[must_use]
pub fn balancing_thickness_nm(
    layer: &Crystal,
    thickness_nm: f64,
    partner: &Crystal,
    substrate_lattice_nm: f64,
) -> Option<f64> {
    let stress = |crystal: &Crystal| weight(crystal) * (substrate_lattice_nm - crystal.lattice_nm);
    let (own, other) = (stress(layer), stress(partner));
    (own * other < 0.0).then(|| -thickness_nm * own / other)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::materials::{Composition, Offsets, Parameters};

    fn crystal(formula: &str) -> Crystal {
        let composition = Composition::parse(formula).expect("a formula");
        Parameters::shipped().crystal(&composition, 300.0, Offsets::Table)
    }

    fn film(formula: &str) -> Film {
        Film::new(&crystal(formula), crystal("GaAs").lattice_nm)
    }

    /// The thickness put back into the balance of forces: tension and force are equal.
    #[test]
    fn at_the_critical_thickness_force_and_tension_are_equal() {
        for formula in ["In0.02Ga0.98As", "In0.2Ga0.8As", "GaAs0.8P0.2"] {
            let film = film(formula);
            for setting in [Setting::Overlayer, Setting::Buried, Setting::Superlattice] {
                let height = film
                    .force_balance(setting)
                    .thickness_nm()
                    .expect("a thickness");
                let burgers = film.lattice_nm / SQRT_2;
                let nu = film.poisson_ratio;
                let force = setting.lines() * PI * film.mismatch * (1.0 + nu) * 0.5 * height;
                let tension = burgers * (1.0 - 0.25 * nu) * ((height / burgers).ln() + 1.0);
                assert!((force / tension - 1.0).abs() < 1e-12, "{formula}");
                // Of the two roots the larger: above it the force has the upper hand.
                assert!(height > burgers);
            }
        }
    }

    #[test]
    fn no_mismatch_has_no_limit_and_too_much_has_no_coherent_thickness() {
        let matched = film("GaAs");
        assert_eq!(
            matched.force_balance(Setting::Buried),
            CriticalThickness::Unlimited
        );
        assert!(matched.energy_balance().holds(1e6));
        let strained = film("InAs");
        assert_eq!(
            strained.force_balance(Setting::Overlayer),
            CriticalThickness::NoneCoherent
        );
        assert!(
            !strained
                .force_balance(Setting::Overlayer)
                .holds(f64::MIN_POSITIVE)
        );
        // Energy balance fails later, but it fails.
        let torn = Film {
            mismatch: 0.12,
            ..strained
        };
        assert_eq!(torn.energy_balance(), CriticalThickness::NoneCoherent);
    }

    #[test]
    fn grown_over_holds_more_and_more_mismatch_holds_less() {
        let thickness = |formula, setting| {
            film(formula)
                .force_balance(setting)
                .thickness_nm()
                .expect("a thickness")
        };
        let film = "In0.15Ga0.85As";
        assert!(thickness(film, Setting::Buried) > 2.0 * thickness(film, Setting::Overlayer));
        assert!(thickness(film, Setting::Superlattice) > 2.0 * thickness(film, Setting::Buried));
        assert!(thickness("In0.2Ga0.8As", Setting::Buried) < thickness(film, Setting::Buried));
    }

    /// A balanced pair has the substrate's constant as its own, and balance is mutual.
    #[test]
    fn balanced_layers_have_the_lattice_of_their_substrate() {
        let (well, barrier) = (crystal("In0.2Ga0.8As"), crystal("GaAs0.8P0.2"));
        let substrate_nm = crystal("GaAs").lattice_nm;
        let partner_nm =
            balancing_thickness_nm(&well, 8.0, &barrier, substrate_nm).expect("opposite strains");
        let mean = stress_free_lattice_nm(&[(well, 8.0), (barrier, partner_nm)]).expect("layers");
        assert!((mean / substrate_nm - 1.0).abs() < 1e-14);
        let back = balancing_thickness_nm(&barrier, partner_nm, &well, substrate_nm);
        assert!((back.expect("opposite strains") - 8.0).abs() < 1e-12);
        assert_eq!(
            balancing_thickness_nm(&well, 8.0, &crystal("InAs"), substrate_nm),
            None
        );
        assert_eq!(
            balancing_thickness_nm(&well, 8.0, &crystal("GaAs"), substrate_nm),
            None
        );
        assert_eq!(stress_free_lattice_nm(&[]), None);
    }
}
