//! Wells or bulk, ready to be filled with carriers.

use super::{Contender, Equal, Matter};
use crate::evaluation::{Evaluation, Failure, GainPeak, refractive_index};
use crate::materials::{Crystal, Edges, Parameters};
use crate::numerics::roots::bracketed_root;
use crate::profile::Profile;
use crate::spectra::landmarks::View;
use crate::spectra::{Bulk, Emitter, Line, Occupation};
use crate::structure::{Role, Stack};
use crate::units::{ELEMENTARY_CHARGE_C, HBAR2_OVER_2M0_EV_NM2, thermal_ev, wavelength_nm};

/// Densities between which an equal measure is looked for, cm⁻³.
const DENSITIES_CM3: (f64, f64) = (1e16, 3e19);

/// What emits, ready to be filled with carriers.
pub(super) enum Scale<'a> {
    Wells(Box<Evaluation<'a>>),
    Bulk {
        bulk: Bulk,
        thickness_nm: f64,
        thermal_ev: f64,
        shrinkage_mev: f64,
    },
}

/// Does something with what emits in a contender, filled to at most `densest_cm3`.
pub(super) fn on_scale<T>(
    contender: &Contender,
    parameters: &Parameters,
    densest_cm3: f64,
    act: impl FnOnce(&Scale<'_>) -> T,
) -> Result<T, Failure> {
    let mut stack = contender.stack.clone();
    // Mixed bands are followed as far as the densities asked for need.
    stack.operation.working_density_cm3 = densest_cm3;
    stack.operation.densities_cm3 = vec![densest_cm3];
    let scale = match contender.matter {
        Matter::Wells => {
            let evaluation = Evaluation::new(&stack, parameters)?;
            evaluation.refractive_index()?;
            Scale::Wells(Box::new(evaluation))
        }
        Matter::Bulk { strained } => {
            let profile = Profile::new(&stack, parameters)?;
            let line = Line::new(stack.model.lineshape, stack.model.intraband_fs);
            let index = refractive_index(&stack, parameters)?;
            let (crystal, edges) = first_well(&stack, &profile);
            Scale::Bulk {
                bulk: if strained {
                    Bulk::strained(&crystal, &edges, index, line)
                } else {
                    Bulk::new(&crystal, index, line)
                },
                thickness_nm: profile.well_thickness_nm,
                thermal_ev: thermal_ev(stack.operation.temperature_k),
                shrinkage_mev: stack.model.shrinkage_mev,
            }
        }
    };
    Ok(act(&scale))
}

/// Numbers of the first well at its substrate side.
fn first_well(stack: &Stack, profile: &Profile<'_>) -> (Crystal, Edges) {
    let index = stack
        .layers
        .iter()
        .position(|layer| layer.role == Role::Well)
        .unwrap_or(0);
    let numbers = &profile.layers[index].lower;
    (numbers.crystal, numbers.edges)
}

/// The density of what is this thick with a measure, where it does not hang on spectra.
fn known_density_cm3(equal: Equal, measure: f64, thickness_nm: f64) -> Option<f64> {
    match equal {
        Equal::Volume => Some(measure),
        Equal::Sheet => Some(measure / (1e-7 * thickness_nm)),
        Equal::Current | Equal::Gain => None,
    }
}

/// The highest density that is looked at for a measure, cm⁻³.
pub(super) fn densest_cm3(contender: &Contender, equal: Equal, measure: f64) -> f64 {
    let thickness_nm = contender.stack.well_thickness_nm();
    known_density_cm3(equal, measure, thickness_nm).unwrap_or(DENSITIES_CM3.1)
}

impl Scale<'_> {
    pub(super) fn emitter(&self) -> &dyn Emitter {
        match self {
            Self::Wells(evaluation) => evaluation.emitter(),
            Self::Bulk { bulk, .. } => bulk,
        }
    }

    pub(super) fn thickness_nm(&self) -> f64 {
        match self {
            Self::Wells(evaluation) => evaluation.profile.well_thickness_nm,
            Self::Bulk { thickness_nm, .. } => *thickness_nm,
        }
    }

    pub(super) fn carriers(&self, density_cm3: f64) -> Occupation {
        match self {
            Self::Wells(evaluation) => evaluation.carriers(density_cm3),
            Self::Bulk {
                bulk,
                thermal_ev,
                shrinkage_mev,
                ..
            } => {
                let lowering_ev = 1e-3 * shrinkage_mev * (density_cm3 / 1e18).cbrt();
                bulk.occupation(density_cm3, lowering_ev, *thermal_ev)
            }
        }
    }

    pub(super) fn transparency_cm3(&self) -> Option<f64> {
        match self {
            Self::Wells(evaluation) => evaluation.transparency_cm3(),
            Self::Bulk {
                bulk, thermal_ev, ..
            } => Some(bulk.transparency_cm3(*thermal_ev)),
        }
    }

    pub(super) fn view(&self, density_cm3: f64) -> Option<View<'_>> {
        View::new(self.emitter(), &self.carriers(density_cm3))
    }

    /// Peaks of TE and TM gain; `None` below transparency.
    pub(super) fn gains(&self, density_cm3: f64) -> [Option<GainPeak>; 2] {
        let carriers = self.carriers(density_cm3);
        let Self::Bulk { bulk, .. } = self else {
            let Self::Wells(evaluation) = self else {
                return [None, None];
            };
            return evaluation.gain_peaks_at(density_cm3);
        };
        if carriers.splitting_ev() <= bulk.gap_ev() - carriers.lowering_ev {
            return [None, None];
        }
        let Some(view) = self.view(density_cm3) else {
            return [None, None];
        };
        // Bulk does not tell the polarisations apart.
        let peak = view
            .gain_peak(|point| point.te_gain_cm)
            .map(|peak| GainPeak {
                gain_cm: peak.height,
                peak_nm: wavelength_nm(peak.photon_ev),
                peak_ev: peak.photon_ev,
            });
        [peak, peak]
    }

    pub(super) fn gain_cm(&self, density_cm3: f64) -> f64 {
        let [te, tm] = self.gains(density_cm3);
        GainPeak::larger(te, tm).map_or(0.0, |(_, peak)| peak.gain_cm)
    }

    pub(super) fn current_a_cm2(&self, density_cm3: f64) -> f64 {
        let rate = self
            .view(density_cm3)
            .map_or(0.0, |view| view.total_rate_per_cm3_s());
        ELEMENTARY_CHARGE_C * rate * 1e-7 * self.thickness_nm()
    }

    pub(super) fn measure(&self, equal: Equal, density_cm3: f64) -> f64 {
        match equal {
            Equal::Volume => density_cm3,
            Equal::Sheet => 1e-7 * self.thickness_nm() * density_cm3,
            Equal::Current => self.current_a_cm2(density_cm3),
            Equal::Gain => self.gain_cm(density_cm3),
        }
    }

    /// The density with a measure; `None` if none of those looked at has it.
    pub(super) fn density_cm3(&self, equal: Equal, measure: f64) -> Option<f64> {
        let known = known_density_cm3(equal, measure, self.thickness_nm());
        if known.is_some() || measure <= 0.0 {
            return known;
        }
        let excess = |log_density: f64| {
            let found = self.measure(equal, log_density.exp());
            (found.max(f64::MIN_POSITIVE) / measure).ln()
        };
        let (low, high) = (DENSITIES_CM3.0.ln(), DENSITIES_CM3.1.ln());
        (excess(low) < 0.0 && excess(high) > 0.0)
            .then(|| bracketed_root(excess, low, high, 1e-7).exp())
    }

    /// Density of states of the electrons from their first edge up: steps, or a square root.
    pub(super) fn states_per_ev_cm3(&self) -> Vec<(f64, f64)> {
        const REACH_EV: f64 = 0.25;
        match self {
            Self::Wells(evaluation) => {
                let levels = &evaluation.bands.electron;
                let first = levels.first().map_or(0.0, |level| level.energy_ev);
                let per_mass = 1e21
                    / (2.0 * std::f64::consts::PI * HBAR2_OVER_2M0_EV_NM2 * self.thickness_nm());
                let mut sum = 0.0;
                let mut steps = vec![(-0.02, 0.0)];
                for level in levels {
                    let at = level.energy_ev - first;
                    if at > REACH_EV {
                        break;
                    }
                    steps.push((at, sum));
                    sum += per_mass * level.in_plane_mass;
                    steps.push((at, sum));
                }
                steps.push((REACH_EV, sum));
                steps
            }
            Self::Bulk { bulk, .. } => {
                let mass = bulk.electrons().0.first().map_or(0.0, |band| band.mass);
                // (1/2π²) (2m/ħ²)^{3/2} √E, in units of nm and eV, and per cm³.
                let scale = 1e21 / (2.0 * std::f64::consts::PI.powi(2))
                    * (mass / HBAR2_OVER_2M0_EV_NM2).powf(1.5);
                std::iter::once((-0.02, 0.0))
                    .chain((0..=100).map(|at| {
                        // Closer where the root rises steeply.
                        let above = REACH_EV * (f64::from(at) / 100.0).powi(2);
                        (above, scale * above.sqrt())
                    }))
                    .collect()
            }
        }
    }
}
