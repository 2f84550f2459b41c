//! Blocks of content on sheets of paper.

use super::Paper;
use super::drawing::{Item, figure, width_pt};
use super::font::{Face, STRANGER};
use super::table::{draw_table, least_height_pt};
use super::typesetting::{INK, SetLine, Style, draw, set};
use crate::sheet::order::content::{Block, Content, Line, Section, words};
use crate::sheet::order::figures::Figures;

/// Margins, pt: left and right, top, bottom (the foot stands in it).
const SIDE_PT: f64 = 40.0;
const TOP_PT: f64 = 40.0;
const BOTTOM_PT: f64 = 52.0;
/// Sizes of letters, pt.
const TITLE: Style = Style::bold(15.0);
const COPY: Style = Style::bold(8.0);
const HEADING: Style = Style::bold(11.0);
const BODY: Style = Style::regular(8.0);
const VALUE: Style = Style::bold(8.0);
const FOOT: Style = Style::regular(6.5);
/// Least room that a heading wants under itself, pt.
const UNDER_HEADING_PT: f64 = 64.0;

/// A sheet of paper with what stands on it.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Page {
    pub(super) items: Vec<Item>,
}

/// Pages in the making.
pub(super) struct Layout {
    pages: Vec<Page>,
    width_pt: f64,
    height_pt: f64,
    /// Where the next thing begins, pt from the top of the last page.
    top_pt: f64,
}

/// The content on as many pages as it takes.
pub(super) fn pages(content: &Content, figures: &Figures, paper: Paper, foot: &str) -> Vec<Page> {
    let (width_pt, height_pt) = paper.size_pt();
    let mut layout = Layout {
        pages: vec![Page::default()],
        width_pt,
        height_pt,
        top_pt: TOP_PT,
    };
    layout.write(&[words(content.copy.to_uppercase())], COPY);
    layout.write(&[words(content.name.clone())], TITLE);
    layout.rule(2.0);
    for section in &content.sections {
        layout.section(section, figures);
    }
    layout.foot(foot);
    layout.pages
}

impl Layout {
    pub(super) fn left_pt() -> f64 {
        SIDE_PT
    }

    pub(super) fn room_pt(&self) -> f64 {
        self.width_pt - 2.0 * SIDE_PT
    }

    /// Room for things on a page by themselves.
    pub(super) fn page_room_pt(&self) -> f64 {
        self.height_pt - TOP_PT - BOTTOM_PT
    }

    /// What is left of the last page.
    pub(super) fn left_over_pt(&self) -> f64 {
        self.height_pt - BOTTOM_PT - self.top_pt
    }

    pub(super) fn top_pt(&self) -> f64 {
        self.top_pt
    }

    pub(super) fn turn_page(&mut self) {
        self.pages.push(Page::default());
        self.top_pt = TOP_PT;
    }

    /// A new page where the last has not so much room, unless it is a new one.
    pub(super) fn need(&mut self, height_pt: f64) {
        if self.left_over_pt() < height_pt && self.top_pt > TOP_PT {
            self.turn_page();
        }
    }

    pub(super) fn advance(&mut self, by_pt: f64) {
        self.top_pt += by_pt;
    }

    pub(super) fn items(&mut self) -> &mut Vec<Item> {
        if self.pages.is_empty() {
            self.pages.push(Page::default());
        }
        let last = self.pages.len() - 1;
        &mut self.pages[last].items
    }

    /// A line of text over the whole width, on as many lines as it takes.
    pub(super) fn write(&mut self, line: &[crate::sheet::order::content::Span], style: Style) {
        let room_pt = self.room_pt();
        let set = set(line, style, room_pt);
        self.put_lines(&set, style, 0.0);
    }

    fn put_lines(&mut self, lines: &[SetLine], style: Style, indent_pt: f64) {
        for line in lines {
            self.need(style.line_pt());
            let top_pt = self.top_pt;
            draw(line, style, SIDE_PT + indent_pt, top_pt, self.items());
            self.top_pt += style.line_pt();
        }
    }

    fn rule(&mut self, width_pt: f64) {
        let (left, right, y) = (SIDE_PT, self.width_pt - SIDE_PT, self.top_pt + 2.0);
        self.items().push(Item::Line {
            points: vec![(left, y), (right, y)],
            width_pt,
            rgb: INK,
            dash_pt: Vec::new(),
            is_closed: false,
        });
        self.top_pt += 5.0 + width_pt;
    }

    fn section(&mut self, section: &Section, figures: &Figures) {
        self.advance(8.0);
        let under_pt = match section.blocks.first() {
            Some(Block::Figure(number)) => self.figure_height_pt(*number, figures),
            Some(Block::Table(table)) => 10.0 + least_height_pt(self, table),
            _ => UNDER_HEADING_PT,
        };
        let heading_pt = HEADING.line_pt() + 8.0;
        self.need((heading_pt + under_pt).min(self.page_room_pt()));
        self.write(&[words(section.heading.clone())], HEADING);
        self.rule(0.6);
        for block in &section.blocks {
            match block {
                Block::Paragraph(line) => {
                    self.write(line, BODY);
                    self.advance(3.0);
                }
                Block::Pairs(pairs) => self.pairs(pairs),
                Block::List {
                    name,
                    items,
                    is_ranked,
                } => self.list(name, items, *is_ranked),
                Block::Table(table) => draw_table(self, table),
                Block::Figure(number) => self.figure(*number, figures),
            }
        }
    }

    /// Names and values, two pairs side by side.
    fn pairs(&mut self, pairs: &[(String, Vec<Line>)]) {
        const GAP_PT: f64 = 14.0;
        const NAME_SHARE: f64 = 0.36;
        let column_pt = 0.5 * (self.room_pt() - GAP_PT);
        let name_pt = NAME_SHARE * column_pt;
        let value_pt = column_pt - name_pt - 4.0;
        let name_style = BODY.pale();
        for row in pairs.chunks(2) {
            let cells: Vec<(Vec<SetLine>, Vec<SetLine>)> = row
                .iter()
                .map(|(name, lines)| {
                    let name = set(&[words(name.clone())], name_style, name_pt);
                    let value = lines.iter().flat_map(|line| set(line, VALUE, value_pt));
                    (name, value.collect())
                })
                .collect();
            let most = cells
                .iter()
                .map(|(name, value)| name.len().max(value.len()))
                .max()
                .unwrap_or(0);
            // A value longer than a page goes on over the next.
            for from in 0..most {
                if from == 0 {
                    self.need(BODY.line_pt() * (most.min(4) as f64) + 4.0);
                } else {
                    self.need(BODY.line_pt());
                }
                let top_pt = self.top_pt;
                for (column, (name, value)) in cells.iter().enumerate() {
                    let left_pt = SIDE_PT + column as f64 * (column_pt + GAP_PT);
                    if let Some(line) = name.get(from) {
                        draw(line, name_style, left_pt, top_pt, self.items());
                    }
                    if let Some(line) = value.get(from) {
                        draw(line, VALUE, left_pt + name_pt + 4.0, top_pt, self.items());
                    }
                }
                self.advance(BODY.line_pt());
            }
            self.advance(2.5);
        }
        self.advance(3.0);
    }

    fn list(
        &mut self,
        name: &[crate::sheet::order::content::Span],
        items: &[Line],
        is_ranked: bool,
    ) {
        const INDENT_PT: f64 = 14.0;
        self.need(2.0 * BODY.line_pt());
        self.write(name, VALUE);
        let room_pt = self.room_pt() - INDENT_PT;
        for (place, item) in items.iter().enumerate() {
            let lines = set(item, BODY, room_pt);
            self.need(BODY.line_pt() * (lines.len().min(3) as f64));
            let sign = if is_ranked {
                format!("{}.", place + 1)
            } else {
                "•".to_owned()
            };
            let sign = set(&[words(sign)], BODY, INDENT_PT);
            let top_pt = self.top_pt;
            for line in &sign {
                draw(line, BODY, SIDE_PT + 3.0, top_pt, self.items());
            }
            self.put_lines(&lines, BODY, INDENT_PT);
        }
        self.advance(4.0);
    }

    fn figure_scale(&self, width_px: f64, height_px: f64) -> f64 {
        let by_width = self.room_pt() / width_px;
        let by_height = (self.page_room_pt() - 2.0 * HEADING.line_pt()) / height_px;
        by_width.min(by_height)
    }

    fn figure_height_pt(&self, number: usize, figures: &Figures) -> f64 {
        figures.get(number).map_or(0.0, |figure| {
            let scene = figure.scene();
            self.figure_scale(scene.width_px, scene.height_px) * scene.height_px
        })
    }

    fn figure(&mut self, number: usize, figures: &Figures) {
        let Some(drawn) = figures.get(number) else {
            return;
        };
        let scene = drawn.scene();
        let scale = self.figure_scale(scene.width_px, scene.height_px);
        let height_pt = scale * scene.height_px;
        self.need(height_pt);
        let top_pt = self.top_pt;
        let items = figure(&scene, (SIDE_PT, top_pt), scale);
        self.items().extend(items);
        self.advance(height_pt + 4.0);
    }

    /// The foot of every page: what it belongs to, and its number.
    fn foot(&mut self, foot: &str) {
        let has_strangers = self.pages.iter().flat_map(|page| &page.items).any(|item| {
            matches!(item, Item::Text { text, face, .. }
                if text.chars().any(|it| it == STRANGER || !face.font().has(it)))
        });
        let count = self.pages.len();
        let note = format!(
            "Characters that this file has no glyph for are shown as {STRANGER}; page and record have them."
        );
        let (right_pt, y) = (self.width_pt - SIDE_PT, self.height_pt - BOTTOM_PT + 18.0);
        let widest = format!("page {count} of {count}");
        let widest_pt = width_pt(&widest, Face::Regular, FOOT.size_pt);
        let room_pt = right_pt - SIDE_PT - widest_pt - 12.0;
        let mut lines = set(&[words(foot)], FOOT, room_pt);
        lines.truncate(if has_strangers { 1 } else { 2 });
        if has_strangers {
            lines.extend(set(&[words(note)], FOOT, room_pt).into_iter().take(1));
        }
        for (place, page) in self.pages.iter_mut().enumerate() {
            let number = format!("page {} of {count}", place + 1);
            let number_pt = width_pt(&number, Face::Regular, FOOT.size_pt);
            for (index, line) in lines.iter().enumerate() {
                let top = y + index as f64 * FOOT.line_pt();
                draw(line, FOOT, SIDE_PT, top, &mut page.items);
            }
            for line in set(&[words(number)], FOOT, number_pt + 1.0) {
                draw(&line, FOOT, right_pt - number_pt, y, &mut page.items);
            }
        }
    }
}
