//! The document of `spread`.

use super::FORMAT;
use crate::design::{Cause, Solving, Spread};
use crate::sheet::Stamp;
use crate::structure::{Bands, Stack};
use serde::Serialize;
use std::collections::BTreeMap;

#[derive(Serialize)]
struct Document<'a> {
    format: u32,
    stamp: &'a Stamp,
    title: &'a str,
    temperature_k: f64,
    kind: &'static str,
    seed: u64,
    draws: usize,
    nominal_nm: f64,
    linear: Moments,
    sampled: Sampled,
    #[serde(rename = "yield")]
    good: Option<Yield>,
    wanted: Option<Wanted>,
    sensitivities: Vec<Sensitivity>,
    layers: Vec<Layer<'a>>,
    histogram: Histogram<'a>,
    model_sigma_nm: f64,
    surrogate: Option<Surrogate>,
    lost: usize,
}

#[derive(Serialize)]
struct Moments {
    mean_nm: f64,
    sigma_nm: f64,
}

#[derive(Serialize)]
struct Sampled {
    mean_nm: f64,
    sigma_nm: f64,
    /// Keys are per cent.
    quantiles: BTreeMap<String, f64>,
}

#[derive(Serialize)]
struct Yield {
    target_nm: f64,
    tolerance_nm: f64,
    sampled: f64,
    standard_error: f64,
    linear: f64,
    centred: f64,
    with_model_error: f64,
}

#[derive(Serialize)]
struct Wanted {
    #[serde(rename = "yield")]
    share: f64,
    factor: Option<f64>,
    sigma_nm: Option<f64>,
    factor_if_centred: Option<f64>,
}

#[derive(Serialize)]
struct Sensitivity {
    variable: String,
    sigma: f64,
    unit: &'static str,
    nm: f64,
    variance_share: f64,
}

#[derive(Serialize)]
struct Layer<'a> {
    name: &'a str,
    value: f64,
    sigma: f64,
    unit: &'static str,
}

#[derive(Serialize)]
struct Histogram<'a> {
    from_nm: f64,
    width_nm: f64,
    counts: &'a [usize],
}

#[derive(Serialize)]
struct Surrogate {
    law: &'static str,
    /// Of the structures that the law runs through.
    bands: &'static str,
    solved: usize,
    checked: usize,
    unsolved: usize,
    miss_rms_nm: f64,
    miss_worst_nm: f64,
}

/// A spread as one JSON document. Wavelengths are in vacuum.
#[must_use]
pub fn spread(stack: &Stack, spread: &Spread, stamp: &Stamp) -> String {
    super::text(&Document {
        format: FORMAT,
        stamp,
        title: &stack.title,
        temperature_k: stack.operation.temperature_k,
        kind: spread.request.kind.word(),
        seed: spread.request.seed,
        draws: spread.request.draws,
        nominal_nm: spread.nominal_nm,
        linear: Moments {
            mean_nm: spread.linear.mean_nm,
            sigma_nm: spread.linear.sigma_nm,
        },
        sampled: Sampled {
            mean_nm: spread.sampled.mean_nm,
            sigma_nm: spread.sampled.sigma_nm,
            quantiles: spread
                .quantiles
                .iter()
                .map(|(share, nm)| (format!("{:02}", 100.0 * share), *nm))
                .collect(),
        },
        good: spread.good.map(|good| Yield {
            target_nm: good.target_nm,
            tolerance_nm: good.tolerance_nm,
            sampled: good.sampled,
            standard_error: good.standard_error,
            linear: good.linear,
            centred: good.centred,
            with_model_error: good.with_model,
        }),
        wanted: spread.wanted.map(|wanted| Wanted {
            share: wanted.share,
            factor: wanted.factor,
            sigma_nm: wanted.sigma_nm,
            factor_if_centred: wanted.factor_if_centred,
        }),
        sensitivities: spread
            .sensitivities
            .iter()
            .map(|sensitivity| Sensitivity {
                variable: key(sensitivity.variable.cause),
                sigma: sensitivity.variable.sigma,
                unit: sensitivity.variable.cause.unit(),
                nm: sensitivity.nm,
                variance_share: sensitivity.share,
            })
            .collect(),
        layers: spread
            .layers
            .iter()
            .map(|layer| Layer {
                name: &layer.name,
                value: layer.value,
                sigma: layer.sigma,
                unit: layer.unit,
            })
            .collect(),
        histogram: Histogram {
            from_nm: spread.histogram.from_nm,
            width_nm: spread.histogram.width_nm,
            counts: &spread.histogram.counts,
        },
        model_sigma_nm: spread.request.model_nm,
        surrogate: spread.miss.map(|miss| Surrogate {
            law: match spread.request.solving {
                Solving::Quadratic => "quadratic",
                Solving::EachWafer => "none",
            },
            bands: Bands::Single.word(),
            solved: miss.solved,
            checked: miss.checked,
            unsolved: miss.unsolved,
            miss_rms_nm: miss.rms_nm,
            miss_worst_nm: miss.worst_nm,
        }),
        lost: spread.lost,
    })
}

/// The key of `[growth]` that a variable comes from.
pub(in crate::sheet) fn key(cause: Cause) -> String {
    match cause {
        Cause::Rate => "rate".to_owned(),
        Cause::Flux(element) => format!("flux.{}", element.symbol()),
        Cause::GroupV => "group_v".to_owned(),
        Cause::Temperature => "temperature".to_owned(),
    }
}
