//! Pieces of text broken into lines of a width.

use super::drawing::{Item, rectangle, width_pt};
use super::font::Face;
use crate::sheet::figure::Rgb;
use crate::sheet::order::content::Span;

pub(super) const INK: Rgb = [0x1a, 0x1a, 0x1a];
pub(super) const PALE_INK: Rgb = [0x44, 0x44, 0x44];
const RULE: Rgb = [0x6a, 0x6a, 0x6a];

/// Height of a line over the size of its letters.
const LEADING: f64 = 1.3;
/// Where letters stand in a line, from its top, over the size of the letters.
const BASELINE: f64 = 0.98;
/// Size of the words in a mark, over that of the text around.
const MARK_SIZE: f64 = 0.78;
/// Air in a mark and a blank's width, over the size of the text around.
const MARK_AIR: f64 = 0.3;
const BLANK_WIDTH: f64 = 4.0;

/// How text looks.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Style {
    pub(super) face: Face,
    pub(super) size_pt: f64,
    pub(super) rgb: Rgb,
}

impl Style {
    pub(super) const fn regular(size_pt: f64) -> Self {
        Self {
            face: Face::Regular,
            size_pt,
            rgb: INK,
        }
    }

    pub(super) const fn bold(size_pt: f64) -> Self {
        Self {
            face: Face::Bold,
            size_pt,
            rgb: INK,
        }
    }

    pub(super) const fn pale(self) -> Self {
        Self {
            rgb: PALE_INK,
            ..self
        }
    }

    pub(super) fn line_pt(self) -> f64 {
        LEADING * self.size_pt
    }
}

/// What stands on a line.
#[derive(Clone, Debug, PartialEq)]
enum Piece {
    Text(String),
    /// Words in a box; a heavy one is for what is asked for.
    Boxed(&'static str, bool),
    /// A line to write on.
    Blank,
}

/// A line that is set.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct SetLine {
    /// Pieces with the distance of each from the line's beginning, pt.
    pieces: Vec<(f64, Piece)>,
    /// Its length, pt.
    width_pt: f64,
}

impl Piece {
    fn width_pt(&self, style: Style) -> f64 {
        match self {
            Self::Text(text) => width_pt(text, style.face, style.size_pt),
            Self::Boxed(text, _) => {
                let face = self.face();
                width_pt(text, face, MARK_SIZE * style.size_pt) + 2.0 * MARK_AIR * style.size_pt
            }
            Self::Blank => BLANK_WIDTH * style.size_pt,
        }
    }

    fn face(&self) -> Face {
        match self {
            Self::Boxed(_, true) => Face::Bold,
            _ => Face::Regular,
        }
    }
}

/// Pieces of text on lines no longer than `room_pt`; a word that is longer is broken. At least one.
pub(super) fn set(line: &[Span], style: Style, room_pt: f64) -> Vec<SetLine> {
    let mut lines = vec![SetLine::default()];
    let mut space_due = false;
    // Pieces without a space between them stay together where they fit on a line of their own.
    let mut bound: Vec<Piece> = Vec::new();
    for span in line {
        let text = match span {
            Span::Words(text) | Span::Said(text) | Span::Number { text, .. } => text.as_str(),
            Span::Practice => {
                bound.push(Piece::Boxed("common practice", false));
                continue;
            }
            Span::Asked => {
                bound.push(Piece::Boxed("asked for", true));
                continue;
            }
            Span::Blank => {
                bound.push(Piece::Blank);
                continue;
            }
        };
        for (place, word) in text.split(' ').enumerate() {
            if place > 0 {
                put(
                    &mut lines,
                    std::mem::take(&mut bound),
                    space_due,
                    style,
                    room_pt,
                );
                space_due = true;
            }
            if !word.is_empty() {
                bound.push(Piece::Text(word.to_owned()));
            }
        }
    }
    put(&mut lines, bound, space_due, style, room_pt);
    lines
}

/// Puts pieces that belong together on the last line, or on a new one.
fn put(lines: &mut Vec<SetLine>, pieces: Vec<Piece>, space_due: bool, style: Style, room_pt: f64) {
    if pieces.is_empty() {
        return;
    }
    let width: f64 = pieces.iter().map(|it| it.width_pt(style)).sum();
    let has_text = lines.last().is_some_and(|line| !line.pieces.is_empty());
    let space = if space_due && has_text {
        width_pt(" ", style.face, style.size_pt)
    } else {
        0.0
    };
    let used = lines.last().map_or(0.0, |line| line.width_pt);
    if has_text && used + space + width > room_pt {
        lines.push(SetLine::default());
    } else if let Some(line) = lines.last_mut() {
        line.width_pt += space;
    }
    for piece in pieces {
        append(lines, piece, style, room_pt);
    }
}

/// Puts one piece behind the last, breaking a text that is longer than a line.
fn append(lines: &mut Vec<SetLine>, piece: Piece, style: Style, room_pt: f64) {
    let Piece::Text(text) = piece else {
        let width_pt = piece.width_pt(style);
        let is_full = lines
            .last()
            .is_some_and(|line| !line.pieces.is_empty() && line.width_pt + width_pt > room_pt);
        if is_full {
            lines.push(SetLine::default());
        }
        push(lines, piece, width_pt);
        return;
    };
    let mut rest = text.as_str();
    loop {
        let used_pt = lines.last().map_or(0.0, |line| line.width_pt);
        let is_new = lines.last().is_none_or(|line| line.pieces.is_empty());
        let (mut head, mut tail) = split(rest, style, room_pt - used_pt + 1e-9);
        if !tail.is_empty() && !is_new && split(rest, style, room_pt).1.is_empty() {
            // It fits on a line of its own.
            lines.push(SetLine::default());
            continue;
        }
        if head.is_empty() && is_new {
            // Not one letter fits: it stands out rather than nowhere.
            let first = rest.chars().next().map_or(rest.len(), char::len_utf8);
            (head, tail) = rest.split_at(first);
        }
        if !head.is_empty() {
            let width_pt = width_pt(head, style.face, style.size_pt);
            push(lines, Piece::Text(head.to_owned()), width_pt);
        }
        if tail.is_empty() {
            return;
        }
        lines.push(SetLine::default());
        rest = tail;
    }
}

fn push(lines: &mut [SetLine], piece: Piece, width_pt: f64) {
    if let Some(line) = lines.last_mut() {
        line.pieces.push((line.width_pt, piece));
        line.width_pt += width_pt;
    }
}

/// As much of a text as fits, and the rest.
fn split(text: &str, style: Style, room_pt: f64) -> (&str, &str) {
    let font = style.face.font();
    let mut used = 0.0;
    for (at, character) in text.char_indices() {
        used += style.size_pt * font.advance_em(font.glyph(character));
        if used > room_pt {
            return text.split_at(at);
        }
    }
    (text, "")
}

/// Draws a set line whose top is at a height.
pub(super) fn draw(line: &SetLine, style: Style, left: f64, top: f64, items: &mut Vec<Item>) {
    let size = style.size_pt;
    let baseline = top + BASELINE * size;
    let text = |at: (f64, f64), text: &str, face: Face, size_pt: f64| Item::Text {
        at,
        text: text.to_owned(),
        face,
        size_pt,
        rgb: style.rgb,
        upright: false,
    };
    for (offset, piece) in &line.pieces {
        let x = left + offset;
        match piece {
            Piece::Text(words) => items.push(text((x, baseline), words, style.face, size)),
            Piece::Boxed(words, is_heavy) => {
                let air = MARK_AIR * size;
                items.push(Item::Line {
                    points: rectangle(
                        x + 0.3 * air,
                        top + 0.14 * size,
                        piece.width_pt(style) - 0.6 * air,
                        1.06 * size,
                    ),
                    width_pt: if *is_heavy { 1.1 } else { 0.5 },
                    rgb: if *is_heavy { INK } else { RULE },
                    dash_pt: Vec::new(),
                    is_closed: true,
                });
                let at = (x + air, baseline - 0.08 * size);
                items.push(text(at, words, piece.face(), MARK_SIZE * size));
            }
            Piece::Blank => items.push(Item::Line {
                points: vec![
                    (x, baseline + 0.1 * size),
                    (x + piece.width_pt(style), baseline + 0.1 * size),
                ],
                width_pt: 0.8,
                rgb: INK,
                dash_pt: Vec::new(),
                is_closed: false,
            }),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sheet::order::content::words;

    fn texts(lines: &[SetLine]) -> Vec<String> {
        let of = |line: &SetLine| {
            let pieces = line.pieces.iter().filter_map(|(_, piece)| match piece {
                Piece::Text(text) => Some(text.clone()),
                _ => None,
            });
            pieces.collect::<Vec<_>>().join("|")
        };
        lines.iter().map(of).collect()
    }

    #[test]
    fn lines_are_no_longer_than_their_room() {
        let style = Style::regular(8.0);
        let long = "word ".repeat(40) + &"W".repeat(300);
        for room_pt in [20.0, 57.3, 400.0] {
            for line in set(&[words(long.clone())], style, room_pt) {
                assert!(
                    line.width_pt <= room_pt + 1e-6,
                    "{} > {room_pt}",
                    line.width_pt
                );
            }
        }
    }

    #[test]
    fn what_has_no_space_between_stays_together() {
        let style = Style::regular(8.0);
        let line = [words("from Al\u{a0}"), words("0.4800"), words(" In")];
        let narrow = set(
            &line,
            style,
            width_pt("Al\u{a0}0.4800 ", Face::Regular, 8.0),
        );
        assert_eq!(texts(&narrow), ["from", "Al\u{a0}|0.4800", "In"]);
    }

    #[test]
    fn no_letter_is_lost() {
        let style = Style::bold(9.0);
        let text = format!("{} end", "abcdefghij".repeat(60));
        let set = set(&[words(text.clone())], style, 90.0);
        let back: String = texts(&set).concat().replace('|', "");
        assert_eq!(back, text.replace(' ', ""));
    }
}
