//! The figure of `spread`: the wafers as bars with the window, and the sensitivities as bars.

use super::sigma;
use crate::design::{Sensitivity, Spread};
use crate::sheet::Stamp;
use crate::sheet::figure::{
    Area, Axis, Curve, Dash, Figure, Ink, Joint, Key, Naming, Note, Panel, Place, Row, Rule, Side,
    Standing, Stripe,
};
use crate::sheet::number::{fixed, plain, signed};
use crate::structure::Stack;
use std::f64::consts::PI;

/// Half the width of a bar of the sensitivities, in places of the axis.
const HALF_BAR: f64 = 0.3;

/// Distribution and sensitivities as one figure.
#[must_use]
pub fn spread_figure(stack: &Stack, spread: &Spread, stamp: &Stamp) -> Figure {
    let row = |panel| Row {
        panels: vec![panel],
        joint: Joint::Apart,
    };
    Figure {
        title: format!(
            "{}: {} of wafers",
            stack.title,
            spread.request.kind.meaning()
        ),
        caption: format!(
            "{} wafers drawn, sigma {} nm. Wavelengths are in vacuum. The error of the calculated \
             wavelength itself, {} nm, is not in the bars.",
            spread.request.draws,
            fixed(spread.sampled.sigma_nm, 2),
            plain(spread.request.model_nm)
        ),
        stamp: stamp.line(),
        description: "Distribution of the wavelength over wafers, and its sensitivities."
            .to_owned(),
        rows: vec![row(wafers(spread)), row(bars(spread))],
    }
}

fn wafers(spread: &Spread) -> Panel {
    let bars = &spread.histogram;
    let total = spread.request.draws as f64;
    let density = |count: usize| 100.0 * count as f64 / total / bars.width_nm;
    let edge = |bar: usize| bars.from_nm + bars.width_nm * bar as f64;
    let steps = || {
        bars.counts
            .iter()
            .enumerate()
            .map(|(bar, &count)| ((edge(bar), density(count)), (edge(bar + 1), density(count))))
    };
    let area = Area {
        spans: steps()
            .flat_map(|((a, height), (b, _))| [(a, Some((0.0, height))), (b, Some((0.0, height)))])
            .collect(),
        ink: Ink::Colour(2),
        opacity: 0.35,
    };
    let linear = spread.linear;
    let bell = (0..=200).map(|i| {
        let x = -4.0 + 0.04 * f64::from(i);
        let height = 100.0 * (-0.5 * x * x).exp() / (linear.sigma_nm * (2.0 * PI).sqrt());
        (linear.mean_nm + linear.sigma_nm * x, height)
    });
    let mut panel = Panel {
        plot_height_px: 300.0,
        x: Axis::new("vacuum wavelength", "nm"),
        y: Axis {
            includes: Some(0.0),
            ..Axis::new("wafers per nm", "%")
        },
        areas: vec![area],
        curves: vec![
            Curve {
                ink: Ink::Colour(0),
                width_px: 1.2,
                naming: Naming::Legend,
                ..Curve::steps("wafers drawn", steps())
            },
            Curve {
                ink: Ink::Black,
                dash: Dash::Dashed,
                width_px: 1.4,
                naming: Naming::Legend,
                ..Curve::through("linear law", bell)
            },
        ],
        rules: vec![Rule {
            at: Place::X(spread.nominal_nm),
            name: "as designed".to_owned(),
            ink: Ink::Colour(1),
            dash: Dash::Solid,
            width_px: 1.2,
        }],
        ..Panel::default()
    };
    if let Some(good) = spread.good {
        panel.stripes.push(Stripe {
            from: good.target_nm - good.tolerance_nm,
            to: good.target_nm + good.tolerance_nm,
            ink: Ink::Colour(7),
            opacity: 0.22,
        });
        panel.rules.push(Rule {
            at: Place::X(good.target_nm),
            name: "target".to_owned(),
            ink: Ink::Grey,
            dash: Dash::Dotted,
            width_px: 1.2,
        });
        panel.keys.push(Key {
            name: format!(
                "window ± {} nm: {} % good",
                plain(good.tolerance_nm),
                fixed(100.0 * good.sampled, 1)
            ),
            ink: Ink::Colour(7),
            opacity: 0.35,
            ..Key::default()
        });
    }
    panel
}

/// Bars of nm per sigma, the strongest on the left.
fn bars(spread: &Spread) -> Panel {
    let mut panel = Panel {
        plot_height_px: 230.0,
        x: Axis::new("growth variables, the strongest first", "")
            .over(0.4, spread.sensitivities.len() as f64 + 0.6),
        y: Axis {
            heavy_zero: true,
            includes: Some(0.0),
            ..Axis::new("wavelength with one sigma more", "nm")
        },
        ..Panel::default()
    };
    for (place, sensitivity) in spread.sensitivities.iter().enumerate() {
        let middle = place as f64 + 1.0;
        let ink = Ink::Colour(usize::from(sensitivity.nm < 0.0));
        panel.areas.push(Area {
            spans: [middle - HALF_BAR, middle + HALF_BAR]
                .map(|x| {
                    let height = sensitivity.nm;
                    (x, Some((height.min(0.0), height.max(0.0))))
                })
                .to_vec(),
            ink,
            opacity: 0.6,
        });
        panel.notes.push(label(sensitivity, middle, ink));
    }
    panel
}

fn label(sensitivity: &Sensitivity, middle: f64, ink: Ink) -> Note {
    let variable = sensitivity.variable;
    let side = if sensitivity.nm < 0.0 {
        Side::Below
    } else {
        Side::Above
    };
    Note {
        at: (middle, sensitivity.nm),
        text: format!(
            "{} {}: {} nm",
            variable.cause.name(),
            sigma(variable.cause, variable.sigma),
            signed(sensitivity.nm, 2)
        ),
        ink,
        mark: None,
        standing: Standing::Near(side),
    }
}
