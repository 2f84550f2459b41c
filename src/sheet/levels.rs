//! The page of the command `levels`.

use super::number::{ABSENT, fixed, length_nm, power, signed, significant, temperature};
use super::page::Page;
use super::stamp::Stamp;
use super::table::{Table, numbers, words};
use crate::evaluation::{Budget, Evaluation, Ladder, PL_DENSITY_CM3, Rung, budget};
use crate::materials::Sense;
use crate::source::Colour;
use crate::structure::{Layer, Stack};
use crate::units::wavelength_nm;
use std::fmt::Write as _;

/// Longer ladders and lists are cut: a page is read, a file is searched.
const MOST_ROWS: usize = 12;

/// Terms of the budget that most structures do not have are left out below this, eV.
const SMALLEST_TERM_EV: f64 = 5e-5;

/// What a first design misses by, and why; meV.
///
/// Common practice, no publication: gaps and offsets of alloys are quoted to about 10 meV, and
/// authors differ by 20.
const PARAMETER_ERROR_EV: (f64, f64) = (0.010, 0.020);

/// Levels, transitions, budget and wavelengths of an evaluation, as text of 80 columns.
#[must_use]
pub fn levels(evaluation: &Evaluation<'_>, stamp: &Stamp, colour: Colour) -> String {
    let mut page = Page::new(colour);
    head(evaluation.stack, &mut page);
    layers(evaluation, &mut page);
    super::strain::budget(&evaluation.strain_budget(), &mut page);
    ladders(evaluation, &mut page);
    transitions(evaluation, &mut page);
    if let Some(budget) = budget(evaluation) {
        sum(&budget, &mut page);
    }
    wavelengths(evaluation, &mut page);
    trust(evaluation, &mut page);
    stamp.write(&mut page);
    page.finish()
}

/// Title, temperature, wells.
pub(super) fn head(stack: &Stack, page: &mut Page) {
    let default = if stack.operation.temperature_given {
        ""
    } else {
        ", the default: none is given"
    };
    page.heading(&stack.title);
    let count = stack.well_count();
    let wells_nm = stack.well_thickness_nm();
    let wells = if count == 1 {
        format!("one well of {} nm", length_nm(wells_nm))
    } else {
        format!("{count} wells, {} nm together", length_nm(wells_nm))
    };
    page.paragraph(
        2,
        &format!(
            "{wells}, on {} (001); {}{default}",
            stack.substrate.formula(),
            temperature(stack.operation.temperature_k)
        ),
    );
}

/// Equal layers of one row of the file.
struct Course<'a> {
    layer: &'a Layer,
    index: usize,
    count: usize,
}

/// The layers of the solved region, equal layers of a group together.
fn courses<'a>(evaluation: &Evaluation<'a>) -> Vec<Course<'a>> {
    let mut courses: Vec<Course<'a>> = Vec::new();
    let mut last = None;
    for section in &evaluation.profile.sections {
        if last.replace(section.layer) == Some(section.layer) {
            continue;
        }
        let layer = &evaluation.stack.layers[section.layer];
        match courses.iter_mut().find(|course| course.layer == layer) {
            Some(course) => course.count += 1,
            None => courses.push(Course {
                layer,
                index: section.layer,
                count: 1,
            }),
        }
    }
    courses
}

fn layers(evaluation: &Evaluation<'_>, page: &mut Page) {
    page.heading("Layers around the wells, from the substrate up");
    let mut table = Table::new([
        words("layer"),
        words("material"),
        numbers("nm"),
        numbers("gap\neV"),
        numbers("strain\n%"),
        words("sense"),
    ]);
    for course in courses(evaluation) {
        let layer = course.layer;
        let ends = &evaluation.profile.layers[course.index];
        let role = if course.count == 1 {
            layer.role.word().to_owned()
        } else {
            format!("{} × {}", course.count, layer.role.word())
        };
        let mut row =
            |role: String, material: String, thickness: String, at: &crate::profile::Strained| {
                let percent = fixed(at.edges.strain_percent(), 2);
                let flat = percent == "0.00";
                let sense = if flat {
                    Sense::Matched
                } else {
                    at.edges.sense()
                };
                table.row([
                    role,
                    material,
                    thickness,
                    fixed(at.edges.gap_ev(), 4),
                    percent,
                    sense.word().to_owned(),
                ]);
            };
        let thickness = length_nm(layer.thickness_nm);
        row(role, layer.material.formula(), thickness, &ends.lower);
        if let Some(to) = &layer.grade_to {
            row(
                "  graded to".to_owned(),
                to.formula(),
                String::new(),
                &ends.upper,
            );
        }
    }
    page.table(&table);
}

fn ladders(evaluation: &Evaluation<'_>, page: &mut Page) {
    page.heading("Levels");
    let character = if evaluation.mixed.is_some() {
        numbers("mass, m0, or\nshares %")
    } else {
        numbers("in-plane\nmass, m0")
    };
    let mut table = Table::new([
        words("level"),
        numbers("from edge\nmeV"),
        numbers("energy\neV"),
        numbers("spread\nmeV"),
        character,
        numbers("in wells\n%"),
        numbers("error\nµeV"),
    ]);
    let mut notes = Notes::default();
    for ladder in evaluation.ladders() {
        ladder_rows(&ladder, &mut table, &mut notes);
    }
    page.table(&table);
    if notes.grouped {
        page.paragraph(
            2,
            "A row of several levels is what equal wells share, one level a well: its energy is \
             that of the level nearest the gap, its spread reaches to the last.",
        );
    }
    if notes.near_edge {
        page.paragraph(2, "* barely bound, within 3 meV of the edge that confines");
    }
}

#[derive(Default)]
struct Notes {
    grouped: bool,
    near_edge: bool,
}

fn ladder_rows(ladder: &Ladder, table: &mut Table, notes: &mut Notes) {
    let groups = ladder.groups();
    if groups.is_empty() {
        table.common(&format!("{}: no level belongs to the wells", ladder.name));
        return;
    }
    table.common(&format!(
        "{}, edge of the wells at {} eV",
        ladder.name,
        fixed(ladder.edge_ev, 4)
    ));
    for group in groups.iter().take(MOST_ROWS) {
        let rung = &group.rung;
        let many = group.count() > 1;
        notes.grouped |= many;
        notes.near_edge |= rung.near_edge;
        let mut name = group.name(ladder.symbol);
        if many {
            let _ = write!(name, " (×{})", group.count());
        }
        if rung.near_edge {
            name.push_str(" *");
        }
        table.row([
            name,
            fixed(1e3 * ladder.above_edge_ev(rung.energy_ev), 2),
            fixed(rung.energy_ev, 5),
            if many {
                fixed(1e3 * group.spread_ev, 2)
            } else {
                String::new()
            },
            character(rung),
            fixed(100.0 * rung.in_wells, 0),
            significant(1e6 * rung.error_ev, 1),
        ]);
    }
    if let (Some(next), Some(last)) = (groups.get(MOST_ROWS), ladder.rungs.last()) {
        table.common(&format!(
            "… {} more, up to {} meV from the edge: --json and --csv have them all",
            ladder.rungs.len() + 1 - next.first,
            fixed(1e3 * ladder.above_edge_ev(last.energy_ev), 1)
        ));
    }
}

/// The in-plane mass, or what a mixed state is made of.
fn character(rung: &Rung) -> String {
    match (rung.shares, rung.in_plane_mass) {
        (Some(shares), _) => [
            (shares.heavy, "hh"),
            (shares.light, "lh"),
            (shares.split_off, "so"),
        ]
        .into_iter()
        .map(|(share, name)| (fixed(100.0 * share, 0), name))
        .filter(|(percent, _)| percent != "0")
        .map(|(percent, name)| format!("{percent} {name}"))
        .collect::<Vec<_>>()
        .join(", "),
        (None, Some(mass)) => fixed(mass, 4),
        (None, None) => ABSENT.to_owned(),
    }
}

fn transitions(evaluation: &Evaluation<'_>, page: &mut Page) {
    page.heading("Transitions, without gap shrinkage");
    let mut table = Table::new([
        words("electron"),
        words("hole"),
        numbers("energy\neV"),
        numbers("wavelength\nnm"),
        numbers("spread\nmeV"),
        numbers("overlap"),
    ]);
    let groups = evaluation.transition_groups();
    for group in groups.iter().take(MOST_ROWS) {
        table.row([
            group.electron.clone(),
            group.hole.clone(),
            fixed(group.energy_ev, 5),
            fixed(group.wavelength_nm, 2),
            if group.spread_ev > 0.0 {
                fixed(1e3 * group.spread_ev, 2)
            } else {
                String::new()
            },
            fixed(group.overlap, 3),
        ]);
    }
    if groups.len() > MOST_ROWS {
        table.common(&format!(
            "… {} more of higher energy: --json and --csv have them all",
            groups.len() - MOST_ROWS
        ));
    }
    page.table(&table);
    let grouped = groups
        .iter()
        .any(|group| group.electron.contains('-') || group.hole.contains('-'));
    if grouped {
        page.paragraph(
            2,
            "Overlaps of rows of several levels are summed over all their pairs and given per well.",
        );
    }
}

/// The budget of the first transition.
fn sum(budget: &Budget, page: &mut Page) {
    page.heading("From the bulk gap to the first transition");
    let mut table = Table::new([
        words("term"),
        numbers("adds\nmeV"),
        numbers("sum\nmeV"),
        numbers("sum as\nwavelength nm"),
    ]);
    let mut so_far_ev = 0.0;
    for (place, (name, adds_ev)) in budget.terms().into_iter().enumerate() {
        so_far_ev += adds_ev;
        let is_exceptional = matches!(place, 2 | 5);
        if is_exceptional && adds_ev.abs() < SMALLEST_TERM_EV {
            continue;
        }
        let adds = 1e3 * adds_ev;
        table.row([
            name.to_owned(),
            if place == 0 {
                fixed(adds, 1)
            } else {
                signed(adds, 1)
            },
            fixed(1e3 * so_far_ev, 1),
            fixed(wavelength_nm(so_far_ev), 1),
        ]);
    }
    page.table(&table);
}

/// The emission wavelengths by their names.
fn wavelengths(evaluation: &Evaluation<'_>, page: &mut Page) {
    let emission = evaluation.emission();
    let operation = &evaluation.stack.operation;
    let density = format!("{} cm⁻³", power(operation.working_density_cm3, 4));
    let shrinkage_mev = 1e3 * evaluation.shrinkage_ev(operation.working_density_cm3);
    page.heading("Emission wavelengths, in vacuum");
    let mut table = Table::new([
        words("of what"),
        numbers("without shrinkage\nnm"),
        numbers("with shrinkage\nnm"),
    ]);
    let shown = |nm: Option<f64>| nm.map_or(ABSENT.to_owned(), |nm| fixed(nm, 2));
    let shrunk = shrinkage_mev > 0.0;
    let with = |nm: Option<f64>| shown(nm.filter(|_| shrunk));
    table.row([
        "edge of the first transition".to_owned(),
        shown(Some(emission.first_transition_nm)),
        with(Some(
            evaluation.shrunk_first_transition_nm(operation.working_density_cm3),
        )),
    ]);
    table.row([
        format!(
            "photoluminescence peak at {} cm⁻³",
            power(PL_DENSITY_CM3, 1)
        ),
        shown(emission.pl_nm),
        ABSENT.to_owned(),
    ]);
    table.row([
        format!("peak of gain at {density}"),
        shown(emission.gain_peak_unshrunk_nm),
        with(emission.gain_peak_nm),
    ]);
    page.table(&table);
    let mut note = if shrunk {
        format!(
            "At {density} the gap shrinks by {} meV; photoluminescence at low injection is without it.",
            fixed(shrinkage_mev, 1)
        )
    } else {
        "Gap shrinkage is switched off.".to_owned()
    };
    if emission.gain_peak_nm.is_none() {
        note.push_str(" There is no gain at this density: it lies below transparency.");
    }
    page.paragraph(2, &note);
}

/// The numerical error beside that of the parameters.
fn trust(evaluation: &Evaluation<'_>, page: &mut Page) {
    page.heading("What to trust");
    let first_ev = evaluation.first_transition_ev();
    let nm_per_ev = wavelength_nm(first_ev) / first_ev;
    let largest = |ladder: &Ladder| ladder.rungs.first().map_or(0.0, |rung| rung.error_ev);
    let error_ev: f64 = evaluation.ladders().iter().map(largest).sum();
    page.pair(
        "numerical error",
        &format!(
            "about {} µeV or {} nm of the first transition: what the grid leaves, nothing else",
            significant(1e6 * error_ev, 1),
            significant(nm_per_ev * error_ev, 1)
        ),
    );
    let (low, high) = PARAMETER_ERROR_EV;
    page.pair(
        "parameter error",
        &format!(
            "gaps and offsets of alloys are known to {} to {} meV (common practice), here {} to {} nm: \
             a first design may miss by that much, and mostly by the same amount in every well of a \
             family. Grow one, measure its photoluminescence, and give your own `numbers`.",
            fixed(1e3 * low, 0),
            fixed(1e3 * high, 0),
            fixed(nm_per_ev * low, 0),
            fixed(nm_per_ev * high, 0)
        ),
    );
}
