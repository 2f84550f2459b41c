//! Levels and transitions in the groups that a reader sees: those of equal wells together.

use super::{Evaluation, LEAST_OVERLAP, Transition};
use crate::structure::Layer;
use crate::subbands::{Band, CLUSTER_EV, Level, ZoneCentre};
use crate::units::wavelength_nm;

/// Levels that equal wells share are one group if they lie within this, eV: less than half of kT
/// at room temperature, so that carriers see one level with as many places.
const GROUP_EV: f64 = 0.010;

/// The levels of one kind, from the band edge.
#[derive(Clone, Debug, PartialEq)]
pub struct Ladder {
    /// What the levels are of: `electron`, `heavy hole`, `light hole`, `valence`.
    pub name: &'static str,
    /// What a level is called before its number: `e`, `hh`, `lh`, `v`.
    pub symbol: &'static str,
    /// Deepest edge of this kind in the wells, eV.
    pub edge_ev: f64,
    /// +1 where levels lie above that edge, −1 where they lie below it.
    pub sign: f64,
    /// The levels.
    pub rungs: Vec<Rung>,
    /// Most levels that one group may hold: one a well.
    wells: usize,
}

/// One level of a ladder.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Rung {
    /// Energy, eV (of a hole too: an electron's energy).
    pub energy_ev: f64,
    /// In-plane mass, free-electron masses; `None` where the bands are mixed.
    pub in_plane_mass: Option<f64>,
    /// Estimate of the numerical error of the energy, eV.
    pub error_ev: f64,
    /// Share of the level inside the wells and their steps.
    pub in_wells: f64,
    /// Whether it lies close to the edge that confines it.
    pub near_edge: bool,
    /// What a valence state is made of, where the bands are mixed.
    pub shares: Option<Shares>,
}

/// Shares of the bands in a state at zero in-plane wave number; they sum to 1.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Shares {
    /// Of the heavy-hole band.
    pub heavy: f64,
    /// Of the light-hole band.
    pub light: f64,
    /// Of the split-off band.
    pub split_off: f64,
}

impl Rung {
    fn of_level(level: &Level) -> Self {
        Self {
            energy_ev: level.energy_ev,
            in_plane_mass: Some(level.in_plane_mass),
            error_ev: level.error_ev,
            in_wells: level.in_wells,
            near_edge: level.near_edge,
            shares: None,
        }
    }

    fn of_state(state: &ZoneCentre) -> Self {
        Self {
            energy_ev: state.energy_ev,
            in_plane_mass: None,
            error_ev: state.error_ev,
            in_wells: state.in_wells,
            near_edge: state.near_edge,
            shares: Some(Shares {
                heavy: state.heavy,
                light: state.light,
                split_off: state.split_off,
            }),
        }
    }
}

/// Levels that equal wells share.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Group {
    /// Number of the first level, from 1.
    pub first: usize,
    /// Number of the last level.
    pub last: usize,
    /// The level nearest the gap, with the mean mass and share in the wells and the largest error of all.
    pub rung: Rung,
    /// From the first level to the last, eV, at least zero.
    pub spread_ev: f64,
}

impl Group {
    /// How many levels.
    #[must_use]
    pub fn count(&self) -> usize {
        self.last + 1 - self.first
    }

    /// Its name: `e1`, or `e1-e6`.
    #[must_use]
    pub fn name(&self, symbol: &str) -> String {
        if self.count() == 1 {
            format!("{symbol}{}", self.first)
        } else {
            format!("{symbol}{}-{symbol}{}", self.first, self.last)
        }
    }
}

impl Ladder {
    /// Distance of an energy from the wells' edge into the band, eV.
    #[must_use]
    pub fn above_edge_ev(&self, energy_ev: f64) -> f64 {
        self.sign * (energy_ev - self.edge_ev)
    }

    /// The levels in groups.
    ///
    /// Equal wells split a level into as many as there are wells: that many neighbours make a group
    /// if they lie close together and far from the next. Where wells differ, a group is what
    /// [`CLUSTER_EV`] joins.
    #[must_use]
    pub fn groups(&self) -> Vec<Group> {
        let mut groups = Vec::new();
        let mut start = 0;
        while start < self.rungs.len() {
            let count = self.shared(start).unwrap_or_else(|| self.cluster(start));
            groups.push(self.group(start, start + count));
            start += count;
        }
        groups
    }

    fn distance(&self, from: usize, to: usize) -> f64 {
        (self.rungs[to].energy_ev - self.rungs[from].energy_ev).abs()
    }

    /// As many levels as wells from `start` on, or what is left of them, if they stand together.
    fn shared(&self, start: usize) -> Option<usize> {
        let end = (start + self.wells).min(self.rungs.len());
        let spread = self.distance(start, end - 1);
        let apart = |gap: f64| gap > 2.0 * spread;
        let free_below = start == 0 || apart(self.distance(start - 1, start));
        let free_above = end == self.rungs.len() || apart(self.distance(end - 1, end));
        (spread < GROUP_EV && free_below && free_above).then_some(end - start)
    }

    /// Levels from `start` on whose neighbours are closer than [`CLUSTER_EV`].
    fn cluster(&self, start: usize) -> usize {
        let most = (self.rungs.len() - start).min(self.wells);
        (1..most)
            .find(|&count| self.distance(start + count - 1, start + count) > CLUSTER_EV)
            .unwrap_or(most)
    }

    fn group(&self, start: usize, end: usize) -> Group {
        let members = &self.rungs[start..end];
        let count = members.len() as f64;
        let masses: Option<f64> = members.iter().map(|rung| rung.in_plane_mass).sum();
        Group {
            first: start + 1,
            last: end,
            rung: Rung {
                energy_ev: members[0].energy_ev,
                in_plane_mass: masses.map(|sum| sum / count),
                error_ev: members.iter().map(|rung| rung.error_ev).fold(0.0, f64::max),
                in_wells: members.iter().map(|rung| rung.in_wells).sum::<f64>() / count,
                near_edge: members.iter().any(|rung| rung.near_edge),
                shares: members[0].shares,
            },
            spread_ev: self.distance(start, end - 1),
        }
    }
}

/// Transitions between two groups of levels.
#[derive(Clone, Debug, PartialEq)]
pub struct TransitionGroup {
    /// Name of the electron levels: `e1`, `e1-e6`.
    pub electron: String,
    /// Name of the hole levels.
    pub hole: String,
    /// Lowest of the transitions whose own overlap is above [`LEAST_OVERLAP`], eV.
    pub energy_ev: f64,
    /// Its wavelength in vacuum, nm.
    pub wavelength_nm: f64,
    /// From the lowest to the highest of these, eV.
    pub spread_ev: f64,
    /// Overlaps of all pairs summed, divided by the number of levels of the smaller group: what one
    /// well alone would have.
    pub overlap: f64,
}

impl Evaluation<'_> {
    /// The levels that carriers fill, one ladder a kind, electrons first: heavy and light holes, or
    /// the mixed valence states. A kind without levels has an empty ladder.
    #[must_use]
    pub fn ladders(&self) -> Vec<Ladder> {
        let mut ladders = self.single_ladders();
        if let Some(mixed) = &self.mixed {
            let edge_ev = ladders[1].edge_ev.max(ladders[2].edge_ev);
            ladders.truncate(1);
            ladders.push(Ladder {
                name: "valence",
                symbol: "v",
                edge_ev,
                sign: -1.0,
                rungs: mixed.zone_centre.iter().map(Rung::of_state).collect(),
                wells: self.stack.well_count(),
            });
        }
        ladders
    }

    /// The levels of the bands one at a time: electron, heavy hole, light hole.
    #[must_use]
    pub fn single_ladders(&self) -> Vec<Ladder> {
        [
            (Band::Electron, "electron", "e", 1.0),
            (Band::Heavy, "heavy hole", "hh", -1.0),
            (Band::Light, "light hole", "lh", -1.0),
        ]
        .into_iter()
        .map(|(band, name, symbol, sign)| {
            let depth = self
                .profile
                .wells(self.stack)
                .map(|(numbers, _)| sign * band.edge_ev(numbers))
                .fold(f64::INFINITY, f64::min);
            Ladder {
                name,
                symbol,
                edge_ev: sign * depth,
                sign,
                rungs: self.bands.of(band).iter().map(Rung::of_level).collect(),
                wells: self.stack.well_count(),
            }
        })
        .collect()
    }

    /// Energies of the highest mixed valence states over the in-plane wave number in 1/nm, eV, from
    /// the highest down: one of each pair where the blocks are equal. Empty without mixing.
    #[must_use]
    pub fn dispersion(&self) -> Vec<(f64, Vec<f64>)> {
        let Some(mixed) = &self.mixed else {
            return Vec::new();
        };
        let states = mixed
            .blocks
            .first()
            .map_or(0, |slices| slices[0].energy_ev.len());
        mixed
            .k_per_nm
            .iter()
            .enumerate()
            .map(|(place, &k_per_nm)| {
                let mut energies: Vec<f64> = mixed
                    .blocks
                    .iter()
                    .filter_map(|slices| slices.get(place))
                    .flat_map(|slice| slice.energy_ev.iter().take(states).copied())
                    .collect();
                energies.sort_by(|a, b| b.total_cmp(a));
                (k_per_nm, energies)
            })
            .collect()
    }

    /// The transitions between groups of levels, by rising energy.
    #[must_use]
    pub fn transition_groups(&self) -> Vec<TransitionGroup> {
        let ladders = self.ladders();
        let Some((electron, holes)) = ladders.split_first() else {
            return Vec::new();
        };
        let pairs = self.every_pair();
        let mut groups = Vec::new();
        for ladder in holes {
            for lower in ladder.groups() {
                let of_lower: Vec<&Transition> = pairs
                    .iter()
                    .filter(|pair| {
                        (lower.first..=lower.last)
                            .any(|number| pair.hole == format!("{}{number}", ladder.symbol))
                    })
                    .collect();
                for upper in electron.groups() {
                    let members = of_lower
                        .iter()
                        .filter(|pair| (upper.first..=upper.last).contains(&pair.electron));
                    let overlap = members.clone().map(|pair| pair.overlap).sum::<f64>()
                        / upper.count().min(lower.count()) as f64;
                    let (lowest, highest) = members
                        .filter(|pair| pair.overlap > LEAST_OVERLAP)
                        .map(|pair| pair.energy_ev)
                        .fold((f64::INFINITY, 0.0f64), |(low, high), energy| {
                            (low.min(energy), high.max(energy))
                        });
                    if lowest.is_finite() {
                        groups.push(TransitionGroup {
                            electron: upper.name(electron.symbol),
                            hole: lower.name(ladder.symbol),
                            energy_ev: lowest,
                            wavelength_nm: wavelength_nm(lowest),
                            spread_ev: highest - lowest,
                            overlap,
                        });
                    }
                }
            }
        }
        groups.sort_by(|a, b| a.energy_ev.total_cmp(&b.energy_ev));
        groups
    }

    /// How far apart coupling drives the lowest level of equal wells, eV: from the first to the
    /// last of as many levels as there are wells. `None` for one well, or wells that differ.
    #[must_use]
    pub fn coupling_ev(&self, band: Band) -> Option<f64> {
        let same = |a: &Layer, b: &Layer| {
            a.thickness_nm.to_bits() == b.thickness_nm.to_bits()
                && a.material.substance == b.material.substance
                && a.grade_to.is_none()
                && b.grade_to.is_none()
        };
        let first = self.stack.wells().next()?;
        let count = self.stack.well_count();
        if count < 2 || !self.stack.wells().all(|well| same(well, first)) {
            return None;
        }
        let levels = self.bands.of(band);
        let last = levels.get(count - 1)?;
        Some((last.energy_ev - levels[0].energy_ev).abs())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ladder(wells: usize, energies_mev: &[f64]) -> Ladder {
        Ladder {
            name: "electron",
            symbol: "e",
            edge_ev: 0.0,
            sign: 1.0,
            rungs: energies_mev
                .iter()
                .map(|energy| Rung {
                    energy_ev: 1e-3 * energy,
                    in_plane_mass: Some(0.05),
                    error_ev: 1e-8,
                    in_wells: 0.9,
                    near_edge: false,
                    shares: None,
                })
                .collect(),
            wells,
        }
    }

    fn counts(wells: usize, energies_mev: &[f64]) -> Vec<usize> {
        let groups = ladder(wells, energies_mev).groups();
        groups.iter().map(Group::count).collect()
    }

    #[test]
    fn equal_wells_make_groups_of_their_number() {
        assert_eq!(counts(3, &[50.0, 50.5, 51.2, 180.0, 182.0, 184.0]), [3, 3]);
        assert_eq!(counts(3, &[50.0, 50.5, 51.2, 180.0]), [3, 1]);
    }

    #[test]
    fn levels_of_one_well_stand_alone_however_close() {
        assert_eq!(counts(1, &[50.0, 50.1, 50.3]), [1, 1, 1]);
    }

    #[test]
    fn different_wells_are_joined_by_nearness_only() {
        // Two narrow wells and a wide one: the wide one's ground level lies deeper.
        assert_eq!(counts(3, &[20.0, 50.0, 50.1, 90.0]), [1, 2, 1]);
    }

    #[test]
    fn a_group_is_named_by_its_ends() {
        let groups = ladder(2, &[50.0, 50.1, 90.0]).groups();
        assert_eq!(groups[0].name("e"), "e1-e2");
        assert_eq!(groups[1].name("e"), "e3");
        assert!((groups[0].spread_ev - 1e-4).abs() < 1e-12);
    }
}
