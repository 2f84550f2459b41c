//! The command `chart`: a figure over two numbers, computed in parts, kept where it is interrupted.

use super::Seen;
use crate::cli::Ending;
use crate::cli::case::Text;
use crate::cli::complaint::Complaint;
use crate::cli::flags;
use crate::cli::moves::one_move;
use crate::cli::outlet::{Files, Outlet, print, remark as write_remark, unwritable};
use crate::cli::watch::{interrupted, watched};
use crate::cli::wishes::{Destinations, one};
use crate::design::{Aim, Chart, ChartFigure, ChartPoint, Interrupted};
use crate::sheet::csv::ChartTable;
use crate::sheet::{self, json};
use crate::structure::Bands;
use std::fs::{self, File, OpenOptions};
use std::io::Write as _;
use std::ops::Range;
use std::path::{Path, PathBuf};

/// Most points of a chart along one of its sides.
const MOST_POINTS: usize = 2000;

/// `stepwell chart FILE`.
pub(in crate::cli) fn chart(flags: &flags::Chart, outlet: &Outlet) -> Result<Ending, Complaint> {
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
    let variation = seen.variation(&stack, moves, "--across or --up")?;
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
    let run = Run {
        chart: &chart,
        table: &table,
        csv: csv.as_deref(),
        resume: flags.resume,
        force: flags.output.force,
        quiet: destinations.quiet,
    };
    let range = part.map_or(0..chart.count(), |(part, parts)| chart.part(part, parts));
    let computed = if flags.join.is_empty() {
        run.points(range.clone())?
    } else {
        joined(&flags.join, &chart, &table)?
    };
    if let Some(path) = &csv {
        destinations.write(path, &(table.head() + &table.rows(range.start, &computed)))?;
    }
    if flags.join.is_empty() {
        run.forget_partial();
    }
    if let Some(part) = part {
        print(&sheet::chart_part(&chart, part, &range))?;
        return Ok(Ending::Done);
    }
    let aim = seen.target.as_ref().map(Aim::of);
    destinations
        .write_figure(|| sheet::chart_figure(&chart, &computed, aim.as_ref(), &stamp).svg())?;
    destinations.print(
        || json::chart(&chart, &computed, &stamp),
        || sheet::chart(&chart, &computed, aim.as_ref(), &stamp, outlet.colour()),
    )?;
    Ok(Ending::Done)
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
        let mut file = match &partial {
            Some(path) => Some(self.reopened(path, range.start, &points)?),
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

    /// The partial file with the points that there are, open for more. What was kept is replaced by
    /// the same text or stays as it was.
    fn reopened(&self, path: &Path, from: usize, points: &[ChartPoint]) -> Result<File, Complaint> {
        let text = self.table.head() + &self.table.rows(from, points);
        Files::new(true).write(path, &text)?;
        OpenOptions::new()
            .append(true)
            .open(path)
            .map_err(|error| unwritable(path, &error))
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
