//! Whole figures: three as the program draws them, and any number of absurd ones.
//!
//! With `STEPWELL_FIGURES` set to a folder, the three are written there to be looked at.

use proptest::prelude::*;

use super::*;

/// Two wells between barriers; levels and envelopes are of made-up shape.
fn band_figure() -> Figure {
    let (well_nm, barrier_nm) = (6.0, 10.0);
    let edges_nm = [0.0, 20.0, 26.0, 36.0, 42.0, 62.0];
    let profile = |inside: f64, outside: f64| -> Vec<((f64, f64), (f64, f64))> {
        edges_nm
            .windows(2)
            .enumerate()
            .map(|(layer, ends)| {
                let edge_ev = if layer % 2 == 1 { inside } else { outside };
                ((ends[0], edge_ev), (ends[1], edge_ev))
            })
            .collect()
    };
    let envelope = |level_ev: f64, sense: f64, nodes: i32| -> Vec<(f64, f64)> {
        (0..=310)
            .map(|i| {
                let z_nm = f64::from(i) * 0.2;
                let phi: f64 = [23.0, 39.0]
                    .iter()
                    .map(|middle| {
                        let u = (z_nm - middle) / (0.45 * well_nm);
                        (-u * u).exp() * u.powi(nodes)
                    })
                    .sum();
                (z_nm, level_ev + sense * 0.05 * phi * phi)
            })
            .collect()
    };
    let draw = |panel: &mut Panel, levels: &[(&str, f64, i32)], ink: Ink, sense: f64| {
        for (name, level_ev, nodes) in levels {
            let points = envelope(*level_ev, sense, *nodes);
            panel.areas.push(Area {
                spans: points
                    .iter()
                    .map(|(z, e)| (*z, Some((*level_ev, *e))))
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
                at: (62.0, *level_ev),
                text: (*name).to_owned(),
                ink,
                mark: None,
                standing: Standing::Beside,
            });
        }
    };
    let edge = |name: &str, pieces, ink, dash| Curve {
        ink,
        dash,
        width_px: 2.2,
        ..Curve::steps(name, pieces)
    };
    let stripes: Vec<Stripe> = [(20.0, 26.0), (36.0, 36.0 + well_nm)]
        .map(|(from, to)| Stripe {
            from,
            to,
            ink: Ink::Grey,
            opacity: 0.1,
        })
        .to_vec();
    let heights = heights_at_one_scale(&[0.36, 0.22], 440.0);
    let mut conduction = Panel {
        plot_height_px: heights[0],
        x: Axis::new("position along growth, substrate left", "nm").over(0.0, 52.0 + barrier_nm),
        y: Axis::new("electron energy", "eV").over(0.12, 0.48),
        stripes: stripes.clone(),
        curves: vec![edge(
            "conduction edge",
            profile(0.15, 0.42),
            Ink::Colour(0),
            Dash::Solid,
        )],
        keys: vec![
            Key {
                name: "conduction edge".into(),
                ink: Ink::Colour(0),
                width_px: 2.2,
                ..Key::default()
            },
            Key {
                name: "heavy-hole edge".into(),
                ink: Ink::Colour(1),
                width_px: 2.2,
                ..Key::default()
            },
            Key {
                name: "light-hole edge".into(),
                ink: Ink::Colour(4),
                dash: Dash::Dashed,
                width_px: 2.2,
                ..Key::default()
            },
            Key {
                name: "wells".into(),
                ink: Ink::Grey,
                opacity: 0.15,
                ..Key::default()
            },
        ],
        ..Panel::default()
    };
    draw(
        &mut conduction,
        &[("e1 ×2", 0.21, 0), ("e2 ×2", 0.36, 1)],
        Ink::Colour(0),
        1.0,
    );
    let mut valence = Panel {
        plot_height_px: heights[1],
        x: conduction.x.clone(),
        y: Axis::new("energy", "eV").over(-0.87, -0.65),
        stripes,
        curves: vec![
            Curve {
                naming: Naming::Nowhere,
                ..edge(
                    "heavy-hole edge",
                    profile(-0.68, -0.82),
                    Ink::Colour(1),
                    Dash::Solid,
                )
            },
            Curve {
                naming: Naming::Nowhere,
                ..edge(
                    "light-hole edge",
                    profile(-0.74, -0.79),
                    Ink::Colour(4),
                    Dash::Dashed,
                )
            },
        ],
        ..Panel::default()
    };
    let heavy = [
        ("hh1 ×2", -0.695, 0),
        ("hh2 ×2", -0.748, 1),
        ("hh3 ×2", -0.81, 2),
    ];
    draw(&mut valence, &heavy, Ink::Colour(1), -1.0);
    draw(&mut valence, &[("lh1 ×2", -0.755, 0)], Ink::Colour(4), -1.0);
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

/// A gain curve of made-up shape: a step, an inversion factor, a tail.
fn gain_cm(photon_ev: f64, density_1e18: f64, strength: f64, edge_ev: f64) -> f64 {
    let splitting_ev = 0.90 + 0.075 * density_1e18.ln();
    let step = 1.0 / (1.0 + ((edge_ev - photon_ev) / 0.007).exp());
    strength * step * -((photon_ev - splitting_ev) / 0.08).tanh()
}

fn peak(points: &[(f64, f64)]) -> (f64, f64) {
    points
        .iter()
        .copied()
        .fold((0.0, f64::NEG_INFINITY), |best, point| {
            if point.1 > best.1 { point } else { best }
        })
}

fn spectrum_figure() -> Figure {
    let densities = [1.0, 2.0, 3.0, 4.0, 5.0];
    let mut spectra = Panel {
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
            Key {
                name: "TE".into(),
                width_px: 1.8,
                ..Key::default()
            },
            Key {
                name: "TM".into(),
                dash: Dash::Dashed,
                width_px: 1.8,
                ..Key::default()
            },
            Key {
                name: "transparency, ħω = F_c − F_v".into(),
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
    let mut peaks = Vec::new();
    for (step, density) in densities.iter().enumerate() {
        let ink = Ink::Ramp {
            step,
            of: densities.len(),
        };
        let curve = |strength: f64, edge_ev: f64| -> Vec<(f64, f64)> {
            (0..=460)
                .map(|i| 0.85 + f64::from(i) * 0.0005)
                .map(|photon_ev| (photon_ev, gain_cm(photon_ev, *density, strength, edge_ev)))
                .collect()
        };
        let te = curve(4200.0, 0.925 - 0.006 * density);
        peaks.push((density * 1e18, peak(&te).1));
        spectra.curves.push(Curve {
            ink,
            naming: Naming::AtPeak,
            ..Curve::through(format!("{density}"), te)
        });
        spectra.curves.push(Curve {
            ink,
            dash: Dash::Dashed,
            naming: Naming::Nowhere,
            ..Curve::through("", curve(2100.0, 0.975 - 0.006 * density))
        });
        spectra.notes.push(Note {
            at: (0.90 + 0.075 * density.ln(), 0.0),
            text: String::new(),
            ink,
            mark: Some(Mark::Ring),
            standing: Standing::Near(Side::Above),
        });
    }
    let fit = (0..=60)
        .map(|i| 1e18 * 1.0597f64.powi(i))
        .map(|n| (n, 2250.0 * (n / 1.15e18).ln()));
    let growth = Panel {
        plot_height_px: 230.0,
        x: Axis::new("carrier density", "cm⁻³")
            .logarithmic()
            .over(0.8e18, 12e18),
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
    };
    let current = Panel {
        plot_height_px: 230.0,
        x: Axis::new("carrier density", "cm⁻³").over(0.0, 5.5e18),
        y: Axis::new("radiative current", "A cm⁻²"),
        curves: vec![Curve {
            ink: Ink::Colour(1),
            mark: Some(Mark::Diamond),
            naming: Naming::AtEnd,
            ..Curve::through("all wells", densities.map(|n| (n * 1e18, 9.0 * n * n)))
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
                panels: vec![spectra],
                joint: Joint::Apart,
            },
            Row {
                panels: vec![growth, current],
                joint: Joint::Apart,
            },
        ],
    }
}

/// Everything that holds for every figure, whatever is in it.
fn assert_in_order(figure: &Figure) {
    // Sums of lengths may differ in the last digits.
    const HAIR_PX: f64 = 1e-6;
    let mut layout = figure.layout();
    for text in &mut layout.texts {
        text.bounds = text.bounds.grown(-HAIR_PX);
    }
    let room = layout.picture;
    for (index, text) in layout.texts.iter().enumerate() {
        assert!(room.contains(text.bounds), "{text:?} leaves {room:?}");
        for other in &layout.texts[..index] {
            assert!(!text.bounds.overlaps(other.bounds), "{text:?} on {other:?}");
        }
    }
    for frame in &layout.frames {
        assert!(room.contains(frame.panel), "{frame:?}");
        assert!(frame.panel.contains(frame.plot), "{frame:?}");
        assert!(frame.plot.width_px() > 100.0, "{frame:?}");
    }
    for (index, frame) in layout.frames.iter().enumerate() {
        for other in &layout.frames[..index] {
            assert!(!frame.panel.overlaps(other.panel), "{frame:?} on {other:?}");
        }
    }
    for text in &layout.texts {
        let inside = layout
            .frames
            .iter()
            .any(|frame| frame.panel.contains(text.bounds));
        let (owned, in_plot) = match text.purpose {
            Purpose::Legend | Purpose::PanelTitle | Purpose::AxisTitle => (true, false),
            Purpose::Note => (true, true),
            Purpose::Title | Purpose::Caption | Purpose::TickLabel => (false, false),
        };
        assert!(inside || !owned, "{text:?} leaves its panel");
        let on_data = layout
            .frames
            .iter()
            .any(|frame| frame.plot.overlaps(text.bounds));
        assert!(in_plot || !on_data, "{text:?} hides data");
    }
    let svg = figure.svg();
    assert_eq!(svg, figure.svg());
    for word in ["NaN", "inf", "<script", "href", "url("] {
        assert!(!svg.contains(word), "{word}");
    }
}

fn show(figure: &Figure, name: &str) {
    if let Some(folder) = std::env::var_os("STEPWELL_FIGURES") {
        let path = std::path::Path::new(&folder).join(name);
        std::fs::write(path, figure.svg()).expect("the folder exists");
    }
}

#[test]
fn band_diagram_is_in_order() {
    let figure = band_figure();
    show(&figure, "bands.svg");
    assert_in_order(&figure);
    // Both parts of the broken axis have one scale, and both start at one x.
    let frames = figure.layout().frames;
    let per_ev = [
        frames[0].plot.height_px() / 0.36,
        frames[1].plot.height_px() / 0.22,
    ];
    assert!((per_ev[0] - per_ev[1]).abs() < 1e-9);
    assert!((frames[0].plot.left_px - frames[1].plot.left_px).abs() < 1e-9);
    let texts = figure.layout().texts;
    for level in ["e1 ×2", "e2 ×2", "hh1 ×2", "hh2 ×2", "hh3 ×2", "lh1 ×2"] {
        assert_eq!(
            texts.iter().filter(|text| text.content == level).count(),
            1,
            "{level}"
        );
    }
}

#[test]
fn spectra_are_in_order() {
    let figure = spectrum_figure();
    show(&figure, "spectrum.svg");
    assert_in_order(&figure);
    let texts = figure.layout().texts;
    for written in [
        "1",
        "5",
        "material gain (cm⁻¹)",
        "carrier density (10¹⁸ cm⁻³)",
        "1200",
    ] {
        assert!(
            texts.iter().any(|text| text.content == written),
            "{written}"
        );
    }
}

fn any_value() -> impl Strategy<Value = f64> {
    prop_oneof![
        4 => -1e3..1e3f64,
        1 => any::<f64>(),
        1 => prop::sample::select(vec![0.0, -0.0, f64::NAN, f64::INFINITY, f64::NEG_INFINITY, 1e18]),
    ]
}

fn any_text() -> impl Strategy<Value = String> {
    prop_oneof![
        4 => "[a-zA-Z0-9 ⁻³µ<&\"]{0,30}",
        1 => any::<String>(),
        1 => (1..10_000usize).prop_map(|length| "Mi ".repeat(length / 3 + 1)),
        1 => Just("line\nline\u{202e}\u{200f}\t</svg>]]>\u{0}井井".to_owned()),
    ]
}

fn any_axis() -> impl Strategy<Value = Axis> {
    (
        any_text(),
        any_text(),
        any::<bool>(),
        prop::option::of((any_value(), any_value())),
        any::<bool>(),
    )
        .prop_map(|(quantity, unit, logarithmic, range, heavy_zero)| Axis {
            quantity,
            unit,
            scale: if logarithmic {
                Scale::Logarithmic
            } else {
                Scale::Linear
            },
            range,
            includes: None,
            heavy_zero,
        })
}

fn any_curve() -> impl Strategy<Value = Curve> {
    let points = prop::collection::vec(
        (any_value(), prop::option::weighted(0.9, any_value())),
        0..20,
    );
    let naming = prop::sample::select(vec![
        Naming::Legend,
        Naming::AtEnd,
        Naming::AtPeak,
        Naming::Nowhere,
    ]);
    (
        any_text(),
        points,
        naming,
        0..20usize,
        any_value(),
        any::<bool>(),
    )
        .prop_map(|(name, points, naming, index, width_px, marked)| Curve {
            name,
            naming,
            points,
            ink: Ink::Colour(index),
            dash: Dash::of(index),
            width_px,
            mark: marked.then_some(Mark::Triangle),
        })
}

fn any_note() -> impl Strategy<Value = Note> {
    let standing = prop::sample::select(vec![
        Standing::Beside,
        Standing::Near(Side::Above),
        Standing::Near(Side::Left),
    ]);
    (any_value(), any_value(), any_text(), standing).prop_map(|(x, y, text, standing)| Note {
        at: (x, y),
        text,
        ink: Ink::Black,
        mark: Some(Mark::Ring),
        standing,
    })
}

fn any_panel() -> impl Strategy<Value = Panel> {
    let reciprocal: fn(f64) -> f64 = |x| 1239.84 / x;
    (
        (any_text(), any_value(), any_axis(), any_axis()),
        prop::option::of((any_text(), any_text())),
        prop::collection::vec(any_curve(), 0..5),
        prop::collection::vec(any_note(), 0..6),
        prop::collection::vec((any_value(), any_text(), any::<bool>()), 0..3),
        prop::collection::vec((any_value(), any_value()), 0..3),
    )
        .prop_map(
            move |((title, plot_height_px, x, y), top, curves, notes, rules, pairs)| Panel {
                title,
                plot_height_px,
                x,
                y,
                top: top.map(|(quantity, unit)| TopAxis {
                    quantity,
                    unit,
                    of: reciprocal,
                }),
                stripes: pairs
                    .iter()
                    .map(|(from, to)| Stripe {
                        from: *from,
                        to: *to,
                        ink: Ink::Grey,
                        opacity: 0.1,
                    })
                    .collect(),
                areas: vec![Area {
                    spans: pairs.iter().map(|(a, b)| (*a, Some((*b, *a)))).collect(),
                    ink: Ink::Colour(3),
                    opacity: f64::NAN,
                }],
                rules: rules
                    .into_iter()
                    .map(|(at, name, upright)| Rule {
                        at: if upright { Place::X(at) } else { Place::Y(at) },
                        name,
                        ink: Ink::Grey,
                        dash: Dash::Dotted,
                        width_px: at,
                    })
                    .collect(),
                curves,
                notes,
                keys: Vec::new(),
            },
        )
}

fn any_figure() -> impl Strategy<Value = Figure> {
    let joint = prop::sample::select(vec![Joint::Apart, Joint::SharedAxis, Joint::BrokenAxis]);
    let row = (prop::collection::vec(any_panel(), 0..3), joint)
        .prop_map(|(panels, joint)| Row { panels, joint });
    (
        any_text(),
        any_text(),
        any_text(),
        prop::collection::vec(row, 0..4),
    )
        .prop_map(|(title, caption, stamp, rows)| Figure {
            title,
            caption,
            stamp,
            description: String::new(),
            rows,
        })
}

proptest! {
    #[test]
    fn any_figure_is_in_order(figure in any_figure()) {
        assert_in_order(&figure);
    }
}

#[test]
fn empty_figures_are_drawn() {
    for data in [
        vec![],
        vec![(1.0, None)],
        vec![(1.0, Some(2.0))],
        vec![(1.0, Some(2.0)); 3],
    ] {
        let curve = Curve {
            points: data,
            mark: Some(Mark::Disc),
            ..Curve::default()
        };
        let panel = Panel {
            curves: vec![curve],
            ..Panel::default()
        };
        let row = Row {
            panels: vec![panel],
            joint: Joint::BrokenAxis,
        };
        assert_in_order(&Figure {
            rows: vec![row],
            ..Figure::default()
        });
    }
}

#[test]
fn many_labels_at_one_height_stay_readable() {
    let notes = (0..200).map(|index| Note {
        at: (1.0, f64::from(index % 3) * 1e-6),
        text: format!("hh{index}"),
        ink: Ink::Colour(1),
        mark: None,
        standing: Standing::Beside,
    });
    let panel = Panel {
        y: Axis::new("energy", "eV").over(-1.0, 1.0),
        notes: notes.collect(),
        ..Panel::default()
    };
    let row = Row {
        panels: vec![panel],
        ..Row::default()
    };
    assert_in_order(&Figure {
        rows: vec![row],
        ..Figure::default()
    });
}
