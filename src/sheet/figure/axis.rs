//! From numbers to places along an axis, and the round numbers at which it has ticks.

use super::numerals::{decade, factored_exponent, label, multiple, power_of_ten, ten_to};

/// How values are spread along an axis.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Scale {
    /// Equal differences are equally long.
    #[default]
    Linear,
    /// Equal ratios are equally long; only positive values have a place.
    Logarithmic,
}

/// Values beyond this are treated as if they did not exist: their differences would overflow.
const LARGEST: f64 = 1e250;
/// Values this close to zero have no place on a logarithmic axis.
const SMALLEST_LOGARITHMIC: f64 = 1e-250;
/// A span narrower than this part of its values cannot be labelled; it is widened.
const NARROWEST_SHARE: f64 = 1e-9;
/// How far outside a span a place may lie, in lengths of the span: enough to draw a line that
/// leaves the picture, small enough to print.
const FARTHEST: f64 = 1e4;

/// The values from one end of an axis to the other, `from < to`, both finite.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Span {
    pub(crate) from: f64,
    pub(crate) to: f64,
    pub(crate) scale: Scale,
}

impl Span {
    /// The span between two values in either order; widened if they are (nearly) equal.
    fn between(a: f64, b: f64, scale: Scale) -> Self {
        let (mut from, mut to) = (a.min(b), a.max(b));
        match scale {
            Scale::Linear => {
                let size = from.abs().max(to.abs());
                if to - from <= size * NARROWEST_SHARE || to - from < 1.0 / LARGEST {
                    let half = if size < 1.0 / LARGEST {
                        0.5
                    } else {
                        size * 0.05
                    };
                    (from, to) = (from - half, to + half);
                }
            }
            Scale::Logarithmic => {
                if to / from < 1.0 + 1e-6 {
                    (from, to) = (from / 1.5, to * 1.5);
                }
            }
        }
        Self { from, to, scale }
    }

    /// The span as asked for, if its ends have a place on such an axis.
    pub(crate) fn fixed(from: f64, to: f64, scale: Scale) -> Option<Self> {
        let possible = |value: f64| placeable(value, scale);
        (possible(from) && possible(to)).then(|| Self::between(from, to, scale))
    }

    /// The span that holds all values, with a little air at both ends; a span of its own choice if
    /// none of the values has a place.
    pub(crate) fn around(values: impl Iterator<Item = f64>, scale: Scale, air: f64) -> Self {
        let ends = values.filter(|value| placeable(*value, scale)).fold(
            None,
            |ends: Option<(f64, f64)>, value| {
                Some(ends.map_or((value, value), |(low, high)| {
                    (low.min(value), high.max(value))
                }))
            },
        );
        let Some((low, high)) = ends else {
            return match scale {
                Scale::Linear => Self {
                    from: 0.0,
                    to: 1.0,
                    scale,
                },
                Scale::Logarithmic => Self {
                    from: 1.0,
                    to: 10.0,
                    scale,
                },
            };
        };
        let bare = Self::between(low, high, scale);
        if low < high {
            let (mut from, mut to) = (bare.value(-air), bare.value(1.0 + air));
            if scale == Scale::Linear {
                // Data that touch zero or end there keep it at the edge.
                from = if low >= 0.0 { from.max(0.0) } else { from };
                to = if high <= 0.0 { to.min(0.0) } else { to };
            }
            Self::between(from, to, scale)
        } else {
            bare
        }
    }

    /// Where a value lies, 0 at `from` and 1 at `to`; none if it has no place.
    pub(crate) fn place(self, value: f64) -> Option<f64> {
        if !placeable(value, self.scale) {
            return None;
        }
        let place = match self.scale {
            Scale::Linear => (value - self.from) / (self.to - self.from),
            Scale::Logarithmic => (value.ln() - self.from.ln()) / (self.to.ln() - self.from.ln()),
        };
        (!place.is_nan()).then(|| place.clamp(-FARTHEST, FARTHEST))
    }

    /// The value at a place, the inverse of [`Span::place`].
    pub(crate) fn value(self, place: f64) -> f64 {
        match self.scale {
            Scale::Linear => self.from + (self.to - self.from) * place,
            Scale::Logarithmic => (self.from.ln() + (self.to.ln() - self.from.ln()) * place).exp(),
        }
    }

    /// The span from the lower end of either to the upper end of either; none if their scales differ.
    pub(crate) fn joined(self, other: Self) -> Option<Self> {
        (self.scale == other.scale).then_some(Self {
            from: self.from.min(other.from),
            to: self.to.max(other.to),
            scale: self.scale,
        })
    }

    fn holds(self, value: f64) -> bool {
        self.place(value)
            .is_some_and(|place| (-1e-9..=1.0 + 1e-9).contains(&place))
    }
}

/// Whether a value has a place on an axis of this kind.
fn placeable(value: f64, scale: Scale) -> bool {
    match scale {
        Scale::Linear => value.abs() <= LARGEST,
        Scale::Logarithmic => (SMALLEST_LOGARITHMIC..=LARGEST).contains(&value),
    }
}

/// A value at which an axis has a tick, and what is written there; a small tick has no label.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Tick {
    pub(crate) value: f64,
    pub(crate) label: Option<String>,
}

/// The ticks of an axis; labels are in units of ten to the `exponent`, which the axis label says.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct Ticks {
    pub(crate) exponent: i32,
    pub(crate) ticks: Vec<Tick>,
}

impl Ticks {
    /// The ticks that have a label.
    pub(crate) fn labelled(&self) -> impl Iterator<Item = (f64, &str)> {
        self.ticks
            .iter()
            .filter_map(|tick| Some((tick.value, tick.label.as_deref()?)))
    }
}

/// Most and fewest intervals that a linear axis is cut into.
const MOST_INTERVALS: u32 = 9;

/// The densest of the customary sets of ticks (steps of 1, 2 or 5 times a power of ten) of which
/// `fits` says that its labels have room; the sparsest if none fits.
pub(crate) fn ticks(span: Span, fits: impl Fn(&Ticks) -> bool) -> Ticks {
    let mut sparsest = Ticks::default();
    for candidate in candidates(span) {
        if candidate.labelled().next().is_none() {
            continue;
        }
        if fits(&candidate) {
            return candidate;
        }
        sparsest = candidate;
    }
    sparsest
}

/// Sets of ticks, from dense to sparse.
fn candidates(span: Span) -> Vec<Ticks> {
    let linear = |from_intervals: u32| {
        let mut sets: Vec<Ticks> = Vec::new();
        for intervals in (1..=from_intervals).rev() {
            let set = linear_ticks(span, intervals);
            if sets.last() != Some(&set) {
                sets.push(set);
            }
        }
        sets
    };
    match span.scale {
        Scale::Linear => linear(MOST_INTERVALS),
        // Less than a third of a decade holds no two round mantissas: then equal steps do better.
        Scale::Logarithmic if span.to / span.from < 2.2 => linear(6),
        Scale::Logarithmic => logarithmic_ticks(span),
    }
}

/// Steps of 1, 2 or 5 times a power of ten, at most `intervals` of them.
fn linear_ticks(span: Span, intervals: u32) -> Ticks {
    let least_step = (span.to - span.from) / f64::from(intervals);
    let mut power = decade(least_step);
    let mantissa = least_step / ten_to(power);
    let (mut unit, mut parts) = (10, 5);
    for (round, minor) in [(1, 5), (2, 4), (5, 5)] {
        if mantissa <= f64::from(round) * (1.0 + 1e-9) {
            (unit, parts) = (round, minor);
            break;
        }
    }
    if unit == 10 {
        (unit, power) = (1, power + 1);
    }
    let exponent = factored_exponent(span.from.abs().max(span.to.abs()));
    let step = f64::from(unit) * ten_to(power);
    let first = (span.from / step).floor();
    // An axis holds at most `intervals` steps and a part of one at either end.
    let ticks = (0..=(intervals + 2) * parts)
        .filter_map(|count| {
            let steps = first + f64::from(count / parts);
            let value = multiple(steps * f64::from(unit), power)
                + step * f64::from(count % parts) / f64::from(parts);
            let label = (count % parts == 0).then(|| label(value, power, exponent));
            span.holds(value).then_some(Tick { value, label })
        })
        .collect();
    Ticks { exponent, ticks }
}

/// Decades, or round mantissas within decades.
fn logarithmic_ticks(span: Span) -> Vec<Ticks> {
    let (first, last) = (decade(span.from), decade(span.to));
    let decades = last - first + 1;
    // Within three decades the power is said once, in the axis label, and the first decade is 1.
    let few_decades = span.to / span.from <= 1001.0;
    let first_decade = (first..=last).find(|power| span.holds(ten_to(*power)));
    let exponent = if few_decades {
        factored_exponent(first_decade.map_or(span.from, ten_to))
    } else {
        0
    };
    let written = |mantissa: u8, power: i32| {
        if few_decades {
            label(multiple(f64::from(mantissa), power), power, exponent)
        } else if (0..=3).contains(&first) && (0..=4).contains(&last) {
            label(multiple(f64::from(mantissa), power), power, 0)
        } else if mantissa == 1 {
            power_of_ten(power)
        } else {
            format!("{mantissa}×{}", power_of_ten(power))
        }
    };
    let mut sets: Vec<Ticks> = Vec::new();
    let rows: [&[u8]; 4] = [
        &[1, 2, 3, 4, 5, 6, 7, 8, 9],
        &[1, 2, 3, 5],
        &[1, 2, 5],
        &[1],
    ];
    for (row, labelled) in rows.iter().enumerate() {
        // Labels between the decades crowd an axis of many.
        if (row < 3 && decades > 4) || (row == 0 && span.to / span.from > 11.0) {
            continue;
        }
        let mut ticks = Vec::new();
        for power in first..=last {
            let mantissas = if decades > 12 { 1..=1 } else { 1..=9 };
            for mantissa in mantissas {
                let value = multiple(f64::from(mantissa), power);
                let label = labelled
                    .contains(&mantissa)
                    .then(|| written(mantissa, power));
                if span.holds(value) {
                    ticks.push(Tick { value, label });
                }
            }
        }
        sets.push(Ticks { exponent, ticks });
    }
    for stride in [2, 3, 5, 10, 20, 50, 100, 200] {
        let ticks = (first..=last)
            .map(|power| {
                let label = (power.rem_euclid(stride) == 0).then(|| written(1, power));
                Tick {
                    value: ten_to(power),
                    label,
                }
            })
            .filter(|tick| span.holds(tick.value) && (tick.label.is_some() || decades <= 40))
            .collect();
        sets.push(Ticks { exponent, ticks });
    }
    sets
}

/// Ticks of a second scale along the same axis: round values of `mapped(value)`, at the values
/// where it takes them. `mapped` must be continuous and monotone over the span; if it is not
/// finite at both ends there are no ticks.
pub(crate) fn mapped_ticks(
    span: Span,
    mapped: impl Fn(f64) -> f64,
    fits: impl Fn(&Ticks) -> bool,
) -> Ticks {
    let Some(image) = Span::fixed(mapped(span.from), mapped(span.to), Scale::Linear) else {
        return Ticks::default();
    };
    let falls = mapped(span.from) > mapped(span.to);
    let back = |ticks: &Ticks| {
        let ticks = ticks.ticks.iter().map(|tick| Tick {
            value: inverse(span, &mapped, falls, tick.value),
            label: tick.label.clone(),
        });
        ticks.collect::<Vec<_>>()
    };
    let chosen = ticks(image, |candidate| {
        fits(&Ticks {
            exponent: candidate.exponent,
            ticks: back(candidate),
        })
    });
    Ticks {
        exponent: chosen.exponent,
        ticks: back(&chosen),
    }
}

/// The value of the span at which a monotone function takes a target, by bisection.
fn inverse(span: Span, mapped: impl Fn(f64) -> f64, falls: bool, target: f64) -> f64 {
    let (mut low, mut high) = (0.0, 1.0);
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if (mapped(span.value(middle)) < target) == falls {
            high = middle;
        } else {
            low = middle;
        }
    }
    span.value(0.5 * (low + high))
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn labels(from: f64, to: f64, scale: Scale, most: usize) -> Vec<String> {
        let span = Span::fixed(from, to, scale).expect("a span");
        let ticks = ticks(span, |ticks| ticks.labelled().count() <= most);
        ticks
            .labelled()
            .map(|(_, label)| label.to_owned())
            .collect()
    }

    #[test]
    fn steps_are_one_two_or_five() {
        assert_eq!(
            labels(0.0, 1.0, Scale::Linear, 6),
            ["0.0", "0.2", "0.4", "0.6", "0.8", "1.0"]
        );
        assert_eq!(
            labels(0.71, 0.94, Scale::Linear, 6),
            ["0.75", "0.80", "0.85", "0.90"]
        );
        assert_eq!(
            labels(-700.0, 1600.0, Scale::Linear, 6),
            ["−500", "0", "500", "1000", "1500"]
        );
        assert_eq!(
            labels(0.0, 25000.0, Scale::Linear, 3),
            ["0", "10\u{202f}000", "20\u{202f}000"]
        );
    }

    #[test]
    fn large_and_small_powers_go_into_the_axis_label() {
        let span = Span::fixed(0.0, 5e18, Scale::Linear).expect("a span");
        let found = ticks(span, |ticks| ticks.labelled().count() <= 6);
        assert_eq!(found.exponent, 18);
        let written: Vec<_> = found.labelled().map(|(_, label)| label).collect();
        assert_eq!(written, ["0", "1", "2", "3", "4", "5"]);
    }

    #[test]
    fn logarithmic_axes_show_mantissas_or_decades() {
        assert_eq!(
            labels(1e18, 5e18, Scale::Logarithmic, 4),
            ["1", "2", "3", "5"]
        );
        assert_eq!(
            labels(1e15, 1e20, Scale::Logarithmic, 8),
            ["10¹⁵", "10¹⁶", "10¹⁷", "10¹⁸", "10¹⁹", "10²⁰"]
        );
        assert_eq!(
            labels(8e17, 1.2e19, Scale::Logarithmic, 4),
            ["1", "2", "5", "10"]
        );
        assert_eq!(labels(1e-12, 1e12, Scale::Logarithmic, 5).len(), 5);
        assert_eq!(
            labels(2.1, 2.9, Scale::Logarithmic, 5),
            ["2.2", "2.4", "2.6", "2.8"]
        );
    }

    /// Photon energy 0.80 to 1.00 eV is wavelength 1239.84/E, 1549.8 to 1239.84 nm.
    #[test]
    fn a_second_scale_has_round_values_of_its_own() {
        let span = Span::fixed(0.80, 1.00, Scale::Linear).expect("a span");
        let wavelength_nm = crate::units::wavelength_nm;
        let found = mapped_ticks(span, wavelength_nm, |ticks| ticks.labelled().count() <= 4);
        let written: Vec<_> = found.labelled().collect();
        assert_eq!(
            written.iter().map(|(_, label)| *label).collect::<Vec<_>>(),
            ["1300", "1400", "1500"]
        );
        for (photon_ev, label) in written {
            let nm: f64 = label.parse().expect("a number");
            assert!((wavelength_nm(photon_ev) - nm).abs() < 1e-6);
        }
        assert!(mapped_ticks(span, |_| f64::NAN, |_| true).ticks.is_empty());
    }

    #[test]
    fn places_without_meaning_have_none() {
        let span = Span::around([1.0, f64::NAN, 3.0].into_iter(), Scale::Linear, 0.0);
        assert_eq!((span.from, span.to), (1.0, 3.0));
        assert_eq!(span.place(f64::INFINITY), None);
        let span = Span::around([0.0, 2.0].into_iter(), Scale::Linear, 0.05);
        assert_eq!((span.from, span.to), (0.0, 2.1));
        let span = Span::around([0.0, -2.0].into_iter(), Scale::Logarithmic, 0.05);
        assert_eq!((span.from, span.to), (1.0, 10.0));
        assert_eq!(span.place(0.0), None);
        assert_eq!(Span::fixed(0.0, 1.0, Scale::Logarithmic), None);
    }

    fn any_scale() -> impl Strategy<Value = Scale> {
        prop_oneof![Just(Scale::Linear), Just(Scale::Logarithmic)]
    }

    proptest! {
        #[test]
        fn ticks_lie_inside_rise_and_read_back(
            a in any::<f64>(), b in any::<f64>(), scale in any_scale(), most in 2..9usize,
        ) {
            let Some(span) = Span::fixed(a, b, scale) else { return Ok(()) };
            prop_assert!(span.from < span.to);
            let found = ticks(span, |ticks| ticks.labelled().count() <= most);
            prop_assert!(found.ticks.len() < 200);
            for pair in found.ticks.windows(2) {
                prop_assert!(pair[0].value < pair[1].value, "{:?}", pair);
            }
            let written: Vec<_> = found.labelled().collect();
            for pair in written.windows(2) {
                prop_assert!(pair[0].1 != pair[1].1, "{written:?}");
            }
            for (value, label) in written {
                prop_assert!(span.holds(value));
                prop_assert!(label.chars().count() < 20, "{}", label);
            }
        }

        #[test]
        fn ordinary_spans_have_ticks(from in -1e4..1e4f64, width in 1e-3..1e4f64) {
            let span = Span::fixed(from, from + width, Scale::Linear).expect("finite");
            let found = ticks(span, |ticks| ticks.labelled().count() <= 6);
            let written: Vec<_> = found.labelled().collect();
            prop_assert!((2..=6).contains(&written.len()), "{written:?}");
            for (value, label) in written {
                let read: f64 = label.replace('−', "-").replace('\u{202f}', "").parse().expect("a number");
                prop_assert!((read * ten_to(found.exponent) - value).abs() <= 1e-9 * value.abs().max(width));
            }
        }

        #[test]
        fn places_and_values_are_inverse(
            from in 1e-3..1e3f64, width in 1e-3..1e3f64, place in 0.0..1.0f64, scale in any_scale(),
        ) {
            let span = Span::fixed(from, from + width, scale).expect("finite");
            let back = span.place(span.value(place)).expect("inside");
            prop_assert!((back - place).abs() < 1e-6, "{back}");
        }
    }
}
