//! Published wells lie on the curves that are found for their published wavelengths.
//!
//! Citation, tolerance and its reason stand in each file of `reference/`. What those files list as a
//! miss is one here too and left out.

use crate::{Design, moving};
use std::fmt::Write as _;
use stepwell::design::Quantity;
use stepwell::materials::Element;
use stepwell::structure::Wavelength;

/// A well of a reference file with one wavelength.
struct Recipe {
    name: String,
    design: Design,
    thickness_nm: f64,
    kind: Wavelength,
    wavelength_nm: f64,
    tolerance_nm: f64,
}

fn recipes(file: &str) -> Vec<Recipe> {
    let text = std::fs::read_to_string(format!("reference/{file}.toml")).expect("a reference");
    let table: toml::Table = text.parse().expect("TOML");
    let mut recipes = Vec::new();
    for stack in table["stack"].as_array().expect("stacks") {
        // The same wells with mixed bands take a hundred times as long.
        if stack["model"]["bands"].as_str() == Some("mixed") {
            continue;
        }
        for check in stack["check"].as_array().expect("checks") {
            let (kind, shrinks) = match check["quantity"].as_str().expect("a word") {
                "first_transition_nm" => (Wavelength::Transition, true),
                "pl_nm" => (Wavelength::Photoluminescence, true),
                "gain_peak_nm" => (Wavelength::Gain, true),
                "gain_peak_unshrunk_nm" => (Wavelength::Gain, false),
                _ => continue,
            };
            if check.get("expected_miss").is_some() {
                continue;
            }
            let layers = stack["layers"].as_array().expect("layers");
            let number = |key: &str| check[key].as_float().expect("a number");
            recipes.push(Recipe {
                name: format!("{}, {kind:?}", stack["name"]),
                design: Design::new(structure(stack, shrinks)),
                thickness_nm: layers[1][2].as_float().expect("a thickness"),
                kind,
                wavelength_nm: number("value"),
                tolerance_nm: number("tolerance"),
            });
        }
    }
    recipes
}

/// The structure file of a stack.
fn structure(stack: &toml::Value, shrinks: bool) -> String {
    let mut file = toml::Table::new();
    file.insert("format".to_owned(), 1.into());
    let substrate = [("material".to_owned(), stack["substrate"].clone())];
    file.insert(
        "substrate".to_owned(),
        substrate.into_iter().collect::<toml::Table>().into(),
    );
    for key in ["materials", "operation", "model"] {
        if let Some(table) = stack.get(key) {
            file.insert(key.to_owned(), table.clone());
        }
    }
    if !shrinks && let Some(model) = file["model"].as_table_mut() {
        model.insert("shrinkage_mev".to_owned(), 0.into());
    }
    let mut text = file.to_string();
    for layer in stack["layers"].as_array().expect("layers") {
        let _ = write!(
            text,
            "[[layers]]\nrole = {}\nmaterial = {}\nthickness_nm = {}\n",
            layer[0], layer[1], layer[2]
        );
    }
    text
}

impl Recipe {
    /// The values of a move at which the ends of the tolerance are met, from the shorter wavelength:
    /// where one is not met within the bounds, no end.
    fn ends(&self, name: &str, quantity: Quantity, from: f64, to: f64) -> [Option<f64>; 2] {
        [-1.0, 1.0].map(|sign| {
            let aimed_nm = self.wavelength_nm + sign * self.tolerance_nm;
            let moved = moving(name, quantity, from, to);
            let outcome = self.design.aimed(vec![moved], self.kind, aimed_nm);
            outcome.solutions.first().map(|it| it.values[0])
        })
    }

    /// Whether the published value lies between the curves of the two ends.
    fn lies_between(&self, ends: [Option<f64>; 2], value: f64) {
        let [shorter, longer] = ends;
        assert!(
            shorter.is_some() || longer.is_some(),
            "{}: neither end of the tolerance is met",
            self.name
        );
        // More width, more indium and a longer gap all lengthen the wavelength.
        assert!(
            shorter.is_none_or(|it| it <= value) && longer.is_none_or(|it| value <= it),
            "{}: {value} is not between {ends:?}",
            self.name
        );
    }
}

#[test]
fn published_widths_lie_on_the_curves_of_their_wavelengths() {
    let mut count = 0;
    for file in [
        "coldren1995-laser-line",
        "barjoseph1987-absorption",
        "zah1991-laser-line",
        "practice-lines",
        "practice-ingaasp-wells",
    ] {
        for recipe in recipes(file) {
            let width_nm = recipe.thickness_nm;
            let ends = recipe.ends("well", Quantity::Thickness, 0.4 * width_nm, 2.5 * width_nm);
            recipe.lies_between(ends, width_nm);
            count += 1;
        }
    }
    assert!(count >= 6, "{count} recipes");
}

#[test]
fn the_published_indium_share_lies_on_the_curve_of_the_980_nm_line() {
    let mut count = 0;
    for recipe in recipes("coldren1995-laser-line") {
        let ends = recipe.ends("well", Quantity::Share(Element::In), 0.1, 0.35);
        recipe.lies_between(ends, 0.2);
        count += 1;
    }
    assert!(count >= 1);
}

/// Strain, width and wavelength are published, the composition is not: one that meets the first two
/// and comes within the tolerance of the third must exist. (No InGaAsP of 1.4 % has a gap below
/// 1361 nm: the alloy without gallium ends there.)
#[test]
fn compositions_that_were_not_published_exist() {
    let mut count = 0;
    for recipe in recipes("practice-ingaasp-wells") {
        let moved = moving("quaternary", Quantity::Gap, 1250.0, 1700.0);
        let outcome = recipe
            .design
            .aimed(vec![moved], recipe.kind, recipe.wavelength_nm);
        let miss_nm = match (outcome.solutions.as_slice(), &outcome.nearest) {
            ([solution], None) => solution.wavelength_nm - recipe.wavelength_nm,
            ([], Some(nearest)) => nearest.miss_nm,
            other => panic!("{}: {other:?}", recipe.name),
        };
        assert!(
            miss_nm.abs() <= recipe.tolerance_nm,
            "{}: {miss_nm} nm",
            recipe.name
        );
        count += 1;
    }
    assert!(count >= 2, "{count} recipes");
}
