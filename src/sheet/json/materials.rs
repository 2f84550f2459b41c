//! The documents of `materials`.

use super::FORMAT;
use crate::materials::{Description, Directness, Figure, Parameters};
use crate::sheet::Stamp;
use serde::Serialize;
use std::collections::BTreeMap;

#[derive(Serialize)]
struct FamiliesDocument<'a> {
    format: u32,
    stamp: &'a Stamp,
    families: Vec<FamilyEntry>,
}

#[derive(Serialize)]
struct FamilyEntry {
    name: String,
    ends: Vec<String>,
    gap_ev: [f64; 2],
    lattice_nm: [f64; 2],
    direct: &'static str,
    source: String,
}

#[derive(Serialize)]
struct DescriptionsDocument<'a> {
    format: u32,
    stamp: &'a Stamp,
    materials: Vec<MaterialEntry<'a>>,
    sources: BTreeMap<&'a str, &'a str>,
    statuses: BTreeMap<&'a str, &'a str>,
}

#[derive(Serialize)]
struct MaterialEntry<'a> {
    formula: &'a str,
    substrate: Option<&'a str>,
    temperature_k: f64,
    offsets: &'a str,
    figures: Vec<FigureEntry<'a>>,
    index: Vec<IndexEntry<'a>>,
}

#[derive(Serialize)]
struct FigureEntry<'a> {
    name: &'static str,
    values: Vec<Option<f64>>,
    unit: &'static str,
    sources: &'a [String],
    statuses: &'a [String],
}

#[derive(Serialize)]
struct IndexEntry<'a> {
    photon_ev: f64,
    index: f64,
    range: &'a str,
    source: &'a str,
    status: &'a str,
    advice: Vec<String>,
}

/// Every compound and ternary of the data as one JSON document.
#[must_use]
pub fn families(parameters: &Parameters, stamp: &Stamp) -> String {
    super::text(&FamiliesDocument {
        format: FORMAT,
        stamp,
        families: parameters
            .families()
            .into_iter()
            .map(|family| FamilyEntry {
                name: family.name,
                ends: family.ends,
                gap_ev: family.gap_ev,
                lattice_nm: family.lattice_nm,
                direct: match family.direct {
                    Directness::Everywhere => "everywhere",
                    Directness::InPart => "in part",
                    Directness::Nowhere => "nowhere",
                },
                source: family.source,
            })
            .collect(),
    })
}

/// Materials with every derived number as one JSON document.
#[must_use]
pub fn descriptions(descriptions: &[Description], stamp: &Stamp) -> String {
    let all = |pick: fn(&Description) -> &BTreeMap<String, String>| {
        descriptions
            .iter()
            .flat_map(pick)
            .map(|(key, text)| (key.as_str(), text.as_str()))
            .collect()
    };
    super::text(&DescriptionsDocument {
        format: FORMAT,
        stamp,
        materials: descriptions.iter().map(MaterialEntry::from).collect(),
        sources: all(|description| &description.citations),
        statuses: all(|description| &description.statuses),
    })
}

impl<'a> From<&'a Description> for MaterialEntry<'a> {
    fn from(description: &'a Description) -> Self {
        let figures = description.sections.iter().flat_map(|it| &it.figures);
        Self {
            formula: &description.formula,
            substrate: description.substrate.as_deref(),
            temperature_k: description.temperature_k,
            offsets: &description.offsets,
            figures: figures.map(FigureEntry::from).collect(),
            index: description
                .index
                .iter()
                .map(|figure| IndexEntry {
                    photon_ev: figure.photon_ev,
                    index: figure.index,
                    range: &figure.range,
                    source: &figure.source,
                    status: &figure.status,
                    advice: figure.advice.iter().map(ToString::to_string).collect(),
                })
                .collect(),
        }
    }
}

impl<'a> From<&'a Figure> for FigureEntry<'a> {
    fn from(figure: &'a Figure) -> Self {
        Self {
            name: figure.name,
            values: figure
                .values
                .iter()
                .map(|&value| value.is_finite().then_some(value))
                .collect(),
            unit: figure.unit,
            sources: &figure.sources,
            statuses: &figure.statuses,
        }
    }
}
