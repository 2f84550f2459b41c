//! Structures side by side, and a well beside its own material in bulk.
//!
//! What is equal is chosen: carriers per volume or per area, the current of spontaneous emission, or
//! peak gain. The first structure at its working density sets the measure.

mod scale;

use rayon::prelude::*;

use crate::evaluation::{Failure, GainPeak};
use crate::materials::Parameters;
use crate::spectra::Point;
use crate::structure::Stack;
use crate::units::{thermal_ev, wavelength_nm};
use scale::{Scale, densest_cm3, on_scale};

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
    let measured = |scale: &Scale<'_>| scale.measure(equal, density_cm3);
    let measure = on_scale(first, parameters, density_cm3, measured)
        .map_err(|failure| (first.name.clone(), failure))?;
    contenders
        .par_iter()
        .map(|contender| {
            weighed(contender, parameters, equal, measure)
                .map_err(|failure| (contender.name.clone(), failure))
        })
        .collect()
}

fn weighed(
    contender: &Contender,
    parameters: &Parameters,
    equal: Equal,
    measure: f64,
) -> Result<Weighed, Failure> {
    let densest_cm3 = densest_cm3(contender, equal, measure);
    let mut weighed = on_scale(contender, parameters, densest_cm3, |scale| {
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
        on_scale(&warmed, parameters, density_cm3, |scale| {
            let [te, tm] = scale.gains(density_cm3);
            GainPeak::larger(te, tm).map(|(_, peak)| peak.peak_nm)
        })
        .ok()
        .flatten()
    };
    Some((at(kelvin + step)? - at(kelvin - step)?) / (2.0 * step))
}
