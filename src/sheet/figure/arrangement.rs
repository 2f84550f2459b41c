//! From what a figure shows to where everything lies: rows of panels under the title.

use super::axes::{JOINT_PX, LevelAxis, TOP_AXIS_PX, UprightAxis, draw_break};
use super::axis::Span;
use super::glyphs::{Weight, width_px};
use super::legend::Legend;
use super::lettering::{fitted, tidy, wrapped};
use super::palette::GREY;
use super::panel::{Figure, Joint, Panel, Row};
use super::plot::{COLUMN_GAP_PX, NOTE_PX, Plot, beside, x_span, y_span};
use super::scene::{Frame, Purpose, Rectangle, Scene, Text, line_height_px};

/// Width of every figure, px.
const WIDTH_PX: f64 = 900.0;
const MARGIN_PX: f64 = 16.0;
const ROW_GAP_PX: f64 = 20.0;

const TITLE_PX: f64 = 17.0;
const CAPTION_PX: f64 = 12.0;
const STAMP_PX: f64 = 10.0;
const PANEL_TITLE_PX: f64 = 13.0;
/// Least room right of a plot, px: half of a number that stands at the end of its axis.
const RIGHT_PX: f64 = 18.0;
/// Largest part of a panel that the column of labels beside its plot takes.
const COLUMN_SHARE: f64 = 0.25;

/// The whole figure in its place.
pub(crate) fn scene(figure: &Figure) -> Scene {
    let mut scene = Scene {
        width_px: WIDTH_PX,
        ..Scene::default()
    };
    let room_px = WIDTH_PX - 2.0 * MARGIN_PX;
    let mut top_px = MARGIN_PX;
    for line in wrapped(&figure.title, TITLE_PX, Weight::Bold, room_px, 2) {
        let text = Text::hung(line, Purpose::Title, MARGIN_PX, top_px, TITLE_PX);
        scene.write(text.in_bold());
        top_px += line_height_px(TITLE_PX) + 4.0;
    }
    for line in wrapped(&figure.caption, CAPTION_PX, Weight::Regular, room_px, 4) {
        scene.write(Text::hung(
            line,
            Purpose::Caption,
            MARGIN_PX,
            top_px,
            CAPTION_PX,
        ));
        top_px += line_height_px(CAPTION_PX) + 4.0;
    }
    top_px += 10.0;

    let mut rows: Vec<Vec<Draft<'_>>> = figure.rows.iter().map(drafts).collect();
    let joints = share_axes(&figure.rows, &mut rows);
    let mut above = Joint::Apart;
    for (row, below) in rows.iter().zip(joints) {
        let margins = column_margins(&rows, row.len());
        top_px = draw_row(&mut scene, row, &margins, top_px, (above, below));
        above = below;
    }

    for line in wrapped(&figure.stamp, STAMP_PX, Weight::Regular, room_px, 3) {
        let text = Text::hung(line, Purpose::Caption, MARGIN_PX, top_px, STAMP_PX);
        scene.write(text.in_rgb(GREY));
        top_px += line_height_px(STAMP_PX) + 3.0;
    }
    scene.height_px = (top_px + MARGIN_PX - 3.0).ceil();
    scene
}

/// A panel whose vertical axis is settled, so that the room beside its plot is known.
struct Draft<'a> {
    panel: &'a Panel,
    width_px: f64,
    height_px: f64,
    x: Span,
    y: Span,
    y_axis: UprightAxis,
    /// Left of the plot, and right of it.
    margins_px: (f64, f64),
}

fn drafts(row: &Row) -> Vec<Draft<'_>> {
    let count = row.panels.len().max(1) as f64;
    let width_px = (WIDTH_PX - 2.0 * MARGIN_PX - ROW_GAP_PX * (count - 1.0)) / count;
    row.panels
        .iter()
        .map(|panel| draft(panel, width_px))
        .collect()
}

fn draft(panel: &Panel, panel_px: f64) -> Draft<'_> {
    let asked_px = panel.plot_height_px;
    let height_px = if asked_px.is_finite() {
        asked_px.clamp(60.0, 1200.0)
    } else {
        300.0
    };
    let y = y_span(panel);
    let y_axis = UprightAxis::new(&panel.y, y, height_px);
    let column_px = beside(panel)
        .map(|name| width_px(&tidy(name), NOTE_PX, Weight::Regular))
        .fold(0.0, f64::max)
        .min(COLUMN_SHARE * panel_px);
    let column_px = if column_px > 0.0 {
        column_px + COLUMN_GAP_PX + 1.0
    } else {
        RIGHT_PX
    };
    let x = x_span(panel);
    let plot_px = panel_px - y_axis.width_px() - column_px;
    let right_px = column_px.max(LevelAxis::overhang_px(x, plot_px));
    let margins_px = (y_axis.width_px(), right_px);
    Draft {
        panel,
        width_px: panel_px,
        height_px,
        x,
        y,
        y_axis,
        margins_px,
    }
}

/// Gives panels that share a horizontal axis the same span, from the bottom up, and returns what
/// lies below each row; rows that cannot share an axis are apart.
fn share_axes(asked: &[Row], rows: &mut [Vec<Draft<'_>>]) -> Vec<Joint> {
    let mut joints = vec![Joint::Apart; rows.len()];
    for upper in (0..rows.len().saturating_sub(1)).rev() {
        let spans: Option<Vec<Span>> = (rows[upper].len() == rows[upper + 1].len())
            .then(|| rows[upper].iter().zip(&rows[upper + 1]))
            .and_then(|pairs| pairs.map(|(a, b)| a.x.joined(b.x)).collect());
        let Some(spans) = spans.filter(|_| asked[upper].joint != Joint::Apart) else {
            continue;
        };
        joints[upper] = asked[upper].joint;
        // The rows further down that hang together with this one follow.
        let joined = joints[upper..]
            .iter()
            .take_while(|joint| **joint != Joint::Apart)
            .count();
        for row in &mut rows[upper..=upper + joined] {
            for (draft, span) in row.iter_mut().zip(&spans) {
                draft.x = *span;
            }
        }
    }
    joints
}

/// Margins left and right of the plots in each column, over all rows of so many panels; the first
/// plots of all rows start at one x.
fn column_margins(rows: &[Vec<Draft<'_>>], count: usize) -> Vec<(f64, f64)> {
    let first_px = rows
        .iter()
        .filter_map(|row| row.first())
        .map(|draft| draft.margins_px.0)
        .fold(0.0, f64::max);
    (0..count)
        .map(|column| {
            rows.iter()
                .filter(|row| row.len() == count)
                .map(|row| row[column].margins_px)
                .fold(
                    (if column == 0 { first_px } else { 0.0 }, 0.0),
                    |most, margins| (f64::max(most.0, margins.0), f64::max(most.1, margins.1)),
                )
        })
        .collect()
}

/// Heights of what stands over a plot, px.
struct Header {
    legend: Legend,
    title_px: f64,
    top_axis_px: f64,
}

impl Header {
    fn new(draft: &Draft<'_>, (left_px, right_px): (f64, f64)) -> Self {
        let panel = draft.panel;
        let legend = Legend::new(panel, draft.width_px - left_px - right_px.min(RIGHT_PX));
        Self {
            title_px: if panel.title.is_empty() { 0.0 } else { 22.0 },
            top_axis_px: if panel.top.is_some() {
                TOP_AXIS_PX
            } else {
                0.0
            },
            legend,
        }
    }

    fn height_px(&self) -> f64 {
        let air_px = if self.legend.height_px() > 0.0 {
            6.0
        } else {
            0.0
        };
        self.title_px + self.legend.height_px() + air_px + self.top_axis_px
    }
}

/// Draws a row from `top_px` down and returns where the next one starts.
fn draw_row(
    scene: &mut Scene,
    row: &[Draft<'_>],
    margins: &[(f64, f64)],
    top_px: f64,
    (above, below): (Joint, Joint),
) -> f64 {
    let headers: Vec<Header> = row
        .iter()
        .zip(margins)
        .map(|(draft, margins)| Header::new(draft, *margins))
        .collect();
    let header_px = headers.iter().map(Header::height_px).fold(0.0, f64::max);
    let plot_top_px = top_px + header_px;
    let mut bottom_px = plot_top_px;
    let mut left_px = MARGIN_PX;
    for ((draft, header), (before_px, after_px)) in row.iter().zip(&headers).zip(margins) {
        let frame = Rectangle {
            left_px: left_px + before_px,
            top_px: plot_top_px,
            right_px: left_px + draft.width_px - after_px,
            bottom_px: plot_top_px + draft.height_px,
        };
        let foot_px = if below == Joint::Apart {
            LevelAxis::foot_px()
        } else {
            0.0
        };
        let panel = Rectangle {
            left_px,
            top_px,
            right_px: left_px + draft.width_px,
            bottom_px: frame.bottom_px + foot_px,
        };
        scene.frames.push(Frame { panel, plot: frame });
        let plot = Plot {
            panel: draft.panel,
            x: draft.x,
            y: draft.y,
            frame,
            column_end_px: panel.right_px,
        };
        draw_header(scene, draft, header, panel, frame);
        plot.draw(scene, &draft.y_axis.ticks);
        draft.y_axis.draw(scene, &plot, panel.left_px);
        if below == Joint::Apart {
            LevelAxis::lower(&plot, panel).draw(scene, &plot);
        }
        if let Some(top) = &draft.panel.top {
            LevelAxis::upper(top, &plot, panel).draw(scene, &plot);
        }
        if above == Joint::BrokenAxis {
            draw_break(scene, frame.left_px, frame.top_px, -1.0);
        }
        if below == Joint::BrokenAxis {
            draw_break(scene, frame.left_px, frame.bottom_px, 1.0);
        }
        bottom_px = bottom_px.max(panel.bottom_px);
        left_px += draft.width_px + ROW_GAP_PX;
    }
    bottom_px
        + if below == Joint::Apart {
            ROW_GAP_PX
        } else {
            JOINT_PX
        }
}

fn draw_header(
    scene: &mut Scene,
    draft: &Draft<'_>,
    header: &Header,
    panel: Rectangle,
    frame: Rectangle,
) {
    let top_px = frame.top_px - header.height_px();
    let room_px = panel.right_px - frame.left_px;
    let name = fitted(&draft.panel.title, PANEL_TITLE_PX, Weight::Bold, room_px);
    let text = Text::hung(
        name,
        Purpose::PanelTitle,
        frame.left_px,
        top_px,
        PANEL_TITLE_PX,
    );
    scene.write(text.in_bold());
    header
        .legend
        .draw(scene, frame.left_px, top_px + header.title_px);
}
