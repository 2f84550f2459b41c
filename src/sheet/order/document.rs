//! The record of a sheet as one JSON document.
//!
//! Keys are fixed under `"format": 1`. What does not exist is `null`; beside a number of the order
//! stands whether the file gave it, or it is common practice.

mod house;

use super::cautions::cautions;
use super::changes::Since;
use crate::design::{
    Audience, House, Ordered, OrderedEnd, OrderedLayer, Period, Targets, XrayTarget,
};
use crate::materials::{Composition, Element, Parameters};
use crate::sheet::json;
use crate::sheet::stamp::{Stamp, sha256};
use crate::structure::{Entry, Origin, Stack, order_fields, write};
use house::HouseEntry;
use serde::Serialize;
use serde_json::{Map, Value, json};
use std::collections::BTreeMap;

/// A sheet.
#[derive(Clone, Debug, PartialEq)]
pub struct Document {
    /// The document.
    pub value: Value,
}

/// What a sheet is made from.
#[derive(Debug)]
pub struct Origins<'a> {
    /// The structure, as the file says it.
    pub stack: &'a Stack,
    /// The text of the file.
    pub text: &'a str,
    /// SHA-256 of the bytes of the file.
    pub sha256: &'a str,
    /// The parameters in force.
    pub parameters: &'a Parameters,
}

#[derive(Serialize)]
struct Whole {
    format: u32,
    kind: &'static str,
    copy: &'static str,
    stamp: SheetStamp,
    order: BTreeMap<&'static str, FieldEntry>,
    asked_for: Vec<String>,
    substrate: SubstrateEntry,
    counts: CountsEntry,
    layers: Vec<LayerEntry>,
    targets: TargetsEntry,
    cautions: Vec<&'static str>,
    house: Option<HouseEntry>,
    since: Value,
    changes: Vec<Value>,
    structure: String,
}

/// What the numbers hang on; no condition of a device among it.
#[derive(Serialize)]
struct SheetStamp {
    program: String,
    /// Of the text under `structure`.
    structure_sha256: String,
    /// Of the file that the house keeps.
    source_sha256: String,
    parameters_sha256: String,
    parameter_files: Vec<String>,
}

#[derive(Serialize)]
struct FieldEntry {
    value: Value,
    origin: &'static str,
}

#[derive(Serialize)]
struct SubstrateEntry {
    formula: String,
    theta_deg: Option<f64>,
}

#[derive(Serialize)]
struct CountsEntry {
    wells: usize,
    inner_barriers: usize,
    outer_barriers: usize,
    words: String,
}

#[derive(Serialize)]
struct LayerEntry {
    number: usize,
    role: &'static str,
    #[serde(flatten)]
    end: EndEntry,
    grade_to: Option<EndEntry>,
    thickness_nm: f64,
    thickness_tolerance_nm: f64,
    conduction: &'static str,
    dopant: Option<String>,
    density_cm3: Option<f64>,
    period: Option<PeriodEntry>,
}

#[derive(Serialize)]
struct EndEntry {
    formula: String,
    /// By element, to the four decimals that are ordered; `structure` has all digits. Of a material
    /// of own numbers nothing is known.
    composition: Option<BTreeMap<&'static str, f64>>,
    strain: &'static str,
    strain_percent: f64,
    relaxed_mismatch_ppm: f64,
    perpendicular_mismatch_ppm: f64,
    gap_ev: f64,
    gap_nm: f64,
    direct: bool,
}

#[derive(Serialize)]
struct PeriodEntry {
    place: usize,
    of: usize,
}

#[derive(Serialize)]
struct TargetsEntry {
    pl_temperature_k: f64,
    pl_temperature_c: f64,
    /// In vacuum, like all but `pl_air_nm`.
    pl_nm: Option<f64>,
    pl_air_nm: Option<f64>,
    pl_tolerance_nm: Option<f64>,
    pl_calculated_nm: Option<f64>,
    pl_offset_nm: Option<f64>,
    pl_missing: Option<String>,
    xray_reflection: Option<String>,
    xray_period_nm: Option<f64>,
    xray_period_tolerance_nm: Option<f64>,
    xray_periods: Option<usize>,
    zero_order_arcsec: Option<f64>,
    zero_order_tolerance_arcsec: Option<f64>,
    mean_perpendicular_mismatch_ppm: Option<f64>,
    mean_relaxed_mismatch_ppm: Option<f64>,
    mean_strain: Option<&'static str>,
    satellite_spacing_arcsec: Option<f64>,
    satellite_orders: Vec<i32>,
    satellites_arcsec: Vec<f64>,
    xray_missing: Option<String>,
    total_nm: f64,
    total_tolerance_nm: f64,
}

impl Document {
    /// The record of a sheet.
    ///
    /// # Arguments
    ///
    /// * `house` – what stays in the house, on its copy
    /// * `since` – the revision that changes are told from, if any
    #[must_use]
    pub fn new(
        origins: &Origins<'_>,
        ordered: &Ordered,
        house: Option<&House<'_>>,
        since: Option<&Since>,
    ) -> Self {
        let audience = if house.is_some() {
            Audience::House
        } else {
            Audience::Grower
        };
        let structure = match audience {
            Audience::House => origins.text.to_owned(),
            Audience::Grower => write(&ordered.wafer),
        };
        let parameters = origins.parameters;
        let of_parameters = Stamp::of_parameters(parameters);
        let order = origins.stack.order.clone().unwrap_or_default();
        let for_reader = match audience {
            Audience::House => {
                // What the wafer's order took over from the target holds for both copies.
                let mut order = order;
                for field in order_fields().filter(|field| field.for_grower) {
                    let (entry, origin) = ordered.order.entry(field.path);
                    order.put(field.path, entry.filter(|_| origin == Origin::Given));
                }
                order
            }
            Audience::Grower => ordered.order.clone(),
        };
        let mut targets = TargetsEntry::from(&ordered.targets);
        if audience == Audience::Grower {
            // Why a solver came to nothing is for the house to know.
            targets.pl_missing = targets.pl_missing.map(|_| "to be agreed".to_owned());
        }
        let whole = Whole {
            format: json::FORMAT,
            kind: "design sheet",
            copy: audience.word(),
            stamp: SheetStamp {
                program: of_parameters.program,
                structure_sha256: sha256(structure.as_bytes()),
                source_sha256: origins.sha256.to_owned(),
                parameters_sha256: of_parameters.parameters_sha256,
                parameter_files: of_parameters.parameter_files,
            },
            order: fields(&for_reader, audience),
            asked_for: asked_for(&for_reader, audience, &ordered.layers),
            substrate: SubstrateEntry {
                formula: ordered.wafer.substrate.formula(),
                theta_deg: xray(&ordered.targets).map(|it| it.seen.substrate.theta_deg),
            },
            counts: CountsEntry {
                wells: ordered.counts.wells,
                inner_barriers: ordered.counts.inner_barriers,
                outer_barriers: ordered.counts.outer_barriers,
                words: ordered.counts.words(),
            },
            layers: ordered.layers.iter().map(LayerEntry::from).collect(),
            targets,
            cautions: cautions(&ordered.wafer),
            house: house.map(|house| HouseEntry::new(origins, house)),
            since: Value::Null,
            changes: Vec::new(),
            structure,
        };
        let mut document = Self {
            value: serde_json::to_value(whole).unwrap_or(Value::Null),
        };
        if let Some(since) = since {
            document.tell_changes(since);
        }
        document
    }

    /// The document as text.
    #[must_use]
    pub fn text(&self) -> String {
        json::text(&self.value)
    }

    /// The copy that it is.
    #[must_use]
    pub fn audience(&self) -> Audience {
        match self.text_at("/copy") {
            "house" => Audience::House,
            _ => Audience::Grower,
        }
    }

    /// What the sheet is called: the order's name and revision, as far as it has them.
    #[must_use]
    pub fn name(&self) -> String {
        let id = self.text_at("/order/id/value");
        let revision = self.text_at("/order/revision/value");
        match (id, revision) {
            ("", _) => "Epitaxy order, not yet named".to_owned(),
            (id, "") => format!("Epitaxy order {id}"),
            (id, revision) => format!("Epitaxy order {id}, revision {revision}"),
        }
    }

    /// The stamp of the sheet for its figures: checksums, and no condition of a device.
    #[must_use]
    pub fn stamp(&self) -> Stamp {
        let files = self.list_at("/stamp/parameter_files").iter();
        Stamp {
            program: self.text_at("/stamp/program").to_owned(),
            input_sha256: Some(self.text_at("/stamp/structure_sha256").to_owned()),
            parameters_sha256: self.text_at("/stamp/parameters_sha256").to_owned(),
            parameter_files: files.filter_map(Value::as_str).map(str::to_owned).collect(),
            temperature_k: self.number_at("/targets/pl_temperature_k"),
            temperature_is_default: Some(false),
            densities_cm3: Vec::new(),
            working_density_cm3: None,
            model: None,
            seed: None,
        }
    }

    /// Says which other files of the sheet there are.
    pub fn list_files(&mut self, files: &[(String, Vec<u8>)]) {
        let files: Vec<Value> = files
            .iter()
            .map(|(name, bytes)| json!({ "name": name, "sha256": sha256(bytes) }))
            .collect();
        self.put("files", Value::Array(files));
    }

    pub(super) fn put(&mut self, key: &str, value: Value) {
        if let Value::Object(map) = &mut self.value {
            map.insert(key.to_owned(), value);
        }
    }

    /// The text at a place, empty where there is none.
    pub(super) fn text_at(&self, pointer: &str) -> &str {
        let found = self.value.pointer(pointer);
        found.and_then(Value::as_str).unwrap_or_default()
    }

    /// The number at a place.
    pub(super) fn number_at(&self, pointer: &str) -> Option<f64> {
        self.value.pointer(pointer).and_then(Value::as_f64)
    }

    /// The list at a place, empty where there is none.
    pub(super) fn list_at(&self, pointer: &str) -> &[Value] {
        let found = self.value.pointer(pointer).and_then(Value::as_array);
        found.map_or(&[], Vec::as_slice)
    }

    /// The table at a place.
    pub(super) fn map_at(&self, pointer: &str) -> Option<&Map<String, Value>> {
        self.value.pointer(pointer).and_then(Value::as_object)
    }
}

/// Every field that the reader may see.
fn fields(
    order: &crate::structure::Order,
    audience: Audience,
) -> BTreeMap<&'static str, FieldEntry> {
    order_fields()
        .filter(|field| field.for_grower || audience == Audience::House)
        .map(|field| {
            let (entry, origin) = order.entry(field.path);
            let value = match entry {
                None => Value::Null,
                Some(Entry::Text(words)) => Value::from(words),
                Some(Entry::List(items)) => Value::from(items),
                Some(Entry::Number(number)) => Value::from(number),
            };
            let origin = origin.word();
            (field.path, FieldEntry { value, origin })
        })
        .collect()
}

/// What an order needs and has not: fields by their labels, compositions of materials that are given
/// by numbers, dopants.
fn asked_for(
    order: &crate::structure::Order,
    audience: Audience,
    layers: &[OrderedLayer],
) -> Vec<String> {
    let fields = order_fields()
        .filter(|field| field.for_grower || audience == Audience::House)
        .filter(|field| order.entry(field.path).1 == Origin::AskedFor)
        .map(|field| field.label.to_owned());
    let mut asked: Vec<String> = fields.collect();
    for layer in layers {
        let ends = std::iter::once(&layer.lower).chain(&layer.upper);
        for end in ends.filter(|end| end.composition.is_none()) {
            let composition = format!("Composition of {}", end.formula);
            if !asked.contains(&composition) {
                asked.push(composition);
            }
        }
        if layer.density_cm3.is_some() && layer.dopant.is_none() {
            asked.push(format!("Dopant of layer {}", layer.number));
        }
    }
    asked
}

impl From<&OrderedLayer> for LayerEntry {
    fn from(layer: &OrderedLayer) -> Self {
        Self {
            number: layer.number,
            role: layer.role.word(),
            end: EndEntry::from(&layer.lower),
            grade_to: layer.upper.as_ref().map(EndEntry::from),
            thickness_nm: layer.thickness_nm,
            thickness_tolerance_nm: layer.tolerance_nm,
            conduction: layer.conduction.word(),
            dopant: layer.dopant.clone(),
            density_cm3: layer.density_cm3,
            period: layer
                .period
                .map(|Period { place, of }| PeriodEntry { place, of }),
        }
    }
}

impl From<&OrderedEnd> for EndEntry {
    fn from(end: &OrderedEnd) -> Self {
        let composition = end.composition.map(|composition| {
            // Four decimals that sum to 1 on each sublattice, as formulas are written.
            let ordered = Composition::parse(&end.formula).unwrap_or(composition);
            let fraction = |element: Element| (element.symbol(), ordered.fraction(element));
            let held = Element::ALL.map(fraction).into_iter();
            held.filter(|(_, fraction)| *fraction > 0.0).collect()
        });
        Self {
            formula: end.formula.clone(),
            composition,
            strain: end.mismatch.sense().word(),
            strain_percent: end.mismatch.strain_percent(),
            relaxed_mismatch_ppm: end.mismatch.relaxed_ppm(),
            perpendicular_mismatch_ppm: end.mismatch.perpendicular_ppm(),
            gap_ev: end.gap_ev,
            gap_nm: end.gap_nm,
            direct: end.is_direct,
        }
    }
}

fn xray(targets: &Targets) -> Option<&XrayTarget> {
    targets.xray.as_ref().ok()
}

impl From<&Targets> for TargetsEntry {
    fn from(targets: &Targets) -> Self {
        let pl = targets.pl.as_ref().ok();
        let xray = xray(targets);
        let multi_well = xray.and_then(|it| it.seen.multi_well.as_ref());
        let satellites = || {
            let all = multi_well.iter().flat_map(|it| &it.satellites);
            all.filter(|satellite| satellite.order != 0)
        };
        let xray_missing = match (&targets.xray, multi_well) {
            (Err(reason), _) => Some(reason.clone()),
            (Ok(_), None) => Some("the wells do not repeat: there are no satellites".to_owned()),
            _ => None,
        };
        Self {
            pl_temperature_k: targets.temperature_k,
            pl_temperature_c: targets.temperature_k - crate::units::CELSIUS_ZERO_K,
            pl_nm: pl.map(|it| it.vacuum_nm),
            pl_air_nm: pl.map(|it| it.air_nm),
            pl_tolerance_nm: pl.map(|it| it.tolerance_nm),
            pl_calculated_nm: pl.map(|it| it.calculated_nm),
            pl_offset_nm: pl.map(|it| it.offset_nm),
            pl_missing: targets.pl.as_ref().err().cloned(),
            xray_reflection: xray.map(|it| it.seen.reflection.to_string()),
            xray_period_nm: multi_well.map(|it| it.period_nm),
            xray_period_tolerance_nm: xray.and_then(|it| it.period_tolerance_nm),
            xray_periods: multi_well.map(|it| it.periods),
            zero_order_arcsec: multi_well
                .and_then(|it| it.zero_order())
                .map(|it| it.peak.offset_arcsec),
            zero_order_tolerance_arcsec: xray.and_then(|it| it.zero_order_tolerance_arcsec),
            mean_perpendicular_mismatch_ppm: multi_well.map(|it| it.mean.perpendicular_ppm()),
            mean_relaxed_mismatch_ppm: multi_well.map(|it| it.mean.relaxed_ppm()),
            mean_strain: multi_well.map(|it| it.mean.sense().word()),
            satellite_spacing_arcsec: multi_well.map(|it| it.spacing_arcsec),
            satellite_orders: satellites().map(|it| it.order).collect(),
            satellites_arcsec: satellites().map(|it| it.peak.offset_arcsec).collect(),
            xray_missing,
            total_nm: targets.total_nm,
            total_tolerance_nm: targets.total_tolerance_nm,
        }
    }
}
