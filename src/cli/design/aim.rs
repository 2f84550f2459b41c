//! The command `aim`: which structures have a wavelength.

use super::{Seen, stem};
use crate::cli::Ending;
use crate::cli::complaint::Complaint;
use crate::cli::flags;
use crate::cli::moves::one_move;
use crate::cli::outlet::Outlet;
use crate::cli::watch::{interrupted, watched};
use crate::cli::wishes::Destinations;
use crate::design::{self, Aim, AimError, Move, Search};
use crate::sheet::{self, csv, json};

/// `stepwell aim FILE`.
pub(in crate::cli) fn aim(flags: &flags::Aim, outlet: &Outlet) -> Result<Ending, Complaint> {
    let moves: Vec<Move> = flags
        .moves
        .iter()
        .map(|words| one_move("--move", words))
        .collect::<Result<_, _>>()?;
    let tables = ["solutions"];
    let mut destinations = Destinations::new(&flags.output, None, None, &tables)?;
    let seen = Seen::read(&flags.file, &flags.conditions, &flags.target, outlet)?;
    let Some(target) = seen.target else {
        return Err(Complaint::usage("there is no wavelength to aim at")
            .with_remedy("--wavelength 1310nm --kind pl, or a [target] in the file"));
    };
    if moves.is_empty() {
        return Err(Complaint::usage("nothing may move").with_remedy(
            "--move well.thickness=4..12nm; a second --move gives the line of solutions",
        ));
    }
    if !destinations.quiet {
        seen.case.remark_on_file(outlet);
    }
    let stack = seen.stack();
    let variation = seen.variation(&stack, moves, "--move")?;
    let aim = Aim::of(&target);
    let search = Search {
        samples: usize::from(flags.samples),
        slices: usize::from(flags.slices),
    };
    let outcome = watched(destinations.quiet, None, |progress| {
        design::aim(
            &variation,
            seen.case.text(),
            &seen.overrides,
            &aim,
            &search,
            progress,
        )
    })
    .map_err(|error| match error {
        AimError::Moves(_) => {
            Complaint::usage(format!("--move: {error}")).with_remedy("give one, two or three")
        }
        AimError::Interrupted(_) => interrupted("nothing has been written"),
    })?;
    let stamp = seen.stamp(&stack);
    if let Some(folder) = flags
        .write
        .as_ref()
        .filter(|_| !outcome.solutions.is_empty())
    {
        let stem = stem(&flags.file.path);
        let digits = outcome.solutions.len().to_string().len();
        let files: Vec<(String, &str)> = outcome
            .solutions
            .iter()
            .enumerate()
            .map(|(index, solution)| {
                let name = format!("{stem}-{:0digits$}.toml", index + 1);
                (name, solution.text.as_str())
            })
            .collect();
        destinations.write_folder(folder, "--write", &files)?;
    }
    destinations.write_tables(|| csv::aim(&variation, &outcome), &stamp)?;
    destinations.print(
        || json::aim(&variation, &aim, &outcome, &stamp),
        || sheet::aim(&variation, &aim, &outcome, &stamp, outlet.colour()),
    )?;
    Ok(if outcome.solutions.is_empty() {
        Ending::Unanswered
    } else {
        Ending::Done
    })
}
