//! Sheets as they were looked at and found right. `INSTA_UPDATE=always` writes them anew; look at
//! them again then.

use super::Desk;
use super::page::bare;

/// The page without figures, style, and the digits that it does not print; nor with the words of a
/// check, which are looked at where `check` is.
fn page(desk: &Desk) -> String {
    let mut page = bare(&desk.read("out/sheet.html"));
    if let Some(from) = page.find(">Remarks and findings</h2>") {
        let rows = from + page[from..].find("<tbody").expect("a table");
        let end = rows + page[rows..].find("</tbody>").expect("it ends");
        page.replace_range(rows..end, "");
    }
    let mut kept = String::new();
    let mut rest = page.as_str();
    while let Some(from) = rest.find("<data value=\"") {
        let end = from + rest[from..].find('>').expect("a tag ends") + 1;
        kept.push_str(&rest[..from]);
        kept.push_str("<data>");
        rest = &rest[end..];
    }
    kept.push_str(rest);
    // Checksums tell of bytes, and those are compared elsewhere.
    let is_sum = |word: &str| word.len() == 64 && word.bytes().all(|it| it.is_ascii_hexdigit());
    let parts = kept.split_inclusive(['<', '>']).map(|part| {
        let word = part.trim_end_matches(['<', '>']);
        if is_sum(word) {
            part.replace(word, "SHA-256")
        } else {
            part.to_owned()
        }
    });
    parts.collect()
}

#[test]
fn the_grower_of_the_1310_nm_structure() {
    let desk = Desk::new();
    desk.sheet(
        "structures/estuary-1310.toml",
        "grower",
        "out",
        &["--quiet"],
    );
    insta::assert_snapshot!("grower-1310", page(&desk));
}

#[test]
fn the_house_of_the_980_nm_structure() {
    let desk = Desk::new();
    desk.sheet("structures/estuary-980.toml", "house", "out", &["--quiet"]);
    insta::assert_snapshot!("house-980", page(&desk));
}
