//! Cautions that the materials of a wafer call for: short, factual, and no safety review.
//!
//! Sources: NIOSH Alert 88-100 (dust of gallium arsenide); IARC Monographs 86 (2006) (gallium
//! arsenide and indium phosphide, arsine and phosphine from acids and moisture); the rest is common
//! practice.

use crate::materials::Element;
use crate::structure::{Layer, Stack};

/// Cautions for a wafer, the last of which defers to those who are qualified.
pub(super) fn cautions(wafer: &Stack) -> Vec<&'static str> {
    let of_layers = wafer.layers.iter().flat_map(Layer::ends);
    let materials: Vec<_> = std::iter::once(&wafer.substrate).chain(of_layers).collect();
    let holds = |element: Element| {
        materials.iter().any(|material| {
            let composition = material.substance.composition();
            composition.is_some_and(|it| it.fraction(element) > 0.0)
        })
    };
    // Of a material of own numbers nobody knows what it holds.
    let is_unknown = materials
        .iter()
        .any(|material| material.substance.composition().is_none());
    let mut cautions = Vec::new();
    if holds(Element::As) || is_unknown {
        cautions.push(
            "Arsenic: cleaving, lapping and breakage make dust that holds arsenic and may cause \
             cancer when breathed in or swallowed; work wet or under extraction. Reducing acids can \
             release arsine.",
        );
    }
    if holds(Element::P) || is_unknown {
        cautions.push(
            "Phosphorus: phosphides release phosphine with moisture and acids; hydrochloric etches of \
             indium phosphide do so at once. Deposits in reactors and pumps may catch fire in air.",
        );
    }
    if holds(Element::Sb) || is_unknown {
        cautions.push("Antimony: dust is toxic; etches can release stibine.");
    }
    if holds(Element::In) {
        cautions.push(
            "Indium: dust of indium compounds, indium phosphide above all, harms the lungs and is \
             suspected to cause cancer.",
        );
    }
    if holds(Element::Al) {
        cautions.push(
            "Aluminium: cleaved and etched faces of aluminium-bearing layers oxidise; keep them \
             covered and note the time in air.",
        );
    }
    cautions.push(
        "Growth: hydrides are highly toxic and metal-organic sources catch fire in air. Any change of \
         sources or of gas budgets that this sheet would need goes through the grower's own safety \
         review first.",
    );
    cautions.push(
        "Light: pumps of photoluminescence benches, and what wafers emit, may be invisible and harm \
         the eye.",
    );
    cautions.push(
        "Waste: wafers, broken pieces, dust, wipes, slurries and spent etches go to separate, labelled \
         waste.",
    );
    cautions.push(
        "These notes replace no safety review: the rules of the site and the law go first, and those \
         who are qualified decide.",
    );
    cautions
}
