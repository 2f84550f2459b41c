//! What may change in a structure, what gives way to it, and the structure that comes of it.
//!
//! A [`Move`] names one number and its bounds. A [`Variation`] is a structure with some moves: at
//! any values of them it is a [`Stack`], or the text of a file in which nothing else has changed.
//!
//! # What gives way
//!
//! * thickness: nothing
//! * an element's share: in a material asked for by gap and strain, the strain stays and the gap
//!   gives way; in a formula, the other elements of the sublattice give way in their present ratio
//! * strain: the gap stays (a ternary has nothing left to stay)
//! * gap: the strain stays (likewise)
//!
//! Two moves of one quaternary settle it by themselves.

use std::collections::HashMap;
use std::fmt;
use std::sync::{Mutex, PoisonError};

use crate::materials::{
    Composition, Element, Elements, Offsets, Parameters, SolveError, solve_composition,
};
use crate::numerics::roots::bracketed_root;
use crate::structure::{
    Condition, Form, Layer, Manuscript, Material, Role, Selection, Stack, Substance,
    thickness_range_nm,
};
use crate::units::{photon_ev, wavelength_nm};

/// Temperature at which gaps and strains are meant, K.
const PRESCRIPTION_K: f64 = 300.0;

/// A number that may change.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Quantity {
    /// Thickness of layers, nm.
    Thickness,
    /// Share of an element on its sublattice.
    Share(Element),
    /// In-plane strain at 300 K, %; negative is compressive.
    Strain,
    /// Gap of the strained bulk layer at 300 K as a wavelength, nm.
    Gap,
}

/// A number that may change, and how far.
#[derive(Clone, Debug, PartialEq)]
pub struct Move {
    /// A material, or a role.
    pub name: String,
    /// Which of its numbers.
    pub quantity: Quantity,
    /// Lowest value, in the unit of the quantity.
    pub from: f64,
    /// Highest value.
    pub to: f64,
}

impl Move {
    /// Its name with the unit at the end: `well.thickness_nm`, `well.In`,
    /// `well.compressive_percent`, `well.gap_nm`.
    ///
    /// A strain of which some values are tensile is `tensile_percent`, negative where compressive.
    #[must_use]
    pub fn key(&self) -> String {
        let quantity = match self.quantity {
            Quantity::Thickness => "thickness_nm",
            Quantity::Share(element) => element.symbol(),
            Quantity::Strain if self.is_compressive() => "compressive_percent",
            Quantity::Strain => "tensile_percent",
            Quantity::Gap => "gap_nm",
        };
        format!("{}.{quantity}", self.name)
    }

    /// A value as its key means it: a compressive strain is written positive.
    #[must_use]
    pub fn said(&self, value: f64) -> f64 {
        if self.quantity == Quantity::Strain && self.is_compressive() {
            -value
        } else {
            value
        }
    }

    fn is_compressive(&self) -> bool {
        self.to <= 0.0
    }

    /// The value at a share of the way from its lowest to its highest.
    #[must_use]
    pub fn at(&self, share: f64) -> f64 {
        self.from + share * (self.to - self.from)
    }

    /// The digits with which the value goes into a file: far below what a reactor can hold, and fine
    /// enough that no wavelength moves by 0.01 nm.
    fn rounded(&self, value: f64) -> f64 {
        let per_unit = match self.quantity {
            Quantity::Thickness | Quantity::Strain => 1e5,
            Quantity::Share(_) => 1e6,
            Quantity::Gap => 1e4,
        };
        (value * per_unit).round() / per_unit
    }
}

/// Why a move means nothing in a structure.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Immovable {
    /// Neither a material nor a role.
    #[error("`{name}` is neither a material nor a role of this structure")]
    Unknown {
        /// The name.
        name: String,
        /// Names that there are.
        known: Vec<String>,
    },
    /// Layers of the name differ in thickness.
    #[error("the layers of `{name}` are not of one thickness")]
    SeveralThicknesses {
        /// The name.
        name: String,
    },
    /// Layers of the role differ in material.
    #[error("the layers of role `{name}` are not of one material")]
    SeveralMaterials {
        /// The role.
        name: String,
        /// Their materials.
        materials: Vec<String>,
    },
    /// A material of own numbers.
    #[error("`{name}` is given by its own numbers: only its thickness can move")]
    OwnNumbers {
        /// The name.
        name: String,
    },
    /// An element that the material does not have.
    #[error("`{name}` is {family}: it has no {element} to choose")]
    NoSuchShare {
        /// The name.
        name: String,
        /// Its elements.
        family: String,
        /// The element.
        element: &'static str,
    },
    /// More is asked of a material than its elements can meet.
    #[error("`{name}` is {family}, with {free} to choose: {asked} moves are too many")]
    TooMany {
        /// The name.
        name: String,
        /// Its elements.
        family: String,
        /// Fractions to choose, in words.
        free: String,
        /// Moves.
        asked: usize,
    },
    /// A gap or strain of a material with more than two fractions to choose.
    #[error("`{name}` is {family}: a gap and a strain leave its composition open")]
    TooOpen {
        /// The name.
        name: String,
        /// Its elements.
        family: String,
    },
    /// Bounds that no file may hold.
    #[error("{key} can't run from {from} to {to}: possible is {lowest} to {highest}")]
    Bounds {
        /// The move.
        key: String,
        /// Lower bound.
        from: f64,
        /// Upper bound.
        to: f64,
        /// Lowest possible.
        lowest: f64,
        /// Highest possible.
        highest: f64,
    },
    /// The same number twice.
    #[error("{key} moves twice")]
    Twice {
        /// The move.
        key: String,
    },
}

impl Immovable {
    /// What to do about it.
    #[must_use]
    pub fn advice(&self) -> String {
        match self {
            Self::Unknown { known, .. } => format!("there are {}", known.join(", ")),
            Self::SeveralThicknesses { .. } => {
                "name a role, or a material whose layers are all alike".to_owned()
            }
            Self::SeveralMaterials { materials, .. } => {
                format!("name one of them: {}", materials.join(", "))
            }
            Self::OwnNumbers { .. } => {
                "move its thickness, or give the material as an alloy".to_owned()
            }
            Self::NoSuchShare { .. } => "move the share of one of its elements".to_owned(),
            Self::TooMany { .. } => "leave one of them out".to_owned(),
            Self::TooOpen { .. } => "move the shares of its elements".to_owned(),
            Self::Bounds { .. } => "check the unit and the order of the bounds".to_owned(),
            Self::Twice { .. } => "keep one of them".to_owned(),
        }
    }
}

/// Why there is no structure at some values.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Impossible {
    /// No composition meets the values.
    #[error("{0}")]
    Composition(String),
    /// The well is indirect.
    #[error("a well of {0} is indirect")]
    Indirect(String),
}

impl From<SolveError> for Impossible {
    fn from(error: SolveError) -> Self {
        Self::Composition(error.to_string())
    }
}

/// What stays while a composition moves.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Held {
    /// Nothing: the moves settle it.
    Nothing,
    /// The ratio of the other elements of a sublattice.
    Ratio,
    /// The in-plane strain.
    Strain(f64),
    /// The gap as a wavelength, nm.
    Gap(f64),
}

/// A material whose composition moves.
#[derive(Debug)]
struct Recipe {
    /// Where it stands in the layers.
    selection: Selection,
    /// Its name.
    material: String,
    form: Form,
    original: Composition,
    /// Indices of the moves and what they move.
    moved: Vec<(usize, Quantity)>,
    held: Held,
    /// Compositions found already: solving for one takes as long as a structure's levels.
    known: Mutex<HashMap<Vec<u64>, Result<Composition, Impossible>>>,
}

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
    substrate_lattice_nm: f64,
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
            substrate_lattice_nm: lattice_nm(parameters, &stack.substrate.substance),
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
            recipe.held = held(recipe, parameters, variation.substrate_lattice_nm)?;
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
        let form = manuscript.form(&material.name);
        // What has a name of its own moves wherever the name stands.
        let selection = if form == Form::Inline {
            selection
        } else {
            Selection::Material(material.name.clone())
        };
        let known = self
            .recipes
            .iter_mut()
            .find(|recipe| recipe.selection == selection && recipe.material == material.name);
        if let Some(recipe) = known {
            recipe.moved.push((index, wanted.quantity));
        } else {
            self.recipes.push(Recipe {
                selection,
                material: material.name.clone(),
                form,
                original,
                moved: vec![(index, wanted.quantity)],
                held: Held::Nothing,
                known: Mutex::default(),
            });
        }
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
            let (gap_nm, strain) = self.gap_and_strain(&recipe.original);
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

    /// Gap as a wavelength (nm) and in-plane strain of a composition, at 300 K.
    fn gap_and_strain(&self, composition: &Composition) -> (f64, f64) {
        gap_and_strain(self.parameters, self.substrate_lattice_nm, composition)
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
            let composition = self.composition(recipe, values)?;
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

    fn composition(&self, recipe: &Recipe, values: &[f64]) -> Result<Composition, Impossible> {
        let moved: Vec<f64> = recipe
            .moved
            .iter()
            .map(|(index, _)| values[*index])
            .collect();
        let key: Vec<u64> = moved.iter().map(|value| value.to_bits()).collect();
        let known = || recipe.known.lock().unwrap_or_else(PoisonError::into_inner);
        if let Some(composition) = known().get(&key) {
            return composition.clone();
        }
        let composition = self.solved(recipe, &moved);
        known().insert(key, composition.clone());
        composition
    }

    fn solved(&self, recipe: &Recipe, moved: &[f64]) -> Result<Composition, Impossible> {
        let mut shares = Vec::new();
        let (mut strain, mut gap_nm) = (None, None);
        match recipe.held {
            Held::Strain(held) => strain = Some(held),
            Held::Gap(held) => gap_nm = Some(held),
            Held::Nothing | Held::Ratio => {}
        }
        for ((_, quantity), &value) in recipe.moved.iter().zip(moved) {
            match quantity {
                Quantity::Share(element) => shares.push((*element, value)),
                Quantity::Strain => strain = Some(0.01 * value),
                Quantity::Gap => gap_nm = Some(value),
                Quantity::Thickness => {}
            }
        }
        if strain.is_none() && gap_nm.is_none() {
            return with_shares(&recipe.original, &shares);
        }
        if let Some(&(element, share)) = shares.first() {
            let line = line_of_share(&recipe.original, element, share)?;
            return self.on_line(&line, &recipe.original, strain, gap_nm);
        }
        let elements = recipe.original.elements();
        let solved = solve_composition(
            self.parameters,
            &elements,
            self.substrate_lattice_nm,
            gap_nm,
            strain,
        );
        match solved {
            Err(SolveError::Several { solutions, .. }) => nearest(&recipe.original, solutions),
            other => Ok(other?),
        }
    }

    /// The composition on a straight line that has a strain, or else a gap.
    fn on_line(
        &self,
        line: &[Composition; 2],
        original: &Composition,
        strain: Option<f64>,
        gap_nm: Option<f64>,
    ) -> Result<Composition, Impossible> {
        /// Points at which a line is looked at before roots are refined.
        const SCAN: usize = 64;
        let at = |share: f64| line[0].towards(&line[1], share);
        if let Some(strain) = strain {
            let lattice = |composition: &Composition| {
                self.parameters
                    .crystal(composition, PRESCRIPTION_K, Offsets::Table)
                    .lattice_nm
            };
            // Vegard's law: the lattice constant is linear along the line.
            let wanted = self.substrate_lattice_nm / (1.0 + strain);
            let ends = line.map(|end| lattice(&end));
            let share = (wanted - ends[0]) / (ends[1] - ends[0]);
            if !(-1e-9..=1.0 + 1e-9).contains(&share) {
                return Err(Impossible::Composition(format!(
                    "no {} of that share has that strain",
                    original.family()
                )));
            }
            return Ok(at(share.clamp(0.0, 1.0)));
        }
        let target_ev = photon_ev(gap_nm.unwrap_or(f64::NAN));
        let miss = |share: f64| photon_ev(self.gap_and_strain(&at(share)).0) - target_ev;
        let mut found = Vec::new();
        let share = |point: usize| point as f64 / SCAN as f64;
        for point in 0..SCAN {
            let (low, high) = (share(point), share(point + 1));
            if (miss(low) <= 0.0) != (miss(high) <= 0.0) {
                found.push(at(bracketed_root(miss, low, high, 1e-12)));
            }
        }
        nearest(original, found)
    }

    /// Values with the digits that go into a file.
    #[must_use]
    pub fn rounded(&self, values: &[f64]) -> Vec<f64> {
        let moves = self.moves.iter().zip(values);
        moves.map(|(moved, &value)| moved.rounded(value)).collect()
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
            let composition = self.composition(recipe, &values)?;
            let condition = self.condition(recipe, &composition);
            manuscript.set_composition(&recipe.selection, &recipe.material, &condition);
        }
        Ok(manuscript.text())
    }

    /// A composition in the terms of the file.
    fn condition(&self, recipe: &Recipe, composition: &Composition) -> Condition {
        let formula = || Condition::Formula(rounded_formula(composition));
        let Form::Prescribed { gap, strain } = recipe.form else {
            return formula();
        };
        let (gap_nm, in_plane) = self.gap_and_strain(composition);
        let moves = |quantity: Quantity| recipe.moved.iter().any(|(_, it)| *it == quantity);
        // A ternary asked for by its gap has no strain to write, and the other way round.
        if (moves(Quantity::Gap) && !gap) || (moves(Quantity::Strain) && !strain) {
            return formula();
        }
        let back = solve_composition(
            self.parameters,
            &recipe.original.elements(),
            self.substrate_lattice_nm,
            gap.then_some(gap_nm),
            strain.then_some(in_plane),
        );
        if !back.is_ok_and(|back| distance(&back, composition) < 1e-4) {
            return formula();
        }
        let strain_stays = matches!(recipe.held, Held::Strain(_));
        let gap_stays = matches!(recipe.held, Held::Gap(_));
        let round = |value: f64, per_unit: f64| (value * per_unit).round() / per_unit;
        Condition::Prescription {
            gap_nm: (gap && !gap_stays).then(|| round(gap_nm, 1e4)),
            tensile_percent: (strain && !strain_stays).then(|| round(100.0 * in_plane, 1e5)),
        }
    }
}

impl Recipe {
    fn giving_way(&self) -> String {
        let name = &self.material;
        let shares: Vec<&str> = self
            .moved
            .iter()
            .filter_map(|(_, quantity)| match quantity {
                Quantity::Share(element) => Some(element.symbol()),
                _ => None,
            })
            .collect();
        let others = || {
            let moved = |element: &Element| shares.contains(&element.symbol());
            let sublattices: Vec<bool> = self
                .moved
                .iter()
                .filter_map(|(_, quantity)| match quantity {
                    Quantity::Share(element) => Some(element.is_group_iii()),
                    _ => None,
                })
                .collect();
            let others: Vec<&str> = self
                .original
                .elements()
                .iter()
                .filter(|element| !moved(element) && sublattices.contains(&element.is_group_iii()))
                .map(Element::symbol)
                .collect();
            others.join(" and ")
        };
        match self.held {
            Held::Strain(strain) => {
                let percent = 100.0 * strain.abs();
                let sense = if strain < 0.0 {
                    "compressive"
                } else {
                    "tensile"
                };
                if percent < 5e-4 {
                    format!("{name}: stays matched to the substrate; the other shares give way")
                } else {
                    format!(
                        "{name}: its strain stays {percent:.3} % {sense}; the other shares give way"
                    )
                }
            }
            Held::Gap(gap_nm) => {
                format!("{name}: its gap stays {gap_nm:.1} nm; the composition gives way")
            }
            Held::Ratio => format!(
                "{name}: {} gives way to {}, the others in their present ratio",
                others(),
                shares.join(" and ")
            ),
            Held::Nothing if shares.is_empty() => {
                format!("{name}: the composition gives way")
            }
            Held::Nothing => format!("{name}: {} gives way", others()),
        }
    }
}

impl fmt::Display for Move {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        formatter.write_str(&self.key())
    }
}

/// What stays while the moves of a recipe do.
fn held(
    recipe: &Recipe,
    parameters: &Parameters,
    substrate_lattice_nm: f64,
) -> Result<Held, Immovable> {
    let elements = recipe.original.elements();
    let free = elements.free_fractions();
    let asked = recipe.moved.len();
    let moves = |wanted: Quantity| recipe.moved.iter().any(|(_, it)| *it == wanted);
    let (strain, gap) = (moves(Quantity::Strain), moves(Quantity::Gap));
    let shares = recipe.moved.iter().filter_map(|(_, it)| match it {
        Quantity::Share(element) => Some(*element),
        _ => None,
    });
    let of_sublattice = |group_iii: bool| {
        let moved = shares
            .clone()
            .filter(|it| it.is_group_iii() == group_iii)
            .count();
        let present = elements
            .iter()
            .filter(|it| it.is_group_iii() == group_iii)
            .count();
        (moved, present)
    };
    let sublattices = [true, false].map(of_sublattice);
    let crowded = sublattices
        .iter()
        .any(|&(moved, present)| moved > 0 && moved >= present);
    if asked > free || crowded {
        return Err(Immovable::TooMany {
            name: recipe.material.clone(),
            family: recipe.original.family(),
            free: match free {
                0 => "no fraction".to_owned(),
                1 => "one fraction".to_owned(),
                more => format!("{more} fractions"),
            },
            asked,
        });
    }
    let (gap_nm, in_plane) = gap_and_strain(parameters, substrate_lattice_nm, &recipe.original);
    if strain || gap {
        if free > 2 {
            return Err(Immovable::TooOpen {
                name: recipe.material.clone(),
                family: recipe.original.family(),
            });
        }
        return Ok(match (asked < free, strain) {
            (false, _) => Held::Nothing,
            (true, true) => Held::Gap(gap_nm),
            (true, false) => Held::Strain(in_plane),
        });
    }
    if free == 2 && asked == 1 && matches!(recipe.form, Form::Prescribed { strain: true, .. }) {
        return Ok(Held::Strain(in_plane));
    }
    let leaves_a_ratio = sublattices
        .iter()
        .any(|&(moved, present)| moved > 0 && present - moved > 1);
    Ok(if leaves_a_ratio {
        Held::Ratio
    } else {
        Held::Nothing
    })
}

fn check_bounds(wanted: &Move) -> Result<(), Immovable> {
    let (lowest, highest) = match wanted.quantity {
        Quantity::Thickness | Quantity::Gap => (150.0, 20_000.0),
        Quantity::Share(_) => (0.0, 1.0),
        Quantity::Strain => (-5.0, 5.0),
    };
    within(wanted, lowest, highest)
}

fn within(wanted: &Move, lowest: f64, highest: f64) -> Result<(), Immovable> {
    if wanted.from >= lowest && wanted.to <= highest && wanted.from < wanted.to {
        return Ok(());
    }
    Err(Immovable::Bounds {
        key: wanted.key(),
        from: wanted.from,
        to: wanted.to,
        lowest,
        highest,
    })
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

fn lattice_nm(parameters: &Parameters, substance: &Substance) -> f64 {
    match substance {
        Substance::Alloy(composition) => {
            parameters
                .crystal(composition, PRESCRIPTION_K, Offsets::Table)
                .lattice_nm
        }
        Substance::Own { crystal, .. } => crystal.lattice_nm,
    }
}

fn gap_and_strain(
    parameters: &Parameters,
    substrate_lattice_nm: f64,
    composition: &Composition,
) -> (f64, f64) {
    let edges = parameters
        .crystal(composition, PRESCRIPTION_K, Offsets::Table)
        .on(substrate_lattice_nm);
    (wavelength_nm(edges.gap_ev()), edges.in_plane_strain)
}

fn distance(a: &Composition, b: &Composition) -> f64 {
    Element::ALL
        .into_iter()
        .map(|element| (a.fraction(element) - b.fraction(element)).abs())
        .fold(0.0, f64::max)
}

/// Of several compositions the one nearest to what the file has.
fn nearest(original: &Composition, found: Vec<Composition>) -> Result<Composition, Impossible> {
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
fn with_shares(
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
fn line_of_share(
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

/// The formula with six decimals, each sublattice adding up to 1 exactly.
fn rounded_formula(composition: &Composition) -> String {
    const PARTS: f64 = 1e6;
    let mut formula = String::new();
    for group_iii in [true, false] {
        let present: Vec<Element> = composition
            .elements()
            .iter()
            .filter(|it| it.is_group_iii() == group_iii)
            .collect();
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
