//! Whether a number can be meant.

use super::Role;
use super::keys::{Kind, MODEL, Magnitude, OPERATION, ROW, TARGET, WELL_NM};
use super::number::shown;
use super::reader::brief;
use crate::source::one_of;

/// Why a number is not accepted, and what would be.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Refusal {
    /// What is wrong with it.
    pub message: String,
    /// What to do.
    pub help: String,
}

impl Magnitude {
    /// Whether a number of that name is possible.
    pub(super) fn check(&self, name: &str, value: f64) -> Result<(), Refusal> {
        let (lowest, highest) = self.possible;
        let unit = if self.unit.is_empty() {
            String::new()
        } else {
            format!(" {}", self.unit)
        };
        if !value.is_finite() {
            return Err(Refusal {
                message: format!("`{name}` is not a finite number"),
                help: format!(
                    "give a number from {} to {}{unit}",
                    shown(lowest),
                    shown(highest)
                ),
            });
        }
        if (lowest..=highest).contains(&value) {
            return Ok(());
        }
        let help = if name == "av_ev" && value < 0.0 {
            "write it positive: the edge moves by +av (exx + eyy + ezz), so compression lowers it"
                .to_owned()
        } else if value < 0.0 && lowest >= 0.0 {
            "it can't be negative: check the sign".to_owned()
        } else if value > 0.0 && highest <= 0.0 {
            "it is negative: check the sign".to_owned()
        } else {
            "check the unit and the decimal point".to_owned()
        };
        Err(Refusal {
            message: format!(
                "`{name}` is {}{unit}: possible is {} to {}{unit}",
                shown(value),
                shown(lowest),
                shown(highest)
            ),
            help,
        })
    }
}

/// Whether a key of `[operation]`, `[model]` or `[target]` would accept a number: for values that reach a
/// structure by another way than its file.
///
/// # Errors
///
/// The words in which the file would be refused.
///
/// ```
/// use stepwell::structure::check_magnitude;
///
/// assert!(check_magnitude("temperature_k", 358.15).is_ok());
/// let refusal = check_magnitude("temperature_k", 3000.0).expect_err("too hot");
/// assert_eq!(refusal.message, "`temperature_k` is 3000 K: possible is 1 to 1000 K");
/// ```
pub fn check_magnitude(key: &str, value: f64) -> Result<(), Refusal> {
    let known = OPERATION
        .key(key)
        .or_else(|| MODEL.key(key))
        .or_else(|| TARGET.key(key));
    match known.map(|key| &key.kind) {
        Some(Kind::Number(magnitude) | Kind::Numbers(magnitude, ..)) => magnitude.check(key, value),
        _ => Err(Refusal {
            message: format!("`{}` is no number of [operation] or [model]", brief(key)),
            help: format!("one of {}", one_of(OPERATION.names().chain(MODEL.names()))),
        }),
    }
}

/// Thinnest and thickest layer of a role that a file may hold, nm.
#[must_use]
pub fn thickness_range_nm(role: Role) -> (f64, f64) {
    match ROW.key("thickness_nm").map(|key| &key.kind) {
        Some(Kind::Number(magnitude)) if role != Role::Well => magnitude.possible,
        _ => WELL_NM,
    }
}
