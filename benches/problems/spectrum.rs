//! Gain and emission at 400 photon energies from 40 pairs at 80 wave numbers.

use stepwell::spectra::{Dispersive, Emitter, Line, Occupation, Point, Sample};
use stepwell::structure::Lineshape;
use stepwell::units::HBAR2_OVER_2M0_EV_NM2;

/// Photon energies: the first, their distance, eV, and how many.
pub(crate) const PHOTONS: (f64, f64, usize) = (0.75, 1e-3, 400);
const PAIRS: u32 = 40;
const WAVE_NUMBERS: u32 = 80;
const STEP_PER_NM: f64 = 0.0125;

/// Carriers of a strongly inverted well at room temperature.
pub(crate) const OCCUPATION: Occupation = Occupation {
    fermi_electron_ev: 0.93,
    fermi_hole_ev: -0.02,
    lowering_ev: 0.03,
    thermal_ev: 0.025_852,
};

/// Pairs whose edges stand 6 meV apart, with parabolas of their own.
pub(crate) fn samples() -> Vec<Sample> {
    (0..PAIRS)
        .flat_map(|pair| {
            let pair = f64::from(pair);
            (0..WAVE_NUMBERS).map(move |at| {
                let k = (f64::from(at) + 0.5) * STEP_PER_NM;
                let kinetic = HBAR2_OVER_2M0_EV_NM2 * k * k;
                let share = HBAR2_OVER_2M0_EV_NM2 * k * STEP_PER_NM;
                Sample {
                    electron_ev: 0.84 + 4e-3 * pair + kinetic / 0.045,
                    hole_ev: -2e-3 * pair - kinetic / 0.15,
                    te: share * (1.5 - 0.02 * pair),
                    tm: share * (0.1 + 0.02 * pair),
                }
            })
        })
        .collect()
}

/// The emitter of the samples: its constants scale all methods alike.
pub(crate) fn emitter(shape: Lineshape) -> Dispersive {
    Dispersive::new(
        samples(),
        vec![0.84],
        1.5,
        25.0,
        8.0,
        3.4,
        Line::new(shape, 100.0),
    )
}

/// Gain and emission at all photon energies.
pub(crate) fn solve(emitter: &Dispersive) -> Vec<Point> {
    let (low_ev, step_ev, count) = PHOTONS;
    emitter.sample(&OCCUPATION, low_ev, step_ev, count)
}
