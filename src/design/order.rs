//! An epitaxy order in numbers: what the grower must know of a stack, with the tolerances, and what
//! is to be seen on the finished wafer.
//!
//! The grower is told what to grow and not what for. [`wafer`] leaves of a stack only that; all
//! numbers of an order are computed from what it leaves, so that whoever holds the order can
//! compute them again.

mod house;
mod layers;
mod targets;

pub use house::{Gap, House, SPREAD_DRAWS, SPREAD_SEED};
pub use layers::{Conduction, Counts, OrderedEnd, OrderedLayer, Period};
pub use targets::{PlTarget, Targets, XrayTarget};

use layers::{counts, layers};
use targets::targets;

use crate::evaluation::PL_DENSITY_CM3;
use crate::materials::{Composition, Parameters};
use crate::structure::{
    Entry, Material, Model, Operation, Order, Origin, Stack, Substance, Wavelength,
};
use crate::units::CELSIUS_ZERO_K;

/// Temperature of a bench, °C, where an order names none (common practice).
const ROOM_C: f64 = 25.0;

/// Who reads a sheet.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Audience {
    /// Who grows the wafer.
    Grower,
    /// Who designed it.
    House,
}

impl Audience {
    /// Both.
    pub const ALL: [Self; 2] = [Self::Grower, Self::House];

    /// The word for it in flags and documents.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Grower => "grower",
            Self::House => "house",
        }
    }
}

/// An order in numbers.
#[derive(Clone, Debug, PartialEq)]
pub struct Ordered {
    /// What the grower needs of the stack, at the temperature of the bench.
    pub wafer: Stack,
    /// What the file says beside the layers, without what the grower is not to read.
    pub order: Order,
    /// The layers from the substrate up.
    pub layers: Vec<OrderedLayer>,
    /// Wells and barriers, counted.
    pub counts: Counts,
    /// What is to be seen on the finished wafer.
    pub targets: Targets,
}

impl Ordered {
    /// The order of a stack.
    #[must_use]
    pub fn new(stack: &Stack, parameters: &Parameters) -> Self {
        let wafer = wafer(stack);
        let order = wafer.order.clone().unwrap_or_default();
        Self {
            layers: layers(&wafer, &order, parameters),
            counts: counts(&wafer),
            targets: targets(&wafer, &order, parameters),
            order,
            wafer,
        }
    }
}

/// What the grower needs of a stack: layers and substrate under their formulas, the temperature of
/// the bench, and of the model what photoluminescence at low injection hangs on. Title, names of
/// materials, conditions of the device, limits and errors stay behind.
///
/// Of what it leaves, it leaves everything.
#[must_use]
fn wafer(stack: &Stack) -> Stack {
    let order = order(stack);
    let mut names = Names::default();
    let mut plain = |material: &Material| Material {
        name: names.of(material),
        substance: material.substance,
    };
    let substrate = plain(&stack.substrate);
    let mut layers = stack.layers.clone();
    for layer in &mut layers {
        layer.material = plain(&layer.material);
        layer.grade_to = layer.grade_to.as_ref().map(&mut plain);
    }
    let celsius = order
        .number("targets.bench_temperature_c")
        .unwrap_or(ROOM_C);
    Stack {
        title: order.text("id").unwrap_or_else(|| "epitaxy".to_owned()),
        substrate,
        layers,
        operation: Operation {
            temperature_k: celsius + CELSIUS_ZERO_K,
            temperature_given: true,
            densities_cm3: vec![PL_DENSITY_CM3],
            working_density_cm3: PL_DENSITY_CM3,
        },
        model: Model {
            shrinkage_mev: 0.0,
            index: None,
            ..stack.model
        },
        target: None,
        growth: None,
        limits: None,
        order: Some(order),
    }
}

/// What the file says beside the layers, for the grower; the tolerance of a target of
/// photoluminescence is the order's too, where the order names none.
fn order(stack: &Stack) -> Order {
    const TOLERANCE: &str = "targets.pl_tolerance_nm";
    let mut order = stack
        .order
        .as_ref()
        .map(Order::for_grower)
        .unwrap_or_default();
    let of_target = stack
        .target
        .filter(|target| target.kind == Wavelength::Photoluminescence)
        .and_then(|target| target.tolerance_nm);
    if let Some(nm) = of_target
        && order.entry(TOLERANCE).1 != Origin::Given
    {
        order.put(TOLERANCE, Some(Entry::Number(nm)));
    }
    order
}

/// Names of materials that say no more than what they are made of.
#[derive(Default)]
struct Names {
    given: Vec<(Substance, String)>,
}

impl Names {
    /// The formula where it is exact; a number for an alloy whose fractions have more digits and
    /// for a material of own numbers: its name in the file may say what it is for.
    fn of(&mut self, material: &Material) -> String {
        let known = self
            .given
            .iter()
            .find(|(substance, _)| *substance == material.substance);
        if let Some((_, name)) = known {
            return name.clone();
        }
        if let Substance::Own { .. } = material.substance {
            let name = format!("material-{}", self.given.len() + 1);
            self.given.push((material.substance, name.clone()));
            return name;
        }
        let formula = material.formula();
        let is_exact = Composition::parse(&formula)
            .is_ok_and(|parsed| Substance::Alloy(parsed) == material.substance);
        let name = if is_exact {
            formula
        } else {
            format!("alloy-{}", self.given.len() + 1)
        };
        self.given.push((material.substance, name.clone()));
        name
    }
}
