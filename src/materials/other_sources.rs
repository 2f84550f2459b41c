//! Energies of an alloy by sources that are not in use.

use super::interpolation::ternary_elements;
use super::{Composition, Parameters};

/// What another source makes of an energy.
#[derive(Clone, Debug, PartialEq)]
pub struct OtherEnergy {
    /// What it is: `direct gap`, `valence edge`.
    pub quantity: &'static str,
    /// The other source's energy less the one in use, eV.
    pub difference_ev: f64,
    /// Key of the other source.
    pub source: String,
}

impl Parameters {
    /// Direct gap and valence edge of an alloy by bowings that the data list beside those in use and
    /// do not call wrong.
    #[must_use]
    pub fn other_energies(&self, composition: &Composition) -> Vec<OtherEnergy> {
        let present = composition.elements();
        let mut others = Vec::new();
        for place in 0..18 {
            let (elements, _) = ternary_elements(place);
            let Some(ternary) = self.table().ternaries.get(&elements) else {
                continue;
            };
            if !elements.is_within(&present) {
                continue;
            }
            // P = … − x(1 − x) C, in a quaternary weighted by the fraction on the other sublattice.
            let weight: f64 = elements.iter().map(|it| composition.fraction(it)).product();
            for alternate in ternary.alternates.iter().filter(|it| it.trusted != "main") {
                for (word, value) in alternate.keys.iter().zip(&alternate.values) {
                    let quantity = match word.as_str() {
                        "eg_gamma" => "direct gap",
                        "vbo" => "valence edge",
                        _ => continue,
                    };
                    let used = ternary.entries.get(word).map_or(0.0, |entry| {
                        let share = first_end_share(composition, ternary.ends.as_ref());
                        let powers = entry.value.iter().rev();
                        powers.fold(0.0, |sum, coefficient| sum * share + coefficient)
                    });
                    others.push(OtherEnergy {
                        quantity,
                        difference_ev: weight * (used - value),
                        source: alternate.source.clone(),
                    });
                }
            }
        }
        others
    }
}

/// Fraction of a ternary's first end, among the two elements that it mixes.
fn first_end_share(composition: &Composition, ends: Option<&[String; 2]>) -> f64 {
    let ends = ends.and_then(|[first, second]| {
        let first = Composition::parse(first).ok()?.elements();
        let second = Composition::parse(second).ok()?.elements();
        Some((first, second))
    });
    let Some((first, second)) = ends else {
        return 0.5;
    };
    let own = |of: super::Elements, other: super::Elements| -> f64 {
        of.iter()
            .filter(|element| !other.contains(*element))
            .map(|element| composition.fraction(element))
            .sum()
    };
    let (one, two) = (own(first, second), own(second, first));
    one / (one + two)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// AlInP: a bowing of −0.10 eV by another source in place of the one in use.
    #[test]
    fn another_bowing_moves_the_gap_by_its_share() {
        let parameters = Parameters::shipped();
        let alloy = Composition::parse("Al0.5In0.5P").expect("a formula");
        let used = parameters
            .table()
            .ternaries
            .values()
            .find(|it| it.name == "AlInP")
            .and_then(|it| it.entries.get("eg_gamma"))
            .expect("a bowing")
            .value[0];
        let others = parameters.other_energies(&alloy);
        let gap = others
            .iter()
            .find(|it| it.quantity == "direct gap")
            .expect("one");
        assert!((gap.difference_ev - 0.25 * (used + 0.10)).abs() < 1e-12);
        let compound = Composition::parse("InP").expect("a formula");
        assert!(parameters.other_energies(&compound).is_empty());
    }
}
