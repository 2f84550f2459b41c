//! What follows for the next order: the correction, and what limits make of it.

use super::{Wafer, amount, size};
use crate::design::{LimitedFigure, Standing};
use crate::sheet::number::{ABSENT, fixed, plain, significant};
use crate::sheet::page::Page;
use crate::sheet::table::{Table, numbers, words};

pub(super) fn corrections(wafer: &Wafer<'_>, page: &mut Page) {
    let result = wafer.result;
    if !result.undetermined.is_empty() || !result.explains_the_data() {
        return;
    }
    page.heading("For the next order");
    if result.corrections.is_empty() {
        page.paragraph(
            2,
            "No correction: every estimate is smaller than its own uncertainty, and to follow it would be \
             to follow noise.",
        );
        return;
    }
    let mut table = Table::new([
        words("change"),
        numbers("ordered"),
        numbers("order next"),
        numbers("change"),
        numbers("sigma"),
    ]);
    for it in &result.corrections {
        table.row([
            it.name.clone(),
            size(it.ordered, it.unit),
            size(it.ordered + it.change, it.unit),
            amount(it.change, it.unit),
            size(it.sigma, it.unit),
        ]);
    }
    page.table(&table);
    page.paragraph(
        2,
        &format!(
            "{} % of the estimate (--damping), so that noise is not chased.",
            plain(100.0 * result.damping)
        ),
    );
    if !result.silent.is_empty() {
        page.paragraph(
            2,
            &format!(
                "{}: left alone, the estimate is smaller than its uncertainty.",
                result.silent.join(", ")
            ),
        );
    }
    if let Some((nm, sigma)) = result.expected_pl_nm {
        page.paragraph(
            2,
            &format!(
                "Photoluminescence is then expected at {} ± {} nm in vacuum on the same bench.",
                fixed(nm, 2),
                significant(sigma, 2)
            ),
        );
    }
}

/// Strain and thickness of the order, of the wafer that came back, and of the one to be expected.
pub(super) fn limits(wafer: &Wafer<'_>, page: &mut Page) {
    let figures = &wafer.result.limits;
    if figures.is_empty() {
        return;
    }
    let is_corrected = figures.iter().any(|it| it.next.is_some());
    page.heading(if is_corrected {
        "Limits after the correction"
    } else {
        "Limits of what was grown"
    });
    let mut table = Table::new([
        words("layers"),
        words("figure"),
        numbers("ordered"),
        numbers("grown"),
        numbers("next"),
        numbers("limit"),
        words("stands"),
    ]);
    for it in figures {
        table.row([
            it.of.clone(),
            figure(it).to_owned(),
            number(it, it.ordered),
            number(it, it.grown),
            number(it, it.next),
            limit(it),
            it.standing.word().to_owned(),
        ]);
    }
    page.table(&table);
    let verdict = match worst(figures) {
        Standing::Outside if is_corrected => {
            "It is outside: take a smaller step (--damping), another knob, or another design."
        }
        Standing::Outside => "What was grown is outside.",
        Standing::Noted => "Over force balance, under energy balance: ask the grower.",
        _ if figures.iter().any(|it| it.limit.is_some()) => "No limit is broken.",
        _ => "The file has no [limits] to hold them against; no critical thickness is exceeded.",
    };
    let next = if is_corrected {
        "Next: the wafer to be expected after the correction. "
    } else {
        ""
    };
    page.paragraph(2, &format!("{next}{verdict}"));
}

fn worst(figures: &[LimitedFigure]) -> Standing {
    let standings = figures.iter().map(|it| it.standing);
    standings.max().unwrap_or(Standing::Stated)
}

/// Name and unit of a figure.
fn figure(it: &LimitedFigure) -> &'static str {
    match it.name {
        "strain_percent" => "strain, %",
        "mean_strain_percent" => "mean strain, %",
        "strain_thickness_percent_nm" => "strain × nm, %",
        "critical_share" => "of critical, %",
        "thickness_nm" => "thickness, nm",
        other => other,
    }
}

fn number(it: &LimitedFigure, value: Option<f64>) -> String {
    match value {
        None => ABSENT.to_owned(),
        Some(value) if !value.is_finite() => "none".to_owned(),
        Some(value) if it.name == "critical_share" => significant(100.0 * value, 3),
        Some(value) => significant(value, 3),
    }
}

fn limit(it: &LimitedFigure) -> String {
    let side = if it.name == "thickness_nm" {
        "≥"
    } else {
        "≤"
    };
    it.limit.map_or(ABSENT.to_owned(), |most| {
        let shown = if it.name == "critical_share" {
            100.0 * most
        } else {
            most
        };
        format!("{side} {}", plain(shown))
    })
}
