//! The page of the command `aim`.

use super::number::{ABSENT, fixed, plain, power, signed, significant, temperature};
use super::page::Page;
use super::stamp::Stamp;
use super::table::{Column, Table, numbers, words};
use crate::design::{Aim, Binding, FiguresOfMerit, Move, Nearest, Outcome, Quantity, Variation};
use crate::materials::Element;
use crate::source::Colour;

/// Heads of the columns of moves.
const LETTERS: [&str; 3] = ["a", "b", "c"];

/// Solutions, or the nearest structure, as text of 80 columns.
#[must_use]
pub fn aim(
    variation: &Variation<'_>,
    aim: &Aim,
    outcome: &Outcome,
    stamp: &Stamp,
    colour: Colour,
) -> String {
    let mut page = Page::new(colour);
    page.heading(&variation.stack.title);
    page.paragraph(
        2,
        &format!(
            "{} at {} nm in {}, {}",
            aim.kind.meaning(),
            plain(aim.wavelength_nm),
            aim.medium.word(),
            temperature(variation.stack.operation.temperature_k)
        ),
    );
    page.heading("What moves");
    for (moved, letter) in variation.moves.iter().zip(LETTERS) {
        page.pair_at(6, letter, &range_words(moved));
    }
    for sentence in variation.giving_way() {
        page.pair_at(6, "", &sentence);
    }
    if outcome.solutions.is_empty() {
        nothing(variation, outcome, &mut page);
    } else {
        solutions(variation, outcome, &mut page);
        drifts(outcome, &mut page);
    }
    if outcome.jumps > 0 {
        page.paragraph(
            2,
            &format!(
                "At {} more place{} the wavelength jumps over the aim: another transition or \
                 polarisation takes over, and no structure has it.",
                outcome.jumps,
                if outcome.jumps == 1 { "" } else { "s" }
            ),
        );
    }
    if outcome.unsaid > 0 {
        page.paragraph(
            2,
            &format!(
                "{} more solution{} left out: the digits of a file miss the aim by more than 0.01 nm.",
                outcome.unsaid,
                if outcome.unsaid == 1 { " is" } else { "s are" }
            ),
        );
    }
    stamp.write(&mut page);
    page.finish()
}

/// A move with its bounds.
pub(super) fn range_words(moved: &Move) -> String {
    format!(
        "{}, from {} to {}",
        moved.key(),
        value_words(moved, moved.from),
        value_words(moved, moved.to)
    )
}

/// A value of a move with its unit, a strain by its sense.
pub(super) fn value_words(moved: &Move, value: f64) -> String {
    match moved.quantity {
        Quantity::Thickness | Quantity::Gap => format!("{} nm", plain(value)),
        Quantity::Share(_) => plain(value),
        Quantity::Strain if value == 0.0 => "no strain".to_owned(),
        Quantity::Strain if value < 0.0 => format!("{} % compressive", plain(-value)),
        Quantity::Strain => format!("{} % tensile", plain(value)),
    }
}

/// A value of a move in a table: a strain of either sense by its word.
fn cell(moved: &Move, value: f64) -> String {
    let decimals = match moved.quantity {
        Quantity::Thickness | Quantity::Strain => 3,
        Quantity::Share(_) => 4,
        Quantity::Gap => 1,
    };
    let is_of_either_sense =
        moved.quantity == Quantity::Strain && moved.from < 0.0 && moved.to > 0.0;
    if is_of_either_sense && value != 0.0 {
        let sense = if value < 0.0 {
            "compressive"
        } else {
            "tensile"
        };
        return format!("{} {sense}", fixed(value.abs(), decimals));
    }
    fixed(moved.said(value), decimals)
}

fn unit(moved: &Move) -> &'static str {
    match moved.quantity {
        Quantity::Thickness | Quantity::Gap => "nm",
        Quantity::Share(_) => "",
        Quantity::Strain => "%",
    }
}

fn solutions(variation: &Variation<'_>, outcome: &Outcome, page: &mut Page) {
    let count = outcome.solutions.len();
    let lines = outcome
        .solutions
        .iter()
        .map(|it| it.line)
        .max()
        .unwrap_or(0);
    let plural = |count: usize| if count == 1 { "" } else { "s" };
    let density = outcome.solutions[0].figures.density_cm3;
    let mut words_of_lines = String::new();
    if lines > 0 {
        words_of_lines = format!(", evenly along {lines} line{} of solutions", plural(lines));
    }
    page.heading(&format!(
        "{count} structure{} with this wavelength{words_of_lines}; gain at {} cm⁻³",
        plural(count),
        power(density, 4)
    ));
    let mut columns: Vec<Column> = vec![numbers("no")];
    columns.extend(variation.moves.iter().zip(LETTERS).map(|(moved, letter)| {
        numbers(match unit(moved) {
            "" => letter.to_owned(),
            unit => format!("{letter}\n{unit}"),
        })
    }));
    columns.extend([
        numbers("peak gain\ncm⁻¹"),
        words(""),
        numbers("transparency\ncm⁻³"),
        numbers("barrier\ne, kT"),
        numbers("\nh, kT"),
    ]);
    let mut table = Table::new(columns);
    let mut line = 0;
    for (index, solution) in outcome.solutions.iter().enumerate() {
        if lines > 1 && solution.line != line {
            line = solution.line;
            table.common(&format!("line {line}"));
        }
        let figures = &solution.figures;
        let or_absent = |value: Option<f64>, decimals: usize| {
            value.map_or_else(|| ABSENT.to_owned(), |value| fixed(value, decimals))
        };
        let mut cells = vec![(index + 1).to_string()];
        cells.extend(
            variation
                .moves
                .iter()
                .zip(&solution.values)
                .map(|(moved, &value)| cell(moved, value)),
        );
        let (polarisation, gain) = figures
            .gain
            .map_or(("", ABSENT.to_owned()), |(polarisation, peak)| {
                (polarisation, significant(peak.gain_cm, 4))
            });
        cells.extend([
            gain,
            polarisation.to_owned(),
            figures
                .transparency_cm3
                .map_or_else(|| ABSENT.to_owned(), |density| power(density, 3)),
            or_absent(figures.electron_barrier_kt, 1),
            or_absent(figures.hole_barrier_kt, 1),
        ]);
        table.row(cells);
    }
    page.table(&table);
}

/// The elements whose shares drift in any of the solutions, each with the element that gives way.
pub(super) fn exchanges(outcome: &Outcome) -> Vec<(Element, Element)> {
    let mut exchanges = Vec::new();
    for drift in outcome.solutions.iter().flat_map(|it| &it.figures.shares) {
        let exchange = (drift.element, drift.at_expense_of);
        if !exchanges.contains(&exchange) {
            exchanges.push(exchange);
        }
    }
    exchanges
}

/// What the wavelength does in one of these.
pub(super) fn drift_nm(
    figures: &FiguresOfMerit,
    (element, other): (Element, Element),
) -> Option<f64> {
    let mut drifts = figures.shares.iter();
    drifts
        .find(|it| it.element == element && it.at_expense_of == other)
        .map(|it| it.nm_per_thousandth)
}

/// Strain and what the wavelength hangs on.
fn drifts(outcome: &Outcome, page: &mut Page) {
    page.heading("Strain of the well, and what moves the wavelength");
    let exchanges = exchanges(outcome);
    let mut columns = vec![
        numbers("no"),
        numbers("strain\n%"),
        words("sense"),
        numbers("of critical\n%"),
        numbers("stack\n%"),
        numbers("1 % width\nnm"),
        numbers("1 K\nnm"),
    ];
    columns.extend(
        exchanges
            .iter()
            .map(|(element, _)| numbers(format!("0.001 {}\nnm", element.symbol()))),
    );
    let mut table = Table::new(columns);
    for (index, solution) in outcome.solutions.iter().enumerate() {
        let figures = &solution.figures;
        let well = figures.well.as_ref();
        let percent = |share: Option<f64>| match share {
            Some(share) if share.is_finite() => fixed(100.0 * share, 0),
            Some(_) => "no limit holds".to_owned(),
            None => ABSENT.to_owned(),
        };
        let change = |value: Option<f64>, decimals: usize| {
            value.map_or_else(|| ABSENT.to_owned(), |value| signed(value, decimals))
        };
        let mut cells = vec![
            (index + 1).to_string(),
            well.map_or_else(
                || ABSENT.to_owned(),
                |it| fixed(it.mismatch.strain_percent(), 3),
            ),
            well.map_or(String::new(), |it| it.mismatch.sense().word().to_owned()),
            percent(well.map(|it| it.critical_share())),
            percent(figures.stack_critical_share),
            change(figures.nm_per_percent_width, 2),
            change(figures.nm_per_k, 3),
        ];
        cells.extend(
            exchanges
                .iter()
                .map(|&exchange| change(drift_nm(figures, exchange), 2)),
        );
        table.row(cells);
    }
    page.table(&table);
    page.paragraph(
        2,
        "of critical: thickness of the well over its critical thickness by force balance, grown \
         over; stack: the same of wells and barriers as one film.",
    );
    let at_expense: Vec<String> = exchanges
        .iter()
        .map(|(element, other)| {
            format!(
                "0.001 {}: its share up by 0.001 at the expense of {}",
                element.symbol(),
                other.symbol()
            )
        })
        .collect();
    if !at_expense.is_empty() {
        page.paragraph(2, &format!("{}.", at_expense.join("; ")));
    }
    limits(outcome, page);
}

/// Which solutions break which limits of the file.
fn limits(outcome: &Outcome, page: &mut Page) {
    let broken: Vec<String> = outcome
        .solutions
        .iter()
        .enumerate()
        .filter(|(_, solution)| !solution.figures.broken_limits.is_empty())
        .map(|(index, solution)| {
            format!(
                "no {}: {}",
                index + 1,
                solution.figures.broken_limits.join(", ")
            )
        })
        .collect();
    if !broken.is_empty() {
        page.heading("Outside the limits of the file");
        for line in broken {
            page.paragraph(2, &line);
        }
    }
}

/// Why there is no solution.
fn nothing(variation: &Variation<'_>, outcome: &Outcome, page: &mut Page) {
    page.heading("No structure within these bounds has this wavelength");
    match &outcome.nearest {
        None => page.paragraph(
            2,
            "There is no structure at all that emits: no composition, no bound level, or no peak \
             anywhere within the bounds.",
        ),
        Some(nearest) => {
            if let Some((low, high)) = outcome.range_nm {
                page.paragraph(
                    2,
                    &format!("Seen were {} to {} nm.", fixed(low, 1), fixed(high, 1)),
                );
            }
            let values: Vec<String> = variation
                .moves
                .iter()
                .zip(&nearest.values)
                .map(|(moved, &value)| format!("{} {}", moved.key(), cell(moved, value)))
                .collect();
            page.pair("nearest", &values.join(", "));
            page.pair(
                "its wavelength",
                &format!(
                    "{} nm, {} nm too {}",
                    fixed(nearest.wavelength_nm, 2),
                    fixed(nearest.miss_nm.abs(), 2),
                    if nearest.miss_nm > 0.0 {
                        "long"
                    } else {
                        "short"
                    }
                ),
            );
            page.pair("what binds", &bindings(variation, nearest).join("; "));
        }
    }
}

/// What keeps the nearest structure from coming nearer, in words.
pub(super) fn bindings(variation: &Variation<'_>, nearest: &Nearest) -> Vec<String> {
    nearest
        .binds
        .iter()
        .map(|binding| match *binding {
            Binding::Lowest(index) => {
                let moved = &variation.moves[index];
                format!(
                    "{} at its end of {}",
                    moved.key(),
                    value_words(moved, moved.from)
                )
            }
            Binding::Highest(index) => {
                let moved = &variation.moves[index];
                format!(
                    "{} at its end of {}",
                    moved.key(),
                    value_words(moved, moved.to)
                )
            }
            Binding::Existence(index) => format!(
                "beyond this {} there is no level, composition or peak",
                variation.moves[index].key()
            ),
            Binding::Turn => "the wavelength turns here".to_owned(),
        })
        .collect()
}
