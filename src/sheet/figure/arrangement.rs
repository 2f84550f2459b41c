//! From what a figure shows to where everything lies.

use super::axis::{Span, Ticks, mapped_ticks, ticks, title};
use super::glyphs::{Weight, width_px};
use super::legend::Legend;
use super::lettering::{fitted, wrapped};
use super::palette::{BLACK, GREY};
use super::panel::{Figure, Joint, Panel, Row};
use super::plot::{COLUMN_GAP_PX, NOTE_PX, Plot, beside, x_span, y_span};
use super::scene::{
    Anchor, Frame, Point, Purpose, Rectangle, Scene, Shape, Stroke, Text, line_height_px,
};

/// Width of every figure, px.
pub(crate) const WIDTH_PX: f64 = 900.0;
const MARGIN_PX: f64 = 16.0;
const ROW_GAP_PX: f64 = 20.0;
/// Between the plots of rows that share an axis: room for the tick labels at both edges.
const JOINT_PX: f64 = 18.0;

const TITLE_PX: f64 = 17.0;
const CAPTION_PX: f64 = 12.0;
const STAMP_PX: f64 = 10.0;
const PANEL_TITLE_PX: f64 = 13.0;
const AXIS_TITLE_PX: f64 = 13.0;
const TICK_LABEL_PX: f64 = 12.0;
const TICK_PX: f64 = 5.0;
const SMALL_TICK_PX: f64 = 2.5;
/// From the axis to its tick labels, px.
const LABEL_GAP_PX: f64 = 8.0;
/// Least air between neighbouring tick labels of a horizontal axis, and of a vertical one, px.
const LABEL_AIR_PX: f64 = 10.0;
const LEVEL_AIR_PX: f64 = 17.0;
/// A title of the vertical axis is broken into at most so many lines.
const MOST_TITLE_LINES: usize = 2;
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

    let rows: Vec<Vec<Draft<'_>>> = figure.rows.iter().map(drafts).collect();
    for (index, row) in figure.rows.iter().enumerate() {
        let joint = if index + 1 < figure.rows.len() {
            row.joint
        } else {
            Joint::Apart
        };
        let above = index
            .checked_sub(1)
            .map_or(Joint::Apart, |above| figure.rows[above].joint);
        let margins = column_margins(&rows, rows[index].len());
        top_px = draw_row(&mut scene, &rows[index], &margins, top_px, (above, joint));
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
    y_ticks: Ticks,
    y_title: Vec<String>,
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

fn draft(panel: &Panel, width_px: f64) -> Draft<'_> {
    let asked_px = panel.plot_height_px;
    let height_px = if asked_px.is_finite() {
        asked_px.clamp(60.0, 1200.0)
    } else {
        300.0
    };
    let (x, y) = (x_span(panel), y_span(panel));
    let down = |value: f64| height_px * (1.0 - y.place(value).unwrap_or(0.0));
    let y_ticks = with_room(
        ticks(y, |ticks| apart(ticks, |value, _| level_ends(down(value)))),
        |value, _| level_ends(down(value)),
    );
    let y_title = wrapped(
        &title(&panel.y.quantity, &panel.y.unit, y_ticks.exponent),
        AXIS_TITLE_PX,
        Weight::Regular,
        height_px,
        MOST_TITLE_LINES,
    );
    let label_px = y_ticks
        .labelled()
        .map(|(_, label)| width_px_of_tick(label))
        .fold(0.0, f64::max);
    let title_px = y_title.len() as f64 * (line_height_px(AXIS_TITLE_PX) + 2.0) + 6.0;
    let column_px = beside(panel)
        .map(width_px_of_note)
        .fold(0.0, f64::max)
        .min(COLUMN_SHARE * width_px);
    let right_px = if column_px > 0.0 {
        column_px + COLUMN_GAP_PX + 1.0
    } else {
        14.0
    };
    Draft {
        panel,
        width_px,
        height_px,
        x,
        y,
        y_ticks,
        y_title,
        margins_px: (title_px + label_px + LABEL_GAP_PX, right_px),
    }
}

fn width_px_of_tick(label: &str) -> f64 {
    width_px(label, TICK_LABEL_PX, Weight::Regular)
}

fn width_px_of_note(name: &str) -> f64 {
    width_px(&super::lettering::tidy(name), NOTE_PX, Weight::Regular)
}

/// Upper and lower end of a tick label of the vertical axis.
fn level_ends(middle_px: f64) -> (f64, f64) {
    let half_px = 0.5 * (line_height_px(TICK_LABEL_PX) + LEVEL_AIR_PX);
    (middle_px - half_px, middle_px + half_px)
}

/// Whether the labels of an axis, from end to end as `ends` says, leave each other alone.
fn apart(ticks: &Ticks, ends: impl Fn(f64, &str) -> (f64, f64)) -> bool {
    let mut taken: Vec<(f64, f64)> = ticks
        .labelled()
        .map(|(value, label)| ends(value, label))
        .collect();
    taken.sort_by(|a, b| a.0.total_cmp(&b.0));
    taken.windows(2).all(|pair| pair[0].1 <= pair[1].0)
}

/// The ticks without those labels that would run into one before them.
fn with_room(mut ticks: Ticks, ends: impl Fn(f64, &str) -> (f64, f64)) -> Ticks {
    let mut taken: Vec<(f64, f64)> = Vec::new();
    for tick in &mut ticks.ticks {
        let Some(label) = &tick.label else { continue };
        let (from, to) = ends(tick.value, label);
        let free = from <= to
            && taken
                .iter()
                .all(|(start, end)| to <= *start || *end <= from);
        if free {
            taken.push((from, to));
        } else {
            tick.label = None;
        }
    }
    ticks
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
        let legend = Legend::new(panel, draft.width_px - left_px - right_px.min(14.0));
        Self {
            title_px: if panel.title.is_empty() { 0.0 } else { 22.0 },
            top_axis_px: if panel.top.is_some() { 40.0 } else { 0.0 },
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
        let foot_px = match below {
            Joint::Apart => {
                LABEL_GAP_PX + line_height_px(TICK_LABEL_PX) + 6.0 + line_height_px(AXIS_TITLE_PX)
            }
            Joint::SharedAxis | Joint::BrokenAxis => 0.0,
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
        plot.draw(scene, &draft.y_ticks);
        draw_axes(scene, draft, &plot, panel, (above, below));
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

fn draw_axes(
    scene: &mut Scene,
    draft: &Draft<'_>,
    plot: &Plot<'_>,
    panel: Rectangle,
    (above, below): (Joint, Joint),
) {
    let frame = plot.frame;
    let line = Stroke::solid(BLACK, 1.0);
    let corner = |x_px: f64, y_px: f64| -> Point { (x_px, y_px) };
    let left = [
        corner(frame.left_px, frame.top_px),
        corner(frame.left_px, frame.bottom_px),
    ];
    scene.shapes.push(Shape::line(left, line));
    for tick in &draft.y_ticks.ticks {
        let Some(y_px) = plot.y_px(tick.value) else {
            continue;
        };
        let length_px = if tick.label.is_some() {
            TICK_PX
        } else {
            SMALL_TICK_PX
        };
        let ends = [(frame.left_px - length_px, y_px), (frame.left_px, y_px)];
        scene.shapes.push(Shape::line(ends, line));
        let top_px = y_px - 0.5 * line_height_px(TICK_LABEL_PX);
        let label = tick.label.clone().unwrap_or_default();
        let right_px = frame.left_px - LABEL_GAP_PX;
        scene.write(
            Text::hung(label, Purpose::TickLabel, right_px, top_px, TICK_LABEL_PX)
                .anchored(Anchor::End),
        );
    }
    write_y_title(scene, draft, frame, panel);

    if below == Joint::Apart {
        let bottom = [
            (frame.left_px, frame.bottom_px),
            (frame.right_px, frame.bottom_px),
        ];
        scene.shapes.push(Shape::line(bottom, line));
    }
    let x_ticks = level_ticks(plot, panel, |fits| ticks(plot.x, fits));
    let x_name = title(
        &draft.panel.x.quantity,
        &draft.panel.x.unit,
        x_ticks.exponent,
    );
    let lower = LevelAxis {
        y_px: frame.bottom_px,
        down: 1.0,
        labelled: below == Joint::Apart,
    };
    lower.draw(scene, plot, panel, &x_ticks, &x_name);

    if let Some(top) = &draft.panel.top {
        let line_ends = [
            (frame.left_px, frame.top_px),
            (frame.right_px, frame.top_px),
        ];
        scene.shapes.push(Shape::line(line_ends, line));
        let top_ticks = level_ticks(plot, panel, |fits| mapped_ticks(plot.x, top.of, fits));
        let name = title(&top.quantity, &top.unit, top_ticks.exponent);
        let upper = LevelAxis {
            y_px: frame.top_px,
            down: -1.0,
            labelled: true,
        };
        upper.draw(scene, plot, panel, &top_ticks, &name);
    }
    if above == Joint::BrokenAxis {
        draw_break(scene, frame.left_px, frame.top_px, -1.0);
    }
    if below == Joint::BrokenAxis {
        draw_break(scene, frame.left_px, frame.bottom_px, 1.0);
    }
}

/// Leads an axis a little past the edge of its plot, up (−1) or down (1), to a slanted stroke: it
/// goes on after a jump.
fn draw_break(scene: &mut Scene, x_px: f64, edge_px: f64, down: f64) {
    let line = Stroke::solid(BLACK, 1.0);
    let y_px = edge_px + down * 0.3 * JOINT_PX;
    let lead = [(x_px, edge_px), (x_px, y_px)];
    scene.shapes.push(Shape::line(lead, line));
    let slant = [(x_px - 6.0, y_px + 3.0), (x_px + 6.0, y_px - 3.0)];
    scene.shapes.push(Shape::line(slant, line));
}

fn write_y_title(scene: &mut Scene, draft: &Draft<'_>, frame: Rectangle, panel: Rectangle) {
    let line_px = line_height_px(AXIS_TITLE_PX) + 2.0;
    for (index, line) in draft.y_title.iter().enumerate() {
        let hung = Text::hung(
            line.clone(),
            Purpose::AxisTitle,
            0.0,
            panel.left_px + index as f64 * line_px,
            AXIS_TITLE_PX,
        );
        // Upright, the line that the letters stand on is as far from the left as it was from the top.
        let at = (hung.at.1, 0.5 * (frame.top_px + frame.bottom_px));
        scene.write(Text { at, ..hung }.anchored(Anchor::Middle).upright());
    }
}

/// The ticks of a horizontal axis whose labels stay inside the panel and apart from each other.
fn level_ticks(
    plot: &Plot<'_>,
    panel: Rectangle,
    choose: impl FnOnce(&dyn Fn(&Ticks) -> bool) -> Ticks,
) -> Ticks {
    let ends = |value: f64, label: &str| {
        let middle_px = plot.x_px(value).unwrap_or(plot.frame.left_px);
        let half_px = 0.5 * (width_px_of_tick(label) + LABEL_AIR_PX);
        (middle_px - half_px, middle_px + half_px)
    };
    let inside = |(from, to): (f64, f64)| {
        let air_px = 0.5 * LABEL_AIR_PX;
        panel.left_px <= from + air_px && to - air_px <= panel.right_px
    };
    let mut chosen = with_room(choose(&|ticks| apart(ticks, ends)), ends);
    for tick in &mut chosen.ticks {
        let value = tick.value;
        tick.label = tick.label.take().filter(|label| inside(ends(value, label)));
    }
    chosen
}

/// The lower or the upper axis of a plot.
struct LevelAxis {
    y_px: f64,
    /// 1 for the lower axis, whose labels go down, −1 for the upper one.
    down: f64,
    labelled: bool,
}

impl LevelAxis {
    fn draw(
        &self,
        scene: &mut Scene,
        plot: &Plot<'_>,
        panel: Rectangle,
        ticks: &Ticks,
        name: &str,
    ) {
        let line = Stroke::solid(BLACK, 1.0);
        if !self.labelled {
            return;
        }
        for tick in &ticks.ticks {
            let Some(x_px) = plot.x_px(tick.value) else {
                continue;
            };
            let length_px = if tick.label.is_some() {
                TICK_PX
            } else {
                SMALL_TICK_PX
            };
            let ends = [(x_px, self.y_px), (x_px, self.y_px + self.down * length_px)];
            scene.shapes.push(Shape::line(ends, line));
            let label = tick.label.clone().unwrap_or_default();
            let top_px = self.line_top_px(LABEL_GAP_PX, TICK_LABEL_PX);
            scene.write(
                Text::hung(label, Purpose::TickLabel, x_px, top_px, TICK_LABEL_PX)
                    .anchored(Anchor::Middle),
            );
        }
        let middle_px = 0.5 * (plot.frame.left_px + plot.frame.right_px);
        let room_px = 2.0 * (middle_px - panel.left_px).min(panel.right_px - middle_px);
        let name = fitted(name, AXIS_TITLE_PX, Weight::Regular, room_px);
        let offset_px = LABEL_GAP_PX + line_height_px(TICK_LABEL_PX) + 4.0;
        let top_px = self.line_top_px(offset_px, AXIS_TITLE_PX);
        scene.write(
            Text::hung(name, Purpose::AxisTitle, middle_px, top_px, AXIS_TITLE_PX)
                .anchored(Anchor::Middle),
        );
    }

    /// Upper edge of a line of text that starts so far from the axis.
    fn line_top_px(&self, offset_px: f64, size_px: f64) -> f64 {
        if self.down > 0.0 {
            self.y_px + offset_px
        } else {
            self.y_px - offset_px - line_height_px(size_px)
        }
    }
}
