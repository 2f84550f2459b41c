//! The document of `check`.

use super::FORMAT;
use crate::design::{Finding, Measure, Standing};
use crate::sheet::Stamp;
use crate::sheet::findings::{advice, message};
use crate::structure::Stack;
use serde::Serialize;

#[derive(Serialize)]
struct Document<'a> {
    format: u32,
    stamp: &'a Stamp,
    title: &'a str,
    temperature_k: f64,
    outside: usize,
    findings: Vec<Entry>,
}

#[derive(Serialize)]
struct Entry {
    code: &'static str,
    standing: &'static str,
    message: String,
    advice: Option<String>,
    measures: Vec<MeasureEntry>,
}

#[derive(Serialize)]
struct MeasureEntry {
    name: &'static str,
    value: f64,
    limit: Option<f64>,
}

/// Findings as one JSON document.
#[must_use]
pub fn findings(stack: &Stack, findings: &[Finding], stamp: &Stamp) -> String {
    super::text(&Document {
        format: FORMAT,
        stamp,
        title: &stack.title,
        temperature_k: stack.operation.temperature_k,
        outside: findings
            .iter()
            .filter(|finding| finding.standing() == Standing::Outside)
            .count(),
        findings: findings.iter().map(Entry::from).collect(),
    })
}

impl From<&Finding> for Entry {
    fn from(finding: &Finding) -> Self {
        Self {
            code: finding.code(),
            standing: finding.standing().word(),
            message: message(finding),
            advice: advice(finding),
            measures: finding
                .measures()
                .into_iter()
                .map(MeasureEntry::from)
                .collect(),
        }
    }
}

impl From<Measure> for MeasureEntry {
    fn from(measure: Measure) -> Self {
        Self {
            name: measure.name,
            value: measure.value,
            limit: measure.limit,
        }
    }
}
