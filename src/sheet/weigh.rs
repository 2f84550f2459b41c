//! The page of the command `weigh`.

use super::number::{ABSENT, fixed, length_nm, power, significant, temperature};
use super::page::Page;
use super::stamp::Stamp;
use super::table::{Table, numbers, words};
use crate::design::{Equal, Matter, Weighed};
use crate::source::Colour;

/// How the numbers of a row are written.
#[derive(Clone, Copy)]
enum Digits {
    Fixed(usize),
    Significant(usize),
    Power(usize),
}

/// One figure of all columns.
pub(super) struct Row {
    /// In words.
    pub(super) figure: &'static str,
    /// As a key, unit at its end.
    pub(super) key: &'static str,
    /// Its unit.
    pub(super) unit: &'static str,
    /// One a column; `None` where it does not exist.
    pub(super) values: Vec<Option<f64>>,
    digits: Digits,
}

/// The rows of a comparison.
pub(super) fn rows(weighed: &[Weighed]) -> Vec<Row> {
    let row = |figure, key, unit, digits, of: &dyn Fn(&Weighed) -> Option<f64>| Row {
        figure,
        key,
        unit,
        values: weighed.iter().map(of).collect(),
        digits,
    };
    vec![
        row("thickness", "thickness_nm", "nm", Digits::Fixed(2), &|it| {
            Some(it.thickness_nm)
        }),
        row(
            "density",
            "density_cm3",
            "cm⁻³",
            Digits::Power(4),
            &|it| it.density_cm3,
        ),
        row(
            "sheet density",
            "sheet_density_cm2",
            "cm⁻²",
            Digits::Power(4),
            &Weighed::sheet_cm2,
        ),
        row(
            "peak gain",
            "peak_gain_cm",
            "cm⁻¹",
            Digits::Significant(4),
            &|it| Some(it.gain()?.1.gain_cm),
        ),
        row(
            "at wavelength",
            "gain_peak_nm",
            "nm",
            Digits::Fixed(1),
            &|it| Some(it.gain()?.1.peak_nm),
        ),
        row(
            "peak TE gain",
            "te_gain_cm",
            "cm⁻¹",
            Digits::Significant(4),
            &|it| Some(it.te?.gain_cm),
        ),
        row(
            "peak TM gain",
            "tm_gain_cm",
            "cm⁻¹",
            Digits::Significant(4),
            &|it| Some(it.tm?.gain_cm),
        ),
        row(
            "TE over TM",
            "te_over_tm",
            "",
            Digits::Significant(3),
            &Weighed::te_over_tm,
        ),
        row(
            "transparency",
            "transparency_cm3",
            "cm⁻³",
            Digits::Power(4),
            &|it| it.transparency_cm3,
        ),
        row(
            "differential gain",
            "differential_gain_cm2",
            "cm²",
            Digits::Power(3),
            &|it| it.differential_gain_cm2,
        ),
        row(
            "radiative current",
            "radiative_current_a_cm2",
            "A/cm²",
            Digits::Significant(4),
            &|it| it.current_a_cm2,
        ),
        row(
            "emission peak",
            "emission_nm",
            "nm",
            Digits::Fixed(1),
            &|it| it.emission_nm,
        ),
        row(
            "emission width",
            "emission_fwhm_mev",
            "meV",
            Digits::Fixed(1),
            &|it| it.emission_fwhm_mev,
        ),
        row(
            "gain peak drift",
            "nm_per_k",
            "nm/K",
            Digits::Fixed(3),
            &|it| it.nm_per_k,
        ),
    ]
}

/// Structures side by side as text of 80 columns.
#[must_use]
pub fn weigh(weighed: &[Weighed], equal: Equal, stamps: &[Stamp], colour: Colour) -> String {
    const HEADS: [&str; 8] = ["A", "B", "C", "D", "E", "F", "G", "H"];
    let mut page = Page::new(colour);
    page.heading(&format!("At {}", equal.meaning()));
    for (column, head) in weighed.iter().zip(HEADS) {
        let matter = match column.matter {
            Matter::Wells => "wells",
            Matter::Bulk { strained: true } => "material of the first well of A, strained as it is",
            Matter::Bulk { strained: false } => "material of the first well of A, without strain",
        };
        page.pair_at(
            6,
            head,
            &format!(
                "{}: {matter}, {} nm; {}",
                column.name,
                length_nm(column.thickness_nm),
                temperature(column.temperature_k)
            ),
        );
    }
    page.gap();
    let shown = &weighed[..weighed.len().min(HEADS.len())];
    let mut columns = vec![words("figure"), words("unit")];
    columns.extend(HEADS.into_iter().take(shown.len()).map(numbers));
    let mut table = Table::new(columns);
    for row in rows(shown) {
        let mut cells = vec![row.figure.to_owned(), row.unit.to_owned()];
        cells.extend(row.values.iter().map(|value| {
            value.map_or_else(
                || ABSENT.to_owned(),
                |value| match row.digits {
                    Digits::Fixed(decimals) => fixed(value, decimals),
                    Digits::Significant(digits) => significant(value, digits),
                    Digits::Power(digits) => power(value, digits),
                },
            )
        }));
        table.row(cells);
    }
    page.table(&table);
    if weighed.len() > HEADS.len() {
        page.paragraph(
            2,
            &format!(
                "{} more columns do not fit a page; --csv and --json have all.",
                weighed.len() - HEADS.len()
            ),
        );
    }
    if weighed.iter().any(|column| column.density_cm3.is_none()) {
        page.paragraph(
            2,
            &format!(
                "{ABSENT} in a whole column: no density up to 3e19 cm⁻³ has the measure of A."
            ),
        );
    }
    for (stamp, head) in stamps.iter().zip(HEADS) {
        if stamps.len() > 1 {
            page.heading(&format!("Structure {head}"));
        }
        stamp.write(&mut page);
    }
    page.finish()
}
