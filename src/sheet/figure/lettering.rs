//! Texts of any origin made fit to be set: cleaned, cut, wrapped.

use super::glyphs::{Weight, character_width_px, width_px};

/// No text of a figure needs more characters; beyond it a reader could not read it either.
const LONGEST_TEXT: usize = 2000;

/// Accents stacked higher than this would climb out of the line.
const MOST_ACCENTS: usize = 2;

/// A text on one line: white space of any kind becomes one space; control characters, marks that
/// turn the direction of writing, and characters that XML has no place for are left out.
pub(crate) fn tidy(text: &str) -> String {
    let mut tidy = String::new();
    let mut accents = 0;
    let mut space_due = false;
    for character in text.chars().take(4 * LONGEST_TEXT) {
        if tidy.len() >= LONGEST_TEXT {
            tidy.push('…');
            break;
        }
        // The spaces that hold a number and its unit together are kept as they are.
        if character.is_whitespace()
            && !matches!(character, '\u{a0}' | '\u{2007}' | '\u{2009}' | '\u{202f}')
        {
            space_due = !tidy.is_empty();
            continue;
        }
        if character.is_control() || turns_or_hides(character) {
            continue;
        }
        if unicode_width::UnicodeWidthChar::width(character) == Some(0) {
            accents += 1;
            if accents > MOST_ACCENTS || tidy.is_empty() {
                continue;
            }
        } else {
            accents = 0;
        }
        if space_due {
            tidy.push(' ');
            space_due = false;
        }
        tidy.push(character);
    }
    tidy
}

/// Marks of writing direction, invisible fillers, and code points that are no characters.
fn turns_or_hides(character: char) -> bool {
    matches!(u32::from(character),
        0x61c | 0x200b..=0x200f | 0x2028..=0x202e | 0x2060..=0x206f | 0xfe00..=0xfe0f | 0xfeff
        | 0xfff0..=0xfffb | 0xfdd0..=0xfdef | 0xe0000..=0xe0fff)
        || u32::from(character) & 0xfffe == 0xfffe
}

/// The text on one line of at most `room_px`, cut with an ellipsis where it is longer; empty where
/// not even the ellipsis fits.
pub(crate) fn fitted(text: &str, size_px: f64, weight: Weight, room_px: f64) -> String {
    let text = tidy(text);
    if width_px(&text, size_px, weight) <= room_px {
        return text;
    }
    cut(&text, size_px, weight, room_px)
}

/// As much of a text as leaves room for an ellipsis, and the ellipsis.
fn cut(text: &str, size_px: f64, weight: Weight, room_px: f64) -> String {
    let mut left_px = room_px - character_width_px('…', size_px, weight);
    if left_px < 0.0 {
        return String::new();
    }
    let mut kept = String::new();
    for character in text.chars() {
        left_px -= character_width_px(character, size_px, weight);
        if left_px < 0.0 {
            break;
        }
        kept.push(character);
    }
    kept.truncate(kept.trim_end().len());
    kept.push('…');
    kept
}

/// The text on at most `most_lines` lines of at most `room_px` each, broken at spaces where that
/// is possible; what is left over is cut with an ellipsis. An empty text has no lines.
pub(crate) fn wrapped(
    text: &str,
    size_px: f64,
    weight: Weight,
    room_px: f64,
    most_lines: usize,
) -> Vec<String> {
    let text = tidy(text);
    let mut lines = Vec::new();
    let mut rest = text.as_str();
    while !rest.is_empty() && lines.len() < most_lines {
        if lines.len() + 1 == most_lines {
            lines.push(fitted(rest, size_px, weight, room_px));
            break;
        }
        let end = line_end(rest, size_px, weight, room_px);
        lines.push(rest[..end].trim_end().to_owned());
        rest = rest[end..].trim_start();
    }
    lines.retain(|line| !line.is_empty());
    lines
}

/// Bytes of `text` that go on one line: up to the last space that fits, else as many characters
/// as fit, but at least one so that wrapping ends.
fn line_end(text: &str, size_px: f64, weight: Weight, room_px: f64) -> usize {
    let mut used_px = 0.0;
    let mut last_space = None;
    for (at, character) in text.char_indices() {
        used_px += character_width_px(character, size_px, weight);
        if character == ' ' {
            last_space = Some(at);
        } else if used_px > room_px {
            let first = text.chars().next().map_or(1, char::len_utf8);
            return last_space.unwrap_or(at.max(first));
        }
    }
    text.len()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn white_space_and_direction_marks_go() {
        assert_eq!(
            tidy("  peak\n\tgain \u{202e}(TE)\u{0}\u{feff} "),
            "peak gain (TE)"
        );
        assert_eq!(tidy("a\u{301}\u{301}\u{301}\u{301}"), "a\u{301}\u{301}");
        assert_eq!(tidy("10\u{202f}000"), "10\u{202f}000");
    }

    #[test]
    fn a_long_text_is_cut_once_and_wraps_at_spaces() {
        assert_eq!(
            fitted("transparency", 10.0, Weight::Regular, 40.0),
            "trans…"
        );
        assert_eq!(fitted("TE", 10.0, Weight::Regular, 40.0), "TE");
        assert_eq!(
            wrapped("one two three", 10.0, Weight::Regular, 42.0, 3),
            ["one two", "three"]
        );
        assert!(wrapped("   ", 10.0, Weight::Regular, 42.0, 3).is_empty());
    }

    proptest! {
        #[test]
        fn every_line_fits(text in any::<String>(), room_px in 15.0..300.0f64, most in 1..5usize) {
            let lines = wrapped(&text, 12.0, Weight::Regular, room_px, most);
            prop_assert!(lines.len() <= most);
            for line in lines {
                prop_assert!(width_px(&line, 12.0, Weight::Regular) <= room_px + 1e-9, "{line}");
            }
        }

        #[test]
        fn nothing_is_lost_where_there_is_room(words in prop::collection::vec("[a-z]{1,6}", 1..12)) {
            let text = words.join(" ");
            let lines = wrapped(&text, 12.0, Weight::Regular, 80.0, 100);
            prop_assert_eq!(lines.join(" "), text);
        }
    }
}
