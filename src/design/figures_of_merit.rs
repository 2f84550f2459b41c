//! What tells two structures of one wavelength apart.

use crate::coherence::{LayerStrain, StrainBudget};
use crate::evaluation::{Evaluation, Failure, GainPeak, emission_nm};
use crate::materials::{Composition, Element, Parameters};
use crate::structure::{Limits, Role, Stack, Substance, Wavelength};

/// Part by which the width of all wells is changed to see what that does.
const WIDTH_STEP: f64 = 0.01;
/// Share of an element by which a composition is changed.
const SHARE_STEP: f64 = 0.001;
/// Temperature by which a structure is warmed and cooled, K.
const TEMPERATURE_STEP_K: f64 = 5.0;

/// What a wavelength does when a share of the wells' material rises by 0.001.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ShareDrift {
    /// The element whose share rises.
    pub element: Element,
    /// The element that gives way.
    pub at_expense_of: Element,
    /// Change of the wavelength, nm per 0.001.
    pub nm_per_thousandth: f64,
}

/// Figures of one structure. What does not exist is `None`.
#[derive(Clone, Debug, PartialEq)]
pub struct FiguresOfMerit {
    /// Its wavelength of the kind asked for, nm in vacuum.
    pub wavelength_nm: Option<f64>,
    /// Density that gain is for, cm⁻³.
    pub density_cm3: f64,
    /// The larger of the peaks of TE and TM gain at that density, and its polarisation.
    pub gain: Option<(&'static str, GainPeak)>,
    /// Transparency density, cm⁻³.
    pub transparency_cm3: Option<f64>,
    /// From the first electron level to the lowest edge outside the wells, in kT.
    pub electron_barrier_kt: Option<f64>,
    /// From the first hole level to the highest edge outside the wells, in kT.
    pub hole_barrier_kt: Option<f64>,
    /// The well that uses most of its critical thickness.
    pub well: Option<LayerStrain>,
    /// Wells and barriers together: share of the critical thickness of their mean strain.
    pub stack_critical_share: Option<f64>,
    /// Change of the wavelength when all wells are 1 % wider, nm.
    pub nm_per_percent_width: Option<f64>,
    /// Change of the wavelength with the composition of the first well.
    pub shares: Vec<ShareDrift>,
    /// Change of the wavelength with temperature, nm/K.
    pub nm_per_k: Option<f64>,
    /// Limits of the house that it breaks, by their keys.
    pub broken_limits: Vec<&'static str>,
}

impl FiguresOfMerit {
    /// Figures of a structure; gain and the gain wavelength at its working density.
    ///
    /// # Errors
    ///
    /// [`Failure`] if it has no levels.
    pub fn of(stack: &Stack, parameters: &Parameters, kind: Wavelength) -> Result<Self, Failure> {
        let evaluation = Evaluation::new(stack, parameters)?;
        let density_cm3 = stack.operation.working_density_cm3;
        let [electron_barrier_kt, hole_barrier_kt] =
            barriers_ev(&evaluation).map(|height| height.map(|ev| ev / evaluation.thermal_ev()));
        let budget = StrainBudget::new(stack, parameters);
        let drifts = Drifts {
            stack,
            parameters,
            kind,
        };
        let mut figures = Self {
            wavelength_nm: evaluation.wavelength_nm(kind),
            density_cm3,
            gain: evaluation.highest_gain(density_cm3),
            transparency_cm3: evaluation.transparency_cm3(),
            electron_barrier_kt,
            hole_barrier_kt,
            well: budget.tightest_well().cloned(),
            stack_critical_share: budget.active.as_ref().map(|it| it.critical_share()),
            nm_per_percent_width: drifts.per_percent_width(),
            shares: drifts.per_thousandth(),
            nm_per_k: drifts.per_kelvin(),
            broken_limits: Vec::new(),
        };
        if let Some(limits) = &stack.limits {
            figures.broken_limits = broken(&figures, stack, &budget, limits);
        }
        Ok(figures)
    }
}

/// Heights of the barriers above the first level, electrons and holes, eV. In a field they hang on
/// where one looks, and are left out.
pub(super) fn barriers_ev(evaluation: &Evaluation<'_>) -> [Option<f64>; 2] {
    if evaluation.profile.slope_ev_nm != 0.0 {
        return [None, None];
    }
    let outside = || evaluation.profile.outside().map(|numbers| &numbers.edges);
    let conduction = outside()
        .map(|edges| edges.conduction_ev)
        .fold(f64::INFINITY, f64::min);
    let valence = outside()
        .map(|edges| edges.heavy_ev.max(edges.light_ev))
        .fold(f64::NEG_INFINITY, f64::max);
    let ladders = evaluation.ladders();
    let first = |ladder: &crate::evaluation::Ladder| Some(ladder.rungs.first()?.energy_ev);
    let electron = ladders.first().and_then(first);
    let hole = ladders.iter().skip(1).filter_map(first).reduce(f64::max);
    [
        electron.map(|level| conduction - level),
        hole.map(|level| level - valence),
    ]
}

/// Keys of the limits that a structure breaks.
fn broken(
    figures: &FiguresOfMerit,
    stack: &Stack,
    budget: &StrainBudget,
    limits: &Limits,
) -> Vec<&'static str> {
    let over = |limit: Option<f64>, value: f64| limit.is_some_and(|most| value > most);
    let under = |limit: Option<f64>, value: Option<f64>| {
        limit.zip(value).is_some_and(|(least, value)| value < least)
    };
    let layers = || budget.layers.iter();
    let most = |of: fn(&LayerStrain) -> f64| layers().map(of).fold(0.0, f64::max);
    let least_well = stack
        .wells()
        .map(|layer| layer.thickness_nm)
        .reduce(f64::min);
    let least_barrier = figures
        .electron_barrier_kt
        .into_iter()
        .chain(figures.hole_barrier_kt)
        .reduce(f64::min);
    let net = budget.active.as_ref().map(|it| it.mean.strain_percent());
    [
        (
            "strain_percent_max",
            over(
                limits.strain_percent_max,
                most(|it| it.mismatch.strain_percent()),
            ),
        ),
        (
            "strain_thickness_percent_nm_max",
            over(
                limits.strain_thickness_percent_nm_max,
                most(LayerStrain::strain_thickness_percent_nm),
            ),
        ),
        (
            "net_strain_percent_max",
            over(limits.net_strain_percent_max, net.unwrap_or(0.0)),
        ),
        (
            "critical_share_max",
            over(limits.critical_share_max, most(LayerStrain::critical_share)),
        ),
        ("well_nm_min", under(limits.well_nm_min, least_well)),
        (
            "barrier_kt_min",
            under(limits.barrier_kt_min, least_barrier),
        ),
    ]
    .into_iter()
    .filter_map(|(key, is_broken)| is_broken.then_some(key))
    .collect()
}

/// A structure that is changed a little to see what its wavelength does.
struct Drifts<'a> {
    stack: &'a Stack,
    parameters: &'a Parameters,
    kind: Wavelength,
}

impl Drifts<'_> {
    fn wavelength_nm(&self, stack: &Stack) -> Option<f64> {
        emission_nm(stack, self.parameters, self.kind).ok()?
    }

    /// Half the difference of a change and its opposite.
    fn central(&self, change: impl Fn(&mut Stack, f64)) -> Option<f64> {
        let shifted = |sign: f64| {
            let mut stack = self.stack.clone();
            change(&mut stack, sign);
            self.wavelength_nm(&stack)
        };
        Some(0.5 * (shifted(1.0)? - shifted(-1.0)?))
    }

    fn per_percent_width(&self) -> Option<f64> {
        self.central(|stack, sign| {
            for layer in &mut stack.layers {
                if layer.role == Role::Well {
                    layer.thickness_nm *= 1.0 + sign * WIDTH_STEP;
                }
            }
        })
    }

    fn per_kelvin(&self) -> Option<f64> {
        let step = TEMPERATURE_STEP_K.min(0.5 * self.stack.operation.temperature_k);
        let change = self.central(|stack, sign| stack.operation.temperature_k += sign * step)?;
        Some(change / step)
    }

    fn per_thousandth(&self) -> Vec<ShareDrift> {
        let Some((name, composition)) = self.stack.wells().find_map(|layer| {
            let Substance::Alloy(composition) = layer.material.substance else {
                return None;
            };
            Some((layer.material.name.clone(), composition))
        }) else {
            return Vec::new();
        };
        pairs(&composition)
            .into_iter()
            .filter_map(|(element, at_expense_of)| {
                let nm_per_thousandth = self.central(|stack, sign| {
                    let step = sign * SHARE_STEP;
                    let changed = composition
                        .with_fraction(element, composition.fraction(element) + step)
                        .with_fraction(at_expense_of, composition.fraction(at_expense_of) - step);
                    for layer in &mut stack.layers {
                        for material in
                            std::iter::once(&mut layer.material).chain(&mut layer.grade_to)
                        {
                            if material.name == name {
                                material.substance = Substance::Alloy(changed);
                            }
                        }
                    }
                })?;
                Some(ShareDrift {
                    element,
                    at_expense_of,
                    nm_per_thousandth,
                })
            })
            .collect()
    }
}

/// Elements that may rise and what gives way: In where it is there (else Ga) among the metals, the
/// first of P, As, Sb among the others.
fn pairs(composition: &Composition) -> Vec<(Element, Element)> {
    let of = |group_iii: bool| -> Vec<Element> {
        let all = composition.elements();
        all.iter()
            .filter(|element| element.is_group_iii() == group_iii)
            .collect()
    };
    let (metals, others) = (of(true), of(false));
    let mut pairs = Vec::new();
    if let Some((&last, rest)) = metals.split_last() {
        pairs.extend(rest.iter().map(|&element| (element, last)));
    }
    if let Some((&first, rest)) = others.split_first() {
        pairs.extend(rest.iter().map(|&element| (element, first)));
    }
    // A step must leave both shares between 0 and 1.
    pairs.retain(|&(element, other)| {
        composition.fraction(element) > SHARE_STEP && composition.fraction(other) > SHARE_STEP
    });
    pairs
}
