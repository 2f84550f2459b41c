//! The strain budget as two short tables.

use super::number::{ABSENT, fixed, length_nm, significant};
use super::page::Page;
use super::table::{Table, numbers, words};
use crate::coherence::{Balance, CriticalBand, CriticalThickness, StrainBudget};
use crate::materials::Mismatch;

/// Layers of less strain are left out, %: what a matched one has for rounding or temperature.
const LEAST_PERCENT: f64 = 0.02;
/// Mean strain of wells and barriers below this is balance enough, %.
const LEAST_MEAN_PERCENT: f64 = 0.05;
/// From this thickness on the limit says nothing any more, nm.
const NO_LIMIT_NM: f64 = 1e4;

/// A strained layer, or wells and barriers together, as it stands in both tables.
struct Film<'a> {
    name: String,
    thickness_nm: f64,
    mismatch: &'a Mismatch,
    critical: &'a CriticalBand,
    share: f64,
}

/// Strained layers and wells and barriers together: their mismatch, their critical thickness, and
/// what would balance them.
pub(super) fn budget(budget: &StrainBudget, page: &mut Page) {
    let films = films(budget);
    if films.is_empty() {
        return;
    }
    page.heading("Strain budget");
    let mut table = Table::new([
        words("layer"),
        numbers("nm"),
        numbers("strain\n%"),
        words("sense"),
        numbers("strain ×\nthickness\n% nm"),
        numbers("mismatch\nrelaxed\nppm"),
        numbers("perpen-\ndicular\nppm"),
    ]);
    for film in &films {
        let percent = film.mismatch.strain_percent();
        table.row([
            film.name.clone(),
            length_nm(film.thickness_nm),
            fixed(percent, 2),
            film.mismatch.sense().word().to_owned(),
            significant(percent * film.thickness_nm, 3),
            fixed(film.mismatch.relaxed_ppm(), 0),
            fixed(film.mismatch.perpendicular_ppm(), 0),
        ]);
    }
    page.table(&table);
    if let Some(balance) = budget.balance.as_ref().filter(|_| is_off_balance(budget)) {
        page.paragraph(2, &format!("Balance: {}.", balancing(balance)));
    }
    page.heading("Critical thickness");
    let mut table = Table::new([
        words("layer"),
        numbers("nm"),
        numbers("force balance,\nsingle, nm"),
        numbers("force balance,\ngrown over, nm"),
        numbers("energy\nbalance, nm"),
        numbers("used\n%"),
    ]);
    for film in &films {
        table.row([
            film.name.clone(),
            length_nm(film.thickness_nm),
            thickness(film.critical.overlayer),
            thickness(film.critical.buried),
            thickness(film.critical.energy_balance),
            if film.share.is_finite() {
                significant(100.0 * film.share, 2)
            } else {
                ABSENT.to_owned()
            },
        ]);
    }
    page.table(&table);
    page.paragraph(
        2,
        "Single: with a free surface. A band, with practice in it; used: of the force balance that holds \
         for the layer.",
    );
}

/// Whether the mean stress of wells and barriers is worth balancing.
fn is_off_balance(budget: &StrainBudget) -> bool {
    let active = budget.active.as_ref();
    active.is_some_and(|active| active.mean.strain_percent() >= LEAST_MEAN_PERCENT)
}

fn films(budget: &StrainBudget) -> Vec<Film<'_>> {
    let strained = budget
        .layers
        .iter()
        .filter(|layer| layer.mismatch.strain_percent() >= LEAST_PERCENT);
    let mut films: Vec<Film<'_>> = strained
        .map(|layer| Film {
            name: if layer.count == 1 {
                layer.role.word().to_owned()
            } else {
                format!("{} × {}", layer.count, layer.role.word())
            },
            thickness_nm: layer.thickness_nm,
            mismatch: &layer.mismatch,
            critical: &layer.critical,
            share: layer.critical_share(),
        })
        .collect();
    if let Some(active) = budget.active.as_ref().filter(|_| !films.is_empty()) {
        films.push(Film {
            name: "wells and barriers".to_owned(),
            thickness_nm: active.thickness_nm,
            mismatch: &active.mean,
            critical: &active.critical,
            share: active.critical_share(),
        });
    }
    films
}

fn thickness(critical: CriticalThickness) -> String {
    match critical {
        CriticalThickness::UpTo { thickness_nm } if thickness_nm < NO_LIMIT_NM => {
            significant(thickness_nm, 3)
        }
        CriticalThickness::UpTo { .. } => format!("> {}", fixed(NO_LIMIT_NM, 0)),
        CriticalThickness::Unlimited => "any".to_owned(),
        CriticalThickness::NoneCoherent => "none".to_owned(),
    }
}

/// What would take the mean stress of wells and barriers away.
pub(super) fn balancing(balance: &Balance) -> String {
    let barriers = if balance.count == 1 {
        format!("the barrier {}", balance.formula)
    } else {
        format!("the {} barriers {}", balance.count, balance.formula)
    };
    let by_strain = balance.mismatch.map_or_else(
        || "could not at their thickness, whatever their strain".to_owned(),
        |mismatch| {
            format!(
                "would take the mean stress away with {} % {}",
                fixed(mismatch.strain_percent(), 2),
                mismatch.sense().word()
            )
        },
    );
    let by_thickness = balance
        .practicable_factor()
        .map_or(String::new(), |factor| {
            format!(
                ", or {} times as thick ({} nm together)",
                significant(factor, 3),
                significant(factor * balance.thickness_nm, 3)
            )
        });
    format!("{barriers} {by_strain}{by_thickness}")
}
