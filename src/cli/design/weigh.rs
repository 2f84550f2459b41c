//! The command `weigh`: structures side by side.

use super::stem;
use crate::cli::Ending;
use crate::cli::case::Case;
use crate::cli::complaint::Complaint;
use crate::cli::flags;
use crate::cli::outlet::Outlet;
use crate::cli::wishes::{Destinations, one, overrides};
use crate::design::{self, Contender, Equal, Matter};
use crate::profile::Profile;
use crate::sheet::{self, Stamp, csv, json};

/// `stepwell weigh FILE FILE ...`.
pub(in crate::cli) fn weigh(flags: &flags::Weigh, outlet: &Outlet) -> Result<Ending, Complaint> {
    let overrides = overrides(&flags.conditions)?;
    let equal = one("--at-equal", &flags.at_equal, &Equal::ALL, Equal::word)?;
    let tables = ["weigh", "spectra", "states"];
    let destinations = Destinations::new(&flags.output, flags.figure.as_deref(), None, &tables)?;
    if flags.paths.len() < 2 && !flags.bulk {
        return Err(
            Complaint::usage("one structure has nothing to be weighed against")
                .with_remedy("name a second file, or --bulk"),
        );
    }
    if flags
        .paths
        .iter()
        .filter(|path| path.as_os_str() == "-")
        .count()
        > 1
    {
        return Err(Complaint::usage("standard input can be read once")
            .with_remedy("name the other structure by its file"));
    }
    let cases: Vec<Case> = flags
        .paths
        .iter()
        .map(|path| Case::read(path, flags.overlay.as_deref(), &overrides, outlet))
        .collect::<Result<_, _>>()?;
    let Some(first) = cases.first() else {
        return Err(Complaint::usage("there is nothing to weigh"));
    };
    if !destinations.quiet {
        for case in &cases {
            case.remark_on_file(outlet);
        }
    }
    let mut contenders: Vec<Contender> = cases
        .iter()
        .zip(&flags.paths)
        .map(|(case, path)| Contender {
            name: stem(path),
            stack: case.reading.stack.clone(),
            matter: Matter::Wells,
        })
        .collect();
    if flags.bulk {
        for strained in [true, false] {
            let word = if strained { "strained" } else { "unstrained" };
            contenders.push(Contender {
                name: format!("bulk, {word}"),
                stack: first.reading.stack.clone(),
                matter: Matter::Bulk { strained },
            });
        }
    }
    let weighed = design::weigh(&contenders, &first.parameters, equal)
        .map_err(|(name, failure)| Complaint::new(Ending::Failed, format!("{name}: {failure}")))?;
    let stamps: Vec<Stamp> = cases
        .iter()
        .map(|case| {
            let profile = Profile::new(&case.reading.stack, &case.parameters).ok();
            case.stamp(profile.map(|profile| profile.offsets))
        })
        .collect();
    destinations.write_tables(|| csv::weigh(&weighed), &stamps[0])?;
    destinations.write_figure(|| sheet::weigh_figure(&weighed, equal, &stamps[0]).svg())?;
    destinations.print(
        || json::weigh(&weighed, equal, &stamps),
        || sheet::weigh(&weighed, equal, &stamps, outlet.colour()),
    )?;
    Ok(Ending::Done)
}
