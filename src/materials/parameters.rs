//! The parameter data: shipped files, a user's overlay, and the crystals they make.

use super::{Composition, Crystal};

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

/// The parameter data in force.
#[derive(Clone, Debug)]
pub struct Parameters {}

impl Parameters {
    /// The numbers of a composition at a temperature.
    #[must_use]
    pub fn crystal(
        &self,
        composition: &Composition,
        temperature_k: f64,
        offsets: Offsets,
    ) -> Crystal {
        let _ = (composition, temperature_k, offsets);
        unreachable!()
    }

    /// Refractive index of a composition on a substrate at a photon energy, room temperature.
    #[must_use]
    pub fn index(
        &self,
        composition: &Composition,
        substrate: Option<&Composition>,
        photon_ev: f64,
    ) -> f64 {
        let _ = (composition, substrate, photon_ev);
        unreachable!()
    }
}
