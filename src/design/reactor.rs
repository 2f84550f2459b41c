//! From errors of the growth variables to the layers that come out.
//!
//! # The rates of a reactor
//!
//! Far from the limits of desorption every group-III atom that arrives is built in, so that the
//! growth rate of a layer is the sum of the group-III fluxes F_e and its composition their shares:
//!
//! ```text
//!  R ∝ Σ F_e        x_e = F_e / Σ F_f
//! ```
//!
//! A relative error δ_e of one flux (a bubbler that is too warm, a drifted controller) is the same
//! in every layer that holds the element, and moves thickness and composition together; an error δ
//! that all rates have in common (time, rotation, total flow) moves thicknesses only:
//!
//! ```text
//!  t → t e^δ Σ x_f e^(δ_f)        x_e → x_e e^(δ_e) / Σ x_f e^(δ_f)
//! ```
//!
//! The exponential stands for 1 + δ and keeps fluxes positive whatever the error.
//!
//! Group-V atoms come in excess and do not bear on the rate; their shares follow the ratio ρ of
//! their pressures. With y the fraction of the heaviest group-V element of a layer, an error of
//! ln ρ, the same in every layer, acts as
//!
//! ```text
//!  y/(1 − y) → y/(1 − y) e^ε        dy = y (1 − y) ε
//! ```
//!
//! It is stated as the error dy of the fraction in the wells, ε = dy/(y_w (1 − y_w)), y_w the mean
//! over the wells that mix group-V elements (without one: of the layer whose mixture is nearest to
//! even).
//!
//! The growth temperature acts on both through the coefficients that the file gives: δ_e per kelvin
//! and dy per kelvin.
//!
//! Left out: the change of the volume of a layer's cell with composition (below 1e-3 of the
//! thickness for the errors of a running process), and desorption. Layers given by their own numbers
//! follow the common rate only.

use crate::materials::{Composition, Element};
use crate::structure::{GROUP_III, Growth, Material, Role, Stack, Substance};

/// Group-V elements in the order of formulas, by rising mass.
const GROUP_V: [Element; 3] = [Element::P, Element::As, Element::Sb];

/// What may come out wrong in a run.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Cause {
    /// The growth rate that all layers have in common.
    Rate,
    /// The flux of one group-III element.
    Flux(Element),
    /// The ratio of the group-V pressures.
    GroupV,
    /// The growth temperature.
    Temperature,
}

impl Cause {
    /// Its name in reports.
    #[must_use]
    pub fn name(self) -> String {
        match self {
            Self::Rate => "growth rate".to_owned(),
            Self::Flux(element) => format!("{} flux", element.symbol()),
            Self::GroupV => "group-V fraction".to_owned(),
            Self::Temperature => "growth temperature".to_owned(),
        }
    }

    /// The unit of its error; empty for a fraction.
    #[must_use]
    pub fn unit(self) -> &'static str {
        match self {
            Self::Rate | Self::Flux(_) => "%",
            Self::GroupV => "",
            Self::Temperature => "K",
        }
    }
}

/// A growth variable with its one-sigma error, in the unit of its cause.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Variable {
    /// What it is.
    pub cause: Cause,
    /// Its one-sigma error.
    pub sigma: f64,
}

/// A stack as a reactor grows it, and the variables that may miss.
#[derive(Clone, Debug)]
pub struct Reactor<'a> {
    stack: &'a Stack,
    growth: Growth,
    /// Variables with an error that act on some layer.
    pub variables: Vec<Variable>,
    /// y (1 − y) of the mixture in which the group-V error is stated.
    evenness: f64,
}

/// Errors of one run.
#[derive(Clone, Copy, Debug, Default)]
struct Errors {
    /// δ of the common rate.
    rate: f64,
    /// δ_e of Al, Ga, In.
    flux: [f64; 3],
    /// ε, the error of ln ρ.
    ratio: f64,
}

impl<'a> Reactor<'a> {
    /// The reactor that grows `stack` with the errors of `growth`.
    #[must_use]
    pub fn new(stack: &'a Stack, growth: &Growth) -> Self {
        let evenness = evenness(stack);
        let holds = |element: Element| {
            compositions(stack).any(|composition| composition.fraction(element) > 0.0)
        };
        let fluxes = GROUP_III.into_iter().zip(growth.flux_percent.in_order());
        let mut variables = vec![Variable {
            cause: Cause::Rate,
            sigma: growth.rate_percent,
        }];
        variables.extend(
            fluxes
                .filter(|(element, _)| holds(*element))
                .map(|(element, sigma)| Variable {
                    cause: Cause::Flux(element),
                    sigma,
                }),
        );
        if evenness > 0.0 {
            variables.push(Variable {
                cause: Cause::GroupV,
                sigma: growth.group_v_fraction,
            });
        }
        variables.push(Variable {
            cause: Cause::Temperature,
            sigma: growth.temperature_k,
        });
        variables.retain(|variable| variable.sigma > 0.0);
        Self {
            stack,
            growth: *growth,
            variables,
            evenness,
        }
    }

    /// The stack that grows where each variable misses by so many of its sigmas.
    ///
    /// # Arguments
    ///
    /// * `in_sigmas` – one number for each of the variables, in their order
    #[must_use]
    pub fn grown(&self, in_sigmas: &[f64]) -> Stack {
        let errors = self.errors(in_sigmas);
        let mut stack = self.stack.clone();
        for layer in &mut stack.layers {
            let lower = rate(&layer.material, &errors);
            let upper = layer
                .grade_to
                .as_ref()
                .map_or(lower, |end| rate(end, &errors));
            layer.thickness_nm *= 0.5 * (lower + upper);
            for material in std::iter::once(&mut layer.material).chain(&mut layer.grade_to) {
                if let Substance::Alloy(composition) = &mut material.substance {
                    *composition = mixed(composition, &errors);
                }
            }
        }
        stack
    }

    fn errors(&self, in_sigmas: &[f64]) -> Errors {
        let mut errors = Errors::default();
        let mut fraction = 0.0;
        for (variable, sigmas) in self.variables.iter().zip(in_sigmas) {
            let error = variable.sigma * sigmas;
            match variable.cause {
                Cause::Rate => errors.rate += 0.01 * error,
                Cause::Flux(element) => {
                    let place = GROUP_III.iter().position(|it| *it == element);
                    errors.flux[place.unwrap_or(0)] += 0.01 * error;
                }
                Cause::GroupV => fraction += error,
                Cause::Temperature => {
                    let per_k = self.growth.flux_percent_per_k.in_order();
                    for (flux, per_k) in errors.flux.iter_mut().zip(per_k) {
                        *flux += 0.01 * per_k * error;
                    }
                    fraction += self.growth.group_v_fraction_per_k * error;
                }
            }
        }
        if self.evenness > 0.0 {
            errors.ratio = fraction / self.evenness;
        }
        errors
    }
}

fn compositions(stack: &Stack) -> impl Iterator<Item = &Composition> {
    stack
        .layers
        .iter()
        .flat_map(|layer| std::iter::once(&layer.material).chain(&layer.grade_to))
        .filter_map(|material| match &material.substance {
            Substance::Alloy(composition) => Some(composition),
            Substance::Own { .. } => None,
        })
}

/// The heaviest group-V element of a composition and its fraction.
fn heaviest(composition: &Composition) -> (Element, f64) {
    GROUP_V
        .into_iter()
        .rev()
        .map(|element| (element, composition.fraction(element)))
        .find(|(_, fraction)| *fraction > 0.0)
        .unwrap_or((Element::As, 1.0))
}

/// y (1 − y) of the mixture in which group-V errors are stated; 0 where no layer mixes.
fn evenness(stack: &Stack) -> f64 {
    let of = |composition: &Composition| {
        let (_, y) = heaviest(composition);
        y * (1.0 - y)
    };
    let (mut weighed, mut thickness_nm) = (0.0, 0.0);
    for layer in stack.layers.iter().filter(|layer| layer.role == Role::Well) {
        if let Substance::Alloy(composition) = &layer.material.substance
            && of(composition) > 0.0
        {
            weighed += heaviest(composition).1 * layer.thickness_nm;
            thickness_nm += layer.thickness_nm;
        }
    }
    if thickness_nm > 0.0 {
        let y = weighed / thickness_nm;
        return y * (1.0 - y);
    }
    compositions(stack).map(of).fold(0.0, f64::max)
}

/// Growth rate of a material relative to the one meant.
fn rate(material: &Material, errors: &Errors) -> f64 {
    let fluxes = match &material.substance {
        Substance::Alloy(composition) => GROUP_III
            .into_iter()
            .zip(errors.flux)
            .map(|(element, flux)| composition.fraction(element) * flux.exp())
            .sum(),
        Substance::Own { .. } => 1.0,
    };
    errors.rate.exp() * fluxes
}

/// The composition that grows where `meant` was wanted.
fn mixed(meant: &Composition, errors: &Errors) -> Composition {
    let mut grown = *meant;
    let fluxes: [f64; 3] =
        std::array::from_fn(|place| meant.group_iii[place] * errors.flux[place].exp());
    let total: f64 = fluxes.iter().sum();
    grown.group_iii = fluxes.map(|flux| flux / total);
    let (element, y) = heaviest(meant);
    if y < 1.0 && errors.ratio != 0.0 {
        let odds = y / (1.0 - y) * errors.ratio.exp();
        let shifted = odds / (1.0 + odds);
        let others = (1.0 - shifted) / (1.0 - y);
        for (place, it) in GROUP_V.into_iter().enumerate() {
            grown.group_v[place] = if it == element {
                shifted
            } else {
                others * meant.group_v[place]
            };
        }
    }
    grown
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::materials::Parameters;
    use crate::structure::{Fluxes, Overrides, read};

    const FILE: &str = r#"
format = 1
[substrate]
material = "InP"
[[layers]]
role = "barrier"
material = "In0.8Ga0.2As0.45P0.55"
thickness_nm = 20
[[layers]]
role = "well"
material = "In0.75Ga0.25As0.8P0.2"
thickness_nm = 6
[[layers]]
role = "barrier"
material = "InP"
thickness_nm = 20
"#;

    fn stack() -> Stack {
        read(FILE, &Parameters::shipped(), &Overrides::default())
            .expect("sound")
            .stack
    }

    fn composition(stack: &Stack, layer: usize) -> Composition {
        match stack.layers[layer].material.substance {
            Substance::Alloy(composition) => composition,
            Substance::Own { .. } => panic!("an alloy"),
        }
    }

    fn close(got: f64, want: f64, what: &str) {
        assert!(
            (got - want).abs() < 1e-12,
            "{what}: {got} instead of {want}"
        );
    }

    #[test]
    fn the_common_rate_moves_thicknesses_and_no_composition() {
        let stack = stack();
        let growth = Growth {
            rate_percent: 2.0,
            ..Growth::default()
        };
        let grown = Reactor::new(&stack, &growth).grown(&[1.5]);
        for (grown, meant) in grown.layers.iter().zip(&stack.layers) {
            let ratio = grown.thickness_nm / meant.thickness_nm;
            close(ratio, 0.03f64.exp(), "thickness");
        }
        for layer in 0..3 {
            let (got, want) = (composition(&grown, layer), composition(&stack, layer));
            for place in 0..3 {
                close(got.group_iii[place], want.group_iii[place], "group III");
                close(got.group_v[place], want.group_v[place], "group V");
            }
        }
    }

    #[test]
    fn a_flux_moves_thickness_and_composition_by_its_share() {
        let stack = stack();
        let growth = Growth {
            flux_percent: Fluxes {
                indium: 1.0,
                ..Fluxes::default()
            },
            ..Growth::default()
        };
        let reactor = Reactor::new(&stack, &growth);
        assert_eq!(reactor.variables.len(), 1);
        let grown = reactor.grown(&[1.0]);
        let flux = 0.01f64.exp();
        // With gallium at 0.25, indium at 0.75 of the flux.
        close(
            grown.layers[1].thickness_nm,
            6.0 * (0.25 + 0.75 * flux),
            "well",
        );
        let gallium = composition(&grown, 1).fraction(Element::Ga);
        close(gallium, 0.25 / (0.25 + 0.75 * flux), "gallium");
        close(grown.layers[2].thickness_nm, 20.0 * flux, "InP");
        close(composition(&grown, 2).fraction(Element::In), 1.0, "InP");
    }

    #[test]
    fn the_group_v_error_is_that_of_the_wells_and_weaker_where_the_mixture_is_lopsided() {
        let stack = stack();
        let growth = Growth {
            group_v_fraction: 1e-5,
            ..Growth::default()
        };
        let grown = Reactor::new(&stack, &growth).grown(&[1.0]);
        let moved = |layer| {
            composition(&grown, layer).fraction(Element::As)
                - composition(&stack, layer).fraction(Element::As)
        };
        assert!((moved(1) - 1e-5).abs() < 1e-9, "{}", moved(1));
        let expected = 1e-5 * (0.45 * 0.55) / (0.8 * 0.2);
        assert!((moved(0) - expected).abs() < 1e-9, "{}", moved(0));
        close(moved(2), 0.0, "InP has no mixture");
        let phosphorus = composition(&grown, 1).fraction(Element::P);
        let arsenic = composition(&grown, 1).fraction(Element::As);
        close(phosphorus + arsenic, 1.0, "sum");
    }

    #[test]
    fn the_temperature_acts_through_its_coefficients_alone() {
        let stack = stack();
        let warm = Growth {
            temperature_k: 2.0,
            flux_percent_per_k: Fluxes {
                indium: -0.5,
                ..Fluxes::default()
            },
            ..Growth::default()
        };
        let flux = Growth {
            flux_percent: Fluxes {
                indium: 1.0,
                ..Fluxes::default()
            },
            ..Growth::default()
        };
        // Two kelvins at -0.5 % are one sigma less of a flux with 1 %.
        let by_temperature = Reactor::new(&stack, &warm).grown(&[1.0]);
        let by_flux = Reactor::new(&stack, &flux).grown(&[-1.0]);
        assert_eq!(by_temperature, by_flux);
    }
}
