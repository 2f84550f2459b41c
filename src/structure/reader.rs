//! The reader: walks the parsed TOML along the table of keys and checks every value by itself.

mod given;
mod wrong;

pub(super) use given::{Field, Given, Values, value};
pub(super) use wrong::brief;

use std::collections::BTreeMap;
use std::ops::Range;

use given::Value;
use toml::Spanned;
use toml::de::{DeArray, DeTable, DeValue};
use wrong::{said, unknown, wrong_item, wrong_kind};

use super::Remark;
use super::keys::{Key, Kind, Magnitude, Table};
use crate::source::{Diagnostic, nearest, one_of};

/// Longest text value, characters.
const LONGEST_TEXT: usize = 200;
/// Longest free text and longest item of a list, characters.
const LONGEST_PROSE: usize = 10_000;
/// Most keys of a table that are looked at one by one.
const MOST_KEYS: usize = 200;

/// What the walk finds on its way.
pub(super) struct Findings {
    /// The table of the whole file, in which misplaced keys are looked for.
    root: &'static Table,
    /// Faults: the file is refused.
    pub(super) faults: Vec<Diagnostic>,
    /// Remarks.
    pub(super) remarks: Vec<Remark>,
}

impl Findings {
    /// None yet, in a file whose keys are those of `root`.
    pub(super) fn in_file_of(root: &'static Table) -> Self {
        Self {
            root,
            faults: Vec::new(),
            remarks: Vec::new(),
        }
    }
}

/// The whole file.
pub(super) fn read(table: &DeTable<'_>, findings: &mut Findings) -> Values {
    values(findings.root, 0..0, table, findings)
}

fn values(
    table: &'static Table,
    span: Range<usize>,
    found: &DeTable<'_>,
    findings: &mut Findings,
) -> Values {
    let mut entries = BTreeMap::new();
    let too_many = found.len() > MOST_KEYS;
    if too_many {
        findings.faults.push(
            Diagnostic::new(span.clone(), format!("{} keys in one table", found.len()))
                .with_help(format!("known are {}", one_of(table.names()))),
        );
    }
    for (name, value) in found {
        let (key, checked) = match table.key(name.get_ref()) {
            Some(key) => (Some(key), checked(key, value, findings)),
            None if too_many => continue,
            None => {
                let (fault, meant) = unknown(findings.root, table, name);
                findings.faults.push(fault);
                (meant, None)
            }
        };
        let given = Given {
            key: name.span(),
            span: value.span(),
            value: checked,
        };
        match key {
            Some(key) if key.name == name.get_ref() => {
                entries.insert(key.name, given);
            }
            // The key that was meant counts as given: one slip makes one complaint.
            Some(meant) => {
                entries.entry(meant.name).or_insert(given);
            }
            None => {}
        }
    }
    Values { span, entries }
}

fn checked(
    key: &'static Key,
    value: &Spanned<DeValue<'_>>,
    findings: &mut Findings,
) -> Option<Value> {
    let span = value.span();
    match (&key.kind, value.get_ref()) {
        (Kind::Text, DeValue::String(text)) => {
            line_of_text(key, text, LONGEST_TEXT, span, findings).map(Value::Text)
        }
        (Kind::Prose, DeValue::String(text)) => {
            line_of_text(key, text, LONGEST_PROSE, span, findings).map(Value::Text)
        }
        (Kind::Word(words), DeValue::String(text)) => word(key, &words(), text, span, findings),
        (Kind::Flag, DeValue::Boolean(flag)) => Some(Value::Flag(*flag)),
        (Kind::Count(lowest, highest), number @ (DeValue::Integer(_) | DeValue::Float(_))) => {
            count(key, (*lowest, *highest), number, span, findings)
        }
        (Kind::Number(magnitude), number @ (DeValue::Integer(_) | DeValue::Float(_))) => {
            possible(key.name, *magnitude, as_number(number)?, span, findings).map(Value::Number)
        }
        (Kind::Texts(most), DeValue::Array(items)) => texts(key, *most, items, span, findings),
        (Kind::Numbers(magnitude, fewest, most), DeValue::Array(items)) => {
            let wanted = (*fewest, *most);
            numbers(key, *magnitude, wanted, items, span, findings)
        }
        (Kind::Table(table), DeValue::Table(found)) => {
            Some(Value::Table(values(table, span, found, findings)))
        }
        (Kind::Named(table), DeValue::Table(found)) => Some(named(table, found, findings)),
        (Kind::Rows(table), DeValue::Array(items)) => {
            let rows: Vec<Values> = items
                .iter()
                .filter_map(|item| match item.get_ref() {
                    DeValue::Table(found) => Some(values(table, item.span(), found, findings)),
                    other => {
                        findings.faults.push(wrong_item(key, other, item.span()));
                        None
                    }
                })
                .collect();
            (items.is_empty() || !rows.is_empty()).then_some(Value::Rows(rows))
        }
        (_, other) => {
            findings.faults.push(wrong_kind(key, other, span));
            None
        }
    }
}

fn named(table: &'static Table, found: &DeTable<'_>, findings: &mut Findings) -> Value {
    let mut tables = Vec::new();
    for (name, value) in found {
        let span = value.span();
        let inner = match value.get_ref() {
            DeValue::Table(inner) => Some(values(table, span.clone(), inner, findings)),
            other => {
                let help = format!(
                    "write `[materials.{0}]` with its keys below, or `{0} = {{ formula = \"...\" }}`",
                    brief(name.get_ref())
                );
                let message = format!(
                    "`{}` is {}, and a table is wanted",
                    brief(name.get_ref()),
                    said(other)
                );
                findings
                    .faults
                    .push(Diagnostic::new(span.clone(), message).with_help(help));
                None
            }
        };
        let given = Given {
            key: name.span(),
            span,
            value: inner,
        };
        tables.push((name.get_ref().to_string(), given));
    }
    tables.sort_by_key(|(_, given)| given.key.start);
    Value::Named(tables)
}

fn line_of_text(
    key: &'static Key,
    text: &str,
    longest: usize,
    span: Range<usize>,
    findings: &mut Findings,
) -> Option<String> {
    let fault = if text.chars().count() > longest {
        Diagnostic::new(
            span,
            format!("`{}` is longer than {longest} characters", key.name),
        )
        .with_help("shorten it; comments (`# ...`) can be as long as you like")
    } else if text.chars().any(char::is_control) {
        Diagnostic::new(span, format!("`{}` holds a control character", key.name))
            .with_help("write it on one line, without tabs and escapes")
    } else if text.trim().is_empty() {
        Diagnostic::new(span, format!("`{}` is empty", key.name))
            .with_help(format!("{}; or leave the key out", key.doc))
    } else {
        return Some(text.trim().to_owned());
    };
    findings.faults.push(fault);
    None
}

fn word(
    key: &'static Key,
    words: &[&'static str],
    text: &str,
    span: Range<usize>,
    findings: &mut Findings,
) -> Option<Value> {
    if words.contains(&text) {
        return Some(Value::Text(text.to_owned()));
    }
    let help = match nearest(text, words.iter().copied()) {
        Some(meant) => format!("did you mean `{meant}`?"),
        None => format!("one of {}", one_of(words.iter().copied())),
    };
    let message = format!("\"{}\" is no `{}`", brief(text), key.name);
    findings
        .faults
        .push(Diagnostic::new(span, message).with_help(help));
    None
}

fn count(
    key: &'static Key,
    (lowest, highest): (u64, u64),
    value: &DeValue<'_>,
    span: Range<usize>,
    findings: &mut Findings,
) -> Option<Value> {
    let whole = match value {
        DeValue::Integer(integer) => i128::from_str_radix(integer.as_str(), integer.radix()).ok(),
        _ => None,
    };
    if let Some(found) = whole.and_then(|whole| u64::try_from(whole).ok())
        && (lowest..=highest).contains(&found)
    {
        return Some(Value::Count(found));
    }
    let written = match value {
        DeValue::Integer(integer) => brief(integer.as_str()),
        DeValue::Float(float) => brief(float.as_str()),
        other => said(other).to_owned(),
    };
    let (message, help) = if lowest == highest {
        (
            format!("`{}` {written} is not known", key.name),
            format!("this program reads `{} = {lowest}`", key.name),
        )
    } else {
        (
            format!(
                "`{}` is {written}: possible is a whole number from {lowest} to {highest}",
                key.name
            ),
            key.doc.to_owned(),
        )
    };
    findings
        .faults
        .push(Diagnostic::new(span, message).with_help(help));
    None
}

/// The number as written, read as a float; too large ones are infinite.
fn as_number(value: &DeValue<'_>) -> Option<f64> {
    match value {
        DeValue::Float(float) => float.as_str().parse().ok(),
        DeValue::Integer(integer) if integer.radix() == 10 => integer.as_str().parse().ok(),
        DeValue::Integer(integer) => i64::from_str_radix(integer.as_str(), integer.radix())
            .ok()
            .map(|whole| whole as f64),
        _ => None,
    }
}

fn possible(
    name: &'static str,
    magnitude: Magnitude,
    value: f64,
    span: Range<usize>,
    findings: &mut Findings,
) -> Option<f64> {
    if let Err(refusal) = magnitude.check(name, value) {
        findings
            .faults
            .push(Diagnostic::new(span, refusal.message).with_help(refusal.help));
        return None;
    }
    let (low, high) = magnitude.usual;
    if !(low..=high).contains(&value) && value != 0.0 {
        findings.remarks.push(Remark::Unusual {
            span,
            key: name,
            value,
            unit: magnitude.unit,
            usual: magnitude.usual,
        });
    }
    Some(value)
}

fn numbers(
    key: &'static Key,
    magnitude: Magnitude,
    wanted: (usize, usize),
    items: &DeArray<'_>,
    span: Range<usize>,
    findings: &mut Findings,
) -> Option<Value> {
    list(
        key,
        "numbers",
        wanted,
        items,
        span,
        findings,
        |item, findings| {
            let Some(number) = as_number(item.get_ref()) else {
                let fault = wrong_item(key, item.get_ref(), item.span());
                findings.faults.push(fault);
                return None;
            };
            possible(key.name, magnitude, number, item.span(), findings)
        },
    )
    .map(Value::Numbers)
}

fn texts(
    key: &'static Key,
    most: usize,
    items: &DeArray<'_>,
    span: Range<usize>,
    findings: &mut Findings,
) -> Option<Value> {
    list(
        key,
        "texts",
        (1, most),
        items,
        span,
        findings,
        |item, findings| {
            let DeValue::String(text) = item.get_ref() else {
                let fault = wrong_item(key, item.get_ref(), item.span());
                findings.faults.push(fault);
                return None;
            };
            line_of_text(key, text, LONGEST_PROSE, item.span(), findings)
        },
    )
    .map(Value::Texts)
}

/// The members of a list, each in its place; `None` where they are too few or too many, or one of
/// them is refused.
fn list<T>(
    key: &'static Key,
    members: &str,
    (fewest, most): (usize, usize),
    items: &DeArray<'_>,
    span: Range<usize>,
    findings: &mut Findings,
    convert: impl Fn(&Spanned<DeValue<'_>>, &mut Findings) -> Option<T>,
) -> Option<Vec<(Range<usize>, T)>> {
    if !(fewest..=most).contains(&items.len()) {
        let wanted = if fewest == most {
            format!("{fewest}")
        } else {
            format!("{fewest} to {most}")
        };
        let message = format!(
            "`{}` has {} {members}: {wanted} are wanted",
            key.name,
            items.len()
        );
        findings
            .faults
            .push(Diagnostic::new(span, message).with_help(key.doc));
        return None;
    }
    // Every member is looked at, also behind one that is refused.
    let converted: Vec<Option<(Range<usize>, T)>> = items
        .iter()
        .map(|item| Some((item.span(), convert(item, findings)?)))
        .collect();
    converted.into_iter().collect()
}
