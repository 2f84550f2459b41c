//! Materials by their own numbers.

use super::Substance;
use super::file::NumbersTable;
use super::keys::NUMBERS;
use super::reader::{Findings, Given, value};
use crate::materials::Crystal;
use crate::source::Diagnostic;

/// A material by its own numbers.
pub(super) fn own_numbers(
    given: &Given<NumbersTable>,
    findings: &mut Findings,
) -> Option<Substance> {
    let table = given.value.as_ref()?;
    let plain = [
        ("lattice_nm", &table.lattice_nm),
        ("gap_ev", &table.gap_ev),
        ("valence_edge_ev", &table.valence_edge_ev),
        ("split_off_ev", &table.split_off_ev),
        ("electron_mass", &table.electron_mass),
        ("kane_energy_ev", &table.kane_energy_ev),
        ("ac_ev", &table.ac_ev),
        ("av_ev", &table.av_ev),
        ("b_ev", &table.b_ev),
        ("c11_gpa", &table.c11_gpa),
        ("c12_gpa", &table.c12_gpa),
    ];
    let missing: Vec<String> = NUMBERS
        .names()
        .filter(|name| {
            let absent_number = plain
                .iter()
                .any(|(key, field)| key == name && field.is_none());
            absent_number || (*name == "luttinger" && table.luttinger.is_none())
        })
        .map(|name| format!("`{name}`"))
        .collect();
    if !missing.is_empty() {
        findings.faults.push(
            Diagnostic::new(
                table.span.clone(),
                format!("own numbers are incomplete: {}", missing.join(", ")),
            )
            .with_help("own numbers are never mixed with the parameter data: give all but `index`"),
        );
    }
    physical(table, findings);
    let luttinger = table.luttinger.as_ref()?.value.as_ref()?;
    let index = match &table.index {
        Some(given) => Some(given.value?),
        None => None,
    };
    Some(Substance::Own {
        crystal: Crystal {
            lattice_nm: value(&table.lattice_nm)?,
            gap_ev: value(&table.gap_ev)?,
            gap_x_ev: f64::INFINITY,
            gap_l_ev: f64::INFINITY,
            valence_edge_ev: value(&table.valence_edge_ev)?,
            split_off_ev: value(&table.split_off_ev)?,
            electron_mass: value(&table.electron_mass)?,
            luttinger: [luttinger[0].1, luttinger[1].1, luttinger[2].1],
            kane_energy_ev: value(&table.kane_energy_ev)?,
            ac_ev: value(&table.ac_ev)?,
            av_ev: value(&table.av_ev)?,
            b_ev: value(&table.b_ev)?,
            c11_gpa: value(&table.c11_gpa)?,
            c12_gpa: value(&table.c12_gpa)?,
        },
        index,
    })
}

/// What no crystal can have, though each number by itself could be.
fn physical(table: &NumbersTable, findings: &mut Findings) {
    if let Some(given) = &table.luttinger
        && let Some([(_, first), (_, second), (_, third)]) = given.value.as_deref()
    {
        let heaviest = second.abs().max(third.abs());
        if *first <= 2.0 * heaviest {
            findings.faults.push(
                Diagnostic::new(
                    given.span.clone(),
                    "a hole mass is not positive: gamma1 is above twice gamma2 and twice gamma3",
                )
                .with_help("the order is gamma1, gamma2, gamma3 of the six-band model (not of the eight-band one)"),
            );
        }
    }
    if let (Some(c11), Some(given), Some(c12)) =
        (value(&table.c11_gpa), &table.c12_gpa, value(&table.c12_gpa))
        && c12 >= c11
    {
        findings.faults.push(
            Diagnostic::new(
                given.span.clone(),
                "C12 is not below C11: such a crystal is not stable",
            )
            .with_help("check which of the two is which"),
        );
    }
}
