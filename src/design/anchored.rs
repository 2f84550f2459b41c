//! Wavelengths of structures near one that was solved in full.
//!
//! # Equation
//!
//! Mixing the valence bands moves a photon energy by an amount that changes little from one
//! structure to the next one near it. So near a stack s₀ that was solved by the model of its file
//!
//! ```text
//!  E(s) ≈ E₁(s) + (E(s₀) − E₁(s₀))
//! ```
//!
//! with E₁ the photon energy by single bands, which costs a hundredth. The middle is that of the
//! full model, slopes and curvatures are those of single bands; where the file asks for single bands
//! nothing is left out. Who builds on it measures by how much it misses.

use crate::evaluation::{Evaluation, Failure};
use crate::materials::Parameters;
use crate::structure::{Bands, Stack, Wavelength};
use crate::units::{photon_ev, wavelength_nm};

/// A wavelength near one stack.
#[derive(Clone, Copy, Debug)]
pub(super) struct Anchored<'a> {
    parameters: &'a Parameters,
    kind: Wavelength,
    /// Full model less single bands at the anchor, eV.
    offset_ev: f64,
    /// The wavelength at the anchor by the full model, nm in vacuum.
    pub(super) anchor_nm: f64,
}

impl<'a> Anchored<'a> {
    /// Solves a stack in full; `None` where it has no such wavelength.
    ///
    /// # Errors
    ///
    /// What [`Evaluation::new`] says.
    pub(super) fn at(
        stack: &Stack,
        parameters: &'a Parameters,
        kind: Wavelength,
    ) -> Result<Option<Self>, Failure> {
        let Some(anchor_nm) = Evaluation::new(stack, parameters)?.wavelength_nm(kind) else {
            return Ok(None);
        };
        let anchored = Self {
            parameters,
            kind,
            offset_ev: 0.0,
            anchor_nm,
        };
        if stack.model.bands == Bands::Single {
            return Ok(Some(anchored));
        }
        let by_single_bands = anchored.wavelength_nm(stack.clone())?;
        Ok(by_single_bands.map(|nm| Self {
            offset_ev: photon_ev(anchor_nm) - photon_ev(nm),
            ..anchored
        }))
    }

    /// The wavelength of a stack near the anchor, nm in vacuum.
    ///
    /// # Errors
    ///
    /// What [`Evaluation::new`] says.
    pub(super) fn wavelength_nm(&self, mut stack: Stack) -> Result<Option<f64>, Failure> {
        stack.model.bands = Bands::Single;
        let nm = Evaluation::new(&stack, self.parameters)?.wavelength_nm(self.kind);
        Ok(nm.map(|nm| {
            if self.offset_ev == 0.0 {
                nm
            } else {
                wavelength_nm(photon_ev(nm) + self.offset_ev)
            }
        }))
    }
}
