//! The tables of `spread`.

use super::{Cell, CsvTable};
use crate::design::Spread;

/// The tables of `spread`; the first is the principal one.
#[must_use]
pub fn spread(spread: &Spread) -> Vec<CsvTable> {
    let mut sensitivities = CsvTable::new(
        "sensitivities",
        &[
            "variable",
            "sigma",
            "unit",
            "nm_per_sigma",
            "variance_share",
        ],
    );
    for sensitivity in &spread.sensitivities {
        let variable = sensitivity.variable;
        sensitivities.rows.push(row![
            variable.cause.name(),
            variable.sigma,
            variable.cause.unit(),
            sensitivity.nm,
            sensitivity.share,
        ]);
    }
    let mut histogram = CsvTable::new("histogram", &["from_nm", "to_nm", "wafers"]);
    let bars = &spread.histogram;
    for (bar, &count) in bars.counts.iter().enumerate() {
        let edge = |bar: usize| bars.from_nm + bars.width_nm * bar as f64;
        histogram.rows.push(row![edge(bar), edge(bar + 1), count]);
    }
    let mut quantiles = CsvTable::new("quantiles", &["share_of_wafers", "below_nm"]);
    for &(share, nm) in &spread.quantiles {
        quantiles.rows.push(row![share, nm]);
    }
    let mut yields = CsvTable::new(
        "yield",
        &[
            "target_nm",
            "tolerance_nm",
            "sampled",
            "standard_error",
            "linear",
            "centred",
            "with_model_error",
        ],
    );
    if let Some(good) = spread.good {
        yields.rows.push(row![
            good.target_nm,
            good.tolerance_nm,
            good.sampled,
            good.standard_error,
            good.linear,
            good.centred,
            good.with_model,
        ]);
    }
    let mut layers = CsvTable::new("layers", &["figure", "value", "sigma", "unit"]);
    for layer in &spread.layers {
        layers.rows.push(row![
            layer.name.as_str(),
            layer.value,
            layer.sigma,
            layer.unit
        ]);
    }
    vec![sensitivities, histogram, quantiles, yields, layers]
}
