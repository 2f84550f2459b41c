//! The wavelengths of a structure and the order of its holes, with no more work than they need.

use super::{Evaluation, Extent, Failure};
use crate::materials::Parameters;
use crate::structure::{Stack, Wavelength};
use crate::subbands::MixedBands;
use crate::units::wavelength_nm;

/// What levels tell without a spectrum of gain.
///
/// An [`Evaluation`] with mixed bands follows the valence states along the wave number past every hole
/// that its densities put there. The first transition needs the zone centre alone, and emission at
/// low injection a part of the way: an outline goes no further. Its transition is the same number;
/// its photoluminescence agrees to 5e-7 eV, as do its levels with exact ones.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Outline {
    /// Edge of the first transition, without shrinkage, nm in vacuum.
    pub first_transition_nm: f64,
    /// Peak of the spontaneous spectrum at [`super::PL_DENSITY_CM3`], nm in vacuum; only where it was
    /// asked for.
    pub pl_nm: Option<f64>,
    /// First heavy-hole level less first light-hole level, meV; of mixed bands the first states of
    /// mostly one kind. `None` where one of them is not bound.
    pub heavy_less_light_mev: Option<f64>,
}

impl Outline {
    /// The outline of a stack without its photoluminescence.
    ///
    /// # Errors
    ///
    /// [`Failure`] as for [`Evaluation::new`].
    pub fn of_transition(stack: &Stack, parameters: &Parameters) -> Result<Self, Failure> {
        Ok(Evaluation::over(stack, parameters, Extent::ZoneCentre)?.outline())
    }

    /// The outline of a stack with its photoluminescence.
    ///
    /// # Errors
    ///
    /// [`Failure`] as for [`Evaluation::new`].
    pub fn of_emission(stack: &Stack, parameters: &Parameters) -> Result<Self, Failure> {
        let evaluation = Evaluation::over(stack, parameters, Extent::LowInjection)?;
        Ok(Self {
            pl_nm: evaluation.wavelength_nm(Wavelength::Photoluminescence),
            ..evaluation.outline()
        })
    }

    /// Its wavelength of a kind, nm in vacuum: of gain it has none.
    #[must_use]
    pub fn wavelength_nm(&self, kind: Wavelength) -> Option<f64> {
        match kind {
            Wavelength::Transition => Some(self.first_transition_nm),
            Wavelength::Photoluminescence => self.pl_nm,
            Wavelength::Gain => None,
        }
    }
}

/// The wavelength of a kind, nm in vacuum: of peak gain at the working density. `None` where there is
/// no such peak.
///
/// # Errors
///
/// [`Failure`] as for [`Evaluation::new`].
pub fn emission_nm(
    stack: &Stack,
    parameters: &Parameters,
    kind: Wavelength,
) -> Result<Option<f64>, Failure> {
    Ok(match kind {
        Wavelength::Transition => Outline::of_transition(stack, parameters)?.wavelength_nm(kind),
        Wavelength::Photoluminescence => {
            Outline::of_emission(stack, parameters)?.wavelength_nm(kind)
        }
        Wavelength::Gain => Evaluation::new(stack, parameters)?.wavelength_nm(kind),
    })
}

/// The refractive index of the wells at their first transition.
///
/// # Errors
///
/// [`Failure`] as for [`Evaluation::new`], and where a well of own numbers has none.
pub fn refractive_index(stack: &Stack, parameters: &Parameters) -> Result<f64, Failure> {
    Evaluation::over(stack, parameters, Extent::ZoneCentre)?.refractive_index()
}

impl Evaluation<'_> {
    /// The outline of it, without photoluminescence.
    #[must_use]
    pub fn outline(&self) -> Outline {
        let [heavy, light] = if let Some(mixed) = &self.mixed {
            let first = |is_heavy: bool| {
                let mut states = mixed.zone_centre.iter();
                let state = states.find(|state| (state.heavy > 0.5) == is_heavy);
                state.map(|state| state.energy_ev)
            };
            [first(true), first(false)]
        } else {
            let bands = &self.bands;
            [&bands.heavy, &bands.light].map(|levels| levels.first().map(|it| it.energy_ev))
        };
        Outline {
            first_transition_nm: wavelength_nm(self.first_ev),
            pl_nm: None,
            heavy_less_light_mev: heavy.zip(light).map(|(heavy, light)| 1e3 * (heavy - light)),
        }
    }
}

/// Hole states beyond the wave numbers that were followed, each subband prolonged as a parabola: energy
/// counted downwards (eV) and number per area (cm⁻²). They emit nothing that is seen and only share
/// the holes out.
pub(super) fn holes_beyond(mixed: &MixedBands, thermal_ev: f64) -> Vec<(f64, f64)> {
    /// So many steps of so many kT.
    const STEPS: (usize, f64) = (40, 0.25);
    let [.., before, last] = mixed.k_per_nm.as_slice() else {
        return Vec::new();
    };
    let squares = last * last - before * before;
    let mut states = Vec::new();
    for slices in &mixed.blocks {
        let [.., near, end] = slices.as_slice() else {
            continue;
        };
        for (near_ev, end_ev) in near.energy_ev.iter().zip(&end.energy_ev) {
            let falls_ev = near_ev - end_ev;
            if falls_ev <= 0.0 {
                continue;
            }
            let step_ev = STEPS.1 * thermal_ev;
            // d(k²)/4π per nm², 1e14 to cm⁻².
            let number =
                mixed.degeneracy * step_ev * squares / falls_ev / (4.0 * std::f64::consts::PI)
                    * 1e14;
            states.extend((0..STEPS.0).map(|at| (step_ev * (at as f64 + 0.5) - end_ev, number)));
        }
    }
    states
}
