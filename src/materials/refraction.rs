//! Refractive index at room temperature: closed forms, and which of them holds for which alloy.

use super::index_data::{IndexStatement, Oscillator};
use super::interpolation::weighted;
use super::{Composition, Crystal, Element, Offsets, Parameters};
use crate::numerics::roots::bracketed_root;
use crate::units::{photon_ev, wavelength_nm};
use std::f64::consts::PI;

/// Temperature of the index data, K.
const ROOM_K: f64 = 300.0;
/// In-plane strain below which a layer on InP counts as lattice-matched.
const MATCHED: f64 = 0.002;
/// Al fraction of the AlInAs end of (AlInAs)_z(GaInAs)_(1−z), and Ga fraction of the other.
const AL_END: f64 = 0.48;
const GA_END: f64 = 0.47;
/// The least z for which the Sellmeier form of AlGaInAs is used.
const SELLMEIER_FROM: f64 = 0.3;
/// Distance from the gap wavelength beyond which that form is used, nm.
const SELLMEIER_CLEARANCE_NM: f64 = 50.0;
/// Longest wavelength of its range, nm.
const SELLMEIER_TO_NM: f64 = 1700.0;
/// In fraction up to which the InGaAs form is stated to hold.
const INGAAS_TO: f64 = 0.6;
/// No gap of a closed form is taken as narrower, eV: keeps the forms defined.
const LEAST_GAP_EV: f64 = 0.05;

/// A closed form of the data file.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum IndexModel {
    /// Oscillator form of AlGaAs.
    AlGaAs,
    /// Oscillator form of InGaAs.
    InGaAs,
    /// Oscillator form of InGaAsP matched to InP, by its As fraction.
    InGaAsPOnInP,
    /// The same for AlGaInAs on InP, at the As fraction of equal gap.
    EqualGapOnInP,
    /// Oscillator form of InGaAsP of any composition.
    InGaAsP,
    /// Sellmeier form of AlGaInAs matched to InP.
    AlGaInAsOnInP,
    /// Interband form with strengths linear in the compounds.
    Compounds,
}

/// Why an index is less sure than its closed form is.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum IndexAdvice {
    /// The photon energy is above, or within the smoothing of, the gap.
    #[error(
        "the photon energy is at or above the gap of the closed form ({gap_ev:.3} eV): smoothed over the absorption edge, error up to 0.05"
    )]
    Absorbing {
        /// Gap of the closed form, eV.
        gap_ev: f64,
    },
    /// A composition beyond the stated range.
    #[error(
        "In fraction {indium:.3} is beyond the {INGAAS_TO} up to which the form is stated to hold"
    )]
    BeyondComposition {
        /// The In fraction.
        indium: f64,
    },
    /// A form for lattice-matched layers on a layer that is not.
    #[error("the form is for layers matched to InP, and this one is {:.2} % {}", 100.0 * .strain.abs(), if *.strain < 0.0 { "compressive" } else { "tensile" })]
    Mismatched {
        /// In-plane strain; negative is compressive.
        strain: f64,
    },
    /// A gap wider than that of InP has no InGaAsP of equal gap.
    #[error("no InGaAsP on InP has a gap of {gap_ev:.3} eV: its end of nearest gap is taken")]
    NoEqualGap {
        /// Unstrained gap, eV.
        gap_ev: f64,
    },
    /// Longer than the stated range.
    #[error("the form is stated up to {SELLMEIER_TO_NM} nm")]
    TooLong,
    /// A photon energy above that of the oscillator, or none at all.
    #[error("the photon energy is outside what the form can describe")]
    BeyondOscillator,
    /// The form of last resort.
    #[error("no closed form of its own for this alloy: error up to 0.06")]
    LastResort,
}

/// An index with its origin.
#[derive(Clone, Debug, PartialEq)]
pub struct Refraction {
    /// Refractive index.
    pub index: f64,
    /// The closed form behind it.
    pub model: IndexModel,
    /// Why it is less sure; nothing inside the stated range.
    pub advice: Vec<IndexAdvice>,
}

impl Parameters {
    /// Refractive index of a composition on a substrate at a photon energy, room temperature.
    /// Never less than 1 and never undefined; [`refraction`](Self::refraction) says how sure it is.
    #[must_use]
    pub fn index(
        &self,
        composition: &Composition,
        substrate: Option<&Composition>,
        photon_ev: f64,
    ) -> f64 {
        self.refraction(composition, substrate, photon_ev).index
    }

    /// The same with the closed form behind it, and what to think of it.
    ///
    /// Strain is left out (below 0.02 in a layer of 1.5 % except within 30 meV of the gap, common
    /// practice), and so is temperature.
    #[must_use]
    pub fn refraction(
        &self,
        composition: &Composition,
        substrate: Option<&Composition>,
        photon_ev: f64,
    ) -> Refraction {
        use Element::{Al, As, Ga, In, P};
        let crystal = self.crystal(composition, ROOM_K, Offsets::Table);
        let on_inp = substrate.filter(|substrate| substrate.is_within(&[In, P]));
        let strain = on_inp.map(|substrate| {
            let lattice_nm = self.crystal(substrate, ROOM_K, Offsets::Table).lattice_nm;
            lattice_nm / crystal.lattice_nm - 1.0
        });
        let has = |element| composition.fraction(element) > 0.0;
        let oscillators = &self.frame.index.seo;

        if composition.is_within(&[Al, Ga, As]) {
            let aluminium = composition.fraction(Al);
            return self.of_one(
                IndexModel::AlGaAs,
                &oscillators.algaas,
                aluminium,
                photon_ev,
            );
        }
        if composition.is_within(&[In, Ga, As]) && has(In) && has(Ga) {
            let indium = composition.fraction(In);
            let mut refraction =
                self.of_one(IndexModel::InGaAs, &oscillators.ingaas, indium, photon_ev);
            if indium > INGAAS_TO {
                let advice = IndexAdvice::BeyondComposition { indium };
                refraction.advice.insert(0, advice);
            }
            return refraction;
        }
        if composition.is_within(&[In, Ga, As, P]) {
            if strain.is_some_and(|strain| strain.abs() < MATCHED) {
                return self.of_one(
                    IndexModel::InGaAsPOnInP,
                    &oscillators.ingaasp_on_inp,
                    composition.fraction(As),
                    photon_ev,
                );
            }
            let (x, y) = (composition.fraction(Ga), composition.fraction(As));
            let sum = |terms: &[(f64, i32, i32)]| -> f64 {
                let term = |&(factor, i, j): &(f64, i32, i32)| factor * x.powi(i) * y.powi(j);
                terms.iter().map(term).sum()
            };
            let model = &oscillators.ingaasp;
            let (oscillator_ev, strength_ev) = (sum(&model.e0_terms), sum(&model.ed_terms));
            return self.of_oscillator(
                IndexModel::InGaAsP,
                [oscillator_ev, strength_ev, crystal.gap_ev],
                photon_ev,
            );
        }
        match strain {
            Some(strain) if composition.is_within(&[Al, Ga, In, As]) && has(In) => {
                self.algainas_on_inp(composition, &crystal, strain, photon_ev)
            }
            _ => self.of_compounds(composition, &crystal, photon_ev),
        }
    }

    /// The statement of the data file on a closed form.
    #[must_use]
    pub fn index_statement(&self, model: IndexModel) -> &IndexStatement {
        let data = &self.frame.index;
        match model {
            IndexModel::AlGaAs => &data.seo.algaas.statement,
            IndexModel::InGaAs => &data.seo.ingaas.statement,
            IndexModel::InGaAsPOnInP | IndexModel::EqualGapOnInP => {
                &data.seo.ingaasp_on_inp.statement
            }
            IndexModel::InGaAsP => &data.seo.ingaasp.statement,
            IndexModel::AlGaInAsOnInP => &data.sellmeier1.algainas_on_inp.statement,
            IndexModel::Compounds => &data.adachi_binary.statement,
        }
    }

    /// The equations of the closed forms and the choice among them, in words, by key; the last is
    /// the source of the smoothing.
    pub fn index_forms(&self) -> impl Iterator<Item = (&str, &str)> {
        let data = &self.frame.index;
        let forms = data.forms.iter();
        forms
            .map(|(key, text)| (key.as_str(), text.as_str()))
            .chain([("seo_broadening_source", data.seo_broadening_source.as_str())])
    }

    /// A form in one composition variable.
    fn of_one(
        &self,
        model: IndexModel,
        form: &Oscillator,
        variable: f64,
        photon_ev: f64,
    ) -> Refraction {
        let energies = [&form.e0, &form.ed, &form.eg].map(|terms| polynomial(terms, variable));
        self.of_oscillator(model, energies, photon_ev)
    }

    /// The smoothed oscillator form: energies are those of the oscillator, its strength, the gap.
    fn of_oscillator(&self, model: IndexModel, energies: [f64; 3], photon_ev: f64) -> Refraction {
        let [oscillator_ev, strength_ev, gap_ev] = energies;
        let (photon_ev, mut advice) = described(photon_ev, oscillator_ev);
        let gap_ev = gap_ev.clamp(LEAST_GAP_EV, 0.95 * oscillator_ev);
        if photon_ev >= gap_ev - self.frame.index.seo_broadening {
            advice.push(IndexAdvice::Absorbing { gap_ev });
        }
        Refraction {
            index: single_effective_oscillator(
                photon_ev,
                [oscillator_ev, strength_ev, gap_ev],
                self.frame.index.seo_broadening,
            ),
            model,
            advice,
        }
    }

    /// AlGaInAs on InP: the Sellmeier form where it is far from its gap, InGaAsP of equal gap else.
    fn algainas_on_inp(
        &self,
        composition: &Composition,
        crystal: &Crystal,
        strain: f64,
        photon_energy_ev: f64,
    ) -> Refraction {
        let aluminium = composition.fraction(Element::Al) / AL_END;
        let gallium = composition.fraction(Element::Ga) / GA_END;
        let share = aluminium / (aluminium + gallium);
        // beyond this energy the form comes too near its own absorption
        let limit_ev =
            photon_ev(wavelength_nm(crystal.gap_ev.max(LEAST_GAP_EV)) + SELLMEIER_CLEARANCE_NM);
        let mut refraction = if share >= SELLMEIER_FROM && photon_energy_ev <= limit_ev {
            let form = &self.frame.index.sellmeier1.algainas_on_inp;
            let (photon_energy_ev, mut advice) = described(photon_energy_ev, limit_ev);
            if photon_energy_ev < photon_ev(SELLMEIER_TO_NM) {
                advice.push(IndexAdvice::TooLong);
            }
            // λ²/(λ² − C²) = 1/(1 − (E/E_C)²)
            let pole_ev = photon_ev(polynomial(&form.c_nm, share));
            let resonance = (1.0 - (photon_energy_ev / pole_ev).powi(2))
                .max(0.05)
                .recip();
            let square = polynomial(&form.a, share) + polynomial(&form.b, share) * resonance;
            Refraction {
                index: square.max(1.0).sqrt(),
                model: IndexModel::AlGaInAsOnInP,
                advice,
            }
        } else {
            let form = &self.frame.index.seo.ingaasp_on_inp;
            let arsenic = arsenic_of_gap(&form.eg, crystal.gap_ev);
            let mut refraction =
                self.of_one(IndexModel::EqualGapOnInP, form, arsenic, photon_energy_ev);
            if (polynomial(&form.eg, arsenic) - crystal.gap_ev).abs() > 1e-6 {
                let gap_ev = crystal.gap_ev;
                refraction.advice.push(IndexAdvice::NoEqualGap { gap_ev });
            }
            refraction
        };
        if strain.abs() >= MATCHED {
            refraction.advice.push(IndexAdvice::Mismatched { strain });
        }
        refraction
    }

    /// The interband form with strengths of the compounds.
    ///
    /// # Equation
    ///
    /// ```text
    ///  n² = A [F(E/E_g) + ½ (E_g/(E_g + Δ))^(3/2) F(E/(E_g + Δ))] + B
    ///  F(u) = [2 − √(1 + u) − √(1 − u)]/u²          √(1 − u) left out for u > 1
    /// ```
    ///
    /// # Reference
    ///
    /// S. Adachi, J. Appl. Phys. 53, 5863 (1982); M. Guden, J. Piprek, Modelling Simul. Mater. Sci.
    /// Eng. 4, 349 (1996).
    fn of_compounds(
        &self,
        composition: &Composition,
        crystal: &Crystal,
        photon_ev: f64,
    ) -> Refraction {
        let strengths = &self.frame.index.adachi_binary.strengths;
        let [a, b] = [0, 1].map(|which| weighted(composition, &strengths.per_compound(which)));
        let gap_ev = crystal.gap_ev.max(LEAST_GAP_EV);
        let split_ev = gap_ev + crystal.split_off_ev.max(0.0);
        let (photon_ev, mut advice) = described(photon_ev, f64::INFINITY);
        advice.push(IndexAdvice::LastResort);
        if photon_ev >= gap_ev {
            advice.push(IndexAdvice::Absorbing { gap_ev });
        }
        let interband = interband(photon_ev / gap_ev)
            + 0.5 * (gap_ev / split_ev).powf(1.5) * interband(photon_ev / split_ev);
        Refraction {
            index: (a * interband + b).max(1.0).sqrt(),
            model: IndexModel::Compounds,
            advice,
        }
    }
}

/// A photon energy that a form can take: finite, not negative and not above its limit, eV.
fn described(photon_ev: f64, limit_ev: f64) -> (f64, Vec<IndexAdvice>) {
    if photon_ev >= 0.0 && photon_ev.is_finite() && photon_ev <= limit_ev {
        (photon_ev, Vec::new())
    } else {
        // f64::max and f64::min let a number win over NaN
        let inside = photon_ev.max(0.0).min(limit_ev.min(1e3));
        (inside, vec![IndexAdvice::BeyondOscillator])
    }
}

/// Index of the smoothed single-effective-oscillator form.
///
/// # Equation
///
/// ```text
///  n² = 1 + E_d/E₀ + E_d E²/E₀³ + (η E⁴/π) ln[(2 E₀² − E_g² − E²)/√((E_g² − E²)² + (2 E_g G)²)]
///  η = π E_d/(2 E₀³ (E₀² − E_g²))
/// ```
///
/// G smooths the logarithmic pole at the gap. Defined for E ≤ E₀, E_g < E₀.
///
/// # Reference
///
/// M. A. Afromowitz, Solid State Commun. 15, 59 (1974); the smoothing is this program's.
fn single_effective_oscillator(photon_ev: f64, energies: [f64; 3], smoothing_ev: f64) -> f64 {
    let [oscillator_ev, strength_ev, gap_ev] = energies;
    let photon2 = photon_ev * photon_ev;
    let gap2 = gap_ev * gap_ev;
    let oscillator2 = oscillator_ev * oscillator_ev;
    let cube = oscillator2 * oscillator_ev;
    let eta = PI * strength_ev / (2.0 * cube * (oscillator2 - gap2));
    let pole = (gap2 - photon2).hypot(2.0 * gap_ev * smoothing_ev);
    let logarithm = ((2.0 * oscillator2 - gap2 - photon2) / pole).ln();
    let square = 1.0
        + strength_ev / oscillator_ev
        + strength_ev * photon2 / cube
        + eta * photon2 * photon2 / PI * logarithm;
    square.max(1.0).sqrt()
}

/// F(u) of the interband form; its series below u = 0.01, where the quotient loses digits.
fn interband(u: f64) -> f64 {
    if u < 0.01 {
        return 0.25 + 5.0 / 64.0 * u * u;
    }
    let below = if u < 1.0 { (1.0 - u).sqrt() } else { 0.0 };
    (2.0 - (1.0 + u).sqrt() - below) / (u * u)
}

/// c₀ + c₁ x + c₂ x² + …
fn polynomial(coefficients: &[f64], variable: f64) -> f64 {
    coefficients
        .iter()
        .rev()
        .fold(0.0, |sum, coefficient| sum * variable + coefficient)
}

/// The As fraction between 0 and 1 at which InGaAsP on InP has a gap, or the end of nearest gap.
fn arsenic_of_gap(gap: &[f64], gap_ev: f64) -> f64 {
    bracketed_root(|arsenic| polynomial(gap, arsenic) - gap_ev, 0.0, 1.0, 1e-12)
}
