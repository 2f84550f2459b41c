//! The part of the record that stays in the house.

use super::Origins;
use crate::design::{Gap, House, Spread};
use crate::evaluation::{GainPeak, Run, Spectrum, budget};
use crate::materials::Parameters;
use crate::sheet::findings;
use crate::sheet::json::cause_key;
use crate::sheet::stamp::Stamp;
use crate::structure::Wavelength;
use crate::units::wavelength_nm;
use serde::Serialize;
use std::collections::BTreeMap;

#[derive(Serialize)]
pub(super) struct HouseEntry {
    title: String,
    /// Temperature, switches and rules in words.
    model: Vec<String>,
    temperature_k: f64,
    emission: Option<EmissionEntry>,
    budget: Vec<TermEntry>,
    transparency_cm3: Option<f64>,
    law: Option<LawEntry>,
    densities: Vec<DensityEntry>,
    spread: Option<SpreadEntry>,
    threshold: Option<f64>,
    findings: Vec<FindingEntry>,
    sources: Vec<SourceEntry>,
    citations: Vec<String>,
    /// What is left blank, and why.
    blank: Vec<String>,
}

#[expect(
    clippy::struct_field_names,
    reason = "they are the keys of the document"
)]
#[derive(Serialize)]
struct EmissionEntry {
    first_transition_nm: f64,
    pl_nm: Option<f64>,
    gain_peak_nm: Option<f64>,
    gain_peak_unshrunk_nm: Option<f64>,
}

#[derive(Serialize)]
struct TermEntry {
    term: &'static str,
    adds_mev: f64,
    sum_mev: f64,
    sum_nm: f64,
}

#[derive(Serialize)]
struct LawEntry {
    polarization: &'static str,
    g0_cm: f64,
    transparency_cm3: f64,
}

#[derive(Serialize)]
struct DensityEntry {
    density_cm3: f64,
    te_gain_cm: Option<f64>,
    te_peak_nm: Option<f64>,
    tm_gain_cm: Option<f64>,
    tm_peak_nm: Option<f64>,
    emission_nm: Option<f64>,
    radiative_current_a_cm2: Option<f64>,
}

#[derive(Serialize)]
struct SpreadEntry {
    of: &'static str,
    nominal_nm: f64,
    sigma_nm: f64,
    draws: usize,
    seed: u64,
    /// How the wavelengths are solved for.
    bands: &'static str,
    target_nm: Option<f64>,
    tolerance_nm: Option<f64>,
    yield_percent: Option<f64>,
    yield_with_model_error_percent: Option<f64>,
    model_sigma_nm: f64,
    sensitivities: Vec<SensitivityEntry>,
}

#[derive(Serialize)]
struct SensitivityEntry {
    variable: String,
    sigma: f64,
    unit: &'static str,
    nm: f64,
    variance_percent: f64,
}

#[derive(Serialize)]
struct FindingEntry {
    code: String,
    standing: &'static str,
    message: String,
    advice: Option<String>,
}

#[derive(Serialize)]
struct SourceEntry {
    formula: String,
    /// Numbers of the citations, from 1.
    citations: Vec<usize>,
}

impl HouseEntry {
    pub(super) fn new(origins: &Origins<'_>, house: &House<'_>) -> Self {
        let stack = origins.stack;
        let evaluation = house.evaluation.as_ref().ok();
        let spectrum = house.spectrum.as_ref().and_then(|it| it.as_ref().ok());
        let offsets = evaluation.map(|it| it.profile.offsets);
        let stamp = Stamp::new(stack, origins.parameters, offsets, origins.sha256);
        let (sources, citations) = sources(house, origins);
        Self {
            title: stack.title.clone(),
            model: stamp.words(),
            temperature_k: stack.operation.temperature_k,
            emission: evaluation.map(|it| {
                let emission = it.emission();
                EmissionEntry {
                    first_transition_nm: emission.first_transition_nm,
                    pl_nm: emission.pl_nm,
                    gain_peak_nm: emission.gain_peak_nm,
                    gain_peak_unshrunk_nm: emission.gain_peak_unshrunk_nm,
                }
            }),
            budget: evaluation.and_then(budget).map_or_else(Vec::new, |budget| {
                let mut sum_ev = 0.0;
                let terms = budget.terms().into_iter();
                terms
                    .map(|(term, adds_ev)| {
                        sum_ev += adds_ev;
                        TermEntry {
                            term,
                            adds_mev: 1e3 * adds_ev,
                            sum_mev: 1e3 * sum_ev,
                            sum_nm: wavelength_nm(sum_ev),
                        }
                    })
                    .collect()
            }),
            transparency_cm3: spectrum
                .and_then(|it| it.transparency)
                .map(|it| it.density_cm3),
            law: spectrum.and_then(law),
            densities: spectrum.map_or_else(Vec::new, |it| {
                it.runs.iter().map(DensityEntry::from).collect()
            }),
            spread: house.spread.as_ref().ok().map(SpreadEntry::from),
            threshold: None,
            findings: house
                .findings
                .iter()
                .map(|finding| FindingEntry {
                    code: finding.code().to_owned(),
                    standing: finding.standing().word(),
                    message: findings::message(finding),
                    advice: findings::advice(finding),
                })
                .collect(),
            sources,
            citations,
            blank: house.gaps().iter().map(reason).collect(),
        }
    }
}

fn law(spectrum: &Spectrum) -> Option<LawEntry> {
    let (polarization, fit) = spectrum.fit?;
    Some(LawEntry {
        polarization,
        g0_cm: fit.g0_cm,
        transparency_cm3: fit.transparency_cm3,
    })
}

impl From<&Run> for DensityEntry {
    fn from(run: &Run) -> Self {
        let gain = |peak: Option<GainPeak>| peak.map(|it| it.gain_cm);
        let nm = |peak: Option<GainPeak>| peak.map(|it| it.peak_nm);
        Self {
            density_cm3: run.density_cm3,
            te_gain_cm: gain(run.te),
            te_peak_nm: nm(run.te),
            tm_gain_cm: gain(run.tm),
            tm_peak_nm: nm(run.tm),
            emission_nm: run.spontaneous.map(|it| it.peak_nm),
            radiative_current_a_cm2: run.spontaneous.map(|it| it.current_a_cm2),
        }
    }
}

impl From<&Spread> for SpreadEntry {
    fn from(spread: &Spread) -> Self {
        Self {
            of: spread.request.kind.meaning(),
            nominal_nm: spread.nominal_nm,
            sigma_nm: spread.sampled.sigma_nm,
            draws: spread.request.draws,
            seed: spread.request.seed,
            bands: match spread.request.kind {
                Wavelength::Gain => "those of the model",
                _ => "single",
            },
            target_nm: spread.good.map(|it| it.target_nm),
            tolerance_nm: spread.good.map(|it| it.tolerance_nm),
            yield_percent: spread.good.map(|it| 100.0 * it.sampled),
            yield_with_model_error_percent: spread.good.map(|it| 100.0 * it.with_model),
            model_sigma_nm: spread.request.model_nm,
            sensitivities: spread
                .sensitivities
                .iter()
                .map(|it| SensitivityEntry {
                    variable: cause_key(it.variable.cause),
                    sigma: it.variable.sigma,
                    unit: it.variable.cause.unit(),
                    nm: it.nm,
                    variance_percent: 100.0 * it.share,
                })
                .collect(),
        }
    }
}

/// Every alloy with the numbers of its citations, and the citations.
fn sources(house: &House<'_>, origins: &Origins<'_>) -> (Vec<SourceEntry>, Vec<String>) {
    let substrate = house.alloys.first();
    let kelvin = origins.stack.operation.temperature_k;
    let parameters: &Parameters = origins.parameters;
    let mut numbers: BTreeMap<String, usize> = BTreeMap::new();
    let mut citations = Vec::new();
    let entries = house
        .alloys
        .iter()
        .filter_map(|alloy| parameters.describe(alloy, substrate, kelvin, None).ok())
        .map(|description| SourceEntry {
            citations: description
                .citations
                .values()
                .map(|citation| {
                    *numbers.entry(citation.clone()).or_insert_with(|| {
                        citations.push(citation.clone());
                        citations.len()
                    })
                })
                .collect(),
            formula: description.formula,
        })
        .collect();
    (entries, citations)
}

/// Why something is left blank, and what would fill it.
fn reason(gap: &Gap) -> String {
    match gap {
        Gap::NoGrowth => {
            "Sensitivities and yield: the file has no [growth], which says by how much \
             growth varies."
                .to_owned()
        }
        Gap::Spread(error) => format!("Sensitivities and yield: {error}."),
        Gap::Failed(failure) => format!("Levels and spectra: {failure}."),
        Gap::NoThreshold => {
            "Threshold density and current: the program does not compute them; to be \
             filled in from measurement or by hand."
                .to_owned()
        }
    }
}
