//! Shares of elements: compositions in which some are given.

use super::Impossible;
use crate::materials::{Composition, Element, Elements};

/// The largest difference of a share.
pub(super) fn distance(a: &Composition, b: &Composition) -> f64 {
    Element::ALL
        .into_iter()
        .map(|element| (a.fraction(element) - b.fraction(element)).abs())
        .fold(0.0, f64::max)
}

/// Of several compositions the one nearest to what the file has.
pub(super) fn nearest(
    original: &Composition,
    found: Vec<Composition>,
) -> Result<Composition, Impossible> {
    found
        .into_iter()
        .min_by(|a, b| distance(a, original).total_cmp(&distance(b, original)))
        .ok_or_else(|| Impossible::Composition(format!("no {} has that gap", original.family())))
}

/// The elements of a sublattice that are present, beside one.
fn beside(elements: Elements, element: Element) -> Vec<Element> {
    elements
        .iter()
        .filter(|other| other.is_group_iii() == element.is_group_iii() && *other != element)
        .collect()
}

/// New shares, the other elements of the sublattices in their present ratio.
pub(super) fn with_shares(
    original: &Composition,
    shares: &[(Element, f64)],
) -> Result<Composition, Impossible> {
    let mut composition = *original;
    for group_iii in [true, false] {
        let moved: Vec<&(Element, f64)> = shares
            .iter()
            .filter(|(element, _)| element.is_group_iii() == group_iii)
            .collect();
        if moved.is_empty() {
            continue;
        }
        let left = 1.0 - moved.iter().map(|(_, share)| share).sum::<f64>();
        if left < -1e-9 {
            return Err(Impossible::Composition(format!(
                "the shares of {} add up to more than 1",
                original.family()
            )));
        }
        let others: Vec<Element> = original
            .elements()
            .iter()
            .filter(|it| it.is_group_iii() == group_iii)
            .filter(|it| !moved.iter().any(|(element, _)| element == it))
            .collect();
        let present: f64 = others.iter().map(|&it| original.fraction(it)).sum();
        for &(element, share) in moved {
            composition = composition.with_fraction(element, share);
        }
        for other in others {
            let share = left.max(0.0) * original.fraction(other) / present;
            composition = composition.with_fraction(other, share);
        }
    }
    Ok(composition)
}

/// All compositions of a quaternary in which one element has a share, from end to end.
pub(super) fn line_of_share(
    original: &Composition,
    element: Element,
    share: f64,
) -> Result<[Composition; 2], Impossible> {
    let elements = original.elements();
    let others = beside(elements, element);
    let fixed = original.with_fraction(element, share);
    let give = |composition: Composition, pair: [Element; 2], sum: f64| {
        [(sum, 0.0), (0.0, sum)].map(|(first, second)| {
            composition
                .with_fraction(pair[0], first)
                .with_fraction(pair[1], second)
        })
    };
    match *others.as_slice() {
        [first, second] => Ok(give(fixed, [first, second], 1.0 - share)),
        [only] => {
            let fixed = fixed.with_fraction(only, 1.0 - share);
            let opposite: Vec<Element> = elements
                .iter()
                .filter(|it| it.is_group_iii() != element.is_group_iii())
                .collect();
            match *opposite.as_slice() {
                [first, second] => Ok(give(fixed, [first, second], 1.0)),
                _ => Err(no_line(original)),
            }
        }
        _ => Err(no_line(original)),
    }
}

fn no_line(original: &Composition) -> Impossible {
    Impossible::Composition(format!(
        "{} is no quaternary with two fractions to choose",
        original.family()
    ))
}

/// The formula with six decimals, each sublattice adding up to 1 exactly, its elements in the order
/// of a formula `like` it.
pub(super) fn rounded_formula(composition: &Composition, like: &str) -> String {
    const PARTS: f64 = 1e6;
    let mut formula = String::new();
    for group_iii in [true, false] {
        let mut present: Vec<Element> = composition
            .elements()
            .iter()
            .filter(|it| it.is_group_iii() == group_iii)
            .collect();
        present.sort_by_key(|it| like.find(it.symbol()).unwrap_or(like.len()));
        let mut parts: Vec<f64> = present
            .iter()
            .map(|&it| (PARTS * composition.fraction(it)).round())
            .collect();
        // The largest share takes what rounding leaves over.
        let left = PARTS - parts.iter().sum::<f64>();
        if let Some(largest) = (0..parts.len()).max_by(|&a, &b| parts[a].total_cmp(&parts[b])) {
            parts[largest] += left;
        }
        let shown: Vec<(Element, f64)> = present
            .into_iter()
            .zip(parts)
            .filter(|(_, parts)| *parts > 0.0)
            .collect();
        for (element, parts) in &shown {
            formula.push_str(element.symbol());
            if shown.len() > 1 {
                formula.push_str(&(parts / PARTS).to_string());
            }
        }
    }
    formula
}
