//! Commands of the design loop: which structures, how they lie in the plane, how they compare.

use super::Ending;
use super::case::{Case, Text};
use super::complaint::Complaint;
use super::flags;
use super::moves::one_move;
use super::outlet::{Outlet, print, remark as write_remark};
use super::watch::{interrupted, watched};
use super::wishes::{Destinations, length_nm, one, overrides};
use crate::design::{
    self, Aim, AimError, Chart, ChartFigure, ChartPoint, Contender, Equal, Immovable, Interrupted,
    Matter, Move, Search, Variation,
};
use crate::profile::Profile;
use crate::sheet::csv::ChartTable;
use crate::sheet::{self, Stamp, csv, json};
use crate::structure::{Bands, Manuscript, Medium, Overrides, Stack, Target, Wavelength};
use std::fs::{self, OpenOptions};
use std::io::Write as _;
use std::ops::Range;
use std::path::{Path, PathBuf};

/// Most points of a chart along one of its sides.
const MOST_POINTS: usize = 2000;

/// `stepwell aim FILE`.
pub(super) fn aim(flags: &flags::Aim, outlet: &Outlet) -> Result<Ending, Complaint> {
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
    let manuscript = seen.manuscript()?;
    let variation = Variation::new(&stack, &manuscript, &seen.case.parameters, moves)
        .map_err(|error| immovable("--move", &error))?;
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
    if let Some(folder) = &flags.write {
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

    fn manuscript(&self) -> Result<Manuscript<'_>, Complaint> {
        Manuscript::new(self.case.text())
            .map_err(|_| Complaint::input("the file can't be taken apart"))
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

/// `stepwell chart FILE`.
pub(super) fn chart(flags: &flags::Chart, outlet: &Outlet) -> Result<Ending, Complaint> {
    let moves = vec![
        one_move("--across", &flags.across)?,
        one_move("--up", &flags.up)?,
    ];
    let figure = one("--of", &flags.of, &ChartFigure::ALL, ChartFigure::word)?;
    let points = points(&flags.points)?;
    let part = flags.part.as_deref().map(part).transpose()?;
    let destinations = Destinations::new(&flags.output, flags.figure.as_deref(), None, &["chart"])?;
    let seen = Seen::read(&flags.file, &flags.conditions, &flags.target, outlet)?;
    if !destinations.quiet {
        seen.case.remark_on_file(outlet);
    }
    let stack = seen.stack();
    let manuscript = seen.manuscript()?;
    let variation = Variation::new(&stack, &manuscript, &seen.case.parameters, moves)
        .map_err(|error| immovable("--across or --up", &error))?;
    let chart = Chart {
        variation: &variation,
        figure,
        target: seen.target.map(|target| target.kind),
        points,
    };
    let stamp = seen.stamp(&stack);
    let table = ChartTable::new(&chart, &stamp);
    let csv = destinations.csv_path("chart")?;
    if stack.model.bands == Bands::Mixed && chart.count() > 20_000 && !destinations.quiet {
        write_remark(&sheet::remark(
            "so many points with mixed valence bands take long",
            Some("--bands single for a first look, or --part on several machines"),
            None,
            outlet.error_colour(),
        ));
    }
    if let Some((part, parts)) = part {
        let range = chart.part(part, parts);
        let run = Run {
            chart: &chart,
            table: &table,
            csv: csv.as_deref(),
            resume: flags.resume,
            force: flags.output.force,
            quiet: destinations.quiet,
        };
        let computed = run.points(range.clone())?;
        if let Some(path) = &csv {
            destinations.write(path, &(table.head() + &table.rows(range.start, &computed)))?;
            run.forget_partial();
        }
        print(&sheet::chart_part(&chart, (part, parts), &range))?;
        return Ok(Ending::Done);
    }
    let computed = if flags.join.is_empty() {
        let run = Run {
            chart: &chart,
            table: &table,
            csv: csv.as_deref(),
            resume: flags.resume,
            force: flags.output.force,
            quiet: destinations.quiet,
        };
        let computed = run.points(0..chart.count())?;
        write_chart(&destinations, csv.as_deref(), &table, &computed)?;
        run.forget_partial();
        computed
    } else {
        let joined = joined(&flags.join, &chart, &table)?;
        write_chart(&destinations, csv.as_deref(), &table, &joined)?;
        joined
    };
    let aim = seen.target.as_ref().map(Aim::of);
    destinations
        .write_figure(|| sheet::chart_figure(&chart, &computed, aim.as_ref(), &stamp).svg())?;
    destinations.print(
        || json::chart(&chart, &computed, &stamp),
        || sheet::chart(&chart, &computed, aim.as_ref(), &stamp, outlet.colour()),
    )?;
    Ok(Ending::Done)
}

fn write_chart(
    destinations: &Destinations,
    csv: Option<&Path>,
    table: &ChartTable<'_>,
    points: &[ChartPoint],
) -> Result<(), Complaint> {
    csv.map_or(Ok(()), |path| {
        destinations.write(path, &(table.head() + &table.rows(0, points)))
    })
}

/// `60x40`.
fn points(words: &str) -> Result<(usize, usize), Complaint> {
    let unclear = || {
        Complaint::usage(format!(
            "--points: `{words}` is no number of columns and rows"
        ))
        .with_remedy(format!("--points 60x40; each from 2 to {MOST_POINTS}"))
    };
    let (columns, rows) = words.split_once(['x', '×']).ok_or_else(unclear)?;
    let count = |word: &str| {
        word.trim()
            .parse::<usize>()
            .ok()
            .filter(|count| (2..=MOST_POINTS).contains(count))
            .ok_or_else(unclear)
    };
    Ok((count(columns)?, count(rows)?))
}

/// `3/16`.
fn part(words: &str) -> Result<(usize, usize), Complaint> {
    let numbers = words
        .split_once('/')
        .and_then(|(part, parts)| Some((part.trim().parse().ok()?, parts.trim().parse().ok()?)));
    numbers
        .filter(|&(part, parts): &(usize, usize)| part >= 1 && part <= parts && parts <= 100_000)
        .ok_or_else(|| {
            Complaint::usage(format!("--part: `{words}` is no part of several"))
                .with_remedy("--part 3/16 is the third of sixteen")
        })
}

/// The computation of the points of a chart, kept block by block beside its table.
struct Run<'a> {
    chart: &'a Chart<'a>,
    table: &'a ChartTable<'a>,
    csv: Option<&'a Path>,
    resume: bool,
    force: bool,
    quiet: bool,
}

/// Why the points of a chart were not all computed.
enum Halt {
    Interrupted,
    Unwritable(std::io::Error),
}

impl From<Interrupted> for Halt {
    fn from(_: Interrupted) -> Self {
        Self::Interrupted
    }
}

impl Run<'_> {
    /// Where the blocks are kept until all are there.
    fn partial(&self) -> Option<PathBuf> {
        let mut path = self.csv?.as_os_str().to_owned();
        path.push(".partial");
        Some(PathBuf::from(path))
    }

    fn forget_partial(&self) {
        if let Some(path) = self.partial() {
            let _ = fs::remove_file(path);
        }
    }

    fn points(&self, range: Range<usize>) -> Result<Vec<ChartPoint>, Complaint> {
        let partial = self.partial();
        let mut points = match &partial {
            Some(path) => self.kept(path, &range)?,
            None => Vec::new(),
        };
        let unwritable = |path: &Path, error: &std::io::Error| {
            Complaint::new(
                Ending::Failed,
                format!("`{}` can't be written: {error}", path.display()),
            )
        };
        let mut file = match &partial {
            Some(path) => {
                let text = self.table.head() + &self.table.rows(range.start, &points);
                fs::write(path, text).map_err(|error| unwritable(path, &error))?;
                let opened = OpenOptions::new().append(true).open(path);
                Some(opened.map_err(|error| unwritable(path, &error))?)
            }
            None => None,
        };
        let start = range.start + points.len();
        let steps = (range.len(), points.len());
        let halted = watched(self.quiet, Some(steps), |progress| {
            let hand_on = |block: &[ChartPoint]| -> Result<(), Halt> {
                if let Some(file) = &mut file {
                    let rows = self.table.rows(range.start + points.len(), block);
                    file.write_all(rows.as_bytes()).map_err(Halt::Unwritable)?;
                }
                points.extend_from_slice(block);
                Ok(())
            };
            self.chart.compute(start..range.end, progress, hand_on)
        });
        match halted {
            Ok(()) => Ok(points),
            Err(Halt::Unwritable(error)) => Err(unwritable(
                partial.as_deref().unwrap_or(Path::new("")),
                &error,
            )),
            Err(Halt::Interrupted) => Err(match &partial {
                Some(path) => interrupted(&format!(
                    "{} of {} points are kept in `{}`",
                    points.len(),
                    range.len(),
                    path.display()
                ))
                .with_remedy("the same command with --resume goes on from there"),
                None => interrupted("nothing is kept without --csv"),
            }),
        }
    }

    /// What an interrupted run left.
    fn kept(&self, path: &Path, range: &Range<usize>) -> Result<Vec<ChartPoint>, Complaint> {
        if !path.exists() {
            return Ok(Vec::new());
        }
        if !self.resume {
            if self.force {
                return Ok(Vec::new());
            }
            return Err(Complaint::usage(format!(
                "`{}` is there from an interrupted chart",
                path.display()
            ))
            .with_remedy("--resume goes on with it, --force begins again"));
        }
        let text = Text::read(path)?;
        // A line that was cut off is computed again.
        let whole = text.content.rfind('\n').map_or(0, |at| at + 1);
        let kept = self.read(&text.content[..whole], path)?;
        let mut points = Vec::new();
        for (at, point) in kept {
            if at != range.start + points.len() || at >= range.end {
                return Err(foreign(path, "its points are not those of this chart"));
            }
            points.push(point);
        }
        Ok(points)
    }

    fn read(&self, text: &str, path: &Path) -> Result<Vec<(usize, ChartPoint)>, Complaint> {
        self.table
            .read(text)
            .map_err(|reason| foreign(path, &reason))
    }
}

fn foreign(path: &Path, reason: &str) -> Complaint {
    Complaint::input(format!(
        "`{}` does not belong to this chart: {reason}",
        path.display()
    ))
    .with_remedy("the file, the moves, the figure, the points and the program must be the same")
}

/// All points of a chart from the files of its parts.
fn joined(
    paths: &[PathBuf],
    chart: &Chart<'_>,
    table: &ChartTable<'_>,
) -> Result<Vec<ChartPoint>, Complaint> {
    let mut points: Vec<Option<ChartPoint>> = vec![None; chart.count()];
    for path in paths {
        let text = Text::read(path)?;
        let rows = table
            .read(&text.content)
            .map_err(|reason| foreign(path, &reason))?;
        for (at, point) in rows {
            points[at] = Some(point);
        }
    }
    let missing = points.iter().filter(|point| point.is_none()).count();
    if missing > 0 {
        return Err(Complaint::input(format!(
            "{missing} of {} points are in none of the files",
            points.len()
        ))
        .with_remedy("name the files of all parts after --join"));
    }
    Ok(points.into_iter().flatten().collect())
}

/// `stepwell weigh FILE FILE ...`.
pub(super) fn weigh(flags: &flags::Weigh, outlet: &Outlet) -> Result<Ending, Complaint> {
    let overrides = overrides(&flags.conditions)?;
    let equal = one("--at-equal", &flags.at_equal, &Equal::ALL, Equal::word)?;
    let tables = ["weigh", "spectra"];
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
