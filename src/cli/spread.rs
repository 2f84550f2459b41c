//! The command `spread`: how wafers will scatter.

use super::Ending;
use super::case::{Case, remark_on_results};
use super::complaint::Complaint;
use super::flags;
use super::gauge::Gauge;
use super::outlet::Outlet;
use super::wishes::{Destinations, one, overrides};
use crate::design::{
    MODEL_NM, Reactor, Request, Solving, Spread, SpreadError, posed, spread as spread_of, vacuum_nm,
};
use crate::evaluation::Evaluation;
use crate::sheet::{self, Stamp, csv, json};
use crate::structure::{Stack, Wavelength};

/// Fewest and most wafers that may be drawn.
const DRAWS: (f64, f64) = (100.0, 1e7);

/// `stepwell spread FILE`.
pub(super) fn spread(flags: &flags::Spread, outlet: &Outlet) -> Result<Ending, Complaint> {
    let overrides = overrides(&flags.conditions)?;
    let kind = flags.kind.as_deref().map(kind).transpose()?;
    let draws = draws(&flags.draws)?;
    let wanted_yield = flags.wanted_yield.as_deref().map(share).transpose()?;
    let tables = ["sensitivities", "histogram", "quantiles", "yield", "layers"];
    let destinations = Destinations::new(&flags.output, flags.figure.as_deref(), None, &tables)?;
    let mut case = Case::of(&flags.file, &overrides, outlet)?;
    if !destinations.quiet {
        case.remark_on_file(outlet);
    }
    let Some(growth) = case.reading.stack.growth else {
        return Err(
            Complaint::input("the file does not say by how much growth varies: there is no [growth]")
                .with_remedy(
                    "add `[growth]` with `rate_percent = 1.0` and `flux_percent = { In = 0.5, Ga = 0.5 }`, one sigma",
                ),
        );
    };
    let target = case.reading.stack.target;
    if let Some(target) = &target {
        let at_k = case.reading.stack.operation.temperature_k;
        let mut stack = posed(&case.reading.stack, target);
        if overrides.temperature_k.is_some() {
            stack.operation.temperature_k = at_k;
        }
        case.reading.stack = stack;
    }
    let kind = kind
        .or(target.map(|target| target.kind))
        .unwrap_or(Wavelength::Photoluminescence);
    let window = target
        .filter(|target| target.kind == kind)
        .and_then(|target| Some((vacuum_nm(&target), target.tolerance_nm?)));
    if wanted_yield.is_some() && window.is_none() {
        return Err(Complaint::input(format!(
            "--yield: the file has no window for {}",
            kind.meaning()
        ))
        .with_remedy("give [target] that `kind`, and `tolerance_nm`"));
    }
    let request = Request {
        kind,
        draws,
        seed: flags.seed,
        solving: if flags.each_wafer {
            Solving::EachWafer
        } else {
            Solving::Quadratic
        },
        wanted_yield,
        window,
        model_nm: growth.model_nm.unwrap_or(MODEL_NM),
    };
    let stack = &case.reading.stack;
    let evaluation = Evaluation::new(stack, &case.parameters)?;
    if !destinations.quiet {
        remark_on_results(&evaluation.remarks, outlet);
    }
    let result = {
        let gauge = Gauge::new(draws, "drawing wafers", destinations.quiet);
        let reactor = Reactor::new(stack, &growth);
        let progress = |done| gauge.reached(done);
        spread_of(&reactor, stack, &case.parameters, &request, &progress)?
    };
    let stamp = Stamp {
        seed: Some(flags.seed),
        ..case.stamp(Some(evaluation.profile.offsets))
    };
    write(stack, &result, &stamp, &destinations, outlet)
}

fn write(
    stack: &Stack,
    result: &Spread,
    stamp: &Stamp,
    destinations: &Destinations,
    outlet: &Outlet,
) -> Result<Ending, Complaint> {
    destinations.write_tables(|| csv::spread(result), stamp)?;
    destinations.write_figure(|| sheet::spread_figure(stack, result, stamp).svg())?;
    destinations.print(
        || json::spread(stack, result, stamp),
        || sheet::spread(stack, result, stamp, outlet.colour()),
    )?;
    Ok(Ending::Done)
}

fn kind(word: &str) -> Result<Wavelength, Complaint> {
    one("--kind", word, &Wavelength::ALL, Wavelength::word)
}

/// A whole number of wafers: `100000`, `1e6`.
fn draws(word: &str) -> Result<usize, Complaint> {
    let (fewest, most) = DRAWS;
    let count: Option<f64> = word.trim().parse().ok();
    let count = count.filter(|count| count.fract() == 0.0 && (fewest..=most).contains(count));
    count.map(|count| count as usize).ok_or_else(|| {
        Complaint::usage(format!("--draws: `{word}` is no possible number of wafers"))
            .with_remedy(format!("a whole number from {fewest} to {most:e}: 100000"))
    })
}

/// A yield in per cent as a share.
fn share(word: &str) -> Result<f64, Complaint> {
    let percent: Option<f64> = word.trim().trim_end_matches('%').trim().parse().ok();
    let percent = percent.filter(|percent| (1.0..=99.99).contains(percent));
    percent.map(|percent| 0.01 * percent).ok_or_else(|| {
        Complaint::usage(format!("--yield: `{word}` is no possible yield"))
            .with_remedy("per cent from 1 to 99.99: --yield 95")
    })
}

impl From<SpreadError> for Complaint {
    fn from(error: SpreadError) -> Self {
        match error {
            SpreadError::Failure(failure) => failure.into(),
            SpreadError::NothingVaries => Self::input(error.to_string())
                .with_remedy("give `rate_percent`, or `flux_percent` of an element that is grown"),
            SpreadError::NoEmission(_) => Self::new(Ending::Failed, error.to_string())
                .with_remedy("`stepwell levels FILE` shows which wavelengths there are; gain needs a density above transparency"),
            SpreadError::Lost(_) => Self::new(Ending::Failed, error.to_string())
                .with_remedy("lower the errors in [growth]"),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn counts_and_yields_are_read_as_people_write_them() {
        for (word, count) in [("100000", 100_000), ("1e6", 1_000_000), (" 100 ", 100)] {
            assert_eq!(draws(word).expect("a count"), count);
        }
        for word in ["", "99", "1e8", "100.5", "-1000", "nan", "many"] {
            assert!(draws(word).is_err(), "{word}");
        }
        for (word, wanted) in [("95", 0.95), ("95 %", 0.95), ("1", 0.01)] {
            let got = share(word).expect("a yield");
            assert!((got - wanted).abs() < 1e-12, "{word}: {got}");
        }
        for word in ["", "0", "100", "-5", "inf", "0.95"] {
            assert!(share(word).is_err(), "{word}");
        }
    }
}
