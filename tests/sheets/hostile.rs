//! Words of a user that are meant to be more than words.

use super::page::{Piece, bare, pieces};
use super::{Desk, PLAIN};
use stepwell::structure::order_fields;

/// Markup, quotes, template marks, marks of writing direction, formulas of spreadsheets, and what
/// ends a comment or a table.
const HOSTILE: &str = "=cmd|'/C x'!A1 </td></table><script>alert(\"1\")</script><img src=x onerror=alert(1)> \
    {{ 7*7 }} {% raw %} &lt;&amp; ' \" ` \u{202e}txet\u{202c} \u{2066}x\u{2069} \u{200f} -->]]> @SUM(1+1) 漢字 ﷽";

/// An order whose every text is `words`, so often that long fields take 10 000 characters.
fn order(words: &str, long: usize) -> String {
    let quoted = |text: &str| toml::Value::String(text.to_owned()).to_string();
    let short: String = words.chars().take(200).collect();
    let prose: String = words.chars().cycle().take(long).collect();
    let prose = prose.trim();
    let mut tables: Vec<(String, String)> = Vec::new();
    for field in order_fields() {
        let (table, key) = field.path.rsplit_once('.').unwrap_or(("", field.path));
        let value = match key {
            "status" => quoted("draft"),
            "date" => quoted("2031-05-02"),
            "id" | "revision" | "author" | "checker" | "supersedes" | "growth_method"
            | "thickness_um" => quoted(short.trim()),
            "notes" | "cautions" | "house_notes" | "open_questions" | "must" | "should"
            | "record" | "ranking" | "trims" | "fixed" | "sampling" | "returned" | "packing" => {
                format!("[{}, {}]", quoted(prose), quoted(short.trim()))
            }
            _ if field.unit().is_empty()
                && !["quantity", "fraction", "satellites"].contains(&key) =>
            {
                quoted(prose)
            }
            _ => continue,
        };
        tables.push((table.to_owned(), format!("{key} = {value}\n")));
    }
    tables.sort_by(|a, b| a.0.cmp(&b.0));
    let mut text = String::new();
    let mut last = None;
    for (table, line) in tables {
        if last.as_ref() != Some(&table) {
            let dot = if table.is_empty() { "" } else { "." };
            for part in ["[order", dot, &table, "]\n"] {
                text.push_str(part);
            }
            last = Some(table);
        }
        text.push_str(&line);
    }
    text
}

fn tags(page: &str) -> Vec<String> {
    pieces(page)
        .into_iter()
        .filter_map(|piece| match piece {
            Piece::Tag(tag) => Some(tag.split(' ').next().unwrap_or(tag).to_owned()),
            Piece::Words(_) => None,
        })
        .collect()
}

#[test]
fn hostile_words_stay_words_on_the_page() {
    let desk = Desk::new();
    let title = toml::Value::String(HOSTILE.chars().take(200).collect::<String>());
    for (reader, long) in [("grower", 10_000), ("house", 10_000)] {
        let mut seen = Vec::new();
        for (name, words, title) in [
            ("plain", "words", "\"words\"".to_owned()),
            ("hostile", HOSTILE, title.to_string()),
        ] {
            let text = PLAIN.replace("\"Estuary gauge laser\"", &title);
            let structure = desk.put(
                &format!("{name}.toml"),
                &format!("{text}{}", order(words, long)),
            );
            desk.sheet(&structure, reader, name, &["--force", "--quiet"]);
            let page = desk.read(&format!("{name}/sheet.html"));
            for mark in [
                "<script", "<img", "\u{202e}", "\u{2066}", "\u{200f}", "{{", "49",
            ] {
                let is_plain = mark == "{{" || mark == "49";
                assert!(is_plain || !page.contains(mark), "{mark}");
            }
            // What a template would have made of its own marks.
            assert_eq!(page.contains("{{ 7*7 }}"), name == "hostile");
            seen.push(tags(&bare(&page)));
        }
        let hostile = seen.pop().expect("two pages");
        let plain = seen.pop().expect("two pages");
        assert_eq!(hostile, plain, "{reader}: the same tags in the same order");
    }
}

#[test]
fn no_cell_of_the_table_is_a_formula() {
    let desk = Desk::new();
    let structure = desk.put("hostile.toml", &format!("{PLAIN}{}", order(HOSTILE, 300)));
    desk.sheet(&structure, "grower", "out", &["--quiet"]);
    let file = desk.read("out/layers.csv");
    let (stamp, table) = file.split_once('\n').expect("a stamp");
    assert!(stamp.starts_with("# "), "{stamp}");
    assert!(stamp.contains("cmd"), "{stamp}");
    for separator in [',', ';', '\t', '"'] {
        let mut cells = stamp.split(separator);
        assert!(cells.next().is_some() && cells.next().is_none(), "{stamp}");
    }
    let mut reader = csv::Reader::from_reader(table.as_bytes());
    for row in reader.records() {
        for cell in &row.expect("a row of the same length") {
            let is_number = cell.parse::<f64>().is_ok();
            assert!(
                is_number || !cell.starts_with(['=', '+', '-', '@', '\t']),
                "{cell}"
            );
        }
    }
}

/// Longer than any field: refused at its place.
#[test]
fn words_without_end_are_refused() {
    let desk = Desk::new();
    for (key, length) in [("id", 201), ("contact", 10_001)] {
        let order = format!("[order]\n{key} = \"{}\"\n", "x".repeat(length));
        let path = desk.put("long.toml", &format!("{PLAIN}{order}"));
        let output = super::stepwell(&["sheet", &path, "--for", "grower"]);
        assert_eq!(output.status.code(), Some(3));
        let said = super::text(&output.stderr);
        assert!(
            said.contains(&format!("`{key}` is longer than {}", length - 1)),
            "{said}"
        );
    }
}
