//! Where the valence edge of a composition lies on the common scale.

use super::{Composition, Element, Parameters};
use serde::Deserialize;

/// Where the valence edge of a composition lies on the common scale.
///
/// The interpolated offsets of the table hold for most families; two need a rule of their own.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Offsets {
    /// The offsets of the table as they are.
    Table,
    /// The offsets of the table with the InGaAs bowing of the valence edge set to zero, inside
    /// quaternaries too: every layer on a GaAs substrate.
    TableUnbowedInGaAs,
    /// E_v = `anchor_valence_ev` + (1 − `conduction_share`)(`anchor_gap_ev` − E_g) with unstrained
    /// gaps at the working temperature.
    Share {
        /// Share of the gap difference that falls to the conduction band.
        conduction_share: f64,
        /// Valence edge of the anchor material (the substrate), eV.
        anchor_valence_ev: f64,
        /// Unstrained gap of the anchor material, eV.
        anchor_gap_ev: f64,
    },
}

/// A measured offset ratio of the data file, and what the program makes of it.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct OffsetRule {
    /// The material with the smaller gap.
    pub well: String,
    /// Whether the ratio is of strained or of unstrained gaps.
    pub basis: String,
    /// The material with the larger gap.
    pub barrier: String,
    /// Share of the gap difference that falls to the conduction band.
    pub qc: f64,
    /// Range of the measurements.
    pub qc_range: [f64; 2],
    /// InGaAs bowing of the valence edge to be used in place of the tabulated one, eV.
    pub vbo_bowing_override: Option<f64>,
    /// The share that the table gives as it is.
    pub vbo_scale_result: Option<f64>,
    /// The citation's key.
    pub source: String,
    /// How the number is known.
    pub status: String,
    /// Why the rule is needed, or why none is.
    pub note: String,
}

impl Offsets {
    /// What this choice means, for reports.
    #[must_use]
    pub fn description(&self) -> String {
        match self {
            Self::Table => "tabulated valence-band offsets".to_owned(),
            Self::TableUnbowedInGaAs => {
                "tabulated valence-band offsets without the InGaAs bowing (GaAs substrate)"
                    .to_owned()
            }
            Self::Share {
                conduction_share, ..
            } => format!("conduction share {conduction_share} of the unstrained gap difference"),
        }
    }
}

impl Parameters {
    /// The rule for a stack: which offsets hold for every layer that is given by composition.
    ///
    /// # Arguments
    ///
    /// * `substrate` – the substrate's composition
    /// * `layers` – the compositions in the solved region
    /// * `conduction_share` – the share that a structure fixes itself, if it does
    /// * `temperature_k` – the working temperature, K
    #[must_use]
    pub fn offsets<'a>(
        &self,
        substrate: &Composition,
        layers: impl IntoIterator<Item = &'a Composition>,
        conduction_share: Option<f64>,
        temperature_k: f64,
    ) -> Offsets {
        let share = |conduction_share: f64| {
            let anchor = self.crystal(substrate, temperature_k, Offsets::Table);
            Offsets::Share {
                conduction_share,
                anchor_valence_ev: anchor.valence_edge_ev,
                anchor_gap_ev: anchor.gap_ev,
            }
        };
        if let Some(fixed) = conduction_share {
            return share(fixed);
        }
        if substrate.is_within(&[Element::Ga, Element::As]) {
            return Offsets::TableUnbowedInGaAs;
        }
        let phosphide_family = [Element::Ga, Element::In, Element::P, Element::As];
        if substrate.is_within(&[Element::In, Element::P])
            && layers
                .into_iter()
                .all(|layer| layer.is_within(&phosphide_family))
        {
            return share(self.ingaasp_conduction_share());
        }
        Offsets::Table
    }

    /// Share of the unstrained gap difference that falls to the conduction band of InGaAsP on InP.
    #[must_use]
    pub fn ingaasp_conduction_share(&self) -> f64 {
        self.ingaasp_rule().qc
    }

    /// The rule of the data file for InGaAsP on InP.
    pub(super) fn ingaasp_rule(&self) -> &OffsetRule {
        self.frame
            .offset_rules
            .iter()
            .find(|rule| rule.well.starts_with("InGaAsP"))
            .expect("the shipped parameter file has the rule, and a test reads it")
    }

    /// The rule of the data file for InGaAs on GaAs.
    pub(super) fn ingaas_rule(&self) -> &OffsetRule {
        self.frame
            .offset_rules
            .iter()
            .find(|rule| rule.vbo_bowing_override.is_some())
            .expect("the shipped parameter file has the rule, and a test reads it")
    }

    /// Every measured offset ratio of the data file.
    #[must_use]
    pub fn offset_rules(&self) -> &[OffsetRule] {
        &self.frame.offset_rules
    }
}
