//! The index part of the data file: coefficients of the closed forms, and what is said of them.

use super::interpolation::PerCompound;
use serde::Deserialize;
use std::collections::BTreeMap;
use std::fmt::Write as _;

/// What the data file says of a closed form.
#[derive(Clone, Debug, PartialEq, Deserialize)]
pub struct IndexStatement {
    /// What the coefficients depend on.
    pub variable: String,
    /// Where the form holds.
    pub range: String,
    /// The citation's key.
    pub source: String,
    /// How the coefficients are known.
    pub status: String,
    /// What they have been compared with.
    pub note: String,
}

/// The index part of the data file.
#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct IndexData {
    /// Smoothing of the absorption edge, eV.
    pub(super) seo_broadening: f64,
    pub(super) seo_broadening_source: String,
    pub(super) forms: BTreeMap<String, String>,
    pub(super) seo: Oscillators,
    pub(super) sellmeier1: Sellmeiers,
    pub(super) adachi_binary: AdachiBinary,
}

#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct Oscillators {
    #[serde(rename = "AlGaAs")]
    pub(super) algaas: Oscillator,
    #[serde(rename = "InGaAsP_InP")]
    pub(super) ingaasp_on_inp: Oscillator,
    #[serde(rename = "InGaAsP")]
    pub(super) ingaasp: OscillatorOfTwo,
    #[serde(rename = "InGaAs")]
    pub(super) ingaas: Oscillator,
}

/// Oscillator energies and gap, polynomials in one composition variable.
#[derive(Clone, Debug, Deserialize)]
pub(super) struct Oscillator {
    #[serde(flatten)]
    pub(super) statement: IndexStatement,
    pub(super) e0: Vec<f64>,
    pub(super) ed: Vec<f64>,
    pub(super) eg: Vec<f64>,
}

/// Oscillator energies as sums of coefficient · x^i · y^j.
#[derive(Clone, Debug, Deserialize)]
pub(super) struct OscillatorOfTwo {
    #[serde(flatten)]
    pub(super) statement: IndexStatement,
    pub(super) e0_terms: Vec<(f64, i32, i32)>,
    pub(super) ed_terms: Vec<(f64, i32, i32)>,
}

#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct Sellmeiers {
    #[serde(rename = "AlGaInAs_InP")]
    pub(super) algainas_on_inp: Sellmeier,
}

#[derive(Clone, Debug, Deserialize)]
pub(super) struct Sellmeier {
    #[serde(flatten)]
    pub(super) statement: IndexStatement,
    pub(super) a: Vec<f64>,
    pub(super) b: Vec<f64>,
    pub(super) c_nm: Vec<f64>,
}

#[derive(Clone, Debug, Deserialize)]
pub(super) struct AdachiBinary {
    #[serde(flatten)]
    pub(super) statement: IndexStatement,
    pub(super) strengths: CompoundStrengths,
}

/// A and B of each compound.
#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct CompoundStrengths {
    #[serde(rename = "AlP")]
    alp: [f64; 2],
    #[serde(rename = "AlAs")]
    alas: [f64; 2],
    #[serde(rename = "AlSb")]
    alsb: [f64; 2],
    #[serde(rename = "GaP")]
    gap: [f64; 2],
    #[serde(rename = "GaAs")]
    gaas: [f64; 2],
    #[serde(rename = "GaSb")]
    gasb: [f64; 2],
    #[serde(rename = "InP")]
    inp: [f64; 2],
    #[serde(rename = "InAs")]
    inas: [f64; 2],
    #[serde(rename = "InSb")]
    insb: [f64; 2],
}

impl CompoundStrengths {
    /// One of the two, in the order of the compounds.
    pub(super) fn per_compound(&self, which: usize) -> PerCompound {
        [
            self.alp, self.alas, self.alsb, self.gap, self.gaas, self.gasb, self.inp, self.inas,
            self.insb,
        ]
        .map(|strengths| strengths[which])
    }
}

impl IndexData {
    /// Every number, in a fixed order, for the digest of the data.
    pub(super) fn canonical(&self, text: &mut String) {
        let _ = writeln!(text, "index seo_broadening {:?}", self.seo_broadening);
        for (name, model) in [
            ("AlGaAs", &self.seo.algaas),
            ("InGaAsP_InP", &self.seo.ingaasp_on_inp),
            ("InGaAs", &self.seo.ingaas),
        ] {
            let _ = writeln!(
                text,
                "index {name} {:?} {:?} {:?}",
                model.e0, model.ed, model.eg
            );
        }
        let two = &self.seo.ingaasp;
        let _ = writeln!(text, "index InGaAsP {:?} {:?}", two.e0_terms, two.ed_terms);
        let three = &self.sellmeier1.algainas_on_inp;
        let _ = writeln!(
            text,
            "index AlGaInAs_InP {:?} {:?} {:?}",
            three.a, three.b, three.c_nm
        );
        let strengths = &self.adachi_binary.strengths;
        for which in 0..2 {
            let _ = writeln!(text, "index compounds {:?}", strengths.per_compound(which));
        }
    }
}
