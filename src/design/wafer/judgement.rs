//! How findings about the wafer stand, and their numbers.

use super::{LEAST_NOTED_PERCENT, StrainLimits, WaferFinding};
use crate::coherence::LayerStrain;
use crate::design::{Measure, Standing};

impl WaferFinding {
    /// Its code: a word that scripts can rely on.
    #[must_use]
    pub fn code(&self) -> &'static str {
        match self {
            Self::Strain { .. } => "strain",
            Self::StackStrain { .. } => "stack-strain",
            Self::Balance(_) => "strain-balance",
            Self::FencePosts { .. } => "barrier-count",
            Self::Thin { .. } => "thin-layer",
            Self::BulkMismatch { .. } => "bulk-mismatch",
            Self::ForbiddenElement { .. } => "forbidden-element",
            Self::GroupVChange { .. } => "group-v-change",
            Self::SimilarAlloys { .. } => "similar-alloys",
            Self::Unmixing { .. } => "unmixing",
            Self::OtherSource { .. } => "other-source",
        }
    }

    /// How it stands.
    #[must_use]
    pub fn standing(&self) -> Standing {
        match self {
            Self::Strain { .. } | Self::StackStrain { .. } => {
                let by_limits = self.by_limits().unwrap_or(Standing::Stated);
                match self.coherence() {
                    Standing::Stated => by_limits,
                    beyond => beyond.max(by_limits),
                }
            }
            Self::Balance(_) | Self::GroupVChange { .. } => Standing::Stated,
            Self::FencePosts {
                below_nm, above_nm, ..
            } => {
                if below_nm.is_some() == above_nm.is_some() {
                    Standing::Stated
                } else {
                    Standing::Noted
                }
            }
            Self::Thin { .. } => self.by_limits().unwrap_or(Standing::Noted),
            Self::BulkMismatch { .. } => self.by_limits().unwrap_or(Standing::Stated),
            Self::ForbiddenElement { .. } => Standing::Outside,
            Self::SimilarAlloys { .. } | Self::Unmixing { .. } | Self::OtherSource { .. } => {
                Standing::Noted
            }
        }
    }

    /// How strained layers stand by theory alone: outside beyond both balances, worth a look beyond
    /// the more careful one; stated otherwise, and for what is not about strain.
    #[must_use]
    pub fn coherence(&self) -> Standing {
        let (share, thickness_nm, energy_balance, mismatch) = match self {
            Self::Strain { layer, .. } => (
                layer.critical_share(),
                layer.thickness_nm,
                layer.critical.energy_balance,
                layer.mismatch,
            ),
            Self::StackStrain { active, .. } => (
                active.critical_share(),
                active.thickness_nm,
                active.critical.energy_balance,
                active.mean,
            ),
            _ => return Standing::Stated,
        };
        if share <= 1.0 || mismatch.strain_percent() < LEAST_NOTED_PERCENT {
            Standing::Stated
        } else if energy_balance.holds(thickness_nm) {
            Standing::Noted
        } else {
            Standing::Outside
        }
    }

    /// How its numbers stand against the limits of the house; `None` without a limit.
    fn by_limits(&self) -> Option<Standing> {
        let measures = self.measures();
        let limited = measures.iter().filter_map(Measure::is_inside);
        limited.reduce(|all, one| all && one).map(|inside| {
            if inside {
                Standing::Within
            } else {
                Standing::Outside
            }
        })
    }

    /// Its numbers.
    #[must_use]
    pub fn measures(&self) -> Vec<Measure> {
        match self {
            Self::Strain { layer, limits } => of_strain(layer, limits),
            Self::StackStrain {
                active,
                most_percent,
            } => vec![
                measure(
                    "mean_strain_percent",
                    active.mean.strain_percent(),
                    *most_percent,
                ),
                measure("active_thickness_nm", active.thickness_nm, None),
                measure(
                    "strain_thickness_percent_nm",
                    active.strain_thickness_percent_nm(),
                    None,
                ),
                measure("critical_share", active.critical_share(), None),
                measure("force_n_m", active.force_n_m.abs(), None),
            ],
            Self::Balance(balance) => balance
                .mismatch
                .map(|it| measure("barrier_strain_percent", it.strain_percent(), None))
                .into_iter()
                .chain(
                    balance
                        .practicable_factor()
                        .map(|factor| measure("thickness_factor", factor, None)),
                )
                .collect(),
            Self::FencePosts { wells, between, .. } => vec![
                measure("wells", *wells as f64, None),
                measure("barriers_between", *between as f64, None),
            ],
            Self::Thin {
                thickness_nm,
                monolayers,
                least_nm,
                ..
            } => vec![
                measure("thickness_nm", *thickness_nm, *least_nm),
                measure("monolayers", *monolayers, None),
            ],
            Self::BulkMismatch {
                relaxed_ppm,
                most_ppm,
                ..
            } => vec![measure("relaxed_mismatch_ppm", *relaxed_ppm, *most_ppm)],
            Self::ForbiddenElement { .. } => Vec::new(),
            Self::GroupVChange { interfaces, .. } => {
                vec![measure("interfaces", *interfaces as f64, None)]
            }
            Self::SimilarAlloys { difference, .. } => {
                vec![measure("fraction_difference", *difference, None)]
            }
            Self::Unmixing { below_k, .. } => vec![measure("spinodal_k", *below_k, None)],
            Self::OtherSource {
                difference_ev,
                thermal_ev,
                ..
            } => vec![
                measure("difference_mev", 1e3 * difference_ev, None),
                measure("difference_kt", difference_ev.abs() / thermal_ev, None),
            ],
        }
    }
}

fn measure(name: &'static str, value: f64, limit: Option<f64>) -> Measure {
    Measure { name, value, limit }
}

fn of_strain(layer: &LayerStrain, limits: &StrainLimits) -> Vec<Measure> {
    let mut measures = vec![
        measure(
            "strain_percent",
            layer.mismatch.strain_percent(),
            limits.strain_percent_max,
        ),
        measure("layer_thickness_nm", layer.thickness_nm, None),
        measure(
            "strain_thickness_percent_nm",
            layer.strain_thickness_percent_nm(),
            limits.strain_thickness_percent_nm_max,
        ),
        measure("relaxed_mismatch_ppm", layer.mismatch.relaxed_ppm(), None),
        measure(
            "perpendicular_mismatch_ppm",
            layer.mismatch.perpendicular_ppm(),
            None,
        ),
        measure(
            "critical_share",
            layer.critical_share(),
            limits.critical_share_max,
        ),
    ];
    let critical = [
        ("critical_single_nm", layer.critical.overlayer),
        ("critical_buried_nm", layer.critical.buried),
        ("critical_energy_nm", layer.critical.energy_balance),
    ];
    measures.extend(
        critical
            .into_iter()
            .filter_map(|(name, at)| Some(measure(name, at.thickness_nm()?, None))),
    );
    measures
}
