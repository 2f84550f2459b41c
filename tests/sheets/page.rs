//! A page read the way a machine reads it: tags, numbers with their places, and words.

use super::Desk;
use serde_json::Value;

/// A piece of a page.
#[derive(Debug, PartialEq)]
pub(super) enum Piece<'a> {
    /// A tag without its brackets.
    Tag(&'a str),
    /// What stands between tags.
    Words(&'a str),
}

/// The page without its style and its figures.
pub(super) fn bare(page: &str) -> String {
    without(&without(page, "<style>", "</style>"), "<svg", "</svg>")
}

fn without(page: &str, open: &str, close: &str) -> String {
    let mut kept = String::new();
    let mut rest = page;
    while let Some(from) = rest.find(open) {
        let length = rest[from..].find(close).expect("closed") + close.len();
        kept.push_str(&rest[..from]);
        rest = &rest[from + length..];
    }
    kept.push_str(rest);
    kept
}

pub(super) fn pieces(page: &str) -> Vec<Piece<'_>> {
    let mut pieces = Vec::new();
    let mut rest = page;
    while !rest.is_empty() {
        if let Some(inside) = rest.strip_prefix('<') {
            let end = inside.find('>').expect("a tag ends");
            pieces.push(Piece::Tag(&inside[..end]));
            rest = &inside[end + 1..];
        } else {
            let end = rest.find('<').unwrap_or(rest.len());
            pieces.push(Piece::Words(&rest[..end]));
            rest = &rest[end..];
        }
    }
    pieces
}

pub(super) fn unescaped(words: &str) -> String {
    words
        .replace("&lt;", "<")
        .replace("&gt;", ">")
        .replace("&quot;", "\"")
        .replace("&#x27;", "'")
        .replace("&#x2f;", "/")
        .replace("&#39;", "'")
        .replace("&amp;", "&")
}

fn attribute<'a>(tag: &'a str, name: &str) -> Option<&'a str> {
    let from = tag.find(&format!(" {name}=\""))? + name.len() + 3;
    Some(&tag[from..from + tag[from..].find('"')?])
}

/// A printed number, and how far rounding may have taken it.
fn printed(text: &str) -> (f64, f64) {
    let plain: String = text
        .chars()
        .map(|letter| match letter {
            '−' | '⁻' => '-',
            '⁰' => '0',
            '¹' => '1',
            '²' => '2',
            '³' => '3',
            '⁴' => '4',
            '⁵' => '5',
            '⁶' => '6',
            '⁷' => '7',
            '⁸' => '8',
            '⁹' => '9',
            letter => letter,
        })
        .collect();
    let raised = text.contains(['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹']);
    let plain = if raised {
        match plain.split_once('×') {
            Some((mantissa, power)) => format!("{mantissa}e{}", &power[2..]),
            None => format!("1e{}", &plain[2..]),
        }
    } else {
        plain
    };
    let value: f64 = plain
        .parse()
        .unwrap_or_else(|_| panic!("{text}: no number"));
    let mantissa = plain.split('e').next().expect("a mantissa");
    let decimals = mantissa.split_once('.').map_or(0, |(_, it)| it.len());
    let power: i32 = plain
        .split_once('e')
        .map_or(0, |(_, power)| power.parse().expect("a power"));
    // Zeros at the end of a mantissa may have been left out: four digits are always there.
    let digits = if raised { decimals.max(3) } else { decimals };
    let digits = i32::try_from(digits).expect("few digits");
    (value, 0.5 * 10f64.powi(power - digits))
}

/// Every text of the record.
fn texts(value: &Value, found: &mut Vec<String>) {
    match value {
        Value::String(text) => found.push(text.clone()),
        Value::Array(items) => items.iter().for_each(|item| texts(item, found)),
        Value::Object(map) => map.values().for_each(|item| texts(item, found)),
        _ => {}
    }
}

/// Words of the program that hold a figure and are no number of the sheet.
const FIGURES_OF_SPEECH: [&str; 7] = [
    "SHA-256",
    "(00l)",
    "Kα1",
    "ω–2θ",
    "2θ",
    "near 2",
    "sheet.json",
];

#[test]
fn every_number_on_the_page_is_that_of_the_record() {
    let desk = Desk::new();
    let plain = desk.put("plain.toml", super::PLAIN);
    for (structure, reader) in [
        ("structures/estuary-1310.toml", "grower"),
        ("structures/estuary-980.toml", "house"),
        ("structures/every-key.toml", "house"),
        (plain.as_str(), "grower"),
    ] {
        desk.sheet(structure, reader, "out", &["--force", "--quiet"]);
        let record = desk.record("out/sheet.json");
        let page = bare(&desk.read("out/sheet.html"));
        let body = page.split_once("</head>").expect("a head").1;
        let pieces = pieces(body);
        let count = numbers_agree(&pieces, &record);
        assert!(count > 40, "{structure}, {reader}: only {count} numbers");
        no_other_number_stands(&pieces, &record);
    }
}

/// Every number that is marked as one is that of its place, rounded; returns how many there are.
fn numbers_agree(pieces: &[Piece<'_>], record: &Value) -> usize {
    let mut count = 0;
    for (index, piece) in pieces.iter().enumerate() {
        let Piece::Tag(tag) = piece else { continue };
        if !tag.starts_with("data ") {
            continue;
        }
        let at = attribute(tag, "data-at").expect("a place");
        let exact = attribute(tag, "value").expect("a value");
        let Some(Value::Number(kept)) = record.pointer(at) else {
            panic!("nothing stands at {at}");
        };
        assert_eq!(exact, kept.to_string(), "{at}");
        let Some(Piece::Words(text)) = pieces.get(index + 1) else {
            panic!("{at} is printed as nothing");
        };
        let (value, rounding) = printed(text);
        let miss = (value - kept.as_f64().expect("a number")).abs();
        assert!(
            miss <= rounding * (1.0 + 1e-9),
            "{at}: {text} stands for {exact}"
        );
        count += 1;
    }
    count
}

/// What is not marked as a number of the record, and not a text of it, holds no number.
fn no_other_number_stands(pieces: &[Piece<'_>], record: &Value) {
    let mut known = Vec::new();
    texts(record, &mut known);
    known.sort_by_key(|text| std::cmp::Reverse(text.len()));
    for (index, piece) in pieces.iter().enumerate() {
        let Piece::Words(text) = piece else { continue };
        let is_number =
            index > 0 && matches!(pieces[index - 1], Piece::Tag(tag) if tag.starts_with("data "));
        // The substrate has the number 0 without being a layer.
        if is_number || *text == "0" {
            continue;
        }
        let mut rest = unescaped(text);
        for word in known.iter().map(String::as_str).chain(FIGURES_OF_SPEECH) {
            if word.len() > 1 || word == rest {
                rest = rest.replace(word, "");
            }
        }
        // Sources are numbered in the order of their list.
        let rest = rest.trim().trim_start_matches('[');
        let is_citation = rest.ends_with(']') && rest.len() < 4;
        assert!(
            is_citation || !rest.contains(|letter: char| letter.is_ascii_digit()),
            "“{text}”"
        );
    }
}

/// Headings rise by one, tables have captions and heads with scopes, figures have words for those
/// who do not see them, and nothing is fetched or run.
#[test]
fn the_page_can_be_read_by_everyone() {
    let desk = Desk::new();
    desk.sheet("structures/every-key.toml", "house", "out", &["--quiet"]);
    let page = desk.read("out/sheet.html");
    for foreign in [
        "<script",
        "http-equiv=\"refresh\"",
        "src=",
        "href=",
        "@import",
        "url(",
    ] {
        assert!(!page.contains(foreign), "{foreign}");
    }
    for needed in [
        "<html lang=\"en\">",
        "<title>",
        "name=\"viewport\"",
        "<main>",
    ] {
        assert!(page.contains(needed), "{needed}");
    }
    assert_eq!(page.matches("<svg").count(), 4);
    assert_eq!(page.matches("<svg").count(), page.matches("<desc>").count());
    let bare = bare(&page);
    let tags: Vec<&str> = pieces(&bare)
        .iter()
        .filter_map(|piece| match piece {
            Piece::Tag(tag) => Some(*tag),
            Piece::Words(_) => None,
        })
        .collect();
    let count = |start: &str| tags.iter().filter(|tag| tag.starts_with(start)).count();
    assert_eq!(count("h1"), 1);
    assert!(count("h2") > 10);
    assert_eq!(count("h3"), 0);
    assert_eq!(count("table"), count("caption"));
    for tag in tags
        .iter()
        .filter(|tag| **tag == "th" || tag.starts_with("th "))
    {
        assert!(tag.contains("scope=\""), "{tag}");
    }
    // Every tag that opens closes, in order.
    let mut open: Vec<&str> = Vec::new();
    for tag in &tags {
        let name = tag
            .trim_start_matches('/')
            .split(' ')
            .next()
            .expect("a name");
        if ["!doctype", "meta", "col"].contains(&name) {
            continue;
        }
        if tag.starts_with('/') {
            assert_eq!(open.pop(), Some(name), "{tag}");
        } else {
            open.push(name);
        }
    }
    assert!(open.is_empty(), "{open:?}");
}
