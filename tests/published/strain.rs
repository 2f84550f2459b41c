//! Strained films.

use crate::judgement::Check;
use crate::{Answer, Problem};
use serde::Deserialize;
use stepwell::coherence::{Film, Setting, balancing_thickness_nm, plane_stiffness_gpa};
use stepwell::materials::{Composition, Crystal, Offsets, Parameters};

pub(crate) fn composition(formula: &str) -> Result<Composition, String> {
    Composition::parse(formula).map_err(|fault| fault.message)
}

pub(crate) fn crystal(formula: &str) -> Result<Crystal, String> {
    let composition = composition(formula)?;
    Ok(Parameters::shipped().crystal(&composition, 300.0, Offsets::Table))
}

/// A film of an alloy on a substrate; `at` of a row is the share of the way from the first to the
/// second end.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct FilmProblem {
    name: String,
    between: [String; 2],
    substrate: String,
    check: Vec<Check>,
}

impl Problem for FilmProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let share = check.at.ok_or("a film has a composition")?;
        let mixed = composition(&self.between[0])?.towards(&composition(&self.between[1])?, share);
        let crystal = Parameters::shipped().crystal(&mixed, 300.0, Offsets::Table);
        let film = Film::new(&crystal, self::crystal(&self.substrate)?.lattice_nm);
        let critical = match check.quantity.as_str() {
            "overlayer_nm" => film.force_balance(Setting::Overlayer),
            "buried_nm" => film.force_balance(Setting::Buried),
            "energy_balance_nm" => film.energy_balance(),
            other => return Err(format!("unknown quantity {other}")),
        };
        critical
            .thickness_nm()
            .ok_or_else(|| format!("{critical:?}"))
    }
}

/// Two layers that balance on a substrate.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct BalanceProblem {
    name: String,
    layer: String,
    thickness_nm: f64,
    partner: String,
    substrate: String,
    check: Vec<Check>,
}

impl Problem for BalanceProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let (layer, partner) = (crystal(&self.layer)?, crystal(&self.partner)?);
        let substrate_nm = crystal(&self.substrate)?.lattice_nm;
        Ok(match check.quantity.as_str() {
            "layer_stiffness_gpa" => plane_stiffness_gpa(&layer),
            "partner_stiffness_gpa" => plane_stiffness_gpa(&partner),
            "layer_strain" => layer.on(substrate_nm).in_plane_strain,
            "partner_strain" => partner.on(substrate_nm).in_plane_strain,
            "partner_nm" => {
                balancing_thickness_nm(&layer, self.thickness_nm, &partner, substrate_nm)
                    .ok_or("both strains have the same sense")?
            }
            other => return Err(format!("unknown quantity {other}")),
        })
    }
}
