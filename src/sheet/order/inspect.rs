//! A kept sheet against what its own structure gives: one edited by hand is found out.

use super::changes::{Unreadable, record};
use super::document::Document;
use crate::design::Audience;
use crate::sheet::stamp::sha256;
use serde_json::Value;

/// Numbers that differ by less are equal: other machines round the last digits otherwise.
const SAME: f64 = 1e-9;

/// A record as it was kept.
#[derive(Clone, Debug, PartialEq)]
pub struct Kept {
    value: Value,
    /// The copy.
    pub audience: Audience,
    /// The text of its structure.
    pub structure: String,
    /// SHA-256 of the file that it was made from.
    pub source_sha256: String,
    /// SHA-256 of the parameters that it was made with.
    pub parameters_sha256: String,
    /// The program that made it.
    pub program: String,
    /// Files that belong to it, with the SHA-256 of each.
    pub files: Vec<(String, String)>,
}

/// Something that does not agree.
#[derive(Clone, Debug, PartialEq)]
pub struct Deviation {
    /// Where it stands on the sheet.
    pub place: String,
    /// What the sheet says.
    pub kept: String,
    /// What its structure gives.
    pub computed: String,
}

/// What came of looking.
#[derive(Clone, Debug, PartialEq)]
pub struct Inspection {
    /// Whether the structure is the one that the sheet was made from.
    pub structure_agrees: bool,
    /// Whether program and parameters are those that the sheet was made with.
    pub is_same_program: bool,
    /// How many values of the sheet were compared.
    pub compared: usize,
    /// What does not agree.
    pub deviations: Vec<Deviation>,
    /// Why numbers may differ though nobody touched them (other parameters, another program), and
    /// what cannot be checked.
    pub reasons: Vec<String>,
}

impl Inspection {
    /// Whether everything agrees.
    #[must_use]
    pub fn agrees(&self) -> bool {
        self.structure_agrees && self.deviations.is_empty()
    }
}

/// Reads the record of a sheet.
///
/// # Errors
///
/// [`Unreadable`] if the text is no record of a sheet.
pub fn kept(text: &str) -> Result<Kept, Unreadable> {
    let value = record(text)?;
    let words = |pointer: &str| {
        let found = value.pointer(pointer).and_then(Value::as_str);
        found.map(str::to_owned).ok_or(Unreadable::NoSheet)
    };
    let audience = words("/copy")?;
    let audience = Audience::ALL
        .into_iter()
        .find(|it| it.word() == audience)
        .ok_or(Unreadable::NoSheet)?;
    let files = value.get("files").and_then(Value::as_array);
    let files = files.into_iter().flatten().map(|file| {
        let text = |key: &str| file.get(key).and_then(Value::as_str).unwrap_or_default();
        (text("name").to_owned(), text("sha256").to_owned())
    });
    Ok(Kept {
        audience,
        structure: words("/structure")?,
        source_sha256: words("/stamp/source_sha256")?,
        parameters_sha256: words("/stamp/parameters_sha256")?,
        program: words("/stamp/program")?,
        files: files.collect(),
        value,
    })
}

impl Kept {
    /// The record as it was kept: what its pages were made of.
    #[must_use]
    pub fn document(&self) -> Document {
        Document {
            value: self.value.clone(),
        }
    }

    /// Whether the record names files at all: one that went to the terminal does not.
    #[must_use]
    pub fn names_files(&self) -> bool {
        self.value.get("files").is_some()
    }
}

/// Compares a kept sheet with one made anew from its structure.
#[must_use]
pub fn inspect(kept: &Kept, anew: &Document) -> Inspection {
    let mut deviations = Vec::new();
    let mut compared = 0;
    compare("", &kept.value, &anew.value, &mut compared, &mut deviations);
    compare_changes(kept, anew, &mut compared, &mut deviations);
    let stamped = kept.value.pointer("/stamp/structure_sha256");
    let sum = sha256(kept.structure.as_bytes());
    let structure_agrees = stamped.and_then(Value::as_str) == Some(sum.as_str());
    let mut reasons = Vec::new();
    let since = kept.value.get("since").unwrap_or(&Value::Null);
    let told = kept.value.get("changes").unwrap_or(&Value::Null);
    let has_changes = told.as_array().is_none_or(|changes| !changes.is_empty());
    if since.is_null() && has_changes {
        deviations.push(Deviation {
            place: "changes".to_owned(),
            kept: said(told),
            computed: "no changes, for it names no earlier sheet".to_owned(),
        });
    }
    if anew.text_at("/stamp/parameters_sha256") != kept.parameters_sha256 {
        reasons.push(
            "the parameters are not those that the sheet was made with: give them with --materials"
                .to_owned(),
        );
    }
    if anew.text_at("/stamp/program") != kept.program {
        reasons.push(format!(
            "the sheet was made by {}, and this is {}",
            kept.program,
            anew.text_at("/stamp/program")
        ));
    }
    let is_same_program = reasons.is_empty();
    if !since.is_null() {
        reasons.push(
            "not checked: which earlier sheet it is (`since`), what was ordered there (`before`), and \
             whether every change is listed; only that sheet can tell"
                .to_owned(),
        );
    }
    Inspection {
        structure_agrees,
        is_same_program,
        compared,
        deviations,
        reasons,
    }
}

/// Parts of the record that are not computed from the structure.
const NOT_COMPUTED: [&str; 3] = ["/files", "/since", "/changes"];

fn compare(
    place: &str,
    kept: &Value,
    anew: &Value,
    compared: &mut usize,
    deviations: &mut Vec<Deviation>,
) {
    if NOT_COMPUTED.contains(&place) {
        return;
    }
    match (kept, anew) {
        (Value::Object(kept), Value::Object(anew)) => {
            let keys = kept
                .keys()
                .chain(anew.keys().filter(|it| !kept.contains_key(*it)));
            for key in keys {
                let [kept, anew] = [kept, anew].map(|it| it.get(key).unwrap_or(&Value::Null));
                compare(&format!("{place}/{key}"), kept, anew, compared, deviations);
            }
        }
        (Value::Array(kept), Value::Array(anew)) => {
            for index in 0..kept.len().max(anew.len()) {
                let [kept, anew] = [kept, anew].map(|it| it.get(index).unwrap_or(&Value::Null));
                compare(
                    &format!("{place}/{index}"),
                    kept,
                    anew,
                    compared,
                    deviations,
                );
            }
        }
        _ => {
            *compared += 1;
            if !is_same(kept, anew) {
                deviations.push(Deviation {
                    place: said_place(place),
                    kept: said(kept),
                    computed: said(anew),
                });
            }
        }
    }
}

fn is_same(kept: &Value, anew: &Value) -> bool {
    match (kept.as_f64(), anew.as_f64()) {
        (Some(a), Some(b)) => (a - b).abs() <= SAME * a.abs().max(b.abs()).max(SAME),
        _ => kept == anew,
    }
}

/// What a change says of the present must be what the record says.
fn compare_changes(
    kept: &Kept,
    anew: &Document,
    compared: &mut usize,
    deviations: &mut Vec<Deviation>,
) {
    let changes = kept.value.get("changes").and_then(Value::as_array);
    for change in changes.into_iter().flatten() {
        let place = change
            .get("place")
            .and_then(Value::as_str)
            .unwrap_or_default();
        if place.starts_with("earlier/") {
            continue;
        }
        let after = change.get("after").unwrap_or(&Value::Null);
        let Some(now) = anew.value.pointer(place) else {
            continue;
        };
        // A new layer is told by its formula.
        let now = now.get("formula").unwrap_or(now);
        *compared += 1;
        if !is_same(after, now) {
            deviations.push(Deviation {
                place: format!("change of {}", said_place(place)),
                kept: said(after),
                computed: said(now),
            });
        }
    }
}

/// A place of the record in words: layers by their numbers.
fn said_place(place: &str) -> String {
    let mut parts = place.trim_start_matches('/').split('/');
    match (
        parts.next(),
        parts.next().and_then(|it| it.parse::<usize>().ok()),
    ) {
        (Some("layers"), Some(index)) => {
            let rest: Vec<&str> = parts.collect();
            if rest.is_empty() {
                format!("layer {}", index + 1)
            } else {
                format!("layer {}: {}", index + 1, rest.join(" "))
            }
        }
        _ => place.trim_start_matches('/').replace('/', " "),
    }
}

fn said(value: &Value) -> String {
    const LONGEST: usize = 80;
    let text = match value {
        Value::Null => "nothing".to_owned(),
        Value::String(text) => format!("“{}”", crate::sheet::page::tidy(text)),
        other => other.to_string(),
    };
    if text.chars().count() <= LONGEST {
        return text;
    }
    let start: String = text.chars().take(LONGEST).collect();
    format!("{start}…")
}
