//! One function a command: read, compute, write.

use super::Ending;
use super::case::{Case, parameters, remark_on_results};
use super::complaint::Complaint;
use super::flags::{self, Flags};
use super::outlet::{Outlet, print};
use super::wishes::{Destinations, Matrix, overrides, temperature_k};
use crate::design::{Standing, check as findings_of};
use crate::evaluation::Evaluation;
use crate::materials::{Composition, Description, Parameters};
use crate::profile::Profile;
use crate::sheet::{self, Stamp, csv, json};
use crate::structure::{Overrides, Substance, schema as file_schema};
use crate::subbands::{hamiltonian, valence_hamiltonian};
use clap::CommandFactory as _;

/// Room temperature, at which materials are described unless asked otherwise, K.
pub(super) const ROOM_K: f64 = 300.0;

/// `stepwell levels FILE`.
pub(super) fn levels(flags: &flags::Levels, outlet: &Outlet) -> Result<Ending, Complaint> {
    let overrides = overrides(&flags.conditions)?;
    let matrix = Matrix::from_words(flags.matrix_of.as_deref(), flags.at_k)?;
    let tables = [
        "levels",
        "transitions",
        "layers",
        "budget",
        "emission",
        "edges",
        "envelopes",
        "dispersion",
        "strain",
    ];
    let destinations = Destinations::new(
        &flags.output,
        flags.figure.as_deref(),
        flags.matrix.as_deref(),
        &tables,
    )?;
    let case = Case::of(&flags.file, &overrides, outlet)?;
    if !destinations.quiet {
        case.remark_on_file(outlet);
    }
    let evaluation = Evaluation::new(&case.reading.stack, &case.parameters)?;
    if !destinations.quiet {
        remark_on_results(&evaluation.remarks, outlet);
    }
    let stamp = case.stamp(Some(evaluation.profile.offsets));
    destinations.write_tables(|| csv::levels(&evaluation), &stamp)?;
    destinations.write_figure(|| sheet::levels_figure(&evaluation, &stamp).svg())?;
    destinations.write_matrix(|| {
        let (profile, bands) = (&evaluation.profile, &evaluation.bands);
        match matrix {
            Matrix::Single(band) => {
                let nonparabolic = case.reading.stack.model.nonparabolic;
                let matrix = hamiltonian(profile, bands, band, nonparabolic);
                sheet::matrix_market(&matrix, band, &stamp)
            }
            Matrix::Valence { sign, k_per_nm } => {
                let block = valence_hamiltonian(profile, bands, k_per_nm, sign);
                sheet::valence_matrix_market(&block, k_per_nm, matrix.word(), &stamp)
            }
        }
    })?;
    destinations.print(
        || json::levels(&evaluation, &stamp),
        || sheet::levels(&evaluation, &stamp, outlet.colour()),
    )?;
    Ok(Ending::Done)
}

/// `stepwell spectrum FILE`.
pub(super) fn spectrum(flags: &flags::Spectrum, outlet: &Outlet) -> Result<Ending, Complaint> {
    let overrides = overrides(&flags.conditions)?;
    let tables = ["spectrum", "densities", "absorption", "landmarks"];
    let destinations = Destinations::new(&flags.output, flags.figure.as_deref(), None, &tables)?;
    let case = Case::of(&flags.file, &overrides, outlet)?;
    if !destinations.quiet {
        case.remark_on_file(outlet);
    }
    let evaluation = Evaluation::new(&case.reading.stack, &case.parameters)?;
    let spectrum = evaluation.spectrum()?;
    if !destinations.quiet {
        let remarks = evaluation.remarks.iter().chain(&spectrum.remarks);
        remark_on_results(remarks, outlet);
    }
    let stamp = case.stamp(Some(evaluation.profile.offsets));
    destinations.write_tables(|| csv::spectrum(&evaluation, &spectrum), &stamp)?;
    destinations.write_figure(|| sheet::spectrum_figure(&evaluation, &spectrum, &stamp).svg())?;
    destinations.print(
        || json::spectrum(&evaluation, &spectrum, &stamp),
        || sheet::spectrum(&evaluation, &spectrum, &stamp, outlet.colour()),
    )?;
    Ok(Ending::Done)
}

/// `stepwell check FILE`.
pub(super) fn check(flags: &flags::Check, outlet: &Outlet) -> Result<Ending, Complaint> {
    let is_json = |ending: &std::ffi::OsStr| ending.eq_ignore_ascii_case("json");
    if flags.file.path.extension().is_some_and(is_json) {
        return super::sheet::check(flags, outlet);
    }
    let overrides = overrides(&flags.conditions)?;
    let destinations = Destinations::new(&flags.output, None, None, &["findings"])?;
    let case = Case::of(&flags.file, &overrides, outlet)?.with_own_target(&overrides);
    let stack = &case.reading.stack;
    let findings = findings_of(stack, &case.parameters, &case.reading.remarks);
    let profile = Profile::new(stack, &case.parameters).ok();
    let stamp = case.stamp(profile.map(|profile| profile.offsets));
    destinations.write_tables(|| csv::findings(&findings), &stamp)?;
    destinations.print(
        || json::findings(stack, &findings, &stamp),
        || sheet::findings(stack, &findings, &stamp, outlet.colour()),
    )?;
    let outside = findings
        .iter()
        .any(|finding| finding.standing() == Standing::Outside);
    Ok(if outside {
        Ending::Outside
    } else {
        Ending::Done
    })
}

/// `stepwell materials`, of all families, one alloy or a file.
pub(super) fn materials(flags: &flags::Materials, outlet: &Outlet) -> Result<Ending, Complaint> {
    let destinations = Destinations::new(&flags.output, None, None, &["materials"])?;
    let at_k = flags.at.as_deref().map(temperature_k).transpose()?;
    if let Some(path) = &flags.used_by {
        let overrides = Overrides {
            temperature_k: at_k,
            ..Overrides::default()
        };
        let case = Case::read(path, flags.overlay.as_deref(), &overrides, outlet)?;
        let descriptions = used(&case)?;
        return show(&descriptions, &case.stamp(None), &destinations, outlet);
    }
    let parameters = parameters(flags.overlay.as_deref(), outlet)?;
    let stamp = Stamp::of_parameters(&parameters);
    let Some(formula) = &flags.formula else {
        destinations.write_tables(|| csv::families(&parameters), &stamp)?;
        destinations.print(
            || json::families(&parameters, &stamp),
            || sheet::families(&parameters, &stamp, outlet.colour()),
        )?;
        return Ok(Ending::Done);
    };
    let composition = composition(formula, "the formula", outlet)?;
    let substrate = flags
        .on
        .as_deref()
        .map(|formula| self::composition(formula, "--on", outlet))
        .transpose()?;
    let description = describe(
        &parameters,
        &composition,
        substrate.as_ref(),
        at_k.unwrap_or(ROOM_K),
    )?;
    show(&[description], &stamp, &destinations, outlet)
}

fn show(
    descriptions: &[Description],
    stamp: &Stamp,
    destinations: &Destinations,
    outlet: &Outlet,
) -> Result<Ending, Complaint> {
    destinations.write_tables(|| csv::descriptions(descriptions), stamp)?;
    destinations.print(
        || json::descriptions(descriptions, stamp),
        || sheet::descriptions(descriptions, stamp, outlet.colour()),
    )?;
    Ok(Ending::Done)
}

/// Every alloy of a structure, the substrate first, each once.
fn used(case: &Case) -> Result<Vec<Description>, Complaint> {
    let stack = &case.reading.stack;
    let alloy = |substance: &Substance| match substance {
        Substance::Alloy(composition) => Some(*composition),
        Substance::Own { .. } => None,
    };
    let substrate = alloy(&stack.substrate.substance);
    let mut compositions: Vec<Composition> = substrate.into_iter().collect();
    for layer in &stack.layers {
        for material in std::iter::once(&layer.material).chain(&layer.grade_to) {
            if let Some(composition) = alloy(&material.substance)
                && !compositions.contains(&composition)
            {
                compositions.push(composition);
            }
        }
    }
    let kelvin = stack.operation.temperature_k;
    compositions
        .iter()
        .map(|composition| describe(&case.parameters, composition, substrate.as_ref(), kelvin))
        .collect()
}

fn describe(
    parameters: &Parameters,
    composition: &Composition,
    substrate: Option<&Composition>,
    kelvin: f64,
) -> Result<Description, Complaint> {
    parameters
        .describe(composition, substrate, kelvin, None)
        .map_err(|missing| Complaint::input(missing.to_string()))
}

/// A formula from the command line.
pub(super) fn composition(
    formula: &str,
    name: &str,
    outlet: &Outlet,
) -> Result<Composition, Complaint> {
    Composition::parse(formula).map_err(|fault| {
        let mut complaint = Complaint::faults(&[fault], name, formula, outlet.error_colour());
        complaint.ending = Ending::Usage;
        complaint
    })
}

/// `stepwell schema`.
pub(super) fn schema() -> Result<Ending, Complaint> {
    print(&format!("{:#}\n", file_schema()))?;
    Ok(Ending::Done)
}

/// `stepwell completions SHELL`.
pub(super) fn completions(shell: clap_complete::Shell) -> Result<Ending, Complaint> {
    let mut script = Vec::new();
    clap_complete::generate(shell, &mut Flags::command(), "stepwell", &mut script);
    print(&String::from_utf8_lossy(&script))?;
    Ok(Ending::Done)
}
