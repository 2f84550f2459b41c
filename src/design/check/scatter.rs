//! Whether a tolerance can be kept with the errors of growth that the file states.
//!
//! An estimate: sensitivities by single bands, the linear law, and a design that stands in the middle
//! of its window. `spread` draws wafers, with the design where it is.

use super::{Measure, Standing};
use crate::design::draws::normal_below;
use crate::design::reactor::Reactor;
use crate::design::spread::{Sensitivity, linear, posed};
use crate::materials::Parameters;
use crate::structure::{Stack, Wavelength};

/// Sigmas that a window needs to either side: 95 % of the wafers are then inside (common practice).
const SIGMAS: f64 = 2.0;

/// A tolerance beside the scatter of growth.
#[derive(Clone, Debug, PartialEq)]
pub struct Scatter {
    /// Of which wavelength.
    pub kind: Wavelength,
    /// How far off the file still accepts, nm.
    pub tolerance_nm: f64,
    /// One sigma of the wavelength by the linear law, nm.
    pub sigma_nm: f64,
    /// The variable that does most of it.
    pub strongest: Sensitivity,
}

impl Scatter {
    /// The share of wafers inside the window, if the design stands in its middle.
    #[must_use]
    pub fn share_if_centred(&self) -> f64 {
        1.0 - 2.0 * normal_below(-self.tolerance_nm / self.sigma_nm)
    }

    /// Outside where one sigma alone leaves the window: every third wafer or more is lost wherever
    /// the design stands.
    pub(super) fn standing(&self) -> Standing {
        if self.tolerance_nm < self.sigma_nm {
            Standing::Outside
        } else if self.tolerance_nm < SIGMAS * self.sigma_nm {
            Standing::Noted
        } else {
            Standing::Within
        }
    }

    pub(super) fn measures(&self) -> Vec<Measure> {
        let measure = |name, value, limit| Measure { name, value, limit };
        vec![
            measure("sigma_nm", self.sigma_nm, Some(self.tolerance_nm)),
            measure(
                "inside_if_centred_percent",
                100.0 * self.share_if_centred(),
                None,
            ),
            measure("strongest_nm", self.strongest.nm, None),
        ]
    }
}

/// The scatter of the target's wavelength; `None` where the file states no errors or no tolerance,
/// or where nothing emits, which is a finding of its own.
pub(super) fn scatter(stack: &Stack, parameters: &Parameters) -> Option<Scatter> {
    let growth = stack.growth?;
    let target = stack.target?;
    let tolerance_nm = target.tolerance_nm?;
    let posed = posed(stack, &target);
    let reactor = Reactor::new(&posed, &growth);
    let sensitivities = linear(&reactor, parameters, target.kind)?;
    let variance: f64 = sensitivities.iter().map(|it| it.nm * it.nm).sum();
    let strongest = sensitivities.into_iter().next()?;
    (variance > 0.0).then(|| Scatter {
        kind: target.kind,
        tolerance_nm,
        sigma_nm: variance.sqrt(),
        strongest,
    })
}
