//! Commands of the design loop: which structures, how they lie in the plane, how they compare.

mod aim;
mod chart;
mod weigh;

pub(super) use aim::aim;
pub(super) use chart::chart;
pub(super) use weigh::weigh;

use super::case::Case;
use super::complaint::Complaint;
use super::flags;
use super::outlet::Outlet;
use super::wishes::{length_nm, one, overrides};
use crate::design::{Immovable, Move, Variation};
use crate::profile::Profile;
use crate::sheet::Stamp;
use crate::structure::{Manuscript, Medium, Overrides, Stack, Target, Wavelength};
use std::path::Path;

/// A structure file under the conditions of its target.
struct Seen {
    case: Case,
    overrides: Overrides,
    target: Option<Target>,
}

impl Seen {
    /// Reads a file; what the command line says of the target goes before the file's, and the
    /// temperature and density of the target before those of the operation.
    fn read(
        file: &flags::StructureFile,
        conditions: &flags::Conditions,
        target: &flags::Target,
        outlet: &Outlet,
    ) -> Result<Self, Complaint> {
        let asked = overrides(conditions)?;
        let case = Case::read(&file.path, file.overlay.as_deref(), &asked, outlet)?;
        let target = wanted(target, case.reading.stack.target)?;
        let mut overrides = asked.clone();
        if let Some(target) = &target {
            overrides.temperature_k = overrides.temperature_k.or(target.temperature_k);
            if overrides.densities_cm3.is_empty() && target.kind == Wavelength::Gain {
                overrides.densities_cm3.extend(target.density_cm3);
            }
        }
        let case = if overrides == asked {
            case
        } else {
            case.under(&overrides, outlet)?
        };
        Ok(Self {
            case,
            overrides,
            target,
        })
    }

    /// The stack at its working density alone: mixed bands need not be followed for others.
    fn stack(&self) -> Stack {
        let mut stack = self.case.reading.stack.clone();
        stack.operation.densities_cm3 = vec![stack.operation.working_density_cm3];
        stack
    }

    /// The structure with moves; a move that means nothing is a fault of `flag`.
    fn variation<'a>(
        &'a self,
        stack: &'a Stack,
        moves: Vec<Move>,
        flag: &str,
    ) -> Result<Variation<'a>, Complaint> {
        let manuscript = Manuscript::new(self.case.text())
            .map_err(|_| Complaint::input("the file can't be taken apart"))?;
        Variation::new(stack, &manuscript, &self.case.parameters, moves)
            .map_err(|error| immovable(flag, &error))
    }

    fn stamp(&self, stack: &Stack) -> Stamp {
        let profile = Profile::new(stack, &self.case.parameters).ok();
        self.case.stamp(profile.map(|profile| profile.offsets))
    }
}

/// The target of the command line over that of the file.
fn wanted(flags: &flags::Target, of_file: Option<Target>) -> Result<Option<Target>, Complaint> {
    let kind = flags
        .kind
        .as_deref()
        .map(|word| one("--kind", word, &Wavelength::ALL, Wavelength::word))
        .transpose()?;
    let medium = flags
        .medium
        .as_deref()
        .map(|word| one("--medium", word, &Medium::ALL, Medium::word))
        .transpose()?;
    let wavelength_nm = flags
        .wavelength
        .as_deref()
        .map(|word| length_nm("--wavelength", word))
        .transpose()?;
    let base = match (of_file, wavelength_nm) {
        (None, None) if kind.is_some() || medium.is_some() => {
            return Err(Complaint::usage(
                "--kind and --medium go with a wavelength, and there is none",
            )
            .with_remedy("--wavelength 1310nm, or a [target] in the file"));
        }
        (None, None) => return Ok(None),
        (Some(target), _) => target,
        (None, Some(wavelength_nm)) => Target {
            kind: Wavelength::Photoluminescence,
            wavelength_nm,
            medium: Medium::Vacuum,
            temperature_k: None,
            density_cm3: None,
            tolerance_nm: None,
        },
    };
    Ok(Some(Target {
        kind: kind.unwrap_or(base.kind),
        medium: medium.unwrap_or(base.medium),
        wavelength_nm: wavelength_nm.unwrap_or(base.wavelength_nm),
        ..base
    }))
}

fn immovable(flag: &str, error: &Immovable) -> Complaint {
    Complaint::usage(format!("{flag}: {error}")).with_remedy(error.advice())
}

/// The name of a file without its ending; of standard input a plain one.
fn stem(path: &Path) -> String {
    if path.as_os_str() == "-" {
        return "structure".to_owned();
    }
    path.file_stem().map_or_else(
        || "structure".to_owned(),
        |it| it.to_string_lossy().into_owned(),
    )
}
