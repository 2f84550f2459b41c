//! Figures of shipped structures: in order, complete, true to the records.

use super::*;
use crate::design::{Reactor, Request, Solving, spread};
use crate::diffraction::{Diffraction, Reflection};
use crate::evaluation::{Evaluation, Spectrum};
use crate::materials::Parameters;
use crate::sheet::figure::tests::assert_in_order;
use crate::sheet::figure::{Curve, Figure, Panel, Purpose, Scale};
use crate::sheet::sha256;
use crate::structure::{self, Bands, Overrides, Stack, Wavelength};

macro_rules! shipped {
    ($($name:literal),*) => {
        [$(($name, include_str!(concat!("../../../structures/", $name, ".toml")))),*]
    };
}

const STRUCTURES: [(&str, &str); 9] = shipped![
    "estuary-660",
    "estuary-850",
    "estuary-980",
    "estuary-1310",
    "estuary-1550",
    "estuary-2300",
    "estuary-tensile",
    "estuary-bulk",
    "every-key"
];

fn stack(text: &str, parameters: &Parameters, bands: Bands) -> Stack {
    let overrides = Overrides {
        bands: Some(bands),
        ..Overrides::default()
    };
    structure::read(text, parameters, &overrides)
        .expect("a sound file")
        .stack
}

fn text_of(name: &str) -> &'static str {
    let found = STRUCTURES.iter().find(|(known, _)| *known == name);
    found.expect("a shipped structure").1
}

/// Hands a structure with its results to a test.
fn with(stack: &Stack, test: impl FnOnce(&Evaluation<'_>, &Spectrum, &Stamp)) {
    let parameters = Parameters::shipped();
    let evaluation = Evaluation::new(stack, &parameters).expect("levels");
    let spectrum = evaluation.spectrum().expect("spectra");
    let offsets = Some(evaluation.profile.offsets);
    let stamp = Stamp::new(stack, &parameters, offsets, &sha256(b"a file"));
    test(&evaluation, &spectrum, &stamp);
}

fn with_shipped(name: &str, bands: Bands, test: impl FnOnce(&Evaluation<'_>, &Spectrum, &Stamp)) {
    with(&stack(text_of(name), &Parameters::shipped(), bands), test);
}

fn notes(figure: &Figure) -> Vec<String> {
    let texts = figure.layout().texts.into_iter();
    texts
        .filter(|text| text.purpose == Purpose::Note)
        .map(|text| text.content)
        .collect()
}

fn panel(figure: &Figure, row: usize) -> &Panel {
    &figure.rows[row].panels[0]
}

#[test]
fn every_shipped_structure_is_drawn_in_order() {
    for (name, text) in STRUCTURES {
        let stack = stack(text, &Parameters::shipped(), Bands::Single);
        with(&stack, |evaluation, spectrum, stamp| {
            let levels = levels_figure(evaluation, stamp);
            assert_in_order(&levels);
            assert_in_order(&spectrum_figure(evaluation, spectrum, stamp));
            let written = notes(&levels);
            let first = &evaluation.transitions[0];
            let arrow = format!("e{}–{}: ", first.electron, first.hole);
            assert!(
                written.iter().any(|note| note.starts_with(&arrow)),
                "{name}: {written:?}"
            );
            for symbol in ["e1", "hh1"] {
                assert!(
                    written.iter().any(|note| note.starts_with(symbol)),
                    "{name}: {symbol}"
                );
            }
        });
    }
}

#[test]
fn mixed_bands_are_drawn_in_order_with_their_dispersion() {
    for name in ["estuary-980", "estuary-tensile"] {
        with_shipped(name, Bands::Mixed, |evaluation, spectrum, stamp| {
            let levels = levels_figure(evaluation, stamp);
            assert_in_order(&levels);
            assert_in_order(&spectrum_figure(evaluation, spectrum, stamp));
            assert_eq!(levels.rows.len(), 3, "{name}");
            let mixed = evaluation.mixed.as_ref().expect("mixed bands");
            let curves = &panel(&levels, 2).curves;
            assert_eq!(curves.len(), mixed.blocks.len() * mixed.zone_centre.len());
            let start = |curve: &Curve| curve.points[0].1.expect("a value");
            let top_ev = mixed.zone_centre[0].energy_ev;
            for (curve, state) in curves
                .iter()
                .step_by(mixed.blocks.len())
                .zip(&mixed.zone_centre)
            {
                let miss_mev = start(curve) - 1e3 * (state.energy_ev - top_ev);
                // Zone-centre energies are extrapolated once more than those along k.
                assert!(miss_mev.abs() < 0.05, "{name}: {miss_mev}");
                let heavy = state.heavy > 0.5;
                assert_eq!(curve.dash == Dash::Solid, heavy, "{name}: {}", curve.name);
            }
        });
    }
}

/// Six wells share every level: one name each, and both panels have one scale.
#[test]
fn what_equal_wells_share_is_named_once() {
    with_shipped("estuary-1310", Bands::Single, |evaluation, _, stamp| {
        let figure = levels_figure(evaluation, stamp);
        let written = notes(&figure);
        for name in ["e1 ×6", "hh1 ×6", "hh7 ×6"] {
            let count = written.iter().filter(|note| *note == name).count();
            assert_eq!(count, 1, "{name} in {written:?}");
        }
        let px_per_ev: Vec<f64> = (0..2)
            .map(|row| {
                let range = panel(&figure, row).y.range.expect("a range");
                let plot = figure.layout().frames[row].plot;
                (plot.bottom_px - plot.top_px) / (range.1 - range.0)
            })
            .collect();
        assert!(
            (px_per_ev[0] / px_per_ev[1] - 1.0).abs() < 1e-9,
            "{px_per_ev:?}"
        );
    });
}

/// A hundred levels of a wide well are a few names and many lines.
#[test]
fn crowded_levels_are_named_by_their_ends() {
    with_shipped("estuary-bulk", Bands::Single, |evaluation, _, stamp| {
        let written = notes(&levels_figure(evaluation, stamp));
        assert!(written.len() < 25, "{written:?}");
        let last = format!("e{}", evaluation.bands.electron.len());
        let ends = |start: &str, end: &str| {
            written
                .iter()
                .any(|note| note.starts_with(start) && note.ends_with(end))
        };
        assert!(ends("e1–e", "") && ends("e", &last), "{written:?}");
    });
}

/// In a strong field the levels of equal wells part, and electron and hole of the first transition
/// meet where both are found.
#[test]
fn a_field_tilts_the_edges_and_parts_the_levels() {
    let mut stack = stack(
        text_of("estuary-1310"),
        &Parameters::shipped(),
        Bands::Single,
    );
    stack.model.field_kv_cm = 50.0;
    with(&stack, |evaluation, spectrum, stamp| {
        let figure = levels_figure(evaluation, stamp);
        assert_in_order(&figure);
        assert_in_order(&spectrum_figure(evaluation, spectrum, stamp));
        assert!(figure.caption.contains("Field 50 kV/cm"));
        let edge = &panel(&figure, 0).curves[0].points;
        let (first, last) = (edge[0], edge[edge.len() - 1]);
        let rise_ev = last.1.expect("an edge") - first.1.expect("an edge");
        let tilt_ev = 50.0 * 1e-4 * (last.0 - first.0);
        assert!(
            (rise_ev / tilt_ev - 1.0).abs() < 1e-6,
            "{rise_ev} {tilt_ev}"
        );
        assert!(notes(&figure).contains(&"e1".to_owned()));
    });
}

#[test]
fn rings_mark_the_splitting_and_numbers_the_densities() {
    with_shipped(
        "estuary-1310",
        Bands::Single,
        |evaluation, spectrum, stamp| {
            let figure = spectrum_figure(evaluation, spectrum, stamp);
            let gain = panel(&figure, 0);
            for run in &spectrum.runs {
                assert!(
                    gain.notes
                        .iter()
                        .any(|note| note.at == (run.splitting_ev, 0.0)),
                    "{}",
                    run.density_cm3
                );
            }
            let keys: Vec<&str> = gain.keys.iter().map(|key| key.name.as_str()).collect();
            assert!(keys.ends_with(&["1", "2", "3", "4", "5"]), "{keys:?}");
            // The law ends at the highest density, as the fit has it.
            let peaks = panel(&figure, 2);
            let (_, fit) = spectrum.fit.expect("a fit");
            let law = peaks
                .curves
                .last()
                .expect("curves")
                .points
                .last()
                .expect("points");
            let gain_cm = fit.g0_cm * (5e18 / fit.transparency_cm3).ln();
            assert!((law.0 / 5e18 - 1.0).abs() < 1e-9);
            assert!((law.1.expect("a gain") / gain_cm - 1.0).abs() < 1e-9);
        },
    );
}

/// Titles, temperatures and densities that nobody would choose.
#[test]
fn odd_files_are_drawn_in_order() {
    let mut odd = stack(
        text_of("estuary-980"),
        &Parameters::shipped(),
        Bands::Single,
    );
    let titles = [
        String::new(),
        "Estuary ".repeat(400),
        "</text><script>alert('x')</script>\u{202e}\u{0}\nline & \"井\"".to_owned(),
    ];
    let densities: [&[f64]; 3] = [&[3e18], &[1e14, 1e16, 1e20], &[1e14]];
    for ((title, densities_cm3), kelvin) in
        titles.into_iter().zip(densities).zip([300.0, 4.0, 600.0])
    {
        odd.title = title;
        odd.operation.densities_cm3 = densities_cm3.to_vec();
        odd.operation.temperature_k = kelvin;
        with(&odd, |evaluation, spectrum, stamp| {
            assert_in_order(&levels_figure(evaluation, stamp));
            assert_in_order(&spectrum_figure(evaluation, spectrum, stamp));
        });
    }
}

#[test]
fn a_stamp_on_a_figure_is_short() {
    with_shipped("estuary-980", Bands::Single, |_, _, stamp| {
        let line = short_stamp(stamp);
        assert!(line.starts_with(concat!("stepwell ", env!("CARGO_PKG_VERSION"), " · input ")));
        assert!(line.contains(&format!("parameters {} (", &stamp.parameters_sha256[..12])));
        assert!(!line.contains(&stamp.parameters_sha256));
        assert!(line.contains("single valence bands"));
    });
}

/// Of every multi-well: compressive to the left, logarithmic, each order with its sign.
#[test]
fn a_rocking_curve_names_its_orders_from_the_compressive_side() {
    let parameters = Parameters::shipped();
    for (name, text) in STRUCTURES {
        let stack = stack(text, &parameters, Bands::Single);
        let seen = Diffraction::new(&stack, &parameters, Reflection::DEFAULT, 300.0);
        let seen = seen.expect("reflects");
        let stamp = Stamp::new(&stack, &parameters, None, &sha256(b"a file"));
        let figure = rocking_figure(&stack, &seen, &seen.rocking_curve(), &stamp);
        assert_in_order(&figure);
        let panel = panel(&figure, 0);
        assert_eq!(panel.y.scale, Scale::Logarithmic);
        let Some(multi_well) = &seen.multi_well else {
            continue;
        };
        let place = |order: &str| {
            let found = panel.notes.iter().find(|note| note.text == order);
            found.map(|note| note.at.0)
        };
        let zero = place("0").unwrap_or_else(|| panic!("{name}: no zero order"));
        assert_eq!(zero < 0.0, multi_well.mean.perpendicular > 0.0, "{name}");
        for order in ["−1", "+1"] {
            if let Some(at) = place(order) {
                assert_eq!(at < zero, order == "−1", "{name}: {order}");
            }
        }
    }
}

/// The bars are sorted, each on the side of its sign, and the window stands where the file says.
#[test]
fn a_spread_shows_its_window_and_its_bars_in_order() {
    let parameters = Parameters::shipped();
    let stack = stack(text_of("estuary-1310"), &parameters, Bands::Single);
    let growth = stack.growth.expect("errors of growth");
    let reactor = Reactor::new(&stack, &growth);
    let request = Request {
        kind: Wavelength::Photoluminescence,
        draws: 1000,
        seed: 1,
        solving: Solving::Quadratic,
        wanted_yield: None,
        window: Some((1297.0, 5.0)),
        model_nm: 10.0,
    };
    let found = spread(&reactor, &stack, &parameters, &request, &|_| {}).expect("a spread");
    let stamp = Stamp::new(&stack, &parameters, None, &sha256(b"a file"));
    let figure = crate::sheet::spread_figure(&stack, &found, &stamp);
    assert_in_order(&figure);
    let stripe = &panel(&figure, 0).stripes[0];
    assert!((stripe.from - 1292.0).abs() + (stripe.to - 1302.0).abs() < 1e-9);
    let bars = panel(&figure, 1);
    assert_eq!(bars.y.names.len(), found.sensitivities.len());
    let lengths: Vec<f64> = bars.notes.iter().map(|note| note.at.0).collect();
    assert!(
        lengths.is_sorted_by(|a, b| a.abs() >= b.abs()),
        "{lengths:?}"
    );
    let heights: Vec<f64> = bars.notes.iter().map(|note| note.at.1).collect();
    assert!(heights.is_sorted_by(|a, b| a > b), "from the top down");
    for (bar, note) in bars.areas.iter().zip(&bars.notes) {
        assert_eq!(
            bar.spans[1].0 < 0.0,
            note.text.starts_with('−'),
            "{}",
            note.text
        );
    }
}
