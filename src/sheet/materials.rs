//! Materials with their numbers, sources and standing, as text.

use super::number::{fixed, plain, significant, temperature};
use super::page::Page;
use super::stamp::Stamp;
use super::table::{Table, numbers, words};
use crate::materials::{Description, Directness, Parameters};
use crate::source::Colour;
use std::collections::BTreeMap;

/// Every compound and ternary of the data, as text of 80 columns.
#[must_use]
pub fn families(parameters: &Parameters, stamp: &Stamp, colour: Colour) -> String {
    let mut page = Page::new(colour);
    page.heading("Materials of the parameter data, at 300 K");
    let mut table = Table::new([
        words("material"),
        words("from"),
        words("to"),
        numbers("direct gap\neV"),
        numbers("lattice\nnm"),
        words("direct"),
        words("source"),
    ]);
    let mut sources = BTreeMap::new();
    let range = |[low, high]: [f64; 2], decimals: usize| {
        let (low, high) = (fixed(low, decimals), fixed(high, decimals));
        if low == high {
            low
        } else {
            format!("{low} to {high}")
        }
    };
    for family in parameters.families() {
        let is_compound = family.ends.len() < 2;
        let end = |place: usize| {
            family
                .ends
                .get(place)
                .filter(|_| !is_compound)
                .cloned()
                .unwrap_or_default()
        };
        table.row([
            family.name.clone(),
            end(0),
            end(1),
            range(family.gap_ev, 3),
            range(family.lattice_nm, 4),
            match family.direct {
                Directness::Everywhere => "yes",
                Directness::InPart => "in part",
                Directness::Nowhere => "no",
            }
            .to_owned(),
            family.source.clone(),
        ]);
        let citation = parameters.table().citation(&family.source);
        sources.insert(family.source.clone(), citation.to_owned());
    }
    page.table(&table);
    page.paragraph(
        2,
        "Any mixture of Al, Ga, In with P, As, Sb is made of these: quaternaries and beyond take the \
         compounds at their corners and the bowings of their ternaries.",
    );
    citations(&sources, &mut page);
    page.heading("Next");
    page.paragraph(2, "stepwell materials In0.2Ga0.8As --on GaAs --at 25C");
    stamp.write(&mut page);
    page.finish()
}

/// One or more materials with every derived number, as text of 80 columns.
#[must_use]
pub fn descriptions(descriptions: &[Description], stamp: &Stamp, colour: Colour) -> String {
    let mut page = Page::new(colour);
    let mut sources = BTreeMap::new();
    let mut statuses = BTreeMap::new();
    for description in descriptions {
        describe(description, &mut page);
        sources.extend(description.citations.clone());
        statuses.extend(description.statuses.clone());
    }
    page.heading("How the numbers are known");
    for (code, meaning) in &statuses {
        page.pair_at(6, code, meaning);
    }
    citations(&sources, &mut page);
    stamp.write(&mut page);
    page.finish()
}

fn describe(description: &Description, page: &mut Page) {
    let on = description
        .substrate
        .as_ref()
        .map_or(String::new(), |substrate| format!(" on {substrate} (001)"));
    page.heading(&format!(
        "{}{on}, {}",
        description.formula,
        temperature(description.temperature_k)
    ));
    page.paragraph(2, &description.offsets);
    let mut table = Table::new([
        words("quantity"),
        numbers("value"),
        words("unit"),
        words("source"),
        words("known"),
    ]);
    for section in &description.sections {
        table.common(section.title);
        for figure in &section.figures {
            let values: Vec<String> = figure
                .values
                .iter()
                .map(|&value| value_text(value))
                .collect();
            let unit = if figure.unit == "1" { "" } else { figure.unit };
            table.row([
                figure.name.to_owned(),
                values.join(", "),
                unit.to_owned(),
                figure.sources.join(" "),
                figure.statuses.join(" "),
            ]);
        }
    }
    page.gap();
    page.table(&table);
    page.gap();
    let mut table = Table::new([
        words("refractive index, 300 K"),
        numbers("value"),
        words("stated for"),
        words("source"),
        words("known"),
    ]);
    for figure in &description.index {
        table.row([
            format!("at {} eV", significant(figure.photon_ev, 4)),
            fixed(figure.index, 3),
            figure.range.clone(),
            figure.source.clone(),
            figure.status.clone(),
        ]);
    }
    page.table(&table);
    for advice in description.index.iter().flat_map(|figure| &figure.advice) {
        page.paragraph(2, &advice.to_string());
    }
}

/// Five significant digits: more than any of the numbers is known to.
fn value_text(value: f64) -> String {
    if value == 0.0 {
        plain(value)
    } else {
        significant(value, 5)
    }
}

fn citations(sources: &BTreeMap<String, String>, page: &mut Page) {
    page.heading("Sources");
    for (key, citation) in sources {
        page.pair(key, citation);
    }
}
