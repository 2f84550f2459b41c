//! The command `sheet`: an order for the grower, or the same with all that stays in the house; and
//! what `check` says of one that was kept.

use super::Ending;
use super::case::{Case, Text, parameters};
use super::complaint::Complaint;
use super::flags;
use super::gauge::Gauge;
use super::outlet::{Files, Outlet, print, remark as write_remark};
use super::wishes::{make_folder, one};
use crate::design::{Audience, House, Ordered, SPREAD_DRAWS, vacuum_nm};
use crate::materials::Parameters;
use crate::sheet::order::{
    self, Document, Figures, Inspection, Kept, Origins, Paper, Since, Standing, Unreadable,
    inspect, kept,
};
use crate::sheet::{self, Stamp, sha256};
use crate::structure::{self, Overrides, Reading, Stack, Wavelength};
use std::path::Path;

/// Files of a sheet that are no figures.
const PAGE: &str = "sheet.html";
const LAYERS: &str = "layers.csv";
const RECORD: &str = "sheet.json";
const PDF: &str = "sheet.pdf";
/// Files that figures may become.
const FIGURES: [&str; 4] = [
    "rocking-curve.svg",
    "levels.svg",
    "spectrum.svg",
    "spread.svg",
];

/// `stepwell sheet FILE --for grower`.
pub(super) fn sheet(flags: &flags::Sheet, outlet: &Outlet) -> Result<Ending, Complaint> {
    let audience = one("--for", &flags.audience, &Audience::ALL, Audience::word)?;
    let mut files = Files::new(flags.force);
    if let Some(folder) = &flags.out {
        announce(folder, audience, flags.pdf, &mut files)?;
    }
    let paper = one("--paper", &flags.paper, &Paper::ALL, Paper::word)?;
    let since = flags.since.as_deref().map(since).transpose()?;
    let case = Case::read(
        &flags.file.path,
        flags.file.overlay.as_deref(),
        &Overrides::default(),
        outlet,
    )?;
    if !flags.quiet {
        case.remark_on_file(outlet);
        if case.reading.stack.order.is_none() {
            write_remark(&sheet::remark(
                "the file has no [order]: the sheet asks for what an order needs",
                Some(
                    "`stepwell manual` lists its keys; structures/estuary-1310.toml has them all in use",
                ),
                None,
                outlet.error_colour(),
            ));
        }
    }
    let origins = Origins {
        stack: &case.reading.stack,
        text: case.text(),
        sha256: case.sha256(),
        parameters: &case.parameters,
    };
    let (mut made, concerns) = make(
        &origins,
        &case.reading,
        audience,
        since.as_ref(),
        flags.quiet,
    );
    if !flags.quiet {
        for (words, advice) in &concerns {
            write_remark(&sheet::remark(
                words,
                Some(advice),
                None,
                outlet.error_colour(),
            ));
        }
    }
    if made.document.repeats_revision() && !made.document.changes().is_empty() && !flags.quiet {
        write_remark(&sheet::remark(
            "the sheet differs from the earlier one and has the same revision",
            Some("give it a `revision` of its own in [order]"),
            None,
            outlet.error_colour(),
        ));
    }
    let written = match &flags.out {
        Some(folder) => write(folder, &mut made, flags.pdf.then_some(paper), &files)?,
        None => Vec::new(),
    };
    print(&if flags.json {
        made.document.text()
    } else {
        order::summary(&made.document, &written, outlet.colour())
    })?;
    Ok(Ending::Done)
}

fn announce(
    folder: &Path,
    audience: Audience,
    pdf: bool,
    files: &mut Files,
) -> Result<(), Complaint> {
    if folder.is_file() {
        return Err(
            Complaint::usage(format!("--out: `{}` is a file", folder.display()))
                .with_remedy("give the name of a folder, which may be a new one"),
        );
    }
    let figures = match audience {
        Audience::Grower => &FIGURES[..1],
        Audience::House => &FIGURES[..],
    };
    let all = [PAGE, LAYERS, RECORD].iter().chain(figures);
    let pdf = pdf.then_some(PDF);
    all.copied()
        .chain(pdf)
        .try_for_each(|name| files.announce_in_any_folder(&folder.join(name), "--out"))
}

/// The record of an earlier sheet.
fn since(path: &Path) -> Result<Since, Complaint> {
    let text = Text::read(path)?;
    Since::read(&text.content).map_err(|error| unreadable(&text.name, &error))
}

fn unreadable(name: &str, error: &Unreadable) -> Complaint {
    let remedy = match error {
        Unreadable::NoJson(_) | Unreadable::NoSheet => {
            "give the sheet.json that `stepwell sheet FILE --for grower --out FOLDER` wrote"
        }
        Unreadable::Format(_) => "take the program that wrote it",
    };
    Complaint::input(format!("{name}: {error}")).with_remedy(remedy)
}

/// A sheet before it is written.
struct Made {
    document: Document,
    figures: Figures,
}

fn make(
    origins: &Origins<'_>,
    reading: &Reading,
    audience: Audience,
    since: Option<&Since>,
    quiet: bool,
) -> (Made, Vec<Concern>) {
    let (stack, parameters) = (origins.stack, origins.parameters);
    let ordered = Ordered::new(stack, parameters);
    let concerns = concerns(stack, &ordered);
    let house = (audience == Audience::House).then(|| {
        let gauge = Gauge::new(SPREAD_DRAWS, "drawing wafers", quiet);
        let progress = |done| gauge.reached(done);
        House::new(stack, parameters, &reading.remarks, &progress)
    });
    let document = Document::new(origins, &ordered, house.as_ref(), since);
    let mut figures = Figures::of_wafer(&ordered, &document.stamp());
    if let Some(house) = &house {
        let offsets = house.evaluation.as_ref().ok().map(|it| it.profile.offsets);
        let stamp = Stamp::new(stack, parameters, offsets, origins.sha256);
        figures.add_house(stack, house, &stamp);
    }
    (Made { document, figures }, concerns)
}

/// What is said and what to do about it.
type Concern = (String, &'static str);

/// What whoever sends the sheet must know of its photoluminescence, on either copy.
fn concerns(stack: &Stack, ordered: &Ordered) -> Vec<Concern> {
    let pl = match &ordered.targets.pl {
        Ok(pl) => pl,
        Err(reason) => {
            return vec![(
                format!("the photoluminescence to be had cannot be computed: {reason}"),
                "the grower reads that it is to be agreed",
            )];
        }
    };
    let kelvin = ordered.targets.temperature_k;
    let target = stack.target.filter(|target| {
        let meant_k = target
            .temperature_k
            .unwrap_or(stack.operation.temperature_k);
        // At another temperature than that of the bench it is another wavelength.
        target.kind == Wavelength::Photoluminescence && (meant_k - kelvin).abs() < 0.5
    });
    let Some((target_nm, tolerance_nm)) =
        target.and_then(|target| Some((vacuum_nm(&target), target.tolerance_nm?)))
    else {
        return Vec::new();
    };
    if (pl.vacuum_nm - target_nm).abs() <= tolerance_nm {
        return Vec::new();
    }
    vec![(
        format!(
            "OUTSIDE THE TARGET: the sheet orders photoluminescence at {:.1} nm, and [target] wants \
             {target_nm:.1} nm ± {tolerance_nm} nm (both in vacuum)",
            pl.vacuum_nm
        ),
        "change the layers, [target], or `pl_offset_nm` in [order.targets] before it is sent",
    )]
}

/// Writes every file of a sheet; the record, which names the others, comes last.
fn write(
    folder: &Path,
    made: &mut Made,
    paper: Option<Paper>,
    files: &Files,
) -> Result<Vec<String>, Complaint> {
    let (document, figures) = (&mut made.document, &made.figures);
    let mut all: Vec<(String, Vec<u8>)> = vec![
        (PAGE.to_owned(), document.html(figures).into_bytes()),
        (LAYERS.to_owned(), document.layers_csv().into_bytes()),
    ];
    let drawn = figures.files().into_iter();
    all.extend(drawn.map(|(name, svg)| (name, svg.into_bytes())));
    all.extend(paper.map(|paper| (PDF.to_owned(), document.pdf(figures, paper))));
    document.list_files(&all);
    all.push((RECORD.to_owned(), document.text().into_bytes()));
    make_folder(folder)?;
    all.iter()
        .map(|(name, bytes)| {
            let path = folder.join(name);
            files.write_bytes(&path, bytes)?;
            Ok(path.display().to_string())
        })
        .collect()
}

/// `stepwell check SHEET.json`: whether a sheet still agrees with its own structure.
pub(super) fn check(flags: &flags::Check, outlet: &Outlet) -> Result<Ending, Complaint> {
    let text = Text::read(&flags.file.path)?;
    let kept = kept(&text.content).map_err(|error| unreadable(&text.name, &error))?;
    let parameters = parameters(flags.file.overlay.as_deref(), outlet)?;
    let (anew, found) = again(&kept, &parameters, outlet, flags.output.quiet)?;
    let files = files_beside(&flags.file.path, &kept, &anew, &found);
    let anew = anew.document;
    print(&if flags.output.json {
        order::inspection_json(&anew, &found, &files)
    } else {
        order::inspection(&anew, &found, &files, outlet.colour())
    })?;
    let agrees = found.agrees() && files.iter().all(|(_, standing)| standing.agrees());
    Ok(if agrees {
        Ending::Done
    } else {
        Ending::Outside
    })
}

/// The sheet made anew from the structure that it holds, and what does not agree.
fn again(
    kept: &Kept,
    parameters: &Parameters,
    outlet: &Outlet,
    quiet: bool,
) -> Result<(Made, Inspection), Complaint> {
    let reading =
        structure::read(&kept.structure, parameters, &Overrides::default()).map_err(|faults| {
            Complaint::faults(
                &faults,
                "the structure of the sheet",
                &kept.structure,
                outlet.error_colour(),
            )
        })?;
    let origins = Origins {
        stack: &reading.stack,
        text: &kept.structure,
        sha256: &kept.source_sha256,
        parameters,
    };
    let (made, _) = make(&origins, &reading, kept.audience, None, quiet);
    let found = inspect(kept, &made.document);
    Ok((made, found))
}

/// Files of the sheet beside its record, and how each was found.
fn files_beside(
    record: &Path,
    kept: &Kept,
    anew: &Made,
    found: &Inspection,
) -> Vec<(String, Standing)> {
    let folder = record.parent().unwrap_or(Path::new(""));
    // Pages are made of the record and of figures; where both are as they were, so are they.
    let is_repeatable = found.is_same_program && found.agrees();
    let made = made_again(kept, anew);
    let mut files: Vec<(String, Standing)> = kept
        .files
        .iter()
        .map(|(name, sum)| {
            let standing = standing(folder, name, sum);
            let sums = made.iter().filter(|(made, _)| made == name);
            let mut sums = sums.map(|(_, made)| made).peekable();
            let is_other = sums.peek().is_some() && !sums.any(|made| made == sum);
            if standing.agrees() && is_repeatable && is_other {
                (name.clone(), Standing::NotOfRecord)
            } else {
                (name.clone(), standing)
            }
        })
        .collect();
    for (name, _) in made {
        let is_there = std::fs::symlink_metadata(folder.join(&name)).is_ok();
        let is_due = is_there || (kept.names_files() && name != PDF);
        if is_due && files.iter().all(|(known, _)| *known != name) {
            files.push((name, Standing::Unlisted));
        }
    }
    files
}

/// Every file that a sheet may be written with, made of the kept record: name and SHA-256. The PDF
/// is there once for each paper.
fn made_again(kept: &Kept, anew: &Made) -> Vec<(String, String)> {
    let document = kept.document();
    let mut made = vec![
        (
            PAGE.to_owned(),
            sha256(document.html(&anew.figures).as_bytes()),
        ),
        (LAYERS.to_owned(), sha256(document.layers_csv().as_bytes())),
    ];
    let drawn = anew.figures.files().into_iter();
    made.extend(drawn.map(|(name, svg)| (name, sha256(svg.as_bytes()))));
    made.extend(Paper::ALL.map(|paper| {
        let pdf = document.pdf(&anew.figures, paper);
        (PDF.to_owned(), sha256(&pdf))
    }));
    made
}

/// How a file beside the record is found. Only what is a file is opened: a pipe would never end.
fn standing(folder: &Path, name: &str, sum: &str) -> Standing {
    let plain = Path::new(name);
    if sum.is_empty() || plain.file_name() != Some(plain.as_os_str()) {
        return Standing::NoName;
    }
    let path = folder.join(name);
    match std::fs::metadata(&path) {
        Err(error) if error.kind() == std::io::ErrorKind::NotFound => return Standing::Missing,
        Err(_) => return Standing::Unreadable,
        Ok(about) if !about.is_file() => return Standing::NoFile,
        Ok(_) => {}
    }
    match std::fs::read(&path) {
        Err(_) => Standing::Unreadable,
        Ok(bytes) if sha256(&bytes) == sum => Standing::Agrees,
        Ok(_) => Standing::Edited,
    }
}
