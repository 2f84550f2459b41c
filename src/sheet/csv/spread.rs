//! The tables of `spread`.

use super::{Cell, CsvTable};
use crate::design::Spread;

/// The tables of `spread`; the first is the principal one.
#[must_use]
pub fn spread(spread: &Spread) -> Vec<CsvTable> {
    let quantiles = spread.quantiles.iter().map(|&(share, nm)| row![share, nm]);
    vec![
        sensitivities(spread),
        histogram(spread),
        CsvTable::of_rows("quantiles", &["share_of_wafers", "below_nm"], quantiles),
        yields(spread),
        layers(spread),
    ]
}

fn sensitivities(spread: &Spread) -> CsvTable {
    let heads = [
        "variable",
        "sigma",
        "unit",
        "nm_per_sigma",
        "variance_share",
    ];
    let rows = spread.sensitivities.iter().map(|sensitivity| {
        let variable = sensitivity.variable;
        row![
            variable.cause.name(),
            variable.sigma,
            variable.cause.unit(),
            sensitivity.nm,
            sensitivity.share,
        ]
    });
    CsvTable::of_rows("sensitivities", &heads, rows)
}

fn histogram(spread: &Spread) -> CsvTable {
    let bars = &spread.histogram;
    let edge = |bar: usize| bars.from_nm + bars.width_nm * bar as f64;
    let rows = bars
        .counts
        .iter()
        .enumerate()
        .map(|(bar, &count)| row![edge(bar), edge(bar + 1), count]);
    CsvTable::of_rows("histogram", &["from_nm", "to_nm", "wafers"], rows)
}

fn yields(spread: &Spread) -> CsvTable {
    let heads = [
        "target_nm",
        "tolerance_nm",
        "sampled",
        "standard_error",
        "linear",
        "centred",
        "with_model_error",
    ];
    let rows = spread.good.iter().map(|good| {
        row![
            good.target_nm,
            good.tolerance_nm,
            good.sampled,
            good.standard_error,
            good.linear,
            good.centred,
            good.with_model,
        ]
    });
    CsvTable::of_rows("yield", &heads, rows)
}

fn layers(spread: &Spread) -> CsvTable {
    let rows = spread
        .layers
        .iter()
        .map(|layer| row![layer.name.as_str(), layer.value, layer.sigma, layer.unit,]);
    CsvTable::of_rows("layers", &["figure", "value", "sigma", "unit"], rows)
}
