//! The documents of `aim`, `chart` and `weigh`.

use super::FORMAT;
use crate::coherence::LayerStrain;
use crate::design::{
    Aim, Chart, ChartPoint, Equal, FiguresOfMerit, Outcome, Solution, Variation, Weighed,
};
use crate::sheet::Stamp;
use crate::sheet::aim::bindings;
use crate::sheet::weigh::rows;
use serde::Serialize;
use serde_json::{Map, Value, json};

#[derive(Serialize)]
struct AimDocument<'a> {
    format: u32,
    stamp: &'a Stamp,
    title: &'a str,
    target: TargetEntry,
    moved: Vec<String>,
    giving_way: Vec<String>,
    solutions: Vec<SolutionEntry<'a>>,
    nearest: Option<NearestEntry>,
    jumps: usize,
    unsaid: usize,
}

#[derive(Serialize)]
struct TargetEntry {
    kind: &'static str,
    wavelength_nm: f64,
    medium: &'static str,
    temperature_k: f64,
    density_cm3: f64,
}

#[derive(Serialize)]
struct SolutionEntry<'a> {
    values: Map<String, Value>,
    line: Option<usize>,
    wavelength_nm: f64,
    figures: FiguresEntry<'a>,
    structure: &'a str,
}

#[derive(Serialize)]
struct FiguresEntry<'a> {
    peak_gain_cm: Option<f64>,
    polarization: Option<&'static str>,
    gain_peak_nm: Option<f64>,
    transparency_cm3: Option<f64>,
    electron_barrier_kt: Option<f64>,
    hole_barrier_kt: Option<f64>,
    well: Option<WellEntry>,
    stack_critical_share: Option<f64>,
    nm_per_percent_width: Option<f64>,
    nm_per_k: Option<f64>,
    nm_per_thousandth: Vec<ShareEntry>,
    limits_broken: &'a [&'static str],
}

#[derive(Serialize)]
struct WellEntry {
    thickness_nm: f64,
    strain_percent: f64,
    strain: &'static str,
    critical_free_nm: Option<f64>,
    critical_buried_nm: Option<f64>,
    critical_share: Option<f64>,
}

#[derive(Serialize)]
struct ShareEntry {
    element: &'static str,
    at_expense_of: &'static str,
    nm: f64,
}

#[derive(Serialize)]
struct NearestEntry {
    values: Map<String, Value>,
    wavelength_nm: f64,
    miss_nm: f64,
    binds: Vec<String>,
}

/// Solutions of an aim as one JSON document.
#[must_use]
pub fn aim(variation: &Variation<'_>, aim: &Aim, outcome: &Outcome, stamp: &Stamp) -> String {
    let operation = &variation.stack.operation;
    super::text(&AimDocument {
        format: FORMAT,
        stamp,
        title: &variation.stack.title,
        target: TargetEntry {
            kind: aim.kind.word(),
            wavelength_nm: aim.wavelength_nm,
            medium: aim.medium.word(),
            temperature_k: operation.temperature_k,
            density_cm3: operation.working_density_cm3,
        },
        moved: variation.moves.iter().map(|it| it.key()).collect(),
        giving_way: variation.giving_way(),
        solutions: outcome
            .solutions
            .iter()
            .map(|solution| SolutionEntry::new(variation, solution))
            .collect(),
        nearest: outcome.nearest.as_ref().map(|nearest| NearestEntry {
            values: values(variation, &nearest.values),
            wavelength_nm: nearest.wavelength_nm,
            miss_nm: nearest.miss_nm,
            binds: bindings(variation, nearest),
        }),
        jumps: outcome.jumps,
        unsaid: outcome.unsaid,
    })
}

/// Values of the moves under their keys.
fn values(variation: &Variation<'_>, values: &[f64]) -> Map<String, Value> {
    variation
        .moves
        .iter()
        .zip(values)
        .map(|(moved, &value)| (moved.key(), json!(moved.said(value))))
        .collect()
}

impl<'a> SolutionEntry<'a> {
    fn new(variation: &Variation<'_>, solution: &'a Solution) -> Self {
        Self {
            values: values(variation, &solution.values),
            line: (solution.line > 0).then_some(solution.line),
            wavelength_nm: solution.wavelength_nm,
            figures: FiguresEntry::from(&solution.figures),
            structure: &solution.text,
        }
    }
}

impl<'a> From<&'a FiguresOfMerit> for FiguresEntry<'a> {
    fn from(figures: &'a FiguresOfMerit) -> Self {
        Self {
            peak_gain_cm: figures.gain.map(|(_, peak)| peak.gain_cm),
            polarization: figures.gain.map(|(polarisation, _)| polarisation),
            gain_peak_nm: figures.gain.map(|(_, peak)| peak.peak_nm),
            transparency_cm3: figures.transparency_cm3,
            electron_barrier_kt: figures.electron_barrier_kt,
            hole_barrier_kt: figures.hole_barrier_kt,
            well: figures.well.as_ref().map(WellEntry::from),
            stack_critical_share: figures.stack_critical_share.filter(|it| it.is_finite()),
            nm_per_percent_width: figures.nm_per_percent_width,
            nm_per_k: figures.nm_per_k,
            nm_per_thousandth: figures
                .shares
                .iter()
                .map(|share| ShareEntry {
                    element: share.element.symbol(),
                    at_expense_of: share.at_expense_of.symbol(),
                    nm: share.nm_per_thousandth,
                })
                .collect(),
            limits_broken: &figures.broken_limits,
        }
    }
}

impl From<&LayerStrain> for WellEntry {
    fn from(well: &LayerStrain) -> Self {
        Self {
            thickness_nm: well.thickness_nm,
            strain_percent: well.mismatch.strain_percent(),
            strain: well.mismatch.sense().word(),
            critical_free_nm: well.critical.overlayer.thickness_nm(),
            critical_buried_nm: well.critical.buried.thickness_nm(),
            critical_share: Some(well.critical_share()).filter(|it| it.is_finite()),
        }
    }
}

#[derive(Serialize)]
struct ChartDocument<'a> {
    format: u32,
    stamp: &'a Stamp,
    title: &'a str,
    temperature_k: f64,
    across: AxisEntry,
    up: AxisEntry,
    figure: &'static str,
    target: Option<&'static str>,
    points: PointsEntry,
}

#[derive(Serialize)]
struct AxisEntry {
    name: String,
    values: Vec<f64>,
    present: Option<f64>,
}

/// Lists over all points, row by row from the lowest, each row from the left.
#[derive(Serialize)]
struct PointsEntry {
    value: Vec<Option<f64>>,
    target_nm: Vec<Option<f64>>,
    well_tensile_percent: Vec<Option<f64>>,
    critical_share_free: Vec<Option<f64>>,
    critical_share_buried: Vec<Option<f64>>,
    heavy_less_light_mev: Vec<Option<f64>>,
}

/// A chart as one JSON document.
#[must_use]
pub fn chart(chart: &Chart<'_>, points: &[ChartPoint], stamp: &Stamp) -> String {
    let stack = chart.variation.stack;
    let present = chart.variation.present();
    let axis = |index: usize, values: Vec<f64>| {
        let moved = &chart.variation.moves[index];
        AxisEntry {
            name: moved.key(),
            values: values.into_iter().map(|value| moved.said(value)).collect(),
            present: Some(moved.said(present[index])).filter(|it| it.is_finite()),
        }
    };
    let list = |of: fn(&ChartPoint) -> Option<f64>| {
        let finite = |point| of(point).filter(|value| value.is_finite());
        points.iter().map(finite).collect()
    };
    super::text(&ChartDocument {
        format: FORMAT,
        stamp,
        title: &stack.title,
        temperature_k: stack.operation.temperature_k,
        across: axis(0, chart.across()),
        up: axis(1, chart.up()),
        figure: chart.figure.key(),
        target: chart.target.map(|kind| kind.word()),
        points: PointsEntry {
            value: list(|it| it.value),
            target_nm: list(|it| it.wavelength_nm),
            well_tensile_percent: list(|it| it.tensile_percent),
            critical_share_free: list(|it| it.critical_share_free),
            critical_share_buried: list(|it| it.critical_share_buried),
            heavy_less_light_mev: list(|it| it.heavy_less_light_mev),
        },
    })
}

#[derive(Serialize)]
struct WeighDocument<'a> {
    format: u32,
    stamp: &'a Stamp,
    stamps: &'a [Stamp],
    equal: &'static str,
    columns: Vec<&'a str>,
    rows: Vec<RowEntry>,
}

#[derive(Serialize)]
struct RowEntry {
    figure: &'static str,
    unit: &'static str,
    values: Vec<Option<f64>>,
}

/// A comparison as one JSON document; the stamp of the first structure, and those of all.
#[must_use]
pub fn weigh(weighed: &[Weighed], equal: Equal, stamps: &[Stamp]) -> String {
    let Some(stamp) = stamps.first() else {
        return String::new();
    };
    super::text(&WeighDocument {
        format: FORMAT,
        stamp,
        stamps,
        equal: equal.word(),
        columns: weighed.iter().map(|it| it.name.as_str()).collect(),
        rows: rows(weighed)
            .into_iter()
            .map(|row| RowEntry {
                figure: row.key,
                unit: row.unit,
                values: row.values,
            })
            .collect(),
    })
}
