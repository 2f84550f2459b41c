//! The only chain of profile, subbands, carriers and spectra, and the one record of what came out.
//!
//! [`Evaluation::new`] finds the levels of a stack; [`Evaluation::emission`] and
//! [`Evaluation::spectrum`] go on from there. Writers read the records and compute no physics.

mod budget;
mod ladder;
mod mixed;
mod outline;
mod remark;
mod spectrum;

pub use budget::{Budget, budget};
pub use ladder::{Group, Ladder, Rung, Shares, TransitionGroup};
pub use outline::{Outline, emission_nm, refractive_index};
pub use remark::Remark;
pub use spectrum::{
    Absorption, GainPeak, PhotoLuminescence, Run, Spectrum, Spontaneous, Transparency,
};

use crate::carriers::{NetDoping, Reservoir, Subband};
use crate::coherence::StrainBudget;
use crate::materials::Parameters;
use crate::numerics::roots::bracketed_root;
use crate::profile::{Profile, Unsolvable};
use crate::spectra::landmarks::View;
use crate::spectra::{Dispersive, Emitter, Hole, Line, Occupation, Pair, Point, Staircase};
use crate::structure::{Bands, Role, Stack, Substance, Wavelength};
use crate::subbands::{Band, Level, MixedBands, SingleBands, Uncertified, single};
use crate::units::{thermal_ev, wavelength_nm};

/// Least overlap |<e|h>|² of a transition that is listed, and of the first transition.
pub const LEAST_OVERLAP: f64 = 0.01;
/// Density at which photoluminescence is excited, cm⁻³: low injection, what a wafer map measures.
pub const PL_DENSITY_CM3: f64 = 1e16;

/// Why an evaluation came to nothing.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum Failure {
    /// There is no region to solve.
    #[error(transparent)]
    Unsolvable(#[from] Unsolvable),
    /// Node counts disagree with the levels found.
    #[error(transparent)]
    Uncertified(#[from] Uncertified),
    /// No electron, or no hole, is bound.
    #[error("no {carrier} level belongs to the wells: {reason}")]
    NoLevel {
        /// `electron`, or `heavy-hole or light-hole`.
        carrier: &'static str,
        /// What stands in the way, and the remedy.
        reason: String,
    },
    /// No pair of levels overlaps.
    #[error(
        "no transition has an overlap above {LEAST_OVERLAP}: electrons and holes sit in different places; \
         check the offsets of the wells, or lower the field"
    )]
    NoTransition,
    /// A well of own numbers without an index.
    #[error(
        "the well material `{material}` has numbers of its own and no refractive index: \
         give it `index`, or set `index` in [model]"
    )]
    NoIndex {
        /// The material's name.
        material: String,
    },
}

/// An optical transition between two levels.
#[derive(Clone, Debug, PartialEq)]
pub struct Transition {
    /// Number of the electron level, from 1.
    pub electron: usize,
    /// Name of the hole level, `hh1`, `lh2`.
    pub hole: String,
    /// Energy of the edge without gap shrinkage, eV.
    pub energy_ev: f64,
    /// Its wavelength in vacuum, nm.
    pub wavelength_nm: f64,
    /// |<electron|hole>|².
    pub overlap: f64,
}

/// The emission wavelengths by their names, nm in vacuum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Emission {
    /// Edge of the first transition, without shrinkage.
    pub first_transition_nm: f64,
    /// Peak of the spontaneous spectrum at [`PL_DENSITY_CM3`], without shrinkage.
    pub pl_nm: Option<f64>,
    /// Peak of the larger of TE and TM gain at the working density, with shrinkage.
    pub gain_peak_nm: Option<f64>,
    /// The same without shrinkage.
    pub gain_peak_unshrunk_nm: Option<f64>,
}

/// Quasi-Fermi levels at one density, without gap shrinkage.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Filling {
    /// Density of pairs per volume of the wells, cm⁻³.
    pub density_cm3: f64,
    /// Quasi-Fermi level of the electrons, eV.
    pub fermi_electron_ev: f64,
    /// Quasi-Fermi level of the holes, eV.
    pub fermi_hole_ev: f64,
}

/// States that holes may fill, energies counted down from the scale's zero.
#[derive(Debug)]
enum Holes {
    Parabolic(Vec<Subband>),
    Sampled(Vec<(f64, f64)>),
}

impl Holes {
    fn reservoir(&self) -> Reservoir<'_> {
        match self {
            Self::Parabolic(subbands) => Reservoir::Parabolic(subbands),
            Self::Sampled(states) => Reservoir::Sampled(states),
        }
    }
}

/// How far mixed bands are followed along the wave number.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Extent {
    /// No further than the levels.
    ZoneCentre,
    /// Past what emits at [`PL_DENSITY_CM3`].
    LowInjection,
    /// Past every hole at the densities of the stack.
    Densities,
}

/// How far the highest valence state must fall for the peak of emission at low injection, kT. The
/// electron rises several times as fast, and emission falls off with the sum of both; what lies
/// beyond only shares the holes out, as [`outline::holes_beyond`] has it.
const LOW_INJECTION_KT: f64 = 2.5;

/// The levels of a stack and what follows from them.
#[derive(Debug)]
pub struct Evaluation<'a> {
    /// The stack.
    pub stack: &'a Stack,
    /// The parameter data used.
    pub parameters: &'a Parameters,
    /// Band edges and the solved region.
    pub profile: Profile<'a>,
    /// Levels and envelopes of the bands one at a time.
    pub bands: SingleBands,
    /// Valence states with the bands mixed, where the model asks for them.
    pub mixed: Option<MixedBands>,
    /// Transitions with an overlap above [`LEAST_OVERLAP`], by rising energy.
    pub transitions: Vec<Transition>,
    /// Net doping that the wells feel.
    pub doping: NetDoping,
    /// What a reader should know.
    pub remarks: Vec<Remark>,
    emitter: Box<dyn Emitter>,
    pairs: Vec<Pair>,
    index: Result<f64, Failure>,
    electrons: Vec<Subband>,
    holes: Holes,
    first_ev: f64,
}

impl<'a> Evaluation<'a> {
    /// Finds the levels of a stack.
    ///
    /// # Errors
    ///
    /// [`Failure`] if there is no region to solve, no level of a kind, or no transition.
    pub fn new(stack: &'a Stack, parameters: &'a Parameters) -> Result<Self, Failure> {
        Self::over(stack, parameters, Extent::Densities)
    }

    /// The same with mixed bands followed as far as `extent` says.
    fn over(stack: &'a Stack, parameters: &'a Parameters, extent: Extent) -> Result<Self, Failure> {
        let profile = Profile::new(stack, parameters)?;
        let bands = single(&profile, stack.model.nonparabolic)?;
        require_levels(stack, &profile, &bands)?;
        let pairs = pairs(stack, &profile, &bands);
        let line = Line::new(stack.model.lineshape, stack.model.intraband_fs);
        let wells_nm = profile.well_thickness_nm;
        let kane_energy_ev = profile
            .wells(stack)
            .map(|(numbers, thickness_nm)| numbers.crystal.kane_energy_ev * thickness_nm)
            .sum::<f64>()
            / wells_nm;
        let electrons = subbands(&bands.electron, 1.0);
        let mut parabolas = subbands(&bands.heavy, -1.0);
        parabolas.extend(subbands(&bands.light, -1.0));
        let doping = net_doping(stack, wells_nm);
        let mixed = match stack.model.bands {
            Bands::Single => None,
            Bands::Mixed => {
                let depth_ev = match extent {
                    Extent::ZoneCentre => 0.0,
                    Extent::LowInjection => {
                        LOW_INJECTION_KT * thermal_ev(stack.operation.temperature_k)
                    }
                    Extent::Densities => mixed::depth_ev(stack, &parabolas, doping),
                };
                Some(match mixed::one_of_equal_wells(stack, &bands) {
                    Some((wells, one)) => {
                        let profile = Profile::new(&one, parameters)?;
                        let bands = single(&profile, stack.model.nonparabolic)?;
                        crate::subbands::mixed(&profile, &bands, depth_ev)?.of_equal_wells(wells)
                    }
                    None => crate::subbands::mixed(&profile, &bands, depth_ev)?,
                })
            }
        };
        let mut transitions = every_pair(&pairs, &bands, mixed.as_ref());
        transitions.retain(|transition| transition.overlap > LEAST_OVERLAP);
        let first_ev = transitions.first().ok_or(Failure::NoTransition)?.energy_ev;
        let index = index_at(stack, parameters, first_ev);
        // Positions and widths do not hang on the index, which scales every spectrum as a whole.
        let scale = index.as_ref().copied().unwrap_or(1.0);
        let (emitter, holes): (Box<dyn Emitter>, Holes) = match &mixed {
            None => {
                let emitter = Staircase::new(pairs.clone(), kane_energy_ev, wells_nm, scale, line);
                (Box::new(emitter), Holes::Parabolic(parabolas))
            }
            Some(mixed) => {
                let kt = thermal_ev(stack.operation.temperature_k);
                let (samples, edges, reach) = mixed::samples(mixed, &line);
                let emitter =
                    Dispersive::new(samples, edges, reach, kane_energy_ev, wells_nm, scale, line);
                let mut states = mixed::hole_states(mixed, kt);
                if extent == Extent::LowInjection {
                    states.extend(outline::holes_beyond(mixed, kt));
                }
                (Box::new(emitter), Holes::Sampled(states))
            }
        };
        let mut evaluation = Self {
            stack,
            parameters,
            profile,
            bands,
            mixed,
            transitions,
            doping,
            remarks: Vec::new(),
            emitter,
            pairs,
            index,
            electrons,
            holes,
            first_ev,
        };
        evaluation.remarks = remark::of_levels(&evaluation);
        Ok(evaluation)
    }

    /// What the layers use up of what coherent growth allows.
    #[must_use]
    pub fn strain_budget(&self) -> StrainBudget {
        StrainBudget::new(self.stack, self.parameters)
    }

    /// kT, eV.
    #[must_use]
    pub fn thermal_ev(&self) -> f64 {
        thermal_ev(self.stack.operation.temperature_k)
    }

    /// Edge of the first transition without shrinkage, eV.
    #[must_use]
    pub fn first_transition_ev(&self) -> f64 {
        self.first_ev
    }

    /// Refractive index of the wells.
    ///
    /// # Errors
    ///
    /// [`Failure::NoIndex`] if a well of own numbers has none.
    pub fn refractive_index(&self) -> Result<f64, Failure> {
        self.index.clone()
    }

    /// Gap shrinkage at a density, eV, at least zero: k (N/1e18)^⅓.
    ///
    /// Source: H. C. Casey, F. Stern, J. Appl. Phys. 47, 631 (1976), for equal numbers of
    /// electrons and holes.
    #[must_use]
    pub fn shrinkage_ev(&self, density_cm3: f64) -> f64 {
        1e-3 * self.stack.model.shrinkage_mev * (density_cm3 / 1e18).cbrt()
    }

    /// Quasi-Fermi levels at a density of pairs, without shrinkage.
    #[must_use]
    pub fn filling(&self, density_cm3: f64) -> Filling {
        let (electrons, holes) = self.doping.electrons_and_holes_cm3(density_cm3);
        let area = 1e-7 * self.profile.well_thickness_nm;
        let kt = self.thermal_ev();
        Filling {
            density_cm3,
            fermi_electron_ev: Reservoir::Parabolic(&self.electrons).fermi_ev(electrons * area, kt),
            fermi_hole_ev: -self.holes.reservoir().fermi_ev(holes * area, kt),
        }
    }

    /// The carriers at a density, with the gap lowered by `lowering_ev`.
    fn occupation(&self, filling: &Filling, lowering_ev: f64) -> Occupation {
        Occupation {
            fermi_electron_ev: filling.fermi_electron_ev - lowering_ev,
            fermi_hole_ev: filling.fermi_hole_ev,
            lowering_ev,
            thermal_ev: self.thermal_ev(),
        }
    }

    /// Whether a filling gives gain at all: the quasi-Fermi splitting exceeds the first transition.
    fn is_transparent(&self, filling: &Filling) -> bool {
        filling.fermi_electron_ev - filling.fermi_hole_ev > self.first_ev
    }

    /// The density at which the quasi-Fermi splitting equals the first transition, cm⁻³; `None` if
    /// that is outside 1e10 to 1e22.
    #[must_use]
    pub fn transparency_cm3(&self) -> Option<f64> {
        let excess = |log_density: f64| {
            let filling = self.filling(log_density.exp());
            filling.fermi_electron_ev - filling.fermi_hole_ev - self.first_ev
        };
        let (low, high) = (1e10f64.ln(), 1e22f64.ln());
        (excess(low) < 0.0 && excess(high) > 0.0)
            .then(|| bracketed_root(excess, low, high, 1e-10).exp())
    }

    /// The emission wavelengths by their names.
    #[must_use]
    pub fn emission(&self) -> Emission {
        let filling = self.filling(self.stack.operation.working_density_cm3);
        let peak_nm = |lowering_ev: f64| {
            let view = self.view(&self.occupation(&filling, lowering_ev));
            let [te, tm] = self.gain_peaks(&filling, &view);
            GainPeak::larger(te, tm).map(|(_, peak)| peak.peak_nm)
        };
        Emission {
            first_transition_nm: wavelength_nm(self.first_ev),
            pl_nm: self
                .view(&self.low_injection())
                .emission_peak()
                .map(|peak| wavelength_nm(peak.photon_ev)),
            gain_peak_nm: peak_nm(self.shrinkage_ev(filling.density_cm3)),
            gain_peak_unshrunk_nm: peak_nm(0.0),
        }
    }

    /// The wavelength of a kind, nm in vacuum: of peak gain at the working density. `None` where
    /// there is no such peak.
    #[must_use]
    pub fn wavelength_nm(&self, kind: Wavelength) -> Option<f64> {
        match kind {
            Wavelength::Transition => Some(wavelength_nm(self.first_ev)),
            Wavelength::Photoluminescence => self
                .view(&self.low_injection())
                .emission_peak()
                .map(|peak| wavelength_nm(peak.photon_ev)),
            Wavelength::Gain => {
                let density_cm3 = self.stack.operation.working_density_cm3;
                self.highest_gain(density_cm3).map(|(_, peak)| peak.peak_nm)
            }
        }
    }

    /// Peaks of TE and TM gain at a density, with shrinkage; `None` below transparency.
    #[must_use]
    pub fn gain_peaks_at(&self, density_cm3: f64) -> [Option<GainPeak>; 2] {
        self.gain_peaks(
            &self.filling(density_cm3),
            &self.view(&self.carriers(density_cm3)),
        )
    }

    /// The larger of these peaks, with the name of its polarisation.
    #[must_use]
    pub fn highest_gain(&self, density_cm3: f64) -> Option<(&'static str, GainPeak)> {
        let [te, tm] = self.gain_peaks_at(density_cm3);
        GainPeak::larger(te, tm)
    }

    /// The carriers at a density of pairs, with gap shrinkage.
    #[must_use]
    pub fn carriers(&self, density_cm3: f64) -> Occupation {
        self.occupation(&self.filling(density_cm3), self.shrinkage_ev(density_cm3))
    }

    /// The current that spontaneous emission at a density takes, of all wells, A/cm².
    #[must_use]
    pub fn radiative_current_a_cm2(&self, density_cm3: f64) -> f64 {
        let rate = self
            .view(&self.carriers(density_cm3))
            .total_rate_per_cm3_s();
        crate::units::ELEMENTARY_CHARGE_C * rate * 1e-7 * self.profile.well_thickness_nm
    }

    /// What absorbs and emits.
    #[must_use]
    pub fn emitter(&self) -> &dyn Emitter {
        &*self.emitter
    }

    /// Edge of the first transition with the gap shrinkage at a density, as a wavelength in vacuum,
    /// nm.
    #[must_use]
    pub fn shrunk_first_transition_nm(&self, density_cm3: f64) -> f64 {
        wavelength_nm(self.first_ev - self.shrinkage_ev(density_cm3))
    }

    /// Half width at half maximum of the line, eV.
    #[must_use]
    pub fn line_half_width_ev(&self) -> f64 {
        self.emitter.line().half_width_ev
    }

    /// Every pair of levels, however small its overlap, by rising energy.
    fn every_pair(&self) -> Vec<Transition> {
        every_pair(&self.pairs, &self.bands, self.mixed.as_ref())
    }

    fn low_injection(&self) -> Occupation {
        self.occupation(&self.filling(PL_DENSITY_CM3), 0.0)
    }

    /// A view of the spectrum at some carriers. There is always a transition to see.
    fn view(&self, occupation: &Occupation) -> View<'_> {
        View::new(&*self.emitter, occupation).expect("an evaluation has a transition")
    }

    /// Peaks of TE and TM gain; `None` below transparency.
    fn gain_peaks(&self, filling: &Filling, view: &View<'_>) -> [Option<GainPeak>; 2] {
        if !self.is_transparent(filling) {
            return [None, None];
        }
        let peak = |pick: fn(&Point) -> f64| {
            view.gain_peak(pick).map(|peak| GainPeak {
                gain_cm: peak.height,
                peak_nm: wavelength_nm(peak.photon_ev),
                peak_ev: peak.photon_ev,
            })
        };
        [
            peak(|point| point.te_gain_cm),
            peak(|point| point.tm_gain_cm),
        ]
    }
}

/// The subbands of a ladder, energies counted away from the gap.
fn subbands(levels: &[Level], sign: f64) -> Vec<Subband> {
    levels
        .iter()
        .map(|level| Subband {
            edge_ev: sign * level.energy_ev,
            mass: level.in_plane_mass,
        })
        .collect()
}

/// Every pair of an electron and a hole level.
fn pairs(stack: &Stack, profile: &Profile<'_>, bands: &SingleBands) -> Vec<Pair> {
    let edge = |band: Band, start: f64, pick: fn(f64, f64) -> f64| {
        profile
            .wells(stack)
            .map(|(numbers, _)| band.edge_ev(numbers))
            .fold(start, pick)
    };
    let conduction_ev = edge(Band::Electron, f64::INFINITY, f64::min);
    let mut pairs = Vec::new();
    for (kind, band) in [(Hole::Heavy, Band::Heavy), (Hole::Light, Band::Light)] {
        let valence_ev = edge(band, f64::NEG_INFINITY, f64::max);
        let overlaps = bands.overlaps(band);
        for (electron, upper) in bands.electron.iter().enumerate() {
            for (hole, lower) in bands.of(band).iter().enumerate() {
                pairs.push(Pair {
                    electron,
                    kind,
                    hole,
                    electron_ev: upper.energy_ev,
                    hole_ev: lower.energy_ev,
                    electron_mass: upper.in_plane_mass,
                    hole_mass: lower.in_plane_mass,
                    overlap: overlaps.0[electron][hole],
                    confinement_ev: (upper.energy_ev - conduction_ev).max(0.0)
                        + (valence_ev - lower.energy_ev).max(0.0),
                });
            }
        }
    }
    pairs
}

/// The transitions between all levels, by rising energy: of the mixed valence states where there are
/// any, else of heavy and light holes.
fn every_pair(pairs: &[Pair], bands: &SingleBands, mixed: Option<&MixedBands>) -> Vec<Transition> {
    let mut transitions: Vec<Transition> = match mixed {
        Some(mixed) => mixed::transitions(&bands.electron, mixed),
        None => pairs
            .iter()
            .map(|pair| Transition {
                electron: pair.electron + 1,
                hole: match pair.kind {
                    Hole::Heavy => format!("hh{}", pair.hole + 1),
                    Hole::Light => format!("lh{}", pair.hole + 1),
                },
                energy_ev: pair.energy_ev(),
                wavelength_nm: wavelength_nm(pair.energy_ev()),
                overlap: pair.overlap,
            })
            .collect(),
    };
    transitions.sort_by(|a, b| a.energy_ev.total_cmp(&b.energy_ev));
    transitions
}

/// Net doping of the wells, the layers between them, the steps next to them, and a barrier next to
/// these on either side, per volume of the wells.
fn net_doping(stack: &Stack, wells_nm: f64) -> NetDoping {
    let layers = &stack.layers;
    let is = |index: Option<usize>, role: Role| {
        index
            .and_then(|index| layers.get(index))
            .is_some_and(|layer| layer.role == role)
    };
    let well = |layer: &crate::structure::Layer| layer.role == Role::Well;
    let (Some(mut first), Some(mut last)) =
        (layers.iter().position(well), layers.iter().rposition(well))
    else {
        return NetDoping::default();
    };
    while is(first.checked_sub(1), Role::Step) {
        first -= 1;
    }
    while is(Some(last + 1), Role::Step) {
        last += 1;
    }
    if is(first.checked_sub(1), Role::Barrier) {
        first -= 1;
    }
    if is(Some(last + 1), Role::Barrier) {
        last += 1;
    }
    let net_nm: f64 = layers[first..=last]
        .iter()
        .map(|layer| (layer.doping.donors_cm3 - layer.doping.acceptors_cm3) * layer.thickness_nm)
        .sum();
    NetDoping {
        net_cm3: net_nm / wells_nm,
    }
}

/// Mean refractive index of the wells by thickness at a photon energy.
fn index_at(stack: &Stack, parameters: &Parameters, photon_ev: f64) -> Result<f64, Failure> {
    if let Some(index) = stack.model.index {
        return Ok(index);
    }
    let substrate = match &stack.substrate.substance {
        Substance::Alloy(composition) => Some(composition),
        Substance::Own { .. } => None,
    };
    let mut sum = 0.0;
    for layer in stack.wells() {
        let ends = [
            &layer.material,
            layer.grade_to.as_ref().unwrap_or(&layer.material),
        ];
        for material in ends {
            let index = match &material.substance {
                Substance::Alloy(composition) => {
                    parameters.index(composition, substrate, photon_ev)
                }
                Substance::Own {
                    index: Some(index), ..
                } => *index,
                Substance::Own { index: None, .. } => {
                    return Err(Failure::NoIndex {
                        material: material.name.clone(),
                    });
                }
            };
            sum += 0.5 * layer.thickness_nm * index;
        }
    }
    Ok(sum / stack.well_thickness_nm())
}

/// No electron level, or neither a heavy nor a light one, is an error that says why.
fn require_levels(
    stack: &Stack,
    profile: &Profile<'_>,
    bands: &SingleBands,
) -> Result<(), Failure> {
    let missing = |carrier: &'static str, kinds: &[Band]| {
        let reason = if profile.slope_ev_nm == 0.0 {
            let parts: Vec<String> = kinds
                .iter()
                .map(|&band| {
                    let sign = if band == Band::Electron { 1.0 } else { -1.0 };
                    let deepest = |edges: &mut dyn Iterator<Item = f64>| {
                        edges.map(|edge| sign * edge).fold(f64::INFINITY, f64::min)
                    };
                    let well = deepest(&mut profile.wells(stack).map(|(n, _)| band.edge_ev(n)));
                    let outside = deepest(&mut profile.outside().map(|n| band.edge_ev(n)));
                    let depth_mev = 1e3 * (outside - well);
                    if depth_mev > 0.0 {
                        format!(
                            "the {} edge of the wells is only {depth_mev:.0} meV deep against the layers outside them",
                            band.word()
                        )
                    } else {
                        format!(
                            "the {} edge of the wells stands {:.0} meV beyond that of a layer outside them, so that it is no well",
                            band.word(),
                            -depth_mev
                        )
                    }
                })
                .collect();
            format!(
                "{}; take a barrier of larger gap, a wider well, or check that every layer within 60 nm of the wells confines",
                parts.join(", and ")
            )
        } else {
            "not bound in this field; lower `field_kv_cm` or take deeper wells".to_owned()
        };
        Err(Failure::NoLevel { carrier, reason })
    };
    if bands.electron.is_empty() {
        return missing("electron", &[Band::Electron]);
    }
    if bands.heavy.is_empty() && bands.light.is_empty() {
        return missing("heavy-hole or light-hole", &[Band::Heavy, Band::Light]);
    }
    Ok(())
}
