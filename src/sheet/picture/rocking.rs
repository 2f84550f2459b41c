//! The rocking curve, compressive to the left.

use super::{line_key, short_stamp};
use crate::diffraction::{Diffraction, RESOLUTION_ARCSEC, RockingCurve};
use crate::sheet::figure::{
    Axis, Curve, Dash, Figure, Ink, Joint, Mark, Naming, Note, Panel, Row, Side, Standing,
};
use crate::sheet::number::{fixed, signed};
use crate::sheet::stamp::Stamp;
use crate::structure::Stack;

/// What lies below is lost in the background of a diffractometer.
const BACKGROUND: f64 = 1e-6;

/// Reflectivity against ω, on a logarithmic scale, with the names of the peaks.
#[must_use]
pub fn rocking_figure(
    stack: &Stack,
    seen: &Diffraction,
    curve: &RockingCurve,
    stamp: &Stamp,
) -> Figure {
    Figure {
        title: format!("{}: X-ray rocking curve, {}", stack.title, seen.reflection),
        caption: format!(
            "Cu Kα1, ω–2θ scan; offsets in ω from the {} substrate, compressive layers to the left. \
             Kinematical: no beam is weakened by reflection, too high where thick layers reflect most \
             of it. Broadened to {} arcsec; no background, no thermal motion.",
            stack.substrate.formula(),
            fixed(RESOLUTION_ARCSEC, 0)
        ),
        stamp: short_stamp(stamp),
        description: description(seen),
        rows: vec![Row {
            panels: vec![panel(seen, curve)],
            joint: Joint::Apart,
        }],
    }
}

fn panel(seen: &Diffraction, curve: &RockingCurve) -> Panel {
    let points = |of: fn(&crate::diffraction::CurvePoint) -> f64| {
        let points = curve.points.iter();
        points
            .map(|point| (point.offset_arcsec, Some(of(point))))
            .collect()
    };
    let highest = curve
        .points
        .iter()
        .map(|point| point.intensity.max(point.kinematical))
        .fold(1.0, f64::max);
    let ends = curve.points.first().zip(curve.points.last());
    let (from, to) = ends.map_or((-1.0, 1.0), |(first, last)| {
        (first.offset_arcsec, last.offset_arcsec)
    });
    Panel {
        plot_height_px: 380.0,
        x: Axis::new("ω less that of the substrate, ω–2θ scan", "arcsec").over(from, to),
        y: Axis::new("reflectivity", "")
            .logarithmic()
            .over(BACKGROUND, 30.0 * highest),
        keys: vec![
            line_key("kinematical", Ink::Colour(1), Dash::Dashed),
            line_key("with extinction", Ink::Black, Dash::Solid),
        ],
        curves: vec![
            Curve {
                ink: Ink::Colour(1),
                dash: Dash::Dashed,
                width_px: 1.2,
                naming: Naming::Nowhere,
                points: points(|point| point.kinematical),
                ..Curve::default()
            },
            Curve {
                width_px: 1.2,
                naming: Naming::Nowhere,
                points: points(|point| point.intensity),
                ..Curve::default()
            },
        ],
        notes: notes(seen, curve),
        ..Panel::default()
    }
}

/// Names over the substrate's peak, the zero order and the satellites.
fn notes(seen: &Diffraction, curve: &RockingCurve) -> Vec<Note> {
    let height = |offset_arcsec: f64| {
        let near = |it: &&crate::diffraction::CurvePoint| {
            (it.offset_arcsec - offset_arcsec).abs() < 2.0 * RESOLUTION_ARCSEC
        };
        let points = curve.points.iter().filter(near);
        points.map(|it| it.intensity).fold(BACKGROUND, f64::max)
    };
    let note = |offset_arcsec: f64, text: String| Note {
        at: (offset_arcsec, height(offset_arcsec)),
        text,
        ink: Ink::Black,
        mark: Some(Mark::Ring),
        standing: Standing::Near(Side::Above),
    };
    let satellites = seen.multi_well.iter().flat_map(|it| &it.satellites);
    std::iter::once(note(0.0, "substrate".to_owned()))
        .chain(
            satellites
                .filter(|it| height(it.peak.offset_arcsec) > 3.0 * BACKGROUND)
                .map(|it| {
                    let name = if it.order == 0 {
                        "0".to_owned()
                    } else {
                        signed(f64::from(it.order), 0).replace('-', "−")
                    };
                    note(it.peak.offset_arcsec, name)
                }),
        )
        .collect()
}

fn description(seen: &Diffraction) -> String {
    seen.multi_well.as_ref().map_or_else(
        || "Substrate and layers; the wells do not repeat.".to_owned(),
        |multi_well| {
            let zero = multi_well.zero_order();
            format!(
                "Satellites {} arcsec apart about a zero order at {} arcsec.",
                fixed(multi_well.spacing_arcsec, 0),
                zero.map_or(String::new(), |it| signed(it.peak.offset_arcsec, 0))
            )
        },
    )
}
