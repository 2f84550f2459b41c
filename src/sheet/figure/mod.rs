//! Figures: panels of curves, profiles and areas with their axes and names, as SVG documents.
//!
//! A [`Figure`] says what is shown, in the units of its axes. [`Figure::svg`] gives every line and
//! every word its place and writes the document; [`Figure::layout`] tells the places. Texts are
//! measured with a table of glyph widths, so that nothing leaves its box whatever font the reader
//! has; colours differ in lightness and curves in dash and name, so that a grey print and a
//! colour-blind reader lose nothing. The same figure gives the same bytes on every machine.
//!
//! Data that have no place (not a number, infinite, not positive on a logarithmic axis) leave
//! gaps; no data is an empty plot.
//!
//! ```
//! use stepwell::sheet::figure::{Axis, Curve, Figure, Panel, Row};
//!
//! let parabola = (-10..=10).map(|i| f64::from(i) * 0.1).map(|k| (k, k * k));
//! let panel = Panel {
//!     x: Axis::new("in-plane wave number", "nm⁻¹"),
//!     y: Axis::new("energy", "eV"),
//!     curves: vec![Curve::through("e1", parabola)],
//!     ..Panel::default()
//! };
//! let figure = Figure {
//!     title: "Dispersion".to_owned(),
//!     rows: vec![Row { panels: vec![panel], ..Row::default() }],
//!     ..Figure::default()
//! };
//! assert!(figure.svg().starts_with("<svg"));
//! ```

mod arrangement;
mod axes;
mod axis;
mod clipping;
mod glyphs;
mod legend;
mod lettering;
mod numerals;
mod palette;
mod panel;
mod placing;
mod plot;
mod scene;
mod svg;
#[cfg(test)]
pub(crate) mod tests;

pub(crate) use glyphs::{Level, SCRIPT_SIZE, Weight, set};
pub(crate) use palette::Rgb;
pub use panel::{
    Area, Axis, Curve, Dash, Figure, Ink, Joint, Key, Mark, Naming, Note, Panel, Place, Row, Rule,
    Scale, Side, Standing, Stripe, TopAxis, heights_at_one_scale,
};
pub(crate) use scene::{Anchor, Scene, Shape, Text};
pub use scene::{Frame, Layout, PlacedText, Purpose, Rectangle};
pub(crate) use svg::lift;

impl Figure {
    /// The figure as a self-contained SVG document, 900 px wide.
    #[must_use]
    pub fn svg(&self) -> String {
        let title = lettering::tidy(&self.title);
        let description = lettering::tidy(&self.description);
        svg::document(&arrangement::scene(self), &title, &description)
    }

    /// Everything in its place, for other writers than that of SVG.
    pub(crate) fn scene(&self) -> Scene {
        arrangement::scene(self)
    }

    /// Where the panels and the texts lie.
    #[must_use]
    pub fn layout(&self) -> Layout {
        Layout::from(&arrangement::scene(self))
    }
}
