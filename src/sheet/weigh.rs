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

/// A figure: in words, as a key, its unit, how it is written, and where it stands.
type Figure = (
    &'static str,
    &'static str,
    &'static str,
    Digits,
    fn(&Weighed) -> Option<f64>,
);

const FIGURES: [Figure; 14] = {
    use Digits::{Fixed, Power, Significant};
    [
        ("thickness", "thickness_nm", "nm", Fixed(2), |it| {
            Some(it.thickness_nm)
        }),
        ("density", "density_cm3", "cm⁻³", Power(4), |it| {
            it.density_cm3
        }),
        (
            "sheet density",
            "sheet_density_cm2",
            "cm⁻²",
            Power(4),
            Weighed::sheet_cm2,
        ),
        (
            "peak gain",
            "peak_gain_cm",
            "cm⁻¹",
            Significant(4),
            |it| Some(it.gain()?.1.gain_cm),
        ),
        ("at wavelength", "gain_peak_nm", "nm", Fixed(1), |it| {
            Some(it.gain()?.1.peak_nm)
        }),
        (
            "peak TE gain",
            "te_gain_cm",
            "cm⁻¹",
            Significant(4),
            |it| Some(it.te?.gain_cm),
        ),
        (
            "peak TM gain",
            "tm_gain_cm",
            "cm⁻¹",
            Significant(4),
            |it| Some(it.tm?.gain_cm),
        ),
        (
            "TE over TM",
            "te_over_tm",
            "",
            Significant(3),
            Weighed::te_over_tm,
        ),
        (
            "transparency",
            "transparency_cm3",
            "cm⁻³",
            Power(4),
            |it| it.transparency_cm3,
        ),
        (
            "differential gain",
            "differential_gain_cm2",
            "cm²",
            Power(3),
            |it| it.differential_gain_cm2,
        ),
        (
            "radiative current",
            "radiative_current_a_cm2",
            "A/cm²",
            Significant(4),
            |it| it.current_a_cm2,
        ),
        ("emission peak", "emission_nm", "nm", Fixed(1), |it| {
            it.emission_nm
        }),
        (
            "emission width",
            "emission_fwhm_mev",
            "meV",
            Fixed(1),
            |it| it.emission_fwhm_mev,
        ),
        ("gain peak drift", "nm_per_k", "nm/K", Fixed(3), |it| {
            it.nm_per_k
        }),
    ]
};

/// The rows of a comparison.
pub(super) fn rows(weighed: &[Weighed]) -> Vec<Row> {
    FIGURES
        .into_iter()
        .map(|(figure, key, unit, digits, of)| Row {
            figure,
            key,
            unit,
            values: weighed.iter().map(of).collect(),
            digits,
        })
        .collect()
}

/// What is equal and how much of it: that of the first structure.
pub(super) fn measure(weighed: &[Weighed], equal: Equal) -> String {
    let amount = weighed.first().and_then(|first| {
        Some(match equal {
            Equal::Volume => format!("{} cm⁻³", power(first.density_cm3?, 4)),
            Equal::Sheet => format!("{} cm⁻²", power(first.sheet_cm2()?, 4)),
            Equal::Current => format!("{} A/cm²", significant(first.current_a_cm2?, 4)),
            Equal::Gain => format!("{} cm⁻¹", significant(first.gain()?.1.gain_cm, 4)),
        })
    });
    match amount {
        Some(amount) => format!("{}, {amount}", equal.meaning()),
        None => equal.meaning().to_owned(),
    }
}

/// Structures side by side as text of 80 columns.
#[must_use]
pub fn weigh(weighed: &[Weighed], equal: Equal, stamps: &[Stamp], colour: Colour) -> String {
    const HEADS: [&str; 8] = ["A", "B", "C", "D", "E", "F", "G", "H"];
    let mut page = Page::new(colour);
    page.heading(&format!("At {}", measure(weighed, equal)));
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
