//! The records of `levels` and `spectrum` as figures.

use super::figure::{
    Area, Axis, Curve, Dash, Figure, Ink, Joint, Key, Mark, Naming, Note, Panel, Place, Row, Rule,
    Side, Standing, Stripe, TopAxis, heights_at_one_scale,
};
use super::number::power;
use super::stamp::Stamp;
use crate::evaluation::{Evaluation, GainPeak, Group, Ladder, Run, Spectrum};
use crate::profile::EdgePoint;
use crate::spectra::Point;
use crate::subbands::{Band, Level};
use crate::units::wavelength_nm;

/// Groups of levels that are drawn of a kind: more would hide each other.
const MOST_GROUPS: usize = 6;
/// Points of an envelope.
const ENVELOPE_POINTS: usize = 400;
/// Height of the highest envelope, as a share of the energies shown.
const ENVELOPE_SHARE: f64 = 0.09;
/// Air above and below the energies shown, eV.
const AIR_EV: f64 = 0.03;

const ELECTRON: Ink = Ink::Colour(0);
const HEAVY: Ink = Ink::Colour(1);
const LIGHT: Ink = Ink::Colour(4);

/// Band edges with the levels and their envelopes, substrate left; below, where the valence bands
/// are mixed, their dispersion.
#[must_use]
pub fn levels_figure(evaluation: &Evaluation<'_>, stamp: &Stamp) -> Figure {
    let edges = evaluation.profile.edge_points();
    let span = |of: &[fn(&EdgePoint) -> f64]| {
        let energies = edges
            .iter()
            .flat_map(|point| of.iter().map(|pick| pick(point)));
        let (low, high) = energies.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), it| {
            (f64::min(low, it), f64::max(high, it))
        });
        (low - AIR_EV, high + AIR_EV)
    };
    let conduction_ev = span(&[|point| point.conduction_ev]);
    let valence_ev = span(&[|point| point.heavy_ev, |point| point.light_ev]);
    let heights = heights_at_one_scale(
        &[
            conduction_ev.1 - conduction_ev.0,
            valence_ev.1 - valence_ev.0,
        ],
        460.0,
    );
    let envelope_ev =
        ENVELOPE_SHARE * (conduction_ev.1 - conduction_ev.0 + valence_ev.1 - valence_ev.0);
    let (low_nm, high_nm) = evaluation.profile.walls_nm();
    let panel = |(low_ev, high_ev): (f64, f64), height: f64| Panel {
        plot_height_px: height,
        x: Axis::new("position above the substrate", "nm").over(low_nm, high_nm),
        y: Axis::new("electron energy", "eV").over(low_ev, high_ev),
        stripes: well_stripes(evaluation),
        ..Panel::default()
    };
    let mut conduction = panel(conduction_ev, heights[0]);
    conduction.curves = vec![edge_curve(
        &edges,
        |point| point.conduction_ev,
        ELECTRON,
        Dash::Solid,
    )];
    conduction.keys = vec![
        line_key("conduction edge", ELECTRON, Dash::Solid),
        line_key("heavy-hole edge", HEAVY, Dash::Solid),
        line_key("light-hole edge", LIGHT, Dash::Dashed),
        Key {
            name: "wells".to_owned(),
            ink: Ink::Grey,
            opacity: 0.15,
            ..Key::default()
        },
    ];
    let mut valence = panel(valence_ev, heights[1]);
    valence.curves = vec![
        edge_curve(&edges, |point| point.heavy_ev, HEAVY, Dash::Solid),
        edge_curve(&edges, |point| point.light_ev, LIGHT, Dash::Dashed),
    ];
    let ladders = evaluation.single_ladders();
    for (ladder, (band, ink)) in ladders.iter().zip([
        (Band::Electron, ELECTRON),
        (Band::Heavy, HEAVY),
        (Band::Light, LIGHT),
    ]) {
        let panel = if band == Band::Electron {
            &mut conduction
        } else {
            &mut valence
        };
        draw_ladder(panel, evaluation, ladder, band, ink, envelope_ev);
    }
    let mut rows = vec![
        Row {
            panels: vec![conduction],
            joint: Joint::BrokenAxis,
        },
        Row {
            panels: vec![valence],
            joint: Joint::Apart,
        },
    ];
    if evaluation.mixed.is_some() {
        rows.push(Row {
            panels: vec![dispersion_panel(evaluation)],
            joint: Joint::Apart,
        });
    }
    Figure {
        title: format!("{}: band edges and levels", evaluation.stack.title),
        caption: format!(
            "Squared envelopes stand on their levels, holes hanging; levels that equal wells share are \
             drawn together, at most {MOST_GROUPS} groups of a kind. The vertical axis is broken in the \
             gap, and both parts have one scale."
        ),
        stamp: stamp.line(),
        description: format!(
            "Band edges along growth, with {} electron, {} heavy-hole and {} light-hole levels.",
            evaluation.bands.electron.len(),
            evaluation.bands.heavy.len(),
            evaluation.bands.light.len()
        ),
        rows,
    }
}

fn line_key(name: &str, ink: Ink, dash: Dash) -> Key {
    Key {
        name: name.to_owned(),
        ink,
        dash,
        width_px: 2.2,
        ..Key::default()
    }
}

fn well_stripes(evaluation: &Evaluation<'_>) -> Vec<Stripe> {
    let is_well =
        |layer: usize| evaluation.stack.layers[layer].role == crate::structure::Role::Well;
    evaluation
        .profile
        .sections
        .iter()
        .filter(|section| is_well(section.layer))
        .map(|section| Stripe {
            from: section.bottom_nm,
            to: section.top_nm,
            ink: Ink::Grey,
            opacity: 0.1,
        })
        .collect()
}

fn edge_curve(edges: &[EdgePoint], of: fn(&EdgePoint) -> f64, ink: Ink, dash: Dash) -> Curve {
    Curve {
        ink,
        dash,
        width_px: 2.2,
        naming: Naming::Nowhere,
        ..Curve::through("", edges.iter().map(|point| (point.position_nm, of(point))))
    }
}

/// The groups of a ladder, each as the mean of its squared envelopes on the level nearest the gap.
fn draw_ladder(
    panel: &mut Panel,
    evaluation: &Evaluation<'_>,
    ladder: &Ladder,
    band: Band,
    ink: Ink,
    envelope_ev: f64,
) {
    let positions_nm = &evaluation.bands.nodes.positions_nm;
    let stride = positions_nm.len().div_ceil(ENVELOPE_POINTS).max(1);
    let levels = evaluation.bands.of(band);
    let drawn: Vec<(Group, Vec<f64>)> = ladder
        .groups()
        .into_iter()
        .take(MOST_GROUPS)
        .map(|group| {
            let density = mean_density(&levels[group.first - 1..group.last]);
            (group, density)
        })
        .collect();
    let highest = drawn
        .iter()
        .flat_map(|(_, density)| density)
        .fold(f64::MIN_POSITIVE, |highest, &it| f64::max(highest, it));
    for (group, density) in drawn {
        let level_ev = group.rung.energy_ev;
        let points: Vec<(f64, f64)> = positions_nm
            .iter()
            .zip(&density)
            .step_by(stride)
            .map(|(&z, &it)| (z, level_ev + ladder.sign * envelope_ev * it / highest))
            .collect();
        let spans = points.iter().map(|&(z, energy)| {
            let (low, high) = (f64::min(level_ev, energy), f64::max(level_ev, energy));
            (z, Some((low, high)))
        });
        panel.areas.push(Area {
            spans: spans.collect(),
            ink,
            opacity: 0.22,
        });
        let end_nm = points.last().map_or(0.0, |point| point.0);
        panel.curves.push(Curve {
            naming: Naming::Nowhere,
            ink,
            width_px: 0.9,
            ..Curve::through("", points)
        });
        panel.notes.push(Note {
            at: (end_nm, level_ev),
            text: group.name(ladder.symbol),
            ink,
            mark: None,
            standing: Standing::Beside,
        });
    }
}

fn mean_density(levels: &[Level]) -> Vec<f64> {
    let nodes = levels.first().map_or(0, |level| level.envelope.len());
    (0..nodes)
        .map(|node| {
            let sum: f64 = levels
                .iter()
                .map(|level| level.envelope[node].powi(2))
                .sum();
            sum / levels.len() as f64
        })
        .collect()
}

/// Energies of the mixed valence states over the in-plane wave number.
fn dispersion_panel(evaluation: &Evaluation<'_>) -> Panel {
    let rows = evaluation.dispersion();
    let states = rows.first().map_or(0, |(_, energies)| energies.len());
    let curves = (0..states).map(|state| Curve {
        naming: Naming::Nowhere,
        ink: HEAVY,
        width_px: 1.2,
        ..Curve::through("", rows.iter().map(|(k, energies)| (*k, energies[state])))
    });
    Panel {
        title: "mixed valence states".to_owned(),
        plot_height_px: 260.0,
        x: Axis::new("in-plane wave number", "nm⁻¹"),
        y: Axis::new("electron energy", "eV"),
        curves: curves.collect(),
        ..Panel::default()
    }
}

/// Gain against photon energy at every density, and what grows with the density.
#[must_use]
pub fn spectrum_figure(evaluation: &Evaluation<'_>, spectrum: &Spectrum, stamp: &Stamp) -> Figure {
    Figure {
        title: format!("{}: gain by carrier density", evaluation.stack.title),
        caption:
            "Gain of the well material with gap shrinkage; negative gain is absorption. Rings mark \
                  the quasi-Fermi splitting, where gain turns into absorption."
                .to_owned(),
        stamp: stamp.line(),
        description: format!(
            "Gain spectra at {} carrier densities, and peak gain and radiative current against density.",
            spectrum.runs.len()
        ),
        rows: vec![
            Row {
                panels: vec![gain_panel(spectrum)],
                joint: Joint::Apart,
            },
            Row {
                panels: vec![peak_panel(spectrum), current_panel(spectrum)],
                joint: Joint::Apart,
            },
        ],
    }
}

fn gain_panel(spectrum: &Spectrum) -> Panel {
    let runs = &spectrum.runs;
    let photons = &spectrum.photon_ev;
    let highest = runs
        .iter()
        .flat_map(|run| [run.te, run.tm])
        .flatten()
        .map(|peak| peak.gain_cm)
        .fold(0.0, f64::max);
    let lowest = runs
        .iter()
        .flat_map(|run| &run.points)
        .flat_map(|point| [point.te_gain_cm, point.tm_gain_cm])
        .fold(0.0, f64::min);
    // Absorption dwarfs gain: half as much of it is shown, all of it only where there is no gain.
    let bottom = if highest > 0.0 {
        lowest.max(-0.5 * highest)
    } else {
        lowest
    };
    let mut panel = Panel {
        plot_height_px: 360.0,
        x: Axis {
            range: photons.first().copied().zip(photons.last().copied()),
            ..Axis::new("photon energy", "eV")
        },
        y: Axis {
            heavy_zero: true,
            ..Axis::new("material gain", "cm⁻¹").over(1.05 * bottom, 1.12 * highest.max(1.0))
        },
        top: Some(TopAxis {
            quantity: "vacuum wavelength".to_owned(),
            unit: "nm".to_owned(),
            of: wavelength_nm,
        }),
        keys: vec![
            line_key("TE", Ink::Black, Dash::Solid),
            line_key("TM", Ink::Black, Dash::Dashed),
            Key {
                name: "quasi-Fermi splitting".to_owned(),
                mark: Some(Mark::Ring),
                ..Key::default()
            },
            Key {
                name: "numbers: density, cm⁻³".to_owned(),
                ..Key::default()
            },
        ],
        ..Panel::default()
    };
    for (step, run) in runs.iter().enumerate() {
        let ink = Ink::Ramp {
            step,
            of: runs.len(),
        };
        let curve = |name: String, of: fn(&Point) -> f64, dash, naming| Curve {
            naming,
            ink,
            dash,
            ..Curve::through(name, photons.iter().copied().zip(run.points.iter().map(of)))
        };
        panel.curves.push(curve(
            power(run.density_cm3, 3),
            |point| point.te_gain_cm,
            Dash::Solid,
            Naming::AtPeak,
        ));
        panel.curves.push(curve(
            String::new(),
            |point| point.tm_gain_cm,
            Dash::Dashed,
            Naming::Nowhere,
        ));
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

fn peak_panel(spectrum: &Spectrum) -> Panel {
    let peaks = |name: &str, of: fn(&Run) -> Option<GainPeak>, ink, mark| Curve {
        name: name.to_owned(),
        ink,
        width_px: 0.0,
        mark: Some(mark),
        points: spectrum
            .runs
            .iter()
            .map(|run| (run.density_cm3, of(run).map(|peak| peak.gain_cm)))
            .collect(),
        ..Curve::default()
    };
    let mut panel = Panel {
        plot_height_px: 230.0,
        x: density_axis(spectrum),
        y: Axis {
            heavy_zero: true,
            includes: Some(0.0),
            ..Axis::new("peak gain", "cm⁻¹")
        },
        curves: vec![
            peaks("TE", |run| run.te, Ink::Colour(0), Mark::Disc),
            peaks("TM", |run| run.tm, Ink::Colour(1), Mark::Diamond),
        ],
        ..Panel::default()
    };
    if let (Some((polarisation, fit)), Some(last)) = (spectrum.fit, spectrum.runs.last()) {
        const STEPS: usize = 60;
        let (from, to) = (fit.transparency_cm3.ln(), last.density_cm3.ln());
        let law = (0..=STEPS)
            .map(|step| (from + (to - from) * step as f64 / STEPS as f64).exp())
            .map(|density| (density, fit.g0_cm * (density / fit.transparency_cm3).ln()));
        panel.curves.push(Curve {
            ink: Ink::Black,
            dash: Dash::Dashed,
            width_px: 1.2,
            ..Curve::through(format!("logarithmic law, {polarisation}"), law)
        });
    }
    if let Some(transparency) = spectrum.transparency {
        panel.rules.push(Rule {
            at: Place::X(transparency.density_cm3),
            name: "transparency".to_owned(),
            ink: Ink::Grey,
            dash: Dash::Dotted,
            width_px: 1.2,
        });
    }
    panel
}

/// From below transparency, or the lowest density, to above the highest.
fn density_axis(spectrum: &Spectrum) -> Axis {
    let axis = Axis::new("carrier density", "cm⁻³").logarithmic();
    let densities = spectrum.runs.iter().map(|run| run.density_cm3);
    let (low, high) = densities
        .chain(spectrum.transparency.map(|at| at.density_cm3))
        .fold((f64::INFINITY, 0.0f64), |(low, high), it| {
            (low.min(it), high.max(it))
        });
    axis.over(0.9 * low, 1.1 * high)
}

fn current_panel(spectrum: &Spectrum) -> Panel {
    let currents = spectrum.runs.iter().map(|run| {
        let current = run.spontaneous.map(|it| it.current_a_cm2);
        (run.density_cm3, current)
    });
    Panel {
        plot_height_px: 230.0,
        x: density_axis(spectrum),
        y: Axis {
            includes: Some(0.0),
            ..Axis::new("radiative current, all wells", "A cm⁻²")
        },
        curves: vec![Curve {
            ink: Ink::Colour(0),
            mark: Some(Mark::Disc),
            naming: Naming::Nowhere,
            points: currents.collect(),
            ..Curve::default()
        }],
        ..Panel::default()
    }
}
