//! Commands about the wafer rather than the light: what X-rays see, one quantity said another way.

use super::Ending;
use super::case::Case;
use super::commands::ROOM_K;
use super::complaint::Complaint;
use super::flags;
use super::outlet::{Outlet, remark as write_remark};
use super::wishes::{Destinations, temperature_k};
use crate::diffraction::{Diffraction, NoReflection, Reflection};
use crate::sheet::{self, csv, json};
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
    let case = Case::read(
        &flags.file.path,
        flags.file.overlay.as_deref(),
        &overrides,
        outlet,
    )?;
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
