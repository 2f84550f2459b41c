//! Numbers as text: every digit that a table shows is chosen here.

/// What stands where there is no number.
pub(super) const ABSENT: &str = "–";

/// A number with so many decimals; never `-0.0`, and [`ABSENT`] for what is no number.
pub(super) fn fixed(value: f64, decimals: usize) -> String {
    if !value.is_finite() {
        return ABSENT.to_owned();
    }
    let text = format!("{value:.decimals$}");
    let is_zero = text.bytes().all(|byte| matches!(byte, b'-' | b'0' | b'.'));
    match text.strip_prefix('-') {
        Some(size) if is_zero => size.to_owned(),
        _ => text,
    }
}

/// The same with its sign, `+` too.
pub(super) fn signed(value: f64, decimals: usize) -> String {
    let text = fixed(value, decimals);
    let grows = value > 0.0 && text != ABSENT && !text.starts_with('-');
    if grows { format!("+{text}") } else { text }
}

/// A number to so many significant digits: plain from 0.001 to a million, else with a power of ten.
pub(super) fn significant(value: f64, digits: usize) -> String {
    if !value.is_finite() {
        return ABSENT.to_owned();
    }
    let size = value.abs();
    if size == 0.0 {
        return "0".to_owned();
    }
    if !(1e-3..1e6).contains(&size) {
        return power(value, digits);
    }
    let mut decimals = digits.saturating_sub(1);
    let mut scale = size;
    while scale >= 10.0 {
        scale /= 10.0;
        decimals = decimals.saturating_sub(1);
    }
    while scale < 1.0 {
        scale *= 10.0;
        decimals += 1;
    }
    fixed(value, decimals)
}

/// A number as mantissa and power of ten to at most so many digits, zeros at the end left out:
/// `3e18`, `9.654e17`.
pub(super) fn power(value: f64, digits: usize) -> String {
    if !value.is_finite() {
        return ABSENT.to_owned();
    }
    let text = format!("{value:.*e}", digits.saturating_sub(1));
    match text.split_once('e') {
        Some((mantissa, exponent)) if mantissa.contains('.') => {
            let mantissa = mantissa.trim_end_matches('0').trim_end_matches('.');
            format!("{mantissa}e{exponent}")
        }
        _ => text,
    }
}

/// A number as mantissa and power of ten, as it is set in print: `1.704×10¹⁸`, `10¹⁸`.
pub(super) fn typeset(value: f64, digits: usize) -> String {
    let text = power(value, digits);
    let Some((mantissa, exponent)) = text.split_once('e') else {
        return text;
    };
    let raised: String = exponent
        .chars()
        .map(|character| match character {
            '0' => '⁰',
            '1' => '¹',
            '2' => '²',
            '3' => '³',
            '4' => '⁴',
            '5' => '⁵',
            '6' => '⁶',
            '7' => '⁷',
            '8' => '⁸',
            '9' => '⁹',
            _ => '⁻',
        })
        .collect();
    match mantissa {
        "1" => format!("10{raised}"),
        _ => format!("{mantissa}×10{raised}"),
    }
}

/// A number as a person would write it, up to six digits.
pub(super) fn plain(value: f64) -> String {
    if !value.is_finite() {
        return ABSENT.to_owned();
    }
    let size = value.abs();
    if size != 0.0 && !(1e-3..1e6).contains(&size) {
        return power(value, 6);
    }
    let text = fixed(value, 6);
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// A length as a person would write it, to a thousandth of a nm.
pub(super) fn length_nm(value: f64) -> String {
    plain(round(value, 1e-3))
}

/// A temperature in kelvin and Celsius.
pub(super) fn temperature(kelvin: f64) -> String {
    let celsius = kelvin - crate::units::CELSIUS_ZERO_K;
    format!("{} K ({} °C)", plain(kelvin), plain(round(celsius, 1e-6)))
}

/// A number that reads back to the same bits, for files; blank for what is no number.
pub(super) fn exact(value: f64) -> String {
    if !value.is_finite() {
        return String::new();
    }
    let size = value.abs();
    if size != 0.0 && !(1e-5..1e15).contains(&size) {
        format!("{value:e}")
    } else {
        // Adding zero turns −0 into 0.
        format!("{}", value + 0.0)
    }
}

fn round(value: f64, step: f64) -> f64 {
    (value / step).round() * step
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn decimals_are_kept_and_a_rounded_zero_has_no_sign() {
        assert_eq!(fixed(1303.801, 1), "1303.8");
        assert_eq!(fixed(-0.04, 1), "0.0");
        assert_eq!(fixed(-0.06, 1), "-0.1");
        assert_eq!(fixed(f64::NAN, 1), ABSENT);
        assert_eq!(signed(46.12, 1), "+46.1");
        assert_eq!(signed(-46.12, 1), "-46.1");
        assert_eq!(signed(0.01, 1), "+0.0");
    }

    #[test]
    fn significant_digits_hold_over_the_powers_of_ten() {
        for (value, text) in [
            (0.0, "0"),
            (3932.47, "3932"),
            (0.064512, "0.0645"),
            (131.07, "131"),
            (9.654e17, "9.65e17"),
            (2e-8, "2e-8"),
            (f64::INFINITY, ABSENT),
        ] {
            let digits = if value > 1000.0 && value < 1e6 { 4 } else { 3 };
            assert_eq!(significant(value, digits), text, "{value}");
        }
    }

    #[test]
    fn densities_are_short() {
        assert_eq!(power(3e18, 4), "3e18");
        assert_eq!(power(1.5e18, 4), "1.5e18");
        assert_eq!(power(9.654134e17, 4), "9.654e17");
        assert_eq!(power(1e18, 1), "1e18");
    }

    #[test]
    fn powers_are_raised_in_print() {
        assert_eq!(typeset(1.7041e18, 4), "1.704×10¹⁸");
        assert_eq!(typeset(1e18, 3), "10¹⁸");
        assert_eq!(typeset(-2.5e-9, 3), "-2.5×10⁻⁹");
        assert_eq!(typeset(f64::NAN, 3), ABSENT);
    }

    #[test]
    fn temperatures_are_said_twice() {
        assert_eq!(temperature(298.15), "298.15 K (25 °C)");
        assert_eq!(temperature(300.0), "300 K (26.85 °C)");
        assert_eq!(temperature(4.0), "4 K (-269.15 °C)");
    }

    #[test]
    fn exact_numbers_read_back_to_the_bit() {
        for value in [
            0.1 + 0.2,
            1e18,
            -5e-324,
            1303.8017902759361,
            0.0,
            1e-5,
            f64::MAX,
        ] {
            let back: f64 = exact(value).parse().expect("a number");
            assert_eq!(back.to_bits(), value.to_bits(), "{}", exact(value));
        }
        assert_eq!(exact(-0.0), "0");
        assert_eq!(exact(f64::NAN), "");
    }
}
