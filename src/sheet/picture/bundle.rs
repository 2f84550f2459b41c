//! Levels that are drawn and named together.

use super::Kind;
use crate::evaluation::{Evaluation, Group, Ladder, Shares};
use crate::subbands::{Band, Level};

/// A ladder of more groups than this is crowded: its levels are shown, not told apart.
const MANY_GROUPS: usize = 16;
/// Groups of levels closer than this in the picture are one bundle, px; in a crowded ladder those
/// closer than a name is high.
const CLOSE_PX: f64 = 4.0;
const CROWDED_PX: f64 = 14.0;
/// A mixed state this heavy is a heavy hole and nothing else: at zero in-plane wave number it does
/// not couple to the others.
const PURELY_HEAVY: f64 = 0.999;

/// One level of a bundle.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Member {
    pub(super) energy_ev: f64,
    pub(super) kind: Kind,
}

/// Levels that are drawn and named together: what equal wells share, and what lies so close that
/// no picture can show it apart.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Bundle {
    /// Its name: `e1`, `e1 ×6` for what six wells share, `e1–e24` for what is only crowded.
    pub(super) name: String,
    /// From the gap outwards.
    pub(super) members: Vec<Member>,
    /// How many of these, from the gap outwards, are what equal wells share.
    shared: usize,
    /// |φ|² of these, averaged, 1/nm on the nodes; `None` where the state has no envelope of its own
    /// band.
    pub(super) density_per_nm: Option<Vec<f64>>,
}

impl Bundle {
    /// |φ|² that belongs to the level of this energy, if it is what equal wells share; `None` if it
    /// has none.
    pub(super) fn density_of(&self, energy_ev: f64) -> Option<&[f64]> {
        self.members[..self.shared]
            .iter()
            .any(|member| (member.energy_ev - energy_ev).abs() < 1e-9)
            .then_some(self.density_per_nm.as_deref()?)
    }

    /// The level nearest the gap.
    pub(super) fn first(&self) -> Member {
        self.members[0]
    }
}

/// The levels of a ladder in bundles, from the gap outwards.
pub(super) fn bundles(evaluation: &Evaluation<'_>, ladder: &Ladder, ev_per_px: f64) -> Vec<Bundle> {
    let groups = ladder.groups();
    let is_crowded = groups.len() > MANY_GROUPS;
    let close_ev = ev_per_px * if is_crowded { CROWDED_PX } else { CLOSE_PX };
    let belongs = |last: &Group, next: &Group| {
        let distance_ev = (last.rung.energy_ev - next.rung.energy_ev).abs() - last.spread_ev;
        let is_alike = kind(ladder, last.first) == kind(ladder, next.first);
        distance_ev < close_ev && (is_alike || is_crowded)
    };
    groups
        .chunk_by(belongs)
        .filter_map(|groups| bundle(evaluation, ladder, groups))
        .collect()
}

/// What a level, by its number, is mostly made of.
fn kind(ladder: &Ladder, number: usize) -> Kind {
    match (ladder.symbol, ladder.rungs[number - 1].shares) {
        (_, Some(shares)) if shares.heavy > 0.5 => Kind::Heavy,
        (_, Some(shares)) if shares.split_off > shares.light => Kind::SplitOff,
        ("e", None) => Kind::Electron,
        ("hh", None) => Kind::Heavy,
        _ => Kind::Light,
    }
}

/// The bundle of neighbouring groups; `None` of none.
fn bundle(evaluation: &Evaluation<'_>, ladder: &Ladder, groups: &[Group]) -> Option<Bundle> {
    let (first, last) = (groups.first()?, groups.last()?);
    let members: Vec<Member> = (first.first..=last.last)
        .map(|number| Member {
            energy_ev: ladder.rungs[number - 1].energy_ev,
            kind: kind(ladder, number),
        })
        .collect();
    let symbol = ladder.symbol;
    let others = if groups.len() > 1 {
        format!("–{symbol}{}", last.last)
    } else if first.count() > 1 {
        format!(" ×{}", first.count())
    } else {
        String::new()
    };
    // The symbol of a mixed state does not say what it is made of.
    let is_alike = members.iter().all(|member| member.kind == members[0].kind);
    let made_of = if first.rung.shares.is_some() && is_alike {
        format!(" {}", members[0].kind.word())
    } else {
        String::new()
    };
    Some(Bundle {
        name: format!("{symbol}{}{others}{made_of}", first.first),
        members,
        shared: first.count(),
        density_per_nm: own_levels(evaluation, ladder, first).map(mean_density_per_nm),
    })
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
