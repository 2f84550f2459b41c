//! Structures side by side, and a well beside its own material in bulk.
//!
//! What is equal is chosen: carriers per volume or per area, the current of spontaneous emission, or
//! peak gain. The first structure at its working density sets the measure.

use rayon::prelude::*;

use crate::evaluation::{Evaluation, Failure, GainPeak};
use crate::materials::{Crystal, Edges, Parameters};
use crate::numerics::roots::bracketed_root;
use crate::profile::Profile;
use crate::spectra::landmarks::View;
use crate::spectra::{Bulk, Emitter, Line, Occupation, Point};
use crate::structure::{Role, Stack};
use crate::units::{ELEMENTARY_CHARGE_C, HBAR2_OVER_2M0_EV_NM2, thermal_ev, wavelength_nm};

/// Densities between which an equal measure is looked for, cm⁻³.
const DENSITIES_CM3: (f64, f64) = (1e16, 3e19);
/// Temperature by which a structure is warmed and cooled, K.
const TEMPERATURE_STEP_K: f64 = 5.0;
/// Relative change of the density for the differential gain.
const DENSITY_STEP: f64 = 0.01;
/// Photon energies of the spectra.
const SAMPLES: usize = 401;

/// What is equal.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Equal {
    /// Carriers per volume of the wells.
    Volume,
    /// Carriers per area, of all wells.
    Sheet,
    /// Current of spontaneous emission per area.
    Current,
    /// Peak gain of the material.
    Gain,
}

impl Equal {
    /// Every measure.
    pub const ALL: [Self; 4] = [Self::Volume, Self::Sheet, Self::Current, Self::Gain];

    /// The word for it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Volume => "volume",
            Self::Sheet => "sheet",
            Self::Current => "current",
            Self::Gain => "gain",
        }
    }

    /// What it is, in a few words.
    #[must_use]
    pub fn meaning(self) -> &'static str {
        match self {
            Self::Volume => "equal density per volume",
            Self::Sheet => "equal density per area",
            Self::Current => "equal current of spontaneous emission",
            Self::Gain => "equal peak gain",
        }
    }
}

/// What is weighed: the wells of a structure, or their material in bulk.
#[derive(Clone, Debug, PartialEq)]
pub struct Contender {
    /// What it is called.
    pub name: String,
    /// The structure.
    pub stack: Stack,
    /// Whether its wells are taken as they are.
    pub matter: Matter,
}

/// What emits.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Matter {
    /// The wells.
    Wells,
    /// The material of the first well in bulk, of the thickness of all wells.
    Bulk {
        /// Whether it is strained on the substrate as the well is.
        strained: bool,
    },
}

/// One column of the comparison. What does not exist is `None`.
#[derive(Clone, Debug, PartialEq)]
pub struct Weighed {
    /// What it is called.
    pub name: String,
    /// What emits.
    pub matter: Matter,
    /// Thickness of what emits, nm.
    pub thickness_nm: f64,
    /// Temperature, K.
    pub temperature_k: f64,
    /// Density per volume, cm⁻³; `None` where no density has the equal measure.
    pub density_cm3: Option<f64>,
    /// Peak of TE gain.
    pub te: Option<GainPeak>,
    /// Peak of TM gain.
    pub tm: Option<GainPeak>,
    /// Peak of spontaneous emission, nm in vacuum.
    pub emission_nm: Option<f64>,
    /// Full width at half maximum of spontaneous emission, meV.
    pub emission_fwhm_mev: Option<f64>,
    /// Transparency density, cm⁻³.
    pub transparency_cm3: Option<f64>,
    /// Change of peak gain with density, cm².
    pub differential_gain_cm2: Option<f64>,
    /// Current of spontaneous emission, A/cm².
    pub current_a_cm2: Option<f64>,
    /// Change of the wavelength of peak gain with temperature at the same density, nm/K.
    pub nm_per_k: Option<f64>,
    /// Photon energies of the spectra, eV.
    pub photon_ev: Vec<f64>,
    /// Gain and emission at these.
    pub points: Vec<Point>,
    /// Density of states of the electrons over energy above their first edge: (eV, per eV and cm³).
    pub states_per_ev_cm3: Vec<(f64, f64)>,
}

impl Weighed {
    /// The larger of the peaks of TE and TM gain, and its polarisation.
    #[must_use]
    pub fn gain(&self) -> Option<(&'static str, GainPeak)> {
        GainPeak::larger(self.te, self.tm)
    }

    /// Density per area, cm⁻².
    #[must_use]
    pub fn sheet_cm2(&self) -> Option<f64> {
        self.density_cm3
            .map(|density| 1e-7 * self.thickness_nm * density)
    }

    /// Peak TE gain over peak TM gain.
    #[must_use]
    pub fn te_over_tm(&self) -> Option<f64> {
        Some(self.te?.gain_cm / self.tm?.gain_cm)
    }
}

/// Weighs contenders at an equal measure; the first at its working density sets it.
///
/// # Errors
///
/// The name of the contender that has no levels, with the [`Failure`].
pub fn weigh(
    contenders: &[Contender],
    parameters: &Parameters,
    equal: Equal,
) -> Result<Vec<Weighed>, (String, Failure)> {
    let Some(first) = contenders.first() else {
        return Ok(Vec::new());
    };
    let density_cm3 = first.stack.operation.working_density_cm3;
    let measure = on_scale(first, parameters, |scale| scale.measure(equal, density_cm3))
        .map_err(|failure| (first.name.clone(), failure))?;
    contenders
        .par_iter()
        .map(|contender| {
            weighed(contender, parameters, equal, measure)
                .map_err(|failure| (contender.name.clone(), failure))
        })
        .collect()
}

/// What emits, ready to be filled with carriers.
enum Scale<'a> {
    Wells(Box<Evaluation<'a>>),
    Bulk {
        bulk: Bulk,
        thickness_nm: f64,
        thermal_ev: f64,
        shrinkage_mev: f64,
    },
}

/// Does something with what emits in a contender.
fn on_scale<T>(
    contender: &Contender,
    parameters: &Parameters,
    act: impl FnOnce(&Scale<'_>) -> T,
) -> Result<T, Failure> {
    let mut stack = contender.stack.clone();
    // Mixed bands are followed as far as the densities asked for need: an equal measure may need
    // more than the working density.
    let working = stack.operation.working_density_cm3;
    stack.operation.densities_cm3 = vec![working, DENSITIES_CM3.1.max(working)];
    let scale = match contender.matter {
        Matter::Wells => {
            let evaluation = Evaluation::new(&stack, parameters)?;
            evaluation.refractive_index()?;
            Scale::Wells(Box::new(evaluation))
        }
        Matter::Bulk { strained } => {
            let evaluation = Evaluation::new(&stack, parameters)?;
            let line = Line::new(stack.model.lineshape, stack.model.intraband_fs);
            let index = evaluation.refractive_index()?;
            let (crystal, edges) = first_well(&stack, &evaluation.profile);
            Scale::Bulk {
                bulk: if strained {
                    Bulk::strained(&crystal, &edges, index, line)
                } else {
                    Bulk::new(&crystal, index, line)
                },
                thickness_nm: evaluation.profile.well_thickness_nm,
                thermal_ev: evaluation.thermal_ev(),
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

impl Scale<'_> {
    fn emitter(&self) -> &dyn Emitter {
        match self {
            Self::Wells(evaluation) => evaluation.emitter(),
            Self::Bulk { bulk, .. } => bulk,
        }
    }

    fn thickness_nm(&self) -> f64 {
        match self {
            Self::Wells(evaluation) => evaluation.profile.well_thickness_nm,
            Self::Bulk { thickness_nm, .. } => *thickness_nm,
        }
    }

    fn carriers(&self, density_cm3: f64) -> Occupation {
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

    fn transparency_cm3(&self) -> Option<f64> {
        match self {
            Self::Wells(evaluation) => evaluation.transparency_cm3(),
            Self::Bulk {
                bulk, thermal_ev, ..
            } => Some(bulk.transparency_cm3(*thermal_ev)),
        }
    }

    fn view(&self, density_cm3: f64) -> Option<View<'_>> {
        View::new(self.emitter(), &self.carriers(density_cm3))
    }

    /// Peaks of TE and TM gain; `None` below transparency.
    fn gains(&self, density_cm3: f64) -> [Option<GainPeak>; 2] {
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

    fn gain_cm(&self, density_cm3: f64) -> f64 {
        let [te, tm] = self.gains(density_cm3);
        GainPeak::larger(te, tm).map_or(0.0, |(_, peak)| peak.gain_cm)
    }

    fn current_a_cm2(&self, density_cm3: f64) -> f64 {
        let rate = self
            .view(density_cm3)
            .map_or(0.0, |view| view.total_rate_per_cm3_s());
        ELEMENTARY_CHARGE_C * rate * 1e-7 * self.thickness_nm()
    }

    fn measure(&self, equal: Equal, density_cm3: f64) -> f64 {
        match equal {
            Equal::Volume => density_cm3,
            Equal::Sheet => 1e-7 * self.thickness_nm() * density_cm3,
            Equal::Current => self.current_a_cm2(density_cm3),
            Equal::Gain => self.gain_cm(density_cm3),
        }
    }

    /// The density with a measure; `None` if none of those looked at has it.
    fn density_cm3(&self, equal: Equal, measure: f64) -> Option<f64> {
        match equal {
            Equal::Volume => Some(measure),
            Equal::Sheet => Some(measure / (1e-7 * self.thickness_nm())),
            Equal::Current | Equal::Gain => {
                if measure <= 0.0 {
                    return None;
                }
                let excess = |log_density: f64| {
                    let found = self.measure(equal, log_density.exp());
                    (found.max(f64::MIN_POSITIVE) / measure).ln()
                };
                let (low, high) = (DENSITIES_CM3.0.ln(), DENSITIES_CM3.1.ln());
                (excess(low) < 0.0 && excess(high) > 0.0)
                    .then(|| bracketed_root(excess, low, high, 1e-7).exp())
            }
        }
    }

    /// Density of states of the electrons from their first edge up: steps, or a square root.
    fn states_per_ev_cm3(&self) -> Vec<(f64, f64)> {
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

fn weighed(
    contender: &Contender,
    parameters: &Parameters,
    equal: Equal,
    measure: f64,
) -> Result<Weighed, Failure> {
    let mut weighed = on_scale(contender, parameters, |scale| {
        of_scale(contender, scale, equal, measure)
    })?;
    weighed.nm_per_k = weighed
        .density_cm3
        .and_then(|density| nm_per_k(contender, parameters, density));
    Ok(weighed)
}

fn of_scale(contender: &Contender, scale: &Scale<'_>, equal: Equal, measure: f64) -> Weighed {
    let density_cm3 = scale.density_cm3(equal, measure);
    let mut weighed = Weighed {
        name: contender.name.clone(),
        matter: contender.matter,
        thickness_nm: scale.thickness_nm(),
        temperature_k: contender.stack.operation.temperature_k,
        density_cm3,
        te: None,
        tm: None,
        emission_nm: None,
        emission_fwhm_mev: None,
        transparency_cm3: scale.transparency_cm3(),
        differential_gain_cm2: None,
        current_a_cm2: None,
        nm_per_k: None,
        photon_ev: Vec::new(),
        points: Vec::new(),
        states_per_ev_cm3: scale.states_per_ev_cm3(),
    };
    let Some(density) = density_cm3 else {
        return weighed;
    };
    [weighed.te, weighed.tm] = scale.gains(density);
    if let Some(view) = scale.view(density) {
        let peak = view.emission_peak();
        weighed.emission_nm = peak.map(|peak| wavelength_nm(peak.photon_ev));
        weighed.emission_fwhm_mev = peak.map(|peak| 1e3 * view.emission_width_ev(&peak));
    }
    weighed.current_a_cm2 = Some(scale.current_a_cm2(density));
    let step = DENSITY_STEP * density;
    let [below, above] = [density - step, density + step].map(|density| scale.gain_cm(density));
    weighed.differential_gain_cm2 =
        (below > 0.0 && above > 0.0).then(|| (above - below) / (2.0 * step));
    let carriers = scale.carriers(density);
    let emitter = scale.emitter();
    if let Some(&lowest) = emitter.edges_ev().first() {
        let kt = thermal_ev(weighed.temperature_k);
        let low = (lowest - carriers.lowering_ev - 6.0 * emitter.line().half_width_ev).max(0.02);
        let high = carriers.splitting_ev().max(lowest) + (4.0 * kt).max(0.06);
        let step = (high - low) / (SAMPLES - 1) as f64;
        weighed.photon_ev = (0..SAMPLES).map(|at| low + at as f64 * step).collect();
        weighed.points = emitter.sample(&carriers, low, step, SAMPLES);
    }
    weighed
}

/// Change of the wavelength of peak gain with temperature, at a density.
fn nm_per_k(contender: &Contender, parameters: &Parameters, density_cm3: f64) -> Option<f64> {
    let kelvin = contender.stack.operation.temperature_k;
    let step = TEMPERATURE_STEP_K.min(0.5 * kelvin);
    let at = |kelvin: f64| {
        let mut warmed = contender.clone();
        warmed.stack.operation.temperature_k = kelvin;
        on_scale(&warmed, parameters, |scale| {
            let [te, tm] = scale.gains(density_cm3);
            GainPeak::larger(te, tm).map(|(_, peak)| peak.peak_nm)
        })
        .ok()
        .flatten()
    };
    Some((at(kelvin + step)? - at(kelvin - step)?) / (2.0 * step))
}
