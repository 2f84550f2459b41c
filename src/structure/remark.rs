//! What a reader should know about a file that was accepted.

use std::ops::Range;

use super::number::shown;

/// Something that is not a fault of the file and may not be what was meant.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum Remark {
    /// Neither the file nor the caller gave a temperature.
    DefaultTemperature {
        /// The temperature used, K.
        temperature_k: f64,
    },
    /// A number that is possible and seldom met.
    Unusual {
        /// Bytes of the text where it stands.
        span: Range<usize>,
        /// Its key.
        key: &'static str,
        /// The number.
        value: f64,
        /// Its unit; empty for a plain number.
        unit: &'static str,
        /// The usual range, in the same unit.
        usual: (f64, f64),
    },
    /// Two names for one material.
    SameMaterial {
        /// Bytes of the text where the second name stands.
        span: Range<usize>,
        /// The name that comes first in the file.
        first: String,
        /// The other name.
        second: String,
    },
    /// A material that no layer is made of.
    UnusedMaterial {
        /// Bytes of the text where its name stands.
        span: Range<usize>,
        /// Its name.
        name: String,
    },
    /// A barrier whose lowest conduction valley is X or L.
    IndirectBarrier {
        /// Bytes of the text where its material stands.
        span: Range<usize>,
        /// Its formula.
        formula: String,
        /// The valley, `X` or `L`.
        valley: &'static str,
        /// How far the valley lies below Γ, meV.
        below_mev: f64,
    },
    /// An acceptor given as donor, or the other way round.
    UnusualDopant {
        /// Bytes of the text where the dopant stands.
        span: Range<usize>,
        /// The element.
        dopant: String,
        /// What it usually is: `donor` or `acceptor`.
        usually: &'static str,
    },
    /// A target that does not say what its wavelength is of, or what it is measured in.
    TargetAssumed {
        /// Bytes of the text where the target stands.
        span: Range<usize>,
        /// The keys that it leaves out, each with the value that is taken.
        taken: Vec<(&'static str, &'static str)>,
    },
    /// The temperature was laid over the file, and some materials have numbers of their own.
    OwnNumbersKept {
        /// Their names, in the order of the file.
        names: Vec<String>,
    },
}

impl Remark {
    /// Where in the file the remark belongs, if to one place.
    #[must_use]
    pub fn span(&self) -> Option<Range<usize>> {
        match self {
            Self::Unusual { span, .. }
            | Self::SameMaterial { span, .. }
            | Self::UnusedMaterial { span, .. }
            | Self::IndirectBarrier { span, .. }
            | Self::TargetAssumed { span, .. }
            | Self::UnusualDopant { span, .. } => Some(span.clone()),
            Self::DefaultTemperature { .. } | Self::OwnNumbersKept { .. } => None,
        }
    }

    /// What was seen.
    #[must_use]
    pub fn message(&self) -> String {
        match self {
            Self::DefaultTemperature { temperature_k } => {
                format!(
                    "no temperature is given: {} K is used",
                    shown(*temperature_k)
                )
            }
            Self::Unusual {
                key, value, unit, ..
            } => format!("`{key}` is unusual: {}", with_unit(*value, unit)),
            Self::SameMaterial { first, second, .. } => {
                format!("`{first}` and `{second}` are the same material")
            }
            Self::UnusedMaterial { name, .. } => format!("no layer is made of `{name}`"),
            Self::IndirectBarrier {
                formula,
                valley,
                below_mev,
                ..
            } => format!(
                "the barrier {formula} is indirect: its {valley} valley lies {below_mev:.0} meV below Γ"
            ),
            Self::UnusualDopant {
                dopant, usually, ..
            } => format!("{dopant} is usually {} {usually}", article(usually)),
            Self::TargetAssumed { taken, .. } => {
                let keys: Vec<String> = taken.iter().map(|(key, _)| format!("`{key}`")).collect();
                let values: Vec<&str> = taken.iter().map(|(_, value)| *value).collect();
                format!(
                    "the target does not say its {}: {} is taken",
                    keys.join(" and "),
                    values.join(", ")
                )
            }
            Self::OwnNumbersKept { names } => format!(
                "the numbers of {} stay as they are at the temperature asked for",
                names.join(", ")
            ),
        }
    }

    /// What it may mean and what to do.
    #[must_use]
    pub fn advice(&self) -> String {
        match self {
            Self::DefaultTemperature { .. } => {
                "wavelengths move by 0.3 to 0.6 nm a kelvin: give `temperature_c` in [operation]"
                    .to_owned()
            }
            Self::Unusual { unit, usual, .. } => format!(
                "{} to {} is common: check the unit and the decimal point",
                shown(usual.0),
                with_unit(usual.1, unit)
            ),
            Self::SameMaterial { .. } => {
                "one name spares the grower a second calibration: use one, unless they are meant to part"
                    .to_owned()
            }
            Self::UnusedMaterial { .. } => {
                "leave it out, or check the names that the layers use".to_owned()
            }
            Self::IndirectBarrier { .. } => {
                "levels are those of Γ; electrons can escape into the lower valley: confinement is weaker than the figures say"
                    .to_owned()
            }
            Self::UnusualDopant { .. } => {
                "check whether `donors_cm3` or `acceptors_cm3` is meant".to_owned()
            }
            Self::TargetAssumed { taken, .. } => {
                let keys: Vec<String> = taken
                    .iter()
                    .map(|(key, value)| format!("`{key} = \"{value}\"`"))
                    .collect();
                format!(
                    "peaks of photoluminescence and of gain lie tens of nm apart, air and vacuum a third of a nm: write {} or what is meant",
                    keys.join(", ")
                )
            }
            Self::OwnNumbersKept { .. } => {
                "own numbers hold at one temperature: give those of this temperature".to_owned()
            }
        }
    }
}

fn with_unit(value: f64, unit: &str) -> String {
    format!("{} {unit}", shown(value)).trim_end().to_owned()
}

fn article(word: &str) -> &'static str {
    if word.starts_with('a') { "an" } else { "a" }
}
