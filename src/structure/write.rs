//! From a [`Stack`] to the text of a file that reads back to the same stack.

use std::fmt::Write as _;

use super::growth;
use super::number::exact;
use super::order;
use super::{Layer, Material, Model, Operation, Stack, Substance, Target};
use crate::materials::{Composition, Crystal, Element};
use crate::units::CELSIUS_ZERO_K;

/// The stack as a structure file: materials by composition or by numbers, groups folded where rows
/// of the file were groups, every number to its last bit.
///
/// [`read`](super::read) of the text gives an equal stack.
#[must_use]
pub fn write(stack: &Stack) -> String {
    let mut text = String::new();
    let _ = writeln!(text, "format = 1\ntitle = {}\n", quoted(&stack.title));
    let _ = writeln!(
        text,
        "[substrate]\nmaterial = {}",
        quoted(&stack.substrate.name)
    );
    materials(stack, &mut text);
    for rows in stack.layers.chunk_by(|one, next| one.row == next.row) {
        row(rows, &mut text);
    }
    operation(&stack.operation, &mut text);
    model(&stack.model, &mut text);
    if let Some(wanted) = &stack.target {
        target(wanted, &mut text);
    }
    if let Some(growth) = &stack.growth {
        growth::write(growth, &mut text);
    }
    if let Some(limits) = &stack.limits {
        text.push_str("\n[limits]\n");
        for (key, value) in limits.numbers() {
            if let Some(value) = value {
                let _ = writeln!(text, "{key} = {}", exact(value));
            }
        }
        if !limits.without_elements.is_empty() {
            let symbols: Vec<&str> = limits
                .without_elements
                .iter()
                .map(|it| it.symbol())
                .collect();
            let _ = writeln!(text, "without_elements = {}", quoted(&symbols.join(", ")));
        }
    }
    if let Some(said) = &stack.order {
        order::write(said, &mut text);
    }
    text
}

/// A text as a TOML basic string.
pub(super) fn quoted(text: &str) -> String {
    toml::Value::String(text.to_owned()).to_string()
}

/// Every material that is not named by its own formula, in the order of use.
fn materials(stack: &Stack, text: &mut String) {
    let mut written: Vec<&str> = Vec::new();
    let of_layers = stack
        .layers
        .iter()
        .flat_map(|layer| std::iter::once(&layer.material).chain(&layer.grade_to));
    for material in std::iter::once(&stack.substrate).chain(of_layers) {
        if written.contains(&material.name.as_str()) || is_its_formula(material) {
            continue;
        }
        written.push(&material.name);
        match &material.substance {
            Substance::Alloy(composition) => {
                let _ = writeln!(
                    text,
                    "\n[materials.{}]\nformula = \"{}\"",
                    material.name,
                    exact_formula(composition)
                );
            }
            Substance::Own { crystal, index } => numbers(&material.name, crystal, *index, text),
        }
    }
}

fn is_its_formula(material: &Material) -> bool {
    match (&material.substance, Composition::parse(&material.name)) {
        (Substance::Alloy(composition), Ok(parsed)) => *composition == parsed,
        _ => false,
    }
}

/// The formula with every digit of its fractions.
fn exact_formula(composition: &Composition) -> String {
    let mut formula = String::new();
    for element in composition.elements().iter() {
        formula.push_str(element.symbol());
        let alone = composition
            .elements()
            .iter()
            .filter(|other: &Element| other.is_group_iii() == element.is_group_iii())
            .count()
            == 1;
        if !alone {
            // `Display` writes every digit and never an exponent, which a formula can't hold.
            let _ = write!(formula, "{}", composition.fraction(element));
        }
    }
    formula
}

fn numbers(name: &str, crystal: &Crystal, index: Option<f64>, text: &mut String) {
    let _ = writeln!(text, "\n[materials.{name}.numbers]");
    for (key, value) in [
        ("lattice_nm", crystal.lattice_nm),
        ("gap_ev", crystal.gap_ev),
        ("valence_edge_ev", crystal.valence_edge_ev),
        ("split_off_ev", crystal.split_off_ev),
        ("electron_mass", crystal.electron_mass),
    ] {
        let _ = writeln!(text, "{key} = {}", exact(value));
    }
    let _ = writeln!(text, "luttinger = [{}]", list(&crystal.luttinger));
    for (key, value) in [
        ("kane_energy_ev", crystal.kane_energy_ev),
        ("ac_ev", crystal.ac_ev),
        ("av_ev", crystal.av_ev),
        ("b_ev", crystal.b_ev),
        ("c11_gpa", crystal.c11_gpa),
        ("c12_gpa", crystal.c12_gpa),
    ] {
        let _ = writeln!(text, "{key} = {}", exact(value));
    }
    if let Some(index) = index {
        let _ = writeln!(text, "index = {}", exact(index));
    }
}

fn list(values: &[f64]) -> String {
    let values: Vec<String> = values.iter().copied().map(exact).collect();
    values.join(", ")
}

/// One row of the file: a layer, or a group folded to its shortest period.
fn row(layers: &[Layer], text: &mut String) {
    text.push_str("\n[[layers]]\n");
    if let [layer] = layers {
        for (key, value) in entries(layer) {
            let _ = writeln!(text, "{key} = {value}");
        }
        return;
    }
    let period = (1..=layers.len())
        .filter(|period| layers.len().is_multiple_of(*period))
        .find(|period| {
            layers
                .chunks(*period)
                .all(|chunk| chunk == &layers[..*period])
        })
        .unwrap_or(layers.len());
    let _ = writeln!(text, "repeat = {}\nlayers = [", layers.len() / period);
    for layer in &layers[..period] {
        let entries: Vec<String> = entries(layer)
            .into_iter()
            .map(|(key, value)| format!("{key} = {value}"))
            .collect();
        let _ = writeln!(text, "  {{ {} }},", entries.join(", "));
    }
    text.push_str("]\n");
}

fn entries(layer: &Layer) -> Vec<(&'static str, String)> {
    let mut entries = vec![
        ("role", quoted(layer.role.word())),
        ("material", quoted(&layer.material.name)),
    ];
    if let Some(end) = &layer.grade_to {
        entries.push(("grade_to", quoted(&end.name)));
    }
    entries.push(("thickness_nm", exact(layer.thickness_nm)));
    if layer.doping.acceptors_cm3 > 0.0 {
        entries.push(("acceptors_cm3", exact(layer.doping.acceptors_cm3)));
    } else if layer.doping.donors_cm3 > 0.0 || layer.doping.dopant.is_some() {
        entries.push(("donors_cm3", exact(layer.doping.donors_cm3)));
    }
    if let Some(dopant) = &layer.doping.dopant {
        entries.push(("dopant", quoted(dopant)));
    }
    entries
}

fn operation(operation: &Operation, text: &mut String) {
    text.push_str("\n[operation]\n");
    if operation.temperature_given {
        let _ = writeln!(text, "temperature_k = {}", exact(operation.temperature_k));
    }
    let _ = writeln!(text, "densities_cm3 = [{}]", list(&operation.densities_cm3));
    let _ = writeln!(
        text,
        "working_density_cm3 = {}",
        exact(operation.working_density_cm3)
    );
}

fn model(model: &Model, text: &mut String) {
    let _ = writeln!(
        text,
        "\n[model]\nbands = {}\nnonparabolic = {}\nlineshape = {}",
        quoted(model.bands.word()),
        model.nonparabolic,
        quoted(model.lineshape.word())
    );
    let _ = writeln!(text, "intraband_fs = {}", exact(model.intraband_fs));
    let _ = writeln!(text, "shrinkage_mev = {}", exact(model.shrinkage_mev));
    if let Some(share) = model.conduction_share {
        let _ = writeln!(text, "conduction_share = {}", exact(share));
    }
    let _ = writeln!(text, "field_kv_cm = {}", exact(model.field_kv_cm));
    if let Some(index) = model.index {
        let _ = writeln!(text, "index = {}", exact(index));
    }
}

fn target(target: &Target, text: &mut String) {
    let _ = writeln!(
        text,
        "\n[target]\nkind = {}\nwavelength_nm = {}\nmedium = {}",
        quoted(target.kind.word()),
        exact(target.wavelength_nm),
        quoted(target.medium.word())
    );
    for (key, value) in [
        ("temperature_c", target.temperature_k.map(celsius)),
        ("density_cm3", target.density_cm3),
        ("tolerance_nm", target.tolerance_nm),
    ] {
        if let Some(value) = value {
            let _ = writeln!(text, "{key} = {}", exact(value));
        }
    }
}

/// The Celsius temperature that reads back to a kelvin one to the bit, where there is one.
fn celsius(kelvin: f64) -> f64 {
    let near = kelvin - CELSIUS_ZERO_K;
    [near, near.next_up(), near.next_down()]
        .into_iter()
        .find(|celsius| (celsius + CELSIUS_ZERO_K).to_bits() == kelvin.to_bits())
        .unwrap_or(near)
}
