//! The tables of `reconcile`.

use super::{Cell, CsvTable};
use crate::design::Reconciliation;

/// The tables of `reconcile`; the first is the principal one.
#[must_use]
pub fn reconcile(result: &Reconciliation) -> Vec<CsvTable> {
    let mut estimate = CsvTable::new(
        "estimate",
        &[
            "name",
            "ordered",
            "value",
            "sigma",
            "prior_sigma",
            "unit",
            "gives_way",
        ],
    );
    for it in &result.estimates {
        estimate.rows.push(row![
            it.name.as_str(),
            it.ordered,
            it.value,
            it.sigma,
            it.prior_sigma,
            it.unit,
            it.gives_way,
        ]);
    }
    let mut data = CsvTable::new(
        "data",
        &[
            "datum",
            "unit",
            "measured",
            "ordered",
            "estimated",
            "measurement_sigma",
            "sigma",
        ],
    );
    for it in &result.deviations {
        data.rows.push(row![
            it.datum.name(),
            it.datum.unit(),
            it.measured,
            it.ordered,
            it.estimated,
            it.measurement_sigma,
            it.sigma,
        ]);
    }
    let mut correlation = CsvTable::new("correlation", &["one", "other", "correlation"]);
    for (one, row) in result.estimates.iter().zip(&result.correlation) {
        for (other, value) in result.estimates.iter().zip(row) {
            correlation
                .rows
                .push(row![one.name.as_str(), other.name.as_str(), *value]);
        }
    }
    let mut causes = CsvTable::new(
        "causes",
        &[
            "cause",
            "amount",
            "sigma",
            "unit",
            "chi_square",
            "usual_sigmas",
        ],
    );
    for it in &result.causes {
        causes.rows.push(row![
            it.name.as_str(),
            it.amount,
            it.sigma,
            it.unit,
            it.chi_square,
            it.unusual,
        ]);
    }
    let mut corrections = CsvTable::new("correction", &["name", "change", "sigma", "unit"]);
    for it in &result.corrections {
        corrections
            .rows
            .push(row![it.name.as_str(), it.change, it.sigma, it.unit]);
    }
    vec![estimate, data, correlation, causes, corrections]
}
