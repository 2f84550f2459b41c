//! The reader: walks the parsed TOML along the table of keys and checks every value by itself.

use std::borrow::Cow;
use std::collections::BTreeMap;
use std::ops::Range;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::Remark;
use super::keys::{Key, Kind, MISNOMERS, Magnitude, Table};
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

/// A value in its place; without one where it was refused.
#[derive(Clone, Debug)]
pub(super) struct Given<T> {
    /// Bytes of the key.
    pub(super) key: Range<usize>,
    /// Bytes of the value.
    pub(super) span: Range<usize>,
    /// The value; `None` after a complaint.
    pub(super) value: Option<T>,
}

/// The value of a key, if the key is there.
pub(super) type Field<T> = Option<Given<T>>;

/// A table of the file, its keys checked one by one.
#[derive(Clone, Debug)]
pub(super) struct Values {
    /// Bytes of its head, or of all of it where it is written inline.
    pub(super) span: Range<usize>,
    entries: BTreeMap<&'static str, Given<Value>>,
}

#[derive(Clone, Debug)]
enum Value {
    Text(String),
    Flag(bool),
    Count(u64),
    Number(f64),
    Texts(Vec<(Range<usize>, String)>),
    Numbers(Vec<(Range<usize>, f64)>),
    Table(Values),
    Named(Vec<(String, Given<Values>)>),
    Rows(Vec<Values>),
}

impl Values {
    fn take<T>(&mut self, name: &str, convert: impl Fn(Value) -> Option<T>) -> Field<T> {
        self.entries.remove(name).map(|given| Given {
            key: given.key,
            span: given.span,
            value: given.value.and_then(convert),
        })
    }

    /// Names of the keys that are there, refused values among them.
    pub(super) fn names(&self) -> impl Iterator<Item = &'static str> {
        self.entries.keys().copied()
    }

    pub(super) fn text(&mut self, name: &str) -> Field<String> {
        self.take(name, |value| match value {
            Value::Text(text) => Some(text),
            _ => None,
        })
    }

    pub(super) fn flag(&mut self, name: &str) -> Field<bool> {
        self.take(name, |value| match value {
            Value::Flag(flag) => Some(flag),
            _ => None,
        })
    }

    pub(super) fn count(&mut self, name: &str) -> Field<u64> {
        self.take(name, |value| match value {
            Value::Count(count) => Some(count),
            _ => None,
        })
    }

    pub(super) fn number(&mut self, name: &str) -> Field<f64> {
        self.take(name, |value| match value {
            Value::Number(number) => Some(number),
            _ => None,
        })
    }

    pub(super) fn texts(&mut self, name: &str) -> Field<Vec<(Range<usize>, String)>> {
        self.take(name, |value| match value {
            Value::Texts(texts) => Some(texts),
            _ => None,
        })
    }

    pub(super) fn numbers(&mut self, name: &str) -> Field<Vec<(Range<usize>, f64)>> {
        self.take(name, |value| match value {
            Value::Numbers(numbers) => Some(numbers),
            _ => None,
        })
    }

    pub(super) fn table(&mut self, name: &str) -> Field<Values> {
        self.take(name, |value| match value {
            Value::Table(values) => Some(values),
            _ => None,
        })
    }

    pub(super) fn named(&mut self, name: &str) -> Field<Vec<(String, Given<Values>)>> {
        self.take(name, |value| match value {
            Value::Named(tables) => Some(tables),
            _ => None,
        })
    }

    pub(super) fn rows(&mut self, name: &str) -> Field<Vec<Values>> {
        self.take(name, |value| match value {
            Value::Rows(rows) => Some(rows),
            _ => None,
        })
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
            None => (unknown(table, name, findings), None),
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

/// Complains about a key that is not in the table, and returns the one that was probably meant.
fn unknown(
    table: &'static Table,
    name: &Spanned<Cow<'_, str>>,
    findings: &mut Findings,
) -> Option<&'static Key> {
    let word = name.get_ref();
    let misnomer = MISNOMERS
        .iter()
        .filter_map(|misnomer| Some((misnomer, table.key(misnomer.meant)?)))
        .find(|(misnomer, _)| misnomer.word == word);
    let near = || nearest(word, table.names()).and_then(|name| table.key(name));
    let (help, meant) = if let Some((misnomer, key)) = misnomer {
        (misnomer.help.to_owned(), Some(key))
    } else if let Some(key) = near() {
        (format!("did you mean `{}`?", key.name), Some(key))
    } else if let Some(path) = home(findings.root, word, 0) {
        (format!("`{word}` belongs in {path}"), None)
    } else {
        (format!("known here: {}", one_of(table.names())), None)
    };
    let message = format!("unknown key `{}` {}", brief(word), place_of(table));
    findings
        .faults
        .push(Diagnostic::new(name.span(), message).with_help(help));
    meant
}

fn place_of(table: &Table) -> String {
    match table.path {
        "" => "of the file".to_owned(),
        "layers" => "of [[layers]]".to_owned(),
        path => format!("of [{path}]"),
    }
}

/// Where a key of this name would be known. Tables nest three deep; a row holds rows.
fn home(table: &'static Table, word: &str, depth: usize) -> Option<String> {
    let here = || match table.path {
        "" => "the file, above the first table".to_owned(),
        "layers" => "[[layers]]".to_owned(),
        path => format!("[{path}]"),
    };
    if table.key(word).is_some() {
        return Some(here());
    }
    table.keys.iter().find_map(|key| match &key.kind {
        Kind::Table(inner) | Kind::Named(inner) | Kind::Rows(inner) if depth < 3 => {
            home(inner, word, depth + 1)
        }
        _ => None,
    })
}

/// A word of the file, short enough for a message.
pub(super) fn brief(word: &str) -> String {
    const LONGEST: usize = 40;
    if word.chars().count() <= LONGEST {
        return word.to_owned();
    }
    let start: String = word.chars().take(LONGEST).collect();
    format!("{start}...")
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
        (Kind::Texts(most), DeValue::Array(items)) => {
            texts(key, *most, items.iter(), span, findings)
        }
        (Kind::Numbers(magnitude, fewest, most), DeValue::Array(items)) => {
            let wanted = (*fewest, *most);
            numbers(key, *magnitude, wanted, items.iter(), span, findings)
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

fn numbers<'a, 'i: 'a>(
    key: &'static Key,
    magnitude: Magnitude,
    (fewest, most): (usize, usize),
    items: impl ExactSizeIterator<Item = &'a Spanned<DeValue<'i>>>,
    span: Range<usize>,
    findings: &mut Findings,
) -> Option<Value> {
    if !(fewest..=most).contains(&items.len()) {
        let wanted = if fewest == most {
            format!("{fewest}")
        } else {
            format!("{fewest} to {most}")
        };
        let message = format!(
            "`{}` has {} numbers: {wanted} are wanted",
            key.name,
            items.len()
        );
        findings
            .faults
            .push(Diagnostic::new(span, message).with_help(key.doc));
        return None;
    }
    let mut numbers = Vec::with_capacity(items.len());
    let mut complete = true;
    for item in items {
        let number = if let Some(number) = as_number(item.get_ref()) {
            possible(key.name, magnitude, number, item.span(), findings)
        } else {
            findings
                .faults
                .push(wrong_item(key, item.get_ref(), item.span()));
            None
        };
        match number {
            Some(number) => numbers.push((item.span(), number)),
            None => complete = false,
        }
    }
    complete.then_some(Value::Numbers(numbers))
}

fn texts<'a, 'i: 'a>(
    key: &'static Key,
    most: usize,
    items: impl ExactSizeIterator<Item = &'a Spanned<DeValue<'i>>>,
    span: Range<usize>,
    findings: &mut Findings,
) -> Option<Value> {
    if !(1..=most).contains(&items.len()) {
        let message = format!(
            "`{}` has {} texts: 1 to {most} are wanted",
            key.name,
            items.len()
        );
        findings
            .faults
            .push(Diagnostic::new(span, message).with_help(key.doc));
        return None;
    }
    let mut texts = Vec::with_capacity(items.len());
    let mut complete = true;
    for item in items {
        if let DeValue::String(text) = item.get_ref() {
            match line_of_text(key, text, LONGEST_PROSE, item.span(), findings) {
                Some(words) => texts.push((item.span(), words)),
                None => complete = false,
            }
        } else {
            findings
                .faults
                .push(wrong_item(key, item.get_ref(), item.span()));
            complete = false;
        }
    }
    complete.then_some(Value::Texts(texts))
}

fn wrong_kind(key: &'static Key, found: &DeValue<'_>, span: Range<usize>) -> Diagnostic {
    let (wanted, help) = match &key.kind {
        Kind::Text | Kind::Prose | Kind::Word(_) => {
            ("a text", format!("put it in quotes: {}", key.doc))
        }
        Kind::Flag => (
            "true or false",
            "write `true` or `false`, without quotes".to_owned(),
        ),
        Kind::Count(..) => ("a whole number", key.doc.to_owned()),
        Kind::Number(magnitude) => {
            let unit = match magnitude.unit {
                "" => String::new(),
                unit => format!(" of {unit}"),
            };
            (
                "a number",
                format!("write a number{unit}, without quotes and without the unit"),
            )
        }
        Kind::Texts(_) => (
            "a list of texts",
            format!("write `{} = [\"...\"]`: {}", key.name, key.doc),
        ),
        Kind::Numbers(..) => (
            "a list of numbers",
            format!("write `{} = [...]`: {}", key.name, key.doc),
        ),
        Kind::Table(_) => (
            "a table",
            format!("write `[{}]` with its keys below", key.name),
        ),
        Kind::Named(_) => (
            "a table",
            format!("write `[{}.NAME]` with its keys below", key.name),
        ),
        Kind::Rows(_) => (
            "a list of tables",
            format!("write `[[{}]]` above each layer", key.name),
        ),
    };
    Diagnostic::new(
        span,
        format!("`{}` is {}, and {wanted} is wanted", key.name, said(found)),
    )
    .with_help(help)
}

/// A member of a list that is not what the list is of.
fn wrong_item(key: &'static Key, found: &DeValue<'_>, span: Range<usize>) -> Diagnostic {
    let (wanted, help) = match key.kind {
        Kind::Rows(_) => (
            "tables",
            "write `[[layers]]` above each layer, or `layers = [{ role = ... }, ...]`",
        ),
        Kind::Texts(_) => ("texts", "write one list of texts in quotes"),
        _ => (
            "numbers",
            "write one list of numbers, without quotes: `[1e18, 2e18]`",
        ),
    };
    Diagnostic::new(
        span,
        format!(
            "`{}` holds {}, and {wanted} are wanted",
            key.name,
            said(found)
        ),
    )
    .with_help(help)
}

fn said(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "a text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
