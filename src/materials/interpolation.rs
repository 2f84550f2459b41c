//! From compounds and bowings to the numbers of any mixture of Al, Ga, In with P, As, Sb.
//!
//! The table is laid out in plain arrays once, so that a crystal costs a few hundred
//! multiplications: a graded layer asks for a thousand of them.

use super::quantity::TERNARY_KEYS;
use super::table::{BOWING_TERMS, Material, Table, pair};
use super::{Composition, Crystal, Element, Elements};

/// Compounds: cation place times 3 plus anion place.
const COMPOUNDS: usize = 9;
/// Ternaries: a pair of cations with an anion, or a pair of anions with a cation.
const PAIRS: usize = 18;
/// The two elements of each pair on a sublattice of three.
const PAIR_PLACES: [[usize; 2]; 3] = [[0, 1], [0, 2], [1, 2]];
/// The pair Ga, In.
const GA_IN: usize = 2;
/// The place of As among the anions.
const AS: usize = 1;

/// Quantities that bow, each with the word of its bowing.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Bowed {
    GapGamma,
    GapX,
    GapL,
    SplitOff,
    ElectronMass,
    HeavyMass,
    LightMass,
    GammaDifference,
    KaneEnergy,
    ValenceEdge,
    Conduction,
}

const BOWED: [(Bowed, &str); 11] = [
    (Bowed::GapGamma, "eg_gamma"),
    (Bowed::GapX, "eg_x"),
    (Bowed::GapL, "eg_l"),
    (Bowed::SplitOff, "delta_so"),
    (Bowed::ElectronMass, "me_gamma"),
    (Bowed::HeavyMass, "m_hh_001"),
    (Bowed::LightMass, "m_lh_001"),
    (Bowed::GammaDifference, "g3_minus_g2"),
    (Bowed::KaneEnergy, "ep"),
    (Bowed::ValenceEdge, "vbo"),
    (Bowed::Conduction, "ac"),
];

/// One number per compound.
pub(super) type PerCompound = [f64; COMPOUNDS];
/// One polynomial per ternary, coefficient by coefficient.
type PerPair = [[f64; PAIRS]; BOWING_TERMS];

/// The law of a gap with temperature.
#[derive(Clone, Copy, Debug, PartialEq)]
enum GapLaw {
    /// E(T) = E(0) − α T²/(T + β).
    Varshni {
        zero_ev: f64,
        alpha_ev_k: f64,
        beta_k: f64,
    },
    /// E(T) = E(0) + A (1 − coth(θ/T)).
    Coth {
        zero_ev: f64,
        amplitude_ev: f64,
        theta_k: f64,
    },
}

impl GapLaw {
    fn at(self, temperature_k: f64) -> f64 {
        match self {
            Self::Varshni { zero_ev, .. } | Self::Coth { zero_ev, .. } if temperature_k <= 0.0 => {
                zero_ev
            }
            Self::Varshni {
                zero_ev,
                alpha_ev_k,
                beta_k,
            } => zero_ev - alpha_ev_k * temperature_k * temperature_k / (temperature_k + beta_k),
            Self::Coth {
                zero_ev,
                amplitude_ev,
                theta_k,
            } => zero_ev + amplitude_ev * (1.0 - (theta_k / temperature_k).tanh().recip()),
        }
    }
}

/// Where the bowing of the valence edge comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum ValenceBowing {
    /// As tabulated.
    Tabulated,
    /// The InGaAs bowing replaced, inside quaternaries too.
    OnGaAs,
}

/// How much of each compound and of each ternary is in a composition.
struct Mixture {
    compounds: PerCompound,
    /// Weight of each bowing, times the powers of its argument.
    pairs: PerPair,
}

impl Mixture {
    fn of(composition: &Composition) -> Self {
        let (cations, anions) = (composition.group_iii, composition.group_v);
        let mut compounds = [0.0; COMPOUNDS];
        let mut pairs = [[0.0; PAIRS]; BOWING_TERMS];
        for cation in 0..3 {
            for anion in 0..3 {
                compounds[3 * cation + anion] = cations[cation] * anions[anion];
            }
        }
        for (offset, own, other) in [(0, cations, anions), (9, anions, cations)] {
            for (number, [first, second]) in PAIR_PLACES.into_iter().enumerate() {
                let (p, q) = (own[first], own[second]);
                let argument = 0.5 * (1.0 + p - q);
                for (place, share) in other.into_iter().enumerate() {
                    let mut weight = p * q * share;
                    for term in &mut pairs {
                        term[offset + 3 * number + place] = weight;
                        weight *= argument;
                    }
                }
            }
        }
        Self { compounds, pairs }
    }

    fn linear(&self, values: &PerCompound) -> f64 {
        dot(&self.compounds, values)
    }

    fn bowing(&self, coefficients: &PerPair) -> f64 {
        self.pairs
            .iter()
            .zip(coefficients)
            .map(|(weights, values)| dot(weights, values))
            .sum()
    }
}

fn dot<const N: usize>(a: &[f64; N], b: &[f64; N]) -> f64 {
    a.iter().zip(b).map(|(x, y)| x * y).sum()
}

/// The table in arrays.
#[derive(Clone, Debug)]
pub(super) struct Interpolation {
    lattice_nm: PerCompound,
    expansion_nm_k: PerCompound,
    gaps: [[GapLaw; COMPOUNDS]; 3],
    /// The quantities of [`BOWED`] after the gaps.
    bowed: [PerCompound; 8],
    bowings: [PerPair; 11],
    valence_bowing_on_gaas: PerPair,
    av_ev: PerCompound,
    b_ev: PerCompound,
    c11_gpa: PerCompound,
    c12_gpa: PerCompound,
}

impl Interpolation {
    /// Lays out a table that has been validated.
    pub(super) fn of(table: &Table, ingaas_valence_bowing_on_gaas_ev: f64) -> Self {
        let number = |word: &str| per_compound(table, |material| entry(material, word));
        let law = |zero: &'static str, alpha: &'static str, beta: &'static str| {
            let laws: [GapLaw; COMPOUNDS] = std::array::from_fn(|place| {
                compound(table, place).map_or(
                    GapLaw::Varshni {
                        zero_ev: f64::NAN,
                        alpha_ev_k: f64::NAN,
                        beta_k: f64::NAN,
                    },
                    |material| gap_law(material, zero, alpha, beta),
                )
            });
            laws
        };
        let heavy = |material: &Material| {
            (entry(material, "gamma1") - 2.0 * entry(material, "gamma2")).recip()
        };
        let light = |material: &Material| {
            (entry(material, "gamma1") + 2.0 * entry(material, "gamma2")).recip()
        };
        let difference =
            |material: &Material| entry(material, "gamma3") - entry(material, "gamma2");
        let bowings = BOWED.map(|(_, word)| per_pair(table, word));
        let mut valence_bowing_on_gaas = bowings[Bowed::ValenceEdge as usize];
        for (power, term) in valence_bowing_on_gaas.iter_mut().enumerate() {
            term[3 * GA_IN + AS] = if power == 0 {
                ingaas_valence_bowing_on_gaas_ev
            } else {
                0.0
            };
        }
        Self {
            lattice_nm: number("a_300").map(|angstrom| 0.1 * angstrom),
            expansion_nm_k: number("da_dt").map(|angstrom| 0.1 * angstrom),
            gaps: [
                law("eg_gamma_0", "alpha_gamma", "beta_gamma"),
                law("eg_x_0", "alpha_x", "beta_x"),
                law("eg_l_0", "alpha_l", "beta_l"),
            ],
            bowed: [
                number("delta_so"),
                number("me_gamma"),
                per_compound(table, heavy),
                per_compound(table, light),
                per_compound(table, difference),
                number("ep"),
                number("vbo"),
                number("ac"),
            ],
            bowings,
            valence_bowing_on_gaas,
            av_ev: number("av").map(|negative| -negative),
            b_ev: number("b"),
            c11_gpa: number("c11"),
            c12_gpa: number("c12"),
        }
    }

    /// The numbers of one composition.
    ///
    /// # Equation
    ///
    /// ```text
    ///  P = Σ c_i a_j P_ij − Σ_j a_j Σ_(i<i') c_i c_i' C_ii'j(u) − Σ_i c_i Σ_(j<j') a_j a_j' C_ijj'(u)
    ///  u = (1 + p − q)/2, p and q the fractions of the pair
    /// ```
    ///
    /// with gaps taken at the temperature before they bow; masses along growth and γ3 − γ2
    /// interpolated in place of the Luttinger parameters:
    ///
    /// ```text
    ///  γ1 = (1/m_lh + 1/m_hh)/2     γ2 = (1/m_lh − 1/m_hh)/4     γ3 = γ2 + (γ3 − γ2)
    /// ```
    ///
    /// # Reference
    ///
    /// I. Vurgaftman, J. R. Meyer, L. R. Ram-Mohan, J. Appl. Phys. 89, 5815 (2001);
    /// G. P. Donati, R. Kaspi, K. J. Malloy, J. Appl. Phys. 94, 5814 (2003) on adding the bowings.
    pub(super) fn crystal(
        &self,
        composition: &Composition,
        temperature_k: f64,
        valence_bowing: ValenceBowing,
    ) -> Crystal {
        let mixture = Mixture::of(composition);
        let gap = |which: Bowed| {
            let laws = &self.gaps[which as usize];
            let mut straight = 0.0;
            for (weight, law) in mixture.compounds.iter().zip(laws) {
                if *weight != 0.0 {
                    straight += weight * law.at(temperature_k);
                }
            }
            straight - mixture.bowing(&self.bowings[which as usize])
        };
        let bowed = |which: Bowed| {
            let straight = mixture.linear(&self.bowed[which as usize - 3]);
            straight - mixture.bowing(&self.bowings[which as usize])
        };
        let valence_edge_ev = match valence_bowing {
            ValenceBowing::Tabulated => bowed(Bowed::ValenceEdge),
            ValenceBowing::OnGaAs => {
                mixture.linear(&self.bowed[Bowed::ValenceEdge as usize - 3])
                    - mixture.bowing(&self.valence_bowing_on_gaas)
            }
        };
        let heavy = bowed(Bowed::HeavyMass).recip();
        let light = bowed(Bowed::LightMass).recip();
        let gamma2 = 0.25 * (light - heavy);
        Crystal {
            lattice_nm: mixture.linear(&self.lattice_nm)
                + mixture.linear(&self.expansion_nm_k) * (temperature_k - 300.0),
            gap_ev: gap(Bowed::GapGamma),
            gap_x_ev: gap(Bowed::GapX),
            gap_l_ev: gap(Bowed::GapL),
            valence_edge_ev,
            split_off_ev: bowed(Bowed::SplitOff),
            electron_mass: bowed(Bowed::ElectronMass),
            luttinger: [
                0.5 * (light + heavy),
                gamma2,
                gamma2 + bowed(Bowed::GammaDifference),
            ],
            kane_energy_ev: bowed(Bowed::KaneEnergy),
            ac_ev: bowed(Bowed::Conduction),
            av_ev: mixture.linear(&self.av_ev),
            b_ev: mixture.linear(&self.b_ev),
            c11_gpa: mixture.linear(&self.c11_gpa),
            c12_gpa: mixture.linear(&self.c12_gpa),
        }
    }
}

/// The mean of one number of the compounds, weighted by how much of each is in a composition.
pub(super) fn weighted(composition: &Composition, values: &PerCompound) -> f64 {
    Mixture::of(composition).linear(values)
}

/// A required number of a compound: the table has been validated, so it is there.
fn entry(material: &Material, word: &str) -> f64 {
    material
        .entries
        .get(word)
        .map_or(f64::NAN, |entry| entry.value[0])
}

fn gap_law(material: &Material, zero: &str, alpha: &str, beta: &str) -> GapLaw {
    let zero_ev = entry(material, zero);
    if zero == "eg_gamma_0" && material.entries.contains_key("coth_a") {
        GapLaw::Coth {
            zero_ev,
            amplitude_ev: entry(material, "coth_a"),
            theta_k: entry(material, "coth_theta"),
        }
    } else {
        GapLaw::Varshni {
            zero_ev,
            alpha_ev_k: entry(material, alpha),
            beta_k: entry(material, beta),
        }
    }
}

fn compound(table: &Table, place: usize) -> Option<&Material> {
    let elements = pair(&[Element::ALL[place / 3]], &[Element::ALL[3 + place % 3]]);
    table.binaries.get(&elements)
}

pub(super) fn per_compound(table: &Table, of: impl Fn(&Material) -> f64) -> PerCompound {
    std::array::from_fn(|place| compound(table, place).map_or(f64::NAN, &of))
}

/// The elements of one ternary in the order of [`PAIRS`], and the first of its two.
pub(super) fn ternary_elements(place: usize) -> (Elements, Element) {
    let (group_iii, number, other) = (place < 9, place % 9 / 3, place % 3);
    let (own, others) = if group_iii {
        (&Element::ALL[..3], &Element::ALL[3..])
    } else {
        (&Element::ALL[3..], &Element::ALL[..3])
    };
    let [first, second] = PAIR_PLACES[number].map(|at| own[at]);
    let elements = if group_iii {
        pair(&[first, second], &[others[other]])
    } else {
        pair(&[others[other]], &[first, second])
    };
    (elements, first)
}

/// Bowings of one quantity, as polynomials in the fraction of the first element of each pair.
fn per_pair(table: &Table, word: &str) -> PerPair {
    debug_assert!(TERNARY_KEYS.iter().any(|key| key.word == word));
    let bowing = |place: usize| {
        let (elements, first) = ternary_elements(place);
        let known = table.ternaries.get(&elements).and_then(|material| {
            let entry = material.entries.get(word)?;
            Some((material, entry))
        });
        let Some((material, entry)) = known else {
            return [0.0; BOWING_TERMS];
        };
        let mut terms = [0.0; BOWING_TERMS];
        for (term, value) in terms.iter_mut().zip(&entry.value) {
            *term = *value;
        }
        let of_first = material.ends.as_ref().is_some_and(|[end, _]| {
            Elements::parse(end).is_ok_and(|elements| elements.contains(first))
        });
        if !of_first {
            // C(x) with x = 1 − u
            let [c0, c1, c2] = terms;
            terms = [c0 + c1 + c2, -c1 - 2.0 * c2, c2];
        }
        terms
    };
    let bowings: [[f64; BOWING_TERMS]; PAIRS] = std::array::from_fn(bowing);
    std::array::from_fn(|power| bowings.map(|terms| terms[power]))
}
