//! Numbers of a structure file as text.

/// A number as a person writes it: plain where that is short, else with a power of ten.
pub(super) fn shown(value: f64) -> String {
    let size = value.abs();
    if size != 0.0 && !(1e-3..1e6).contains(&size) {
        format!("{value:e}")
    } else {
        format!("{value}")
    }
}

/// A number as TOML, which reads back to the same bits.
pub(super) fn exact(value: f64) -> String {
    format!("{value:?}")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_written_as_people_write_them() {
        for (value, text) in [
            (1e18, "1e18"),
            (0.0, "0"),
            (5.5, "5.5"),
            (80_000.0, "80000"),
            (-0.0005, "-5e-4"),
        ] {
            assert_eq!(shown(value), text);
        }
    }

    #[test]
    fn exact_numbers_are_toml_and_read_back_to_the_bit() {
        for value in [1e18, 0.1 + 0.2, 1.0, 5e-324, -298.15, 1e-7, f64::MAX] {
            let text = format!("a = {}", exact(value));
            let table: toml::Table = toml::from_str(&text).expect("TOML");
            let back = table["a"].as_float().expect("a float");
            assert_eq!(back.to_bits(), value.to_bits(), "{text}");
        }
    }
}
