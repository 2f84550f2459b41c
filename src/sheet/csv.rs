//! Tables as comma-separated values: full precision, the unit in every head, blank where there is
//! no number. The first line, behind `#`, is the stamp.

use super::number::exact;
use super::stamp::Stamp;
use crate::design::Finding;
use crate::evaluation::{Evaluation, Spectrum, budget};
use crate::materials::{Description, Parameters};
use crate::subbands::Band;
use crate::units::wavelength_nm;

/// One table of a command.
#[derive(Clone, Debug, PartialEq)]
pub struct CsvTable {
    /// Its name, which is that of its file in a folder.
    pub name: &'static str,
    heads: Vec<String>,
    rows: Vec<Vec<Cell>>,
}

#[derive(Clone, Debug, PartialEq)]
enum Cell {
    Number(f64),
    Text(String),
    Blank,
}

impl From<f64> for Cell {
    fn from(value: f64) -> Self {
        Self::Number(value)
    }
}

impl From<usize> for Cell {
    fn from(value: usize) -> Self {
        Self::Text(value.to_string())
    }
}

impl From<&str> for Cell {
    fn from(text: &str) -> Self {
        Self::Text(text.to_owned())
    }
}

impl From<String> for Cell {
    fn from(text: String) -> Self {
        Self::Text(text)
    }
}

impl<T: Into<Self>> From<Option<T>> for Cell {
    fn from(value: Option<T>) -> Self {
        value.map_or(Self::Blank, Into::into)
    }
}

/// A row out of anything that is a cell.
macro_rules! row {
    ($($cell:expr),* $(,)?) => { vec![$(Cell::from($cell)),*] };
}

mod chart;
mod design;
mod order;
mod reconcile;
mod restatement;
mod spread;
mod strain;
mod xray;

pub use chart::ChartTable;
pub use design::{aim, weigh};
pub(in crate::sheet) use order::SheetCell;
pub use reconcile::reconcile;
pub use restatement::restatement;
pub use spread::spread;
pub use xray::xray;

/// Words that no terminal is steered by and no spreadsheet takes for a formula: behind an
/// apostrophe where they begin as formulas do. A unit in percent is none.
fn harmless(words: &str) -> String {
    let tidy = super::page::tidy(words);
    let begin = tidy.trim_start();
    let is_unit = begin == "%" || begin.starts_with("% ");
    if !is_unit && begin.starts_with(['=', '+', '-', '@', '|', '%']) {
        format!("'{tidy}")
    } else {
        tidy
    }
}

impl CsvTable {
    fn new(name: &'static str, heads: &[&str]) -> Self {
        Self {
            name,
            heads: heads.iter().map(|&head| head.to_owned()).collect(),
            rows: Vec::new(),
        }
    }

    /// A table of rows that are known at once, each with the cells of the head.
    fn of_rows(
        name: &'static str,
        heads: &[&str],
        rows: impl IntoIterator<Item = Vec<Cell>>,
    ) -> Self {
        Self {
            rows: rows.into_iter().collect(),
            ..Self::new(name, heads)
        }
    }

    /// The table as a file.
    ///
    /// # Panics
    ///
    /// Never: the text is written to memory, and every row has the cells of the head.
    #[must_use]
    pub fn text(&self, stamp: &Stamp) -> String {
        self.text_under(&stamp.line())
    }

    /// The table as a file under a line of its own.
    ///
    /// # Panics
    ///
    /// Never: the text is written to memory, and every row has the cells of the head.
    #[must_use]
    pub fn text_under(&self, line: &str) -> String {
        let first = format!("# {}\n", super::page::tidy(line));
        let mut writer = csv::Writer::from_writer(first.into_bytes());
        let cells = |row: &[Cell]| -> Vec<String> {
            row.iter()
                .map(|cell| match cell {
                    Cell::Number(value) => exact(*value),
                    Cell::Text(text) => harmless(text),
                    Cell::Blank => String::new(),
                })
                .collect()
        };
        let rows = std::iter::once(self.heads.iter().map(|head| harmless(head)).collect())
            .chain(self.rows.iter().map(|row| cells(row)));
        for row in rows {
            writer
                .write_record(row)
                .expect("memory takes every byte, and all rows have one length");
        }
        let bytes = writer.into_inner().expect("memory takes every byte");
        String::from_utf8(bytes).expect("text and numbers are UTF-8")
    }
}

/// The tables of `levels`; the first is the principal one.
#[must_use]
pub fn levels(evaluation: &Evaluation<'_>) -> Vec<CsvTable> {
    vec![
        ladders(evaluation),
        transitions(evaluation),
        layers(evaluation),
        budget_terms(evaluation),
        emission(evaluation),
        edges(evaluation),
        envelopes(evaluation),
        dispersion(evaluation),
        strain::strain(&evaluation.strain_budget()),
    ]
}

/// Energies of the mixed valence states over the in-plane wave number; no rows without mixing.
fn dispersion(evaluation: &Evaluation<'_>) -> CsvTable {
    let mut table = CsvTable::new("dispersion", &["k_per_nm"]);
    let rows = evaluation.dispersion();
    let states = rows.first().map_or(0, |(_, energies)| energies.len());
    table
        .heads
        .extend((1..=states).map(|state| format!("state{state}_ev")));
    table.rows = rows
        .iter()
        .map(|(k_per_nm, energies)| {
            std::iter::once(k_per_nm)
                .chain(energies)
                .map(|&number| Cell::from(number))
                .collect()
        })
        .collect();
    table
}

fn ladders(evaluation: &Evaluation<'_>) -> CsvTable {
    let mut table = CsvTable::new(
        "levels",
        &[
            "kind",
            "level",
            "energy_ev",
            "from_edge_mev",
            "in_plane_mass",
            "in_wells_percent",
            "error_ev",
            "near_edge",
            "heavy_percent",
            "light_percent",
            "split_off_percent",
        ],
    );
    for ladder in evaluation.ladders() {
        for (index, rung) in ladder.rungs.iter().enumerate() {
            table.rows.push(row![
                ladder.name,
                format!("{}{}", ladder.symbol, index + 1),
                rung.energy_ev,
                1e3 * ladder.above_edge_ev(rung.energy_ev),
                rung.in_plane_mass,
                100.0 * rung.in_wells,
                rung.error_ev,
                if rung.near_edge { "yes" } else { "no" },
                rung.shares.map(|shares| 100.0 * shares.heavy),
                rung.shares.map(|shares| 100.0 * shares.light),
                rung.shares.map(|shares| 100.0 * shares.split_off),
            ]);
        }
    }
    table
}

fn transitions(evaluation: &Evaluation<'_>) -> CsvTable {
    let mut table = CsvTable::new(
        "transitions",
        &["electron", "hole", "energy_ev", "wavelength_nm", "overlap"],
    );
    for transition in &evaluation.transitions {
        table.rows.push(row![
            format!("e{}", transition.electron),
            transition.hole.as_str(),
            transition.energy_ev,
            transition.wavelength_nm,
            transition.overlap,
        ]);
    }
    table
}

fn layers(evaluation: &Evaluation<'_>) -> CsvTable {
    let mut table = CsvTable::new(
        "layers",
        &[
            "layer",
            "role",
            "end",
            "formula",
            "thickness_nm",
            "gap_ev",
            "lattice_nm",
            "strain_percent",
            "strain",
            "conduction_edge_ev",
            "heavy_hole_edge_ev",
            "light_hole_edge_ev",
            "electron_mass",
            "gamma1",
            "gamma2",
            "gamma3",
            "donors_cm3",
            "acceptors_cm3",
        ],
    );
    let stack = evaluation.stack;
    for (index, (layer, numbers)) in stack
        .layers
        .iter()
        .zip(&evaluation.profile.layers)
        .enumerate()
    {
        let upper = layer
            .grade_to
            .as_ref()
            .map(|to| ("upper", to, &numbers.upper));
        let word = if upper.is_some() { "lower" } else { "both" };
        let ends = std::iter::once((word, &layer.material, &numbers.lower)).chain(upper);
        for (end, material, at) in ends {
            let [gamma1, gamma2, gamma3] = at.crystal.luttinger;
            table.rows.push(row![
                index + 1,
                layer.role.word(),
                end,
                material.formula(),
                layer.thickness_nm,
                at.edges.gap_ev(),
                at.crystal.lattice_nm,
                at.edges.strain_percent(),
                at.edges.sense().word(),
                at.edges.conduction_ev,
                at.edges.heavy_ev,
                at.edges.light_ev,
                at.crystal.electron_mass,
                gamma1,
                gamma2,
                gamma3,
                layer.doping.donors_cm3,
                layer.doping.acceptors_cm3,
            ]);
        }
    }
    table
}

fn budget_terms(evaluation: &Evaluation<'_>) -> CsvTable {
    let mut table = CsvTable::new("budget", &["term", "adds_mev", "sum_ev", "sum_nm"]);
    let Some(budget) = budget(evaluation) else {
        return table;
    };
    let mut sum_ev = 0.0;
    for (term, adds_ev) in budget.terms() {
        sum_ev += adds_ev;
        table
            .rows
            .push(row![term, 1e3 * adds_ev, sum_ev, wavelength_nm(sum_ev)]);
    }
    table
}

fn emission(evaluation: &Evaluation<'_>) -> CsvTable {
    let mut table = CsvTable::new("emission", &["of_what", "shrinkage_mev", "wavelength_nm"]);
    let emission = evaluation.emission();
    let shrinkage_mev =
        1e3 * evaluation.shrinkage_ev(evaluation.stack.operation.working_density_cm3);
    table.rows = vec![
        row!["first transition", 0.0, emission.first_transition_nm],
        row!["photoluminescence peak", 0.0, emission.pl_nm],
        row!["gain peak", 0.0, emission.gain_peak_unshrunk_nm],
        row!["gain peak", shrinkage_mev, emission.gain_peak_nm],
    ];
    table
}

/// Band edges along growth: two rows at every boundary, and where a grade is bent.
fn edges(evaluation: &Evaluation<'_>) -> CsvTable {
    let mut table = CsvTable::new(
        "edges",
        &[
            "position_nm",
            "layer",
            "role",
            "conduction_edge_ev",
            "heavy_hole_edge_ev",
            "light_hole_edge_ev",
        ],
    );
    for point in evaluation.profile.edge_points() {
        let role = evaluation.stack.layers[point.layer].role;
        table.rows.push(row![
            point.position_nm,
            point.layer + 1,
            role.word(),
            point.conduction_ev,
            point.heavy_ev,
            point.light_ev,
        ]);
    }
    table
}

/// Envelopes on the grid: a column a level.
fn envelopes(evaluation: &Evaluation<'_>) -> CsvTable {
    let bands = &evaluation.bands;
    let mut table = CsvTable::new("envelopes", &["position_nm"]);
    let mut columns: Vec<&[f64]> = vec![&bands.nodes.positions_nm];
    for (band, symbol) in [
        (Band::Electron, "e"),
        (Band::Heavy, "hh"),
        (Band::Light, "lh"),
    ] {
        for (index, level) in bands.of(band).iter().enumerate() {
            table
                .heads
                .push(format!("{symbol}{}_per_sqrt_nm", index + 1));
            columns.push(&level.envelope);
        }
    }
    table.rows = (0..bands.nodes.positions_nm.len())
        .map(|node| {
            columns
                .iter()
                .map(|column| Cell::from(column[node]))
                .collect()
        })
        .collect();
    table
}

/// The tables of `spectrum`; the first is the principal one.
#[must_use]
pub fn spectrum(evaluation: &Evaluation<'_>, spectrum: &Spectrum) -> Vec<CsvTable> {
    let mut curves = CsvTable::new(
        "spectrum",
        &[
            "density_cm3",
            "photon_ev",
            "wavelength_nm",
            "te_gain_cm",
            "tm_gain_cm",
            "spontaneous_per_ev_cm3_s",
        ],
    );
    for run in &spectrum.runs {
        for (photon_ev, point) in spectrum.photon_ev.iter().zip(&run.points) {
            curves.rows.push(row![
                run.density_cm3,
                *photon_ev,
                wavelength_nm(*photon_ev),
                point.te_gain_cm,
                point.tm_gain_cm,
                point.spontaneous_per_ev_cm3_s,
            ]);
        }
    }
    let mut absorption = CsvTable::new(
        "absorption",
        &["photon_ev", "wavelength_nm", "te_cm", "tm_cm"],
    );
    let of = &spectrum.absorption;
    for ((photon_ev, te), tm) in of.photon_ev.iter().zip(&of.te_cm).zip(&of.tm_cm) {
        absorption
            .rows
            .push(row![*photon_ev, wavelength_nm(*photon_ev), *te, *tm]);
    }
    vec![
        curves,
        densities(spectrum),
        absorption,
        landmarks(evaluation, spectrum),
    ]
}

fn densities(spectrum: &Spectrum) -> CsvTable {
    let mut table = CsvTable::new(
        "densities",
        &[
            "density_cm3",
            "sheet_density_cm2",
            "shrinkage_mev",
            "fermi_electron_ev",
            "fermi_hole_ev",
            "splitting_ev",
            "te_peak_gain_cm",
            "te_peak_nm",
            "tm_peak_gain_cm",
            "tm_peak_nm",
            "spontaneous_peak_nm",
            "spontaneous_total_per_cm3_s",
            "radiative_current_a_cm2",
        ],
    );
    for run in &spectrum.runs {
        table.rows.push(row![
            run.density_cm3,
            run.sheet_density_cm2,
            run.shrinkage_mev,
            run.fermi_electron_ev,
            run.fermi_hole_ev,
            run.splitting_ev,
            run.te.map(|peak| peak.gain_cm),
            run.te.map(|peak| peak.peak_nm),
            run.tm.map(|peak| peak.gain_cm),
            run.tm.map(|peak| peak.peak_nm),
            run.spontaneous.map(|it| it.peak_nm),
            run.spontaneous.map(|it| it.total_per_cm3_s),
            run.spontaneous.map(|it| it.current_a_cm2),
        ]);
    }
    table
}

fn landmarks(evaluation: &Evaluation<'_>, spectrum: &Spectrum) -> CsvTable {
    let mut table = CsvTable::new("landmarks", &["figure", "value", "unit"]);
    let (pl, fit, transparency) = (spectrum.pl, spectrum.fit, spectrum.transparency);
    table.rows = vec![
        row!["refractive index", spectrum.refractive_index, "1"],
        row![
            "first transition without shrinkage",
            evaluation.emission().first_transition_nm,
            "nm"
        ],
        row!["photoluminescence peak", pl.map(|pl| pl.peak_nm), "nm"],
        row![
            "photoluminescence full width",
            pl.map(|pl| pl.fwhm_mev),
            "meV"
        ],
        row![
            "transparency density",
            transparency.map(|at| at.density_cm3),
            "cm^-3"
        ],
        row![
            "first transition at transparency",
            transparency.map(|at| at.wavelength_nm),
            "nm"
        ],
        row!["polarization of the fit", fit.map(|(word, _)| word), ""],
        row!["fit g0", fit.map(|(_, fit)| fit.g0_cm), "cm^-1"],
        row![
            "fit transparency density",
            fit.map(|(_, fit)| fit.transparency_cm3),
            "cm^-3"
        ],
        row!["fit residual", fit.map(|(_, fit)| fit.residual_cm), "cm^-1"],
    ];
    table
}

/// The table of `check`.
#[must_use]
pub fn findings(findings: &[Finding]) -> Vec<CsvTable> {
    let mut table = CsvTable::new(
        "findings",
        &["code", "standing", "measure", "value", "limit", "message"],
    );
    for finding in findings {
        let message = super::findings::message(finding);
        let (code, standing) = (finding.code(), finding.standing().word());
        let measures = finding.measures();
        if measures.is_empty() {
            table.rows.push(row![code, standing, "", "", "", message]);
            continue;
        }
        for measure in measures {
            table.rows.push(row![
                code,
                standing,
                measure.name,
                measure.value,
                measure.limit,
                message.as_str(),
            ]);
        }
    }
    vec![table]
}

/// The table of `materials` without a material.
#[must_use]
pub fn families(parameters: &Parameters) -> Vec<CsvTable> {
    let mut table = CsvTable::new(
        "materials",
        &[
            "name",
            "ends",
            "gap_ev_min",
            "gap_ev_max",
            "lattice_nm_min",
            "lattice_nm_max",
            "source",
        ],
    );
    for family in parameters.families() {
        table.rows.push(row![
            family.name,
            family.ends.join(" "),
            family.gap_ev[0],
            family.gap_ev[1],
            family.lattice_nm[0],
            family.lattice_nm[1],
            family.source,
        ]);
    }
    vec![table]
}

/// The table of `materials` for some materials.
#[must_use]
pub fn descriptions(descriptions: &[Description]) -> Vec<CsvTable> {
    let mut table = CsvTable::new(
        "materials",
        &[
            "formula",
            "substrate",
            "temperature_k",
            "figure",
            "value",
            "unit",
            "sources",
            "known",
        ],
    );
    for description in descriptions {
        for figure in description.sections.iter().flat_map(|it| &it.figures) {
            for &value in &figure.values {
                table.rows.push(row![
                    description.formula.as_str(),
                    description.substrate.clone(),
                    description.temperature_k,
                    figure.name,
                    value,
                    figure.unit,
                    figure.sources.join(" "),
                    figure.statuses.join(" "),
                ]);
            }
        }
        for figure in &description.index {
            table.rows.push(row![
                description.formula.as_str(),
                description.substrate.clone(),
                description.temperature_k,
                format!("refractive index at {} eV, 300 K", exact(figure.photon_ev)),
                figure.index,
                "1",
                figure.source.as_str(),
                figure.status.as_str(),
            ]);
        }
    }
    vec![table]
}

#[cfg(test)]
mod tests {
    use super::{Cell, CsvTable, harmless};

    #[test]
    fn no_words_begin_as_formulas_do() {
        for formula in ["=1+1", "+1", "-1", "@A1", " =cmd", "\t=1", "|x", "%y"] {
            let cell = harmless(formula);
            assert!(
                !cell
                    .trim_start()
                    .starts_with(['=', '+', '-', '@', '|', '%']),
                "{cell}"
            );
        }
        for kept in ["Si", "In0.53Ga0.47As", "%", "% nm"] {
            assert_eq!(harmless(kept), kept);
        }
    }

    #[test]
    fn heads_and_cells_are_harmless_and_numbers_as_they_are() {
        let mut table = CsvTable::new("a", &["=cmd()", "b\u{1b}[2J", "c"]);
        table.rows.push(row!["@A1", "d\u{202e}e", -1.5]);
        assert_eq!(
            table.text_under("stamp"),
            "# stamp\n'=cmd(),b\u{fffd}[2J,c\n'@A1,d\u{fffd}e,-1.5\n"
        );
    }
}
