//! Text of any origin made fit for a terminal.

/// Text without what moves a cursor, breaks a line or turns the direction of writing; a
/// replacement character stands for each.
#[must_use]
pub fn tidy(text: &str) -> String {
    text.chars()
        .map(|letter| {
            if steers(letter) {
                char::REPLACEMENT_CHARACTER
            } else {
                letter
            }
        })
        .collect()
}

fn steers(letter: char) -> bool {
    letter.is_control()
        || matches!(
            letter,
            '\u{200e}' | '\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2066}'..='\u{2069}' | '\u{feff}'
        )
}

#[cfg(test)]
mod tests {
    use super::tidy;

    #[test]
    fn what_steers_a_terminal_is_replaced_and_nothing_else() {
        for steering in [
            '\u{1b}', '\n', '\t', '\u{9b}', '\u{200f}', '\u{2028}', '\u{2029}', '\u{202e}',
            '\u{2067}', '\u{feff}',
        ] {
            assert_eq!(tidy(&format!("a{steering}b")), "a\u{fffd}b", "{steering:?}");
        }
        // Beside the marks: joiners of letters, and the spaces that hold a number and its unit.
        for kept in ["Mündung 8 µm", "a\u{200d}b", "10\u{202f}000", "e\u{301}"] {
            assert_eq!(tidy(kept), kept);
        }
    }
}
