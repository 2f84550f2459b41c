//! Compositions by element.

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

    /// The formula, elements in the order Al Ga In P As Sb, at most four decimals.
    #[must_use]
    pub fn formula(&self) -> String {
        String::new()
    }
}
