//! Sheets of paper looked at before they are written: nothing leaves them, nothing overlaps, nothing
//! of the page is missing, and tables go on under their heads.

use super::drawing::{Item, width_pt};
use super::layout::{Page, pages};
use super::{Paper, writing};
use crate::design::{House, Ordered};
use crate::materials::Parameters;
use crate::sheet::order::content::{Block, Content, Line, Row, Span, content};
use crate::sheet::order::{Document, Figures, Origins};
use crate::sheet::stamp::{Stamp, sha256};
use crate::structure::{Entry, Order, Overrides, order_fields, read};

const HEAD: &str = "format = 1\n[substrate]\nmaterial = \"GaAs\"\n";
const WELLS: &str = "[[layers]]\nrole = \"barrier\"\nmaterial = \"Al0.3Ga0.7As\"\nthickness_nm = 20\n\
    [[layers]]\nrepeat = 2\nlayers = [\n\
    { role = \"well\", material = \"In0.1Ga0.9As\", thickness_nm = 8 },\n\
    { role = \"barrier\", material = \"Al0.3Ga0.7As\", thickness_nm = 20 },\n]\n";
const TAIL: &str =
    "[model]\nbands = \"single\"\n[growth]\nrate_percent = 1\n[operation]\ntemperature_c = 25\n";

/// A sheet with what it is drawn from.
fn sheet(file: &str, order: Option<Order>, is_house: bool) -> (Document, Figures) {
    let parameters = Parameters::shipped();
    let mut reading = read(file, &parameters, &Overrides::default())
        .unwrap_or_else(|faults| panic!("{faults:#?}"));
    if order.is_some() {
        reading.stack.order = order;
    }
    let stack = &reading.stack;
    let sum = sha256(file.as_bytes());
    let origins = Origins {
        stack,
        text: file,
        sha256: &sum,
        parameters: &parameters,
    };
    let ordered = Ordered::new(stack, &parameters);
    let house = is_house.then(|| House::new(stack, &parameters, &[], &|_| {}));
    let document = Document::new(&origins, &ordered, house.as_ref(), None);
    let mut figures = Figures::of_wafer(&ordered, &document.stamp());
    if let Some(house) = &house {
        let stamp = Stamp::new(stack, &parameters, None, &sum);
        figures.add_house(stack, house, &stamp);
    }
    (document, figures)
}

/// An order with the same words in every field.
fn order_of(words: &str) -> Order {
    let mut order = Order::default();
    for field in order_fields() {
        let entry = match order.entry(field.path).0 {
            Some(Entry::Number(_)) => continue,
            Some(Entry::List(_)) => Entry::List(vec![words.to_owned(), words.to_owned()]),
            _ if field.path == "quantity" || field.path == "wafer.diameter_mm" => continue,
            _ if field.path == "targets.pl_offset_nm" => continue,
            _ => Entry::Text(words.to_owned()),
        };
        order.put(field.path, Some(entry));
    }
    order
}

/// Left, top, right, bottom of every text.
fn boxes(page: &Page) -> Vec<([f64; 4], String)> {
    let texts = page.items.iter().filter_map(|item| match item {
        Item::Text {
            at: (x, y),
            text,
            face,
            size_pt,
            upright,
            ..
        } => {
            let (long, over, under) = (
                width_pt(text, *face, *size_pt),
                0.75 * size_pt,
                0.2 * size_pt,
            );
            let bounds = if *upright {
                [x - over, y - long, x + under, *y]
            } else {
                [*x, y - over, x + long, y + under]
            };
            Some((bounds, text.clone()))
        }
        _ => None,
    });
    texts.collect()
}

fn nothing_leaves_or_overlaps(pages: &[Page], paper: Paper) {
    let (width, height) = paper.size_pt();
    for (number, page) in pages.iter().enumerate() {
        let mut boxes = boxes(page);
        for ([left, top, right, bottom], text) in &boxes {
            let inside =
                *left >= 20.0 && *top >= 20.0 && *right <= width - 20.0 && *bottom <= height - 14.0;
            assert!(inside, "page {}: “{text}”", number + 1);
        }
        boxes.retain(|(_, text)| !text.trim().is_empty());
        boxes.sort_by(|(a, _), (b, _)| a[1].total_cmp(&b[1]));
        for (index, (one, text)) in boxes.iter().enumerate() {
            let below = boxes[index + 1..].iter();
            for (other, more) in below.take_while(|(other, _)| other[1] < one[3]) {
                let width = one[2].min(other[2]) - one[0].max(other[0]);
                let height = one[3].min(other[3]) - one[1].max(other[1]);
                // Raised figures reach into the letters before them by a hair.
                assert!(
                    width < 0.6 || height < 0.6,
                    "page {}: “{text}” and “{more}” overlap",
                    number + 1
                );
            }
        }
    }
}

/// Every letter of the content, in reading order, without spaces.
fn letters(content: &Content) -> String {
    let of_line = |line: &Line| -> String {
        line.iter()
            .map(|span| match span {
                Span::Words(text) | Span::Said(text) | Span::Number { text, .. } => text.clone(),
                Span::Practice => "common practice".to_owned(),
                Span::Asked => "asked for".to_owned(),
                Span::Blank => String::new(),
            })
            .collect()
    };
    let mut all = String::new();
    for section in &content.sections {
        all.push_str(&section.heading);
        for block in &section.blocks {
            match block {
                Block::Paragraph(line) => all.push_str(&of_line(line)),
                Block::List { name, items, .. } => {
                    all.push_str(&of_line(name));
                    all.extend(items.iter().map(of_line));
                }
                Block::Pairs(pairs) => {
                    for (name, lines) in pairs {
                        all.push_str(name);
                        all.extend(lines.iter().map(of_line));
                    }
                }
                Block::Table(table) => {
                    all.push_str(&of_line(&table.caption));
                    for row in &table.rows {
                        match row {
                            Row::Banner(line) => all.push_str(&of_line(line)),
                            Row::Cells { cells, .. } => {
                                let lines = cells.iter().flatten();
                                all.extend(lines.map(of_line));
                            }
                        }
                    }
                }
                Block::Figure(_) => {}
            }
        }
    }
    all.chars().filter(|it| !it.is_whitespace()).collect()
}

/// How often every letter stands somewhere: cells are set side by side, so that their order is not
/// that of reading.
fn census(text: &str) -> std::collections::BTreeMap<char, usize> {
    let mut counts = std::collections::BTreeMap::new();
    for letter in text.chars().filter(|it| !it.is_whitespace()) {
        *counts.entry(letter).or_insert(0) += 1;
    }
    counts
}

fn file(wells: &str) -> String {
    format!("{HEAD}{wells}{TAIL}")
}

#[test]
fn both_copies_fit_both_papers() {
    for is_house in [false, true] {
        let (document, figures) = sheet(&file(WELLS), Some(order_of("some words")), is_house);
        for paper in Paper::ALL {
            let pages = pages(&content(&document), &figures, paper, "foot");
            nothing_leaves_or_overlaps(&pages, paper);
        }
    }
}

/// Without figures, heads that are repeated and feet, a PDF has the letters of the page, each as often.
#[test]
fn no_letter_of_the_page_is_missing() {
    let (document, _) = sheet(&file(WELLS), Some(order_of("words × μ")), true);
    let content = content(&document);
    let pages = pages(&content, &Figures::default(), Paper::A4, "");
    let drawn: String = pages
        .iter()
        .flat_map(|page| &page.items)
        .filter_map(|item| match item {
            Item::Text { text, .. } => Some(text.as_str()),
            _ => None,
        })
        .collect();
    let (drawn, wanted) = (census(&drawn), census(&letters(&content)));
    for (letter, count) in wanted {
        // Signs of lists, heads of tables and page numbers come on top.
        assert!(
            drawn.get(&letter).is_some_and(|it| *it >= count),
            "{letter}"
        );
    }
}

#[test]
fn hostile_words_stay_inside() {
    let hostile = "</table><script> \u{202e}txet =1+1 漢字 ﷽ ".repeat(240);
    for words in [hostile.as_str(), &"W".repeat(10_000)] {
        let (document, figures) = sheet(&file(WELLS), Some(order_of(words)), true);
        let pages = pages(&content(&document), &figures, Paper::Letter, words);
        nothing_leaves_or_overlaps(&pages, Paper::Letter);
        let bytes = writing::document(&pages, Paper::Letter, words, "program");
        assert!(bytes.starts_with(b"%PDF-"));
    }
}

/// A thousand layers: under their heads on every page, each exactly once.
#[test]
fn long_tables_go_on_under_their_heads() {
    let many = "[[layers]]\nrepeat = 498\nlayers = [\n\
        { role = \"cladding\", material = \"GaAs\", thickness_nm = 3 },\n\
        { role = \"cladding\", material = \"AlAs\", thickness_nm = 2 },\n]\n";
    let (document, _) = sheet(&file(&format!("{many}{WELLS}")), None, false);
    let pages = pages(&content(&document), &Figures::default(), Paper::A4, "");
    nothing_leaves_or_overlaps(&pages, Paper::A4);
    let texts: Vec<Vec<String>> = pages
        .iter()
        .map(|page| boxes(page).into_iter().map(|(_, text)| text).collect())
        .collect();
    let with_layers = texts
        .iter()
        .filter(|texts| texts.iter().any(|text| text == "cladding"));
    let mut count = 0;
    for texts in with_layers {
        assert_eq!(
            texts.iter().filter(|text| *text == "Composition").count(),
            1
        );
        count += 1;
    }
    assert!(count > 20, "{count} pages");
    let all: Vec<&String> = texts.iter().flatten().collect();
    for number in ["1", "500", "1001"] {
        assert!(all.iter().any(|text| *text == number), "{number}");
    }
}

#[test]
fn the_same_sheet_is_the_same_bytes() {
    let (document, figures) = sheet(&file(WELLS), None, true);
    let one = document.pdf(&figures, Paper::A4);
    assert_eq!(one, document.pdf(&figures, Paper::A4));
    assert_ne!(one, document.pdf(&figures, Paper::Letter));
}
