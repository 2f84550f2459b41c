//! Lines of compositions: all that have one lattice constant, or all of a ternary.

use super::{Composition, Elements};

/// Compositions in one parameter from 0 to 1.
#[derive(Clone, Debug)]
pub(super) enum Line {
    /// The straight mixture of two compositions.
    Straight(Composition, Composition),
    /// Two elements on each sublattice: one share runs from `from` to `to`, the other follows so
    /// that the lattice constant stays.
    Curved {
        /// Compounds `[run][follow]`: rows by the running element, columns by the following one.
        corners: [[Composition; 2]; 2],
        lattices_nm: [[f64; 2]; 2],
        lattice_nm: f64,
        from: f64,
        to: f64,
    },
}

impl Line {
    /// From end to end of a compound or a ternary.
    pub(super) fn whole(elements: Elements) -> Self {
        let corners = corners(elements);
        let last = corners.len() - 1;
        Self::Straight(corners[0], corners[last])
    }

    pub(super) fn at(&self, share: f64) -> Composition {
        match self {
            Self::Straight(from, to) => from.towards(to, share),
            Self::Curved {
                corners,
                lattices_nm,
                lattice_nm,
                from,
                to,
            } => {
                let run = from + (to - from) * share;
                let follow = following(lattices_nm, *lattice_nm, run).clamp(0.0, 1.0);
                let mix = |row: &[Composition; 2]| row[0].towards(&row[1], follow);
                mix(&corners[0]).towards(&mix(&corners[1]), run)
            }
        }
    }
}

/// The share of the following element at which the lattice constant is met.
fn following(lattices_nm: &[[f64; 2]; 2], lattice_nm: f64, run: f64) -> f64 {
    let mean = |column: usize| (1.0 - run) * lattices_nm[0][column] + run * lattices_nm[1][column];
    (lattice_nm - mean(0)) / (mean(1) - mean(0))
}

/// The compounds that elements make, cations first to last, of each the anions.
pub(super) fn corners(elements: Elements) -> Vec<Composition> {
    let places = |present: [bool; 3]| (0..3).filter(move |&place| present[place]);
    places(elements.group_iii)
        .flat_map(|cation| {
            places(elements.group_v).map(move |anion| Composition::binary(cation, anion))
        })
        .collect()
}

/// Three compounds that share an element, or two: the lattice constant is linear, and the
/// compositions of one value lie between two edges of the triangle.
pub(super) fn straight(corners: &[Composition], lattices_nm: &[f64], lattice_nm: f64) -> Line {
    let mut ends: Vec<Composition> = Vec::new();
    for second in 1..corners.len() {
        for first in 0..second {
            let (a, b) = (lattices_nm[first], lattices_nm[second]);
            let share = (lattice_nm - a) / (b - a);
            // two compounds of one lattice constant make no point but their own ends,
            // which the other edges bring in
            if (0.0..=1.0).contains(&share) {
                ends.push(corners[first].towards(&corners[second], share));
            }
        }
    }
    let first = ends.first().copied().unwrap_or(corners[0]);
    let furthest = ends
        .iter()
        .copied()
        .max_by(|a, b| distance(&first, a).total_cmp(&distance(&first, b)))
        .unwrap_or(first);
    Line::Straight(first, furthest)
}

/// Two cations and two anions: the share of one pair follows from that of the other. The pair on
/// which the lattice constant depends more follows, so that it is always defined.
pub(super) fn curved(corners: &[Composition], lattices_nm: &[f64], lattice_nm: f64) -> Line {
    // corners come as (c0 a0) (c0 a1) (c1 a0) (c1 a1)
    let l = |cation: usize, anion: usize| lattices_nm[2 * cation + anion];
    let c = |cation: usize, anion: usize| corners[2 * cation + anion];
    let by_anions = (l(0, 1) - l(0, 0)).abs().min((l(1, 1) - l(1, 0)).abs());
    let by_cations = (l(1, 0) - l(0, 0)).abs().min((l(1, 1) - l(0, 1)).abs());
    let (corners, lattices_nm) = if by_anions >= by_cations {
        (
            [[c(0, 0), c(0, 1)], [c(1, 0), c(1, 1)]],
            [[l(0, 0), l(0, 1)], [l(1, 0), l(1, 1)]],
        )
    } else {
        (
            [[c(0, 0), c(1, 0)], [c(0, 1), c(1, 1)]],
            [[l(0, 0), l(1, 0)], [l(0, 1), l(1, 1)]],
        )
    };
    // the following share is a monotone function of the running one: it stays between 0 and 1
    // on one interval, which ends where a column of compounds has the lattice constant
    let mut ends = vec![0.0, 1.0];
    for (a, b) in lattices_nm[0].into_iter().zip(lattices_nm[1]) {
        ends.push((lattice_nm - a) / (b - a));
    }
    ends.retain(|&run| {
        let follow = following(&lattices_nm, lattice_nm, run);
        (0.0..=1.0).contains(&run) && (-1e-9..=1.0 + 1e-9).contains(&follow)
    });
    Line::Curved {
        corners,
        lattices_nm,
        lattice_nm,
        from: ends.iter().copied().fold(1.0, f64::min),
        to: ends.iter().copied().fold(0.0, f64::max),
    }
}

pub(super) fn distance(a: &Composition, b: &Composition) -> f64 {
    let pairs = a.group_iii.iter().zip(&b.group_iii);
    let pairs = pairs.chain(a.group_v.iter().zip(&b.group_v));
    pairs.map(|(x, y)| (x - y).abs()).fold(0.0, f64::max)
}
