//! The page of the command `chart`.

use super::aim::{range_words, value_words};
use super::number::{ABSENT, plain, power, significant, temperature};
use super::page::Page;
use super::stamp::Stamp;
use crate::design::{Aim, Chart, ChartFigure, ChartPoint};
use crate::source::Colour;
use crate::structure::Wavelength;
use std::ops::Range;

/// What a figure is called, and its unit.
pub(super) fn name_and_unit(figure: ChartFigure) -> (&'static str, &'static str) {
    match figure {
        ChartFigure::Wavelength(Wavelength::Transition) => ("first transition", "nm"),
        ChartFigure::Wavelength(Wavelength::Photoluminescence) => ("photoluminescence peak", "nm"),
        ChartFigure::Wavelength(Wavelength::Gain) => ("gain peak", "nm"),
        ChartFigure::PeakGain => ("peak gain", "cm⁻¹"),
        ChartFigure::Transparency => ("transparency density", "cm⁻³"),
        ChartFigure::PolarisationDifference => ("TE less TM peak gain", "cm⁻¹"),
        ChartFigure::Strain => ("strain of the well (tensile positive)", "%"),
        ChartFigure::CriticalShare => ("share of the critical thickness, grown over", ""),
    }
}

/// A value of a figure as text.
pub(super) fn value(figure: ChartFigure, value: f64) -> String {
    match figure {
        ChartFigure::Transparency => power(value, 3),
        ChartFigure::Wavelength(_) => plain((10.0 * value).round() / 10.0),
        _ => significant(value, 4),
    }
}

/// What a chart found, as text of 80 columns: the numbers themselves are for a file or a figure.
#[must_use]
pub fn chart(
    chart: &Chart<'_>,
    points: &[ChartPoint],
    aim: Option<&Aim>,
    stamp: &Stamp,
    colour: Colour,
) -> String {
    let (name, unit) = name_and_unit(chart.figure);
    let stack = chart.variation.stack;
    let mut page = Page::new(colour);
    page.heading(&stack.title);
    page.paragraph(
        2,
        &format!("{name}, {}", temperature(stack.operation.temperature_k)),
    );
    page.gap();
    for (word, moved, count) in [
        ("across", &chart.variation.moves[0], chart.points.0),
        ("up", &chart.variation.moves[1], chart.points.1),
    ] {
        page.pair(word, &format!("{}, {count} points", range_words(moved)));
    }
    for sentence in chart.variation.giving_way() {
        page.pair("", &sentence);
    }
    let values = || {
        points
            .iter()
            .filter_map(|point| point.value)
            .filter(|it| it.is_finite())
    };
    let seen = values().count();
    page.pair(
        "points",
        &format!("{seen} of {} have a value", points.len()),
    );
    if seen > 0 {
        let low = values().fold(f64::INFINITY, f64::min);
        let high = values().fold(f64::NEG_INFINITY, f64::max);
        let range = format!(
            "from {} to {} {unit}",
            value(chart.figure, low),
            value(chart.figure, high)
        );
        page.pair("values", range.trim_end());
    }
    if let Some(aim) = aim {
        let vacuum_nm = aim.vacuum_nm();
        let met = points
            .iter()
            .filter_map(|point| point.wavelength_nm)
            .fold((false, false), |(below, above), nm| {
                (below || nm <= vacuum_nm, above || nm >= vacuum_nm)
            });
        let words = if met == (true, true) {
            "runs through the chart"
        } else {
            "lies outside the chart"
        };
        page.pair(
            "target",
            &format!(
                "{} {} nm in {} {words}",
                aim.kind.meaning(),
                plain(aim.wavelength_nm),
                aim.medium.word()
            ),
        );
    }
    let present: Vec<String> = chart
        .variation
        .moves
        .iter()
        .zip(chart.variation.present())
        .map(|(moved, value)| {
            if value.is_finite() {
                format!("{} {}", moved.key(), value_words(moved, value))
            } else {
                ABSENT.to_owned()
            }
        })
        .collect();
    page.pair("the file's own point", &present.join(", "));
    stamp.write(&mut page);
    page.finish()
}

/// What is said of a part of a chart.
#[must_use]
pub fn chart_part(
    chart: &Chart<'_>,
    (part, parts): (usize, usize),
    range: &Range<usize>,
) -> String {
    format!(
        "part {part} of {parts}: points {} to {} of {}\n",
        range.start + 1,
        range.end,
        chart.count()
    )
}
