//! Whole figures: three as the program draws them, and any number of absurd ones.
//!
//! With `STEPWELL_FIGURES` set to a folder, the three are written there to be looked at.

use proptest::prelude::*;

use super::*;

mod examples;

use scene::Shape;

use examples::{band_figure, spectrum_figure};

/// Everything that holds for every figure, whatever is in it.
pub(crate) fn assert_in_order(figure: &Figure) {
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
        let of_figure = matches!(text.purpose, Purpose::Title | Purpose::Caption);
        let owner = layout.frames.iter().any(|Frame { panel, .. }| {
            // Numbers at the ends of an upright axis reach a little over the edges of its plot.
            let air_px = if text.purpose == Purpose::TickLabel {
                8.0
            } else {
                0.0
            };
            let room = Rectangle {
                top_px: panel.top_px - air_px,
                bottom_px: panel.bottom_px + air_px,
                ..*panel
            };
            room.contains(text.bounds)
        });
        assert!(of_figure || owner, "{text:?} leaves its panel");
        let on_data = layout
            .frames
            .iter()
            .any(|frame| frame.plot.overlaps(text.bounds));
        assert!(
            text.purpose == Purpose::Note || !on_data,
            "{text:?} hides data"
        );
    }
    for shape in &arrangement::scene(figure).shapes {
        let points = match shape {
            Shape::Line { points, .. } | Shape::Fill { points, .. } => points.as_slice(),
            Shape::Mark { at, .. } => std::slice::from_ref(at),
            Shape::Text(_) => &[],
        };
        // Ticks and breaks reach over the edges of a panel whose axis goes on in the next one.
        let owner = layout
            .frames
            .iter()
            .any(|Frame { panel, .. }| points.iter().all(|point| panel.grown(9.0).holds(*point)));
        assert!(owner || points.is_empty(), "{shape:?} leaves its panel");
    }
    let svg = figure.svg();
    assert_eq!(svg, figure.svg());
    // In texts quotation marks are escaped: these are attributes and elements.
    for word in [
        "=\"NaN", "=\"inf", "=\"-inf", "<script", "href=\"", "=\"url(",
    ] {
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
            names: Vec::new(),
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
fn absurd_texts_are_cut_and_kept_in_their_places() {
    let long = "the longest name that anybody ever gave to a layer ".repeat(200);
    let foreign = "\u{202e}שלום 井の厚さ </text><script>alert(1)</script>\nline\u{0}";
    let axis = |quantity: &str| Axis::new(quantity, long.as_str()).over(0.0, 1.0);
    let panel = |naming: Naming| Panel {
        title: long.clone(),
        plot_height_px: 160.0,
        x: axis(foreign),
        y: axis(&long),
        top: Some(TopAxis {
            quantity: long.clone(),
            unit: foreign.into(),
            of: |x| 1.0 / (x + 0.1),
        }),
        curves: [long.as_str(), foreign, "e1"]
            .iter()
            .enumerate()
            .map(|(index, name)| Curve {
                naming,
                ink: Ink::Colour(index),
                dash: Dash::of(index),
                ..Curve::through(*name, [(0.1, 0.3), (0.5, 0.9), (1.0, 0.5)])
            })
            .collect(),
        ..Panel::default()
    };
    let figure = Figure {
        title: foreign.into(),
        caption: long.clone(),
        stamp: long.clone(),
        description: foreign.into(),
        rows: vec![
            Row {
                panels: vec![panel(Naming::AtEnd), panel(Naming::AtPeak)],
                joint: Joint::Apart,
            },
            Row {
                panels: vec![panel(Naming::Legend)],
                joint: Joint::SharedAxis,
            },
        ],
    };
    show(&figure, "absurd.svg");
    assert_in_order(&figure);
}

/// A long number at the end of the lower axis gets its room; one of the upper axis, for which the
/// panel is not widened, is left out where it has none.
#[test]
fn numbers_at_the_end_of_an_axis_stay_in_the_panel() {
    let panel = Panel {
        x: Axis::new("pulse length", "ps").over(0.0, 20_000.0),
        top: Some(TopAxis {
            quantity: "length".into(),
            unit: "µm".into(),
            of: |x| -4.0 * x,
        }),
        ..Panel::default()
    };
    let row = Row {
        panels: vec![panel],
        ..Row::default()
    };
    let figure = Figure {
        rows: vec![row],
        ..Figure::default()
    };
    let texts = figure.layout().texts;
    let written = |label: &str| texts.iter().any(|text| text.content == label);
    assert!(written("20\u{202f}000") && written("−60\u{202f}000"));
    assert!(!written("−80\u{202f}000"));
    assert_in_order(&figure);
}

/// A point of the lower panel only widens the axis of both.
#[test]
fn rows_that_share_an_axis_have_one_span() {
    let panel = |to: f64| Panel {
        curves: vec![Curve {
            width_px: 0.0,
            mark: Some(Mark::Disc),
            ..Curve::through("", [(0.0, 0.0), (to, 1.0)])
        }],
        y: Axis::new("", "").over(0.0, 1.0),
        ..Panel::default()
    };
    let figure = |joint: Joint| Figure {
        rows: [1.0, 2.0, 4.0]
            .map(|to| Row {
                panels: vec![panel(to)],
                joint,
            })
            .to_vec(),
        ..Figure::default()
    };
    let mark_places = |figure: &Figure| {
        let svg = figure.svg();
        let discs = svg.split("<circle cx=\"").skip(1);
        discs
            .filter_map(|disc| disc.split('"').next()?.parse::<f64>().ok())
            .collect::<Vec<_>>()
    };
    let apart = mark_places(&figure(Joint::Apart));
    assert!(
        (apart[1] - apart[3]).abs() < 0.1 && (apart[3] - apart[5]).abs() < 0.1,
        "{apart:?}"
    );
    let shared = mark_places(&figure(Joint::SharedAxis));
    let width = |index: usize| shared[index] - shared[index - 1];
    assert!((width(3) / width(1) - 2.0).abs() < 1e-3, "{shared:?}");
    assert!((width(5) / width(1) - 4.0).abs() < 1e-3, "{shared:?}");
    assert_in_order(&figure(Joint::SharedAxis));
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
