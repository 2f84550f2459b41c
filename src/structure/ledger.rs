//! The ledger of house offsets: by how much measured photoluminescence missed the model, run by run.
//!
//! A ledger only grows: an entry is a piece of text that goes behind what is there.

use super::keys::{FORMAT, Key, Kind, Table, number};
use super::number::exact;
use super::reader::{Findings, Values};
use crate::source::Diagnostic;
use crate::units::photon_ev;
use std::fmt::Write as _;
use std::ops::Range;

/// One run.
#[derive(Clone, Debug, PartialEq)]
pub struct LedgerEntry {
    /// The alloy family of the wells and the substrate: `AlGaInAs on InP`.
    pub family: String,
    /// The grower's name of the run.
    pub run: String,
    /// The peak that the model gives at the temperature of the measurement, nm in vacuum.
    pub modelled_nm: f64,
    /// The peak that was measured, nm in vacuum.
    pub measured_nm: f64,
    /// Temperature of both, K.
    pub temperature_k: f64,
    /// Valence bands of the model: `single` or `mixed`.
    pub bands: String,
    /// What the model was fed with: `ordered`, or `by X-ray`.
    pub structure: String,
}

impl LedgerEntry {
    /// Measured less modelled photon energy, meV.
    #[must_use]
    pub fn offset_mev(&self) -> f64 {
        1e3 * (photon_ev(self.measured_nm) - photon_ev(self.modelled_nm))
    }

    /// The entry as it goes behind a ledger.
    #[must_use]
    pub fn text(&self) -> String {
        let quoted = |text: &str| toml::Value::String(text.to_owned()).to_string();
        let mut text = String::from("\n[[offsets]]\n");
        for (key, value) in [
            ("family", quoted(&self.family)),
            ("run", quoted(&self.run)),
            ("modelled_nm", exact(self.modelled_nm)),
            ("measured_nm", exact(self.measured_nm)),
            ("temperature_k", exact(self.temperature_k)),
            ("bands", quoted(&self.bands)),
            ("structure", quoted(&self.structure)),
        ] {
            let _ = writeln!(text, "{key} = {value}");
        }
        text
    }

    /// Whether another entry is of the same run and the same model.
    #[must_use]
    pub fn is_of_run(&self, other: &Self) -> bool {
        (&self.family, &self.run, &self.bands) == (&other.family, &other.run, &other.bands)
    }
}

/// The entries of a ledger, each with the bytes of its text.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Ledger {
    /// In the order of the file.
    pub entries: Vec<(Range<usize>, LedgerEntry)>,
}

static FILE: Table = Table {
    path: "",
    doc: "House offsets: measured photoluminescence against the model.",
    keys: &[
        FORMAT,
        Key {
            name: "offsets",
            kind: Kind::Rows(&OFFSETS),
            default: "",
            doc: "one table a run",
        },
    ],
};

static OFFSETS: Table = Table {
    path: "offsets",
    doc: "One run.",
    keys: &[
        text(
            "family",
            "alloy family of the wells and the substrate: \"AlGaInAs on InP\"",
        ),
        text("run", "the grower's name of the run"),
        wavelength("modelled_nm", "the peak that the model gives, in vacuum"),
        wavelength("measured_nm", "the peak that was measured, in vacuum"),
        Key {
            name: "temperature_k",
            kind: number("K", (1.0, 500.0), (70.0, 400.0)),
            default: "",
            doc: "temperature of both",
        },
        text(
            "bands",
            "valence bands of the model: \"single\" or \"mixed\"",
        ),
        text(
            "structure",
            "what the model was fed with: \"ordered\" or \"by X-ray\"",
        ),
    ],
};

const fn text(name: &'static str, doc: &'static str) -> Key {
    Key {
        name,
        kind: Kind::Text,
        default: "",
        doc,
    }
}

const fn wavelength(name: &'static str, doc: &'static str) -> Key {
    Key {
        name,
        kind: number("nm", (200.0, 20_000.0), (400.0, 5_000.0)),
        default: "",
        doc,
    }
}

impl Ledger {
    /// How a new ledger begins.
    pub const HEAD: &str =
        "# House offsets: measured photoluminescence against the model, run by run.\nformat = 1\n";

    /// Reads a ledger.
    ///
    /// # Errors
    ///
    /// Every fault of the file at its place.
    pub fn read(text: &str) -> Result<Self, Vec<Diagnostic>> {
        let (mut values, mut findings) = super::values_of(text, &FILE)?;
        if values.count("format").is_none() {
            findings.faults.push(
                Diagnostic::new(0..0, "the ledger does not say its `format`")
                    .with_help("write `format = 1` as the first line"),
            );
        }
        let rows = values.rows("offsets").and_then(|given| given.value);
        let entries = rows
            .unwrap_or_default()
            .into_iter()
            .filter_map(|row| entry(row, &mut findings))
            .collect();
        if findings.faults.is_empty() {
            Ok(Self { entries })
        } else {
            Err(super::in_order(findings.faults))
        }
    }

    /// The text of a ledger without the entries of a run.
    #[must_use]
    pub fn without_run(&self, text: &str, run: &LedgerEntry) -> String {
        let mut kept = String::new();
        let mut from = 0;
        let starts = |index: usize| {
            self.entries
                .get(index)
                .map_or(text.len(), |(span, _)| span.start)
        };
        for (index, (span, entry)) in self.entries.iter().enumerate() {
            if entry.is_of_run(run) {
                kept.push_str(&text[from..span.start]);
                from = starts(index + 1);
            }
        }
        kept.push_str(&text[from..]);
        kept
    }
}

fn entry(mut row: Values, findings: &mut Findings) -> Option<(Range<usize>, LedgerEntry)> {
    let missing: Vec<String> = {
        let has: Vec<&str> = row.names().collect();
        OFFSETS
            .names()
            .filter(|name| !has.contains(name))
            .map(|name| format!("`{name}`"))
            .collect()
    };
    if !missing.is_empty() {
        findings.faults.push(
            Diagnostic::new(
                row.span.clone(),
                format!("the entry has no {}", missing.join(", no ")),
            )
            .with_help("complete it, or take it out"),
        );
    }
    let mut word = |name| row.text(name).and_then(|given| given.value);
    let (family, run, bands, structure) = (
        word("family"),
        word("run"),
        word("bands"),
        word("structure"),
    );
    let mut value = |name| row.number(name).and_then(|given| given.value);
    let entry = LedgerEntry {
        modelled_nm: value("modelled_nm")?,
        measured_nm: value("measured_nm")?,
        temperature_k: value("temperature_k")?,
        family: family?,
        run: run?,
        bands: bands?,
        structure: structure?,
    };
    Some((row.span, entry))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn entry(run: &str) -> LedgerEntry {
        LedgerEntry {
            family: "AlGaInAs on InP".to_owned(),
            run: run.to_owned(),
            modelled_nm: 1300.0,
            measured_nm: 1306.5,
            temperature_k: 296.15,
            bands: "single".to_owned(),
            structure: "ordered".to_owned(),
        }
    }

    #[test]
    fn entries_are_read_back_as_they_were_written_behind_each_other() {
        let text = format!(
            "{}{}{}",
            Ledger::HEAD,
            entry("A").text(),
            entry("B \"2\"").text()
        );
        let ledger = Ledger::read(&text).expect("sound");
        let read: Vec<LedgerEntry> = ledger.entries.into_iter().map(|(_, it)| it).collect();
        assert_eq!(read, [entry("A"), entry("B \"2\"")]);
    }

    #[test]
    fn an_offset_is_negative_where_the_wafer_emits_longer() {
        assert!(entry("A").offset_mev() < 0.0);
    }

    #[test]
    fn one_run_is_taken_out_and_the_others_stay_to_the_letter() {
        let first = format!("{}{}", Ledger::HEAD, entry("A").text());
        let last = format!("# by hand\n{}", entry("C").text().trim_start());
        let text = format!("{first}{}{last}", entry("B").text());
        let ledger = Ledger::read(&text).expect("sound");
        let left = ledger.without_run(&text, &entry("B"));
        assert_eq!(
            left.trim_end(),
            format!("{first}\n{}", entry("C").text().trim()).trim_end()
        );
    }

    #[test]
    fn an_entry_without_its_numbers_is_refused_at_its_place() {
        let text = "format = 1\n[[offsets]]\nfamily = \"GaAs on GaAs\"\nrun = \"A\"\n";
        let faults = Ledger::read(text).expect_err("incomplete");
        assert_eq!(faults.len(), 1);
        assert_eq!(faults[0].place(text).line, 2);
        assert!(faults[0].message.contains("`measured_nm`"));
    }
}
