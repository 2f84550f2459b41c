//! What a figure shows, in the units of its axes.

pub use super::axis::Scale;
pub use super::palette::{Dash, Ink, Mark};
pub use super::placing::Side;

/// Panels under a common title.
#[derive(Clone, Debug, Default)]
pub struct Figure {
    /// Names the figure.
    pub title: String,
    /// Says under the title what is shown; may be long, is wrapped.
    pub caption: String,
    /// Says at the foot what the figure was made from.
    pub stamp: String,
    /// Says in words what a reader would see, for readers who do not.
    pub description: String,
    /// From top to bottom.
    pub rows: Vec<Row>,
}

/// Panels side by side.
#[derive(Clone, Debug, Default)]
pub struct Row {
    /// From left to right; panels below each other in rows of as many panels have their plots
    /// aligned.
    pub panels: Vec<Panel>,
    /// How the row below continues this one.
    pub joint: Joint,
}

/// What lies between a row and the next one.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Joint {
    /// Nothing: each has its own axes.
    #[default]
    Apart,
    /// The horizontal axis of the row below serves both.
    SharedAxis,
    /// The same, and the vertical axis jumps over values where nothing happens.
    BrokenAxis,
}

/// One plot with its axes.
#[derive(Clone, Debug)]
pub struct Panel {
    /// Names the panel.
    pub title: String,
    /// Height of the plot, px; kept between 60 and 1200.
    pub plot_height_px: f64,
    /// The horizontal axis.
    pub x: Axis,
    /// The vertical axis.
    pub y: Axis,
    /// A second scale for the horizontal axis.
    pub top: Option<TopAxis>,
    /// Drawn first.
    pub stripes: Vec<Stripe>,
    /// Drawn over the stripes.
    pub areas: Vec<Area>,
    /// Drawn over the areas.
    pub rules: Vec<Rule>,
    /// Drawn last.
    pub curves: Vec<Curve>,
    /// Words at their places.
    pub notes: Vec<Note>,
    /// Entries of the legend that no single curve stands for; they come first.
    pub keys: Vec<Key>,
}

impl Default for Panel {
    fn default() -> Self {
        Self {
            title: String::new(),
            plot_height_px: 300.0,
            x: Axis::default(),
            y: Axis::default(),
            top: None,
            stripes: Vec::new(),
            areas: Vec::new(),
            rules: Vec::new(),
            curves: Vec::new(),
            notes: Vec::new(),
            keys: Vec::new(),
        }
    }
}

/// An axis, its range and what it is called.
#[derive(Clone, Debug, Default)]
pub struct Axis {
    /// What is plotted, in words.
    pub quantity: String,
    /// Its unit; a power of ten is put before it where the numbers need one.
    pub unit: String,
    /// Linear or logarithmic.
    pub scale: Scale,
    /// From and to; where it is not given or has no meaning, all data and a little air.
    pub range: Option<(f64, f64)>,
    /// A value that a range found from the data must hold.
    pub includes: Option<f64>,
    /// Draws a heavy line where this axis is zero.
    pub heavy_zero: bool,
    /// Names at their places instead of numbers; of a vertical axis only.
    pub names: Vec<(f64, String)>,
}

impl Axis {
    /// A linear axis over all data.
    #[must_use]
    pub fn new(quantity: impl Into<String>, unit: impl Into<String>) -> Self {
        Self {
            quantity: quantity.into(),
            unit: unit.into(),
            ..Self::default()
        }
    }

    /// The same over a range of its own.
    #[must_use]
    pub fn over(mut self, from: f64, to: f64) -> Self {
        self.range = Some((from, to));
        self
    }

    /// The same with logarithmic scale.
    #[must_use]
    pub fn logarithmic(mut self) -> Self {
        self.scale = Scale::Logarithmic;
        self
    }
}

/// A scale at the upper edge of a plot that says the horizontal axis in another quantity.
#[derive(Clone, Debug)]
pub struct TopAxis {
    /// What it says, in words.
    pub quantity: String,
    /// Its unit.
    pub unit: String,
    /// Its value at a value of the horizontal axis; continuous and monotone.
    pub of: fn(f64) -> f64,
}

/// A line through points.
#[derive(Clone, Debug)]
pub struct Curve {
    /// What it is.
    pub name: String,
    /// Where its name is written.
    pub naming: Naming,
    /// Points from first to last; the line has a gap where there is no value.
    pub points: Vec<(f64, Option<f64>)>,
    /// Its colour.
    pub ink: Ink,
    /// How the line is broken.
    pub dash: Dash,
    /// Width of the line, px; 0 shows marks only.
    pub width_px: f64,
    /// What is drawn at every point.
    pub mark: Option<Mark>,
}

impl Default for Curve {
    fn default() -> Self {
        Self {
            name: String::new(),
            naming: Naming::Legend,
            points: Vec::new(),
            ink: Ink::Black,
            dash: Dash::Solid,
            width_px: 1.8,
            mark: None,
        }
    }
}

impl Curve {
    /// A solid curve through points that all exist.
    #[must_use]
    pub fn through(name: impl Into<String>, points: impl IntoIterator<Item = (f64, f64)>) -> Self {
        Self {
            name: name.into(),
            points: points.into_iter().map(|(x, y)| (x, Some(y))).collect(),
            ..Self::default()
        }
    }

    /// A profile of pieces, each from one x and y to another, joined by vertical steps.
    #[must_use]
    pub fn steps(
        name: impl Into<String>,
        pieces: impl IntoIterator<Item = ((f64, f64), (f64, f64))>,
    ) -> Self {
        Self::through(name, pieces.into_iter().flat_map(|(from, to)| [from, to]))
    }
}

/// Where the name of a curve is written.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Naming {
    /// In the legend over the plot.
    #[default]
    Legend,
    /// Beside the plot, at the height of the last point.
    AtEnd,
    /// At the highest point in sight.
    AtPeak,
    /// Nowhere.
    Nowhere,
}

/// What lies between two curves.
#[derive(Clone, Debug)]
pub struct Area {
    /// For every x the lower and the upper y; a gap where there are none.
    pub spans: Vec<(f64, Option<(f64, f64)>)>,
    /// Its colour.
    pub ink: Ink,
    /// From 0 (not seen) to 1 (hides what is below).
    pub opacity: f64,
}

/// A part of the horizontal axis, over the whole height of the plot.
#[derive(Clone, Copy, Debug)]
pub struct Stripe {
    /// One end.
    pub from: f64,
    /// The other end.
    pub to: f64,
    /// Its colour.
    pub ink: Ink,
    /// From 0 (not seen) to 1.
    pub opacity: f64,
}

/// A line across the whole plot.
#[derive(Clone, Debug)]
pub struct Rule {
    /// Where, on the axis that it is perpendicular to.
    pub at: Place,
    /// What it means; written beside it.
    pub name: String,
    /// Its colour.
    pub ink: Ink,
    /// How it is broken.
    pub dash: Dash,
    /// Width of the line, px.
    pub width_px: f64,
}

/// A value on one of the axes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Place {
    /// On the horizontal axis.
    X(f64),
    /// On the vertical axis.
    Y(f64),
}

/// A few words about a point.
#[derive(Clone, Debug)]
pub struct Note {
    /// The point.
    pub at: (f64, f64),
    /// The words.
    pub text: String,
    /// Their colour.
    pub ink: Ink,
    /// What marks the point.
    pub mark: Option<Mark>,
    /// Where the words go.
    pub standing: Standing,
}

/// Where the words of a note go. They never overlap others; where there is no room at all they are
/// left out.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Standing {
    /// Inside the plot near the point, on this side if it is free.
    Near(Side),
    /// In a column beside the plot, at the height of the point.
    Beside,
}

/// An entry of the legend.
#[derive(Clone, Debug, Default)]
pub struct Key {
    /// What it explains.
    pub name: String,
    /// Colour of the sample.
    pub ink: Ink,
    /// How the sample line is broken.
    pub dash: Dash,
    /// Width of the sample line, px; 0 for none.
    pub width_px: f64,
    /// Mark on the sample.
    pub mark: Option<Mark>,
    /// Opacity of a sample area; 0 for none.
    pub opacity: f64,
}

/// Heights of plots that stand below each other and show `spans` of one quantity, so that one
/// length means one difference in all of them, together `total_px` high.
///
/// Spans that are not positive count as none; a plot is never lower than 60 px.
#[must_use]
pub fn heights_at_one_scale(spans: &[f64], total_px: f64) -> Vec<f64> {
    let length = |span: f64| {
        if span > 0.0 && span.is_finite() {
            span
        } else {
            0.0
        }
    };
    let sum: f64 = spans.iter().map(|span| length(*span)).sum();
    spans
        .iter()
        .map(|span| {
            if sum > 0.0 {
                total_px * length(*span) / sum
            } else {
                0.0
            }
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_length_means_one_difference() {
        assert_eq!(heights_at_one_scale(&[0.3, 0.1], 400.0), [300.0, 100.0]);
        assert_eq!(heights_at_one_scale(&[f64::NAN, 0.0], 400.0), [0.0, 0.0]);
    }

    #[test]
    fn a_profile_steps_at_shared_ends() {
        let curve = Curve::steps("", [((0.0, 1.0), (2.0, 1.0)), ((2.0, 3.0), (5.0, 4.0))]);
        let points = [(0.0, 1.0), (2.0, 1.0), (2.0, 3.0), (5.0, 4.0)];
        assert_eq!(curve.points, points.map(|(x, y)| (x, Some(y))));
    }
}
