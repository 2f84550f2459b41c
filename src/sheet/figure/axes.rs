//! The axes around a plot: lines, ticks, numbers and titles.

use super::axis::{Span, Tick, Ticks, mapped_ticks, ticks};
use super::glyphs::{Weight, width_px};
use super::lettering::{fitted, tidy};
use super::numerals::unit_in_brackets;
use super::palette::BLACK;
use super::panel::{Axis, TopAxis};
use super::plot::Plot;
use super::scene::{Anchor, Purpose, Rectangle, Scene, Shape, Stroke, Text, line_height_px};

/// Between the plots of rows that share an axis: room for the tick labels at both edges, px.
pub(crate) const JOINT_PX: f64 = 18.0;
/// Room for an axis on top of a plot, px.
pub(crate) const TOP_AXIS_PX: f64 = 40.0;

const TITLE_PX: f64 = 13.0;
const LABEL_PX: f64 = 12.0;
const TICK_PX: f64 = 5.0;
const SMALL_TICK_PX: f64 = 2.5;
/// From the axis to its tick labels, px.
const LABEL_GAP_PX: f64 = 8.0;
/// From the tick labels of a horizontal axis to its title, px.
const TITLE_GAP_PX: f64 = 4.0;
/// Least air between neighbouring tick labels of a horizontal axis, and of a vertical one, px.
const LEVEL_AIR_PX: f64 = 10.0;
const UPRIGHT_AIR_PX: f64 = 17.0;

/// Room for a name in place of a number, px.
const LONGEST_NAME_PX: f64 = 220.0;

const LINE: Stroke = Stroke::solid(BLACK, 1.0);

fn label_width_px(label: &str) -> f64 {
    width_px(label, LABEL_PX, Weight::Regular)
}

fn title_width_px(title: &str) -> f64 {
    width_px(title, TITLE_PX, Weight::Regular)
}

fn tick_length_px(tick: &Tick) -> f64 {
    if tick.label.is_some() {
        TICK_PX
    } else {
        SMALL_TICK_PX
    }
}

/// A quantity and its unit on one line; where they are too long, the quantity is cut, since a
/// number without its unit is worth nothing.
fn title_on_a_line(quantity: &str, unit: &str, room_px: f64) -> String {
    let unit = fitted(unit, TITLE_PX, Weight::Regular, 0.5 * room_px);
    if unit.is_empty() {
        return fitted(quantity, TITLE_PX, Weight::Regular, room_px);
    }
    let left_px = room_px - title_width_px(&format!(" {unit}"));
    let quantity = fitted(quantity, TITLE_PX, Weight::Regular, left_px);
    format!("{quantity} {unit}").trim_start().to_owned()
}

/// The axis at the left of a plot, before the width of the plot is known.
pub(crate) struct UprightAxis {
    pub(crate) ticks: Ticks,
    /// On one line, or the unit on a second one.
    title: Vec<String>,
}

impl UprightAxis {
    /// The axis over a span, so high.
    pub(crate) fn new(axis: &Axis, span: Span, height_px: f64) -> Self {
        let ends = |value: f64, _: &str| {
            let middle_px = height_px * (1.0 - span.place(value).unwrap_or(0.0));
            let half_px = 0.5 * (line_height_px(LABEL_PX) + UPRIGHT_AIR_PX);
            (middle_px - half_px, middle_px + half_px)
        };
        let chosen = if axis.names.is_empty() {
            ticks(span, |ticks| apart(ticks, ends))
        } else {
            named(axis)
        };
        let ticks = with_room(chosen, ends);
        let unit = unit_in_brackets(&tidy(&axis.unit), ticks.exponent);
        let whole = tidy(&format!("{} {unit}", axis.quantity));
        let mut title = if title_width_px(&whole) <= height_px {
            vec![whole]
        } else {
            vec![axis.quantity.clone(), unit]
        };
        for line in &mut title {
            *line = fitted(line, TITLE_PX, Weight::Regular, height_px);
        }
        title.retain(|line| !line.is_empty());
        Self { ticks, title }
    }

    fn title_line_px() -> f64 {
        line_height_px(TITLE_PX) + 2.0
    }

    /// Room that title, numbers and ticks need left of the plot, px.
    pub(crate) fn width_px(&self) -> f64 {
        let labels = self
            .ticks
            .labelled()
            .map(|(_, label)| label_width_px(label));
        let title_px = self.title.len() as f64 * Self::title_line_px() + 6.0;
        title_px + labels.fold(0.0, f64::max) + LABEL_GAP_PX
    }

    /// Draws the axis, with its title at the left edge of the panel.
    pub(crate) fn draw(&self, scene: &mut Scene, plot: &Plot<'_>, panel_left_px: f64) {
        let frame = plot.frame;
        let ends = [
            (frame.left_px, frame.top_px),
            (frame.left_px, frame.bottom_px),
        ];
        scene.shapes.push(Shape::line(ends, LINE));
        for tick in &self.ticks.ticks {
            let Some(y_px) = plot.y_px(tick.value) else {
                continue;
            };
            let ends = [
                (frame.left_px - tick_length_px(tick), y_px),
                (frame.left_px, y_px),
            ];
            scene.shapes.push(Shape::line(ends, LINE));
            let label = tick.label.clone().unwrap_or_default();
            let right_px = frame.left_px - LABEL_GAP_PX;
            let top_px = y_px - 0.5 * line_height_px(LABEL_PX);
            let text = Text::hung(label, Purpose::TickLabel, right_px, top_px, LABEL_PX);
            scene.write(text.anchored(Anchor::End));
        }
        for (index, line) in self.title.iter().enumerate() {
            let left_px = panel_left_px + index as f64 * Self::title_line_px();
            let hung = Text::hung(line.clone(), Purpose::AxisTitle, 0.0, left_px, TITLE_PX);
            // Upright, the letters stand as far from the left as they stood from the top.
            let at = (hung.at.1, 0.5 * (frame.top_px + frame.bottom_px));
            scene.write(Text { at, ..hung }.anchored(Anchor::Middle).upright());
        }
    }
}

/// Ticks with names for labels.
fn named(axis: &Axis) -> Ticks {
    let ticks = axis.names.iter().map(|(value, name)| Tick {
        value: *value,
        label: Some(fitted(name, LABEL_PX, Weight::Regular, LONGEST_NAME_PX)),
    });
    Ticks {
        exponent: 0,
        ticks: ticks.collect(),
    }
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
        if taken
            .iter()
            .all(|(start, end)| to <= *start || *end <= from)
        {
            taken.push((from, to));
        } else {
            tick.label = None;
        }
    }
    ticks
}

/// The lower or the upper axis of a plot.
pub(crate) struct LevelAxis {
    y_px: f64,
    /// 1 for the lower axis, whose labels go down, −1 for the upper one.
    down: f64,
    ticks: Ticks,
    title: String,
}

impl LevelAxis {
    /// Height of the lower axis with its numbers and title, px.
    pub(crate) fn foot_px() -> f64 {
        LABEL_GAP_PX + line_height_px(LABEL_PX) + TITLE_GAP_PX + line_height_px(TITLE_PX)
    }

    /// How far the last number of an axis so long reaches past its end, px.
    pub(crate) fn overhang_px(span: Span, length_px: f64) -> f64 {
        let middle_px = |value: f64| length_px * span.place(value).unwrap_or(0.0);
        let half_px = |label: &str| 0.5 * (label_width_px(label) + LEVEL_AIR_PX);
        let ends = |value: f64, label: &str| {
            (
                middle_px(value) - half_px(label),
                middle_px(value) + half_px(label),
            )
        };
        let ticks = ticks(span, |ticks| apart(ticks, ends));
        let last_end_px = ticks
            .labelled()
            .last()
            .map_or(0.0, |(value, label)| ends(value, label).1);
        (last_end_px - 0.5 * LEVEL_AIR_PX - length_px).max(0.0)
    }

    /// The lower axis of a plot in its panel.
    pub(crate) fn lower(plot: &Plot<'_>, panel: Rectangle) -> Self {
        let axis = &plot.panel.x;
        let ticks = level_ticks(plot, panel, |fits| ticks(plot.x, fits));
        let title = level_title(&axis.quantity, &axis.unit, ticks.exponent, plot, panel);
        Self {
            y_px: plot.frame.bottom_px,
            down: 1.0,
            ticks,
            title,
        }
    }

    /// The upper axis of a plot in its panel.
    pub(crate) fn upper(axis: &TopAxis, plot: &Plot<'_>, panel: Rectangle) -> Self {
        let ticks = level_ticks(plot, panel, |fits| mapped_ticks(plot.x, axis.of, fits));
        let title = level_title(&axis.quantity, &axis.unit, ticks.exponent, plot, panel);
        Self {
            y_px: plot.frame.top_px,
            down: -1.0,
            ticks,
            title,
        }
    }

    /// Draws line, ticks, numbers and title.
    pub(crate) fn draw(&self, scene: &mut Scene, plot: &Plot<'_>) {
        let frame = plot.frame;
        let ends = [(frame.left_px, self.y_px), (frame.right_px, self.y_px)];
        scene.shapes.push(Shape::line(ends, LINE));
        for tick in &self.ticks.ticks {
            let Some(x_px) = plot.x_px(tick.value) else {
                continue;
            };
            let end_px = self.y_px + self.down * tick_length_px(tick);
            scene
                .shapes
                .push(Shape::line([(x_px, self.y_px), (x_px, end_px)], LINE));
            let label = tick.label.clone().unwrap_or_default();
            let top_px = self.line_top_px(LABEL_GAP_PX, LABEL_PX);
            let text = Text::hung(label, Purpose::TickLabel, x_px, top_px, LABEL_PX);
            scene.write(text.anchored(Anchor::Middle));
        }
        let offset_px = LABEL_GAP_PX + line_height_px(LABEL_PX) + TITLE_GAP_PX;
        let top_px = self.line_top_px(offset_px, TITLE_PX);
        let title = self.title.clone();
        let text = Text::hung(title, Purpose::AxisTitle, middle_px(plot), top_px, TITLE_PX);
        scene.write(text.anchored(Anchor::Middle));
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

fn middle_px(plot: &Plot<'_>) -> f64 {
    0.5 * (plot.frame.left_px + plot.frame.right_px)
}

/// The title of a horizontal axis, centred under or over the plot and inside the panel.
fn level_title(
    quantity: &str,
    unit: &str,
    exponent: i32,
    plot: &Plot<'_>,
    panel: Rectangle,
) -> String {
    let middle_px = middle_px(plot);
    let room_px = 2.0 * (middle_px - panel.left_px).min(panel.right_px - middle_px);
    title_on_a_line(quantity, &unit_in_brackets(&tidy(unit), exponent), room_px)
}

/// The ticks of a horizontal axis whose labels stay inside the panel and apart from each other.
fn level_ticks(
    plot: &Plot<'_>,
    panel: Rectangle,
    choose: impl FnOnce(&dyn Fn(&Ticks) -> bool) -> Ticks,
) -> Ticks {
    let ends = |value: f64, label: &str| {
        let middle_px = plot.x_px(value).unwrap_or(plot.frame.left_px);
        let half_px = 0.5 * (label_width_px(label) + LEVEL_AIR_PX);
        (middle_px - half_px, middle_px + half_px)
    };
    let inside = |(from, to): (f64, f64)| {
        let air_px = 0.5 * LEVEL_AIR_PX;
        panel.left_px <= from + air_px && to - air_px <= panel.right_px
    };
    let mut chosen = with_room(choose(&|ticks| apart(ticks, ends)), ends);
    for tick in &mut chosen.ticks {
        let value = tick.value;
        tick.label = tick.label.take().filter(|label| inside(ends(value, label)));
    }
    chosen
}

/// Leads an axis a little past the edge of its plot, up (−1) or down (1), to a slanted stroke: it
/// goes on after a jump.
pub(crate) fn draw_break(scene: &mut Scene, x_px: f64, edge_px: f64, down: f64) {
    let y_px = edge_px + down * 0.3 * JOINT_PX;
    scene
        .shapes
        .push(Shape::line([(x_px, edge_px), (x_px, y_px)], LINE));
    let slant = [(x_px - 6.0, y_px + 3.0), (x_px + 6.0, y_px - 3.0)];
    scene.shapes.push(Shape::line(slant, LINE));
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sheet::figure::panel::Scale;

    #[test]
    fn a_long_title_keeps_its_unit() {
        assert_eq!(title_on_a_line("gain", "(cm⁻¹)", 200.0), "gain (cm⁻¹)");
        let cut = title_on_a_line("gain of the whole active region", "(cm⁻¹)", 120.0);
        assert!(cut.ends_with("… (cm⁻¹)"), "{cut}");
        assert!(title_width_px(&cut) <= 120.0);
        assert_eq!(title_on_a_line("gain", "", 200.0), "gain");
        assert_eq!(title_on_a_line("", "(eV)", 200.0), "(eV)");
    }

    #[test]
    fn an_upright_title_breaks_before_its_unit() {
        let span = Span::fixed(0.0, 1.0, Scale::Linear).expect("a span");
        let axis = Axis::new("spontaneous emission rate", "eV⁻¹ cm⁻³ s⁻¹");
        assert_eq!(UprightAxis::new(&axis, span, 400.0).title.len(), 1);
        let low = UprightAxis::new(&axis, span, 180.0);
        assert_eq!(low.title, ["spontaneous emission rate", "(eV⁻¹ cm⁻³ s⁻¹)"]);
    }

    #[test]
    fn names_stand_in_place_of_numbers_and_have_their_room() {
        let span = Span::fixed(0.0, 3.0, Scale::Linear).expect("a span");
        let long = "x".repeat(400);
        let axis = Axis {
            names: vec![(1.0, "growth rate".to_owned()), (2.0, long)],
            ..Axis::default()
        };
        let upright = UprightAxis::new(&axis, span, 200.0);
        let labels: Vec<&str> = upright.ticks.labelled().map(|(_, label)| label).collect();
        assert_eq!(labels[0], "growth rate");
        assert!(label_width_px(labels[1]) <= LONGEST_NAME_PX);
        assert!(upright.width_px() >= label_width_px(labels[1]));
    }

    #[test]
    fn a_low_axis_has_fewer_numbers() {
        let span = Span::fixed(0.0, 1.0, Scale::Linear).expect("a span");
        let count = |height_px: f64| {
            UprightAxis::new(&Axis::default(), span, height_px)
                .ticks
                .labelled()
                .count()
        };
        assert_eq!((count(60.0), count(200.0)), (3, 6));
    }
}
