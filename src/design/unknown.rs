//! What may have come out otherwise than ordered.
//!
//! A thickness moves all layers of its name by one factor. A share moves on its sublattice against
//! the largest other share there, which gives way: that is what a flux does that was too weak or too
//! strong, whatever gap or strain the file asked for.

use crate::materials::{Composition, Element, Elements};
use crate::source::{Diagnostic, nearest};
use crate::structure::{Assumptions, Material, Role, Stack, Substance};
use std::ops::Range;

/// What one unknown moves.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Moved {
    /// Thicknesses.
    Thickness,
    /// The share of the first element, against that of the second.
    Share(Element, Element),
}

/// One unknown.
#[derive(Clone, Debug, PartialEq)]
pub struct Unknown {
    /// `well.thickness`, `well.Ga`.
    pub name: String,
    /// What it moves.
    pub quantity: Moved,
    /// Its value as ordered: nm, or a fraction.
    pub ordered: f64,
    /// Its one-sigma error before anything is measured, in the same unit.
    pub prior_sigma: f64,
    /// Indices of the layers that move.
    layers: Vec<usize>,
    /// Indices of layers whose thickness follows by the same factor.
    following: Vec<usize>,
}

impl Unknown {
    /// Its unit; empty for a fraction.
    #[must_use]
    pub fn unit(&self) -> &'static str {
        match self.quantity {
            Moved::Thickness => "nm",
            Moved::Share(..) => "",
        }
    }

    /// The element that gives way, where one does.
    #[must_use]
    pub fn gives_way(&self) -> Option<Element> {
        match self.quantity {
            Moved::Thickness => None,
            Moved::Share(_, other) => Some(other),
        }
    }

    /// Moves it away from the ordered value; a share stays between nothing and all that gives way.
    pub fn shift(&self, stack: &mut Stack, by: f64) {
        match self.quantity {
            Moved::Thickness => {
                let factor = (1.0 + by / self.ordered).max(0.02);
                for &layer in self.layers.iter().chain(&self.following) {
                    stack.layers[layer].thickness_nm *= factor;
                }
            }
            Moved::Share(element, other) => {
                for &layer in &self.layers {
                    let layer = &mut stack.layers[layer];
                    let materials = std::iter::once(&mut layer.material).chain(&mut layer.grade_to);
                    for material in materials {
                        if let Substance::Alloy(composition) = &mut material.substance {
                            let by = by
                                .max(-composition.fraction(element))
                                .min(composition.fraction(other));
                            *composition = exchanged(composition, element, other, by);
                        }
                    }
                }
            }
        }
    }
}

/// The composition with some of `other` in place of `element`, or the other way round.
fn exchanged(composition: &Composition, element: Element, other: Element, by: f64) -> Composition {
    let mut moved = *composition;
    let sublattice = |of: Element, composition: &mut Composition, by: f64| {
        let (elements, fractions) = if of.is_group_iii() {
            (
                [Element::Al, Element::Ga, Element::In],
                &mut composition.group_iii,
            )
        } else {
            (
                [Element::P, Element::As, Element::Sb],
                &mut composition.group_v,
            )
        };
        for (fraction, it) in fractions.iter_mut().zip(elements) {
            if it == of {
                *fraction += by;
            }
        }
    };
    sublattice(element, &mut moved, by);
    sublattice(other, &mut moved, -by);
    moved
}

/// The unknowns that the user's assumptions leave.
///
/// Without a list: the thickness of the wells, that of the barriers between them (unless they keep
/// the ordered ratio), and every free share of the wells.
///
/// # Errors
///
/// Names of the list that mean nothing in this stack, each at its place.
pub fn unknowns(stack: &Stack, assumptions: &Assumptions) -> Result<Vec<Unknown>, Vec<Diagnostic>> {
    let barriers = if assumptions.barrier_ratio_fixed {
        of_role(stack, Role::Barrier)
    } else {
        Vec::new()
    };
    let Some(moved) = &assumptions.moved else {
        return Ok(every_unknown(stack, assumptions, &barriers));
    };
    let mut unknowns: Vec<Unknown> = Vec::new();
    let mut faults = Vec::new();
    for (span, word) in moved {
        match named(stack, assumptions, &barriers, span, word) {
            Ok(unknown) if unknowns.iter().any(|it| it.moves_like(&unknown)) => {
                faults.push(
                    Diagnostic::new(span.clone(), format!("`{word}` stands twice"))
                        .with_help("leave one of them out"),
                );
            }
            Ok(unknown) => unknowns.push(unknown),
            Err(fault) => faults.push(fault),
        }
    }
    if faults.is_empty() {
        Ok(unknowns)
    } else {
        Err(faults)
    }
}

impl Unknown {
    fn moves_like(&self, other: &Self) -> bool {
        self.quantity == other.quantity && self.layers == other.layers
    }
}

fn of_role(stack: &Stack, role: Role) -> Vec<usize> {
    (0..stack.layers.len())
        .filter(|&layer| stack.layers[layer].role == role)
        .collect()
}

fn every_unknown(stack: &Stack, assumptions: &Assumptions, barriers: &[usize]) -> Vec<Unknown> {
    let wells = of_role(stack, Role::Well);
    let mut unknowns: Vec<Unknown> =
        thickness(stack, assumptions, "well", wells.clone(), barriers.to_vec())
            .into_iter()
            .collect();
    if barriers.is_empty() {
        let between = of_role(stack, Role::Barrier);
        unknowns.extend(thickness(
            stack,
            assumptions,
            "barrier",
            between,
            Vec::new(),
        ));
    }
    for element in free_elements(stack, &wells) {
        unknowns.extend(share(stack, assumptions, "well", wells.clone(), element));
    }
    unknowns
}

/// The elements of the first well that may be chosen: all but the largest share of each sublattice.
fn free_elements(stack: &Stack, wells: &[usize]) -> Vec<Element> {
    let composition = wells
        .first()
        .and_then(|&layer| alloy(&stack.layers[layer].material));
    let Some(composition) = composition else {
        return Vec::new();
    };
    composition
        .elements()
        .iter()
        .filter(|element| {
            largest_other(composition, *element)
                .is_some_and(|(_, largest)| largest >= composition.fraction(*element))
        })
        .collect()
}

/// What may have gone wrong by itself: each thickness, all thicknesses together, each share of the
/// wells. The errors that are usual are those of the unknowns.
pub(super) fn every_cause(stack: &Stack, unknowns: &[Unknown]) -> Vec<(String, Vec<Unknown>)> {
    let mut usual = Assumptions::default();
    for unknown in unknowns {
        match unknown.quantity {
            Moved::Thickness => {
                usual.thickness_sigma_percent = 100.0 * unknown.prior_sigma / unknown.ordered;
            }
            Moved::Share(..) => usual.share_sigma = unknown.prior_sigma,
        }
    }
    let alone = every_unknown(stack, &usual, &[]);
    let thicknesses: Vec<Unknown> = alone
        .iter()
        .filter(|unknown| unknown.quantity == Moved::Thickness)
        .cloned()
        .collect();
    let mut causes: Vec<(String, Vec<Unknown>)> = alone
        .into_iter()
        .map(|unknown| (unknown.name.clone(), vec![unknown]))
        .collect();
    if thicknesses.len() > 1 {
        causes.push(("growth rate of wells and barriers".to_owned(), thicknesses));
    }
    causes
}

fn alloy(material: &Material) -> Option<&Composition> {
    match &material.substance {
        Substance::Alloy(composition) => Some(composition),
        Substance::Own { .. } => None,
    }
}

/// The largest share beside an element on its sublattice.
fn largest_other(composition: &Composition, element: Element) -> Option<(Element, f64)> {
    composition
        .elements()
        .iter()
        .filter(|other| *other != element && other.is_group_iii() == element.is_group_iii())
        .map(|other| (other, composition.fraction(other)))
        .max_by(|a, b| a.1.total_cmp(&b.1))
}

fn thickness(
    stack: &Stack,
    assumptions: &Assumptions,
    name: &str,
    layers: Vec<usize>,
    following: Vec<usize>,
) -> Option<Unknown> {
    // Of several thicknesses that of a layer between the wells stands for all.
    let first_well = stack
        .layers
        .iter()
        .position(|layer| layer.role == Role::Well)
        .unwrap_or(0);
    let shown = layers
        .iter()
        .find(|&&layer| layer >= first_well)
        .or(layers.first())?;
    let ordered = stack.layers[*shown].thickness_nm;
    Some(Unknown {
        name: format!("{name}.thickness"),
        quantity: Moved::Thickness,
        ordered,
        prior_sigma: 0.01 * assumptions.thickness_sigma_percent * ordered,
        following: following
            .into_iter()
            .filter(|layer| !layers.contains(layer))
            .collect(),
        layers,
    })
}

fn share(
    stack: &Stack,
    assumptions: &Assumptions,
    name: &str,
    layers: Vec<usize>,
    element: Element,
) -> Option<Unknown> {
    let composition = alloy(&stack.layers[*layers.first()?].material)?;
    let (other, _) = largest_other(composition, element)?;
    Some(Unknown {
        name: format!("{name}.{}", element.symbol()),
        quantity: Moved::Share(element, other),
        ordered: composition.fraction(element),
        prior_sigma: assumptions.share_sigma,
        layers,
        following: Vec::new(),
    })
}

/// The unknown of a word of the list.
fn named(
    stack: &Stack,
    assumptions: &Assumptions,
    barriers: &[usize],
    span: &Range<usize>,
    word: &str,
) -> Result<Unknown, Diagnostic> {
    let fault =
        |message: String, help: String| Diagnostic::new(span.clone(), message).with_help(help);
    let Some((name, quantity)) = word.rsplit_once('.') else {
        return Err(fault(
            format!("`{word}` does not say what moved"),
            "write NAME.thickness or NAME.ELEMENT: `well.thickness`, `well.Ga`".to_owned(),
        ));
    };
    let of_material: Vec<usize> = (0..stack.layers.len())
        .filter(|&layer| stack.layers[layer].material.name == name)
        .collect();
    let role = Role::ALL.into_iter().find(|role| role.word() == name);
    let layers = match role {
        Some(role) if of_material.is_empty() => of_role(stack, role),
        _ => of_material,
    };
    if layers.is_empty() {
        let known: Vec<&str> = stack
            .layers
            .iter()
            .flat_map(|layer| [layer.material.name.as_str(), layer.role.word()])
            .collect();
        let help = match nearest(name, known.iter().copied()) {
            Some(near) => format!("did you mean `{near}`?"),
            None => "name a material of the structure file, or a role such as `well`".to_owned(),
        };
        return Err(fault(
            format!("no layer is made of `{name}` or has that role"),
            help,
        ));
    }
    if quantity == "thickness" {
        let is_well = layers
            .iter()
            .any(|&layer| stack.layers[layer].role == Role::Well);
        let following = if is_well {
            barriers.to_vec()
        } else {
            Vec::new()
        };
        if !is_well && layers.iter().any(|layer| barriers.contains(layer)) {
            return Err(fault(
                format!(
                    "`{word}` can't move by itself: the barriers keep their ratio to the wells"
                ),
                "leave it out, or set `barrier_ratio_fixed = false`".to_owned(),
            ));
        }
        return thickness(stack, assumptions, name, layers, following)
            .ok_or_else(|| fault(format!("`{word}` has no layer"), "leave it out".to_owned()));
    }
    let Some(composition) = alloy(&stack.layers[layers[0]].material) else {
        return Err(fault(
            format!("`{name}` is given by its own numbers: only its thickness can move"),
            format!("write `{name}.thickness`, or leave it out"),
        ));
    };
    let elements: Elements = composition.elements();
    let known = || elements.iter().map(Element::symbol);
    let element = Element::from_symbol(quantity).filter(|element| elements.contains(*element));
    let Some(element) = element else {
        return Err(fault(
            format!(
                "`{quantity}` is neither `thickness` nor an element of {}",
                composition.formula()
            ),
            format!(
                "one of thickness, {}",
                known().collect::<Vec<_>>().join(", ")
            ),
        ));
    };
    share(stack, assumptions, name, layers, element).ok_or_else(|| {
        fault(
            format!(
                "{} is alone on its sublattice in {}",
                element.symbol(),
                composition.formula()
            ),
            "its share is always 1: leave it out".to_owned(),
        )
    })
}
