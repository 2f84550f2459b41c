//! What growth does to the figures that a grower measures.

use super::length;
use crate::design::reactor::Reactor;
use crate::structure::{Role, Stack, Substance};

/// What growth does to one figure of the layers.
#[derive(Clone, Debug, PartialEq)]
pub struct LayerSpread {
    /// What it is: `well thickness`, `period`, `Ga in the wells`.
    pub name: String,
    /// As designed.
    pub value: f64,
    /// One sigma (linear).
    pub sigma: f64,
    /// Its unit; empty for a fraction.
    pub unit: &'static str,
}

/// Linear sigmas of the figures that a grower measures.
pub(super) fn layers(reactor: &Reactor<'_>, stack: &Stack) -> Vec<LayerSpread> {
    /// In sigmas; small enough for a slope, large enough for its digits.
    const STEP: f64 = 0.05;

    let variables = reactor.variables.len();
    let moved: Vec<(Stack, Stack)> = (0..variables)
        .map(|variable| {
            let side = |step: f64| {
                let mut point = vec![0.0; variables];
                point[variable] = step;
                reactor.grown(&point)
            };
            (side(STEP), side(-STEP))
        })
        .collect();
    figures(stack)
        .into_iter()
        .map(|figure| {
            let slopes: Vec<f64> = moved
                .iter()
                .map(|(above, below)| ((figure.of)(above) - (figure.of)(below)) / (2.0 * STEP))
                .collect();
            LayerSpread {
                name: figure.name,
                value: (figure.of)(stack),
                sigma: length(&slopes),
                unit: figure.unit,
            }
        })
        .collect()
}

/// A figure of the layers.
struct LayerFigure {
    name: String,
    unit: &'static str,
    of: Box<dyn Fn(&Stack) -> f64>,
}

/// Thickness of the first well, the period, and every mixed fraction of the first well.
fn figures(stack: &Stack) -> Vec<LayerFigure> {
    let first_well = |stack: &Stack| {
        stack
            .layers
            .iter()
            .position(|layer| layer.role == Role::Well)
            .unwrap_or(0)
    };
    let well = first_well(stack);
    let mut figures = vec![LayerFigure {
        name: "well thickness".to_owned(),
        unit: "nm",
        of: Box::new(move |stack| stack.layers[well].thickness_nm),
    }];
    if let Some(next) =
        (well + 1..stack.layers.len()).find(|&layer| stack.layers[layer].role == Role::Well)
    {
        figures.push(LayerFigure {
            name: "period".to_owned(),
            unit: "nm",
            of: Box::new(move |stack| {
                let layers = &stack.layers[well..next];
                layers.iter().map(|layer| layer.thickness_nm).sum()
            }),
        });
    }
    if let Substance::Alloy(composition) = &stack.layers[well].material.substance {
        let mixed = composition
            .elements()
            .iter()
            .filter(|element| composition.fraction(*element) < 1.0);
        for element in mixed {
            figures.push(LayerFigure {
                name: format!("{} in the wells", element.symbol()),
                unit: "",
                of: Box::new(move |stack| match &stack.layers[well].material.substance {
                    Substance::Alloy(composition) => composition.fraction(element),
                    Substance::Own { .. } => 0.0,
                }),
            });
        }
    }
    figures
}
