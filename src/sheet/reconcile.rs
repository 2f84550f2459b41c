//! The page of the command `reconcile`.

mod next;

use super::levels::head;
use super::number::{fixed, plain, signed, significant};
use super::page::Page;
use super::stamp::Stamp;
use super::table::{Table, numbers, words};
use crate::design::{Datum, Direction, Reconciliation};
use crate::source::Colour;
use crate::structure::{PhotoluminescenceMap, Returned, Stack};

/// Single causes that are shown.
const CAUSES: usize = 6;

/// A wafer that came back, and what was made of it.
#[derive(Clone, Copy, Debug)]
pub struct Wafer<'a> {
    /// The order.
    pub stack: &'a Stack,
    /// What came back.
    pub returned: &'a Returned,
    /// SHA-256 of the bytes of its file.
    pub returned_sha256: &'a str,
    /// The map that the peak was taken from.
    pub map: Option<&'a PhotoluminescenceMap>,
    /// What came out.
    pub result: &'a Reconciliation,
}

/// What was grown, as text of 80 columns.
#[must_use]
pub fn reconcile(wafer: &Wafer<'_>, stamp: &Stamp, colour: Colour) -> String {
    let mut page = Page::new(colour);
    head(wafer.stack, &mut page);
    data(wafer, &mut page);
    estimates(wafer, &mut page);
    undetermined(wafer, &mut page);
    causes(wafer, &mut page);
    next::corrections(wafer, &mut page);
    next::limits(wafer, &mut page);
    page.heading("Assumed");
    for line in assumed(wafer) {
        page.item(2, &line);
    }
    stamp.write(&mut page);
    page.pair_at(14, "returned", wafer.returned_sha256);
    page.finish()
}

/// A value of a datum with its decimals; a mismatch with its word.
fn value(datum: Datum, value: f64) -> String {
    match datum {
        Datum::Pl => fixed(value, 2),
        Datum::Period => fixed(value, 3),
        Datum::Mismatch(_) => fixed(value, 0),
    }
}

fn data(wafer: &Wafer<'_>, page: &mut Page) {
    page.heading(&format!(
        "Run {}: measured against ordered",
        wafer.returned.run
    ));
    let mut table = Table::new([
        words("datum"),
        numbers("ordered"),
        numbers("measured"),
        numbers("off"),
        numbers("sigma\nin all"),
        numbers("off in\nsigmas"),
        numbers("with the\nestimate"),
    ]);
    for it in &wafer.result.deviations {
        table.row([
            format!("{}, {}", it.datum.name(), it.datum.unit()),
            value(it.datum, it.ordered),
            value(it.datum, it.measured),
            signed(it.measured - it.ordered, decimals(it.datum)),
            significant(it.sigma, 2),
            signed(it.in_sigmas(), 1),
            value(it.datum, it.estimated),
        ]);
    }
    page.table(&table);
    page.paragraph(
        2,
        "Wavelengths are in vacuum; a mismatch is positive where the layers are compressed. The sigma \
         of photoluminescence holds the error of the model.",
    );
}

fn decimals(datum: Datum) -> usize {
    match datum {
        Datum::Pl => 2,
        Datum::Period => 3,
        Datum::Mismatch(_) => 0,
    }
}

/// An amount of an unknown with its unit.
fn amount(value: f64, unit: &str) -> String {
    match unit {
        "" => signed(value, 4),
        "nm" => format!("{} nm", signed(value, 3)),
        unit => format!("{} {unit}", signed(value, 2)),
    }
}

/// A size of an unknown with its unit.
fn size(value: f64, unit: &str) -> String {
    amount(value, unit).trim_start_matches('+').to_owned()
}

fn estimates(wafer: &Wafer<'_>, page: &mut Page) {
    let result = wafer.result;
    page.heading("What was grown");
    let mut table = Table::new([
        words("unknown"),
        numbers("ordered"),
        numbers("most likely"),
        numbers("sigma"),
        numbers("off in\nsigmas"),
        numbers("sigma\nbefore"),
    ]);
    for it in &result.estimates {
        let name = match it.gives_way {
            Some(other) => format!("{} (for {other})", it.name),
            None => it.name.clone(),
        };
        table.row([
            name,
            size(it.ordered, it.unit),
            size(it.value, it.unit),
            size(it.sigma, it.unit),
            signed((it.value - it.ordered) / it.sigma, 1),
            size(it.prior_sigma, it.unit),
        ]);
    }
    page.table(&table);
    let mut pairs = Vec::new();
    for (row, one) in result.estimates.iter().enumerate() {
        for (column, other) in result.estimates.iter().enumerate().skip(row + 1) {
            let correlation = result.correlation[row][column];
            pairs.push(format!(
                "{} with {} {}",
                one.name,
                other.name,
                signed(correlation, 2)
            ));
        }
    }
    if !pairs.is_empty() {
        page.pair("correlations", &pairs.join(", "));
    }
    if !result.explains_the_data() {
        page.paragraph(
            2,
            "No structure near the order explains the data: look at the bench, at which layer emits, at \
             the interfaces, at the units of what came back, and whose wafer it is.",
        );
    }
}

fn undetermined(wafer: &Wafer<'_>, page: &mut Page) {
    let Some(demand) = demand(wafer) else {
        return;
    };
    page.heading("What the data do not tell");
    for direction in &wafer.result.undetermined {
        page.paragraph(2, &named(direction));
    }
    page.paragraph(2, &demand);
}

/// A combination of unknowns in words.
fn named(direction: &Direction) -> String {
    let together: Vec<String> = direction
        .components
        .iter()
        .map(|(name, goes, unit)| format!("{name} {}", amount(*goes, unit)))
        .collect();
    let all = if together.len() > 1 { " together" } else { "" };
    format!(
        "{}{all}: the data hardly notice ({} % of what was open before is left).",
        together.join(" with "),
        fixed(100.0 * direction.left, 0)
    )
}

/// The assumption that the user must state; `None` where the data determine everything.
pub(super) fn demand(wafer: &Wafer<'_>) -> Option<String> {
    let result = wafer.result;
    if result.undetermined.is_empty() {
        return None;
    }
    let involved: Vec<&str> = result
        .estimates
        .iter()
        .map(|estimate| estimate.name.as_str())
        .filter(|name| {
            result
                .undetermined
                .iter()
                .any(|direction| direction.components.iter().any(|(it, ..)| it == name))
        })
        .collect();
    let mut ways = Vec::new();
    let barrier_is_free = involved
        .iter()
        .any(|name| name.ends_with(".thickness") && !name.starts_with("well"));
    if barrier_is_free && !wafer.returned.assumptions.barrier_ratio_fixed {
        ways.push(
            "`barrier_ratio_fixed = true`, if well and barrier grew at the ordered ratio"
                .to_owned(),
        );
    }
    let left_out = if involved.len() == result.undetermined.len() {
        involved.join(", ")
    } else {
        format!(
            "{} of {}",
            count(result.undetermined.len()),
            involved.join(", ")
        )
    };
    ways.push(format!(
        "`moved` without {left_out}, if a calibration vouches for {}",
        if result.undetermined.len() == 1 {
            "it"
        } else {
            "them"
        }
    ));
    let has = |wanted: fn(Datum) -> bool| result.deviations.iter().any(|it| wanted(it.datum));
    let missing: Vec<&str> = [
        ("the photoluminescence peak", has(|it| it == Datum::Pl)),
        ("the period", has(|it| it == Datum::Period)),
        (
            "the mean mismatch",
            has(|it| matches!(it, Datum::Mismatch(_))),
        ),
    ]
    .into_iter()
    .filter_map(|(name, there)| (!there).then_some(name))
    .collect();
    if !missing.is_empty() {
        ways.push(format!("or measure {}", missing.join(" and ")));
    }
    if has(|it| it == Datum::Pl) && result.offset.runs == 0 {
        ways.push(
            "or calibrate the model with a ledger of house offsets (--ledger), which makes the peak say more"
                .to_owned(),
        );
    }
    Some(format!(
        "No correction before this is settled. State in [assume] {}.",
        ways.join("; ")
    ))
}

fn count(number: usize) -> String {
    match number {
        1 => "one".to_owned(),
        2 => "two".to_owned(),
        more => more.to_string(),
    }
}

fn causes(wafer: &Wafer<'_>, page: &mut Page) {
    let result = wafer.result;
    page.heading("If it were one cause alone");
    let mut table = Table::new([
        words("cause"),
        numbers("amount"),
        numbers("in usual\nsigmas"),
        words("leaves, in sigmas"),
    ]);
    for it in result.causes.iter().take(CAUSES) {
        let left: Vec<String> = result
            .deviations
            .iter()
            .zip(&it.leaves)
            .map(|(deviation, left)| format!("{} {}", short(deviation.datum), signed(*left, 1)))
            .collect();
        table.row([
            it.name.clone(),
            format!(
                "{} ± {}",
                amount(it.amount, it.unit),
                significant(it.sigma, 2)
            ),
            signed(it.unusual, 1),
            left.join(", "),
        ]);
    }
    page.table(&table);
    page.paragraph(
        2,
        "Each with the amount that explains the data best, the most likely first. What it leaves beyond \
         2 sigmas it does not explain.",
    );
}

fn short(datum: Datum) -> &'static str {
    match datum {
        Datum::Pl => "PL",
        Datum::Period => "period",
        Datum::Mismatch(_) => "mismatch",
    }
}

/// What the answer rests on beside the data.
pub(super) fn assumed(wafer: &Wafer<'_>) -> Vec<String> {
    let result = wafer.result;
    let mut lines = Vec::new();
    let usual: Vec<String> = result
        .deviations
        .iter()
        .filter(|it| !it.sigma_given)
        .map(|it| {
            format!(
                "{} ± {} {}",
                it.datum.name(),
                plain(it.measurement_sigma),
                it.datum.unit()
            )
        })
        .collect();
    if !usual.is_empty() {
        lines.push(format!(
            "errors of measurement that the file does not give, by common practice: {}",
            usual.join(", ")
        ));
    }
    if let Some(map) = wafer.map {
        lines.push(format!(
            "the peak is the median of {} points of the map, which scatter by {} nm; {} without a peak",
            map.points.len(),
            significant(map.sigma_nm(), 2),
            map.blank
        ));
        lines.extend(map.assumptions.iter().map(|it| format!("of the map: {it}")));
    }
    let assumptions = &wafer.returned.assumptions;
    lines.push(format!(
        "before the data, one sigma: thicknesses {} %, shares {}",
        plain(assumptions.thickness_sigma_percent),
        plain(assumptions.share_sigma)
    ));
    if assumptions.barrier_ratio_fixed {
        lines.push("well and barrier grew at the ordered ratio".to_owned());
    }
    if assumptions.moved.is_some() {
        lines.push("nothing moved but what the file lists".to_owned());
    }
    if result.deviations.iter().any(|it| it.datum == Datum::Pl) {
        let offset = &result.offset;
        lines.push(if offset.runs == 0 {
            format!(
                "no house offset of {} is known: the model's error is {} meV",
                offset.family,
                significant(offset.sigma_mev, 2)
            )
        } else {
            format!(
                "house offset of {} from {} of the ledger: {} ± {} meV",
                offset.family,
                if offset.runs == 1 {
                    "one run".to_owned()
                } else {
                    format!("{} runs", offset.runs)
                },
                signed(offset.offset_mev, 2),
                significant(offset.sigma_mev, 2)
            )
        });
    }
    if let Some(nm) = result.followed_miss_nm {
        lines.push(format!(
            "what was grown was solved with mixed bands; single causes were followed from the order by \
             single bands, which at the estimate miss the full model by {} nm",
            significant(nm, 2)
        ));
    }
    lines
}
