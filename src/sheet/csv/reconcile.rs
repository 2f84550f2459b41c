//! The tables of `reconcile`.

use super::{Cell, CsvTable};
use crate::design::Reconciliation;

/// The tables of `reconcile`; the first is the principal one.
#[must_use]
pub fn reconcile(result: &Reconciliation) -> Vec<CsvTable> {
    vec![
        estimate(result),
        data(result),
        correlation(result),
        causes(result),
        correction(result),
        limits(result),
    ]
}

fn estimate(result: &Reconciliation) -> CsvTable {
    let heads = [
        "name",
        "ordered",
        "value",
        "sigma",
        "prior_sigma",
        "unit",
        "gives_way",
    ];
    let rows = result.estimates.iter().map(|it| {
        row![
            it.name.as_str(),
            it.ordered,
            it.value,
            it.sigma,
            it.prior_sigma,
            it.unit,
            it.gives_way,
        ]
    });
    CsvTable::of_rows("estimate", &heads, rows)
}

fn data(result: &Reconciliation) -> CsvTable {
    let heads = [
        "datum",
        "unit",
        "measured",
        "ordered",
        "estimated",
        "measurement_sigma",
        "sigma",
    ];
    let rows = result.deviations.iter().map(|it| {
        row![
            it.datum.name(),
            it.datum.unit(),
            it.measured,
            it.ordered,
            it.estimated,
            it.measurement_sigma,
            it.sigma,
        ]
    });
    CsvTable::of_rows("data", &heads, rows)
}

fn correlation(result: &Reconciliation) -> CsvTable {
    let names = || result.estimates.iter().map(|it| it.name.as_str());
    let rows = names().zip(&result.correlation).flat_map(|(one, row)| {
        names()
            .zip(row)
            .map(move |(other, value)| row![one, other, *value])
    });
    CsvTable::of_rows("correlation", &["one", "other", "correlation"], rows)
}

fn causes(result: &Reconciliation) -> CsvTable {
    let heads = [
        "cause",
        "amount",
        "sigma",
        "unit",
        "chi_square",
        "usual_sigmas",
    ];
    let rows = result.causes.iter().map(|it| {
        row![
            it.name.as_str(),
            it.amount,
            it.sigma,
            it.unit,
            it.chi_square,
            it.unusual,
        ]
    });
    CsvTable::of_rows("causes", &heads, rows)
}

fn correction(result: &Reconciliation) -> CsvTable {
    let heads = ["name", "ordered", "order_next", "change", "sigma", "unit"];
    let rows = result.corrections.iter().map(|it| {
        row![
            it.name.as_str(),
            it.ordered,
            it.ordered + it.change,
            it.change,
            it.sigma,
            it.unit,
        ]
    });
    CsvTable::of_rows("correction", &heads, rows)
}

fn limits(result: &Reconciliation) -> CsvTable {
    let heads = [
        "layers", "figure", "ordered", "grown", "next", "limit", "stands",
    ];
    let rows = result.limits.iter().map(|it| {
        row![
            it.of.as_str(),
            it.name,
            it.ordered,
            it.grown,
            it.next,
            it.limit,
            it.standing.word(),
        ]
    });
    CsvTable::of_rows("limits", &heads, rows)
}
