//! Structures over one another: gain spectra, and the densities of states that make them.

use super::{line_key, short_stamp};
use crate::design::{Equal, Weighed};
use crate::sheet::figure::{Axis, Curve, Dash, Figure, Ink, Joint, Naming, Panel, Row, TopAxis};
use crate::sheet::number::{plain, power};
use crate::sheet::stamp::Stamp;
use crate::sheet::weigh::measure;
use crate::units::wavelength_nm;

/// Absorption dwarfs gain: so much of it is shown, in highest gains.
const ABSORPTION_SHARE: f64 = 0.4;

/// A comparison as a figure.
#[must_use]
pub fn weigh_figure(weighed: &[Weighed], equal: Equal, stamp: &Stamp) -> Figure {
    let densities: Vec<String> = weighed
        .iter()
        .filter_map(|column| {
            let density = column.density_cm3?;
            Some(format!("{} at {} cm⁻³", column.name, power(density, 3)))
        })
        .collect();
    Figure {
        title: format!("Side by side at {}", measure(weighed, equal)),
        caption: densities.join("; "),
        stamp: short_stamp(stamp),
        description: format!(
            "Gain spectra of {} columns over one another, TE solid and TM dashed, and below the \
             density of states of their electrons: steps of wells, a square root of bulk.",
            weighed.len()
        ),
        rows: vec![
            Row {
                panels: vec![gain(weighed)],
                joint: Joint::Apart,
            },
            Row {
                panels: vec![states(weighed)],
                joint: Joint::Apart,
            },
        ],
    }
}

fn ink(index: usize) -> Ink {
    Ink::Colour(index)
}

fn gain(weighed: &[Weighed]) -> Panel {
    let top = weighed
        .iter()
        .filter_map(|column| Some(column.gain()?.1.gain_cm))
        .fold(0.0, f64::max);
    let photons = || weighed.iter().flat_map(|column| &column.photon_ev).copied();
    let (low, high) = (
        photons().fold(f64::INFINITY, f64::min),
        photons().fold(f64::NEG_INFINITY, f64::max),
    );
    let mut x = Axis::new("photon energy", "eV");
    if low < high {
        x = x.over(low, high);
    }
    let mut y = Axis::new("gain of the material", "cm⁻¹");
    if top > 0.0 {
        y = y.over(-ABSORPTION_SHARE * top, 1.12 * top);
    }
    y.heavy_zero = true;
    let mut panel = Panel {
        plot_height_px: 330.0,
        x,
        y,
        top: Some(TopAxis {
            quantity: "vacuum wavelength".to_owned(),
            unit: "nm".to_owned(),
            of: wavelength_nm,
        }),
        keys: vec![
            line_key("TE", Ink::Black, Dash::Solid),
            line_key("TM", Ink::Black, Dash::Dashed),
        ],
        ..Panel::default()
    };
    for (index, column) in weighed.iter().enumerate() {
        panel
            .keys
            .push(line_key(column.name.clone(), ink(index), Dash::Solid));
        let te = column.points.iter().map(|point| point.te_gain_cm);
        let tm = column.points.iter().map(|point| point.tm_gain_cm);
        let points = |gains: &mut dyn Iterator<Item = f64>| -> Vec<(f64, Option<f64>)> {
            column
                .photon_ev
                .iter()
                .copied()
                .zip(gains.map(Some))
                .collect()
        };
        let te = points(&mut te.into_iter());
        let tm = points(&mut tm.into_iter());
        panel.curves.push(Curve {
            name: column.name.clone(),
            naming: Naming::AtPeak,
            points: te,
            ink: ink(index),
            ..Curve::default()
        });
        panel.curves.push(Curve {
            naming: Naming::Nowhere,
            points: tm,
            ink: ink(index),
            dash: Dash::Dashed,
            ..Curve::default()
        });
    }
    panel
}

fn states(weighed: &[Weighed]) -> Panel {
    let curves = weighed.iter().enumerate().map(|(index, column)| Curve {
        name: format!("{}, {} nm", column.name, plain(round(column.thickness_nm))),
        naming: Naming::AtEnd,
        points: column
            .states_per_ev_cm3
            .iter()
            .map(|&(energy_ev, states)| (energy_ev, Some(states)))
            .collect(),
        ink: ink(index),
        dash: Dash::of(index),
        ..Curve::default()
    });
    Panel {
        title: "Density of states of the electrons, per volume of what emits".to_owned(),
        plot_height_px: 210.0,
        x: Axis::new("energy above the first edge", "eV"),
        y: Axis {
            includes: Some(0.0),
            ..Axis::new("states", "eV⁻¹ cm⁻³")
        },
        curves: curves.collect(),
        ..Panel::default()
    }
}

fn round(value: f64) -> f64 {
    (1e3 * value).round() / 1e3
}
