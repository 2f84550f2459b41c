//! Every root of a function that bends, jumps, and does not exist everywhere.
//!
//! A function is looked at on an even grid, closer where it bends; the ends of where it exists are
//! found by bisection and its turning points by golden sections. Between two points looked at it is
//! then taken to be monotonic: what is left to miss is a pair of roots around a turn narrower than
//! the closest look. A root counts if the function is small there: a sign that changes at a jump is
//! none.

use super::roots::bracketed_root;
use rayon::prelude::*;

/// How a function is looked at.
#[derive(Clone, Copy, Debug)]
pub struct Look {
    /// Even points to begin with.
    pub points: usize,
    /// How often an interval may be halved where the function bends.
    pub halvings: u32,
    /// Size below which a value counts as zero.
    pub tolerance: f64,
}

/// A function as it was found to run.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Survey {
    /// Places looked at, rising, with the value where there is one.
    pub points: Vec<(f64, Option<f64>)>,
    /// Roots, rising.
    pub roots: Vec<f64>,
    /// Places where the sign changes at a jump.
    pub jumps: Vec<f64>,
}

/// Looks at a function between two ends.
pub fn survey(
    function: impl Fn(f64) -> Option<f64> + Sync,
    (low, high): (f64, f64),
    look: &Look,
) -> Survey {
    let count = look.points.max(3);
    let even: Vec<f64> = (0..count)
        .map(|at| low + (high - low) * at as f64 / (count - 1) as f64)
        .collect();
    let mut points = valued(&function, even);
    let least = (high - low) / (count as f64 * f64::from(1u32 << look.halvings.min(20)));
    for _ in 0..look.halvings {
        let closer = places_of_bends(&points, look.tolerance, least);
        if closer.is_empty() {
            break;
        }
        insert(&mut points, valued(&function, closer));
    }
    let ends = ends_of_existence(&function, &points);
    insert(&mut points, ends);
    let turns = turning_points(&function, &points);
    insert(&mut points, turns);
    let (roots, jumps) = roots(&function, &points, look.tolerance);
    Survey {
        points,
        roots,
        jumps,
    }
}

type Points = Vec<(f64, Option<f64>)>;

fn valued(function: impl Fn(f64) -> Option<f64> + Sync, places: Vec<f64>) -> Points {
    places
        .into_par_iter()
        .map(|at| (at, function(at).filter(|value| value.is_finite())))
        .collect()
}

fn insert(points: &mut Points, more: Points) {
    points.extend(more);
    points.sort_by(|a, b| a.0.total_cmp(&b.0));
    points.dedup_by(|a, b| a.0.total_cmp(&b.0).is_eq());
}

/// Middles of the intervals at which the function bends by more than a fiftieth of its range.
fn places_of_bends(points: &Points, tolerance: f64, least: f64) -> Vec<f64> {
    let values = || points.iter().filter_map(|(_, value)| *value);
    let range = values().fold(f64::NEG_INFINITY, f64::max) - values().fold(f64::INFINITY, f64::min);
    let allowed = (0.02 * range).max(tolerance);
    let mut split = vec![false; points.len()];
    for at in 1..points.len().saturating_sub(1) {
        let (left, here, right) = (points[at - 1], points[at], points[at + 1]);
        let (Some(a), Some(b), Some(c)) = (left.1, here.1, right.1) else {
            continue;
        };
        let chord = a + (c - a) * (here.0 - left.0) / (right.0 - left.0);
        if (b - chord).abs() > allowed {
            split[at - 1] = true;
            split[at] = true;
        }
    }
    points
        .windows(2)
        .zip(split)
        .filter(|(pair, split)| *split && pair[1].0 - pair[0].0 > 1.5 * least)
        .map(|(pair, _)| 0.5 * (pair[0].0 + pair[1].0))
        .collect()
}

/// The last places at which the function exists, next to where it does not.
fn ends_of_existence(function: impl Fn(f64) -> Option<f64> + Sync, points: &Points) -> Points {
    let span = points.last().map_or(0.0, |it| it.0) - points.first().map_or(0.0, |it| it.0);
    points
        .par_windows(2)
        .filter(|pair| pair[0].1.is_some() != pair[1].1.is_some())
        .flat_map_iter(|pair| {
            let (mut inside, mut outside) = if pair[0].1.is_some() {
                (pair[0], pair[1])
            } else {
                (pair[1], pair[0])
            };
            while (inside.0 - outside.0).abs() > 1e-6 * span {
                let middle = 0.5 * (inside.0 + outside.0);
                let value = function(middle).filter(|value| value.is_finite());
                if value.is_some() {
                    inside = (middle, value);
                } else {
                    outside = (middle, None);
                }
            }
            [inside, outside]
        })
        .collect()
}

/// Places next to which the function comes nearest to zero without a change of sign: between their
/// neighbours it may turn, and cross zero twice.
fn turning_points(function: impl Fn(f64) -> Option<f64> + Sync, points: &Points) -> Points {
    (0..points.len())
        .into_par_iter()
        .filter_map(|index| {
            let here = points[index].1?;
            let sign = if here > 0.0 { 1.0 } else { -1.0 };
            let beside = |index: Option<usize>| {
                let (at, value) = *points.get(index?)?;
                // A root towards a neighbour of the other sign is bracketed already.
                Some((at, sign * value?)).filter(|(_, value)| *value >= 0.0)
            };
            let neighbours = [beside(index.checked_sub(1)), beside(Some(index + 1))];
            let nearest = neighbours
                .iter()
                .flatten()
                .all(|(_, value)| *value >= sign * here);
            if here == 0.0 || !nearest || neighbours.iter().all(Option::is_none) {
                return None;
            }
            let [low, high] = neighbours.map(|it| it.map_or(points[index].0, |(at, _)| at));
            let at = least_place(
                |at| function(at).map_or(f64::INFINITY, |value| sign * value),
                low,
                high,
            );
            Some((at, function(at).filter(|value| value.is_finite())))
        })
        .collect()
}

/// Place of the least value between two points, by golden sections; the search ends early where a
/// value below zero is found, since roots are then bracketed, and where the values differ by so
/// little of their size that none between them can be zero.
fn least_place(function: impl Fn(f64) -> f64, low: f64, high: f64) -> f64 {
    let golden = 0.5 * (5f64.sqrt() - 1.0);
    let (mut left, mut right) = (low, high);
    let mut inner = [
        right - golden * (right - left),
        left + golden * (right - left),
    ];
    let mut values = inner.map(&function);
    let mut spread_before = f64::INFINITY;
    for _ in 0..30 {
        let lower = usize::from(values[1] < values[0]);
        // Two looks in a row: one alone may stand evenly on both sides of a turn.
        let spread = (values[1] - values[0]).abs();
        if values[lower] < 0.0 || values[lower] > 4.0 * spread.max(spread_before) {
            return inner[lower];
        }
        spread_before = spread;
        if lower == 0 {
            right = inner[1];
            inner = [right - golden * (right - left), inner[0]];
            values = [function(inner[0]), values[0]];
        } else {
            left = inner[0];
            inner = [inner[1], left + golden * (right - left)];
            values = [values[1], function(inner[1])];
        }
    }
    inner[usize::from(values[1] < values[0])]
}

/// Roots between neighbours of different sign, and the jumps among them.
fn roots(
    function: impl Fn(f64) -> Option<f64> + Sync,
    points: &Points,
    tolerance: f64,
) -> (Vec<f64>, Vec<f64>) {
    let span = points.last().map_or(0.0, |it| it.0) - points.first().map_or(0.0, |it| it.0);
    let is_zero = |value: f64| value.abs() <= 1e-2 * tolerance;
    let found: Vec<(f64, bool)> = points
        .par_windows(2)
        .filter_map(|pair| {
            let (a, b) = (pair[0].1?, pair[1].1?);
            if is_zero(a) || is_zero(b) || (a > 0.0) == (b > 0.0) {
                return None;
            }
            let at = bracketed_root(
                |at| match function(at) {
                    Some(value) if is_zero(value) => 0.0,
                    Some(value) => value,
                    None => f64::NAN,
                },
                pair[0].0,
                pair[1].0,
                1e-9 * span,
            );
            let small = function(at).is_some_and(|value| value.abs() <= tolerance);
            Some((at, small))
        })
        .collect();
    let mut roots: Vec<f64> = points
        .iter()
        .filter(|(_, value)| value.is_some_and(is_zero))
        .map(|(at, _)| *at)
        .collect();
    let mut jumps = Vec::new();
    for (at, small) in found {
        if small {
            roots.push(at);
        } else {
            jumps.push(at);
        }
    }
    roots.sort_by(f64::total_cmp);
    roots.dedup_by(|a, b| (*a - *b).abs() <= 1e-7 * span);
    (roots, jumps)
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    const LOOK: Look = Look {
        points: 25,
        halvings: 3,
        tolerance: 1e-3,
    };

    fn close(got: &[f64], want: &[f64]) -> bool {
        got.len() == want.len() && got.iter().zip(want).all(|(a, b)| (a - b).abs() < 1e-5)
    }

    proptest! {
        #![proptest_config(ProptestConfig { rng_seed: proptest::test_runner::RngSeed::Fixed(1), failure_persistence: None, ..ProptestConfig::default() })]
        /// Polynomials with roots planted at random, some pairs close together.
        #[test]
        fn every_planted_root_is_found(
            mut planted in prop::collection::vec(0.0f64..1.0, 0..5),
            scale in 1.0f64..100.0,
        ) {
            planted.sort_by(f64::total_cmp);
            planted.dedup_by(|a, b| *a - *b < 0.01);
            let survey = survey(
                |x| Some(1e4 * scale * planted.iter().map(|root| x - root).product::<f64>()),
                (0.0, 1.0),
                &LOOK,
            );
            prop_assert!(close(&survey.roots, &planted), "{:?} {:?}", survey.roots, planted);
        }
    }

    #[test]
    fn roots_around_a_turn_between_two_points_are_found() {
        // Both within 0.02, where the even grid has a step of 0.04.
        let f = |x: f64| Some(100.0 * ((x - 0.51).powi(2) - 1e-4));
        let survey = survey(f, (0.0, 1.0), &LOOK);
        assert!(close(&survey.roots, &[0.5, 0.52]), "{:?}", survey.roots);
    }

    #[test]
    fn roots_around_a_kink_between_two_points_are_found() {
        // Where two levels change places a wavelength has a kink; one side is steeper.
        for steeper in [1.0, 3.0, 10.0] {
            let f = |x: f64| {
                let slope = if x < 0.311 { -50.0 * steeper } else { 50.0 };
                Some(slope * (x - 0.311) - 0.2)
            };
            let survey = survey(f, (0.0, 1.0), &LOOK);
            let planted = [0.311 - 0.004 / steeper, 0.315];
            assert!(close(&survey.roots, &planted), "{:?}", survey.roots);
        }
    }

    #[test]
    fn a_root_next_to_where_the_function_ends_is_found() {
        let f = |x: f64| (x < 0.7123).then_some(x - 0.7122);
        let survey = survey(f, (0.0, 1.0), &LOOK);
        assert!(close(&survey.roots, &[0.7122]), "{:?}", survey.roots);
    }

    #[test]
    fn a_jump_is_no_root() {
        let f = |x: f64| Some(if x < 0.333 { -5.0 } else { 7.0 });
        let survey = survey(f, (0.0, 1.0), &LOOK);
        assert!(survey.roots.is_empty());
        assert!(close(&survey.jumps, &[0.333]), "{:?}", survey.jumps);
    }

    #[test]
    fn roots_at_the_ends_count() {
        let survey = survey(|x| Some(x * (1.0 - x) * (x - 0.25)), (0.0, 1.0), &LOOK);
        assert!(
            close(&survey.roots, &[0.0, 0.25, 1.0]),
            "{:?}",
            survey.roots
        );
    }
}
