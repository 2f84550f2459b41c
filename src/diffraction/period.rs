//! The repeated part of a stack.

use crate::structure::{Layer, Role, Stack};

/// Whole periods of a stack.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Period {
    /// Index of the first layer.
    pub(super) first: usize,
    /// Layers of one period.
    pub(super) layers: usize,
    /// How many whole periods follow each other.
    pub(super) count: usize,
}

/// Whether X-rays see two layers alike.
pub(super) fn are_equal(one: &Layer, other: &Layer) -> bool {
    one.thickness_nm == other.thickness_nm
        && one.ends().map(|it| &it.substance) == other.ends().map(|it| &it.substance)
}

/// The shortest period that leads from the first well to the last, as far as it reaches beyond
/// them; `None` where wells do not repeat.
pub(super) fn of(stack: &Stack) -> Option<Period> {
    let is_well = |layer: &Layer| layer.role == Role::Well;
    let first = stack.layers.iter().position(is_well)?;
    let last = stack.layers.iter().rposition(is_well)?;
    let same = |index: usize, period: usize| {
        are_equal(&stack.layers[index], &stack.layers[index + period])
    };
    let layers = (1..=last - first).find(|&period| {
        (first..=last - period).all(|index| same(index, period))
            // Two wells of which the second is the first again, and not one well cut in two.
            && stack.layers[first..first + period].iter().any(|layer| !is_well(layer))
    })?;
    let below = (0..first)
        .rev()
        .take_while(|&index| same(index, layers))
        .count();
    let above = (last + 1..stack.layers.len())
        .take_while(|&index| same(index - layers, layers))
        .count();
    let run = last + 1 + above - (first - below);
    // Periods begin with a well where that loses none.
    let from_well = (last + 1 + above - first) / layers;
    let count = run / layers;
    Some(Period {
        first: if from_well == count {
            first
        } else {
            first - below
        },
        layers,
        count,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::materials::Parameters;
    use crate::structure::{Overrides, read};

    fn period(layers: &str) -> Option<Period> {
        let text = format!("format = 1\n[substrate]\nmaterial = \"GaAs\"\n{layers}");
        let parameters = Parameters::shipped();
        let reading = read(&text, &parameters, &Overrides::default()).expect("a sound file");
        of(&reading.stack)
    }

    fn layer(role: &str, material: &str, thickness_nm: f64) -> String {
        format!(
            "[[layers]]\nrole = \"{role}\"\nmaterial = \"{material}\"\nthickness_nm = {thickness_nm}\n"
        )
    }

    fn well() -> String {
        layer("well", "In0.2Ga0.8As", 8.0)
    }

    fn barrier(thickness_nm: f64) -> String {
        layer("barrier", "GaAs", thickness_nm)
    }

    #[test]
    fn wells_written_out_repeat_like_a_group() {
        let written_out = [
            barrier(20.0),
            well(),
            barrier(10.0),
            well(),
            barrier(10.0),
            well(),
            barrier(20.0),
        ];
        let found = period(&written_out.concat());
        let expected = Period {
            first: 1,
            layers: 2,
            count: 2,
        };
        assert_eq!(found, Some(expected));
        let group = format!(
            "{}[[layers]]\nrepeat = 3\nlayers = [{{ role = \"well\", material = \"In0.2Ga0.8As\", thickness_nm = 8 }}, {{ role = \"barrier\", material = \"GaAs\", thickness_nm = 10 }}]\n",
            barrier(20.0)
        );
        let expected = Period {
            first: 1,
            layers: 2,
            count: 3,
        };
        assert_eq!(period(&group), Some(expected));
    }

    #[test]
    fn an_outer_barrier_completes_a_period_below() {
        let stack = [
            barrier(10.0),
            well(),
            barrier(10.0),
            well(),
            layer("cap", "GaAs", 30.0),
        ];
        let expected = Period {
            first: 0,
            layers: 2,
            count: 2,
        };
        assert_eq!(period(&stack.concat()), Some(expected));
    }

    #[test]
    fn one_well_and_unlike_wells_do_not_repeat() {
        assert_eq!(
            period(&[barrier(10.0), well(), barrier(10.0)].concat()),
            None
        );
        let unlike = [
            barrier(10.0),
            well(),
            barrier(10.0),
            layer("well", "In0.2Ga0.8As", 6.0),
            barrier(10.0),
        ];
        assert_eq!(period(&unlike.concat()), None);
        let cut = [barrier(10.0), well(), well(), barrier(10.0)];
        assert_eq!(period(&cut.concat()), None);
    }
}
