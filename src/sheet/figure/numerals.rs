//! Powers of ten, and how the numbers at an axis are written.

/// Power of ten at or below a positive value.
#[expect(
    clippy::cast_possible_truncation,
    reason = "finite values have at most 309 decades"
)]
pub(crate) fn decade(value: f64) -> i32 {
    let power = value.log10().floor() as i32;
    // The logarithm of a power of ten may come out a hair low.
    if ten_to(power + 1) <= value {
        power + 1
    } else {
        power
    }
}

pub(crate) fn ten_to(power: i32) -> f64 {
    10f64.powi(power)
}

/// `count` × 10^`power`, rounded once: dividing by a power of ten is exact where multiplying by
/// its inverse is not, so that 3 × 10⁻¹ is 0.3.
pub(crate) fn multiple(count: f64, power: i32) -> f64 {
    if power < 0 && power > -300 {
        count / ten_to(-power)
    } else {
        count * ten_to(power)
    }
}

/// The power of ten that goes into the axis label when the largest value would be long to write.
pub(crate) fn factored_exponent(largest: f64) -> i32 {
    if largest > 0.0 && !(1e-3..1e5).contains(&largest) {
        decade(largest)
    } else {
        0
    }
}

/// A value in units of 10^`exponent`, with the decimals that steps of 10^`step_power` need.
pub(crate) fn label(value: f64, step_power: i32, exponent: i32) -> String {
    let decimals = usize::try_from(exponent - step_power).unwrap_or(0).min(12);
    let written = format!("{:.decimals$}", multiple(value, -exponent));
    let digits = written.trim_start_matches('-');
    let sign = if written.starts_with('-') && digits.contains(|c| ('1'..='9').contains(&c)) {
        "−"
    } else {
        ""
    };
    let (whole, fraction) = digits.split_once('.').unwrap_or((digits, ""));
    let point = if fraction.is_empty() { "" } else { "." };
    format!("{sign}{}{point}{fraction}", in_thousands(whole))
}

/// Digits in groups of three where there are five or more, held together by narrow spaces.
fn in_thousands(digits: &str) -> String {
    if digits.len() < 5 {
        return digits.to_owned();
    }
    let mut grouped = String::new();
    for (place, digit) in digits.chars().enumerate() {
        if place > 0 && (digits.len() - place).is_multiple_of(3) {
            grouped.push('\u{202f}');
        }
        grouped.push(digit);
    }
    grouped
}

/// 10ⁿ in raised figures.
pub(crate) fn power_of_ten(power: i32) -> String {
    let digits = power.to_string();
    let raised = digits.chars().map(|character| match character {
        '-' => '⁻',
        '0' => '⁰',
        '1' => '¹',
        '2' => '²',
        '3' => '³',
        '4' => '⁴',
        '5' => '⁵',
        '6' => '⁶',
        '7' => '⁷',
        '8' => '⁸',
        _ => '⁹',
    });
    format!("10{}", raised.collect::<String>())
}

/// What stands behind the quantity of an axis: in brackets its unit, with the power of ten that
/// the tick labels leave out; empty where there is neither.
pub(crate) fn unit_in_brackets(unit: &str, exponent: i32) -> String {
    let factor = power_of_ten(exponent);
    match (exponent, unit.is_empty()) {
        (0, true) => String::new(),
        (0, false) => format!("({unit})"),
        (_, true) => format!("(×{factor})"),
        (_, false) => format!("({factor} {unit})"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn labels_have_the_decimals_of_their_step() {
        assert_eq!(label(0.1 + 0.2, -1, 0), "0.3");
        assert_eq!(label(0.1 + 0.2, -2, 0), "0.30");
        assert_eq!(label(-0.0, 0, 0), "0");
        assert_eq!(label(-1e-20, -1, 0), "0.0");
        assert_eq!(label(-2.5e18, 17, 18), "−2.5");
        assert_eq!(label(-1234567.0, 0, 0), "−1\u{202f}234\u{202f}567");
        assert_eq!(label(1300.0, 2, 0), "1300");
    }

    #[test]
    fn long_numbers_leave_their_power_to_the_axis() {
        assert_eq!(factored_exponent(99_999.0), 0);
        assert_eq!(factored_exponent(3e18), 18);
        assert_eq!(factored_exponent(2e-5), -5);
        assert_eq!(factored_exponent(0.0), 0);
        assert_eq!(power_of_ten(-18), "10⁻¹⁸");
    }

    #[test]
    fn units_take_the_power_with_them() {
        assert_eq!(unit_in_brackets("cm⁻³", 18), "(10¹⁸ cm⁻³)");
        assert_eq!(unit_in_brackets("", -6), "(×10⁻⁶)");
        assert_eq!(unit_in_brackets("eV", 0), "(eV)");
        assert_eq!(unit_in_brackets("", 0), "");
    }

    proptest! {
        #[test]
        fn a_decade_holds_its_value(value in 1e-200..1e200f64, power in -200..200i32) {
            let below = decade(value);
            prop_assert!(ten_to(below) <= value && value < ten_to(below + 1));
            prop_assert_eq!(decade(ten_to(power)), power);
        }
    }
}
