//! A structure against physics and the limits of the house: does it confine, can it be grown, what
//! is unusual about it.

mod scatter;

pub use scatter::Scatter;

use super::figures_of_merit::barriers_ev;
use super::spread::{posed, vacuum_nm};
use super::wafer::{WaferFinding, wafer};
use crate::evaluation::{self, Evaluation, Failure};
use crate::materials::Parameters;
use crate::profile::Profile;
use crate::structure::{Limits, Remark, Role, Stack, Wavelength};
use crate::subbands::Band;
use crate::units::thermal_ev;
use scatter::scatter;

/// What findings about levels are held against.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Bounds {
    /// Least height of the barriers above the lowest level, in kT at the working temperature.
    barrier_kt_min: f64,
    /// Whether that height is a limit of the house.
    barrier_is_house: bool,
    /// Widest spread of the lowest level over equal wells, eV.
    coupling_ev_max: f64,
    /// Whether that spread is a limit of the house.
    coupling_is_house: bool,
    /// Least distance of acceptors from the wells, nm.
    acceptor_setback_nm_min: Option<f64>,
}

impl Bounds {
    /// Where the house gives no barrier height: at 4 kT about one carrier in fifty has the energy to
    /// leave (common practice).
    const BARRIER_KT: f64 = 4.0;
    /// Where the house gives no spread: well below the width of any line at room temperature
    /// (common practice).
    const COUPLING_EV: f64 = 0.002;

    fn of(limits: Option<&Limits>) -> Self {
        let limit = |of: fn(&Limits) -> Option<f64>| limits.and_then(of);
        let coupling_mev = limit(|limits| limits.coupling_mev_max);
        let barrier_kt = limit(|limits| limits.barrier_kt_min);
        Self {
            barrier_kt_min: barrier_kt.unwrap_or(Self::BARRIER_KT),
            barrier_is_house: barrier_kt.is_some(),
            coupling_ev_max: coupling_mev.map_or(Self::COUPLING_EV, |mev| 1e-3 * mev),
            coupling_is_house: coupling_mev.is_some(),
            acceptor_setback_nm_min: limit(|limits| limits.acceptor_setback_nm_min),
        }
    }
}

/// A tolerance below this is finer than a wafer map tells, nm (common practice: ±1 nm).
const LEAST_TOLERANCE_NM: f64 = 1.0;

/// How a finding stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Standing {
    /// Inside its limit.
    Within,
    /// A figure without a limit to hold it against.
    Stated,
    /// No limit is broken, and a look is worth while.
    Noted,
    /// Outside its limit.
    Outside,
}

impl Standing {
    /// The word for it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Within => "ok",
            Self::Stated => "stated",
            Self::Noted => "look",
            Self::Outside => "outside",
        }
    }
}

/// Carriers of one sign.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Carrier {
    /// Electrons.
    Electrons,
    /// Holes, heavy and light.
    Holes,
}

impl Carrier {
    /// The word for them.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Electrons => "electrons",
            Self::Holes => "holes",
        }
    }
}

/// A number of a finding, and what it is held against.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Measure {
    /// What it is, with its unit at the end.
    pub name: &'static str,
    /// The number.
    pub value: f64,
    /// The limit, where there is one.
    pub limit: Option<f64>,
}

impl Measure {
    /// Whether it keeps its limit; `None` without one. A thickness is limited from below, all else
    /// from above.
    #[must_use]
    pub fn is_inside(&self) -> Option<bool> {
        self.limit.map(|limit| {
            if self.name == "thickness_nm" {
                self.value >= limit
            } else {
                self.value <= limit
            }
        })
    }
}

/// What a check found.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum Finding {
    /// The reader of the file remarked on something.
    File(Remark),
    /// No level, or no transition: there is nothing to build on.
    Unsolved(Failure),
    /// Wells are direct by a margin against the X or L valleys.
    DirectWell {
        /// The well's formula.
        formula: String,
        /// The nearest valley, `X` or `L`.
        valley: &'static str,
        /// How far it lies above Γ, eV.
        margin_ev: f64,
        /// kT, eV.
        thermal_ev: f64,
        /// Margin wanted, in kT.
        least_kt: f64,
    },
    /// Height of the barriers above the lowest level.
    Barrier {
        /// Whose.
        carrier: Carrier,
        /// From the lowest level to the lowest edge outside the wells, eV.
        height_ev: f64,
        /// kT, eV.
        thermal_ev: f64,
        /// Height wanted, in kT.
        least_kt: f64,
        /// Whether that is a limit of the house.
        is_house: bool,
    },
    /// Something about the wafer.
    Wafer(WaferFinding),
    /// The wavelength that the file promises against the one that its layers have.
    Target {
        /// Which wavelength.
        kind: Wavelength,
        /// Temperature at which it is meant, K.
        temperature_k: f64,
        /// The promise, nm in vacuum.
        promised_nm: f64,
        /// What the layers have, nm in vacuum; `None` where they have no such peak.
        computed_nm: Option<f64>,
        /// How far off is still accepted, nm.
        tolerance_nm: Option<f64>,
    },
    /// The tolerance of the target against the scatter of growth.
    Scatter(Scatter),
    /// Spread of the lowest level over equal wells.
    Coupling {
        /// Whose level.
        carrier: Carrier,
        /// From the first to the last, eV.
        spread_ev: f64,
        /// Widest that is not remarked, eV.
        most_ev: f64,
        /// Whether that is a limit of the house.
        is_house: bool,
    },
    /// Which hole lies nearest the gap.
    GroundHole {
        /// Whether it is a light hole.
        light: bool,
        /// Distance to the first hole of the other kind, eV; `None` if that is not bound.
        split_ev: Option<f64>,
    },
    /// A remark on the levels.
    Levels(evaluation::Remark),
    /// Dopants in the wells and the barriers next to them.
    Doping {
        /// Donors less acceptors, per volume of the wells, cm⁻³.
        net_cm3: f64,
        /// From the outermost well to the nearest layer with acceptors, nm.
        acceptors_setback_nm: Option<f64>,
        /// The same for donors.
        donors_setback_nm: Option<f64>,
        /// Least distance of acceptors that the house accepts, nm.
        least_nm: Option<f64>,
    },
}

/// Checks a structure.
///
/// # Arguments
///
/// * `remarks` – what the reader of the file remarked
#[must_use]
pub fn check(stack: &Stack, parameters: &Parameters, remarks: &[Remark]) -> Vec<Finding> {
    let bounds = Bounds::of(stack.limits.as_ref());
    let limits = &bounds;
    let mut findings: Vec<Finding> = remarks.iter().cloned().map(Finding::File).collect();
    if let Ok(profile) = Profile::new(stack, parameters) {
        findings.extend(direct_wells(stack, &profile, limits));
    }
    findings.extend(wafer(stack, parameters).into_iter().map(Finding::Wafer));
    findings.extend(target(stack, parameters));
    findings.extend(scatter(stack, parameters).map(Finding::Scatter));
    match Evaluation::new(stack, parameters) {
        Err(failure) => findings.push(Finding::Unsolved(failure)),
        Ok(evaluation) => {
            findings.extend(barriers(&evaluation, limits));
            findings.extend(ground_hole(&evaluation));
            findings.extend(coupling(&evaluation, limits));
            // The ground hole is a finding of its own.
            let of_levels = evaluation
                .remarks
                .iter()
                .filter(|remark| **remark != evaluation::Remark::LightHoleFirst)
                .cloned();
            findings.extend(of_levels.map(Finding::Levels));
            findings.push(doping(&evaluation, limits));
        }
    }
    findings
}

impl Finding {
    /// Its code: a word that scripts can rely on.
    #[must_use]
    pub fn code(&self) -> &'static str {
        match self {
            Self::File(remark) => match remark {
                Remark::DefaultTemperature { .. } => "default-temperature",
                Remark::Unusual { .. } => "unusual-number",
                Remark::SameMaterial { .. } => "same-material",
                Remark::UnusedMaterial { .. } => "unused-material",
                Remark::IndirectBarrier { .. } => "indirect-barrier",
                Remark::UnusualDopant { .. } => "unusual-dopant",
                Remark::TargetAssumed { .. } => "target-assumed",
                Remark::OwnNumbersKept { .. } => "own-numbers-kept",
            },
            Self::Unsolved(_) => "no-levels",
            Self::DirectWell { .. } => "direct-well",
            Self::Barrier {
                carrier: Carrier::Electrons,
                ..
            } => "electron-barrier",
            Self::Barrier { .. } => "hole-barrier",
            Self::Wafer(finding) => finding.code(),
            Self::Target { .. } => "target",
            Self::Scatter(_) => "growth-scatter",
            Self::Coupling { .. } => "coupling",
            Self::GroundHole { .. } => "ground-hole",
            Self::Levels(remark) => match remark {
                evaluation::Remark::NearEdge { .. } => "near-edge",
                evaluation::Remark::MassBounded => "mass-bounded",
                evaluation::Remark::NotBoundInField { .. } => "unbound-in-field",
                _ => "levels",
            },
            Self::Doping { .. } => "doping",
        }
    }

    /// How it stands.
    #[must_use]
    pub fn standing(&self) -> Standing {
        let look = |worth: bool| {
            if worth {
                Standing::Noted
            } else {
                Standing::Within
            }
        };
        let outside = |broken: bool| {
            if broken {
                Standing::Outside
            } else {
                Standing::Within
            }
        };
        // What is common practice and no limit of the house is worth a look where it is missed.
        let of_house = |missed: bool, is_house: bool| {
            if is_house {
                outside(missed)
            } else {
                look(missed)
            }
        };
        match self {
            Self::Wafer(finding) => finding.standing(),
            Self::Target {
                promised_nm,
                computed_nm,
                tolerance_nm,
                ..
            } => match (computed_nm, tolerance_nm) {
                (None, _) => Standing::Outside,
                (Some(nm), Some(most)) if (nm - promised_nm).abs() > *most => Standing::Outside,
                (Some(_), Some(most)) => look(*most < LEAST_TOLERANCE_NM),
                (Some(_), None) => Standing::Noted,
            },
            Self::Doping {
                acceptors_setback_nm,
                least_nm: Some(least_nm),
                ..
            } => outside(acceptors_setback_nm.is_some_and(|nm| nm < *least_nm)),
            Self::File(Remark::DefaultTemperature { .. })
            | Self::Levels(evaluation::Remark::MassBounded)
            | Self::Doping { .. } => Standing::Stated,
            Self::File(_) | Self::Levels(_) => Standing::Noted,
            Self::Unsolved(_) => Standing::Outside,
            Self::DirectWell {
                margin_ev,
                thermal_ev,
                least_kt,
                ..
            } => look(*margin_ev < least_kt * thermal_ev),
            Self::Barrier {
                height_ev,
                thermal_ev,
                least_kt,
                is_house,
                ..
            } => of_house(*height_ev < least_kt * thermal_ev, *is_house),
            Self::Coupling {
                spread_ev,
                most_ev,
                is_house,
                ..
            } => of_house(spread_ev > most_ev, *is_house),
            Self::Scatter(scatter) => scatter.standing(),
            Self::GroundHole { light, .. } => look(*light),
        }
    }

    /// Its numbers.
    #[must_use]
    pub fn measures(&self) -> Vec<Measure> {
        let measure = |name, value, limit| Measure { name, value, limit };
        match self {
            Self::File(Remark::Unusual { value, .. }) => vec![measure("value", *value, None)],
            Self::File(Remark::IndirectBarrier { below_mev, .. }) => {
                vec![measure("valley_below_mev", *below_mev, None)]
            }
            Self::File(_) | Self::Unsolved(_) | Self::Levels(_) => Vec::new(),
            Self::DirectWell {
                margin_ev,
                thermal_ev,
                least_kt,
                ..
            } => vec![measure(
                "margin_kt",
                margin_ev / thermal_ev,
                Some(*least_kt),
            )],
            Self::Barrier {
                height_ev,
                thermal_ev,
                least_kt,
                ..
            } => vec![
                measure("height_kt", height_ev / thermal_ev, Some(*least_kt)),
                measure("height_mev", 1e3 * height_ev, None),
            ],
            Self::Wafer(finding) => finding.measures(),
            Self::Scatter(scatter) => scatter.measures(),
            Self::Target {
                promised_nm,
                computed_nm,
                tolerance_nm,
                ..
            } => computed_nm
                .iter()
                .flat_map(|nm| {
                    [
                        measure("computed_nm", *nm, None),
                        measure("miss_nm", (nm - promised_nm).abs(), *tolerance_nm),
                    ]
                })
                .collect(),
            Self::Coupling {
                spread_ev, most_ev, ..
            } => vec![measure("spread_mev", 1e3 * spread_ev, Some(1e3 * most_ev))],
            Self::GroundHole { split_ev, .. } => split_ev
                .iter()
                .map(|split| measure("split_mev", 1e3 * split, None))
                .collect(),
            Self::Doping {
                net_cm3,
                acceptors_setback_nm,
                donors_setback_nm,
                least_nm,
            } => {
                let mut measures = vec![measure("net_cm3", *net_cm3, None)];
                let setbacks = [
                    ("acceptors_setback_nm", acceptors_setback_nm, *least_nm),
                    ("donors_setback_nm", donors_setback_nm, None),
                ];
                for (name, setback, limit) in setbacks {
                    measures.extend(setback.map(|nm| measure(name, nm, limit)));
                }
                measures
            }
        }
    }
}

/// The well that is direct by the smallest margin. Materials of own numbers have no valleys.
fn direct_wells(stack: &Stack, profile: &Profile<'_>, limits: &Bounds) -> Option<Finding> {
    let margins = stack
        .layers
        .iter()
        .zip(&profile.layers)
        .filter(|(layer, _)| layer.role == Role::Well)
        .flat_map(|(layer, numbers)| {
            let upper = layer.grade_to.as_ref().unwrap_or(&layer.material);
            [(&layer.material, &numbers.lower), (upper, &numbers.upper)]
        })
        .flat_map(|(material, numbers)| {
            let crystal = &numbers.crystal;
            [("X", crystal.gap_x_ev), ("L", crystal.gap_l_ev)]
                .map(|(valley, gap)| (material, valley, gap - crystal.gap_ev))
        })
        .filter(|(.., margin)| margin.is_finite());
    let (material, valley, margin_ev) = margins.min_by(|a, b| a.2.total_cmp(&b.2))?;
    Some(Finding::DirectWell {
        formula: material.formula(),
        valley,
        margin_ev,
        thermal_ev: thermal_ev(stack.operation.temperature_k),
        least_kt: limits.barrier_kt_min,
    })
}

/// The promise of the file under its own conditions; silent where nothing emits, which is a finding
/// of its own.
fn target(stack: &Stack, parameters: &Parameters) -> Option<Finding> {
    let target = stack.target?;
    let posed = posed(stack, &target);
    let evaluation = Evaluation::new(&posed, parameters).ok()?;
    Some(Finding::Target {
        kind: target.kind,
        temperature_k: posed.operation.temperature_k,
        promised_nm: vacuum_nm(&target),
        computed_nm: evaluation.wavelength_nm(target.kind),
        tolerance_nm: target.tolerance_nm,
    })
}

/// Heights from the lowest level to the lowest edge outside the wells. In a field they hang on where
/// one looks, and are left out.
fn barriers(evaluation: &Evaluation<'_>, limits: &Bounds) -> Vec<Finding> {
    let [electrons, holes] = barriers_ev(evaluation);
    let electron = electrons.map(|height_ev| (Carrier::Electrons, height_ev));
    let hole = holes.map(|height_ev| (Carrier::Holes, height_ev));
    electron
        .into_iter()
        .chain(hole)
        .map(|(carrier, height_ev)| Finding::Barrier {
            carrier,
            height_ev,
            thermal_ev: evaluation.thermal_ev(),
            least_kt: limits.barrier_kt_min,
            is_house: limits.barrier_is_house,
        })
        .collect()
}

fn ground_hole(evaluation: &Evaluation<'_>) -> Option<Finding> {
    let ladders = evaluation.ladders();
    let first = |light: bool| {
        let is_light = |symbol: &str, rung: &evaluation::Rung| {
            rung.shares
                .map_or(symbol == "lh", |shares| shares.light > shares.heavy)
        };
        ladders
            .iter()
            .skip(1)
            .flat_map(|ladder| ladder.rungs.iter().map(|rung| (ladder.symbol, rung)))
            .filter(|(symbol, rung)| is_light(symbol, rung) == light)
            .map(|(_, rung)| rung.energy_ev)
            .reduce(f64::max)
    };
    let (heavy, light) = (first(false), first(true));
    let split_ev = heavy.zip(light).map(|(heavy, light)| (heavy - light).abs());
    let light_first = match (heavy, light) {
        (Some(heavy), Some(light)) => light > heavy,
        (None, Some(_)) => true,
        (Some(_), None) => false,
        (None, None) => return None,
    };
    Some(Finding::GroundHole {
        light: light_first,
        split_ev,
    })
}

fn coupling(evaluation: &Evaluation<'_>, limits: &Bounds) -> Vec<Finding> {
    let holes = [Band::Heavy, Band::Light]
        .into_iter()
        .filter_map(|band| {
            let first = evaluation.bands.of(band).first()?;
            Some((first.energy_ev, band))
        })
        .max_by(|a, b| a.0.total_cmp(&b.0))
        .map(|(_, band)| (Carrier::Holes, band));
    [(Carrier::Electrons, Band::Electron)]
        .into_iter()
        .chain(holes)
        .filter_map(|(carrier, band)| {
            Some(Finding::Coupling {
                carrier,
                spread_ev: evaluation.coupling_ev(band)?,
                most_ev: limits.coupling_ev_max,
                is_house: limits.coupling_is_house,
            })
        })
        .collect()
}

fn doping(evaluation: &Evaluation<'_>, limits: &Bounds) -> Finding {
    let stack = evaluation.stack;
    let is_well = |index: &usize| stack.layers[*index].role == Role::Well;
    let first = (0..stack.layers.len()).find(is_well).unwrap_or(0);
    let last = (0..stack.layers.len()).rfind(is_well).unwrap_or(first);
    // Thickness between the outermost well and the nearest doped layer on either side; zero where
    // the doped layer lies between the wells.
    let setback = |density: fn(&crate::structure::Doping) -> f64| {
        let doped = |index: usize| density(&stack.layers[index].doping) > 0.0;
        if (first..=last).any(doped) {
            return Some(0.0);
        }
        let distance = |layers: &mut dyn Iterator<Item = usize>| {
            let mut between = 0.0;
            for index in layers {
                if doped(index) {
                    return Some(between);
                }
                between += stack.layers[index].thickness_nm;
            }
            None
        };
        let below = distance(&mut (0..first).rev());
        let above = distance(&mut (last + 1..stack.layers.len()));
        below.into_iter().chain(above).reduce(f64::min)
    };
    Finding::Doping {
        net_cm3: evaluation.doping.net_cm3,
        acceptors_setback_nm: setback(|doping| doping.acceptors_cm3),
        donors_setback_nm: setback(|doping| doping.donors_cm3),
        least_nm: limits.acceptor_setback_nm_min,
    }
}
