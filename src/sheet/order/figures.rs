//! The figures of a sheet: the same in page, PDF and file.

use crate::design::{House, Ordered};
use crate::sheet::figure::Figure;
use crate::sheet::picture::{levels_figure, rocking_figure, spectrum_figure};
use crate::sheet::spread::spread_figure;
use crate::sheet::stamp::Stamp;
use crate::structure::Stack;

/// The figures of a sheet, by their numbers; some are missing where there is nothing to draw.
#[derive(Clone, Debug, Default)]
pub struct Figures {
    list: Vec<Option<(&'static str, Figure)>>,
}

impl Figures {
    /// What both copies show: the rocking curve to be measured.
    #[must_use]
    pub fn of_wafer(ordered: &Ordered, parameters: &Stamp) -> Self {
        let rocking = ordered.targets.xray.as_ref().ok().map(|xray| {
            let curve = xray.seen.rocking_curve();
            let figure = rocking_figure(&ordered.wafer, &xray.seen, &curve, parameters);
            ("rocking-curve", figure)
        });
        Self {
            list: vec![rocking],
        }
    }

    /// Adds what the house sees besides: band edges with levels, spectra, and how wafers scatter.
    pub fn add_house(&mut self, stack: &Stack, house: &House<'_>, stamp: &Stamp) {
        let evaluation = house.evaluation.as_ref().ok();
        let spectrum = house.spectrum.as_ref().and_then(|it| it.as_ref().ok());
        self.list
            .push(evaluation.map(|it| ("levels", levels_figure(it, stamp))));
        self.list
            .push(evaluation.zip(spectrum).map(|(evaluation, spectrum)| {
                ("spectrum", spectrum_figure(evaluation, spectrum, stamp))
            }));
        let spread = house.spread.as_ref().ok();
        self.list
            .push(spread.map(|it| ("spread", spread_figure(stack, it, stamp))));
    }

    /// The figure of a number.
    pub(super) fn get(&self, number: usize) -> Option<&Figure> {
        self.list.get(number)?.as_ref().map(|(_, figure)| figure)
    }

    /// How many there are, the missing ones among them.
    pub(super) fn count(&self) -> usize {
        self.list.len()
    }

    /// Every figure as a file: name and SVG document.
    #[must_use]
    pub fn files(&self) -> Vec<(String, String)> {
        let drawn = self.list.iter().flatten();
        drawn
            .map(|(name, figure)| (format!("{name}.svg"), figure.svg()))
            .collect()
    }
}
