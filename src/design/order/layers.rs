//! The layers of an order, and how many wells and barriers they make.

use crate::materials::{Composition, Mismatch, Offsets, Parameters};
use crate::structure::{Layer, Material, Order, Role, Stack, Substance};
use crate::units::wavelength_nm;

/// What a layer conducts by.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Conduction {
    /// Donors.
    N,
    /// Acceptors.
    P,
    /// Neither.
    Undoped,
}

impl Conduction {
    /// The word for it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::N => "n",
            Self::P => "p",
            Self::Undoped => "undoped",
        }
    }
}

/// What a layer is made of at one end.
#[derive(Clone, Debug, PartialEq)]
pub struct OrderedEnd {
    /// Its formula, or the name of a material of own numbers.
    pub formula: String,
    /// Its composition; `None` where the file gives numbers in its place.
    pub composition: Option<Composition>,
    /// Mismatch to the substrate at the temperature of the bench.
    pub mismatch: Mismatch,
    /// Gap of the strained bulk layer at that temperature, eV.
    pub gap_ev: f64,
    /// The same as a wavelength in vacuum, nm.
    pub gap_nm: f64,
    /// Whether light is emitted at that gap: false where X or L lies below Γ.
    pub is_direct: bool,
}

/// One of equal periods.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Period {
    /// Which, from 1 at the substrate.
    pub place: usize,
    /// Of how many.
    pub of: usize,
}

/// A layer as it is ordered.
#[derive(Clone, Debug, PartialEq)]
pub struct OrderedLayer {
    /// Its number: the substrate is 0, the first layer 1.
    pub number: usize,
    /// The part it plays.
    pub role: Role,
    /// At the substrate-side end, or throughout.
    pub lower: OrderedEnd,
    /// At the surface-side end, where the composition runs.
    pub upper: Option<OrderedEnd>,
    /// Thickness, nm.
    pub thickness_nm: f64,
    /// How far it may be off to either side, nm.
    pub tolerance_nm: f64,
    /// Whether that tolerance is the file's own.
    pub tolerance_given: bool,
    /// What it conducts by.
    pub conduction: Conduction,
    /// Density of dopants, cm⁻³; `None` where it is undoped.
    pub density_cm3: Option<f64>,
    /// The dopant, where the file names it.
    pub dopant: Option<String>,
    /// Of a group that is grown several times the period it belongs to.
    pub period: Option<Period>,
}

/// Wells and barriers, counted as they are grown.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Counts {
    /// Wells.
    pub wells: usize,
    /// Barriers between the first and the last well.
    pub inner_barriers: usize,
    /// Barriers next to the first and the last well, outside.
    pub outer_barriers: usize,
}

impl Counts {
    /// `6 wells, 5 inner barriers, 2 outer barriers`.
    #[must_use]
    pub fn words(&self) -> String {
        let one = |count: usize, thing: &str| match count {
            1 => format!("1 {thing}"),
            many => format!("{many} {thing}s"),
        };
        [
            one(self.wells, "well"),
            one(self.inner_barriers, "inner barrier"),
            one(self.outer_barriers, "outer barrier"),
        ]
        .join(", ")
    }
}

/// The layers of a wafer, from the substrate up.
///
/// # Arguments
///
/// * `wafer` – at the temperature of the bench
pub(super) fn layers(wafer: &Stack, order: &Order, parameters: &Parameters) -> Vec<OrderedLayer> {
    let kelvin = wafer.operation.temperature_k;
    // Gap and strain do not hang on the rule that places the valence edges.
    let crystal = |substance: &Substance| substance.crystal(parameters, kelvin, Offsets::Table);
    let substrate_nm = crystal(&wafer.substrate.substance).lattice_nm;
    let end = |material: &Material| {
        let crystal = crystal(&material.substance);
        let gap_ev = crystal.on(substrate_nm).gap_ev();
        OrderedEnd {
            formula: material.formula(),
            composition: material.substance.composition().copied(),
            mismatch: Mismatch::of(&crystal, substrate_nm),
            gap_ev,
            gap_nm: wavelength_nm(gap_ev),
            is_direct: crystal.is_direct(),
        }
    };
    let periods = periods(&wafer.layers);
    wafer
        .layers
        .iter()
        .zip(periods)
        .enumerate()
        .map(|(index, (layer, period))| {
            let (percent, tolerance_given) = tolerance_percent(layer.role, order);
            let (conduction, density_cm3) = conduction(layer);
            OrderedLayer {
                number: index + 1,
                role: layer.role,
                lower: end(&layer.material),
                upper: layer.grade_to.as_ref().map(end),
                thickness_nm: layer.thickness_nm,
                tolerance_nm: 1e-2 * percent * layer.thickness_nm,
                tolerance_given,
                conduction,
                density_cm3,
                dopant: layer.doping.dopant.clone(),
                period,
            }
        })
        .collect()
}

fn conduction(layer: &Layer) -> (Conduction, Option<f64>) {
    let doping = &layer.doping;
    if doping.donors_cm3 > 0.0 {
        (Conduction::N, Some(doping.donors_cm3))
    } else if doping.acceptors_cm3 > 0.0 {
        (Conduction::P, Some(doping.acceptors_cm3))
    } else {
        (Conduction::Undoped, None)
    }
}

/// How far a thickness may be off, %, and whether the file says so.
fn tolerance_percent(role: Role, order: &Order) -> (f64, bool) {
    let path = match role {
        Role::Well | Role::Barrier | Role::Step => "tolerances.active_percent",
        Role::Confinement => "tolerances.confinement_percent",
        _ => "tolerances.thick_percent",
    };
    let is_given = order.entry(path).1 == crate::structure::Origin::Given;
    (order.number(path).unwrap_or(5.0), is_given)
}

/// To which period of its group each layer belongs.
fn periods(layers: &[Layer]) -> Vec<Option<Period>> {
    let mut periods = Vec::with_capacity(layers.len());
    for group in layers.chunk_by(|one, next| one.row == next.row) {
        let length = (1..=group.len())
            .filter(|length| group.len().is_multiple_of(*length))
            .find(|length| {
                let first = &group[..*length];
                group.chunks(*length).all(|chunk| chunk == first)
            })
            .unwrap_or(group.len());
        let of = group.len() / length;
        periods.extend((0..group.len()).map(|index| {
            (of > 1).then_some(Period {
                place: index / length + 1,
                of,
            })
        }));
    }
    periods
}

/// Wells and barriers of a stack.
pub(super) fn counts(stack: &Stack) -> Counts {
    let layers = &stack.layers;
    let is_well = |layer: &Layer| layer.role == Role::Well;
    let (Some(first), Some(last)) = (
        layers.iter().position(is_well),
        layers.iter().rposition(is_well),
    ) else {
        return Counts {
            wells: 0,
            inner_barriers: 0,
            outer_barriers: 0,
        };
    };
    let barriers = |layers: &[Layer]| {
        let barriers = layers.iter().filter(|it| it.role == Role::Barrier);
        barriers.count()
    };
    // Outer barriers stand next to the wells, or to the steps that do.
    let belongs = |layer: &&Layer| matches!(layer.role, Role::Barrier | Role::Step);
    let below = layers[..first].iter().rev().take_while(belongs).count();
    let above = layers[last + 1..].iter().take_while(belongs).count();
    Counts {
        wells: stack.well_count(),
        inner_barriers: barriers(&layers[first..=last]),
        outer_barriers: barriers(&layers[first - below..first])
            + barriers(&layers[last + 1..=last + above]),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::structure::{Overrides, read};

    fn stack(layers: &str) -> Stack {
        let text = format!("format = 1\n[substrate]\nmaterial = \"GaAs\"\n{layers}");
        read(&text, &Parameters::shipped(), &Overrides::default())
            .unwrap_or_else(|faults| panic!("{faults:#?}"))
            .stack
    }

    const BARRIER: &str =
        "[[layers]]\nrole = \"barrier\"\nmaterial = \"Al0.3Ga0.7As\"\nthickness_nm = 20\n";
    const STEP: &str =
        "[[layers]]\nrole = \"step\"\nmaterial = \"Al0.1Ga0.9As\"\nthickness_nm = 2\n";
    const WELL: &str = "[[layers]]\nrole = \"well\"\nmaterial = \"GaAs\"\nthickness_nm = 8\n";

    #[test]
    fn fence_posts_are_counted_as_they_stand() {
        for (layers, words) in [
            (
                format!("{BARRIER}{WELL}{BARRIER}{WELL}{BARRIER}"),
                "2 wells, 1 inner barrier, 2 outer barriers",
            ),
            (
                format!("{WELL}{BARRIER}{WELL}{BARRIER}"),
                "2 wells, 1 inner barrier, 1 outer barrier",
            ),
            (
                format!("{BARRIER}{STEP}{WELL}{STEP}{BARRIER}"),
                "1 well, 0 inner barriers, 2 outer barriers",
            ),
        ] {
            assert_eq!(counts(&stack(&layers)).words(), words);
        }
    }

    #[test]
    fn layers_of_a_group_know_their_period() {
        let group = "[[layers]]\nrepeat = 2\nlayers = [\n\
             { role = \"well\", material = \"GaAs\", thickness_nm = 8 },\n\
             { role = \"barrier\", material = \"Al0.3Ga0.7As\", thickness_nm = 9 },\n]\n";
        let stack = stack(&format!("{BARRIER}{group}{BARRIER}"));
        let found: Vec<_> = periods(&stack.layers)
            .into_iter()
            .map(|period| period.map(|it| (it.place, it.of)))
            .collect();
        let [one, two] = [Some((1, 2)), Some((2, 2))];
        assert_eq!(found, [None, one, one, two, two, None]);
    }
}
