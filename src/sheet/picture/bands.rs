//! Band edges with levels and envelopes, the first transition, and the dispersion of mixed bands.

use super::arrow::{Arrow, first_transition};
use super::bundle::{Bundle, Member, bundles};
use super::dispersion::dispersion_panel;
use super::{Kind, line_key, short_stamp};
use crate::evaluation::Evaluation;
use crate::profile::EdgePoint;
use crate::sheet::figure::{
    Area, Axis, Curve, Dash, Figure, Ink, Joint, Key, Mark, Naming, Note, Panel, Row, Side,
    Standing, Stripe,
};
use crate::sheet::number::plain;
use crate::sheet::stamp::Stamp;
use crate::structure::Role;

/// How far the picture reaches beyond the outermost wells, nm.
const REACH_NM: f64 = 18.0;
/// Height of both panels together without their air, px.
const HEIGHT_PX: f64 = 500.0;
/// Lowest panel, px.
const LOWEST_PANEL_PX: f64 = 80.0;
/// Air over and under what is drawn, px: under the electrons there is room for the words at the
/// arrow.
const ELECTRON_AIR_PX: (f64, f64) = (12.0, 40.0);
const HOLE_AIR_PX: (f64, f64) = (16.0, 24.0);
/// Highest and lowest crest of the envelopes of a panel, px.
const CREST_PX: (f64, f64) = (60.0, 22.0);
/// Points of an envelope at most.
const MOST_POINTS: usize = 500;
/// An envelope is drawn as far as it is above this part of its crest.
const SEEN: f64 = 0.004;
/// Level lines without envelope reach beyond the wells by this, nm.
const LEVEL_REACH_NM: f64 = 4.0;

type Picked = fn(&EdgePoint) -> f64;

const CONDUCTION: [(Kind, Picked); 1] = [(Kind::Electron, |point| point.conduction_ev)];
const VALENCE: [(Kind, Picked); 2] = [
    (Kind::Heavy, |point| point.heavy_ev),
    (Kind::Light, |point| point.light_ev),
];

/// Band edges with the levels and their envelopes around the wells, substrate left; below, where
/// the valence bands are mixed, their dispersion.
#[must_use]
pub fn levels_figure(evaluation: &Evaluation<'_>, stamp: &Stamp) -> Figure {
    let diagram = Diagram::new(evaluation);
    let holes: Vec<Bundle> = diagram.holes.concat();
    let arrow = first_transition(evaluation, &diagram.electrons, &holes);
    let mut rows = vec![
        Row {
            panels: vec![diagram.conduction(arrow.as_ref())],
            joint: Joint::BrokenAxis,
        },
        Row {
            panels: vec![diagram.valence(&holes, arrow.as_ref())],
            joint: Joint::Apart,
        },
    ];
    if let Some(mixed) = &evaluation.mixed {
        rows.push(Row {
            panels: vec![dispersion_panel(evaluation, mixed, &holes)],
            joint: Joint::Apart,
        });
    }
    Figure {
        title: format!("{}: band edges and levels", evaluation.stack.title),
        caption: caption(evaluation),
        stamp: short_stamp(stamp),
        description: description(evaluation, arrow.as_ref()),
        rows,
    }
}

fn caption(evaluation: &Evaluation<'_>) -> String {
    let mut sentences = vec![
        "|φ|² stands on its level, that of holes hangs from it; its scale is arbitrary, one for each \
         panel."
            .to_owned(),
    ];
    let count = evaluation.stack.well_count();
    if count > 1 {
        sentences.push(format!(
            "A level that equal wells share is drawn once, summed over the wells, and marked × the \
             number of levels (here up to {count})."
        ));
    }
    if evaluation.mixed.is_some() {
        sentences.push(
            "Mixed valence states are numbered v1, v2 … from the top; those with light-hole parts are \
             drawn as lines without |φ|²."
                .to_owned(),
        );
    }
    let field_kv_cm = evaluation.stack.model.field_kv_cm;
    if field_kv_cm != 0.0 {
        sentences.push(format!("Field {} kV/cm along growth.", plain(field_kv_cm)));
    }
    sentences.push(
        "The vertical axis is broken in the gap, both parts have one scale; energies are those of \
         electrons, without gap shrinkage."
            .to_owned(),
    );
    sentences.join(" ")
}

fn description(evaluation: &Evaluation<'_>, arrow: Option<&Arrow>) -> String {
    let counts: Vec<String> = evaluation
        .ladders()
        .iter()
        .map(|ladder| format!("{} {}", ladder.rungs.len(), ladder.name))
        .collect();
    let first = arrow.map_or(String::new(), |arrow| {
        format!(" The first transition is {}.", arrow.text)
    });
    format!(
        "Band edges along growth around {} wells, with levels: {}.{first}",
        evaluation.stack.well_count(),
        counts.join(", ")
    )
}

/// Both panels of the band diagram, settled before they are drawn.
struct Diagram<'a> {
    evaluation: &'a Evaluation<'a>,
    edges: Vec<EdgePoint>,
    /// Ends of the picture, and of the wells with their steps, nm above the substrate.
    view_nm: (f64, f64),
    wells_nm: (f64, f64),
    ev_per_px: f64,
    /// Energies at the lower and upper end of each panel, eV.
    conduction_ev: (f64, f64),
    valence_ev: (f64, f64),
    electrons: Vec<Bundle>,
    /// One list a ladder.
    holes: Vec<Vec<Bundle>>,
}

impl<'a> Diagram<'a> {
    fn new(evaluation: &'a Evaluation<'a>) -> Self {
        let profile = &evaluation.profile;
        let edges = profile.edge_points();
        let (bottom_nm, top_nm) = profile.walls_nm();
        let of_wells = profile.sections.iter().filter(|section| section.in_wells);
        let wells_nm = of_wells.fold((top_nm, bottom_nm), |(low, high), section| {
            (low.min(section.bottom_nm), high.max(section.top_nm))
        });
        let view_nm = (
            (wells_nm.0 - REACH_NM).max(bottom_nm),
            (wells_nm.1 + REACH_NM).min(top_nm),
        );
        let ladders = evaluation.ladders();
        let (electron, holes) = ladders.split_at(1);
        let levels = |ladders: &[crate::evaluation::Ladder]| -> Vec<f64> {
            let rungs = ladders.iter().flat_map(|ladder| &ladder.rungs);
            rungs.map(|rung| rung.energy_ev).collect()
        };
        let conduction_ev = ends(&edges, view_nm, &CONDUCTION, &levels(electron));
        let valence_ev = ends(&edges, view_nm, &VALENCE, &levels(holes));
        let range_ev = conduction_ev.1 - conduction_ev.0 + valence_ev.1 - valence_ev.0;
        let ev_per_px = range_ev.max(1e-3) / HEIGHT_PX;
        let of = |ladder| bundles(evaluation, ladder, ev_per_px);
        Self {
            evaluation,
            edges,
            view_nm,
            wells_nm,
            ev_per_px,
            conduction_ev: with_air(conduction_ev, ELECTRON_AIR_PX, ev_per_px),
            valence_ev: with_air(valence_ev, HOLE_AIR_PX, ev_per_px),
            electrons: electron.iter().flat_map(of).collect(),
            holes: holes.iter().map(of).collect(),
        }
    }

    fn conduction(&self, arrow: Option<&Arrow>) -> Panel {
        let mut panel = self.panel(self.conduction_ev, &CONDUCTION);
        panel.keys = self.keys();
        self.draw_levels(&mut panel, &self.electrons, 1.0);
        if let Some(arrow) = arrow {
            let from_ev = self.conduction_ev.0;
            draw_shaft(&mut panel, arrow.position_nm, (from_ev, arrow.electron_ev));
            let middle_ev = from_ev + 0.5 * ELECTRON_AIR_PX.1 * self.ev_per_px;
            panel.notes.push(Note {
                at: (arrow.position_nm, arrow.electron_ev),
                text: String::new(),
                ink: Ink::Black,
                mark: Some(Mark::Triangle),
                standing: Standing::Near(Side::Right),
            });
            panel.notes.push(Note {
                at: (arrow.position_nm, middle_ev),
                text: arrow.text.clone(),
                ink: Ink::Black,
                mark: None,
                standing: Standing::Near(Side::Right),
            });
        }
        panel
    }

    fn valence(&self, holes: &[Bundle], arrow: Option<&Arrow>) -> Panel {
        let mut panel = self.panel(self.valence_ev, &VALENCE);
        self.draw_levels(&mut panel, holes, -1.0);
        if let Some(arrow) = arrow {
            draw_shaft(
                &mut panel,
                arrow.position_nm,
                (arrow.hole_ev, self.valence_ev.1),
            );
            panel.notes.push(Note {
                at: (arrow.position_nm, arrow.hole_ev),
                text: String::new(),
                ink: Ink::Black,
                mark: Some(Mark::Disc),
                standing: Standing::Near(Side::Right),
            });
        }
        panel
    }

    /// A panel with its axes, wells and edges.
    fn panel(&self, (low_ev, high_ev): (f64, f64), of: &[(Kind, Picked)]) -> Panel {
        let curves = of.iter().map(|(kind, picked)| Curve {
            ink: kind.ink(),
            dash: kind.dash(),
            width_px: 2.2,
            naming: Naming::Nowhere,
            ..Curve::through(
                "",
                self.edges
                    .iter()
                    .map(|point| (point.position_nm, picked(point))),
            )
        });
        Panel {
            plot_height_px: (high_ev - low_ev) / self.ev_per_px,
            x: Axis::new("position above the substrate, growth →", "nm")
                .over(self.view_nm.0, self.view_nm.1),
            y: Axis::new("electron energy", "eV").over(low_ev, high_ev),
            stripes: self.stripes(),
            curves: curves.collect(),
            ..Panel::default()
        }
    }

    fn keys(&self) -> Vec<Key> {
        let mut keys = vec![
            line_key(
                "conduction edge",
                Kind::Electron.ink(),
                Kind::Electron.dash(),
            ),
            line_key("heavy-hole edge", Kind::Heavy.ink(), Kind::Heavy.dash()),
            line_key("light-hole edge", Kind::Light.ink(), Kind::Light.dash()),
        ];
        for (role, name) in [(Role::Well, "wells"), (Role::Step, "steps")] {
            if self
                .evaluation
                .stack
                .layers
                .iter()
                .any(|layer| layer.role == role)
            {
                keys.push(Key {
                    name: name.to_owned(),
                    ink: Ink::Grey,
                    opacity: shade(role),
                    ..Key::default()
                });
            }
        }
        keys
    }

    fn stripes(&self) -> Vec<Stripe> {
        let sections = self.evaluation.profile.sections.iter();
        sections
            .filter(|section| section.in_wells)
            .map(|section| Stripe {
                from: section.bottom_nm,
                to: section.top_nm,
                ink: Ink::Grey,
                opacity: shade(self.evaluation.stack.layers[section.layer].role),
            })
            .collect()
    }

    /// Draws the bundles of a panel, their envelopes upwards (1) or downwards (−1).
    fn draw_levels(&self, panel: &mut Panel, bundles: &[Bundle], sense: f64) {
        let highest = bundles
            .iter()
            .filter_map(|bundle| bundle.density_per_nm.as_ref())
            .flatten()
            .fold(f64::MIN_POSITIVE, |highest, &it| f64::max(highest, it));
        let ev_nm = sense * self.crest_px(bundles) * self.ev_per_px / highest;
        for bundle in bundles {
            let end_nm = self.draw_bundle(panel, bundle, ev_nm);
            panel.notes.push(Note {
                at: (end_nm, bundle.first().energy_ev),
                text: bundle.name.clone(),
                ink: bundle.first().kind.ink(),
                mark: None,
                standing: Standing::Beside,
            });
        }
    }

    /// Height of the highest crest: most of the usual distance of neighbouring levels.
    fn crest_px(&self, bundles: &[Bundle]) -> f64 {
        let mut levels_ev: Vec<f64> = bundles
            .iter()
            .map(|bundle| bundle.first().energy_ev)
            .collect();
        levels_ev.sort_by(f64::total_cmp);
        let mut gaps_px: Vec<f64> = levels_ev
            .windows(2)
            .map(|pair| (pair[1] - pair[0]) / self.ev_per_px)
            .collect();
        gaps_px.sort_by(f64::total_cmp);
        let usual_px = gaps_px
            .get(gaps_px.len() / 2)
            .copied()
            .unwrap_or(CREST_PX.0);
        (0.85 * usual_px).clamp(CREST_PX.1, CREST_PX.0)
    }

    /// Draws levels as lines, the one nearest the gap with its envelope; returns where they end, nm.
    fn draw_bundle(&self, panel: &mut Panel, bundle: &Bundle, ev_nm: f64) -> f64 {
        let first = bundle.first();
        let (level_ev, kind) = (first.energy_ev, first.kind);
        let crest = self.crest(bundle, level_ev, ev_nm);
        let (from_nm, to_nm) = crest.first().zip(crest.last()).map_or(
            (
                self.wells_nm.0 - LEVEL_REACH_NM,
                self.wells_nm.1 + LEVEL_REACH_NM,
            ),
            |(first, last)| (first.0, last.0),
        );
        let line = |member: Member, width_px: f64, dash: Dash| Curve {
            ink: member.kind.ink(),
            dash,
            width_px,
            naming: Naming::Nowhere,
            ..Curve::through("", [(from_nm, member.energy_ev), (to_nm, member.energy_ev)])
        };
        let mut last_ev = level_ev;
        for member in &bundle.members[1..] {
            // Lines that would fall on each other are drawn once.
            if (member.energy_ev - last_ev).abs() > self.ev_per_px {
                panel.curves.push(line(*member, 0.7, member.kind.dash()));
                last_ev = member.energy_ev;
            }
        }
        if crest.is_empty() {
            panel.curves.push(line(first, 1.4, kind.dash()));
            return to_nm;
        }
        panel.curves.push(line(first, 0.9, Dash::Solid));
        panel.areas.push(Area {
            spans: crest
                .iter()
                .map(|&(z, energy)| (z, Some((level_ev.min(energy), level_ev.max(energy)))))
                .collect(),
            ink: kind.ink(),
            opacity: 0.2,
        });
        panel.curves.push(Curve {
            ink: kind.ink(),
            dash: kind.dash(),
            width_px: 1.2,
            naming: Naming::Nowhere,
            ..Curve::through("", crest)
        });
        to_nm
    }

    /// The outline of |φ|² in sight, from where it can be seen to where it can no longer.
    fn crest(&self, bundle: &Bundle, level_ev: f64, ev_nm: f64) -> Vec<(f64, f64)> {
        let Some(density) = &bundle.density_per_nm else {
            return Vec::new();
        };
        let positions = &self.evaluation.bands.nodes.positions_nm;
        let in_sight: Vec<(f64, f64)> = positions
            .iter()
            .zip(density)
            .filter(|(z, _)| (self.view_nm.0..=self.view_nm.1).contains(*z))
            .map(|(&z, &density)| (z, density))
            .collect();
        let highest = in_sight.iter().map(|it| it.1).fold(0.0, f64::max);
        let is_seen = |it: &(f64, f64)| it.1 > SEEN * highest;
        let Some((first, last)) = in_sight
            .iter()
            .position(is_seen)
            .zip(in_sight.iter().rposition(is_seen))
        else {
            return Vec::new();
        };
        let stride = (last + 1 - first).div_ceil(MOST_POINTS).max(1);
        (first..=last)
            .step_by(stride)
            .chain((!(last - first).is_multiple_of(stride)).then_some(last))
            .map(|node| (in_sight[node].0, level_ev + ev_nm * in_sight[node].1))
            .collect()
    }
}

/// How dark the stripe of a layer is.
fn shade(role: Role) -> f64 {
    if role == Role::Well { 0.12 } else { 0.05 }
}

/// The upright line of the arrow inside one panel.
fn draw_shaft(panel: &mut Panel, position_nm: f64, (from_ev, to_ev): (f64, f64)) {
    panel.curves.push(Curve {
        naming: Naming::Nowhere,
        width_px: 1.3,
        ..Curve::through("", [(position_nm, from_ev), (position_nm, to_ev)])
    });
}

/// Lowest and highest of the edges in sight and of the levels, eV.
fn ends(
    edges: &[EdgePoint],
    view_nm: (f64, f64),
    of: &[(Kind, Picked)],
    levels_ev: &[f64],
) -> (f64, f64) {
    let mut ends = (f64::INFINITY, f64::NEG_INFINITY);
    let mut stretch = |energy_ev: f64| ends = (ends.0.min(energy_ev), ends.1.max(energy_ev));
    levels_ev.iter().copied().for_each(&mut stretch);
    for pair in edges.windows(2) {
        let (from, to) = (&pair[0], &pair[1]);
        let length_nm = to.position_nm - from.position_nm;
        if to.position_nm < view_nm.0 || from.position_nm > view_nm.1 {
            continue;
        }
        for (_, picked) in of {
            for position_nm in [from.position_nm, to.position_nm] {
                let within = if length_nm > 0.0 {
                    (position_nm.clamp(view_nm.0, view_nm.1) - from.position_nm) / length_nm
                } else {
                    0.0
                };
                stretch(picked(from) + within * (picked(to) - picked(from)));
            }
        }
    }
    ends
}

/// Ends of a panel with air over and under what is drawn, and no lower than a panel may be.
fn with_air((low_ev, high_ev): (f64, f64), air_px: (f64, f64), ev_per_px: f64) -> (f64, f64) {
    let (high_ev, low_ev) = (
        high_ev + air_px.0 * ev_per_px,
        low_ev - air_px.1 * ev_per_px,
    );
    (low_ev.min(high_ev - LOWEST_PANEL_PX * ev_per_px), high_ev)
}
