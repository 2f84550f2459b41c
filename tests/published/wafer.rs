//! What X-rays see.

use crate::judgement::Check;
use crate::{Answer, Problem};
use serde::Deserialize;
use stepwell::diffraction::{Diffraction, Reflection};
use stepwell::materials::Parameters;
use stepwell::structure::{Overrides, read};

/// Planes of a cubic crystal; `at` of a row is its lattice constant in nm.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct BraggProblem {
    name: String,
    reflection: String,
    check: Vec<Check>,
}

impl Problem for BraggProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let reflection: Reflection = self
            .reflection
            .parse()
            .map_err(|error| format!("{error}"))?;
        let lattice_nm = check.at.ok_or("a crystal has a lattice constant")?;
        match check.quantity.as_str() {
            "bragg_deg" => reflection
                .bragg_angle(lattice_nm)
                .map(f64::to_degrees)
                .ok_or_else(|| "out of reach".to_owned()),
            other => Err(format!("unknown quantity {other}")),
        }
    }
}

/// A structure file on the diffractometer; `at` of a row is the number of a layer from 1, or the
/// order of a satellite.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct DiffractionProblem {
    name: String,
    reflection: String,
    file: String,
    check: Vec<Check>,
}

impl Problem for DiffractionProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let parameters = Parameters::shipped();
        let reading = read(&self.file, &parameters, &Overrides::default())
            .map_err(|faults| format!("{faults:#?}"))?;
        let reflection: Reflection = self
            .reflection
            .parse()
            .map_err(|error| format!("{error}"))?;
        let seen = Diffraction::new(&reading.stack, &parameters, reflection, 300.0)
            .map_err(|error| error.to_string())?;
        let number = check.at.unwrap_or(0.0);
        let layer = || {
            let found = seen
                .layers
                .iter()
                .find(|it| (it.layer + 1) as f64 == number);
            found.ok_or("no such layer")
        };
        let multi_well = || seen.multi_well.as_ref().ok_or("the wells do not repeat");
        Ok(match check.quantity.as_str() {
            "perpendicular_nm" => {
                seen.substrate_lattice_nm * (1.0 + layer()?.mismatch.perpendicular)
            }
            "offset_arcsec" => layer()?.peak.ok_or("out of reach")?.offset_arcsec,
            "fringe_arcsec" => layer()?.fringe_arcsec,
            "spacing_arcsec" => multi_well()?.spacing_arcsec,
            "satellite_arcsec" => {
                let satellites = &multi_well()?.satellites;
                let found = satellites.iter().find(|it| f64::from(it.order) == number);
                found.ok_or("no such satellite")?.peak.offset_arcsec
            }
            other => return Err(format!("unknown quantity {other}")),
        })
    }
}
