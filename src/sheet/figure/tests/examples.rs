//! A band diagram and gain spectra as the program draws them, from data of made-up shape.

use crate::sheet::figure::{
    Area, Axis, Curve, Dash, Figure, Ink, Joint, Key, Mark, Naming, Note, Panel, Place, Row, Rule,
    Side, Standing, Stripe, TopAxis, heights_at_one_scale,
};

const WELL_NM: f64 = 6.0;
/// Interfaces of two wells between barriers, and the ends of the picture.
const INTERFACES_NM: [f64; 6] = [0.0, 20.0, 26.0, 36.0, 42.0, 62.0];

/// A band edge with one value in the wells and one outside.
fn edge(name: &str, inside_ev: f64, outside_ev: f64, ink: Ink, dash: Dash) -> Curve {
    let pieces = INTERFACES_NM.windows(2).enumerate().map(|(layer, ends)| {
        let edge_ev = if layer % 2 == 1 {
            inside_ev
        } else {
            outside_ev
        };
        ((ends[0], edge_ev), (ends[1], edge_ev))
    });
    Curve {
        ink,
        dash,
        width_px: 2.2,
        naming: Naming::Nowhere,
        ..Curve::steps(name, pieces)
    }
}

/// Draws |φ|² of a level with so many nodes in each well, upwards (1) or downwards (−1).
fn draw_level(panel: &mut Panel, name: &str, level_ev: f64, nodes: i32, ink: Ink, sense: f64) {
    let density = |z_nm: f64| -> f64 {
        let in_wells = [23.0, 39.0].map(|middle_nm| {
            let u = (z_nm - middle_nm) / (0.45 * WELL_NM);
            (-u * u).exp() * u.powi(nodes)
        });
        in_wells.iter().sum::<f64>().powi(2)
    };
    let points: Vec<(f64, f64)> = (0..=310)
        .map(|i| f64::from(i) * 0.2)
        .map(|z_nm| (z_nm, level_ev + sense * 0.05 * density(z_nm)))
        .collect();
    panel.areas.push(Area {
        spans: points
            .iter()
            .map(|(z, e)| (*z, Some((level_ev, *e))))
            .collect(),
        ink,
        opacity: 0.25,
    });
    panel.curves.push(Curve {
        naming: Naming::Nowhere,
        ink,
        width_px: 1.0,
        ..Curve::through("", points)
    });
    panel.notes.push(Note {
        at: (62.0, level_ev),
        text: name.to_owned(),
        ink,
        mark: None,
        standing: Standing::Beside,
    });
}

fn line_key(name: &str, ink: Ink, dash: Dash) -> Key {
    Key {
        name: name.into(),
        ink,
        dash,
        width_px: 2.2,
        ..Key::default()
    }
}

/// Two wells, two electron and four hole levels; the vertical axis is broken in the gap.
pub(super) fn band_figure() -> Figure {
    let (electron, heavy, light) = (Ink::Colour(0), Ink::Colour(1), Ink::Colour(4));
    let stripes = [(20.0, 26.0), (36.0, 42.0)].map(|(from, to)| Stripe {
        from,
        to,
        ink: Ink::Grey,
        opacity: 0.1,
    });
    let heights = heights_at_one_scale(&[0.36, 0.22], 440.0);
    let position = Axis::new("position along growth, substrate left", "nm").over(0.0, 62.0);
    let mut conduction = Panel {
        plot_height_px: heights[0],
        x: position.clone(),
        y: Axis::new("electron energy", "eV").over(0.12, 0.48),
        stripes: stripes.to_vec(),
        curves: vec![edge("", 0.15, 0.42, electron, Dash::Solid)],
        keys: vec![
            line_key("conduction edge", electron, Dash::Solid),
            line_key("heavy-hole edge", heavy, Dash::Solid),
            line_key("light-hole edge", light, Dash::Dashed),
            Key {
                name: "wells".into(),
                ink: Ink::Grey,
                opacity: 0.15,
                ..Key::default()
            },
        ],
        ..Panel::default()
    };
    draw_level(&mut conduction, "e1 ×2", 0.21, 0, electron, 1.0);
    draw_level(&mut conduction, "e2 ×2", 0.36, 1, electron, 1.0);
    let mut valence = Panel {
        plot_height_px: heights[1],
        x: position,
        y: Axis::new("energy", "eV").over(-0.87, -0.65),
        stripes: stripes.to_vec(),
        curves: vec![
            edge("", -0.68, -0.82, heavy, Dash::Solid),
            edge("", -0.74, -0.79, light, Dash::Dashed),
        ],
        ..Panel::default()
    };
    draw_level(&mut valence, "hh1 ×2", -0.695, 0, heavy, -1.0);
    draw_level(&mut valence, "hh2 ×2", -0.748, 1, heavy, -1.0);
    draw_level(&mut valence, "hh3 ×2", -0.81, 2, heavy, -1.0);
    draw_level(&mut valence, "lh1 ×2", -0.755, 0, light, -1.0);
    Figure {
        title: "Estuary 1310: band edges and levels".into(),
        caption: "Envelopes |φ|² stand on their levels. The vertical axis is broken in the gap; \
                  both parts have one scale."
            .into(),
        stamp: "stepwell 0.1.0 · file 3f9a1c… · parameters 77b0e2… · bands single · 300 K".into(),
        description: "Band edges of two wells with two electron and four hole levels.".into(),
        rows: vec![
            Row {
                panels: vec![conduction],
                joint: Joint::BrokenAxis,
            },
            Row {
                panels: vec![valence],
                joint: Joint::Apart,
            },
        ],
    }
}

const DENSITIES_1E18: [f64; 5] = [1.0, 2.0, 3.0, 4.0, 5.0];

fn transparency_ev(density_1e18: f64) -> f64 {
    0.90 + 0.075 * density_1e18.ln()
}

/// A gain curve: a rounded step times an inversion factor.
fn gain(density_1e18: f64, strength_cm: f64, edge_ev: f64) -> Vec<(f64, f64)> {
    let edge_ev = edge_ev - 0.006 * density_1e18;
    (0..=460)
        .map(|i| 0.85 + f64::from(i) * 0.0005)
        .map(|photon_ev| {
            let step = 1.0 / (1.0 + ((edge_ev - photon_ev) / 0.007).exp());
            let inversion = -((photon_ev - transparency_ev(density_1e18)) / 0.08).tanh();
            (photon_ev, strength_cm * step * inversion)
        })
        .collect()
}

fn spectra_panel() -> Panel {
    let mut panel = Panel {
        plot_height_px: 360.0,
        x: Axis::new("photon energy", "eV").over(0.85, 1.08),
        y: Axis {
            heavy_zero: true,
            ..Axis::new("material gain", "cm⁻¹").over(-2000.0, 4000.0)
        },
        top: Some(TopAxis {
            quantity: "vacuum wavelength".into(),
            unit: "nm".into(),
            of: crate::units::wavelength_nm,
        }),
        keys: vec![
            line_key("TE", Ink::Black, Dash::Solid),
            line_key("TM", Ink::Black, Dash::Dashed),
            Key {
                name: "transparency".into(),
                mark: Some(Mark::Ring),
                ..Key::default()
            },
            Key {
                name: "numbers: density in 10¹⁸ cm⁻³".into(),
                ..Key::default()
            },
        ],
        ..Panel::default()
    };
    for (step, density) in DENSITIES_1E18.into_iter().enumerate() {
        let ink = Ink::Ramp {
            step,
            of: DENSITIES_1E18.len(),
        };
        panel.curves.push(Curve {
            ink,
            naming: Naming::AtPeak,
            ..Curve::through(format!("{density}"), gain(density, 4200.0, 0.925))
        });
        panel.curves.push(Curve {
            ink,
            dash: Dash::Dashed,
            naming: Naming::Nowhere,
            ..Curve::through("", gain(density, 2100.0, 0.975))
        });
        panel.notes.push(Note {
            at: (transparency_ev(density), 0.0),
            text: String::new(),
            ink,
            mark: Some(Mark::Ring),
            standing: Standing::Near(Side::Above),
        });
    }
    panel
}

fn growth_panel() -> Panel {
    let peaks = DENSITIES_1E18.map(|density| {
        let gains = gain(density, 4200.0, 0.925)
            .into_iter()
            .map(|(_, gain_cm)| gain_cm);
        (density * 1e18, gains.fold(f64::NEG_INFINITY, f64::max))
    });
    let fit = (0..=60)
        .map(|i| 1e18 * 1.027f64.powi(i))
        .map(|n| (n, 2250.0 * (n / 1.15e18).ln()));
    Panel {
        plot_height_px: 230.0,
        x: Axis::new("carrier density", "cm⁻³")
            .logarithmic()
            .over(0.8e18, 6e18),
        y: Axis {
            heavy_zero: true,
            includes: Some(0.0),
            ..Axis::new("peak gain", "cm⁻¹")
        },
        curves: vec![
            Curve {
                ink: Ink::Colour(0),
                width_px: 0.0,
                mark: Some(Mark::Disc),
                ..Curve::through("TE", peaks)
            },
            Curve {
                ink: Ink::Colour(0),
                dash: Dash::Dashed,
                width_px: 1.2,
                ..Curve::through("g₀ ln(N/Nₜᵣ), g₀ = 2250 cm⁻¹", fit)
            },
        ],
        rules: vec![Rule {
            at: Place::X(1.15e18),
            name: "transparency".into(),
            ink: Ink::Grey,
            dash: Dash::Dotted,
            width_px: 1.2,
        }],
        ..Panel::default()
    }
}

/// Gain at five densities over photon energy, with the wavelength on top; below it peak gain and
/// current over density.
pub(super) fn spectrum_figure() -> Figure {
    let current = Panel {
        plot_height_px: 230.0,
        x: Axis::new("carrier density", "cm⁻³").over(0.0, 5.5e18),
        y: Axis {
            includes: Some(0.0),
            ..Axis::new("radiative current", "A cm⁻²")
        },
        curves: vec![Curve {
            ink: Ink::Colour(1),
            mark: Some(Mark::Diamond),
            naming: Naming::AtEnd,
            ..Curve::through("all wells", DENSITIES_1E18.map(|n| (n * 1e18, 9.0 * n * n)))
        }],
        ..Panel::default()
    };
    Figure {
        title: "Estuary 1310: gain at five densities".into(),
        caption: "300 K, sech lineshape 100 fs, gap shrinkage on.".into(),
        stamp: "stepwell 0.1.0 · file 3f9a1c… · parameters 77b0e2…".into(),
        description: "Gain spectra, and peak gain against density.".into(),
        rows: vec![
            Row {
                panels: vec![spectra_panel()],
                joint: Joint::Apart,
            },
            Row {
                panels: vec![growth_panel(), current],
                joint: Joint::Apart,
            },
        ],
    }
}
