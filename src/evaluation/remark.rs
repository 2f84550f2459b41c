//! What a reader should know of a result: what was seen, what it may mean, what to do.

use super::{Evaluation, Run};
use crate::structure::{Bands, Lineshape};
use crate::subbands::Band;

/// Something worth knowing that is no error.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum Remark {
    /// The valence bands were taken one at a time.
    SingleBands,
    /// Equal wells that do not feel each other were solved as one.
    EqualWells {
        /// How many.
        count: usize,
    },
    /// In a field valence states are followed by their character.
    FollowedInField,
    /// The energy-dependent electron mass met its lower bound.
    MassBounded,
    /// Levels close to the edge that confines them.
    NearEdge {
        /// Their names.
        levels: Vec<String>,
    },
    /// A light hole makes the first transition.
    LightHoleFirst,
    /// Emission uses another line than gain.
    EmissionLine {
        /// The line asked for.
        asked: Lineshape,
    },
    /// A line of fixed width makes cold emission too strong.
    ColdEmission {
        /// At this density, cm⁻³.
        density_cm3: f64,
        /// The rate is this many times that of a sharp line.
        ratio: f64,
    },
    /// The field leaves some kind of level unbound.
    NotBoundInField {
        /// The kinds.
        kinds: Vec<&'static str>,
    },
    /// Densities below transparency.
    BelowTransparency {
        /// How many of those asked for.
        count: usize,
        /// Transparency density, cm⁻³.
        transparency_cm3: Option<f64>,
    },
    /// A quasi-Fermi level reaches the edges outside the wells.
    FillsBarriers {
        /// `electrons` or `holes`.
        carrier: &'static str,
        /// From this density on, cm⁻³.
        density_cm3: f64,
    },
}

impl Remark {
    /// What was seen, and what it may mean.
    #[must_use]
    pub fn message(&self) -> String {
        match self {
            Self::SingleBands => {
                "valence bands taken one at a time: good for levels and trends; gain comes out about \
                 twice too high, transparency 35 to 50 % too low, and TM gain is not to be believed"
                    .to_owned()
            }
            Self::EqualWells { count } => format!(
                "the {count} wells are equal and do not feel each other (levels within 2 µeV): their \
                 mixed valence bands are those of one of them, {count} times"
            ),
            Self::FollowedInField => {
                "in a field box states stand between those of the wells: mixed states are certified at \
                 zero in-plane wave number and followed from there by their character; spectra are good \
                 to about 1 %"
                    .to_owned()
            }
            Self::MassBounded => {
                "the energy-dependent electron mass met its lower bound, a tenth of the edge mass, in a \
                 layer far above the levels"
                    .to_owned()
            }
            Self::NearEdge { levels } => format!(
                "{} within 3 meV of the edge that confines: barely bound, and moved by the walls of the \
                 solved region",
                levels.join(", ")
            ),
            Self::LightHoleFirst => {
                "a light hole makes the first transition: emission is mostly TM".to_owned()
            }
            Self::EmissionLine { asked } => format!(
                "the tail of the {} line would make emission diverge at this temperature: emission uses \
                 the Gaussian of the same half width, gain keeps the line asked for",
                asked.word()
            ),
            Self::ColdEmission { density_cm3, ratio } => format!(
                "at {density_cm3:.3e} cm⁻³ a line of this fixed width makes emission {ratio:.1} times that of \
                 a sharp line: no accuracy is claimed for cold emission"
            ),
            Self::NotBoundInField { kinds } => {
                format!("not bound in this field: {} levels", kinds.join(" and "))
            }
            Self::BelowTransparency { count, transparency_cm3 } => {
                let plural = if *count == 1 { "y lies" } else { "ies lie" };
                transparency_cm3.map_or_else(
                    || format!("{count} densit{plural} below transparency: no peak gain there"),
                    |density| {
                        format!(
                            "{count} densit{plural} below transparency ({density:.3e} cm⁻³): no peak gain there"
                        )
                    },
                )
            }
            Self::FillsBarriers { carrier, density_cm3 } => format!(
                "from {density_cm3:.3e} cm⁻³ on the quasi-Fermi level of the {carrier} comes within 2 kT of \
                 the edge outside the wells: carriers there are not counted, the true density is higher"
            ),
        }
    }

    /// What to do.
    #[must_use]
    pub fn advice(&self) -> Option<String> {
        let text = match self {
            Self::SingleBands => "treat absolute gain and polarisation as trends only",
            Self::EqualWells { .. }
            | Self::FollowedInField
            | Self::MassBounded
            | Self::LightHoleFirst => return None,
            Self::NearEdge { .. } => {
                "do not build on these levels; raise the barrier or widen the well"
            }
            Self::EmissionLine { .. } => "lengthen `intraband_fs` or set lineshape = \"gaussian\"",
            Self::ColdEmission { .. } => "lengthen `intraband_fs` to what the cold line is",
            Self::NotBoundInField { .. } => "lower `field_kv_cm` or take deeper wells",
            Self::BelowTransparency { .. } => "ask for higher densities",
            Self::FillsBarriers { .. } => "take higher barriers, more wells or a lower density",
        };
        Some(text.to_owned())
    }
}

/// Remarks on the levels.
pub(super) fn of_levels(evaluation: &Evaluation<'_>) -> Vec<Remark> {
    let bands = &evaluation.bands;
    let mut remarks = Vec::new();
    if bands.electron.iter().any(|level| level.mass_bounded) {
        remarks.push(Remark::MassBounded);
    }
    if let Some(mixed) = &evaluation.mixed {
        if mixed.equal_wells > 1 {
            remarks.push(Remark::EqualWells {
                count: mixed.equal_wells,
            });
        }
        if evaluation.profile.slope_ev_nm != 0.0 {
            remarks.push(Remark::FollowedInField);
        }
    }
    let near: Vec<String> = evaluation
        .ladders()
        .iter()
        .flat_map(|ladder| {
            let marked = ladder
                .rungs
                .iter()
                .enumerate()
                .filter(|(_, rung)| rung.near_edge);
            marked
                .map(|(index, _)| format!("{}{}", ladder.symbol, index + 1))
                .collect::<Vec<_>>()
        })
        .collect();
    if !near.is_empty() {
        remarks.push(Remark::NearEdge { levels: near });
    }
    let first_is_light = evaluation.transitions.first().is_some_and(|transition| {
        let mixed = |number: &str| {
            let place: usize = number.parse().ok()?;
            evaluation
                .mixed
                .as_ref()?
                .zone_centre
                .get(place.checked_sub(1)?)
        };
        transition.hole.starts_with("lh")
            || transition
                .hole
                .strip_prefix('v')
                .and_then(mixed)
                .is_some_and(|state| state.heavy < 0.5)
    });
    if first_is_light {
        remarks.push(Remark::LightHoleFirst);
    }
    if evaluation.profile.slope_ev_nm != 0.0 {
        let kinds: Vec<&'static str> = [Band::Heavy, Band::Light]
            .into_iter()
            .filter(|&band| bands.of(band).is_empty())
            .map(Band::word)
            .collect();
        if !kinds.is_empty() {
            remarks.push(Remark::NotBoundInField { kinds });
        }
    }
    remarks
}

/// Remarks on a spectrum.
pub(super) fn of_spectrum(evaluation: &Evaluation<'_>, runs: &[Run]) -> Vec<Remark> {
    let mut remarks = Vec::new();
    if evaluation.stack.model.bands == Bands::Single {
        remarks.push(Remark::SingleBands);
    }
    let line = evaluation.emitter.line();
    if evaluation.emitter.emission_line(evaluation.thermal_ev()) != line {
        remarks.push(Remark::EmissionLine { asked: line.shape });
    }
    let count = runs
        .iter()
        .filter(|run| run.te.is_none() && run.tm.is_none())
        .count();
    if count > 0 {
        remarks.push(Remark::BelowTransparency {
            count,
            transparency_cm3: evaluation.transparency_cm3(),
        });
    }
    let profile = &evaluation.profile;
    let margin = 2.0 * evaluation.thermal_ev();
    let conduction = profile
        .outside()
        .map(|n| n.edges.conduction_ev)
        .fold(f64::INFINITY, f64::min);
    let valence = profile
        .outside()
        .map(|n| n.edges.heavy_ev.max(n.edges.light_ev))
        .fold(f64::NEG_INFINITY, f64::max);
    let electrons = runs
        .iter()
        .find(|run| run.fermi_electron_ev + 1e-3 * run.shrinkage_mev > conduction - margin);
    let holes = runs.iter().find(|run| run.fermi_hole_ev < valence + margin);
    for (carrier, run) in [("electrons", electrons), ("holes", holes)] {
        if let Some(run) = run {
            remarks.push(Remark::FillsBarriers {
                carrier,
                density_cm3: run.density_cm3,
            });
        }
    }
    remarks
}
