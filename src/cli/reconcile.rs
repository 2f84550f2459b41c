//! The command `reconcile`: what came back with a wafer, and the ledger that remembers it.

use super::Ending;
use super::case::{Case, Text};
use super::complaint::Complaint;
use super::flags;
use super::outlet::{Files, Outlet, append};
use super::wishes::{Destinations, bands};
use crate::design::{
    HouseOffset, MODEL_NM, Readings, ReconcileError, Unknown, family, modelled_pl_nm,
    reconcile as reconcile_of, unknowns as unknowns_of,
};
use crate::profile::Profile;
use crate::sheet::{self, csv, json};
use crate::source::Diagnostic;
use crate::structure::{
    Ledger, LedgerEntry, Overrides, PhotoluminescenceMap, PlPeak, Returned, Stack, read_returned,
};
use std::path::Path;

/// Wavelength at which errors of the model are turned into energies where no peak came back, nm.
const WITHOUT_PEAK_NM: f64 = 1310.0;

/// `stepwell reconcile FILE RETURNED`.
pub(super) fn reconcile(flags: &flags::Reconcile, outlet: &Outlet) -> Result<Ending, Complaint> {
    let damping = damping(&flags.damping)?;
    let overrides = Overrides {
        bands: flags.bands.as_deref().map(bands).transpose()?,
        ..Overrides::default()
    };
    let tables = [
        "estimate",
        "data",
        "correlation",
        "causes",
        "correction",
        "limits",
    ];
    let destinations = Destinations::new(&flags.output, None, None, &tables)?;
    let mut case = Case::of(&flags.file, &overrides, outlet)?;
    let source = Text::read(&flags.returned)?;
    let returned = read_returned(&source.content).map_err(|it| faults(&it, &source, outlet))?;
    let unknowns = unknowns_of(&case.reading.stack, &returned.assumptions)
        .map_err(|it| faults(&it, &source, outlet))?;
    let map = map(&returned, &flags.returned, outlet)?;
    let readings = Readings::of(&returned, map.as_ref());
    if let Some(temperature_k) = readings.temperature_k {
        let operation = &mut case.reading.stack.operation;
        operation.temperature_k = temperature_k;
        operation.temperature_given = true;
    }
    if !destinations.quiet {
        case.remark_on_file(outlet);
    }
    let stack = &case.reading.stack;
    let text = match &flags.ledger {
        Some(path) => ledger_text(path, flags.record)?,
        None => None,
    };
    let ledger = match &text {
        None => Ledger::default(),
        Some(text) => Ledger::read(&text.content).map_err(|it| faults(&it, text, outlet))?,
    };
    let recorder = match &flags.ledger {
        Some(path) if flags.record => {
            let entry = entry(stack, &case, &returned, &readings, &unknowns)?;
            let force = flags.output.force;
            Some(Recorder::new(path, &ledger, text.as_ref(), entry, force)?)
        }
        _ => None,
    };
    // A wafer is not its own witness, whether it is recorded now or was before.
    let mut others = ledger;
    others.entries.retain(|(_, it)| it.run != returned.run);
    let model_nm = stack.growth.and_then(|growth| growth.model_nm);
    let offset = HouseOffset::of(
        stack,
        &others,
        model_nm.unwrap_or(MODEL_NM),
        readings.pl_nm.map_or(WITHOUT_PEAK_NM, |pl| pl.value),
    );
    let result = reconcile_of(
        stack,
        &case.parameters,
        &readings,
        &unknowns,
        &offset,
        damping,
    )?;
    let profile = Profile::new(stack, &case.parameters).ok();
    let stamp = case.stamp(profile.map(|profile| profile.offsets));
    let wafer = sheet::Wafer {
        stack,
        returned: &returned,
        returned_sha256: &source.sha256,
        map: map.as_ref(),
        result: &result,
    };
    destinations.write_tables(|| csv::reconcile(&result), &stamp)?;
    if let Some(recorder) = recorder {
        recorder.write()?;
    }
    destinations.print(
        || json::reconcile(&wafer, &stamp),
        || sheet::reconcile(&wafer, &stamp, outlet.colour()),
    )?;
    let is_open = !result.undetermined.is_empty() || !result.explains_the_data();
    Ok(if is_open {
        Ending::Unanswered
    } else if result.next_is_outside() {
        Ending::Outside
    } else {
        Ending::Done
    })
}

fn faults(faults: &[Diagnostic], source: &Text, outlet: &Outlet) -> Complaint {
    Complaint::faults(faults, &source.name, &source.content, outlet.error_colour())
}

/// The map that the returned data speak of: a file beside theirs.
fn map(
    returned: &Returned,
    beside: &Path,
    outlet: &Outlet,
) -> Result<Option<PhotoluminescenceMap>, Complaint> {
    let Some(PlPeak::Map(name)) = returned.pl.as_ref().map(|pl| &pl.peak) else {
        return Ok(None);
    };
    let folder = beside.parent().unwrap_or_else(|| Path::new(""));
    let source = Text::read(&folder.join(name))?;
    let mut map = PhotoluminescenceMap::read(&source.content)
        .map_err(|fault| faults(&[fault], &source, outlet))?;
    if source.had_byte_order_mark {
        map.assumptions
            .push("a byte-order mark left out".to_owned());
    }
    Ok(Some(map))
}

/// The text of a ledger; a run can be recorded in one that is not there yet.
fn ledger_text(path: &Path, record: bool) -> Result<Option<Text>, Complaint> {
    if record && !path.exists() {
        return Ok(None);
    }
    Text::read(path).map(Some)
}

/// What the ledger will hold of this run.
fn entry(
    stack: &Stack,
    case: &Case,
    returned: &Returned,
    readings: &Readings,
    unknowns: &[Unknown],
) -> Result<LedgerEntry, Complaint> {
    let (Some(pl), Some(temperature_k)) = (readings.pl_nm, readings.temperature_k) else {
        return Err(Complaint::usage("--record: no photoluminescence came back")
            .with_remedy("a house offset is measured by it: leave --record out"));
    };
    let by_xray = readings.period_nm.is_some() || readings.mismatch.is_some();
    Ok(LedgerEntry {
        family: family(stack),
        run: returned.run.clone(),
        modelled_nm: modelled_pl_nm(stack, &case.parameters, readings, unknowns)?,
        measured_nm: pl.value,
        temperature_k,
        bands: stack.model.bands.word().to_owned(),
        structure: if by_xray { "by X-ray" } else { "ordered" }.to_owned(),
    })
}

/// A run on its way into the ledger.
struct Recorder<'a> {
    path: &'a Path,
    entry: LedgerEntry,
    /// The whole text where an entry is replaced; else the entry goes behind what is there.
    replaced: Option<String>,
}

impl<'a> Recorder<'a> {
    fn new(
        path: &'a Path,
        ledger: &Ledger,
        text: Option<&Text>,
        entry: LedgerEntry,
        force: bool,
    ) -> Result<Self, Complaint> {
        let is_new = !ledger.entries.iter().any(|(_, it)| it.is_of_run(&entry));
        let replaced = match text {
            Some(text) if !is_new => {
                if !force {
                    return Err(Complaint::usage(format!(
                        "the ledger `{}` holds run {} already",
                        path.display(),
                        entry.run
                    ))
                    .with_remedy("leave --record out, or replace the entry with --force"));
                }
                let kept = ledger.without_run(&text.content, &entry);
                Some(format!("{}\n{}", kept.trim_end(), entry.text()))
            }
            _ => None,
        };
        Ok(Self {
            path,
            entry,
            replaced,
        })
    }

    fn write(&self) -> Result<(), Complaint> {
        match &self.replaced {
            Some(text) => Files::new(true).write(self.path, text),
            None => append(self.path, Ledger::HEAD, &self.entry.text()),
        }
    }
}

/// A share above 0 to 1.
fn damping(word: &str) -> Result<f64, Complaint> {
    let share: Option<f64> = word.trim().parse().ok();
    share
        .filter(|share| *share > 0.0 && *share <= 1.0)
        .ok_or_else(|| {
            Complaint::usage(format!("--damping: `{word}` is no possible share"))
                .with_remedy("a number above 0, up to 1: --damping 0.7")
        })
}

impl From<ReconcileError> for Complaint {
    fn from(error: ReconcileError) -> Self {
        match error {
            ReconcileError::Failure(failure) => failure.into(),
            ReconcileError::NoUnknown => Self::input(error.to_string())
                .with_remedy("name one in [assume]: moved = [\"well.thickness\"]"),
            ReconcileError::NoPeriod => {
                Self::input(error.to_string()).with_remedy("leave [returned.xray] out")
            }
            ReconcileError::NoReflection(_) => {
                Self::input(error.to_string()).with_remedy("give another `reflection`, 002 or 004")
            }
            ReconcileError::NoEmission => Self::new(Ending::Failed, error.to_string()),
        }
    }
}
