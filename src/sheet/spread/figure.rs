//! The figure of `spread`: the wafers as bars with the window, and the sensitivities as bars.

use super::sigma;
use crate::design::Spread;
use crate::sheet::Stamp;
use crate::sheet::figure::{
    Area, Axis, Curve, Dash, Figure, Ink, Joint, Key, Naming, Note, Panel, Place, Row, Rule, Side,
    Standing, Stripe,
};
use crate::sheet::number::{fixed, plain, signed};
use crate::sheet::picture::short_stamp;
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
        stamp: short_stamp(stamp),
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
    let density_of_law = 100.0 / (linear.sigma_nm * (2.0 * PI).sqrt());
    let bell = (0..=200).map(|i| {
        let x = -4.0 + 0.04 * f64::from(i);
        let height = density_of_law * (-0.5 * x * x).exp();
        (linear.mean_nm + linear.sigma_nm * x, height)
    });
    let highest = steps()
        .map(|((_, height), _)| height)
        .chain([density_of_law])
        .fold(0.0, f64::max);
    let mut panel = Panel {
        plot_height_px: 300.0,
        x: Axis::new("vacuum wavelength", "nm"),
        // Air over the bars for the names of the rules.
        y: Axis::new("wafers per nm", "%").over(0.0, 1.2 * highest),
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
        for side in [-1.0, 1.0] {
            panel.rules.push(Rule {
                at: Place::X(good.target_nm + side * good.tolerance_nm),
                name: String::new(),
                ink: Ink::Grey,
                dash: Dash::Solid,
                width_px: 0.8,
            });
        }
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

/// Bars of nm per sigma, the strongest on top: longer wavelengths to the right.
fn bars(spread: &Spread) -> Panel {
    let count = spread.sensitivities.len() as f64;
    let ends = spread
        .sensitivities
        .iter()
        .fold((0.0f64, 0.0f64), |(low, high), it| {
            (low.min(it.nm), high.max(it.nm))
        });
    // Air for the numbers at the ends of the bars.
    let air = 0.2 * (ends.1 - ends.0).max(f64::MIN_POSITIVE);
    let mut panel = Panel {
        plot_height_px: 34.0 * count + 16.0,
        x: Axis {
            heavy_zero: true,
            ..Axis::new("wavelength with one sigma more", "nm").over(ends.0 - air, ends.1 + air)
        },
        y: Axis::new("", "").over(-count - 0.5, -0.5),
        ..Panel::default()
    };
    for (place, sensitivity) in spread.sensitivities.iter().enumerate() {
        let middle = -1.0 - place as f64;
        let variable = sensitivity.variable;
        let ink = Ink::Colour(usize::from(sensitivity.nm < 0.0));
        panel.y.names.push((
            middle,
            format!(
                "{}, {}",
                variable.cause.name(),
                sigma(variable.cause, variable.sigma)
            ),
        ));
        panel.areas.push(Area {
            spans: [0.0, sensitivity.nm]
                .map(|x| (x, Some((middle - HALF_BAR, middle + HALF_BAR))))
                .to_vec(),
            ink,
            opacity: 0.6,
        });
        panel.notes.push(Note {
            at: (sensitivity.nm, middle),
            text: format!("{} nm", signed(sensitivity.nm, 2).replace('-', "−")),
            ink,
            mark: None,
            standing: Standing::Near(if sensitivity.nm < 0.0 {
                Side::Left
            } else {
                Side::Right
            }),
        });
    }
    panel
}
