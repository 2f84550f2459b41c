//! The parameter data in force, and the crystals they make.

use super::index_data::IndexData;
use super::interpolation::{Interpolation, ValenceBowing, ternary_elements};
use super::offsets::OffsetRule;
use super::table::{SHIPPED, SHIPPED_NAME, Table};
use super::{Composition, Crystal, Offsets};
use crate::source::Diagnostic;
use serde::Deserialize;
use sha2::{Digest as _, Sha256};
use std::collections::BTreeMap;
use std::fmt::Write as _;

/// The parameter data in force: the shipped file with what a user has laid over it.
#[derive(Clone, Debug)]
pub struct Parameters {
    pub(super) table: Table,
    pub(super) frame: Frame,
    pub(super) interpolation: Interpolation,
}

/// The parts of the shipped file beside compounds and ternaries.
#[derive(Clone, Debug, Deserialize)]
pub(super) struct Frame {
    pub(super) status_codes: BTreeMap<String, String>,
    pub(super) conventions: BTreeMap<String, String>,
    pub(super) interpolation: BTreeMap<String, String>,
    #[serde(rename = "offset_rule")]
    pub(super) offset_rules: Vec<OffsetRule>,
    pub(super) index: IndexData,
}

/// A composition for which the data lack the bowings of a ternary.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error(
    "{formula} mixes the compounds of {ternary}, and the parameter data have no bowings of {ternary} (direct gap and others): {file}"
)]
pub struct MissingTernary {
    /// The composition asked for.
    pub formula: String,
    /// The ternary that is not there.
    pub ternary: String,
    /// The files in force.
    pub file: String,
}

impl Parameters {
    /// The data inside the program.
    ///
    /// # Panics
    ///
    /// Never for a built program: the file is part of it, and a test reads it.
    #[must_use]
    pub fn shipped() -> Self {
        let table = Table::shipped().expect("the shipped parameter file is validated by a test");
        let frame = toml::from_str(SHIPPED).expect("the shipped parameter file is read by a test");
        Self::of(table, frame)
    }

    /// The same with the numbers of a user's file laid over: any subset of the tables `[binary.*]`
    /// and `[ternary.*]`, each number with its source.
    ///
    /// # Errors
    ///
    /// Every fault of the file at its place.
    pub fn with_overlay(self, text: &str, name: &str) -> Result<Self, Vec<Diagnostic>> {
        let table = self.table.lay_over(text, name)?;
        Ok(Self::of(table, self.frame))
    }

    fn of(table: Table, frame: Frame) -> Self {
        let override_ev = frame
            .offset_rules
            .iter()
            .find_map(|rule| rule.vbo_bowing_override)
            .unwrap_or(0.0);
        Self {
            interpolation: Interpolation::of(&table, override_ev),
            table,
            frame,
        }
    }

    /// The numbers of a composition at a temperature.
    ///
    /// The composition must be [covered](Self::covers) by the data; of one that is not, the
    /// bowings that are missing are left out.
    #[must_use]
    pub fn crystal(
        &self,
        composition: &Composition,
        temperature_k: f64,
        offsets: Offsets,
    ) -> Crystal {
        let bowing = match offsets {
            Offsets::TableUnbowedInGaAs => ValenceBowing::OnGaAs,
            Offsets::Table | Offsets::Share { .. } => ValenceBowing::Tabulated,
        };
        let mut crystal = self
            .interpolation
            .crystal(composition, temperature_k, bowing);
        if let Offsets::Share {
            conduction_share,
            anchor_valence_ev,
            anchor_gap_ev,
        } = offsets
        {
            crystal.valence_edge_ev =
                anchor_valence_ev + (1.0 - conduction_share) * (anchor_gap_ev - crystal.gap_ev);
        }
        crystal
    }

    /// Makes sure that the data have every ternary that a composition mixes. A straight mixture of
    /// two compositions mixes all that any point between them does.
    ///
    /// # Errors
    ///
    /// The first ternary without data.
    pub fn covers(&self, composition: &Composition) -> Result<(), MissingTernary> {
        let elements = composition.elements();
        for place in 0..18 {
            let (ternary, _) = ternary_elements(place);
            if ternary.is_within(&elements) && !self.table.ternaries.contains_key(&ternary) {
                return Err(MissingTernary {
                    formula: composition.formula(),
                    ternary: ternary.to_string(),
                    file: self.files().join(", "),
                });
            }
        }
        Ok(())
    }

    /// Names of the files in force: the shipped one, then those laid over it.
    #[must_use]
    pub fn files(&self) -> Vec<String> {
        std::iter::once(SHIPPED_NAME.to_owned())
            .chain(self.table.overlays.iter().cloned())
            .collect()
    }

    /// The numbers with their sources.
    #[must_use]
    pub fn table(&self) -> &Table {
        &self.table
    }

    /// SHA-256 of the numbers in force, in hexadecimal: changes with a number, an index model or an
    /// offset rule, and not with a comment, a citation or the order of a file.
    #[must_use]
    pub fn sha256(&self) -> String {
        let digest = Sha256::digest(self.canonical().as_bytes());
        digest.iter().fold(String::new(), |mut text, byte| {
            let _ = write!(text, "{byte:02x}");
            text
        })
    }

    /// Every number in force, one line each, in a fixed order.
    fn canonical(&self) -> String {
        let mut text = String::new();
        for (kind, materials) in [
            ("binary", &self.table.binaries),
            ("ternary", &self.table.ternaries),
        ] {
            for (elements, material) in materials {
                let ends = material
                    .ends
                    .as_ref()
                    .map_or(String::new(), |ends| ends.join(" "));
                for (word, entry) in &material.entries {
                    let _ = writeln!(text, "{kind} {elements} {ends} {word} {:?}", entry.value);
                }
            }
        }
        for rule in &self.frame.offset_rules {
            let _ = writeln!(
                text,
                "offset {} {} {:?}",
                rule.well, rule.qc, rule.vbo_bowing_override
            );
        }
        self.frame.index.canonical(&mut text);
        text
    }
}
