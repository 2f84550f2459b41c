//! Faults, their places, and how they are shown.

use std::fmt;
use std::ops::Range;

use annotate_snippets::{AnnotationKind, Group, Level, Origin, Renderer, Snippet};

/// Columns that a report takes; longer lines are cut around the caret.
const COLUMNS: usize = 120;
/// A line with more than this before the caret, bytes, is shown for its first fault only: laying
/// one out takes time.
const LONG_LINE_BYTES: usize = 1 << 16;

/// One fault at its place in a text.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostic {
    /// Bytes of the text that the fault concerns.
    pub span: Range<usize>,
    /// What is wrong.
    pub message: String,
    /// What to do about it.
    pub help: Option<String>,
}

impl Diagnostic {
    /// A fault without advice yet.
    #[must_use]
    pub fn new(span: Range<usize>, message: impl Into<String>) -> Self {
        Self {
            span,
            message: message.into(),
            help: None,
        }
    }

    /// The same with advice.
    #[must_use]
    pub fn with_help(mut self, help: impl Into<String>) -> Self {
        self.help = Some(help.into());
        self
    }

    /// Where the fault begins in its text.
    #[must_use]
    pub fn place(&self, text: &str) -> Place {
        Place::of(text, self.span.start)
    }

    /// The fault as a reader sees it: message, `name:line:column`, the line with a caret, advice.
    ///
    /// `text` is the one that the span counts in. A long line is cut around the caret; control
    /// characters, of the name too, are shown, not sent to the terminal. Ends without a line feed.
    #[must_use]
    pub fn show(&self, name: &str, text: &str, colour: Colour) -> String {
        let line = Line::of(text, &self.span);
        let snippet = Snippet::source(line.text)
            .path(super::tidy(name))
            .line_start(self.place(text).line)
            .annotation(AnnotationKind::Primary.span(line.span));
        self.rendered(
            Level::ERROR.primary_title(&self.message).element(snippet),
            colour,
        )
    }

    /// The same without the line.
    fn show_place(&self, name: &str, text: &str, colour: Colour) -> String {
        let place = self.place(text);
        let origin = Origin::path(super::tidy(name))
            .line(place.line)
            .char_column(place.column);
        self.rendered(
            Level::ERROR.primary_title(&self.message).element(origin),
            colour,
        )
    }

    fn rendered<'a>(&'a self, mut group: Group<'a>, colour: Colour) -> String {
        if let Some(help) = &self.help {
            group = group.element(Level::HELP.message(help));
        }
        let renderer = match colour {
            Colour::Never => Renderer::plain(),
            Colour::Always => Renderer::styled(),
        };
        renderer.term_width(COLUMNS).render(&[group])
    }
}

/// Whether terminal colours are written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Colour {
    /// Plain text.
    Never,
    /// With escape sequences.
    Always,
}

/// All faults of one text in the order of their places, a blank line between.
#[must_use]
pub fn report(faults: &[Diagnostic], name: &str, text: &str, colour: Colour) -> String {
    let mut sorted: Vec<&Diagnostic> = faults.iter().collect();
    sorted.sort_by_key(|fault| (fault.span.start, fault.span.end));
    let mut line_shown = None;
    let shown: Vec<String> = sorted
        .into_iter()
        .map(|fault| {
            let line = Line::of(text, &fault.span);
            if line.text.len() > LONG_LINE_BYTES && line_shown == Some(line.start) {
                return fault.show_place(name, text, colour);
            }
            line_shown = Some(line.start);
            fault.show(name, text, colour)
        })
        .collect();
    shown.join("\n\n")
}

/// A place in a text as editors count: from 1, columns in characters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Place {
    /// Line, from 1.
    pub line: usize,
    /// Character of the line, from 1; a tab is one.
    pub column: usize,
}

impl Place {
    /// The place of byte `offset` of `text`; past the end it is the end.
    #[must_use]
    pub fn of(text: &str, offset: usize) -> Self {
        let before = &text[..boundary(text, offset)];
        let line_start = before.rfind('\n').map_or(0, |feed| feed + 1);
        Self {
            line: 1 + before.bytes().filter(|byte| *byte == b'\n').count(),
            column: 1 + before[line_start..].chars().count(),
        }
    }
}

impl fmt::Display for Place {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(formatter, "line {}, column {}", self.line, self.column)
    }
}

/// The last character boundary at or before `offset`.
fn boundary(text: &str, offset: usize) -> usize {
    let mut at = offset.min(text.len());
    while !text.is_char_boundary(at) {
        at -= 1;
    }
    at
}

/// The line in which a fault begins.
struct Line<'a> {
    /// Byte of the text at which the line begins.
    start: usize,
    /// The line without its end.
    text: &'a str,
    /// Bytes of the line under the caret.
    span: Range<usize>,
}

impl<'a> Line<'a> {
    fn of(text: &'a str, span: &Range<usize>) -> Self {
        let caret = boundary(text, span.start);
        let start = text[..caret].rfind('\n').map_or(0, |feed| feed + 1);
        let end = text[caret..]
            .find('\n')
            .map_or(text.len(), |feed| caret + feed);
        // What lies further behind the caret than a report is wide is not laid out.
        let end = end.min(boundary(text, caret + 4 * COLUMNS));
        let line = text[start..end].trim_end_matches('\r');
        let within = |at: usize| (at - start).min(line.len());
        Self {
            start,
            text: line,
            span: within(caret)..within(boundary(text, span.end).max(caret)),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn shown(text: &str, span: Range<usize>) -> String {
        Diagnostic::new(span, "wrong")
            .with_help("mend it")
            .show("a.toml", text, Colour::Never)
    }

    /// Column of the caret and of the first byte of `under` in the line above it.
    fn caret_stands_under(report: &str, under: &str) {
        let lines: Vec<&str> = report.lines().collect();
        let carets = lines
            .iter()
            .position(|line| line.contains('^'))
            .unwrap_or_else(|| panic!("no caret in\n{report}"));
        let column = |line: &str, at: usize| line[..at].chars().count();
        let caret = lines[carets].find('^').expect("a caret");
        let above = lines[carets - 1];
        let word = above
            .rfind(under)
            .unwrap_or_else(|| panic!("{under} not in\n{report}"));
        assert_eq!(
            column(lines[carets], caret),
            column(above, word),
            "\n{report}"
        );
    }

    #[test]
    fn a_fault_reads_like_a_compilers() {
        let text = "format = 1\nthicknes_nm = 8\n";
        insta::assert_snapshot!(shown(text, 11..22), @r"
        error: wrong
         --> a.toml:2:1
          |
        2 | thicknes_nm = 8
          | ^^^^^^^^^^^
          |
          = help: mend it
        ");
    }

    #[test]
    fn carets_stand_right_behind_multi_byte_letters_and_before_carriage_returns() {
        let text = "a = 1\r\ntitle = \"Mündung\" ; x\r\n";
        let at = text.find(';').expect("there");
        let report = shown(text, at..at + 1);
        assert!(report.contains("a.toml:2:19"), "{report}");
        assert!(!report.contains('\r'));
        caret_stands_under(&report, ";");
    }

    #[test]
    fn tabs_are_opened_out_the_same_in_both_lines() {
        let report = shown("\t\tx = 1", 2..3);
        assert!(report.contains("a.toml:1:3"), "{report}");
        caret_stands_under(&report, "x");
    }

    #[test]
    fn a_line_of_a_megabyte_is_cut_around_the_caret() {
        let text = format!("{}BAD{}", "ü".repeat(500_000), "z".repeat(500_000));
        let report = shown(&text, 1_000_000..1_000_003);
        assert!(report.contains("a.toml:1:500001"), "{report}");
        assert!(report.len() < 2000, "{} bytes", report.len());
        caret_stands_under(&report, "BAD");
    }

    #[test]
    fn a_thousand_faults_on_one_long_line_are_shown_in_short() {
        let text = "z".repeat(2 * LONG_LINE_BYTES);
        let faults: Vec<Diagnostic> = (1..=1000)
            .map(|at| Diagnostic::new(LONG_LINE_BYTES + at..LONG_LINE_BYTES + at + 1, "wrong"))
            .collect();
        let report = report(&faults, "a.toml", &text, Colour::Never);
        assert_eq!(report.matches('^').count(), 1);
        let last = format!("--> a.toml:1:{}", LONG_LINE_BYTES + 1001);
        assert!(report.ends_with(&last), "{report}");
    }

    #[test]
    fn spans_at_and_past_the_end_are_shown() {
        for text in ["", "a", "a\n", "ü"] {
            for start in 0..4 {
                assert!(
                    shown(text, start..start + 9).contains('^'),
                    "{text:?} {start}"
                );
            }
        }
    }

    #[test]
    fn colour_is_written_when_asked_for_only() {
        let fault = Diagnostic::new(0..1, "wrong \u{1b}[2J");
        assert!(fault.show("a", "abc", Colour::Always).contains("\u{1b}["));
        assert!(
            !fault
                .show("a", "ab\u{1b}c", Colour::Never)
                .contains('\u{1b}')
        );
    }

    #[test]
    fn the_name_of_a_file_does_not_steer_the_terminal() {
        let name = "a\u{1b}[2J\u{202e}b\u{2028}.toml";
        let fault = Diagnostic::new(0..1, "wrong");
        for shown in [
            fault.show(name, "abc", Colour::Never),
            fault.show_place(name, "abc", Colour::Never),
        ] {
            assert!(
                shown.contains("a\u{fffd}[2J\u{fffd}b\u{fffd}.toml:1:1"),
                "{shown}"
            );
        }
    }

    #[test]
    fn a_report_follows_the_text() {
        let faults = [
            Diagnostic::new(2..3, "second"),
            Diagnostic::new(0..1, "first"),
        ];
        let report = report(&faults, "a", "abc", Colour::Never);
        assert!(report.find("first") < report.find("second"));
    }
}
