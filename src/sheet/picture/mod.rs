//! The records of `levels` and `spectrum` as figures.
//!
//! What is told apart by colour is told apart by dash, mark or name as well: heavy holes are solid
//! and light ones dashed, TE gain is solid and TM dashed, densities are written at their curves.

mod arrow;
mod bands;
mod bundle;
mod chart;
mod dispersion;
mod gain;
mod growth;
mod rocking;
mod spectra;
#[cfg(test)]
mod tests;
mod weigh;

pub use bands::levels_figure;
pub use chart::chart_figure;
pub use rocking::rocking_figure;
pub use spectra::spectrum_figure;
pub use weigh::weigh_figure;

use super::figure::{Dash, Ink, Key};
use super::stamp::Stamp;

/// Characters of a checksum that tell two inputs apart well enough on a picture; the whole of it
/// stands in the pages and tables.
const SHORT_SUM: usize = 12;

/// What levels and edges are of.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Kind {
    Electron,
    Heavy,
    Light,
    SplitOff,
}

impl Kind {
    fn ink(self) -> Ink {
        match self {
            Self::Electron => Ink::Colour(0),
            Self::Heavy => Ink::Colour(1),
            Self::Light => Ink::Colour(4),
            Self::SplitOff => Ink::Colour(3),
        }
    }

    fn dash(self) -> Dash {
        match self {
            Self::Electron | Self::Heavy => Dash::Solid,
            Self::Light => Dash::Dashed,
            Self::SplitOff => Dash::Dotted,
        }
    }

    /// Its name in a label.
    fn word(self) -> &'static str {
        match self {
            Self::Electron => "e",
            Self::Heavy => "hh",
            Self::Light => "lh",
            Self::SplitOff => "so",
        }
    }
}

/// An entry of a legend with a sample of a line.
fn line_key(name: impl Into<String>, ink: Ink, dash: Dash) -> Key {
    Key {
        name: name.into(),
        ink,
        dash,
        width_px: 2.0,
        ..Key::default()
    }
}

/// An entry of a legend that is words only.
fn word_key(name: impl Into<String>) -> Key {
    Key {
        name: name.into(),
        ..Key::default()
    }
}

/// The stamp with short checksums: a figure is looked at, a table is compared.
pub(super) fn short_stamp(stamp: &Stamp) -> String {
    let short = |sum: &str| sum.chars().take(SHORT_SUM).collect::<String>();
    let mut parts = vec![stamp.program.clone()];
    parts.extend(
        stamp
            .input_sha256
            .as_deref()
            .map(|sum| format!("input {}", short(sum))),
    );
    parts.push(format!(
        "parameters {} ({})",
        short(&stamp.parameters_sha256),
        stamp.parameter_files.join(" + ")
    ));
    parts.extend(stamp.words());
    parts.join(" · ")
}
