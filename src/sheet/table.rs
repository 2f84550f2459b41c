//! Tables of a page: heads with their units, numbers flush right, words flush left.

use super::page::{bold, padded, tidy, wrapped};
use crate::source::Colour;
use std::borrow::Cow;
use unicode_width::UnicodeWidthStr as _;

/// Space between two columns.
const GAP: usize = 2;
/// The same where there is little room.
const SMALL_GAP: usize = 1;
/// A column of words is never made narrower than this.
const NARROWEST: usize = 8;

/// One column.
pub(super) struct Column {
    head: Cow<'static, str>,
    right: bool,
}

/// A column of words; lines of the head are divided by `\n`.
pub(super) fn words(head: impl Into<Cow<'static, str>>) -> Column {
    Column {
        head: head.into(),
        right: false,
    }
}

/// A column of numbers; the last line of the head is the unit.
pub(super) fn numbers(head: impl Into<Cow<'static, str>>) -> Column {
    Column {
        head: head.into(),
        right: true,
    }
}

/// A line of the table.
enum Row {
    Cells(Vec<String>),
    /// Words over the whole width: what the rows below have in common.
    Common(String),
}

/// A table.
pub(super) struct Table {
    columns: Vec<Column>,
    rows: Vec<Row>,
}

impl Table {
    pub(super) fn new(columns: impl IntoIterator<Item = Column>) -> Self {
        Self {
            columns: columns.into_iter().collect(),
            rows: Vec::new(),
        }
    }

    /// Adds a row; missing cells are blank.
    pub(super) fn row(&mut self, cells: impl IntoIterator<Item = String>) {
        let mut cells: Vec<String> = cells.into_iter().map(|cell| tidy(&cell)).collect();
        cells.resize(self.columns.len(), String::new());
        self.rows.push(Row::Cells(cells));
    }

    /// Adds a line over the whole width.
    pub(super) fn common(&mut self, words: &str) {
        self.rows.push(Row::Common(words.to_owned()));
    }

    /// The lines of the table, none wider than `width`: where it would be, the widest columns of
    /// words are wrapped.
    pub(super) fn lines(&self, width: usize, colour: Colour) -> Vec<String> {
        // Rows stand in under what they have in common.
        let is_divided = self.rows.iter().any(|row| matches!(row, Row::Common(_)));
        let margin = if is_divided { 2 } else { 0 };
        let indented = |line: String| format!("{:margin$}{line}", "");
        let room = width.saturating_sub(margin);
        let gap = self.gap(room);
        let widths = self.widths(room, gap);
        let total = margin + widths.iter().sum::<usize>() + gap * widths.len().saturating_sub(1);
        let heads: Vec<Vec<&str>> = self
            .columns
            .iter()
            .map(|column| column.head.split('\n').collect())
            .collect();
        let height = heads.iter().map(Vec::len).max().unwrap_or(0);
        let mut lines = Vec::new();
        for level in 0..height {
            // Heads stand on their last lines: units side by side.
            let cells = heads.iter().map(|head| {
                (level + head.len())
                    .checked_sub(height)
                    .map_or("", |index| head[index])
            });
            lines.push(indented(self.joined(cells, &widths, gap)));
        }
        lines.push("─".repeat(total));
        for row in &self.rows {
            match row {
                Row::Common(words) => {
                    lines.extend(wrapped(words, width).iter().map(|line| bold(line, colour)));
                }
                Row::Cells(cells) => {
                    lines.extend(self.cells(cells, &widths, gap).into_iter().map(indented));
                }
            }
        }
        lines
    }

    /// Numbers are never cut: where they alone would not fit, columns move together.
    fn gap(&self, width: usize) -> usize {
        let room =
            self.widths(0, GAP).iter().sum::<usize>() + GAP * self.columns.len().saturating_sub(1);
        if room > width { SMALL_GAP } else { GAP }
    }

    fn widths(&self, width: usize, gap: usize) -> Vec<usize> {
        let mut widths: Vec<usize> = self
            .columns
            .iter()
            .map(|column| column.head.split('\n').map(str::width).max().unwrap_or(0))
            .collect();
        for row in &self.rows {
            if let Row::Cells(cells) = row {
                for (width, cell) in widths.iter_mut().zip(cells) {
                    *width = (*width).max(cell.width());
                }
            }
        }
        let room = width.saturating_sub(gap * widths.len().saturating_sub(1));
        while widths.iter().sum::<usize>() > room {
            let widest = (0..widths.len())
                .filter(|&index| !self.columns[index].right && widths[index] > NARROWEST)
                .max_by_key(|&index| widths[index]);
            match widest {
                Some(index) => widths[index] -= 1,
                None => break,
            }
        }
        widths
    }

    fn cells(&self, cells: &[String], widths: &[usize], gap: usize) -> Vec<String> {
        let parts: Vec<Vec<String>> = cells
            .iter()
            .zip(widths)
            .map(|(cell, &width)| wrapped(cell, width))
            .collect();
        let height = parts.iter().map(Vec::len).max().unwrap_or(0);
        (0..height)
            .map(|level| {
                let cells = parts
                    .iter()
                    .map(|part| part.get(level).map_or("", String::as_str));
                self.joined(cells, widths, gap)
            })
            .collect()
    }

    fn joined<'a>(
        &self,
        cells: impl Iterator<Item = &'a str>,
        widths: &[usize],
        gap: usize,
    ) -> String {
        let cells: Vec<String> = cells
            .zip(widths)
            .zip(&self.columns)
            .map(|((cell, &width), column)| {
                if column.right {
                    format!("{}{cell}", " ".repeat(width.saturating_sub(cell.width())))
                } else {
                    padded(cell, width)
                }
            })
            .collect();
        cells.join(&" ".repeat(gap)).trim_end().to_owned()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_table_reads_aloud() {
        let mut table = Table::new([words("layer"), numbers("thickness\nnm")]);
        table.row(["well".to_owned(), "5.5".to_owned()]);
        table.common("outside");
        table.row(["barrier".to_owned(), "10.0".to_owned()]);
        let expected = [
            "           thickness",
            "  layer           nm",
            "────────────────────",
            "  well           5.5",
            "outside",
            "  barrier       10.0",
        ];
        assert_eq!(table.lines(78, Colour::Never), expected);
    }

    #[test]
    fn a_wide_word_is_wrapped_and_numbers_stay_whole() {
        let mut table = Table::new([words("name"), numbers("nm"), words("note")]);
        table.row(["x".repeat(90), "1303.80".to_owned(), "y".repeat(90)]);
        let lines = table.lines(60, Colour::Never);
        assert!(lines.iter().all(|line| line.width() <= 60), "{lines:#?}");
        assert!(lines.iter().any(|line| line.contains("1303.80")));
        let letters = |letter: char| {
            lines
                .iter()
                .flat_map(|line| line.chars())
                .filter(|&it| it == letter)
                .count()
        };
        assert_eq!((letters('x'), letters('y')), (90, 90));
    }
}
