//! From mixed valence bands to transitions, hole states and the samples of a spectrum.

use super::Transition;
use crate::carriers::{NetDoping, Reservoir, Subband};
use crate::spectra::{Dispersion, Line, Sample};
use crate::structure::{Layer, Role, Stack};
use crate::subbands::{Level, MixedBands, SingleBands};
use crate::units::{HBAR2_OVER_2M0_EV_NM2, thermal_ev, wavelength_nm};

/// How far the highest valence state must fall along the wave number, eV: past every hole that
/// the densities asked for put there.
pub(super) fn depth_ev(stack: &Stack, parabolas: &[Subband], doping: NetDoping) -> f64 {
    let kt = thermal_ev(stack.operation.temperature_k);
    let operation = &stack.operation;
    let highest = operation
        .densities_cm3
        .iter()
        .copied()
        .fold(operation.working_density_cm3, f64::max);
    let (_, holes) = doping.electrons_and_holes_cm3(highest);
    // Parabolas are steeper than mixed bands and hold fewer: their Fermi level lies deeper.
    let fermi =
        Reservoir::Parabolic(parabolas).fermi_ev(holes * 1e-7 * stack.well_thickness_nm(), kt);
    let edge = parabolas
        .iter()
        .map(|subband| subband.edge_ev)
        .fold(f64::INFINITY, f64::min);
    ((fermi - edge).max(0.0) + 13.0 * kt).max(0.2)
}

/// Transitions at the zone centre, components of a valence state summed.
pub(super) fn transitions(electrons: &[Level], mixed: &MixedBands) -> Vec<Transition> {
    let mut transitions = Vec::new();
    for (electron, (level, overlaps)) in electrons.iter().zip(&mixed.overlaps).enumerate() {
        for (state, (centre, &overlap)) in mixed.zone_centre.iter().zip(overlaps).enumerate() {
            let energy_ev = level.energy_ev - centre.energy_ev;
            transitions.push(Transition {
                electron: electron + 1,
                hole: format!("v{}", state + 1),
                energy_ev,
                wavelength_nm: wavelength_nm(energy_ev),
                overlap,
            });
        }
    }
    transitions
}

/// Valence energies of one state of a block along k.
fn energies(slices: &[crate::subbands::Slice], state: usize) -> Vec<f64> {
    slices.iter().map(|slice| slice.energy_ev[state]).collect()
}

/// Hole states for the carriers: energy counted downwards (eV) and number per area (cm⁻²).
pub(super) fn hole_states(mixed: &MixedBands, thermal_ev: f64) -> Vec<(f64, f64)> {
    let mut states = Vec::new();
    for slices in &mixed.blocks {
        for state in 0..slices[0].energy_ev.len() {
            let hole_ev = energies(slices, state);
            let along = Dispersion {
                k_per_nm: &mixed.k_per_nm,
                hole_ev: &hole_ev,
            };
            along.over_k(
                f64::INFINITY,
                f64::INFINITY,
                thermal_ev,
                |_, k_dk, interval, within| {
                    // k dk/2π per nm², 1e14 to cm⁻².
                    let number = mixed.degeneracy * k_dk / (2.0 * std::f64::consts::PI) * 1e14;
                    states.push((-along.hole_at(interval, within), number));
                },
            );
        }
    }
    states
}

/// Samples of every pair over the wave number, the lowest edge of each pair, and the highest
/// transition energy that the wave numbers reach.
pub(super) fn samples(mixed: &MixedBands, line: &Line) -> (Vec<Sample>, Vec<f64>, f64) {
    /// Pairs weaker than this everywhere are not seen.
    const LEAST_DIPOLE: f64 = 1e-7;

    let mut samples = Vec::new();
    let mut edges = Vec::new();
    let mut reach = f64::INFINITY;
    let last = mixed.k_per_nm.last().copied().unwrap_or(0.0);
    for slices in &mixed.blocks {
        for state in 0..slices[0].energy_ev.len() {
            let hole_ev = energies(slices, state);
            for (electron, level) in mixed.electron.iter().enumerate() {
                let te: Vec<f64> = slices
                    .iter()
                    .map(|slice| slice.dipoles[electron][state].te)
                    .collect();
                let tm: Vec<f64> = slices
                    .iter()
                    .map(|slice| slice.dipoles[electron][state].tm)
                    .collect();
                let strongest = te.iter().chain(&tm).copied().fold(0.0, f64::max);
                let mass = level.in_plane_mass;
                let kinetic = |k: f64| HBAR2_OVER_2M0_EV_NM2 * k * k / mass;
                if let Some(end) = hole_ev.last() {
                    reach = reach.min(level.energy_ev + kinetic(last) - end);
                }
                if strongest < LEAST_DIPOLE {
                    continue;
                }
                let along = Dispersion {
                    k_per_nm: &mixed.k_per_nm,
                    hole_ev: &hole_ev,
                };
                let mut lowest = level.energy_ev - hole_ev[0];
                along.over_k(
                    mass,
                    0.8 * line.half_width_ev,
                    f64::INFINITY,
                    |k, k_dk, interval, within| {
                        let share = mixed.degeneracy * HBAR2_OVER_2M0_EV_NM2 * k_dk;
                        let sample = Sample {
                            electron_ev: level.energy_ev + kinetic(k),
                            hole_ev: along.hole_at(interval, within),
                            te: share * along.at(&te, interval, within),
                            tm: share * along.at(&tm, interval, within),
                        };
                        lowest = lowest.min(sample.electron_ev - sample.hole_ev);
                        samples.push(sample);
                    },
                );
                edges.push(lowest);
            }
        }
    }
    (samples, edges, reach)
}

/// One of several equal wells that do not feel each other, with what stands on either side of all of
/// them; `None` where wells differ, or where the single bands show that they are coupled.
pub(super) fn one_of_equal_wells(stack: &Stack, bands: &SingleBands) -> Option<(usize, Stack)> {
    /// Levels of equal wells that are closer than this do not feel the other wells, eV.
    const UNCOUPLED_EV: f64 = 2e-6;

    let is_well = |layer: &Layer| layer.role == Role::Well;
    let first = stack.layers.iter().position(is_well)?;
    let last = stack.layers.iter().rposition(is_well)?;
    let wells = stack.well_count();
    let model = &stack.layers[first];
    let alike = stack.wells().all(|well| {
        well.material.substance == model.material.substance
            && well.grade_to.is_none()
            && (well.thickness_nm - model.thickness_nm).abs() < 1e-9
    });
    // A step belongs to its well: such stacks are solved whole.
    let steps = stack.layers.iter().any(|layer| layer.role == Role::Step);
    if wells < 2 || !alike || steps || stack.model.field_kv_cm != 0.0 {
        return None;
    }
    let uncoupled = [&bands.electron, &bands.heavy, &bands.light]
        .into_iter()
        .all(|ladder| {
            ladder.len() % wells == 0
                && ladder.chunks(wells).all(|group| {
                    (group[0].energy_ev - group[wells - 1].energy_ev).abs() < UNCOUPLED_EV
                })
        });
    if !uncoupled {
        return None;
    }
    let mut one = stack.clone();
    one.layers.drain(first + 1..=last);
    Some((wells, one))
}

#[cfg(test)]
mod tests {
    use crate::evaluation::Evaluation;
    use crate::materials::Parameters;
    use crate::structure::{Lineshape, Overrides, read};

    /// Gain is zero exactly at the quasi-Fermi splitting, with shrinkage and without, whatever the
    /// line, and changes its sign there.
    #[test]
    fn gain_of_mixed_bands_is_zero_at_the_splitting() {
        const TEXT: &str = "
            format = 1
            layers = [
              { role = 'barrier', material = 'GaAs', thickness_nm = 60 },
              { role = 'well', material = 'In0.2Ga0.8As', thickness_nm = 8 },
              { role = 'barrier', material = 'GaAs', thickness_nm = 60 },
            ]
            [substrate]
            material = 'GaAs'
            [model]
            bands = 'mixed'
        ";
        let parameters = Parameters::shipped();
        let mut stack = read(TEXT, &parameters, &Overrides::default())
            .expect("a structure")
            .stack;
        for lineshape in Lineshape::ALL {
            stack.model.lineshape = lineshape;
            let evaluation = Evaluation::new(&stack, &parameters).expect("levels");
            for (density_cm3, lowering_ev) in [(1.6e18, 0.0), (3e18, 0.046)] {
                let occupation =
                    evaluation.occupation(&evaluation.filling(density_cm3), lowering_ev);
                let splitting = occupation.splitting_ev();
                let gains = |photon_ev| {
                    let point = evaluation.emitter.point(&occupation, photon_ev);
                    (point.te_gain_cm, point.tm_gain_cm)
                };
                assert_eq!(gains(splitting), (0.0, 0.0), "{lineshape:?} {density_cm3}");
                let (below, above) = (gains(splitting - 1e-6), gains(splitting + 1e-6));
                assert!(below.0 > 0.0 && above.0 < 0.0, "{below:?} {above:?}");
                assert!(below.1 > 0.0 && above.1 < 0.0, "{below:?} {above:?}");
            }
        }
    }
}
