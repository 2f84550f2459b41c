//! Tables over pages: the heads stand on every page, and no row is cut that fits on one.

use super::drawing::{Item, rectangle};
use super::layout::Layout;
use super::typesetting::{INK, SetLine, Style, draw, set};
use crate::sheet::figure::Rgb;
use crate::sheet::order::content::{Line, Row, Table, words};

const CELL: Style = Style::regular(6.8);
const HEAD: Style = Style::bold(6.8);
const CAPTION: Style = Style::regular(7.2);
const AIR_PT: (f64, f64) = (3.0, 1.8);
const GRID: Rgb = [0x8a, 0x8a, 0x8a];
const HEAD_GROUND: Rgb = [0xe8, 0xe8, 0xe8];
const CHANGED_GROUND: Rgb = [0xef, 0xef, 0xef];

/// A row with its cells set, ready to be drawn.
struct SetRow {
    /// Lines of every cell; one cell over all columns for a banner.
    cells: Vec<Vec<SetLine>>,
    styles: Vec<Style>,
    is_banner: bool,
    ground: Option<Rgb>,
}

impl SetRow {
    fn lines(&self) -> usize {
        self.cells.iter().map(Vec::len).max().unwrap_or(0)
    }

    fn height_pt(&self) -> f64 {
        self.lines() as f64 * CELL.line_pt() + 2.0 * AIR_PT.1
    }

    /// The part of it from a line on, so many lines at most.
    fn part(&self, from: usize, most: usize) -> Self {
        let cells = self.cells.iter().map(|lines| {
            let part = lines.iter().skip(from).take(most);
            part.cloned().collect()
        });
        Self {
            cells: cells.collect(),
            styles: self.styles.clone(),
            is_banner: self.is_banner,
            ground: self.ground,
        }
    }
}

/// A table whose rows are set.
struct SetTable {
    widths_pt: Vec<f64>,
    heads: SetRow,
    rows: Vec<SetRow>,
    caption_pt: f64,
}

impl SetTable {
    fn new(table: &Table, room_pt: f64) -> Self {
        let parts: u32 = table.widths.iter().sum();
        let widths_pt: Vec<f64> = table
            .widths
            .iter()
            .map(|&width| room_pt * f64::from(width) / f64::from(parts.max(1)))
            .collect();
        let heads = SetRow {
            cells: table
                .heads
                .iter()
                .zip(&widths_pt)
                .map(|(&head, width_pt)| set(&[words(head)], HEAD, width_pt - 2.0 * AIR_PT.0))
                .collect(),
            styles: vec![HEAD; table.heads.len()],
            is_banner: false,
            ground: Some(HEAD_GROUND),
        };
        let rows = table.rows.iter();
        Self {
            rows: rows.map(|row| set_row(row, &widths_pt, room_pt)).collect(),
            caption_pt: set(&table.caption, CAPTION, room_pt).len() as f64 * CAPTION.line_pt(),
            heads,
            widths_pt,
        }
    }

    /// Room that it wants where it begins: a short table goes as a whole, a long one with its first
    /// rows.
    fn least_pt(&self, page_room_pt: f64) -> f64 {
        let rows_pt = |rows: &[SetRow]| rows.iter().map(SetRow::height_pt).sum::<f64>();
        let all_pt = rows_pt(&self.rows);
        let rows_pt = if all_pt < 0.45 * page_room_pt {
            all_pt
        } else {
            rows_pt(&self.rows[..self.rows.len().min(3)])
        };
        (self.caption_pt + self.heads.height_pt() + rows_pt).min(page_room_pt)
    }
}

/// Room that a table wants where it begins, pt.
pub(super) fn least_height_pt(layout: &Layout, table: &Table) -> f64 {
    SetTable::new(table, layout.room_pt()).least_pt(layout.page_room_pt())
}

/// Draws a table from where the layout stands.
pub(super) fn draw_table(layout: &mut Layout, table: &Table) {
    let set = SetTable::new(table, layout.room_pt());
    layout.need(set.least_pt(layout.page_room_pt()));
    layout.write(&table.caption, CAPTION);
    draw_row(layout, &set.heads, &set.widths_pt);
    for row in &set.rows {
        put_row(layout, row, &set.heads, &set.widths_pt);
    }
    layout.advance(5.0);
}

fn set_row(row: &Row, widths_pt: &[f64], room_pt: f64) -> SetRow {
    let lines = |lines: &[Line], style: Style, width_pt: f64| -> Vec<SetLine> {
        let room_pt = width_pt - 2.0 * AIR_PT.0;
        lines
            .iter()
            .flat_map(|line| set(line, style, room_pt))
            .collect()
    };
    match row {
        Row::Banner(line) => SetRow {
            cells: vec![lines(std::slice::from_ref(line), HEAD, room_pt)],
            styles: vec![HEAD],
            is_banner: true,
            ground: None,
        },
        Row::Cells { cells, is_changed } => {
            let style = |column: usize| if column == 0 { HEAD } else { CELL };
            let of_columns = cells.iter().zip(widths_pt).enumerate();
            SetRow {
                cells: of_columns
                    .map(|(column, (cell, width_pt))| lines(cell, style(column), *width_pt))
                    .collect(),
                styles: (0..cells.len()).map(style).collect(),
                is_banner: false,
                ground: is_changed.then_some(CHANGED_GROUND),
            }
        }
    }
}

/// A row on this page or, behind the heads, on the next; one longer than a page is cut.
fn put_row(layout: &mut Layout, row: &SetRow, heads: &SetRow, widths_pt: &[f64]) {
    let page_pt = layout.page_room_pt() - heads.height_pt();
    if row.height_pt() <= page_pt {
        if layout.left_over_pt() < row.height_pt() {
            layout.turn_page();
            draw_row(layout, heads, widths_pt);
        }
        draw_row(layout, row, widths_pt);
        return;
    }
    let mut from = 0;
    while from < row.lines() {
        let room_pt = layout.left_over_pt() - 2.0 * AIR_PT.1;
        let most = (room_pt / CELL.line_pt()).floor().max(0.0) as usize;
        if most < 2 {
            layout.turn_page();
            draw_row(layout, heads, widths_pt);
            continue;
        }
        draw_row(layout, &row.part(from, most), widths_pt);
        from += most;
    }
}

fn draw_row(layout: &mut Layout, row: &SetRow, widths_pt: &[f64]) {
    let height_pt = row.height_pt();
    let top_pt = layout.top_pt();
    let room_pt = layout.room_pt();
    let banner = [room_pt];
    let widths_pt = if row.is_banner { &banner } else { widths_pt };
    let items = layout.items();
    let mut left_pt = Layout::left_pt();
    for (column, (cell, width_pt)) in row.cells.iter().zip(widths_pt).enumerate() {
        let frame = rectangle(left_pt, top_pt, *width_pt, height_pt);
        if let Some(rgb) = row.ground {
            items.push(Item::Fill {
                points: frame.clone(),
                rgb,
                opacity: 1.0,
            });
        }
        items.push(Item::Line {
            points: frame,
            width_pt: 0.4,
            rgb: GRID,
            dash_pt: Vec::new(),
            is_closed: true,
        });
        let style = row.styles.get(column).copied().unwrap_or(CELL);
        for (place, line) in cell.iter().enumerate() {
            let top_pt = top_pt + AIR_PT.1 + place as f64 * CELL.line_pt();
            draw(line, style, left_pt + AIR_PT.0, top_pt, items);
        }
        left_pt += width_pt;
    }
    if row.ground == Some(CHANGED_GROUND) {
        let left_pt = Layout::left_pt();
        items.push(Item::Line {
            points: vec![(left_pt, top_pt), (left_pt, top_pt + height_pt)],
            width_pt: 2.5,
            rgb: INK,
            dash_pt: Vec::new(),
            is_closed: false,
        });
    }
    layout.advance(height_pt);
}
