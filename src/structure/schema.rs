//! The JSON Schema of the structure file, for editors.

use serde_json::{Map, Value, json};

use super::keys::{FILE, Key, Kind, Magnitude, Table};

/// The JSON Schema (draft 7; only what draft 4 knows too, beside the name of the draft).
///
/// It knows keys, kinds, words and bounds; what holds between keys is for [`read`](super::read).
#[must_use]
pub fn schema() -> Value {
    let mut definitions = Map::new();
    define(&FILE, &mut definitions);
    let mut file = definitions.remove(&name_of(&FILE)).unwrap_or_default();
    if let Value::Object(file) = &mut file {
        file.insert(
            "$schema".to_owned(),
            json!("http://json-schema.org/draft-07/schema#"),
        );
        file.insert("title".to_owned(), json!("structure file"));
        file.insert(
            "required".to_owned(),
            json!(["format", "substrate", "layers"]),
        );
        file.insert("definitions".to_owned(), Value::Object(definitions));
    }
    file
}

/// Name of a table's definition: the last word of its path that is no placeholder.
fn name_of(table: &Table) -> String {
    match table.path {
        "" => "file".to_owned(),
        "materials.NAME" => "material".to_owned(),
        "layers" => "row".to_owned(),
        path => path.rsplit('.').next().unwrap_or(path).to_owned(),
    }
}

fn define(table: &'static Table, definitions: &mut Map<String, Value>) {
    let name = name_of(table);
    if definitions.contains_key(&name) {
        return;
    }
    // Held while its keys are described: a row holds rows.
    definitions.insert(name.clone(), Value::Null);
    let properties: Map<String, Value> = table
        .keys
        .iter()
        .map(|key| (key.name.to_owned(), described(key, definitions)))
        .collect();
    let definition = json!({
        "type": "object",
        "description": table.doc,
        "properties": properties,
        "additionalProperties": false,
    });
    definitions.insert(name, definition);
}

fn described(key: &'static Key, definitions: &mut Map<String, Value>) -> Value {
    let mut value = match &key.kind {
        Kind::Text | Kind::Prose => json!({ "type": "string", "minLength": 1 }),
        Kind::Word(words) => json!({ "enum": words() }),
        Kind::Flag => json!({ "type": "boolean" }),
        Kind::Count(lowest, highest) if lowest == highest => json!({ "enum": [lowest] }),
        Kind::Count(lowest, highest) => {
            json!({ "type": "integer", "minimum": lowest, "maximum": highest })
        }
        Kind::Number(magnitude) => number(*magnitude),
        Kind::Texts(most) => json!({
            "type": "array",
            "items": { "type": "string", "minLength": 1 },
            "minItems": 1,
            "maxItems": most,
        }),
        Kind::Numbers(magnitude, fewest, most) => json!({
            "type": "array",
            "items": number(*magnitude),
            "minItems": fewest,
            "maxItems": most,
        }),
        Kind::Table(table) => {
            define(table, definitions);
            return json!({ "allOf": [reference(table)], "description": key.doc });
        }
        Kind::Named(table) => {
            define(table, definitions);
            json!({ "type": "object", "additionalProperties": reference(table) })
        }
        Kind::Rows(table) => {
            define(table, definitions);
            json!({ "type": "array", "items": reference(table), "minItems": 1 })
        }
    };
    let default = match key.default {
        "" => String::new(),
        default => format!(" (default: {default})"),
    };
    value["description"] = json!(format!("{}{default}", key.doc));
    value
}

fn reference(table: &Table) -> Value {
    json!({ "$ref": format!("#/definitions/{}", name_of(table)) })
}

fn number(magnitude: Magnitude) -> Value {
    let (lowest, highest) = magnitude.possible;
    json!({ "type": "number", "minimum": lowest, "maximum": highest })
}
