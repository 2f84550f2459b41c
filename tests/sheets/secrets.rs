//! What stays in the house.

use super::{Desk, PLAIN, names};

/// Words that no file of the grower's copy may hold, whatever their letters' case.
const SECRETS: [&str; 12] = [
    "estuary gauge laser",
    "gainwell",
    "laser",
    "gain",
    "threshold",
    "transparency",
    "to the shore",
    "hush",
    "works",
    "2.25e18",
    "358.15",
    "85",
];

fn words(text: &str) -> Vec<String> {
    let is_part = |letter: char| letter.is_alphanumeric() || letter == '.';
    text.to_lowercase()
        .split(|letter: char| !is_part(letter))
        .map(|word| word.trim_matches('.').to_owned())
        .collect()
}

#[test]
fn the_grower_is_told_what_to_grow_and_not_what_for() {
    let desk = Desk::new();
    let order = "# a laser for the shore\n[target]\nkind = \"gain\"\nwavelength_nm = 1601.5\n\
                 [growth]\nrate_percent = 1.25\n[limits]\nstrain_percent_max = 1.75\n\
                 [order]\nid = \"E-1\"\npurpose = \"lasers for links to the shore\"\n\
                 house_notes = [\"hush\"]\nopen_questions = [\"whether it works\"]\n";
    let structure = desk.put("secret.toml", &format!("{PLAIN}{order}"));
    desk.sheet(&structure, "grower", "out", &["--quiet"]);
    for name in names(&desk.path("out")) {
        let text = desk.read(&format!("out/{name}"));
        // Coordinates of a figure are no numbers of the sheet.
        let text = if name.contains(".svg") || name.contains(".html") {
            let bare = super::page::bare(&text);
            let pieces = super::page::pieces(&bare);
            let words: Vec<&str> = pieces
                .iter()
                .filter_map(|piece| match piece {
                    super::page::Piece::Words(words) => Some(*words),
                    super::page::Piece::Tag(_) => None,
                })
                .collect();
            words.join(" ")
        } else {
            text
        };
        let said = words(&text);
        for secret in SECRETS.iter().copied().chain(["1601.5", "1.25", "1.75"]) {
            let parts: Vec<&str> = secret.split(' ').collect();
            let told = said.windows(parts.len()).any(|window| window == parts);
            assert!(!told, "{name} tells “{secret}”");
        }
    }
    // The same words are on the house's copy, so that their absence says something.
    desk.sheet(&structure, "house", "out", &["--quiet", "--force"]);
    let page = words(&desk.read("out/sheet.html"));
    for word in ["laser", "hush", "gain", "threshold", "85"] {
        assert!(page.iter().any(|it| it == word), "{word}");
    }
}
