//! The mixed valence states over the in-plane wave number.

use super::bundle::Bundle;
use super::{Kind, line_key};
use crate::evaluation::Evaluation;
use crate::sheet::figure::{Axis, Curve, Naming, Panel};
use crate::subbands::MixedBands;

/// The picture ends where the highest state has fallen by so many kT: holes are not found beyond.
const FALL_KT: f64 = 4.0;
/// Least fall that is shown, eV.
const LEAST_FALL_EV: f64 = 0.06;

/// Energies of the valence states below the highest one, over the in-plane wave number: one curve a
/// state and block, one name a bundle.
pub(super) fn dispersion_panel(
    evaluation: &Evaluation<'_>,
    mixed: &MixedBands,
    bundles: &[Bundle],
) -> Panel {
    let top_ev = mixed
        .zone_centre
        .first()
        .map_or(0.0, |state| state.energy_ev);
    let last = last_slice(mixed, top_ev, evaluation.thermal_ev());
    let mut panel = Panel {
        title: "Mixed valence states over the in-plane wave number".to_owned(),
        plot_height_px: 260.0,
        x: Axis::new("in-plane wave number", "nm⁻¹").over(0.0, mixed.k_per_nm[last]),
        y: Axis::new("energy from v1 at zero", "meV"),
        keys: vec![
            line_key(
                "mostly heavy at zero",
                Kind::Heavy.ink(),
                Kind::Heavy.dash(),
            ),
            line_key(
                "mostly light at zero",
                Kind::Light.ink(),
                Kind::Light.dash(),
            ),
        ],
        ..Panel::default()
    };
    let mut state = 0;
    for bundle in bundles {
        for (place, member) in bundle.members.iter().enumerate() {
            for (block, slices) in mixed.blocks.iter().enumerate() {
                let is_named = place == 0 && block == 0;
                let energies = slices[..=last]
                    .iter()
                    .map(|slice| slice.energy_ev.get(state));
                panel.curves.push(Curve {
                    name: bundle.name.clone(),
                    naming: if is_named {
                        Naming::AtEnd
                    } else {
                        Naming::Nowhere
                    },
                    points: mixed
                        .k_per_nm
                        .iter()
                        .zip(energies)
                        .map(|(&k, energy_ev)| (k, energy_ev.map(|it| 1e3 * (it - top_ev))))
                        .collect(),
                    ink: member.kind.ink(),
                    dash: member.kind.dash(),
                    width_px: if is_named { 1.8 } else { 1.0 },
                    mark: None,
                });
            }
            state += 1;
        }
    }
    panel
}

/// Index of the wave number at which the highest state has fallen far enough.
fn last_slice(mixed: &MixedBands, top_ev: f64, thermal_ev: f64) -> usize {
    let fall_ev = (FALL_KT * thermal_ev).max(LEAST_FALL_EV);
    let has_fallen = |place: &usize| {
        mixed.blocks.iter().all(|slices| {
            let energies = slices.get(*place).map_or(&[][..], |slice| &slice.energy_ev);
            energies
                .first()
                .is_none_or(|energy_ev| top_ev - energy_ev > fall_ev)
        })
    };
    let last = mixed.k_per_nm.len().saturating_sub(1);
    (0..=last).find(has_fallen).unwrap_or(last)
}
