//! The inside of the axes of one panel.

use super::axis::{Span, Ticks};
use super::clipping::{clipped_area, clipped_line};
use super::glyphs::{Weight, width_px};
use super::lettering::fitted;
use super::palette::{BLACK, Dash, GREY, Ink, PALE, WHITE};
use super::panel::{Area, Axis, Curve, Mark, Naming, Panel, Place, Side, Standing};
use super::placing::{Crowd, SideLabel, spread};
use super::scene::{Point, Purpose, Rectangle, Scene, Shape, Stroke, Text, line_height_px};

/// Size of names and notes, px.
pub(crate) const NOTE_PX: f64 = 12.0;
/// From the plot to the column of labels beside it, px.
pub(crate) const COLUMN_GAP_PX: f64 = 18.0;
const MARK_PX: f64 = 7.0;

/// A panel with its axes and its plot in their places.
pub(crate) struct Plot<'a> {
    pub(crate) panel: &'a Panel,
    pub(crate) x: Span,
    pub(crate) y: Span,
    pub(crate) frame: Rectangle,
    /// Right end of the column of labels, px.
    pub(crate) column_end_px: f64,
}

/// The span of the horizontal axis of a panel.
pub(crate) fn x_span(panel: &Panel) -> Span {
    let curves = panel
        .curves
        .iter()
        .flat_map(|curve| curve.points.iter().map(|(x, _)| *x));
    let areas = panel
        .areas
        .iter()
        .flat_map(|area| area.spans.iter().map(|(x, _)| *x));
    let notes = panel.notes.iter().map(|note| note.at.0);
    span(&panel.x, curves.chain(areas).chain(notes), 0.0)
}

/// The span of the vertical axis of a panel.
pub(crate) fn y_span(panel: &Panel) -> Span {
    let curves = panel
        .curves
        .iter()
        .flat_map(|curve| curve.points.iter().filter_map(|(_, y)| *y));
    let areas = panel
        .areas
        .iter()
        .flat_map(|area| area.spans.iter().filter_map(|(_, y)| *y));
    let notes = panel.notes.iter().map(|note| note.at.1);
    let ends = areas.flat_map(|(low, high)| [low, high]);
    span(&panel.y, curves.chain(ends).chain(notes), 0.05)
}

fn span(axis: &Axis, values: impl Iterator<Item = f64>, air: f64) -> Span {
    axis.range
        .and_then(|(from, to)| Span::fixed(from, to, axis.scale))
        .unwrap_or_else(|| Span::around(values.chain(axis.includes), axis.scale, air))
}

/// Names that stand in the column beside the plot.
pub(crate) fn beside(panel: &Panel) -> impl Iterator<Item = &str> {
    let curves = panel
        .curves
        .iter()
        .filter(|curve| curve.naming == Naming::AtEnd);
    let notes = panel
        .notes
        .iter()
        .filter(|note| note.standing == Standing::Beside);
    curves
        .map(|curve| curve.name.as_str())
        .chain(notes.map(|note| note.text.as_str()))
}

impl Plot<'_> {
    /// Everything inside the axes and the labels beside them.
    pub(crate) fn draw(&self, scene: &mut Scene, y_ticks: &Ticks) {
        self.draw_ground(scene, y_ticks);
        self.draw_rules(scene);
        let curves: Vec<Vec<Vec<Point>>> = self
            .panel
            .curves
            .iter()
            .map(|curve| self.strokes(curve))
            .collect();
        for (curve, strokes) in self.panel.curves.iter().zip(&curves) {
            self.draw_curve(scene, curve, strokes);
        }
        self.write_names(scene, curves.into_iter().flatten().collect());
    }

    /// Where a pair of values lies, px; none if an axis has no place for it.
    fn point(&self, (x, y): (f64, f64)) -> Option<Point> {
        let frame = self.frame;
        Some((
            frame.left_px + frame.width_px() * self.x.place(x)?,
            frame.bottom_px - frame.height_px() * self.y.place(y)?,
        ))
    }

    /// Height of a value of the vertical axis, if it is in sight.
    pub(crate) fn y_px(&self, y: f64) -> Option<f64> {
        let place = self
            .y
            .place(y)
            .filter(|place| (-1e-9..=1.0 + 1e-9).contains(place))?;
        Some(self.frame.bottom_px - self.frame.height_px() * place)
    }

    /// Where a value of the horizontal axis lies, if it is in sight.
    pub(crate) fn x_px(&self, x: f64) -> Option<f64> {
        let place = self
            .x
            .place(x)
            .filter(|place| (-1e-9..=1.0 + 1e-9).contains(place))?;
        Some(self.frame.left_px + self.frame.width_px() * place)
    }

    fn level_line(&self, y_px: f64) -> [Point; 2] {
        [(self.frame.left_px, y_px), (self.frame.right_px, y_px)]
    }

    fn upright_line(&self, x_px: f64) -> [Point; 2] {
        [(x_px, self.frame.top_px), (x_px, self.frame.bottom_px)]
    }

    fn draw_ground(&self, scene: &mut Scene, y_ticks: &Ticks) {
        for stripe in &self.panel.stripes {
            let ends = [stripe.from, stripe.to].map(|x| self.x.place(x));
            let [Some(a), Some(b)] = ends else { continue };
            let edge =
                |place: f64| self.frame.left_px + self.frame.width_px() * place.clamp(0.0, 1.0);
            let area = Rectangle {
                left_px: edge(a.min(b)),
                right_px: edge(a.max(b)),
                ..self.frame
            };
            if area.width_px() > 0.0 {
                let opacity = stripe.opacity.clamp(0.0, 1.0);
                scene
                    .shapes
                    .push(Shape::rectangle(area, stripe.ink.rgb(), opacity));
            }
        }
        for (y, _) in y_ticks.labelled() {
            if let Some(y_px) = self.y_px(y) {
                let thin = Stroke::solid(PALE, 0.8);
                scene.shapes.push(Shape::line(self.level_line(y_px), thin));
            }
        }
        for area in &self.panel.areas {
            self.draw_area(scene, area);
        }
        let heavy = Stroke::solid(BLACK, 1.6);
        if let Some(y_px) = self.y_px(0.0).filter(|_| self.panel.y.heavy_zero) {
            scene.shapes.push(Shape::line(self.level_line(y_px), heavy));
        }
        if let Some(x_px) = self.x_px(0.0).filter(|_| self.panel.x.heavy_zero) {
            scene
                .shapes
                .push(Shape::line(self.upright_line(x_px), heavy));
        }
    }

    fn draw_area(&self, scene: &mut Scene, area: &Area) {
        let ends = |&(x, span): &(f64, Option<(f64, f64)>)| {
            let (low, high) = span?;
            Some((self.point((x, low))?, self.point((x, high))?))
        };
        let placed: Vec<_> = area.spans.iter().map(ends).collect();
        for run in placed.split(Option::is_none) {
            let low = run.iter().flatten().map(|(low, _)| *low);
            let high = run.iter().flatten().rev().map(|(_, high)| *high);
            let outline: Vec<Point> = low.chain(high).collect();
            let points = clipped_area(&outline, self.frame);
            if points.len() > 2 {
                let opacity = area.opacity.clamp(0.0, 1.0);
                scene.shapes.push(Shape::Fill {
                    points,
                    rgb: area.ink.rgb(),
                    opacity,
                });
            }
        }
    }

    fn draw_rules(&self, scene: &mut Scene) {
        for rule in &self.panel.rules {
            let ends = match rule.at {
                Place::X(x) => self.x_px(x).map(|x_px| self.upright_line(x_px)),
                Place::Y(y) => self.y_px(y).map(|y_px| self.level_line(y_px)),
            };
            if let Some(ends) = ends {
                let stroke = stroke(rule.ink, rule.width_px, rule.dash);
                scene.shapes.push(Shape::line(ends, stroke));
            }
        }
    }

    /// The parts of a curve that are in sight.
    fn strokes(&self, curve: &Curve) -> Vec<Vec<Point>> {
        let placed: Vec<Option<Point>> = curve
            .points
            .iter()
            .map(|(x, y)| self.point((*x, (*y)?)))
            .collect();
        placed
            .split(Option::is_none)
            .flat_map(|run| {
                let run: Vec<Point> = run.iter().flatten().copied().collect();
                clipped_line(&run, self.frame)
            })
            .collect()
    }

    fn draw_curve(&self, scene: &mut Scene, curve: &Curve, strokes: &[Vec<Point>]) {
        if curve.width_px > 0.0 {
            for points in strokes {
                let stroke = stroke(curve.ink, curve.width_px, curve.dash);
                scene.shapes.push(Shape::line(points.clone(), stroke));
            }
        }
        if let Some(mark) = curve.mark {
            for point in self.seen(curve) {
                self.draw_mark(scene, point, mark, curve.ink);
            }
        }
    }

    /// The points of a curve that are in sight.
    fn seen(&self, curve: &Curve) -> impl DoubleEndedIterator<Item = Point> {
        curve
            .points
            .iter()
            .filter_map(|(x, y)| self.point((*x, (*y)?)))
            .filter(|point| self.frame.grown(0.01).holds(*point))
    }

    #[expect(
        clippy::unused_self,
        reason = "drawn into the plot like its other parts"
    )]
    fn draw_mark(&self, scene: &mut Scene, at: Point, mark: Mark, ink: Ink) {
        scene.shapes.push(Shape::Mark {
            at,
            mark,
            size_px: MARK_PX,
            rgb: ink.rgb(),
        });
    }

    /// Names of rules and curves, and notes: those beside the plot in their column, the others
    /// where there is room among the curves.
    fn write_names(&self, scene: &mut Scene, strokes: Vec<Vec<Point>>) {
        let mut column = Vec::new();
        let mut inside = Vec::new();
        for rule in &self.panel.rules {
            let at = match rule.at {
                Place::X(x) => self
                    .x_px(x)
                    .map(|x_px| ((x_px, self.frame.top_px + 12.0), Side::Right)),
                Place::Y(y) => self
                    .y_px(y)
                    .map(|y_px| ((self.frame.right_px - 60.0, y_px), Side::Above)),
            };
            if let Some((at, side)) = at {
                inside.push((at, rule.name.as_str(), rule.ink, side));
            }
        }
        for note in &self.panel.notes {
            let Some(at) = self.point(note.at) else {
                continue;
            };
            if !self.frame.grown(0.01).holds(at) {
                continue;
            }
            if let Some(mark) = note.mark {
                self.draw_mark(scene, at, mark, note.ink);
            }
            match note.standing {
                Standing::Near(side) => inside.push((at, note.text.as_str(), note.ink, side)),
                Standing::Beside => column.push((at, note.text.as_str(), note.ink)),
            }
        }
        for curve in &self.panel.curves {
            let name = curve.name.as_str();
            match curve.naming {
                Naming::AtEnd => {
                    column.extend(self.seen(curve).next_back().map(|at| (at, name, curve.ink)));
                }
                Naming::AtPeak => {
                    let peak = self.seen(curve).min_by(|a, b| a.1.total_cmp(&b.1));
                    inside.extend(peak.map(|at| (at, name, curve.ink, Side::Above)));
                }
                Naming::Legend | Naming::Nowhere => {}
            }
        }
        self.write_column(scene, column);
        let mut crowd = Crowd::new(self.frame.grown(-2.0), strokes);
        for (at, text, ink, side) in inside {
            self.write_inside(scene, &mut crowd, (at, side), text, ink);
        }
    }

    fn write_inside(
        &self,
        scene: &mut Scene,
        crowd: &mut Crowd,
        (at, side): (Point, Side),
        text: &str,
        ink: Ink,
    ) {
        let room_px = 0.45 * self.frame.width_px();
        let text = fitted(text, NOTE_PX, Weight::Regular, room_px);
        if text.is_empty() {
            return;
        }
        let size = (
            width_px(&text, NOTE_PX, Weight::Regular),
            line_height_px(NOTE_PX),
        );
        let Some(place) = crowd.place(at, size, side) else {
            return;
        };
        let nearest = (
            at.0.clamp(place.left_px, place.right_px),
            at.1.clamp(place.top_px, place.bottom_px),
        );
        scene.shapes.push(Shape::rectangle(place, WHITE, 0.8));
        if (nearest.0 - at.0).hypot(nearest.1 - at.1) > 14.0 {
            scene
                .shapes
                .push(Shape::line([at, nearest], Stroke::solid(GREY, 0.7)));
        }
        scene.write(
            Text::hung(text, Purpose::Note, place.left_px, place.top_px, NOTE_PX)
                .in_rgb(ink.text_rgb()),
        );
    }

    /// Labels beside the plot, each tied to its point by a thin line.
    fn write_column(&self, scene: &mut Scene, labels: Vec<(Point, &str, Ink)>) {
        let left_px = self.frame.right_px + COLUMN_GAP_PX;
        let room_px = self.column_end_px - left_px;
        let labels = labels
            .into_iter()
            .map(|(anchor, text, ink)| SideLabel {
                text: fitted(text, NOTE_PX, Weight::Regular, room_px),
                rgb: ink.text_rgb(),
                anchor,
                middle_px: anchor.1,
            })
            .collect();
        let column = (self.frame.top_px, self.frame.bottom_px);
        let height_px = line_height_px(NOTE_PX) + 1.0;
        for label in spread(labels, column, height_px, (NOTE_PX, room_px)) {
            let edge = (self.frame.right_px + 2.0, label.anchor.1);
            let stroke = Stroke::solid(GREY, 0.7);
            if label.anchor.0 < self.frame.right_px - 0.5 {
                let dotted = Stroke {
                    dash: Dash::Dotted,
                    ..stroke
                };
                scene.shapes.push(Shape::line([label.anchor, edge], dotted));
            }
            let end = (left_px - 3.0, label.middle_px);
            scene.shapes.push(Shape::line([edge, end], stroke));
            let top_px = label.middle_px - 0.5 * line_height_px(NOTE_PX);
            scene.write(
                Text::hung(label.text, Purpose::Note, left_px, top_px, NOTE_PX).in_rgb(label.rgb),
            );
        }
    }
}

/// A line of a width that can be seen and does not hide the rest.
fn stroke(ink: Ink, width_px: f64, dash: Dash) -> Stroke {
    let width_px = if width_px.is_finite() {
        width_px.clamp(0.3, 6.0)
    } else {
        1.0
    };
    Stroke {
        rgb: ink.rgb(),
        width_px,
        dash,
    }
}
