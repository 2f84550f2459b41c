//! A quantity with its unit, as a person writes it.

use crate::materials::Sense;
use crate::units::{CELSIUS_ZERO_K, wavelength_nm};
use std::str::FromStr;

/// A quantity by its unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Quantity {
    /// A wavelength or a difference of wavelengths, nm.
    Wavelength(f64),
    /// A photon energy, a gap or a difference of energies, eV.
    Energy(f64),
    /// A temperature, K.
    Temperature(f64),
    /// A mismatch, ppm, at least zero.
    Mismatch(f64, Option<Sense>),
    /// An in-plane strain, %, at least zero.
    Strain(f64, Option<Sense>),
    /// A density per area, cm⁻².
    SheetDensity(f64),
    /// A density per volume, cm⁻³.
    VolumeDensity(f64),
}

/// Words that are no quantity, and what would be one.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{message}")]
pub struct Unclear {
    /// What is wrong.
    pub message: String,
    /// What to write.
    pub help: String,
}

impl Unclear {
    pub(super) fn new(message: impl Into<String>, help: impl Into<String>) -> Self {
        Self {
            message: message.into(),
            help: help.into(),
        }
    }
}

/// Units in their writings, and an example of each kind.
const KNOWN: &str =
    "1310nm, 1.31um, 0.946eV, 25C, 298.15K, 850ppm, 1%compressive, 2e12cm-2, 3e18cm-3";

impl Quantity {
    /// As a wavelength in vacuum, nm, where it is a wavelength or a photon energy.
    #[must_use]
    pub fn vacuum_nm(self) -> Option<f64> {
        match self {
            Self::Wavelength(nm) => Some(nm),
            Self::Energy(ev) => Some(wavelength_nm(ev)),
            _ => None,
        }
    }
}

impl FromStr for Quantity {
    type Err = Unclear;

    fn from_str(words: &str) -> Result<Self, Unclear> {
        let plain = words.trim();
        let shown: String = plain.chars().take(40).collect();
        let (number, unit) = number_and_unit(plain).ok_or_else(|| {
            Unclear::new(
                format!("`{shown}` is no quantity"),
                format!("a number and its unit: {KNOWN}"),
            )
        })?;
        if !number.is_finite() {
            return Err(Unclear::new(
                format!("`{shown}` is not finite"),
                "give a number that is",
            ));
        }
        let quantity = match unit.as_str() {
            "nm" => Self::Wavelength(number),
            "um" => Self::Wavelength(1e3 * number),
            "a" | "ang" | "angstrom" => Self::Wavelength(0.1 * number),
            "ev" => Self::Energy(number),
            "mev" => Self::Energy(1e-3 * number),
            "c" => Self::Temperature(number + CELSIUS_ZERO_K),
            "k" => Self::Temperature(number),
            "cm-2" => Self::SheetDensity(number),
            "m-2" => Self::SheetDensity(1e-4 * number),
            "cm-3" => Self::VolumeDensity(number),
            "m-3" => Self::VolumeDensity(1e-6 * number),
            "" => {
                let help = format!("say which unit: {shown}nm, {shown}eV, {shown}ppm, ...");
                return Err(Unclear::new(format!("`{shown}` has no unit"), help));
            }
            other if other.starts_with(',') => {
                let pointed = plain.replace(',', ".");
                return Err(Unclear::new(
                    format!("`{shown}` has a decimal comma, or one between thousands"),
                    format!("write a point, and nothing between thousands: {pointed}"),
                ));
            }
            other => strained(number, other).ok_or_else(|| {
                Unclear::new(
                    format!("the unit of `{shown}` is not known"),
                    format!("known are {KNOWN}"),
                )
            })?,
        };
        quantity.sound(&shown)
    }
}

/// A mismatch or a strain, with or without its sense.
fn strained(number: f64, unit: &str) -> Option<Quantity> {
    let (scale, rest) = if let Some(rest) = unit.strip_prefix("ppm") {
        (None, rest)
    } else if let Some(rest) = unit.strip_prefix('%') {
        (Some(1.0), rest)
    } else {
        (Some(1.0), unit.strip_prefix("percent")?)
    };
    let sense = match rest {
        "" => None,
        "compressive" => Some(Sense::Compressive),
        "tensile" => Some(Sense::Tensile),
        _ => return None,
    };
    Some(match scale {
        None => Quantity::Mismatch(number, sense),
        Some(_) => Quantity::Strain(number, sense),
    })
}

impl Quantity {
    /// Refuses what no crystal, photon or wafer has.
    fn sound(self, shown: &str) -> Result<Self, Unclear> {
        let refuse = |help: &str| Err(Unclear::new(format!("`{shown}` can't be meant"), help));
        match self {
            Self::Wavelength(nm) if !(nm > 0.0 && nm <= 1e6) => {
                refuse("wavelengths are positive, and at most 1000 um")
            }
            Self::Energy(ev) if !(ev > 0.0 && ev <= 100.0) => {
                refuse("energies are positive, and at most 100 eV")
            }
            Self::Temperature(kelvin) if !(0.0..=5000.0).contains(&kelvin) => {
                refuse("temperatures are from -273.15C to 5000K")
            }
            Self::Mismatch(size, _) | Self::Strain(size, _) if size < 0.0 => refuse(
                "a sign has two meanings: give the size and its sense, compressive or tensile",
            ),
            Self::Mismatch(ppm, _) if ppm > 3e5 => refuse("a mismatch is at most 300000ppm"),
            Self::Strain(percent, _) if percent > 20.0 => refuse("a strain is at most 20%"),
            Self::SheetDensity(density) | Self::VolumeDensity(density)
                if !(density > 0.0 && density <= 1e25) =>
            {
                refuse("densities are positive, and at most 1e25")
            }
            sound => Ok(sound),
        }
    }
}

/// The number at the front and the unit behind it, its look-alikes made one.
fn number_and_unit(words: &str) -> Option<(f64, String)> {
    // The longest front that is a number: the `e` of `3eV` is no exponent, that of `3e18cm-3` is.
    let number = words
        .char_indices()
        .map(|(at, letter)| at + letter.len_utf8())
        .rev()
        .filter(|&end| words[..end].ends_with(|last: char| last.is_ascii_digit() || last == '.'))
        .find_map(|end| Some((words[..end].parse::<f64>().ok()?, end)));
    let (value, end) = number?;
    let unit: String = words[end..]
        .chars()
        .filter(|letter| !letter.is_whitespace() && !matches!(letter, '°' | '^' | '_'))
        .map(|letter| match letter {
            // micro sign and Greek mu; angstrom sign and A with ring
            '\u{b5}' | '\u{3bc}' => 'u',
            '\u{212b}' | '\u{c5}' => 'a',
            '\u{207b}' | '\u{2212}' => '-',
            '\u{b2}' => '2',
            '\u{b3}' => '3',
            other => other.to_ascii_lowercase(),
        })
        .collect();
    Some((value, unit))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn read(words: &str) -> Quantity {
        words
            .parse()
            .unwrap_or_else(|error| panic!("{words}: {error}"))
    }

    #[test]
    fn quantities_are_read_in_their_writings() {
        for (words, expected) in [
            ("1310nm", Quantity::Wavelength(1310.0)),
            ("1.31 µm", Quantity::Wavelength(1310.0)),
            ("1.31μm", Quantity::Wavelength(1310.0)),
            ("15.5 Å", Quantity::Wavelength(1.55)),
            ("0.8eV", Quantity::Energy(0.8)),
            ("3eV", Quantity::Energy(3.0)),
            ("8e2meV", Quantity::Energy(0.8)),
            ("25 °C", Quantity::Temperature(298.15)),
            ("77K", Quantity::Temperature(77.0)),
            ("850ppm", Quantity::Mismatch(850.0, None)),
            (
                "850 ppm tensile",
                Quantity::Mismatch(850.0, Some(Sense::Tensile)),
            ),
            (
                "1%compressive",
                Quantity::Strain(1.0, Some(Sense::Compressive)),
            ),
            ("2e12cm-2", Quantity::SheetDensity(2e12)),
            ("3e18 cm⁻³", Quantity::VolumeDensity(3e18)),
            ("3E24 m^-3", Quantity::VolumeDensity(3e18)),
        ] {
            let got = read(words);
            let close = match (got, expected) {
                (Quantity::Wavelength(a), Quantity::Wavelength(b))
                | (Quantity::Energy(a), Quantity::Energy(b))
                | (Quantity::VolumeDensity(a), Quantity::VolumeDensity(b)) => {
                    (a / b - 1.0).abs() < 1e-14
                }
                _ => got == expected,
            };
            assert!(close, "{words}: {got:?}");
        }
    }

    #[test]
    fn what_has_no_meaning_or_two_is_refused() {
        for words in [
            "",
            "nm",
            "1310",
            "1310 furlongs",
            "1,31um",
            "-850ppm",
            "-1%",
            "1e400nm",
            "0nm",
            "-5nm",
            "nan nm",
            "-300C",
            "1%sideways",
            "5e9ppm",
            "ß",
        ] {
            let refused = words.parse::<Quantity>().expect_err(words);
            assert!(!refused.help.is_empty());
        }
    }
}
