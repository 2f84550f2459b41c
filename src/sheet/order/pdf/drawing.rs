//! Things on a sheet of paper: points of 1/72 in from its upper left corner.

use super::font::Face;
use crate::sheet::figure::{
    Anchor, Level, Mark, Rgb, SCRIPT_SIZE, Scene, Shape, Text, Weight, lift, set,
};

/// A point, right and down of the upper left corner.
pub(super) type Point = (f64, f64);

/// Something on the paper.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Item {
    /// Words on one line, beginning at a point of the line that letters stand on.
    Text {
        at: Point,
        text: String,
        face: Face,
        size_pt: f64,
        rgb: Rgb,
        /// Reads from bottom to top.
        upright: bool,
    },
    /// Points joined by straight lines.
    Line {
        points: Vec<Point>,
        width_pt: f64,
        rgb: Rgb,
        dash_pt: Vec<f64>,
        is_closed: bool,
    },
    /// An area.
    Fill {
        points: Vec<Point>,
        rgb: Rgb,
        opacity: f64,
    },
    /// A disc, filled, or a ring on white.
    Disc {
        at: Point,
        radius_pt: f64,
        rgb: Rgb,
        is_ring: bool,
    },
}

/// Width of a text, pt.
pub(super) fn width_pt(text: &str, face: Face, size_pt: f64) -> f64 {
    size_pt * face.font().width_em(text)
}

pub(super) fn rectangle(left: f64, top: f64, width: f64, height: f64) -> Vec<Point> {
    vec![
        (left, top),
        (left + width, top),
        (left + width, top + height),
        (left, top + height),
    ]
}

/// A figure with its upper left corner at a point, so many points a pixel.
pub(super) fn figure(scene: &Scene, (left, top): Point, scale: f64) -> Vec<Item> {
    let place = |&(x, y): &(f64, f64)| (left + scale * x, top + scale * y);
    let places = |points: &[(f64, f64)]| points.iter().map(place).collect::<Vec<_>>();
    let mut items = Vec::new();
    for shape in &scene.shapes {
        items.push(match shape {
            Shape::Line { points, stroke } => Item::Line {
                points: places(points),
                width_pt: scale * stroke.width_px,
                rgb: stroke.rgb,
                dash_pt: stroke
                    .dash
                    .lengths_px(stroke.width_px)
                    .into_iter()
                    .map(|it| scale * it)
                    .collect(),
                is_closed: false,
            },
            Shape::Fill {
                points,
                rgb,
                opacity,
            } => Item::Fill {
                points: places(points),
                rgb: *rgb,
                opacity: *opacity,
            },
            Shape::Mark {
                at,
                mark,
                size_px,
                rgb,
            } => self::mark(place(at), *mark, 0.5 * scale * size_px, *rgb),
            Shape::Text(text) => {
                items.extend(self::text(text, place(&text.at), scale));
                continue;
            }
        });
    }
    items
}

/// A text of a figure in runs: raised and lowered characters are smaller ones of the line, as in the
/// figure's own document.
fn text(text: &Text, (x, y): Point, scale: f64) -> Vec<Item> {
    let face = match text.weight {
        Weight::Regular => Face::Regular,
        Weight::Bold => Face::Bold,
    };
    let size_pt = scale * text.size_px;
    let mut runs: Vec<(Level, String)> = Vec::new();
    for (level, character) in text.content.chars().map(set) {
        match runs.last_mut() {
            Some((last, run)) if *last == level => run.push(character),
            _ => runs.push((level, character.to_string())),
        }
    }
    let size_of = |level: Level| match level {
        Level::Line => size_pt,
        _ => SCRIPT_SIZE * size_pt,
    };
    let whole: f64 = runs
        .iter()
        .map(|(level, run)| width_pt(run, face, size_of(*level)))
        .sum();
    let mut along = match text.anchor {
        Anchor::Start => 0.0,
        Anchor::Middle => -0.5 * whole,
        Anchor::End => -whole,
    };
    let mut items = Vec::new();
    for (level, run) in runs {
        let over = lift(level) * size_pt;
        let at = if text.upright {
            (x - over, y - along)
        } else {
            (x + along, y - over)
        };
        along += width_pt(&run, face, size_of(level));
        items.push(Item::Text {
            at,
            text: run,
            face,
            size_pt: size_of(level),
            rgb: text.rgb,
            upright: text.upright,
        });
    }
    items
}

fn mark((x, y): Point, mark: Mark, half_pt: f64, rgb: Rgb) -> Item {
    let corners = |points: &[Point]| Item::Fill {
        points: points
            .iter()
            .map(|(a, b)| (x + a * half_pt, y + b * half_pt))
            .collect(),
        rgb,
        opacity: 1.0,
    };
    match mark {
        Mark::Disc | Mark::Ring => Item::Disc {
            at: (x, y),
            radius_pt: half_pt,
            rgb,
            is_ring: mark == Mark::Ring,
        },
        Mark::Square => corners(&[(-0.9, -0.9), (0.9, -0.9), (0.9, 0.9), (-0.9, 0.9)]),
        Mark::Diamond => corners(&[(0.0, -1.2), (1.2, 0.0), (0.0, 1.2), (-1.2, 0.0)]),
        Mark::Triangle => corners(&[(0.0, -1.1), (1.1, 0.9), (-1.1, 0.9)]),
    }
}
