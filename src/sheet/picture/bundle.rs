//! Levels that are drawn and named together.

use super::Kind;
use crate::evaluation::{Evaluation, Group, Ladder, Shares};
use crate::subbands::{Band, Level};

/// Bundles of one ladder; what lies beyond belongs to the last one.
const MOST_BUNDLES: usize = 16;
/// Groups of levels closer than this in the picture are one bundle, px.
const CLOSE_PX: f64 = 7.0;
/// A mixed state this heavy is a heavy hole and nothing else: at zero in-plane wave number it does
/// not couple to the others.
const PURELY_HEAVY: f64 = 0.999;

/// Levels that are drawn and named together: what equal wells share, and what lies so close that
/// no picture can show it apart.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Bundle {
    pub(super) kind: Kind,
    /// Its name: `e1`, `e1 ×6` for what six wells share, `e1–e24` for what is only crowded.
    pub(super) name: String,
    /// Energies, from the gap outwards, eV.
    pub(super) levels_ev: Vec<f64>,
    /// How many of these, from the gap outwards, are what equal wells share.
    pub(super) shared: usize,
    /// |φ|² of these, averaged, 1/nm on the nodes; `None` where the state has no envelope of its own
    /// band.
    pub(super) density_per_nm: Option<Vec<f64>>,
}

impl Bundle {
    /// |φ|² that belongs to the level of this energy, if it is what equal wells share; `None` if it
    /// has none.
    pub(super) fn density_of(&self, energy_ev: f64) -> Option<&[f64]> {
        self.levels_ev[..self.shared]
            .iter()
            .any(|level_ev| (level_ev - energy_ev).abs() < 1e-9)
            .then_some(self.density_per_nm.as_deref()?)
    }
}

/// A bundle in the making.
struct Draft {
    kind: Kind,
    shares: Option<Shares>,
    groups: Vec<Group>,
}

/// The levels of a ladder in bundles, from the gap outwards.
pub(super) fn bundles(evaluation: &Evaluation<'_>, ladder: &Ladder, ev_per_px: f64) -> Vec<Bundle> {
    let mut drafts: Vec<Draft> = Vec::new();
    for group in ladder.groups() {
        let kind = kind(ladder, &group);
        let full = drafts.len() == MOST_BUNDLES;
        match drafts.last_mut() {
            Some(last) if full || (last.kind == kind && is_close(last, &group, ev_per_px)) => {
                last.groups.push(group);
            }
            _ => drafts.push(Draft {
                kind,
                shares: group.rung.shares,
                groups: vec![group],
            }),
        }
    }
    drafts
        .into_iter()
        .map(|draft| draft.bundle(evaluation, ladder))
        .collect()
}

/// Whether a group follows the last one of a bundle at a distance that cannot be seen.
fn is_close(draft: &Draft, group: &Group, ev_per_px: f64) -> bool {
    draft.groups.last().is_some_and(|last| {
        let end_ev = (last.rung.energy_ev - group.rung.energy_ev).abs() - last.spread_ev;
        end_ev < CLOSE_PX * ev_per_px
    })
}

/// What a group is mostly made of.
fn kind(ladder: &Ladder, group: &Group) -> Kind {
    match (ladder.symbol, group.rung.shares) {
        (_, Some(shares)) if shares.heavy > 0.5 => Kind::Heavy,
        (_, Some(shares)) if shares.split_off > shares.light => Kind::SplitOff,
        ("e", None) => Kind::Electron,
        ("hh", None) => Kind::Heavy,
        _ => Kind::Light,
    }
}

impl Draft {
    fn bundle(self, evaluation: &Evaluation<'_>, ladder: &Ladder) -> Bundle {
        let (first, last) = (self.groups[0], self.groups[self.groups.len() - 1]);
        let symbol = ladder.symbol;
        let mut name = format!("{symbol}{}", first.first);
        if self.groups.len() > 1 {
            name.push_str(&format!("–{symbol}{}", last.last));
        } else if first.count() > 1 {
            name.push_str(&format!(" ×{}", first.count()));
        }
        if self.shares.is_some() {
            name.push_str(&format!(" {}", self.kind.word()));
        }
        Bundle {
            kind: self.kind,
            name,
            levels_ev: ladder.rungs[first.first - 1..last.last]
                .iter()
                .map(|rung| rung.energy_ev)
                .collect(),
            shared: first.count(),
            density_per_nm: own_levels(evaluation, ladder, &first).map(mean_density_per_nm),
        }
    }
}

/// The levels of a band by itself that a group is of.
fn own_levels<'a>(
    evaluation: &'a Evaluation<'_>,
    ladder: &Ladder,
    group: &Group,
) -> Option<&'a [Level]> {
    let bands = &evaluation.bands;
    let (first, last) = (group.first - 1, group.last);
    match ladder.symbol {
        "e" => bands.of(Band::Electron).get(first..last),
        "hh" => bands.of(Band::Heavy).get(first..last),
        "lh" => bands.of(Band::Light).get(first..last),
        _ => {
            let is_heavy =
                |shares: Option<Shares>| shares.is_some_and(|shares| shares.heavy > PURELY_HEAVY);
            let members = &ladder.rungs[first..last];
            let before = ladder.rungs[..first].iter();
            let rank = before.filter(|rung| is_heavy(rung.shares)).count();
            members
                .iter()
                .all(|rung| is_heavy(rung.shares))
                .then(|| bands.of(Band::Heavy).get(rank..rank + members.len()))
                .flatten()
        }
    }
}

/// |φ|² on the nodes, averaged over levels: of levels that wells share only the sum has a meaning.
fn mean_density_per_nm(levels: &[Level]) -> Vec<f64> {
    let nodes = levels.first().map_or(0, |level| level.envelope.len());
    (0..nodes)
        .map(|node| {
            let squares = levels.iter().map(|level| level.envelope[node].powi(2));
            squares.sum::<f64>() / levels.len() as f64
        })
        .collect()
}
