//! What the house accepts.

use super::file::LimitsTable;
use super::reader::{Field, Findings, brief, value};
use crate::materials::Element;
use crate::source::{Diagnostic, nearest, one_of};

/// Limits of the house: compared where they are given, never assumed.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Limits {
    /// Largest in-plane strain of a layer, either sense, %.
    pub strain_percent_max: Option<f64>,
    /// Largest product of strain and thickness of a layer, % nm.
    pub strain_thickness_percent_nm_max: Option<f64>,
    /// Largest mean strain of wells and barriers together, %.
    pub net_strain_percent_max: Option<f64>,
    /// Largest share of the critical thickness by force balance that a layer may use.
    pub critical_share_max: Option<f64>,
    /// Largest relaxed mismatch of buffer, cladding, contact and cap, ppm.
    pub mismatch_ppm_max: Option<f64>,
    /// Thinnest layer, nm.
    pub layer_nm_min: Option<f64>,
    /// Thinnest well, nm.
    pub well_nm_min: Option<f64>,
    /// Least height of the barriers above the first level, kT.
    pub barrier_kt_min: Option<f64>,
    /// Widest spread of the first level over equal wells, meV.
    pub coupling_mev_max: Option<f64>,
    /// Least distance from the wells to a layer with acceptors, nm.
    pub acceptor_setback_nm_min: Option<f64>,
    /// Elements that no layer may hold.
    pub without_elements: Vec<Element>,
}

impl Limits {
    /// The limits of a table; elements that are none are complained about.
    pub(super) fn of(table: &LimitsTable, findings: &mut Findings) -> Self {
        Self {
            strain_percent_max: value(&table.strain_percent_max),
            strain_thickness_percent_nm_max: value(&table.strain_thickness_percent_nm_max),
            net_strain_percent_max: value(&table.net_strain_percent_max),
            critical_share_max: value(&table.critical_share_max),
            mismatch_ppm_max: value(&table.mismatch_ppm_max),
            layer_nm_min: value(&table.layer_nm_min),
            well_nm_min: value(&table.well_nm_min),
            barrier_kt_min: value(&table.barrier_kt_min),
            coupling_mev_max: value(&table.coupling_mev_max),
            acceptor_setback_nm_min: value(&table.acceptor_setback_nm_min),
            without_elements: elements(&table.without_elements, findings),
        }
    }

    /// Its numbers under the keys of the file.
    pub(super) fn numbers(&self) -> [(&'static str, Option<f64>); 10] {
        [
            ("strain_percent_max", self.strain_percent_max),
            (
                "strain_thickness_percent_nm_max",
                self.strain_thickness_percent_nm_max,
            ),
            ("net_strain_percent_max", self.net_strain_percent_max),
            ("critical_share_max", self.critical_share_max),
            ("mismatch_ppm_max", self.mismatch_ppm_max),
            ("layer_nm_min", self.layer_nm_min),
            ("well_nm_min", self.well_nm_min),
            ("barrier_kt_min", self.barrier_kt_min),
            ("coupling_mev_max", self.coupling_mev_max),
            ("acceptor_setback_nm_min", self.acceptor_setback_nm_min),
        ]
    }
}

/// Symbols parted by commas or spaces.
fn elements(field: &Field<String>, findings: &mut Findings) -> Vec<Element> {
    let Some(given) = field else {
        return Vec::new();
    };
    let mut elements: Vec<Element> = Vec::new();
    let words = given.value.as_deref().unwrap_or_default();
    for word in words.split([',', ' ']).filter(|word| !word.is_empty()) {
        match Element::from_symbol(word) {
            Some(element) if elements.contains(&element) => {}
            Some(element) => elements.push(element),
            None => {
                let symbols = || Element::ALL.map(Element::symbol);
                let help = nearest(word, symbols()).map_or_else(
                    || format!("known are {}", one_of(symbols())),
                    |near| format!("did you mean `{near}`?"),
                );
                let message = format!("`{}` is no element of these alloys", brief(word));
                findings
                    .faults
                    .push(Diagnostic::new(given.span.clone(), message).with_help(help));
            }
        }
    }
    elements.sort_unstable();
    elements
}
