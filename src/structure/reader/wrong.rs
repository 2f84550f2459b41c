//! What is said of keys that are unknown and of values of the wrong kind.

use std::borrow::Cow;
use std::ops::Range;

use toml::Spanned;
use toml::de::DeValue;

use crate::source::{Diagnostic, nearest, one_of};
use crate::structure::keys::{Key, Kind, MISNOMERS, Table};

/// A key that is not in the table, and the one that was probably meant; misplaced keys are looked
/// for from `root` down.
pub(super) fn unknown(
    root: &'static Table,
    table: &'static Table,
    name: &Spanned<Cow<'_, str>>,
) -> (Diagnostic, Option<&'static Key>) {
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
    } else if let Some(path) = home(root, word, 0) {
        (format!("`{word}` belongs in {path}"), None)
    } else {
        (format!("known here: {}", one_of(table.names())), None)
    };
    let message = format!("unknown key `{}` {}", brief(word), place_of(table));
    let fault = Diagnostic::new(name.span(), message).with_help(help);
    (fault, meant)
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
pub(in crate::structure) fn brief(word: &str) -> String {
    const LONGEST: usize = 40;
    if word.chars().count() <= LONGEST {
        return word.to_owned();
    }
    let start: String = word.chars().take(LONGEST).collect();
    format!("{start}...")
}

/// A value of another kind than the key asks for.
pub(super) fn wrong_kind(key: &'static Key, found: &DeValue<'_>, span: Range<usize>) -> Diagnostic {
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
pub(super) fn wrong_item(key: &'static Key, found: &DeValue<'_>, span: Range<usize>) -> Diagnostic {
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

/// A value by its kind, in the user's words.
pub(super) fn said(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "a text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
