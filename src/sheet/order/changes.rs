//! What is ordered otherwise than on an earlier sheet.

mod alignment;

use super::document::Document;
use super::once::Once;
use crate::sheet::number::plain;
use crate::structure::order_fields;
use alignment::aligned;
use serde::Serialize;
use serde_json::{Value, json};

/// The earlier sheet.
#[derive(Clone, Debug, PartialEq)]
pub struct Since {
    value: Value,
}

/// Why a file is no sheet.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Unreadable {
    /// No JSON.
    #[error("it is no JSON: {0}")]
    NoJson(String),
    /// JSON of something else.
    #[error("it is JSON, and not the record of a design sheet")]
    NoSheet,
    /// A format of the future.
    #[error("it is a design sheet of format {0}, and this program reads format 1")]
    Format(String),
}

/// Something that is ordered otherwise.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Change {
    /// Its place in the record; of what is gone the place where it was in the earlier one.
    pub place: String,
    /// In words.
    pub words: String,
    /// What was ordered.
    pub before: Value,
    /// What is ordered now.
    pub after: Value,
}

/// The record in a text.
pub(super) fn record(text: &str) -> Result<Value, Unreadable> {
    let no_json = |error: serde_json::Error| Unreadable::NoJson(error.to_string());
    let value: Value = serde_json::from_str(text).map_err(no_json)?;
    serde_json::from_str::<Once>(text).map_err(no_json)?;
    if value.get("kind").and_then(Value::as_str) != Some("design sheet") {
        return Err(Unreadable::NoSheet);
    }
    match value.get("format") {
        Some(format) if format == &json!(1) => Ok(value),
        Some(format) => Err(Unreadable::Format(format.to_string())),
        None => Err(Unreadable::NoSheet),
    }
}

impl Since {
    /// The earlier sheet in the text of its record.
    ///
    /// # Errors
    ///
    /// [`Unreadable`] if the text is no record of a sheet.
    pub fn read(text: &str) -> Result<Self, Unreadable> {
        record(text).map(|value| Self { value })
    }

    fn text(&self, key: &str) -> Value {
        let found = self.value.pointer(&format!("/order/{key}/value"));
        found.cloned().unwrap_or(Value::Null)
    }
}

impl Document {
    /// Writes into the record what is ordered otherwise than on an earlier sheet.
    pub(super) fn tell_changes(&mut self, since: &Since) {
        let changes = changes(&since.value, &self.value);
        let structure = since.value.pointer("/stamp/structure_sha256").cloned();
        let earlier = json!({
            "id": since.text("id"),
            "revision": since.text("revision"),
            "structure_sha256": structure,
        });
        self.put("since", earlier);
        let changes = serde_json::to_value(changes).unwrap_or(Value::Null);
        self.put("changes", changes);
    }

    /// What is ordered otherwise, in words: what several layers have in common is told once.
    #[must_use]
    pub fn changes(&self) -> Vec<String> {
        let told = self.list_at("/changes").iter().filter_map(|change| {
            let text = |key: &str| change.get(key).and_then(Value::as_str);
            Some((text("place")?, text("words")?))
        });
        gathered(told)
    }

    /// Whether the revision is the same word as on the earlier sheet.
    #[must_use]
    pub fn repeats_revision(&self) -> bool {
        let revision = self.text_at("/order/revision/value");
        !revision.is_empty() && revision == self.text_at("/since/revision")
    }
}

/// Numbers of a layer that are ordered, or follow from what is ordered, with their names and units.
const OF_LAYER: [(&str, &str, &str); 5] = [
    ("thickness_nm", "thickness", " nm"),
    ("thickness_tolerance_nm", "tolerance", " nm"),
    ("dopant", "dopant", ""),
    ("conduction", "conduction", ""),
    ("density_cm3", "doping", " cm⁻³"),
];
const OF_END: [(&str, &str, &str); 1] = [("formula", "composition", "")];
const OF_TARGETS: [(&str, &str, &str); 8] = [
    ("pl_temperature_k", "temperature of the bench", " K"),
    ("pl_nm", "photoluminescence peak in vacuum", " nm"),
    (
        "pl_tolerance_nm",
        "tolerance of the photoluminescence peak",
        " nm",
    ),
    ("xray_period_nm", "X-ray period", " nm"),
    ("xray_period_tolerance_nm", "tolerance of the period", " nm"),
    ("zero_order_arcsec", "zero order", "″"),
    (
        "zero_order_tolerance_arcsec",
        "tolerance of the zero order",
        "″",
    ),
    ("total_nm", "total thickness", " nm"),
];

fn changes(before: &Value, after: &Value) -> Vec<Change> {
    let mut changes = of_layers(before, after);
    let pair = |pointer: &str| (before.pointer(pointer), after.pointer(pointer));
    if let Some(change) = change(
        "/substrate/formula",
        "substrate",
        "",
        pair("/substrate/formula"),
    ) {
        changes.push(change);
    }
    for (key, name, unit) in OF_TARGETS {
        let place = format!("/targets/{key}");
        changes.extend(change(&place, name, unit, pair(&place)));
    }
    // A revision names itself; that its name and date are others is no change of the order.
    let names = ["id", "revision", "date", "status", "supersedes"];
    for field in order_fields() {
        if names.contains(&field.path) || !field.for_grower {
            continue;
        }
        let place = format!("/order/{}/value", field.path);
        let unit = match field.unit() {
            "" => String::new(),
            unit => format!(" {unit}"),
        };
        let name = field.label.to_lowercase();
        changes.extend(change(&place, &name, &unit, pair(&place)));
    }
    changes
}

fn of_layers(before: &Value, after: &Value) -> Vec<Change> {
    let list = |of: &Value| {
        let layers = of.pointer("/layers").and_then(Value::as_array);
        layers.cloned().unwrap_or_default()
    };
    let (old, new) = (list(before), list(after));
    let named = |layer: &Value| {
        let text = |key: &str| layer.get(key).and_then(Value::as_str).unwrap_or_default();
        format!("{} {}", text("role"), text("formula"))
    };
    let mut changes = Vec::new();
    for (was, is) in aligned(&old, &new) {
        match (was, is) {
            (Some(was), Some(is)) => {
                let place = format!("/layers/{is}");
                let name = format!("layer {}, {}", is + 1, role(&new[is]));
                changes.extend(of_layer(&place, &name, &old[was], &new[is]));
            }
            (None, Some(is)) => changes.push(Change {
                place: format!("/layers/{is}"),
                words: format!("layer {}: {} is new", is + 1, named(&new[is])),
                before: Value::Null,
                after: new[is]["formula"].clone(),
            }),
            (Some(was), None) => changes.push(Change {
                place: format!("earlier/layers/{was}"),
                words: format!("earlier layer {}: {} is gone", was + 1, named(&old[was])),
                before: old[was]["formula"].clone(),
                after: Value::Null,
            }),
            (None, None) => {}
        }
    }
    changes
}

fn role(layer: &Value) -> &str {
    layer
        .get("role")
        .and_then(Value::as_str)
        .unwrap_or_default()
}

fn of_layer(place: &str, name: &str, was: &Value, is: &Value) -> Vec<Change> {
    let of = |keys: &[(&str, &str, &str)], at: &str, lead: &str| -> Vec<Change> {
        keys.iter()
            .filter_map(|(key, what, unit)| {
                let pointer = format!("{at}/{key}");
                let pair = (was.pointer(&pointer), is.pointer(&pointer));
                let name = format!("{name}: {lead}{what}");
                change(&format!("{place}{pointer}"), &name, unit, pair)
            })
            .collect()
    };
    let mut changes = of(&OF_END, "", "");
    changes.extend(of(&OF_END, "/grade_to", "upper end, "));
    changes.extend(of(&OF_LAYER, "", ""));
    changes
}

/// Most layers of one change that are told by their numbers.
const MOST_TOLD: usize = 12;

/// Changes by their places and words; those of layers that differ in the number only become one.
fn gathered<'a>(changes: impl Iterator<Item = (&'a str, &'a str)>) -> Vec<String> {
    let mut gathered: Vec<(Vec<usize>, &str)> = Vec::new();
    for (place, words) in changes {
        let index = place
            .strip_prefix("/layers/")
            .and_then(|rest| rest.split('/').next()?.parse::<usize>().ok());
        let of_layer = index.and_then(|index| {
            let rest = words.strip_prefix(&format!("layer {}", index + 1))?;
            Some((index + 1, rest))
        });
        let Some((number, rest)) = of_layer else {
            gathered.push((Vec::new(), words));
            continue;
        };
        let known = gathered
            .iter_mut()
            .find(|(numbers, known)| !numbers.is_empty() && *known == rest);
        match known {
            Some((numbers, _)) => numbers.push(number),
            None => gathered.push((vec![number], rest)),
        }
    }
    let said = |(numbers, words): (Vec<usize>, &str)| match numbers.as_slice() {
        [] => words.to_owned(),
        [one] => format!("layer {one}{words}"),
        many => {
            let told = many.iter().take(MOST_TOLD).map(ToString::to_string);
            let told = told.collect::<Vec<_>>().join(", ");
            match many.len().saturating_sub(MOST_TOLD) {
                0 => format!("layers {told}{words}"),
                more => format!("layers {told} and {more} more{words}"),
            }
        }
    };
    gathered.into_iter().map(said).collect()
}

/// A difference that is more than rounding.
fn change(
    place: &str,
    name: &str,
    unit: &str,
    (was, is): (Option<&Value>, Option<&Value>),
) -> Option<Change> {
    let [before, after] = [was, is].map(|it| it.cloned().unwrap_or(Value::Null));
    let is_same = match (before.as_f64(), after.as_f64()) {
        (Some(a), Some(b)) => (a - b).abs() <= 1e-9 * a.abs().max(b.abs()),
        _ => before == after,
    };
    if is_same {
        return None;
    }
    let mut words = format!("{name} {} → {}", said(&before, unit), said(&after, unit));
    if let (Some(was), Some(is)) = (before.as_f64(), after.as_f64()) {
        let more = is - was;
        let sign = if more > 0.0 { "+" } else { "−" };
        words = format!("{words} ({sign}{}{unit})", rounded(more.abs(), 3));
    }
    Some(Change {
        place: place.to_owned(),
        words,
        before,
        after,
    })
}

/// A value as a person would say it.
fn said(value: &Value, unit: &str) -> String {
    match value {
        Value::Null => "nothing".to_owned(),
        Value::Number(number) => {
            let number = number.as_f64().unwrap_or(f64::NAN);
            format!("{}{unit}", rounded(number, 6))
        }
        Value::String(text) => format!("“{}”", crate::sheet::page::tidy(text)),
        Value::Array(items) => {
            let items: Vec<String> = items.iter().map(|item| said(item, "")).collect();
            items.join(", ")
        }
        other => other.to_string(),
    }
}

/// A number to so many digits: what rounding leaves is not worth saying.
fn rounded(number: f64, digits: i32) -> String {
    let size = number.abs();
    if size < 1e-300 {
        return plain(0.0);
    }
    let scale = 10f64.powi((digits - 1 - size.log10().floor() as i32).clamp(-300, 300));
    let text = plain((size * scale).round() / scale);
    if number < 0.0 {
        format!("−{text}")
    } else {
        text
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn layer(role: &str, formula: &str, nm: f64) -> Value {
        json!({ "role": role, "formula": formula, "thickness_nm": nm })
    }

    fn words(old: &[Value], new: &[Value]) -> Vec<String> {
        let of = |layers: &[Value]| json!({ "layers": layers });
        let changes = changes(&of(old), &of(new));
        changes.into_iter().map(|change| change.words).collect()
    }

    #[test]
    fn a_thickness_is_told_with_its_difference() {
        let (old, new) = (layer("well", "GaAs", 8.0), layer("well", "GaAs", 7.6));
        assert_eq!(
            words(&[old], &[new]),
            ["layer 1, well: thickness 8 nm → 7.6 nm (−0.4 nm)"]
        );
    }

    #[test]
    fn a_layer_between_others_moves_no_other() {
        let (a, b, c) = (
            layer("buffer", "GaAs", 500.0),
            layer("well", "GaAs", 8.0),
            layer("cap", "GaAs", 20.0),
        );
        let new = layer("spacer", "AlAs", 10.0);
        assert_eq!(
            words(
                &[a.clone(), b.clone(), c.clone()],
                &[a.clone(), b.clone(), new.clone(), c.clone()]
            ),
            ["layer 3: spacer AlAs is new"]
        );
        assert_eq!(
            words(&[a.clone(), b.clone(), new, c.clone()], &[a, b, c]),
            ["earlier layer 3: spacer AlAs is gone"]
        );
    }

    #[test]
    fn what_layers_have_in_common_is_told_once() {
        let told = [
            (
                "/layers/5/thickness_nm",
                "layer 6, well: thickness 5 nm → 6 nm",
            ),
            ("/layers/5/dopant", "layer 6, well: dopant nothing → Si"),
            (
                "/layers/7/thickness_nm",
                "layer 8, well: thickness 5 nm → 6 nm",
            ),
            ("/targets/total_nm", "total thickness 10 nm → 12 nm"),
        ];
        assert_eq!(
            gathered(told.into_iter()),
            [
                "layers 6, 8, well: thickness 5 nm → 6 nm",
                "layer 6, well: dopant nothing → Si",
                "total thickness 10 nm → 12 nm",
            ]
        );
        let places: Vec<(String, String)> = (0..20)
            .map(|it| (format!("/layers/{it}"), format!("layer {}: new", it + 1)))
            .collect();
        let many = places
            .iter()
            .map(|(place, words)| (place.as_str(), words.as_str()));
        assert_eq!(
            gathered(many),
            ["layers 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12 and 8 more: new"]
        );
    }

    #[test]
    fn other_files_are_refused() {
        assert!(matches!(Since::read("{"), Err(Unreadable::NoJson(_))));
        assert_eq!(Since::read("{}"), Err(Unreadable::NoSheet));
        let future = "{\"kind\": \"design sheet\", \"format\": 2}";
        assert_eq!(Since::read(future), Err(Unreadable::Format("2".to_owned())));
    }
}
