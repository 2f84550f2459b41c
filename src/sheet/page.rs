//! A page of text for a terminal of 80 columns.

use super::table::Table;
use crate::source::Colour;
pub(super) use crate::source::tidy;
use unicode_width::{UnicodeWidthChar as _, UnicodeWidthStr as _};

/// Columns that a page takes.
pub(super) const COLUMNS: usize = 80;
/// Column at which the values of a list of pairs begin.
const VALUE_COLUMN: usize = 24;

/// Text of at most 80 columns, put together from headings, tables and paragraphs.
pub(super) struct Page {
    text: String,
    colour: Colour,
}

impl Page {
    pub(super) fn new(colour: Colour) -> Self {
        Self {
            text: String::new(),
            colour,
        }
    }

    /// A heading, a blank line before it.
    pub(super) fn heading(&mut self, words: &str) {
        if !self.text.is_empty() {
            self.text.push('\n');
        }
        for line in wrapped(words, COLUMNS) {
            let line = bold(&line, self.colour);
            self.line(&line);
        }
    }

    /// Words between margins: `indent` on the left, the edge of the page on the right.
    pub(super) fn paragraph(&mut self, indent: usize, words: &str) {
        for line in wrapped(words, COLUMNS - indent) {
            let line = format!("{:indent$}{line}", "");
            self.line(&line);
        }
    }

    /// An item of a list: a point, and words that stand in behind it.
    pub(super) fn item(&mut self, indent: usize, words: &str) {
        let mut lead = format!("{:indent$}· ", "");
        for line in wrapped(words, COLUMNS - indent - 2) {
            let line = format!("{lead}{line}");
            self.line(&line);
            lead = " ".repeat(indent + 2);
        }
    }

    /// A blank line.
    pub(super) fn gap(&mut self) {
        self.text.push('\n');
    }

    /// A name and what there is to say about it.
    pub(super) fn pair(&mut self, name: &str, value: &str) {
        self.pair_at(VALUE_COLUMN, name, value);
    }

    /// The same with the value beginning at a column.
    pub(super) fn pair_at(&mut self, column: usize, name: &str, value: &str) {
        let mut lead = padded(&format!("  {}", tidy(name)), column);
        if lead.width() > column {
            let alone = lead.trim_end().to_owned();
            self.paragraph(2, &alone);
            lead = " ".repeat(column);
        }
        for line in wrapped(value, COLUMNS - column) {
            let line = format!("{lead}{line}");
            self.line(&line);
            lead = " ".repeat(column);
        }
    }

    /// A table, two columns in from the margin.
    pub(super) fn table(&mut self, table: &Table) {
        for line in table.lines(COLUMNS - 2, self.colour) {
            let line = format!("  {line}");
            self.line(&line);
        }
    }

    /// A line that is laid out already.
    pub(super) fn ready(&mut self, line: &str) {
        self.line(line);
    }

    fn line(&mut self, line: &str) {
        self.text.push_str(line.trim_end());
        self.text.push('\n');
    }

    /// The page.
    pub(super) fn finish(self) -> String {
        self.text
    }
}

/// Words in bold where colours are written.
pub(super) fn bold(words: &str, colour: Colour) -> String {
    match colour {
        Colour::Always => format!("\u{1b}[1m{words}\u{1b}[0m"),
        Colour::Never => words.to_owned(),
    }
}

/// Text filled up with spaces to a width.
pub(super) fn padded(text: &str, width: usize) -> String {
    format!("{text}{}", " ".repeat(width.saturating_sub(text.width())))
}

/// Words on lines of at most `width` columns; a longer word is broken. At least one line.
pub(super) fn wrapped(words: &str, width: usize) -> Vec<String> {
    let width = width.max(2);
    let mut lines = Vec::new();
    let mut line = String::new();
    for word in tidy(words).split(' ').filter(|word| !word.is_empty()) {
        let mut rest = word;
        if !line.is_empty() && line.width() + 1 + rest.width() > width {
            lines.push(std::mem::take(&mut line));
        }
        while line.is_empty() && rest.width() > width {
            let (head, tail) = split_at_width(rest, width);
            lines.push(head.to_owned());
            rest = tail;
        }
        if !line.is_empty() {
            line.push(' ');
        }
        line.push_str(rest);
    }
    if !line.is_empty() || lines.is_empty() {
        lines.push(line);
    }
    lines
}

/// A word cut in two, the first part no wider than `width`: a formula before an element, any other
/// where the width ends.
fn split_at_width(word: &str, width: usize) -> (&str, &str) {
    let mut used = 0;
    let mut last_element = None;
    let is_formula = word.starts_with(|first: char| first.is_ascii_uppercase())
        && word
            .chars()
            .all(|letter| letter.is_ascii_alphanumeric() || letter == '.');
    for (at, letter) in word.char_indices() {
        if is_formula && letter.is_ascii_uppercase() && at > 0 {
            last_element = Some(at);
        }
        used += letter.width().unwrap_or(0);
        if used > width {
            return word.split_at(last_element.unwrap_or(at));
        }
    }
    (word, "")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn words_are_wrapped_and_long_ones_broken() {
        assert_eq!(wrapped("a bc  def", 4), ["a bc", "def"]);
        assert_eq!(wrapped("abcdefgh ij", 3), ["abc", "def", "gh", "ij"]);
        assert_eq!(
            wrapped("Ga0.2444In0.7556P0.2045As0.7955", 20),
            ["Ga0.2444In0.7556", "P0.2045As0.7955"]
        );
        assert_eq!(wrapped("", 10), [""]);
        assert_eq!(wrapped("µm³ cm⁻³", 4), ["µm³", "cm⁻³"]);
    }

    #[test]
    fn no_word_moves_the_cursor() {
        let mut page = Page::new(Colour::Never);
        page.heading("a\u{1b}[2Jb");
        page.pair("c\r", "d\u{202e}e");
        let text = page.finish();
        assert!(!text.contains(['\u{1b}', '\r', '\u{202e}']), "{text:?}");
    }

    #[test]
    fn no_line_is_wider_than_the_page() {
        let mut page = Page::new(Colour::Never);
        page.heading(&"h".repeat(200));
        page.paragraph(4, &"word ".repeat(60));
        page.pair(&"n".repeat(100), &"v".repeat(300));
        for line in page.finish().lines() {
            assert!(line.width() <= COLUMNS, "{line}");
        }
    }
}
