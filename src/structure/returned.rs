//! The file of what came back with a wafer: photoluminescence, X-ray, and what the user vouches for.

use super::Medium;
use super::file::map;
use super::keys::{Key, Kind, Table, number};
use super::reader::{Findings, Values, value};
use crate::materials::Sense;
use crate::source::Diagnostic;
use crate::units::CELSIUS_ZERO_K;
use std::ops::Range;

/// Error of a photoluminescence peak where the file gives none, nm (common practice).
const PL_SIGMA_NM: f64 = 1.0;
/// Error of a period where the file gives none, nm (common practice).
const PERIOD_SIGMA_NM: f64 = 0.05;
/// Error of a mean mismatch where the file gives none, ppm (common practice).
const MISMATCH_SIGMA_PPM: f64 = 60.0;
/// Prior error of a thickness where the file gives none, % (common practice: wide, so that the data
/// speak).
const THICKNESS_SIGMA_PERCENT: f64 = 10.0;
/// Prior error of a share where the file gives none (common practice: wide, so that the data speak).
const SHARE_SIGMA: f64 = 0.02;

/// What came back with a wafer.
#[derive(Clone, Debug, PartialEq)]
pub struct Returned {
    /// The grower's name of the run.
    pub run: String,
    /// Photoluminescence.
    pub pl: Option<ReturnedPl>,
    /// X-ray diffraction.
    pub xray: Option<ReturnedXray>,
    /// What the user vouches for.
    pub assumptions: Assumptions,
}

/// A number with its one-sigma error.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Measured {
    /// The number.
    pub value: f64,
    /// Its error.
    pub sigma: f64,
    /// Whether the file gave the error; else it is common practice.
    pub sigma_given: bool,
}

/// Where the peak stands.
#[derive(Clone, Debug, PartialEq)]
pub enum PlPeak {
    /// In the file, nm in the medium.
    Nm(f64),
    /// In a map of the wafer, a file of this name.
    Map(String),
}

/// Photoluminescence of a wafer.
#[derive(Clone, Debug, PartialEq)]
pub struct ReturnedPl {
    /// The peak.
    pub peak: PlPeak,
    /// One-sigma error of the measurement, nm.
    pub sigma_nm: f64,
    /// Whether the file gave the error.
    pub sigma_given: bool,
    /// Temperature of the wafer, K.
    pub temperature_k: f64,
    /// In what the wavelength is measured.
    pub medium: Medium,
}

/// Which mismatch is meant.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum MismatchKind {
    /// Of the lattice planes as they stand in the strained layer: what a (00l) reflection shows.
    Perpendicular,
    /// Of the relaxed lattice constant.
    Relaxed,
}

impl MismatchKind {
    /// Both.
    pub const ALL: [Self; 2] = [Self::Perpendicular, Self::Relaxed];

    /// The word for it in files and reports.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Perpendicular => "perpendicular",
            Self::Relaxed => "relaxed",
        }
    }
}

/// The mean mismatch of a period.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MeanMismatch {
    /// Which.
    pub kind: MismatchKind,
    /// In ppm; positive where the layers are compressed (their lattice is the larger one).
    pub ppm: Measured,
}

/// X-ray diffraction of a wafer.
#[derive(Clone, Debug, PartialEq)]
pub struct ReturnedXray {
    /// The reflection, as written: `004`.
    pub reflection: String,
    /// The period from the satellites, nm.
    pub period_nm: Option<Measured>,
    /// The mean mismatch of a period from the zero order.
    pub mismatch: Option<MeanMismatch>,
}

/// What the user vouches for.
#[derive(Clone, Debug, PartialEq)]
pub struct Assumptions {
    /// Well and barrier grew at the ordered ratio of rates.
    pub barrier_ratio_fixed: bool,
    /// What may have come out otherwise than ordered: `NAME.thickness`, `NAME.Ga`, with the bytes
    /// where they stand; `None` where the file does not say.
    pub moved: Option<Vec<(Range<usize>, String)>>,
    /// One-sigma error of a thickness before anything is measured, %.
    pub thickness_sigma_percent: f64,
    /// One-sigma error of a share before anything is measured.
    pub share_sigma: f64,
}

impl Default for Assumptions {
    fn default() -> Self {
        Self {
            barrier_ratio_fixed: false,
            moved: None,
            thickness_sigma_percent: THICKNESS_SIGMA_PERCENT,
            share_sigma: SHARE_SIGMA,
        }
    }
}

static FILE: Table = Table {
    path: "",
    doc: "What came back with a wafer.",
    keys: &[
        Key {
            name: "returned",
            kind: Kind::Table(&RETURNED),
            default: "",
            doc: "what was measured",
        },
        Key {
            name: "assume",
            kind: Kind::Table(&ASSUME),
            default: "",
            doc: "what the data can't tell and the user vouches for",
        },
    ],
};

static RETURNED: Table = Table {
    path: "returned",
    doc: "What was measured.",
    keys: &[
        Key {
            name: "run",
            kind: Kind::Text,
            default: "",
            doc: "the grower's name of the run",
        },
        Key {
            name: "pl",
            kind: Kind::Table(&PL),
            default: "",
            doc: "photoluminescence",
        },
        Key {
            name: "xray",
            kind: Kind::Table(&XRAY),
            default: "",
            doc: "X-ray diffraction",
        },
    ],
};

static PL: Table = Table {
    path: "returned.pl",
    doc: "Photoluminescence: a peak, or a map of the wafer.",
    keys: &[
        Key {
            name: "peak_nm",
            kind: number("nm", (200.0, 20_000.0), (400.0, 5_000.0)),
            default: "",
            doc: "mean peak over the wafer",
        },
        Key {
            name: "map",
            kind: Kind::Text,
            default: "",
            doc: "a CSV file with the peak at points of the wafer, beside this file",
        },
        Key {
            name: "sigma_nm",
            kind: number("nm", (1e-3, 100.0), (0.05, 10.0)),
            default: "1.0",
            doc: "one-sigma error of the measurement",
        },
        Key {
            name: "temperature_c",
            kind: number("C", (-272.15, 226.85), (-200.0, 100.0)),
            default: "",
            doc: "temperature of the wafer on the bench, Celsius",
        },
        Key {
            name: "temperature_k",
            kind: number("K", (1.0, 500.0), (70.0, 400.0)),
            default: "",
            doc: "the same in kelvin; give one of the two",
        },
        Key {
            name: "medium",
            kind: Kind::Word(|| Medium::ALL.map(Medium::word).to_vec()),
            default: "",
            doc: "in what the spectrometer's wavelengths are",
        },
    ],
};

static XRAY: Table = Table {
    path: "returned.xray",
    doc: "X-ray diffraction of the wells and barriers.",
    keys: &[
        Key {
            name: "reflection",
            kind: Kind::Word(|| vec!["002", "004", "006"]),
            default: "004",
            doc: "the symmetric reflection",
        },
        Key {
            name: "period_nm",
            kind: number("nm", (0.5, 1000.0), (4.0, 60.0)),
            default: "",
            doc: "period from the spacing of the satellites",
        },
        Key {
            name: "period_sigma_nm",
            kind: number("nm", (1e-4, 50.0), (0.005, 1.0)),
            default: "0.05",
            doc: "its one-sigma error",
        },
        Key {
            name: "mean_mismatch_ppm",
            kind: number("ppm", (0.0, 100_000.0), (0.0, 20_000.0)),
            default: "",
            doc: "mean mismatch of a period from the zero order, without a sign",
        },
        Key {
            name: "mismatch",
            kind: Kind::Word(|| MismatchKind::ALL.map(MismatchKind::word).to_vec()),
            default: "",
            doc: "which mismatch: of the strained planes, or of the relaxed lattice (about half)",
        },
        Key {
            name: "sense",
            kind: Kind::Word(|| vec!["compressive", "tensile"]),
            default: "",
            doc: "compressive: the zero order lies at a smaller angle than the substrate",
        },
        Key {
            name: "mismatch_sigma_ppm",
            kind: number("ppm", (0.1, 10_000.0), (5.0, 500.0)),
            default: "60",
            doc: "its one-sigma error",
        },
    ],
};

static ASSUME: Table = Table {
    path: "assume",
    doc: "What the data can't tell and the user vouches for.",
    keys: &[
        Key {
            name: "barrier_ratio_fixed",
            kind: Kind::Flag,
            default: "false",
            doc: "well and barrier grew at the ordered ratio of rates",
        },
        Key {
            name: "moved",
            kind: Kind::Texts(8),
            default: "thickness of wells and barriers and every free share of the wells",
            doc: "what may have come out otherwise: NAME.thickness, NAME.Ga; NAME is a material or role",
        },
        Key {
            name: "thickness_sigma_percent",
            kind: number("%", (0.01, 100.0), (0.5, 20.0)),
            default: "10",
            doc: "one-sigma error of a thickness before anything is measured",
        },
        Key {
            name: "share_sigma",
            kind: number("", (1e-5, 0.5), (5e-4, 0.05)),
            default: "0.02",
            doc: "one-sigma error of a share before anything is measured",
        },
    ],
};

/// Reads a file of returned data.
///
/// # Errors
///
/// Every fault of the file, each at its place and with advice, in the order of the text.
pub fn read_returned(text: &str) -> Result<Returned, Vec<Diagnostic>> {
    let (values, mut findings) = super::values_of(text, &FILE)?;
    match returned(values, &mut findings) {
        Some(returned) if findings.faults.is_empty() => Ok(returned),
        _ => Err(super::in_order(findings.faults)),
    }
}

fn returned(mut values: Values, findings: &mut Findings) -> Option<Returned> {
    let assume = values.table("assume").and_then(|given| given.value);
    let assumptions = assume.map(assumptions).unwrap_or_default();
    let Some(given) = values.table("returned") else {
        findings.faults.push(
            Diagnostic::new(
                0..0,
                "the file says not what came back: there is no [returned]",
            )
            .with_help("write `[returned]` with `run`, then [returned.pl] and [returned.xray]"),
        );
        return None;
    };
    let mut table = given.value?;
    let run = table.text("run");
    if run.is_none() {
        findings.faults.push(
            Diagnostic::new(given.span.clone(), "the returned data have no `run`")
                .with_help("write the grower's name of the run: `run = \"E-0417\"`"),
        );
    }
    let pl_table = table.table("pl");
    let xray_table = table.table("xray");
    if pl_table.is_none() && xray_table.is_none() {
        findings.faults.push(
            Diagnostic::new(given.span, "nothing was measured")
                .with_help("write [returned.pl], [returned.xray] or both"),
        );
        return None;
    }
    let before = findings.faults.len();
    let pl = pl_table.and_then(|given| Some((given.span, given.value?)));
    let pl = pl.and_then(|(span, values)| pl_of(&span, values, findings));
    let xray = xray_table.and_then(|given| Some((given.span, given.value?)));
    let xray = xray.and_then(|(span, values)| xray_of(&span, values, findings));
    if findings.faults.len() > before {
        return None;
    }
    Some(Returned {
        run: run?.value?,
        pl,
        xray,
        assumptions,
    })
}

fn assumptions(mut values: Values) -> Assumptions {
    let defaults = Assumptions::default();
    Assumptions {
        barrier_ratio_fixed: value(&values.flag("barrier_ratio_fixed"))
            .unwrap_or(defaults.barrier_ratio_fixed),
        moved: value(&values.texts("moved")),
        thickness_sigma_percent: value(&values.number("thickness_sigma_percent"))
            .unwrap_or(defaults.thickness_sigma_percent),
        share_sigma: value(&values.number("share_sigma")).unwrap_or(defaults.share_sigma),
    }
}

fn pl_of(span: &Range<usize>, mut values: Values, findings: &mut Findings) -> Option<ReturnedPl> {
    let (peak, map_name) = (values.number("peak_nm"), values.text("map"));
    let medium = values.text("medium");
    let celsius = map(values.number("temperature_c"), |it| it + CELSIUS_ZERO_K);
    let kelvin = values.number("temperature_k");
    let sigma = value(&values.number("sigma_nm"));
    let mut fault = |span: &Range<usize>, message: &str, help: &str| {
        findings
            .faults
            .push(Diagnostic::new(span.clone(), message).with_help(help));
    };
    match (&peak, &map_name) {
        (None, None) => fault(
            span,
            "the photoluminescence has neither `peak_nm` nor a `map`",
            "write `peak_nm = 1314.2`, or `map = \"e-0417.csv\"`",
        ),
        (Some(_), Some(given)) => fault(
            &given.key,
            "the peak is given twice: `peak_nm` and `map`",
            "keep one of them",
        ),
        _ => {}
    }
    match (&celsius, &kelvin) {
        (None, None) => fault(
            span,
            "the photoluminescence has no temperature",
            "write `temperature_c = 23`: a peak moves by 0.3 to 0.6 nm per kelvin",
        ),
        (Some(one), Some(other)) => {
            let key = if one.key.start > other.key.start {
                &one.key
            } else {
                &other.key
            };
            fault(
                key,
                "the temperature is given twice: `temperature_c` and `temperature_k`",
                "keep one of them",
            );
        }
        _ => {}
    }
    if medium.is_none() {
        fault(
            span,
            "the photoluminescence does not say its `medium`",
            "write `medium = \"air\"` or \"vacuum\": the two differ by 0.03 %",
        );
    }
    let word = value(&medium)?;
    Some(ReturnedPl {
        peak: match value(&map_name) {
            Some(name) => PlPeak::Map(name),
            None => PlPeak::Nm(value(&peak)?),
        },
        sigma_nm: sigma.unwrap_or(PL_SIGMA_NM),
        sigma_given: sigma.is_some(),
        temperature_k: value(&kelvin).or(value(&celsius))?,
        medium: Medium::ALL.into_iter().find(|it| it.word() == word)?,
    })
}

fn xray_of(
    span: &Range<usize>,
    mut values: Values,
    findings: &mut Findings,
) -> Option<ReturnedXray> {
    let reflection = value(&values.text("reflection")).unwrap_or_else(|| "004".to_owned());
    let measured = |value: f64, sigma: Option<f64>, usual: f64| Measured {
        value,
        sigma: sigma.unwrap_or(usual),
        sigma_given: sigma.is_some(),
    };
    let period = values.number("period_nm");
    let period_sigma = value(&values.number("period_sigma_nm"));
    let mean = values.number("mean_mismatch_ppm");
    let kind = values.text("mismatch");
    let sense = values.text("sense");
    let mismatch_sigma = value(&values.number("mismatch_sigma_ppm"));
    if period.is_none() && mean.is_none() {
        findings.faults.push(
            Diagnostic::new(span.clone(), "the X-ray data hold nothing")
                .with_help("write `period_nm`, `mean_mismatch_ppm` or both"),
        );
        return None;
    }
    if let Some(mean) = &mean {
        if kind.is_none() {
            findings.faults.push(
                Diagnostic::new(mean.key.clone(), "the mismatch does not say which it is")
                    .with_help(
                        "write `mismatch = \"perpendicular\"` or \"relaxed\": they differ by a factor of two",
                    ),
            );
        }
        if sense.is_none() && mean.value != Some(0.0) {
            findings.faults.push(
                Diagnostic::new(mean.key.clone(), "the mismatch has no sense").with_help(
                    "write `sense = \"compressive\"` (zero order at the smaller angle) or \"tensile\"",
                ),
            );
        }
    }
    let mismatch = match &mean {
        None => None,
        Some(mean) => {
            let word = value(&kind);
            let kind = MismatchKind::ALL
                .into_iter()
                .find(|it| Some(it.word()) == word.as_deref())?;
            let compressive = value(&sense).is_none_or(|word| word == Sense::Compressive.word());
            let sign = if compressive { 1.0 } else { -1.0 };
            let ppm = measured(sign * mean.value?, mismatch_sigma, MISMATCH_SIGMA_PPM);
            Some(MeanMismatch { kind, ppm })
        }
    };
    Some(ReturnedXray {
        reflection,
        period_nm: match &period {
            None => None,
            Some(given) => Some(measured(given.value?, period_sigma, PERIOD_SIGMA_NM)),
        },
        mismatch,
    })
}
