//! The document of `levels`.

use super::FORMAT;
use super::strain::StrainEntry;
use crate::evaluation::{Emission, Evaluation, Ladder, Transition};
use crate::profile::Strained;
use crate::sheet::Stamp;
use crate::structure::Layer;
use serde::Serialize;

#[derive(Serialize)]
struct Document<'a> {
    format: u32,
    stamp: &'a Stamp,
    title: &'a str,
    temperature_k: f64,
    /// Transition energies are without it.
    shrinkage_mev: u32,
    wells: Wells,
    layers: Vec<LayerEntry>,
    strain_budget: StrainEntry,
    electron: Vec<LevelEntry>,
    heavy_hole: Vec<LevelEntry>,
    light_hole: Vec<LevelEntry>,
    /// Of mixed bands only, like the dispersion.
    valence: Vec<StateEntry>,
    dispersion: Vec<DispersionEntry>,
    transitions: Vec<TransitionEntry<'a>>,
    emission: EmissionEntry,
}

#[derive(Serialize)]
struct Wells {
    count: usize,
    thickness_nm: f64,
}

#[derive(Serialize)]
struct LayerEntry {
    role: &'static str,
    formula: String,
    thickness_nm: f64,
    #[serde(flatten)]
    numbers: NumbersEntry,
    grade_to: Option<EndEntry>,
}

#[derive(Serialize)]
struct EndEntry {
    formula: String,
    #[serde(flatten)]
    numbers: NumbersEntry,
}

#[derive(Serialize)]
struct NumbersEntry {
    gap_ev: f64,
    lattice_nm: f64,
    strain_percent: f64,
    strain: &'static str,
    conduction_edge_ev: f64,
    heavy_hole_edge_ev: f64,
    light_hole_edge_ev: f64,
    electron_mass: f64,
    luttinger: [f64; 3],
}

#[derive(Serialize)]
struct LevelEntry {
    level: usize,
    energy_ev: f64,
    in_plane_mass: Option<f64>,
    error_ev: f64,
}

#[derive(Serialize)]
struct StateEntry {
    level: usize,
    energy_ev: f64,
    heavy: Option<f64>,
    light: Option<f64>,
    split_off: Option<f64>,
}

#[derive(Serialize)]
struct DispersionEntry {
    k_per_nm: f64,
    energy_ev: Vec<f64>,
}

#[derive(Serialize)]
struct TransitionEntry<'a> {
    electron: usize,
    hole: &'a str,
    energy_ev: f64,
    wavelength_nm: f64,
    overlap: f64,
}

#[expect(
    clippy::struct_field_names,
    reason = "they are the keys of the document"
)]
#[derive(Serialize)]
struct EmissionEntry {
    first_transition_nm: f64,
    pl_nm: Option<f64>,
    gain_peak_nm: Option<f64>,
    gain_peak_unshrunk_nm: Option<f64>,
}

/// The levels of an evaluation as one JSON document.
#[must_use]
pub fn levels(evaluation: &Evaluation<'_>, stamp: &Stamp) -> String {
    let stack = evaluation.stack;
    let ladders = evaluation.single_ladders();
    let ladder = |symbol| {
        let found = ladders.iter().find(|ladder| ladder.symbol == symbol);
        found.map(entries).unwrap_or_default()
    };
    let filled = evaluation.ladders();
    let valence = filled.iter().find(|ladder| ladder.symbol == "v");
    super::text(&Document {
        format: FORMAT,
        stamp,
        title: &stack.title,
        temperature_k: stack.operation.temperature_k,
        shrinkage_mev: 0,
        wells: Wells {
            count: stack.well_count(),
            thickness_nm: stack.well_thickness_nm(),
        },
        layers: stack
            .layers
            .iter()
            .zip(&evaluation.profile.layers)
            .map(|(layer, numbers)| LayerEntry::new(layer, &numbers.lower, &numbers.upper))
            .collect(),
        strain_budget: StrainEntry::from(&evaluation.strain_budget()),
        electron: ladder("e"),
        heavy_hole: ladder("hh"),
        light_hole: ladder("lh"),
        valence: valence.map(states).unwrap_or_default(),
        dispersion: evaluation
            .dispersion()
            .into_iter()
            .map(|(k_per_nm, energy_ev)| DispersionEntry {
                k_per_nm,
                energy_ev,
            })
            .collect(),
        transitions: evaluation
            .transitions
            .iter()
            .map(TransitionEntry::from)
            .collect(),
        emission: EmissionEntry::from(evaluation.emission()),
    })
}

fn entries(ladder: &Ladder) -> Vec<LevelEntry> {
    ladder
        .rungs
        .iter()
        .enumerate()
        .map(|(index, rung)| LevelEntry {
            level: index + 1,
            energy_ev: rung.energy_ev,
            in_plane_mass: rung.in_plane_mass,
            error_ev: rung.error_ev,
        })
        .collect()
}

fn states(ladder: &Ladder) -> Vec<StateEntry> {
    ladder
        .rungs
        .iter()
        .enumerate()
        .map(|(index, rung)| StateEntry {
            level: index + 1,
            energy_ev: rung.energy_ev,
            heavy: rung.shares.map(|shares| shares.heavy),
            light: rung.shares.map(|shares| shares.light),
            split_off: rung.shares.map(|shares| shares.split_off),
        })
        .collect()
}

impl LayerEntry {
    fn new(layer: &Layer, lower: &Strained, upper: &Strained) -> Self {
        Self {
            role: layer.role.word(),
            formula: layer.material.formula(),
            thickness_nm: layer.thickness_nm,
            numbers: NumbersEntry::from(lower),
            grade_to: layer.grade_to.as_ref().map(|to| EndEntry {
                formula: to.formula(),
                numbers: NumbersEntry::from(upper),
            }),
        }
    }
}

impl From<&Strained> for NumbersEntry {
    fn from(at: &Strained) -> Self {
        Self {
            gap_ev: at.edges.gap_ev(),
            lattice_nm: at.crystal.lattice_nm,
            strain_percent: at.edges.strain_percent(),
            strain: at.edges.sense().word(),
            conduction_edge_ev: at.edges.conduction_ev,
            heavy_hole_edge_ev: at.edges.heavy_ev,
            light_hole_edge_ev: at.edges.light_ev,
            electron_mass: at.crystal.electron_mass,
            luttinger: at.crystal.luttinger,
        }
    }
}

impl<'a> From<&'a Transition> for TransitionEntry<'a> {
    fn from(transition: &'a Transition) -> Self {
        Self {
            electron: transition.electron,
            hole: &transition.hole,
            energy_ev: transition.energy_ev,
            wavelength_nm: transition.wavelength_nm,
            overlap: transition.overlap,
        }
    }
}

impl From<Emission> for EmissionEntry {
    fn from(emission: Emission) -> Self {
        Self {
            first_transition_nm: emission.first_transition_nm,
            pl_nm: emission.pl_nm,
            gain_peak_nm: emission.gain_peak_nm,
            gain_peak_unshrunk_nm: emission.gain_peak_unshrunk_nm,
        }
    }
}
