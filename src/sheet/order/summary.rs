//! What the terminal says of a sheet.

use super::companions::Standing;
use super::document::Document;
use super::inspect::Inspection;
use crate::sheet::number::{fixed, signed, temperature};
use crate::sheet::page::{Page, tidy};
use crate::source::Colour;
use serde_json::Value;

/// A sheet in a few lines: what is ordered, what is to be seen, what is still open.
#[must_use]
pub fn summary(document: &Document, written: &[String], colour: Colour) -> String {
    let mut page = Page::new(colour);
    page.heading(&document.name());
    page.paragraph(
        2,
        &format!(
            "{}’s copy; {} layers on {}: {}",
            document.audience().word(),
            document.list_at("/layers").len(),
            document.text_at("/substrate/formula"),
            document.text_at("/counts/words")
        ),
    );
    targets(document, &mut page);
    let changes = document.changes();
    if document.map_at("/since").is_some() {
        page.heading("Changes");
        if changes.is_empty() {
            page.paragraph(2, "Nothing that is ordered has changed.");
        }
        for change in changes {
            page.paragraph(2, &change);
        }
    }
    let asked: Vec<&str> = document
        .list_at("/asked_for")
        .iter()
        .filter_map(Value::as_str)
        .collect();
    if !asked.is_empty() {
        page.heading("Asked for");
        page.paragraph(
            2,
            &format!(
                "left blank with a mark, to be given in [order]: {}",
                asked.join("; ")
            ),
        );
    }
    let blank: Vec<&str> = document
        .list_at("/house/blank")
        .iter()
        .filter_map(Value::as_str)
        .collect();
    if !blank.is_empty() {
        page.heading("Left blank");
        for reason in blank {
            page.paragraph(2, reason);
        }
    }
    if !written.is_empty() {
        page.heading("Written");
        for path in written {
            page.paragraph(2, path);
        }
    }
    page.finish()
}

fn targets(document: &Document, page: &mut Page) {
    page.heading("Targets on the finished wafer");
    let number = |key: &str| document.number_at(&format!("/targets/{key}"));
    let nan = f64::NAN;
    let kelvin = number("pl_temperature_k").unwrap_or(nan);
    match (
        number("pl_nm"),
        number("pl_air_nm"),
        number("pl_tolerance_nm"),
    ) {
        (Some(vacuum), Some(air), Some(tolerance)) => page.pair(
            "photoluminescence",
            &format!(
                "{} nm in vacuum, {} nm in air, ± {} nm, at {}",
                fixed(vacuum, 1),
                fixed(air, 1),
                crate::sheet::number::plain(tolerance),
                temperature(kelvin)
            ),
        ),
        _ => page.pair("photoluminescence", document.text_at("/targets/pl_missing")),
    }
    match (number("xray_period_nm"), number("zero_order_arcsec")) {
        (Some(period), Some(zero)) => page.pair(
            "X-ray",
            &format!(
                "period {} nm ± {} nm, zero order at {}″ ± {}″",
                fixed(period, 3),
                fixed(number("xray_period_tolerance_nm").unwrap_or(nan), 3),
                signed(zero, 0),
                fixed(number("zero_order_tolerance_arcsec").unwrap_or(nan), 0),
            ),
        ),
        _ => page.pair("X-ray", document.text_at("/targets/xray_missing")),
    }
}

/// What came of looking at a kept sheet.
#[must_use]
pub fn inspection(
    anew: &Document,
    found: &Inspection,
    files: &[(String, Standing)],
    colour: Colour,
) -> String {
    const MOST: usize = 40;
    let mut page = Page::new(colour);
    page.heading(&anew.name());
    page.pair(
        "structure",
        if found.structure_agrees {
            "its SHA-256 is the one on the sheet"
        } else {
            "its SHA-256 is not the one on the sheet: the structure was edited"
        },
    );
    page.pair(
        "values",
        &if found.deviations.is_empty() {
            format!("all {} agree with the structure", found.compared)
        } else {
            format!(
                "{} of {} do not agree with the structure",
                found.deviations.len(),
                found.compared
            )
        },
    );
    for (name, standing) in files {
        page.pair(&tidy(name), standing.words());
    }
    for reason in &found.reasons {
        page.pair("mind", reason);
    }
    if !found.deviations.is_empty() {
        page.heading("What does not agree");
        for deviation in found.deviations.iter().take(MOST) {
            page.paragraph(
                2,
                &format!(
                    "{}: the sheet says {}, its structure gives {}",
                    deviation.place, deviation.kept, deviation.computed
                ),
            );
        }
        let more = found.deviations.len().saturating_sub(MOST);
        if more > 0 {
            page.paragraph(2, &format!("and {more} more"));
        }
    }
    page.finish()
}

/// The same as a JSON document.
#[must_use]
pub fn inspection_json(
    anew: &Document,
    found: &Inspection,
    files: &[(String, Standing)],
) -> String {
    let deviations = found.deviations.iter().map(
        |it| serde_json::json!({ "place": it.place, "sheet": it.kept, "structure": it.computed }),
    );
    let files = files.iter().map(|(name, standing)| {
        serde_json::json!({
            "name": name,
            "agrees": standing.agrees(),
            "words": standing.words(),
        })
    });
    crate::sheet::json::text(&serde_json::json!({
        "format": crate::sheet::json::FORMAT,
        "sheet": anew.name(),
        "agrees": found.agrees(),
        "structure_agrees": found.structure_agrees,
        "compared": found.compared,
        "deviations": deviations.collect::<Vec<_>>(),
        "files": files.collect::<Vec<_>>(),
        "mind": found.reasons,
    }))
}
