//! What a figure consists of once everything has its place: lines, areas, marks and texts, in px
//! from the upper left corner, in the order in which they are drawn.

use super::glyphs::{Weight, width_px};
use super::palette::{Dash, Mark, Rgb};

/// A point, px right and down of the upper left corner.
pub(crate) type Point = (f64, f64);

/// A rectangle with `left_px <= right_px` and `top_px <= bottom_px`.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Rectangle {
    /// Left edge, px.
    pub left_px: f64,
    /// Upper edge, px.
    pub top_px: f64,
    /// Right edge, px.
    pub right_px: f64,
    /// Lower edge, px.
    pub bottom_px: f64,
}

impl Rectangle {
    pub(crate) fn width_px(self) -> f64 {
        self.right_px - self.left_px
    }

    pub(crate) fn height_px(self) -> f64 {
        self.bottom_px - self.top_px
    }

    /// Whether `other` lies wholly inside, edges included.
    #[must_use]
    pub fn contains(self, other: Self) -> bool {
        self.left_px <= other.left_px
            && other.right_px <= self.right_px
            && self.top_px <= other.top_px
            && other.bottom_px <= self.bottom_px
    }

    /// Whether the two have an area in common.
    #[must_use]
    pub fn overlaps(self, other: Self) -> bool {
        self.left_px < other.right_px
            && other.left_px < self.right_px
            && self.top_px < other.bottom_px
            && other.top_px < self.bottom_px
    }

    /// The rectangle with every edge moved outwards.
    pub(crate) fn grown(self, by_px: f64) -> Self {
        Self {
            left_px: self.left_px - by_px,
            top_px: self.top_px - by_px,
            right_px: self.right_px + by_px,
            bottom_px: self.bottom_px + by_px,
        }
    }

    pub(crate) fn holds(self, (x, y): Point) -> bool {
        (self.left_px..=self.right_px).contains(&x) && (self.top_px..=self.bottom_px).contains(&y)
    }
}

/// How a line is drawn.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Stroke {
    pub(crate) rgb: Rgb,
    pub(crate) width_px: f64,
    pub(crate) dash: Dash,
}

impl Stroke {
    pub(crate) const fn solid(rgb: Rgb, width_px: f64) -> Self {
        Self {
            rgb,
            width_px,
            dash: Dash::Solid,
        }
    }
}

/// Which end of a text its point is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Anchor {
    Start,
    Middle,
    End,
}

/// What a text is for.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Purpose {
    /// Names the figure.
    Title,
    /// Says what the figure shows, or what it was made from.
    Caption,
    /// Names a panel.
    PanelTitle,
    /// Names the quantity and unit of an axis.
    AxisTitle,
    /// A number at a tick.
    TickLabel,
    /// Names a curve beside a sample of its line.
    Legend,
    /// Names something at its place in a panel.
    Note,
}

/// A text on one line.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Text {
    pub(crate) content: String,
    pub(crate) purpose: Purpose,
    /// Start, middle or end of the line that the letters stand on.
    pub(crate) at: Point,
    pub(crate) anchor: Anchor,
    pub(crate) size_px: f64,
    pub(crate) weight: Weight,
    pub(crate) rgb: Rgb,
    /// Reads from bottom to top.
    pub(crate) upright: bool,
}

/// Part of the font size that letters with accents reach above the line, and tails below it
/// (common practice for sans-serif fonts).
const ASCENT: f64 = 0.8;
const DESCENT: f64 = 0.22;

/// Height of a line of text, px.
pub(crate) fn line_height_px(size_px: f64) -> f64 {
    (ASCENT + DESCENT) * size_px
}

impl Text {
    /// Regular black text that starts at a point.
    pub(crate) fn new(content: String, purpose: Purpose, at: Point, size_px: f64) -> Self {
        Self {
            content,
            purpose,
            at,
            anchor: Anchor::Start,
            size_px,
            weight: Weight::Regular,
            rgb: super::palette::BLACK,
            upright: false,
        }
    }

    /// Regular text that fills a box of its own height: `top_px` down to one line below.
    pub(crate) fn hung(
        content: String,
        purpose: Purpose,
        left_px: f64,
        top_px: f64,
        size_px: f64,
    ) -> Self {
        Self::new(
            content,
            purpose,
            (left_px, top_px + ASCENT * size_px),
            size_px,
        )
    }

    pub(crate) fn anchored(mut self, anchor: Anchor) -> Self {
        self.anchor = anchor;
        self
    }

    pub(crate) fn in_rgb(mut self, rgb: Rgb) -> Self {
        self.rgb = rgb;
        self
    }

    pub(crate) fn in_bold(mut self) -> Self {
        self.weight = Weight::Bold;
        self
    }

    pub(crate) fn upright(mut self) -> Self {
        self.upright = true;
        self
    }

    pub(crate) fn width_px(&self) -> f64 {
        width_px(&self.content, self.size_px, self.weight)
    }

    /// The box that the text stays in, whatever common font it is set in.
    pub(crate) fn bounds(&self) -> Rectangle {
        let width_px = self.width_px();
        let before_px = match self.anchor {
            Anchor::Start => 0.0,
            Anchor::Middle => 0.5 * width_px,
            Anchor::End => width_px,
        };
        let after_px = width_px - before_px;
        let (above_px, below_px) = (ASCENT * self.size_px, DESCENT * self.size_px);
        let (x, y) = self.at;
        if self.upright {
            Rectangle {
                left_px: x - above_px,
                top_px: y - after_px,
                right_px: x + below_px,
                bottom_px: y + before_px,
            }
        } else {
            Rectangle {
                left_px: x - before_px,
                top_px: y - above_px,
                right_px: x + after_px,
                bottom_px: y + below_px,
            }
        }
    }
}

/// One thing to draw.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Shape {
    /// Points joined by straight lines.
    Line { points: Vec<Point>, stroke: Stroke },
    /// A closed area without outline.
    Fill {
        points: Vec<Point>,
        rgb: Rgb,
        opacity: f64,
    },
    /// A mark centred on a point, so large from edge to edge.
    Mark {
        at: Point,
        mark: Mark,
        size_px: f64,
        rgb: Rgb,
    },
    /// A text.
    Text(Text),
}

impl Shape {
    pub(crate) fn line(points: impl Into<Vec<Point>>, stroke: Stroke) -> Self {
        Self::Line {
            points: points.into(),
            stroke,
        }
    }

    pub(crate) fn rectangle(area: Rectangle, rgb: Rgb, opacity: f64) -> Self {
        let Rectangle {
            left_px,
            top_px,
            right_px,
            bottom_px,
        } = area;
        let points = vec![
            (left_px, top_px),
            (right_px, top_px),
            (right_px, bottom_px),
            (left_px, bottom_px),
        ];
        Self::Fill {
            points,
            rgb,
            opacity,
        }
    }
}

/// Everything of a figure in its place.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct Scene {
    pub(crate) width_px: f64,
    pub(crate) height_px: f64,
    /// The plots, and around each of them its panel.
    pub(crate) frames: Vec<Frame>,
    pub(crate) shapes: Vec<Shape>,
}

/// Where a panel lies, and inside it the plot that its axes enclose.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Frame {
    /// The panel with its axis titles and legend.
    pub panel: Rectangle,
    /// The area of the data.
    pub plot: Rectangle,
}

impl Scene {
    /// Adds a text, unless there is nothing to read.
    pub(crate) fn write(&mut self, text: Text) {
        if !text.content.is_empty() {
            self.shapes.push(Shape::Text(text));
        }
    }

    pub(crate) fn texts(&self) -> impl Iterator<Item = &Text> {
        self.shapes.iter().filter_map(|shape| match shape {
            Shape::Text(text) => Some(text),
            _ => None,
        })
    }
}

/// A text of a figure and the box that it stays in.
#[derive(Clone, Debug, PartialEq)]
pub struct PlacedText {
    /// What is written.
    pub content: String,
    /// What for.
    pub purpose: Purpose,
    /// Where.
    pub bounds: Rectangle,
}

/// Where everything that must not collide lies, so that a test can tell.
#[derive(Clone, Debug, PartialEq)]
pub struct Layout {
    /// The whole picture.
    pub picture: Rectangle,
    /// Panels and plots, in reading order.
    pub frames: Vec<Frame>,
    /// All texts, in drawing order.
    pub texts: Vec<PlacedText>,
}

impl From<&Scene> for Layout {
    fn from(scene: &Scene) -> Self {
        Self {
            picture: Rectangle {
                right_px: scene.width_px,
                bottom_px: scene.height_px,
                ..Rectangle::default()
            },
            frames: scene.frames.clone(),
            texts: scene
                .texts()
                .map(|text| PlacedText {
                    content: text.content.clone(),
                    purpose: text.purpose,
                    bounds: text.bounds(),
                })
                .collect(),
        }
    }
}
