//! A structure with some moves, at any values of them.

use super::ground::Ground;
use super::recipe::Recipe;
use super::{Immovable, Impossible, Move, Quantity, check_bounds, within};
use crate::materials::{Offsets, Parameters};
use crate::structure::{
    Form, Layer, Manuscript, Material, Role, Selection, Stack, Substance, thickness_range_nm,
};

/// A structure and what may change in it.
#[derive(Debug)]
pub struct Variation<'a> {
    /// The structure as it is.
    pub stack: &'a Stack,
    /// The parameter data.
    pub parameters: &'a Parameters,
    /// What may change.
    pub moves: Vec<Move>,
    thicknesses: Vec<(usize, Selection)>,
    recipes: Vec<Recipe>,
    ground: Ground<'a>,
}

impl<'a> Variation<'a> {
    /// A structure with moves.
    ///
    /// # Arguments
    ///
    /// * `manuscript` – the text that the structure was read from
    ///
    /// # Errors
    ///
    /// The first move that means nothing.
    pub fn new(
        stack: &'a Stack,
        manuscript: &Manuscript<'_>,
        parameters: &'a Parameters,
        moves: Vec<Move>,
    ) -> Result<Self, Immovable> {
        let mut variation = Self {
            stack,
            parameters,
            moves: Vec::new(),
            thicknesses: Vec::new(),
            recipes: Vec::new(),
            ground: Ground::new(parameters, &stack.substrate.substance),
        };
        for (index, wanted) in moves.iter().enumerate() {
            if moves[..index]
                .iter()
                .any(|known| known.name == wanted.name && known.quantity == wanted.quantity)
            {
                return Err(Immovable::Twice { key: wanted.key() });
            }
            if wanted.quantity == Quantity::Thickness {
                let selection = variation.layers_of_one_thickness(&wanted.name)?;
                variation.check_thickness(wanted, &selection)?;
                variation.thicknesses.push((index, selection));
            } else {
                check_bounds(wanted)?;
                variation.add_to_recipe(index, wanted, manuscript)?;
            }
        }
        for recipe in &mut variation.recipes {
            recipe.settle(&variation.ground)?;
        }
        variation.moves = moves;
        Ok(variation)
    }

    fn check_thickness(&self, wanted: &Move, selection: &Selection) -> Result<(), Immovable> {
        let ranges = self
            .stack
            .layers
            .iter()
            .filter(|layer| is_selected(layer, selection))
            .map(|layer| thickness_range_nm(layer.role));
        let (lowest, highest) = ranges
            .reduce(|a, b| (a.0.max(b.0), a.1.min(b.1)))
            .unwrap_or((0.0, 0.0));
        within(wanted, lowest, highest)
    }

    /// The layers of a name, all of one thickness.
    fn layers_of_one_thickness(&self, name: &str) -> Result<Selection, Immovable> {
        let choices = [Some(Selection::Material(name.to_owned())), role(name)];
        let mut found = false;
        for selection in choices.into_iter().flatten() {
            let mut layers = self
                .stack
                .layers
                .iter()
                .filter(|layer| is_selected(layer, &selection));
            let Some(first) = layers.next() else { continue };
            found = true;
            if layers.all(|layer| same_number(layer.thickness_nm, first.thickness_nm)) {
                return Ok(selection);
            }
        }
        Err(if found {
            Immovable::SeveralThicknesses {
                name: name.to_owned(),
            }
        } else {
            self.unknown(name)
        })
    }

    fn unknown(&self, name: &str) -> Immovable {
        let mut known: Vec<String> = Vec::new();
        for layer in &self.stack.layers {
            for word in [layer.material.name.as_str(), layer.role.word()] {
                if !known.iter().any(|it| it == word) {
                    known.push(word.to_owned());
                }
            }
        }
        Immovable::Unknown {
            name: name.to_owned(),
            known,
        }
    }

    /// The material of a name, and where it stands.
    fn material(&self, name: &str) -> Result<(Selection, &'a Material), Immovable> {
        let materials = || {
            let layers = self.stack.layers.iter();
            layers.flat_map(|layer| std::iter::once(&layer.material).chain(&layer.grade_to))
        };
        if let Some(material) = materials().find(|material| material.name == name) {
            return Ok((Selection::Material(name.to_owned()), material));
        }
        let Some(selection) = role(name) else {
            return Err(self.unknown(name));
        };
        let mut of_role: Vec<&Material> = Vec::new();
        for layer in &self.stack.layers {
            if is_selected(layer, &selection) && !of_role.contains(&&layer.material) {
                of_role.push(&layer.material);
            }
        }
        match of_role.as_slice() {
            [] => Err(self.unknown(name)),
            [material] => Ok((selection, material)),
            several => Err(Immovable::SeveralMaterials {
                name: name.to_owned(),
                materials: several.iter().map(|it| it.name.clone()).collect(),
            }),
        }
    }

    fn add_to_recipe(
        &mut self,
        index: usize,
        wanted: &Move,
        manuscript: &Manuscript<'_>,
    ) -> Result<(), Immovable> {
        let (selection, material) = self.material(&wanted.name)?;
        let Substance::Alloy(original) = material.substance else {
            return Err(Immovable::OwnNumbers {
                name: wanted.name.clone(),
            });
        };
        if let Quantity::Share(element) = wanted.quantity {
            let elements = original.elements();
            let beside = elements
                .iter()
                .filter(|other| other.is_group_iii() == element.is_group_iii())
                .count();
            if !elements.contains(element) || beside < 2 {
                return Err(Immovable::NoSuchShare {
                    name: wanted.name.clone(),
                    family: original.family(),
                    element: element.symbol(),
                });
            }
        }
        // What has a name of its own moves wherever the name stands.
        let selection = if manuscript.form(&material.name) == Form::Inline {
            selection
        } else {
            Selection::Material(material.name.clone())
        };
        let known = self
            .recipes
            .iter()
            .position(|recipe| recipe.selection == selection && recipe.material == material.name);
        let place = known.unwrap_or_else(|| {
            let recipe = Recipe::new(selection, &material.name, manuscript, original);
            self.recipes.push(recipe);
            self.recipes.len() - 1
        });
        self.recipes[place].moved.push((index, wanted.quantity));
        Ok(())
    }

    /// The values that the structure has as it is.
    #[must_use]
    pub fn present(&self) -> Vec<f64> {
        let mut values = vec![f64::NAN; self.moves.len()];
        for (index, selection) in &self.thicknesses {
            let mut layers = self.stack.layers.iter();
            if let Some(layer) = layers.find(|layer| is_selected(layer, selection)) {
                values[*index] = layer.thickness_nm;
            }
        }
        for recipe in &self.recipes {
            let (gap_nm, strain) = self.ground.gap_and_strain(&recipe.original);
            for &(index, quantity) in &recipe.moved {
                values[index] = match quantity {
                    Quantity::Share(element) => recipe.original.fraction(element),
                    Quantity::Strain => 100.0 * strain,
                    Quantity::Gap => gap_nm,
                    Quantity::Thickness => f64::NAN,
                };
            }
        }
        values
    }

    /// What gives way where compositions move, one sentence a material.
    #[must_use]
    pub fn giving_way(&self) -> Vec<String> {
        self.recipes.iter().map(Recipe::giving_way).collect()
    }

    /// The structure at some values, one a move.
    ///
    /// # Errors
    ///
    /// [`Impossible`] if no composition meets the values, or a well is indirect.
    pub fn stack(&self, values: &[f64]) -> Result<Stack, Impossible> {
        let mut stack = self.stack.clone();
        for (index, selection) in &self.thicknesses {
            for layer in &mut stack.layers {
                if is_selected(layer, selection) {
                    layer.thickness_nm = values[*index];
                }
            }
        }
        for recipe in &self.recipes {
            let composition = recipe.composition(&self.ground, values)?;
            for (layer, before) in stack.layers.iter_mut().zip(&self.stack.layers) {
                let lower = &mut layer.material;
                if is_selected(before, &recipe.selection) && lower.name == recipe.material {
                    lower.substance = Substance::Alloy(composition);
                }
                let is_named = matches!(recipe.selection, Selection::Material(_))
                    || is_selected(before, &recipe.selection);
                if let Some(upper) = &mut layer.grade_to
                    && is_named
                    && upper.name == recipe.material
                {
                    upper.substance = Substance::Alloy(composition);
                }
            }
        }
        self.wells_are_direct(&stack)?;
        Ok(stack)
    }

    fn wells_are_direct(&self, stack: &Stack) -> Result<(), Impossible> {
        let kelvin = stack.operation.temperature_k;
        let moved = |material: &Material| {
            self.recipes
                .iter()
                .any(|recipe| recipe.material == material.name)
        };
        for layer in stack.wells() {
            for material in std::iter::once(&layer.material).chain(&layer.grade_to) {
                if let (true, Substance::Alloy(composition)) = (moved(material), material.substance)
                {
                    let crystal = self
                        .parameters
                        .crystal(&composition, kelvin, Offsets::Table);
                    if !crystal.is_direct() {
                        return Err(Impossible::Indirect(composition.formula()));
                    }
                }
            }
        }
        Ok(())
    }

    /// Values with the digits that go into a file.
    #[must_use]
    pub fn rounded(&self, values: &[f64]) -> Vec<f64> {
        let moves = self.moves.iter().zip(values);
        moves
            .map(|(moved, &value)| moved.quantity.rounded(value))
            .collect()
    }

    /// The text of the file with the values in it, rounded to what a file needs.
    ///
    /// # Errors
    ///
    /// [`Impossible`] as for [`Self::stack`].
    pub fn text(&self, manuscript: &str, values: &[f64]) -> Result<String, Impossible> {
        let mut manuscript = Manuscript::new(manuscript)
            .map_err(|_| Impossible::Composition("the file is no TOML".to_owned()))?;
        let values = self.rounded(values);
        for (index, selection) in &self.thicknesses {
            manuscript.set_thickness_nm(selection, values[*index]);
        }
        for recipe in &self.recipes {
            let composition = recipe.composition(&self.ground, &values)?;
            let condition = recipe.condition(&self.ground, &composition);
            manuscript.set_composition(&recipe.selection, &recipe.material, &condition);
        }
        Ok(manuscript.text())
    }
}

fn role(name: &str) -> Option<Selection> {
    let mut roles = Role::ALL.into_iter();
    let role = roles.find(|role| role.word() == name)?;
    Some(Selection::Role(role))
}

fn is_selected(layer: &Layer, selection: &Selection) -> bool {
    match selection {
        Selection::Material(name) => layer.material.name == *name,
        Selection::Role(role) => layer.role == *role,
    }
}

fn same_number(a: f64, b: f64) -> bool {
    (a - b).abs() <= 1e-9 * a.abs().max(b.abs())
}
