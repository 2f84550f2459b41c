//! The document of `reconcile`.

use super::FORMAT;
use crate::sheet::Stamp;
use crate::sheet::reconcile::{Wafer, assumed, demand};
use serde::Serialize;

#[derive(Serialize)]
struct Document<'a> {
    format: u32,
    stamp: &'a Stamp,
    title: &'a str,
    run: &'a str,
    returned_sha256: &'a str,
    data: Vec<Datum>,
    chi_square: ChiSquare,
    estimate: Vec<Estimate<'a>>,
    correlation: &'a [Vec<f64>],
    undetermined: Vec<Direction<'a>>,
    demanded: Option<String>,
    causes: Vec<Cause<'a>>,
    damping: f64,
    correction: Vec<Correction<'a>>,
    limits: Vec<LimitEntry<'a>>,
    next_is_outside: bool,
    expected_pl_nm: Option<f64>,
    expected_pl_sigma_nm: Option<f64>,
    single_bands_miss_nm: Option<f64>,
    house_offset: HouseOffset<'a>,
    assumed: Vec<String>,
}

#[derive(Serialize)]
struct ChiSquare {
    ordered: f64,
    estimated: f64,
}

#[derive(Serialize)]
struct Datum {
    name: &'static str,
    unit: &'static str,
    measured: f64,
    ordered: f64,
    estimated: f64,
    measurement_sigma: f64,
    sigma: f64,
    deviation_in_sigmas: f64,
}

#[derive(Serialize)]
struct Estimate<'a> {
    name: &'a str,
    ordered: f64,
    value: f64,
    sigma: f64,
    prior_sigma: f64,
    unit: &'static str,
    gives_way: Option<&'static str>,
}

#[derive(Serialize)]
struct Direction<'a> {
    components: Vec<Component<'a>>,
    share_of_prior_left: f64,
}

#[derive(Serialize)]
struct Component<'a> {
    name: &'a str,
    amount: f64,
    unit: &'static str,
}

#[derive(Serialize)]
struct Cause<'a> {
    name: &'a str,
    amount: f64,
    sigma: f64,
    unit: &'static str,
    leaves_in_sigmas: &'a [f64],
    chi_square: f64,
    amount_in_usual_sigmas: f64,
}

#[derive(Serialize)]
struct Correction<'a> {
    name: &'a str,
    ordered: f64,
    order_next: f64,
    change: f64,
    sigma: f64,
    unit: &'static str,
}

/// A figure of strain or thickness as ordered, as grown, and as expected after the correction.
#[derive(Serialize)]
struct LimitEntry<'a> {
    layers: &'a str,
    code: &'static str,
    name: &'static str,
    ordered: Option<f64>,
    grown: Option<f64>,
    next: Option<f64>,
    limit: Option<f64>,
    standing: &'static str,
}

#[derive(Serialize)]
struct HouseOffset<'a> {
    family: &'a str,
    runs: usize,
    offset_mev: f64,
    sigma_mev: f64,
}

/// What was grown as one JSON document. Wavelengths are in vacuum, mismatches positive where
/// compressive.
#[must_use]
pub fn reconcile(wafer: &Wafer<'_>, stamp: &Stamp) -> String {
    let result = wafer.result;
    super::text(&Document {
        format: FORMAT,
        stamp,
        title: &wafer.stack.title,
        run: &wafer.returned.run,
        returned_sha256: wafer.returned_sha256,
        data: result
            .deviations
            .iter()
            .map(|it| Datum {
                name: it.datum.name(),
                unit: it.datum.unit(),
                measured: it.measured,
                ordered: it.ordered,
                estimated: it.estimated,
                measurement_sigma: it.measurement_sigma,
                sigma: it.sigma,
                deviation_in_sigmas: it.in_sigmas(),
            })
            .collect(),
        chi_square: ChiSquare {
            ordered: result.ordered_chi_square,
            estimated: result.estimated_chi_square,
        },
        estimate: result
            .estimates
            .iter()
            .map(|it| Estimate {
                name: &it.name,
                ordered: it.ordered,
                value: it.value,
                sigma: it.sigma,
                prior_sigma: it.prior_sigma,
                unit: it.unit,
                gives_way: it.gives_way,
            })
            .collect(),
        correlation: &result.correlation,
        undetermined: result
            .undetermined
            .iter()
            .map(|it| Direction {
                components: it
                    .components
                    .iter()
                    .map(|(name, amount, unit)| Component {
                        name,
                        amount: *amount,
                        unit,
                    })
                    .collect(),
                share_of_prior_left: it.left,
            })
            .collect(),
        demanded: demand(wafer),
        causes: result
            .causes
            .iter()
            .map(|it| Cause {
                name: &it.name,
                amount: it.amount,
                sigma: it.sigma,
                unit: it.unit,
                leaves_in_sigmas: &it.leaves,
                chi_square: it.chi_square,
                amount_in_usual_sigmas: it.unusual,
            })
            .collect(),
        damping: result.damping,
        correction: result
            .corrections
            .iter()
            .map(|it| Correction {
                name: &it.name,
                ordered: it.ordered,
                order_next: it.ordered + it.change,
                change: it.change,
                sigma: it.sigma,
                unit: it.unit,
            })
            .collect(),
        limits: result
            .limits
            .iter()
            .map(|it| LimitEntry {
                layers: &it.of,
                code: it.code,
                name: it.name,
                ordered: it.ordered,
                grown: it.grown,
                next: it.next,
                limit: it.limit,
                standing: it.standing.word(),
            })
            .collect(),
        next_is_outside: result.next_is_outside(),
        expected_pl_nm: result.expected_pl_nm.map(|(nm, _)| nm),
        expected_pl_sigma_nm: result.expected_pl_nm.map(|(_, sigma)| sigma),
        single_bands_miss_nm: result.followed_miss_nm,
        house_offset: HouseOffset {
            family: &result.offset.family,
            runs: result.offset.runs,
            offset_mev: result.offset.offset_mev,
            sigma_mev: result.offset.sigma_mev,
        },
        assumed: assumed(wafer),
    })
}
