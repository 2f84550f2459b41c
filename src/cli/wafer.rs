//! Commands about the wafer rather than the light: what X-rays see, one quantity said another way.

use super::Ending;
use super::case::{Case, parameters};
use super::commands::{ROOM_K, composition};
use super::complaint::Complaint;
use super::flags;
use super::outlet::{Outlet, remark as write_remark};
use super::wishes::{Destinations, temperature_k};
use crate::diffraction::{Diffraction, NoReflection, Reflection};
use crate::materials::{Elements, Sense};
use crate::restatement::{About, Kind, Quantity, Unclear, restate as restated};
use crate::sheet::{self, Stamp, csv, json};
use crate::source::{nearest, one_of};
use crate::structure::Overrides;

/// `stepwell xray FILE`.
pub(super) fn xray(flags: &flags::Xray, outlet: &Outlet) -> Result<Ending, Complaint> {
    let reflection: Reflection = flags.reflection.parse().map_err(|error: NoReflection| {
        Complaint::usage(format!("--reflection: {error}")).with_remedy("--reflection 004")
    })?;
    let at_k = flags.at.as_deref().map(temperature_k).transpose()?;
    let tables = ["rocking_curve", "layers", "satellites"];
    let destinations = Destinations::new(&flags.output, flags.figure.as_deref(), None, &tables)?;
    let overrides = Overrides {
        temperature_k: Some(at_k.unwrap_or(ROOM_K)),
        ..Overrides::default()
    };
    let case = Case::of(&flags.file, &overrides, outlet)?;
    let stack = &case.reading.stack;
    let kelvin = stack.operation.temperature_k;
    let seen = Diffraction::new(stack, &case.parameters, reflection, kelvin)
        .map_err(|error| Complaint::input(error.to_string()).with_remedy("take 004 or 002"))?;
    if !destinations.quiet && !seen.unknown_atoms.is_empty() {
        write_remark(&sheet::remark(
            &format!(
                "the atoms of {} are not known: its numbers do not say them",
                seen.unknown_atoms.join(", ")
            ),
            Some("positions are right; in the rocking curve it scatters like GaAs"),
            None,
            outlet.error_colour(),
        ));
    }
    let curve = seen.rocking_curve();
    let stamp = case.stamp(None);
    destinations.write_tables(|| csv::xray(&seen, &curve), &stamp)?;
    destinations.write_figure(|| sheet::rocking_figure(stack, &seen, &curve, &stamp).svg())?;
    destinations.print(
        || json::xray(stack, &seen, &curve, &stamp),
        || sheet::xray(stack, &seen, &stamp, outlet.colour()),
    )?;
    Ok(Ending::Done)
}

/// `stepwell restate QUANTITY`.
pub(super) fn restate(flags: &flags::Restate, outlet: &Outlet) -> Result<Ending, Complaint> {
    let destinations = Destinations::new(&flags.output, None, None, &["restatement"])?;
    let words = std::iter::once(flags.quantity.as_str()).chain(flags.sense.as_deref());
    let asked = words.collect::<Vec<_>>().join(" ");
    let quantity: Quantity = asked.parse().map_err(|error| unclear("", &error))?;
    let parameters = parameters(flags.overlay.as_deref(), outlet)?;
    let formula = |given: &Option<String>, flag: &str| {
        given
            .as_deref()
            .map(|formula| composition(formula, flag, outlet))
            .transpose()
    };
    let about = About {
        in_air: flags.air,
        is_photoluminescence: flags.pl,
        temperature_k: flags.at.as_deref().map(temperature_k).transpose()?,
        around_nm: flags.around.as_deref().map(line_nm).transpose()?,
        over_nm: flags.over.as_deref().map(thickness_nm).transpose()?,
        kind: flags.mismatch.as_deref().map(kind).transpose()?,
        substrate: formula(&flags.on, "--on")?,
        layer: formula(&flags.layer, "--layer")?,
        alloy: flags
            .alloy
            .as_deref()
            .map(|elements| {
                Elements::parse(elements).map_err(|fault| {
                    let colour = outlet.error_colour();
                    let mut complaint = Complaint::faults(&[fault], "--alloy", elements, colour);
                    complaint.ending = Ending::Usage;
                    complaint
                })
            })
            .transpose()?,
        strain: flags.strain.as_deref().map(strain).transpose()?,
    };
    for composition in about.substrate.iter().chain(&about.layer) {
        parameters
            .covers(composition)
            .map_err(|missing| Complaint::input(missing.to_string()))?;
    }
    let said = restated(quantity, &about, &parameters).map_err(|error| unclear("", &error))?;
    let stamp = Stamp::of_parameters(&parameters);
    destinations.write_tables(|| csv::restatement(&said), &stamp)?;
    destinations.print(
        || json::restatement(&said, &asked, &stamp),
        || sheet::restatement(&said, &asked, outlet.colour()),
    )?;
    Ok(Ending::Done)
}

fn unclear(flag: &str, error: &Unclear) -> Complaint {
    let message = format!("{flag}{error}");
    Complaint::usage(message).with_remedy(&error.help)
}

fn quantity(flag: &str, word: &str) -> Result<Quantity, Complaint> {
    word.parse()
        .map_err(|error| unclear(&format!("{flag}: "), &error))
}

/// A line by its wavelength in vacuum or its energy.
fn line_nm(word: &str) -> Result<f64, Complaint> {
    quantity("--around", word)?.vacuum_nm().ok_or_else(|| {
        Complaint::usage(format!("--around: `{word}` is no line"))
            .with_remedy("--around 1310nm, or 0.946eV")
    })
}

fn thickness_nm(word: &str) -> Result<f64, Complaint> {
    match quantity("--over", word)? {
        Quantity::Wavelength(nm) => Ok(nm),
        _ => Err(
            Complaint::usage(format!("--over: `{word}` is no thickness"))
                .with_remedy("--over 5.5nm"),
        ),
    }
}

fn kind(word: &str) -> Result<Kind, Complaint> {
    let names = || Kind::ALL.map(Kind::word);
    Kind::ALL
        .into_iter()
        .find(|kind| kind.word() == word)
        .ok_or_else(|| {
            let remedy = nearest(word, names()).map_or_else(
                || format!("one of {}", one_of(names())),
                |near| format!("did you mean `{near}`?"),
            );
            Complaint::usage(format!("--mismatch: `{word}` is not known")).with_remedy(remedy)
        })
}

/// An in-plane strain by its sense; negative is compressive.
fn strain(word: &str) -> Result<f64, Complaint> {
    const EXAMPLES: &str = "--strain matched, 1%compressive or 0.4%tensile";
    if word == "matched" {
        return Ok(0.0);
    }
    match quantity("--strain", word)? {
        Quantity::Strain(percent, Some(Sense::Compressive)) => Ok(-1e-2 * percent),
        Quantity::Strain(percent, Some(Sense::Tensile)) => Ok(1e-2 * percent),
        _ => Err(
            Complaint::usage(format!("--strain: `{word}` does not say its sense"))
                .with_remedy(EXAMPLES),
        ),
    }
}
