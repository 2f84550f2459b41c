//! From text to a table with places, and what is wrong with the TOML itself.

use std::ops::Range;

use toml::de::DeTable;

use crate::source::Diagnostic;

/// Deepest nesting of brackets that is read; a structure needs four.
const DEEPEST_NESTING: usize = 32;

/// Above this, bytes, parsing ends at the first fault of the TOML: a structure has a few thousand
/// bytes, and something else may have a fault in every one.
const LARGEST_RECOVERED_BYTES: usize = 1 << 18;

/// The table that could be made out, and the faults of the TOML in the order of the text.
///
/// What is nested too deeply is not parsed at all: parsers of nested text recurse.
pub(super) fn table(text: &str) -> (DeTable<'_>, Vec<Diagnostic>) {
    if let Some(at) = too_deep(text) {
        let fault = Diagnostic::new(
            at..at + 1,
            format!("brackets are nested more than {DEEPEST_NESTING} deep"),
        )
        .with_help("a structure file needs four levels: close the brackets that were left open");
        return (DeTable::new(), vec![fault]);
    }
    let (table, errors) = if text.len() > LARGEST_RECOVERED_BYTES {
        match DeTable::parse(text) {
            Ok(table) => (table.into_inner(), Vec::new()),
            Err(error) => (DeTable::new(), vec![error]),
        }
    } else {
        let (table, errors) = DeTable::parse_recoverable(text);
        (table.into_inner(), errors)
    };
    let mut faults: Vec<Diagnostic> = Vec::new();
    // One slip often makes several errors; the first on a line names it.
    let mut line_named = 0;
    for error in errors {
        let span = error.span().unwrap_or(text.len()..text.len());
        if span.start < line_named {
            continue;
        }
        line_named = 1 + line_end(text.as_bytes(), span.start.min(text.len()));
        let help = advice(text, span.start, error.message());
        faults
            .push(Diagnostic::new(span, format!("not TOML: {}", error.message())).with_help(help));
    }
    (table, faults)
}

/// What a fault of the TOML at byte `at` makes doubtful: its line, and below a broken head of a
/// table all that would have belonged to it.
pub(super) fn spoilt(text: &str, at: usize) -> Range<usize> {
    let at = at.min(text.len());
    let start = text[..at].rfind('\n').map_or(0, |feed| feed + 1);
    let next = if text[start..].trim_start().starts_with('[') {
        "\n["
    } else {
        "\n"
    };
    let end = text[at..].find(next).map_or(text.len(), |feed| at + feed);
    start..end + 1
}

/// The byte of the bracket that goes too deep, if any; brackets in strings and comments are text.
fn too_deep(text: &str) -> Option<usize> {
    let bytes = text.as_bytes();
    let mut depth = 0_usize;
    let mut at = 0;
    while at < bytes.len() {
        match bytes[at] {
            b'#' => at = line_end(bytes, at),
            quote @ (b'"' | b'\'') => at = string_end(bytes, at, quote),
            b'[' | b'{' => {
                depth += 1;
                if depth > DEEPEST_NESTING {
                    return Some(at);
                }
            }
            b']' | b'}' => depth = depth.saturating_sub(1),
            _ => {}
        }
        at += 1;
    }
    None
}

fn line_end(bytes: &[u8], from: usize) -> usize {
    let rest = &bytes[from..];
    from + rest
        .iter()
        .position(|byte| *byte == b'\n')
        .unwrap_or(rest.len())
}

/// The last byte of the string that begins at `from`; one that is not closed ends with its line.
fn string_end(bytes: &[u8], from: usize, quote: u8) -> usize {
    let triple = bytes[from..].starts_with(&[quote; 3]);
    let mut at = from + if triple { 3 } else { 1 };
    while at < bytes.len() {
        match bytes[at] {
            b'\\' if quote == b'"' => at += 1,
            b'\n' if !triple => return at,
            byte if byte == quote && !triple => return at,
            byte if byte == quote && bytes[at..].starts_with(&[quote; 3]) => return at + 2,
            _ => {}
        }
        at += 1;
    }
    at
}

/// What is probably behind a fault of the TOML at `at`.
fn advice(text: &str, at: usize, message: &str) -> &'static str {
    let line_start = text[..at].rfind('\n').map_or(0, |feed| feed + 1);
    let before = text[line_start..at].trim_end();
    let rest = text[at..].lines().next().unwrap_or_default().trim_start();
    let number_before = before.ends_with(|letter: char| letter.is_ascii_digit());
    let number_after = rest
        .starts_with(|letter: char| letter.is_ascii_digit() || matches!(letter, '+' | '-' | '.'));
    if message.contains("duplicate key") {
        "each key and each table stands once: leave out one of the two"
    } else if number_before && rest.starts_with(',') && !before.contains('[') {
        "write the decimal point as `.`"
    } else if number_before && rest.starts_with(char::is_alphabetic) {
        "leave the unit off: the key names it"
    } else if before.ends_with('=') && number_after {
        "write a number alone (`8.5`, `1e18`): the unit is in the key"
    } else if before.ends_with('=') && (rest.is_empty() || rest.starts_with('#')) {
        "give the key a value, or leave it out"
    } else if before.ends_with('=') {
        "put words and formulas in quotes: `role = \"well\"`"
    } else if message.contains("key with no value") {
        "a line is `key = value`, or `[table]`; comments begin with `#`"
    } else {
        "the file is TOML 1.0: `key = value` lines, `[table]` heads, text in double quotes"
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn brackets_in_strings_and_comments_are_no_nesting() {
        let open = "[".repeat(100);
        for text in [
            format!("a = \"{open}\""),
            format!("a = '{open}'"),
            format!("a = \"\"\"\n{open}\n\"\"\""),
            format!("a = '''\n{open}'''"),
            format!("# {open}\na = 1"),
            format!("a = \"\\\"{open}\""),
        ] {
            assert_eq!(too_deep(&text), None, "{text}");
        }
        assert_eq!(too_deep(&format!("a = {open}")), Some(4 + DEEPEST_NESTING));
        assert_eq!(too_deep(&"[a]\n".repeat(100)), None);
    }
}
