//! The two panels over the photon energy.

use super::spectra::Densities;
use super::{line_key, word_key};
use crate::evaluation::Spectrum;
use crate::sheet::figure::{
    Axis, Curve, Dash, Ink, Key, Mark, Naming, Note, Panel, Place, Rule, Side, Standing, TopAxis,
};
use crate::sheet::number::fixed;
use crate::spectra::Point;
use crate::units::{photon_ev, wavelength_nm};

/// Curves are shown where one of them is above this part of its largest value.
const SEEN: f64 = 0.01;
/// Absorption dwarfs gain: so much of it is shown, in highest gains.
const ABSORPTION_SHARE: f64 = 0.5;

/// Gain at every density, TE solid and TM dashed.
pub(super) fn gain_panel(spectrum: &Spectrum, densities: &Densities) -> Panel {
    let mut panel = Panel {
        plot_height_px: 340.0,
        x: photon_axis(spectrum),
        y: gain_axis(spectrum),
        top: Some(TopAxis {
            quantity: "vacuum wavelength".to_owned(),
            unit: "nm".to_owned(),
            of: wavelength_nm,
        }),
        keys: keys(spectrum, densities),
        curves: vec![without_carriers(spectrum)],
        ..Panel::default()
    };
    panel.notes.extend(name_of_absorption(&panel));
    for (step, run) in spectrum.runs.iter().enumerate() {
        let ink = densities.ink(step);
        let has_peak = run.te.is_some() || run.tm.is_some();
        let te_is_larger =
            run.te.map_or(0.0, |it| it.gain_cm) >= run.tm.map_or(0.0, |it| it.gain_cm);
        let curve = |of: fn(&Point) -> f64, dash: Dash, is_larger: bool| Curve {
            name: densities.written(run.density_cm3),
            naming: if has_peak && is_larger {
                Naming::AtPeak
            } else {
                Naming::Nowhere
            },
            points: over_photons(spectrum, &run.points, of),
            ink,
            dash,
            ..Curve::default()
        };
        panel
            .curves
            .push(curve(|point| point.te_gain_cm, Dash::Solid, te_is_larger));
        panel
            .curves
            .push(curve(|point| point.tm_gain_cm, Dash::Dashed, !te_is_larger));
        panel.notes.push(Note {
            at: (run.splitting_ev, 0.0),
            text: String::new(),
            ink,
            mark: Some(Mark::Ring),
            standing: Standing::Near(Side::Above),
        });
    }
    panel
}

/// Spontaneous emission at every density, with the peak of photoluminescence.
pub(super) fn emission_panel(spectrum: &Spectrum, densities: &Densities) -> Panel {
    let curves = spectrum.runs.iter().enumerate().map(|(step, run)| Curve {
        name: densities.written(run.density_cm3),
        naming: Naming::AtPeak,
        points: over_photons(spectrum, &run.points, |it| it.spontaneous_per_ev_cm3_s),
        ink: densities.ink(step),
        ..Curve::default()
    });
    let rules = spectrum.pl.map(|pl| Rule {
        at: Place::X(photon_ev(pl.peak_nm)),
        name: format!("photoluminescence peak, {} nm", fixed(pl.peak_nm, 1)),
        ink: Ink::Grey,
        dash: Dash::Dotted,
        width_px: 1.4,
    });
    Panel {
        plot_height_px: 210.0,
        x: photon_axis(spectrum),
        // Room over the highest curve for its name.
        y: Axis::new("spontaneous emission", "eV⁻¹ cm⁻³ s⁻¹").over(
            0.0,
            1.15 * largest(spectrum, |point| point.spontaneous_per_ev_cm3_s),
        ),
        curves: curves.collect(),
        rules: rules.into_iter().collect(),
        ..Panel::default()
    }
}

fn keys(spectrum: &Spectrum, densities: &Densities) -> Vec<Key> {
    let mut keys = vec![
        line_key("TE", Ink::Black, Dash::Solid),
        line_key("TM", Ink::Black, Dash::Dashed),
        Key {
            name: "transparency".to_owned(),
            mark: Some(Mark::Ring),
            ..Key::default()
        },
        word_key(densities.head()),
    ];
    keys.extend(spectrum.runs.iter().enumerate().map(|(step, run)| {
        let name = densities.written(run.density_cm3);
        line_key(name, densities.ink(step), Dash::Solid)
    }));
    keys
}

/// TE absorption of the empty bands, as negative gain.
fn without_carriers(spectrum: &Spectrum) -> Curve {
    let of = &spectrum.absorption;
    let points = of.photon_ev.iter().zip(&of.te_cm);
    Curve {
        ink: Ink::Grey,
        width_px: 1.0,
        naming: Naming::Nowhere,
        ..Curve::through("", points.map(|(&photon_ev, &te_cm)| (photon_ev, -te_cm)))
    }
}

/// Names the absorption of the empty bands half way down the part of it that is in sight.
fn name_of_absorption(panel: &Panel) -> Option<Note> {
    let half_cm = 0.5 * panel.y.range?.0;
    let points = &panel.curves.first()?.points;
    let at = points
        .iter()
        .find(|point| point.1.is_some_and(|gain_cm| gain_cm < half_cm))?;
    Some(Note {
        at: (at.0, half_cm),
        text: "TE without carriers".to_owned(),
        ink: Ink::Grey,
        mark: None,
        standing: Standing::Near(Side::Right),
    })
}

fn over_photons(
    spectrum: &Spectrum,
    points: &[Point],
    of: fn(&Point) -> f64,
) -> Vec<(f64, Option<f64>)> {
    let values = points.iter().map(|point| Some(of(point)));
    spectrum.photon_ev.iter().copied().zip(values).collect()
}

/// The photon energies at which something is to be seen, with a little air.
fn photon_axis(spectrum: &Spectrum) -> Axis {
    let axis = Axis::new("photon energy", "eV");
    let photons = &spectrum.photon_ev;
    let gains = |point: &Point| point.te_gain_cm.max(point.tm_gain_cm);
    let emission = |point: &Point| point.spontaneous_per_ev_cm3_s;
    let (most_gain, most_emission) = (largest(spectrum, gains), largest(spectrum, emission));
    let is_seen = |place: usize| {
        spectrum
            .runs
            .iter()
            .filter_map(|run| run.points.get(place))
            .any(|point| {
                gains(point) > SEEN * most_gain && most_gain > 0.0
                    || emission(point) > SEEN * most_emission && most_emission > 0.0
            })
    };
    let first = (0..photons.len()).find(|place| is_seen(*place));
    let last = (0..photons.len()).rfind(|place| is_seen(*place));
    let (Some(first), Some(last)) = (first, last) else {
        return axis;
    };
    let pl_ev = spectrum.pl.map(|pl| photon_ev(pl.peak_nm));
    let air = (photons.len() / 30).max(1);
    let from_ev = photons[first.saturating_sub(air)];
    let to_ev = photons[(last + air).min(photons.len() - 1)];
    let air_ev = 0.03 * (to_ev - from_ev);
    axis.over(
        pl_ev.map_or(from_ev, |it| from_ev.min(it - air_ev)),
        pl_ev.map_or(to_ev, |it| to_ev.max(it + air_ev)),
    )
}

fn largest(spectrum: &Spectrum, of: impl Fn(&Point) -> f64) -> f64 {
    let points = spectrum.runs.iter().flat_map(|run| &run.points);
    points.map(of).fold(0.0, f64::max)
}

/// All of the gain, and of the absorption as much as leaves the gain readable; all of it where
/// there is no gain.
fn gain_axis(spectrum: &Spectrum) -> Axis {
    let peaks = spectrum.runs.iter().flat_map(|run| [run.te, run.tm]);
    let highest = peaks.flatten().map(|peak| peak.gain_cm).fold(0.0, f64::max);
    let deepest = largest(spectrum, |point| -point.te_gain_cm.min(point.tm_gain_cm));
    let depth = if highest > 0.0 {
        deepest.min(ABSORPTION_SHARE * highest)
    } else {
        deepest
    };
    let range = highest + depth;
    Axis {
        heavy_zero: true,
        ..Axis::new("material gain", "cm⁻¹").over(-depth - 0.02 * range, highest + 0.08 * range)
    }
}
