//! A structure as who grows it sees it: strain, thin layers, changes of group V, alloys to
//! calibrate, and parameters on which sources disagree.

mod judgement;

use crate::coherence::{ActiveStrain, Balance, LayerStrain, StrainBudget};
use crate::materials::{Composition, Element, Offsets, Parameters};
use crate::profile::Profile;
use crate::structure::{Layer, Limits, Role, Stack};
use crate::units::thermal_ev;

/// Strain below this is what a matched layer has for rounding or temperature, %.
const LEAST_PERCENT: f64 = 0.05;
/// A layer of less strain that is over its critical thickness is not remarked, %: AlGaAs on GaAs
/// reaches 0.14 % at room temperature, and grows matched while it is hot.
const LEAST_NOTED_PERCENT: f64 = 0.15;
/// Mismatch of a thick layer below this is not stated without a limit, ppm (common practice: bulk
/// layers are matched to 200 to 500 ppm).
const LEAST_BULK_PPM: f64 = 200.0;
/// Wells and barriers of fewer monolayers are remarked (common practice).
const LEAST_MONOLAYERS: f64 = 2.0;
/// Alloys whose fractions differ by less could be one calibration (common practice: the usual
/// tolerance of a fraction is 0.01).
const SIMILAR_FRACTION: f64 = 0.02;
/// Fractions that differ by less are equal.
const SAME_FRACTION: f64 = 1e-6;

/// Limits that one strained layer is held against.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct StrainLimits {
    /// Strain, %.
    pub strain_percent_max: Option<f64>,
    /// Strain times thickness, % nm.
    pub strain_thickness_percent_nm_max: Option<f64>,
    /// Share of the critical thickness by force balance.
    pub critical_share_max: Option<f64>,
}

/// What was found about the wafer.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum WaferFinding {
    /// A strained layer.
    Strain {
        /// The layer.
        layer: LayerStrain,
        /// The house's limits.
        limits: StrainLimits,
    },
    /// Wells and barriers together.
    StackStrain {
        /// Their strain.
        active: ActiveStrain,
        /// The house's limit of the mean strain, %.
        most_percent: Option<f64>,
    },
    /// The barrier that would take the mean stress away.
    Balance(Balance),
    /// Wells and the barriers between and outside them.
    FencePosts {
        /// Number of wells.
        wells: usize,
        /// Number of barriers between them.
        between: usize,
        /// Thickness of the barrier below the first well, nm.
        below_nm: Option<f64>,
        /// Thickness of the barrier above the last well, nm.
        above_nm: Option<f64>,
    },
    /// A layer that is hard to grow for its thinness.
    Thin {
        /// Its role.
        role: Role,
        /// Its formula.
        formula: String,
        /// Its thickness, nm.
        thickness_nm: f64,
        /// The same in monolayers.
        monolayers: f64,
        /// The house's limit, nm.
        least_nm: Option<f64>,
    },
    /// The most mismatched of the thick layers that must match.
    BulkMismatch {
        /// Its role.
        role: Role,
        /// Its formula.
        formula: String,
        /// Relaxed mismatch, ppm.
        relaxed_ppm: f64,
        /// The house's limit, ppm.
        most_ppm: Option<f64>,
    },
    /// A layer of elements that the house does not grow.
    ForbiddenElement {
        /// Its role.
        role: Role,
        /// Its formula.
        formula: String,
        /// The elements.
        elements: Vec<Element>,
    },
    /// Interfaces of wells at which the group-V elements change.
    GroupVChange {
        /// How many.
        interfaces: usize,
        /// The two sides of the first.
        first: [String; 2],
    },
    /// Two alloys that could be one.
    SimilarAlloys {
        /// Their formulas.
        formulas: [String; 2],
        /// The largest difference of a fraction.
        difference: f64,
    },
    /// An alloy that unmixes when it is grown in equilibrium.
    Unmixing {
        /// Its formula.
        formula: String,
        /// Temperature below which the free alloy is unstable, K.
        below_k: f64,
    },
    /// Sources of one parameter that differ by more than kT.
    OtherSource {
        /// What they disagree on.
        quantity: String,
        /// Of which material or pair.
        of: String,
        /// The other source's value less the one used, eV.
        difference_ev: f64,
        /// kT, eV.
        thermal_ev: f64,
        /// The other source.
        source: String,
    },
}

/// All that can be said of the wafer without a level.
#[must_use]
pub(super) fn wafer(stack: &Stack, parameters: &Parameters) -> Vec<WaferFinding> {
    let none = Limits::default();
    let limits = stack.limits.as_ref().unwrap_or(&none);
    let budget = StrainBudget::new(stack, parameters);
    let mut findings = strained(&budget, limits);
    findings.extend(fence_posts(stack));
    findings.extend(thin_layers(&budget, limits));
    findings.extend(bulk_mismatch(&budget, limits));
    findings.extend(forbidden_elements(stack, limits));
    findings.extend(group_v_changes(stack));
    findings.extend(similar_alloys(stack));
    findings.extend(unmixing(stack, parameters));
    findings.extend(other_bowings(stack, parameters));
    findings.extend(other_offset(stack, parameters));
    findings
}

/// What a move of wells and barriers may bring to a limit: their strain and that of all together,
/// and their thickness where the house limits it. Each with the index of its layer, `None` for all
/// together.
#[must_use]
pub(super) fn wells_and_barriers(
    stack: &Stack,
    parameters: &Parameters,
) -> Vec<(Option<usize>, WaferFinding)> {
    let none = Limits::default();
    let limits = stack.limits.as_ref().unwrap_or(&none);
    let budget = StrainBudget::new(stack, parameters);
    let strained = strained(&budget, limits)
        .into_iter()
        .filter_map(|finding| match &finding {
            WaferFinding::Strain { layer, .. } => {
                confines(layer.role).then_some((Some(layer.layer), finding))
            }
            WaferFinding::StackStrain { .. } => Some((None, finding)),
            _ => None,
        });
    let limited = budget
        .layers
        .iter()
        .filter(|layer| confines(layer.role) && least_nm(layer.role, limits).is_some())
        .map(|layer| (Some(layer.layer), thin(layer, &budget, limits)));
    strained.chain(limited).collect()
}

fn confines(role: Role) -> bool {
    matches!(role, Role::Well | Role::Barrier | Role::Step)
}

fn strained(budget: &StrainBudget, limits: &Limits) -> Vec<WaferFinding> {
    let of_layer = StrainLimits {
        strain_percent_max: limits.strain_percent_max,
        strain_thickness_percent_nm_max: limits.strain_thickness_percent_nm_max,
        critical_share_max: limits.critical_share_max,
    };
    let mut findings: Vec<WaferFinding> = budget
        .layers
        .iter()
        .filter(|layer| layer.mismatch.strain_percent() >= LEAST_PERCENT)
        .map(|layer| WaferFinding::Strain {
            layer: layer.clone(),
            limits: of_layer,
        })
        .collect();
    let is_strained = !findings.is_empty();
    if let Some(active) = &budget.active
        && is_strained
    {
        findings.push(WaferFinding::StackStrain {
            active: active.clone(),
            most_percent: limits.net_strain_percent_max,
        });
        let balance = budget.balance.clone();
        findings.extend(
            balance
                .filter(|_| is_off_balance(active))
                .map(WaferFinding::Balance),
        );
    }
    findings
}

/// Whether the mean stress is worth balancing.
fn is_off_balance(active: &ActiveStrain) -> bool {
    active.mean.strain_percent() >= LEAST_PERCENT
}

fn fence_posts(stack: &Stack) -> Option<WaferFinding> {
    let is_well = |layer: &Layer| layer.role == Role::Well;
    let first = stack.layers.iter().position(is_well)?;
    let last = stack.layers.iter().rposition(is_well)?;
    let barrier = |layer: Option<&Layer>| {
        layer
            .filter(|layer| layer.role == Role::Barrier)
            .map(|layer| layer.thickness_nm)
    };
    let not_step = |layer: &&Layer| layer.role != Role::Step;
    Some(WaferFinding::FencePosts {
        wells: stack.well_count(),
        between: stack.layers[first..=last]
            .iter()
            .filter(|layer| layer.role == Role::Barrier)
            .count(),
        below_nm: barrier(stack.layers[..first].iter().rev().find(not_step)),
        above_nm: barrier(stack.layers[last + 1..].iter().find(not_step)),
    })
}

fn thin_layers(budget: &StrainBudget, limits: &Limits) -> Vec<WaferFinding> {
    budget
        .layers
        .iter()
        .filter(|layer| {
            let is_under = |least| layer.thickness_nm < least;
            least_nm(layer.role, limits).is_some_and(is_under)
                || confines(layer.role) && monolayers(layer, budget) < LEAST_MONOLAYERS
        })
        .map(|layer| thin(layer, budget, limits))
        .collect()
}

/// The house's least thickness of a layer of a role, nm.
fn least_nm(role: Role, limits: &Limits) -> Option<f64> {
    let of_wells = limits.well_nm_min.filter(|_| role == Role::Well);
    of_wells
        .into_iter()
        .chain(limits.layer_nm_min)
        .reduce(f64::max)
}

fn monolayers(layer: &LayerStrain, budget: &StrainBudget) -> f64 {
    // Planes of one sublattice stand half a lattice constant apart.
    layer.thickness_nm / (0.5 * budget.substrate_lattice_nm)
}

fn thin(layer: &LayerStrain, budget: &StrainBudget, limits: &Limits) -> WaferFinding {
    WaferFinding::Thin {
        role: layer.role,
        formula: layer.formula.clone(),
        thickness_nm: layer.thickness_nm,
        monolayers: monolayers(layer, budget),
        least_nm: least_nm(layer.role, limits),
    }
}

fn bulk_mismatch(budget: &StrainBudget, limits: &Limits) -> Option<WaferFinding> {
    let worst = budget
        .layers
        .iter()
        .filter(|layer| {
            matches!(
                layer.role,
                Role::Buffer | Role::Cladding | Role::Contact | Role::Cap
            )
        })
        .max_by(|a, b| {
            a.mismatch
                .relaxed_ppm()
                .total_cmp(&b.mismatch.relaxed_ppm())
        })?;
    let relaxed_ppm = worst.mismatch.relaxed_ppm();
    let most_ppm = limits.mismatch_ppm_max;
    (most_ppm.is_some() || relaxed_ppm >= LEAST_BULK_PPM).then(|| WaferFinding::BulkMismatch {
        role: worst.role,
        formula: worst.formula.clone(),
        relaxed_ppm,
        most_ppm,
    })
}

fn forbidden_elements(stack: &Stack, limits: &Limits) -> Vec<WaferFinding> {
    let mut findings: Vec<WaferFinding> = Vec::new();
    for layer in &stack.layers {
        for material in layer.ends() {
            let Some(composition) = material.substance.composition() else {
                continue;
            };
            let elements: Vec<Element> = limits
                .without_elements
                .iter()
                .copied()
                .filter(|&element| composition.fraction(element) > 0.0)
                .collect();
            let finding = WaferFinding::ForbiddenElement {
                role: layer.role,
                formula: material.formula(),
                elements,
            };
            let is_empty = matches!(&finding, WaferFinding::ForbiddenElement { elements, .. } if elements.is_empty());
            if !is_empty && !findings.contains(&finding) {
                findings.push(finding);
            }
        }
    }
    findings
}

fn group_v_changes(stack: &Stack) -> Option<WaferFinding> {
    let changes = |pair: &&[Layer]| {
        let [lower, upper] = pair else { return false };
        let sides = (
            lower.ends()[1].substance.composition(),
            upper.ends()[0].substance.composition(),
        );
        let (Some(lower_end), Some(upper_end)) = sides else {
            return false;
        };
        let is_at_well = lower.role == Role::Well || upper.role == Role::Well;
        let differ = |(a, b): (&f64, &f64)| (a - b).abs() > SAME_FRACTION;
        is_at_well && lower_end.group_v.iter().zip(&upper_end.group_v).any(differ)
    };
    let mut changing = stack.layers.windows(2).filter(changes);
    let first = changing.next()?;
    Some(WaferFinding::GroupVChange {
        interfaces: 1 + changing.count(),
        first: [first[0].ends()[1].formula(), first[1].ends()[0].formula()],
    })
}

/// Every alloy of the stack once, by the order of use.
fn alloys(stack: &Stack) -> Vec<Composition> {
    let mut alloys: Vec<Composition> = Vec::new();
    for material in stack.layers.iter().flat_map(Layer::ends) {
        if let Some(composition) = material.substance.composition()
            && composition.elements().free_fractions() > 0
            && !alloys.contains(composition)
        {
            alloys.push(*composition);
        }
    }
    alloys
}

fn similar_alloys(stack: &Stack) -> Vec<WaferFinding> {
    let alloys = alloys(stack);
    let mut findings = Vec::new();
    for (place, one) in alloys.iter().enumerate() {
        for other in &alloys[place + 1..] {
            let difference = Element::ALL
                .into_iter()
                .map(|element| (one.fraction(element) - other.fraction(element)).abs())
                .fold(0.0, f64::max);
            let is_similar = (SAME_FRACTION..SIMILAR_FRACTION).contains(&difference);
            if is_similar && one.elements() == other.elements() {
                findings.push(WaferFinding::SimilarAlloys {
                    formulas: [one.formula(), other.formula()],
                    difference,
                });
            }
        }
    }
    findings
}

/// Alloys that mix on both sublattices and unmix below temperatures at which they are grown.
fn unmixing(stack: &Stack, parameters: &Parameters) -> Vec<WaferFinding> {
    /// Growth is seldom hotter, K (common practice: 650 °C).
    const GROWTH_K: f64 = 923.15;
    alloys(stack)
        .iter()
        .filter(|alloy| {
            let of = |fractions: [f64; 3]| fractions.iter().filter(|it| **it > 0.0).count() > 1;
            of(alloy.group_iii) && of(alloy.group_v)
        })
        .filter_map(|alloy| {
            let below_k = parameters.spinodal_k(alloy);
            (below_k > GROWTH_K).then(|| WaferFinding::Unmixing {
                formula: alloy.formula(),
                below_k,
            })
        })
        .collect()
}

/// Alloys of wells and barriers for which another source gives a gap or a valence edge more than kT
/// away, where the table does not call its own value the right one.
fn other_bowings(stack: &Stack, parameters: &Parameters) -> Vec<WaferFinding> {
    let kt = thermal_ev(stack.operation.temperature_k);
    let mut seen: Vec<Composition> = Vec::new();
    let mut findings = Vec::new();
    for layer in &stack.layers {
        if !matches!(layer.role, Role::Well | Role::Barrier) {
            continue;
        }
        for material in layer.ends() {
            let Some(composition) = material.substance.composition() else {
                continue;
            };
            if seen.contains(composition) {
                continue;
            }
            seen.push(*composition);
            for other in parameters.other_energies(composition) {
                if other.difference_ev.abs() > kt {
                    findings.push(WaferFinding::OtherSource {
                        quantity: other.quantity.to_owned(),
                        of: material.formula(),
                        difference_ev: other.difference_ev,
                        thermal_ev: kt,
                        source: other.source,
                    });
                }
            }
        }
    }
    findings
}

/// The conduction offset of the first well by the rule in force against the tabulated offsets.
fn other_offset(stack: &Stack, parameters: &Parameters) -> Option<WaferFinding> {
    let profile = Profile::new(stack, parameters).ok()?;
    if profile.offsets == Offsets::Table {
        return None;
    }
    let well = stack
        .layers
        .iter()
        .position(|layer| layer.role == Role::Well)?;
    let below = &stack.layers[well.checked_sub(1)?];
    let kelvin = stack.operation.temperature_k;
    let edge = |layer: &Layer, offsets| {
        let crystal = layer.ends()[1]
            .substance
            .crystal(parameters, kelvin, offsets);
        crystal.on(profile.substrate.lattice_nm).conduction_ev
    };
    let offset = |offsets| edge(below, offsets) - edge(&stack.layers[well], offsets);
    let difference_ev = offset(Offsets::Table) - offset(profile.offsets);
    let kt = thermal_ev(kelvin);
    (difference_ev.abs() > kt).then(|| WaferFinding::OtherSource {
        quantity: "conduction offset".to_owned(),
        of: format!(
            "{} on {}",
            stack.layers[well].material.formula(),
            below.ends()[1].formula()
        ),
        difference_ev,
        thermal_ev: kt,
        source: "the tabulated valence-band offsets".to_owned(),
    })
}
