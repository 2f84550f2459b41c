//! Compositions by element.

use std::fmt;

/// An element that an alloy may hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Element {
    /// Aluminium.
    Al,
    /// Gallium.
    Ga,
    /// Indium.
    In,
    /// Phosphorus.
    P,
    /// Arsenic.
    As,
    /// Antimony.
    Sb,
}

impl Element {
    /// Every element, in the order in which formulas are written.
    pub const ALL: [Self; 6] = [Self::Al, Self::Ga, Self::In, Self::P, Self::As, Self::Sb];

    /// The chemical symbol.
    #[must_use]
    pub fn symbol(self) -> &'static str {
        match self {
            Self::Al => "Al",
            Self::Ga => "Ga",
            Self::In => "In",
            Self::P => "P",
            Self::As => "As",
            Self::Sb => "Sb",
        }
    }

    /// The element of a symbol.
    #[must_use]
    pub fn from_symbol(symbol: &str) -> Option<Self> {
        Self::ALL
            .into_iter()
            .find(|element| element.symbol() == symbol)
    }

    /// Whether it sits on the sublattice of Al, Ga and In.
    #[must_use]
    pub fn is_group_iii(self) -> bool {
        matches!(self, Self::Al | Self::Ga | Self::In)
    }

    /// Its place in the fractions of its sublattice.
    pub(super) fn place(self) -> usize {
        match self {
            Self::Al | Self::P => 0,
            Self::Ga | Self::As => 1,
            Self::In | Self::Sb => 2,
        }
    }
}

/// A set of elements with at least one on each sublattice, whatever their fractions: `AlGaInAs`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Elements {
    /// Whether Al, Ga, In are in it.
    pub group_iii: [bool; 3],
    /// Whether P, As, Sb are in it.
    pub group_v: [bool; 3],
}

impl Elements {
    /// Those that are in the set, in the order in which formulas are written.
    pub fn iter(&self) -> impl Iterator<Item = Element> + use<> {
        let set = *self;
        Element::ALL
            .into_iter()
            .filter(move |&element| set.contains(element))
    }

    /// Whether an element is in the set.
    #[must_use]
    pub fn contains(&self, element: Element) -> bool {
        if element.is_group_iii() {
            self.group_iii[element.place()]
        } else {
            self.group_v[element.place()]
        }
    }

    /// Whether every element of `self` is in `other` too.
    #[must_use]
    pub fn is_within(&self, other: &Self) -> bool {
        self.iter().all(|element| other.contains(element))
    }

    /// How many fractions may be chosen freely: one less than the elements of each sublattice.
    #[must_use]
    pub fn free_fractions(&self) -> usize {
        self.iter().count() - 2
    }
}

impl fmt::Display for Elements {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        for element in self.iter() {
            formatter.write_str(element.symbol())?;
        }
        Ok(())
    }
}

/// The composition of a III-V alloy: fractions of Al, Ga, In on one sublattice and of P, As, Sb
/// on the other, each summing to 1.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Composition {
    /// Fractions of Al, Ga, In.
    pub group_iii: [f64; 3],
    /// Fractions of P, As, Sb.
    pub group_v: [f64; 3],
}

impl Composition {
    /// The compound of one element of each sublattice.
    pub(super) fn binary(cation: usize, anion: usize) -> Self {
        let mut compound = Self {
            group_iii: [0.0; 3],
            group_v: [0.0; 3],
        };
        compound.group_iii[cation] = 1.0;
        compound.group_v[anion] = 1.0;
        compound
    }

    /// The straight mixture (1 − `share`) of `self` and `share` of `other`, on both sublattices.
    #[must_use]
    pub fn towards(&self, other: &Self, share: f64) -> Self {
        let mix = |a: [f64; 3], b: [f64; 3]| {
            std::array::from_fn(|element| (1.0 - share) * a[element] + share * b[element])
        };
        Self {
            group_iii: mix(self.group_iii, other.group_iii),
            group_v: mix(self.group_v, other.group_v),
        }
    }

    /// Fraction of an element on its sublattice.
    #[must_use]
    pub fn fraction(&self, element: Element) -> f64 {
        if element.is_group_iii() {
            self.group_iii[element.place()]
        } else {
            self.group_v[element.place()]
        }
    }

    /// The same with another fraction of an element, the others as they were.
    #[must_use]
    pub fn with_fraction(mut self, element: Element, fraction: f64) -> Self {
        let sublattice = if element.is_group_iii() {
            &mut self.group_iii
        } else {
            &mut self.group_v
        };
        sublattice[element.place()] = fraction;
        self
    }

    /// The elements present.
    #[must_use]
    pub fn elements(&self) -> Elements {
        Elements {
            group_iii: self.group_iii.map(|fraction| fraction > 0.0),
            group_v: self.group_v.map(|fraction| fraction > 0.0),
        }
    }

    /// The name without fractions: `AlGaInAs`.
    #[must_use]
    pub fn family(&self) -> String {
        self.elements().to_string()
    }

    /// Whether it holds no element but these.
    #[must_use]
    pub fn is_within(&self, elements: &[Element]) -> bool {
        self.elements()
            .iter()
            .all(|element| elements.contains(&element))
    }
}
