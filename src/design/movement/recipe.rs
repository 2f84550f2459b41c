//! A material whose composition moves: what is given, what stays, and what gives way.

use std::collections::HashMap;
use std::sync::{Mutex, PoisonError};

use super::ground::Ground;
use super::shares::{line_of_share, rounded_formula, with_shares};
use super::{Immovable, Impossible, Quantity};
use crate::materials::{Composition, Element};
use crate::structure::{Condition, Form, Manuscript, Selection};

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
pub(super) struct Recipe {
    /// Where it stands in the layers.
    pub(super) selection: Selection,
    /// Its name.
    pub(super) material: String,
    pub(super) original: Composition,
    /// Indices of the moves and what they move.
    pub(super) moved: Vec<(usize, Quantity)>,
    form: Form,
    /// The formula that the file gives it by, if it does.
    written: String,
    held: Held,
    /// Compositions found already: solving for one takes as long as a structure's levels.
    known: Mutex<HashMap<Vec<u64>, Result<Composition, Impossible>>>,
}

impl Recipe {
    /// A material of which nothing moves yet.
    pub(super) fn new(
        selection: Selection,
        material: &str,
        manuscript: &Manuscript<'_>,
        original: Composition,
    ) -> Self {
        Self {
            selection,
            material: material.to_owned(),
            original,
            moved: Vec::new(),
            form: manuscript.form(material),
            written: manuscript.formula(material).unwrap_or_default().to_owned(),
            held: Held::Nothing,
            known: Mutex::default(),
        }
    }

    /// Decides what stays while its moves do.
    pub(super) fn settle(&mut self, ground: &Ground<'_>) -> Result<(), Immovable> {
        self.held = self.what_stays(ground)?;
        Ok(())
    }

    fn what_stays(&self, ground: &Ground<'_>) -> Result<Held, Immovable> {
        let elements = self.original.elements();
        let free = elements.free_fractions();
        let asked = self.moved.len();
        let sublattices = [true, false].map(|group_iii| {
            let present = elements.iter().filter(|it| it.is_group_iii() == group_iii);
            (self.shares(group_iii).count(), present.count())
        });
        let crowded = sublattices
            .iter()
            .any(|&(moved, present)| moved > 0 && moved >= present);
        if asked > free || crowded {
            return Err(Immovable::TooMany {
                name: self.material.clone(),
                family: self.original.family(),
                free,
                asked,
            });
        }
        let (gap_nm, in_plane) = ground.gap_and_strain(&self.original);
        let (strain, gap) = (self.moves(Quantity::Strain), self.moves(Quantity::Gap));
        if strain || gap {
            if free > 2 {
                return Err(Immovable::TooOpen {
                    name: self.material.clone(),
                    family: self.original.family(),
                });
            }
            return Ok(match (asked < free, strain) {
                (false, _) => Held::Nothing,
                (true, true) => Held::Gap(gap_nm),
                (true, false) => Held::Strain(in_plane),
            });
        }
        if free == 2 && asked == 1 && matches!(self.form, Form::Prescribed { strain: true, .. }) {
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

    fn moves(&self, quantity: Quantity) -> bool {
        self.moved.iter().any(|(_, it)| *it == quantity)
    }

    /// The elements of a sublattice whose shares move.
    fn shares(&self, group_iii: bool) -> impl Iterator<Item = Element> {
        self.moved.iter().filter_map(move |(_, it)| match it {
            Quantity::Share(element) if element.is_group_iii() == group_iii => Some(*element),
            _ => None,
        })
    }

    /// The composition at some values of all moves.
    pub(super) fn composition(
        &self,
        ground: &Ground<'_>,
        values: &[f64],
    ) -> Result<Composition, Impossible> {
        let key: Vec<u64> = self
            .moved
            .iter()
            .map(|(index, _)| values[*index].to_bits())
            .collect();
        let known = || self.known.lock().unwrap_or_else(PoisonError::into_inner);
        if let Some(composition) = known().get(&key) {
            return composition.clone();
        }
        let composition = self.solved(ground, values);
        known().insert(key, composition.clone());
        composition
    }

    fn solved(&self, ground: &Ground<'_>, values: &[f64]) -> Result<Composition, Impossible> {
        let mut shares = Vec::new();
        let (mut strain, mut gap_nm) = match self.held {
            Held::Strain(held) => (Some(held), None),
            Held::Gap(held) => (None, Some(held)),
            Held::Nothing | Held::Ratio => (None, None),
        };
        for &(index, quantity) in &self.moved {
            let value = values[index];
            match quantity {
                Quantity::Share(element) => shares.push((element, value)),
                Quantity::Strain => strain = Some(0.01 * value),
                Quantity::Gap => gap_nm = Some(value),
                Quantity::Thickness => {}
            }
        }
        let original = &self.original;
        match (shares.first(), strain, gap_nm) {
            (_, None, None) => with_shares(original, &shares),
            (None, ..) => ground.with_gap_and_strain(original, gap_nm, strain),
            (Some(&(element, share)), Some(strain), _) => {
                ground.with_strain_on(&line_of_share(original, element, share)?, strain)
            }
            (Some(&(element, share)), None, Some(gap_nm)) => {
                ground.with_gap_on(&line_of_share(original, element, share)?, gap_nm, original)
            }
        }
    }

    /// A composition in the terms of the file, with the digits that a file needs.
    pub(super) fn condition(&self, ground: &Ground<'_>, composition: &Composition) -> Condition {
        let formula = || Condition::Formula(rounded_formula(composition, &self.written));
        let Form::Prescribed { gap, strain } = self.form else {
            return formula();
        };
        // A ternary asked for by its gap has no strain to write, and the other way round.
        let is_unwritable =
            (self.moves(Quantity::Gap) && !gap) || (self.moves(Quantity::Strain) && !strain);
        if is_unwritable || !ground.is_found_by(composition, gap, strain) {
            return formula();
        }
        let (gap_nm, in_plane) = ground.gap_and_strain(composition);
        let strain_stays = matches!(self.held, Held::Strain(_));
        let gap_stays = matches!(self.held, Held::Gap(_));
        Condition::Prescription {
            gap_nm: (gap && !gap_stays).then(|| Quantity::Gap.rounded(gap_nm)),
            tensile_percent: (strain && !strain_stays)
                .then(|| Quantity::Strain.rounded(100.0 * in_plane)),
        }
    }

    /// What gives way when its moves do, as a sentence.
    pub(super) fn giving_way(&self) -> String {
        let name = &self.material;
        let exchanges: Vec<String> = [true, false]
            .into_iter()
            .filter_map(|group_iii| self.exchange(group_iii))
            .collect();
        if exchanges.is_empty() {
            return match self.stays() {
                Some(stays) => format!("{name}: the composition follows; {stays}"),
                None => format!("{name}: the composition follows"),
            };
        }
        let exchanges = exchanges.join(", ");
        let adjusted: Vec<&str> = self.adjusted().map(Element::symbol).collect();
        match (self.stays(), adjusted.is_empty()) {
            (Some(stays), true) => {
                format!("{name}: {exchanges}, in the proportion in which {stays}")
            }
            (Some(stays), false) => format!(
                "{name}: {exchanges}; {} follow, so that {stays}",
                adjusted.join(" and ")
            ),
            (None, true) => format!("{name}: {exchanges}"),
            (None, false) => format!("{name}: {exchanges}; {} follow", adjusted.join(" and ")),
        }
    }

    /// Which elements of a sublattice rise at the expense of which.
    fn exchange(&self, group_iii: bool) -> Option<String> {
        let rising: Vec<Element> = self.shares(group_iii).collect();
        if rising.is_empty() {
            return None;
        }
        let elements = self.original.elements();
        let falling: Vec<&str> = elements
            .iter()
            .filter(|it| it.is_group_iii() == group_iii && !rising.contains(it))
            .map(Element::symbol)
            .collect();
        let symbols: Vec<&str> = rising.into_iter().map(Element::symbol).collect();
        let ratio = if self.held == Held::Ratio && falling.len() > 1 {
            ", whose ratio stays"
        } else {
            ""
        };
        Some(format!(
            "{} at the expense of {}{ratio}",
            symbols.join(" and "),
            falling.join(" and ")
        ))
    }

    /// Elements of a sublattice of which none is given, but which a strain or a gap moves.
    fn adjusted(&self) -> impl Iterator<Item = Element> {
        let conditions =
            self.stays().is_some() || self.moves(Quantity::Strain) || self.moves(Quantity::Gap);
        let elements = self.original.elements();
        let beside = move |element: Element| {
            let same = elements
                .iter()
                .filter(move |it| it.is_group_iii() == element.is_group_iii());
            same.count() > 1
        };
        elements.iter().filter(move |&element| {
            conditions && beside(element) && self.shares(element.is_group_iii()).count() == 0
        })
    }

    /// What stays, in words.
    fn stays(&self) -> Option<String> {
        match self.held {
            Held::Nothing | Held::Ratio => None,
            Held::Gap(gap_nm) => Some(format!("its gap stays {gap_nm:.1} nm")),
            Held::Strain(strain) if strain.abs() < 5e-6 => {
                Some("it stays matched to the substrate".to_owned())
            }
            Held::Strain(strain) => {
                let sense = if strain < 0.0 {
                    "compressive"
                } else {
                    "tensile"
                };
                let percent = 100.0 * strain.abs();
                Some(format!("its strain stays {percent:.3} % {sense}"))
            }
        }
    }
}
