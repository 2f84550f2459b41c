//! A figure over two numbers of a structure, as contour lines with what limits the choice.

use super::{line_key, short_stamp};
use crate::design::{Aim, Chart, ChartPoint, Move, Quantity};
use crate::numerics::contour::{Grid, Line};
use crate::sheet::aim::range_words;
use crate::sheet::chart::{name_and_unit, value};
use crate::sheet::figure::{
    Axis, Curve, Dash, Figure, Ink, Key, Mark, Naming, Note, Panel, Row, Side, Standing,
};
use crate::sheet::number::{plain, temperature};
use crate::sheet::stamp::Stamp;

/// Contour lines that are aimed at.
const CONTOURS: f64 = 10.0;
/// Height of the plot over its width, px over px.
const ASPECT: f64 = 0.62;
/// A share of the critical thickness without end, for lines and hatches.
const BEYOND: f64 = 10.0;

/// A chart as a figure.
///
/// # Arguments
///
/// * `points` – all of them, in the order of the chart
/// * `aim` – the target, of which the wavelengths of the points are
#[must_use]
pub fn chart_figure(
    chart: &Chart<'_>,
    points: &[ChartPoint],
    aim: Option<&Aim>,
    stamp: &Stamp,
) -> Figure {
    let plane = Plane::new(chart);
    let (name, unit) = name_and_unit(chart.figure);
    let values: Vec<Option<f64>> = points.iter().map(|point| point.value).collect();
    let mut panel = Panel {
        plot_height_px: 500.0,
        x: plane.axis(0),
        y: plane.axis(1),
        ..Panel::default()
    };
    plane.hatch(points, &mut panel);
    plane.contours(&values, |level| value(chart.figure, level), &mut panel);
    let named = if unit.is_empty() {
        name.to_owned()
    } else {
        format!("{name}, {unit}")
    };
    panel.keys.insert(
        0,
        line_key(named, Ink::Ramp { step: 1, of: 4 }, Dash::Solid),
    );
    if let Some(aim) = aim {
        plane.target(points, aim, &mut panel);
    }
    let strain: Vec<Option<f64>> = points.iter().map(|it| it.tensile_percent).collect();
    let heavy: Vec<Option<f64>> = points.iter().map(|it| it.heavy_less_light_mev).collect();
    for (field, name, ink, dash) in [
        (&strain, "no strain", Ink::Colour(3), Dash::Long),
        (
            &heavy,
            "heavy and light hole cross",
            Ink::Colour(1),
            Dash::DashDot,
        ),
    ] {
        let lines = plane.lines(field, 0.0);
        if !lines.is_empty() {
            panel.curves.push(plane.curve(&lines, ink, dash, 1.8));
            panel.keys.push(line_key(name, ink, dash));
        }
    }
    plane.own_point(&mut panel);
    let kelvin = chart.variation.stack.operation.temperature_k;
    let mut caption = vec![
        format!("across {}", range_words(&chart.variation.moves[0])),
        format!("up {}", range_words(&chart.variation.moves[1])),
    ];
    caption.extend(chart.variation.giving_way());
    caption.push(temperature(kelvin));
    Figure {
        title: format!("{}: {name}", chart.variation.stack.title),
        caption: caption.join("; "),
        stamp: short_stamp(stamp),
        description: format!(
            "Contour lines of the {name} over {} and {}, {} by {} points.",
            chart.variation.moves[0].key(),
            chart.variation.moves[1].key(),
            chart.points.0,
            chart.points.1
        ),
        rows: vec![Row {
            panels: vec![panel],
            ..Row::default()
        }],
    }
}

/// The two axes of a chart.
struct Plane<'a> {
    chart: &'a Chart<'a>,
    x: Vec<f64>,
    y: Vec<f64>,
}

impl<'a> Plane<'a> {
    fn new(chart: &'a Chart<'a>) -> Self {
        Self {
            chart,
            x: chart.across(),
            y: chart.up(),
        }
    }

    fn moved(&self, index: usize) -> &Move {
        &self.chart.variation.moves[index]
    }

    fn axis(&self, index: usize) -> Axis {
        let moved = self.moved(index);
        let (quantity, unit) = match moved.quantity {
            Quantity::Thickness => (format!("thickness of {}", moved.name), "nm"),
            Quantity::Share(element) => (
                format!("share of {} in {}", element.symbol(), moved.name),
                "",
            ),
            Quantity::Strain if moved.to <= 0.0 => {
                (format!("compressive strain of {}", moved.name), "%")
            }
            Quantity::Strain if moved.from >= 0.0 => {
                (format!("tensile strain of {}", moved.name), "%")
            }
            Quantity::Strain => (
                format!(
                    "strain of {}: compressive below 0, tensile above",
                    moved.name
                ),
                "%",
            ),
            Quantity::Gap => (format!("gap of {}", moved.name), "nm"),
        };
        let ends = (moved.said(moved.from), moved.said(moved.to));
        Axis::new(quantity, unit).over(ends.0.min(ends.1), ends.0.max(ends.1))
    }

    /// A point as the axes say it.
    fn said(&self, (x, y): (f64, f64)) -> (f64, f64) {
        (self.moved(0).said(x), self.moved(1).said(y))
    }

    fn lines(&self, values: &[Option<f64>], level: f64) -> Vec<Line> {
        let grid = Grid {
            x: &self.x,
            y: &self.y,
            values,
        };
        grid.lines(level)
    }

    /// Lines as one curve with gaps.
    fn curve(&self, lines: &[Line], ink: Ink, dash: Dash, width_px: f64) -> Curve {
        let mut points = Vec::new();
        for line in lines {
            points.extend(line.points.iter().map(|&at| {
                let (x, y) = self.said(at);
                (x, Some(y))
            }));
            if let Some((x, _)) = points.last().copied() {
                points.push((x, None));
            }
        }
        Curve {
            naming: Naming::Nowhere,
            points,
            ink,
            dash,
            width_px,
            ..Curve::default()
        }
    }

    /// Lengths in shares of the plot's width.
    fn scale(&self) -> (f64, f64) {
        let span = |axis: &[f64]| axis[axis.len() - 1] - axis[0];
        (1.0 / span(&self.x), ASPECT / span(&self.y))
    }

    /// Contour lines at round values, each with its value where it is longest.
    fn contours(&self, values: &[Option<f64>], words: impl Fn(f64) -> String, panel: &mut Panel) {
        let levels = round_levels(values);
        let scale = self.scale();
        for (step, &level) in levels.iter().enumerate() {
            let lines = self.lines(values, level);
            let ink = Ink::Ramp {
                step,
                of: levels.len().max(2),
            };
            panel.curves.push(self.curve(&lines, ink, Dash::Solid, 1.2));
            let longest = lines
                .iter()
                .map(|line| (line, line.lengths(scale)))
                .max_by(|a, b| last(&a.1).total_cmp(&last(&b.1)));
            if let Some((line, lengths)) = longest
                && last(&lengths) > 0.08
            {
                // Neighbours are named at different places along their lines.
                let along = if step % 2 == 0 { 0.42 } else { 0.58 };
                panel.notes.push(Note {
                    at: self.said(line.at(along * last(&lengths), &lengths)),
                    text: words(level),
                    ink,
                    mark: None,
                    standing: Standing::Near(Side::Above),
                });
            }
        }
    }

    /// The line on which the target's wavelength is met.
    fn target(&self, points: &[ChartPoint], aim: &Aim, panel: &mut Panel) {
        let wavelengths: Vec<Option<f64>> = points.iter().map(|it| it.wavelength_nm).collect();
        let lines = self.lines(&wavelengths, aim.vacuum_nm());
        let name = format!(
            "target: {} {} nm in {}",
            aim.kind.meaning(),
            plain(aim.wavelength_nm),
            aim.medium.word()
        );
        if lines.is_empty() {
            panel.keys.push(Key {
                name: format!("{name}, outside"),
                ..Key::default()
            });
        } else {
            panel
                .curves
                .push(self.curve(&lines, Ink::Black, Dash::Solid, 3.2));
            panel.keys.push(Key {
                width_px: 3.2,
                ..line_key(name, Ink::Black, Dash::Solid)
            });
        }
    }

    /// The band between the two critical thicknesses hatched, and what lies beyond it twice.
    fn hatch(&self, points: &[ChartPoint], panel: &mut Panel) {
        let share = |of: fn(&ChartPoint) -> Option<f64>| -> Vec<Option<f64>> {
            let bounded = |it: f64| it.min(BEYOND);
            points.iter().map(|point| of(point).map(bounded)).collect()
        };
        let free = share(|it| it.critical_share_free);
        let buried = share(|it| it.critical_share_buried);
        for (field, slope, name) in [
            (
                &free,
                1.0,
                "beyond the critical thickness of a free surface",
            ),
            (&buried, -1.0, "and of a layer that is grown over"),
        ] {
            let hatches = self.hatches(field, slope);
            if hatches.is_empty() {
                continue;
            }
            panel.curves.push(Curve {
                naming: Naming::Nowhere,
                points: hatches,
                ink: Ink::Grey,
                width_px: 0.6,
                ..Curve::default()
            });
            let edge = self.lines(field, 1.0);
            panel
                .curves
                .push(self.curve(&edge, Ink::Grey, Dash::Solid, 1.4));
            panel.keys.push(Key {
                name: name.to_owned(),
                ink: Ink::Grey,
                width_px: 0.6,
                opacity: if slope > 0.0 { 0.15 } else { 0.35 },
                ..Key::default()
            });
        }
    }

    /// Slanting lines over where a share is above 1.
    fn hatches(&self, share: &[Option<f64>], slope: f64) -> Vec<(f64, Option<f64>)> {
        const APART: f64 = 0.045;
        const STEPS: usize = 240;
        let grid = Grid {
            x: &self.x,
            y: &self.y,
            values: share,
        };
        let across = |u: f64| self.moved(0).at(u);
        let up = |v: f64| self.moved(1).at(v);
        // At 45 degrees on the plot: so many heights a width.
        let steep = slope / ASPECT;
        let mut points = Vec::new();
        let count = ((1.0 + steep.abs()) / APART) as usize + 1;
        for line in 0..=count {
            let offset = line as f64 * APART - if slope > 0.0 { steep } else { 0.0 };
            let mut run: Option<(f64, f64)> = None;
            for step in 0..=STEPS {
                let u = step as f64 / STEPS as f64;
                let v = offset + steep * u;
                let is_beyond = (0.0..=1.0).contains(&v)
                    && grid.at(across(u), up(v)).is_some_and(|share| share > 1.0);
                run = match (run, is_beyond) {
                    (None, true) => Some((u, u)),
                    (Some((from, _)), true) => Some((from, u)),
                    (Some((from, to)), false) => {
                        self.stroke((from, to), offset, steep, &mut points);
                        None
                    }
                    (None, false) => None,
                };
            }
            if let Some(ends) = run {
                self.stroke(ends, offset, steep, &mut points);
            }
        }
        points
    }

    fn stroke(
        &self,
        (from, to): (f64, f64),
        offset: f64,
        steep: f64,
        points: &mut Vec<(f64, Option<f64>)>,
    ) {
        for u in [from, to] {
            let (x, y) = self.said((self.moved(0).at(u), self.moved(1).at(offset + steep * u)));
            points.push((x, Some(y)));
        }
        let x = points[points.len() - 1].0;
        points.push((x, None));
    }

    fn own_point(&self, panel: &mut Panel) {
        let present = self.chart.variation.present();
        let is_inside = |index: usize| {
            let moved = self.moved(index);
            (moved.from..=moved.to).contains(&present[index])
        };
        if is_inside(0) && is_inside(1) {
            panel.notes.push(Note {
                at: self.said((present[0], present[1])),
                text: "the file".to_owned(),
                ink: Ink::Black,
                mark: Some(Mark::Disc),
                standing: Standing::Near(Side::Right),
            });
        }
    }
}

fn last(lengths: &[f64]) -> f64 {
    lengths.last().copied().unwrap_or(0.0)
}

/// Round values between the lowest and the highest.
fn round_levels(values: &[Option<f64>]) -> Vec<f64> {
    let finite = || values.iter().flatten().copied().filter(|it| it.is_finite());
    let low = finite().fold(f64::INFINITY, f64::min);
    let high = finite().fold(f64::NEG_INFINITY, f64::max);
    if high.partial_cmp(&low) != Some(std::cmp::Ordering::Greater) {
        return Vec::new();
    }
    let rough = (high - low) / CONTOURS;
    let power = 10f64.powf(rough.log10().floor());
    // The round step nearest to the rough one, in ratio.
    let step = [1.0, 2.0, 5.0, 10.0]
        .into_iter()
        .map(|round| round * power)
        .min_by(|a, b| (a / rough).ln().abs().total_cmp(&(b / rough).ln().abs()))
        .unwrap_or(rough);
    let first = (low / step).ceil();
    let count = ((high / step).floor() - first) as usize;
    (0..=count).map(|at| (first + at as f64) * step).collect()
}
