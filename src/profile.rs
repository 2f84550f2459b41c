//! Band edges and masses along the stack, and the region in which levels are solved for.
//!
//! [`Profile::new`] strains every layer on its substrate at the working temperature, chooses the
//! offset rule of the material family, and cuts out the solved region: from the outermost wells
//! [`REACH_NM`] outwards, through the layers as they are; where the stack ends sooner its outermost
//! layer is prolonged (the substrate is never part of it). Hard walls stand at its ends.

use crate::materials::{Composition, Crystal, Edges, Offsets, Parameters};
use crate::structure::{Material, Role, Stack, Substance};

/// How far the solved region reaches beyond the outermost wells, nm.
pub const REACH_NM: f64 = 60.0;
/// Beyond this distance from the wells intervals are [`FAR_FACTOR`] times as long, nm.
const NEAR_NM: f64 = 10.0;
/// How much longer intervals are far from the wells.
const FAR_FACTOR: f64 = 4.0;

/// A crystal and its edges on the substrate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Strained {
    /// Numbers of the unstrained crystal.
    pub crystal: Crystal,
    /// Its band edges under strain.
    pub edges: Edges,
}

/// Numbers of one layer of the stack at its two ends (equal where it is not graded).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LayerNumbers {
    /// At the substrate-side end.
    pub lower: Strained,
    /// At the surface-side end.
    pub upper: Strained,
}

/// A stretch of one layer inside the solved region.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Section {
    /// Index of the layer in the stack.
    pub layer: usize,
    /// Position of its lower end above the substrate, nm (negative where prolonged below).
    pub bottom_nm: f64,
    /// Position of its upper end, nm.
    pub top_nm: f64,
    /// Whether it counts as wells: a well, or a step next to one.
    pub in_wells: bool,
    /// Whether it lies outside the outermost wells and the steps next to them.
    pub outside: bool,
    /// For a graded layer, the share of the way from its lower to its upper end at this section's
    /// two ends; (0, 0) where the layer is uniform.
    pub shares: (f64, f64),
    /// Whether it lies so far from the wells that levels have died out to a smooth tail, for which
    /// longer intervals do.
    pub far: bool,
}

/// Equal intervals of a grid with the numbers that hold on them.
#[derive(Clone, Copy, Debug)]
pub struct Cells {
    /// How many.
    pub intervals: usize,
    /// Length of each, nm.
    pub length_nm: f64,
    /// Index of the section they lie in.
    pub section: usize,
    /// Material numbers.
    pub numbers: Strained,
    /// Potential energy of an electron in the field, eV.
    pub tilt_ev: f64,
}

/// Band edges at one position, the field's potential included.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EdgePoint {
    /// Position above the substrate, nm.
    pub position_nm: f64,
    /// Index of the layer in the stack.
    pub layer: usize,
    /// Conduction edge, eV.
    pub conduction_ev: f64,
    /// Heavy-hole edge, eV.
    pub heavy_ev: f64,
    /// Light-hole edge, eV.
    pub light_ev: f64,
}

/// Why a stack has no region to solve.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Unsolvable {
    /// There is no well.
    #[error("the stack has no layer with role = \"well\"")]
    NoWell,
    /// A well (or a step that belongs to it) is the outermost layer.
    #[error(
        "the {side} layer (row {row}) is a {role}: nothing stands beside it to confine carriers; add a barrier or confinement layer"
    )]
    OutermostWell {
        /// `lowest` or `topmost`.
        side: &'static str,
        /// Row of the file.
        row: usize,
        /// The role's word.
        role: &'static str,
    },
}

/// Edges and masses of every layer, and the solved region.
#[derive(Clone, Debug)]
pub struct Profile<'a> {
    /// Numbers of every layer of the stack.
    pub layers: Vec<LayerNumbers>,
    /// The substrate's numbers at the working temperature.
    pub substrate: Crystal,
    /// The rule that placed the valence edges.
    pub offsets: Offsets,
    /// The solved region, from the lower wall up.
    pub sections: Vec<Section>,
    /// Total thickness of the wells, nm.
    pub well_thickness_nm: f64,
    /// Middle of first to last well, nm above the substrate.
    pub centre_nm: f64,
    /// Potential energy of an electron per length along growth, eV/nm.
    pub slope_ev_nm: f64,
    /// Compositions at the ends of graded layers, for the intervals between.
    grades: Vec<Option<(Composition, Composition)>>,
    parameters: &'a Parameters,
    temperature_k: f64,
}

impl<'a> Profile<'a> {
    /// The profile of a stack.
    ///
    /// # Errors
    ///
    /// [`Unsolvable`] if there is no well, or if a well is the outermost layer.
    pub fn new(stack: &Stack, parameters: &'a Parameters) -> Result<Self, Unsolvable> {
        let region = Region::of(stack)?;
        let sections = region.sections(stack);
        let temperature_k = stack.operation.temperature_k;
        let offsets = offsets(stack, &sections, parameters);
        let crystal = |substance: &Substance| substance.crystal(parameters, temperature_k, offsets);
        let substrate = crystal(&stack.substrate.substance);
        let strained = |material: &Material| {
            let crystal = crystal(&material.substance);
            Strained {
                crystal,
                edges: crystal.on(substrate.lattice_nm),
            }
        };
        let layers = stack
            .layers
            .iter()
            .map(|layer| LayerNumbers {
                lower: strained(&layer.material),
                upper: strained(layer.grade_to.as_ref().unwrap_or(&layer.material)),
            })
            .collect();
        let grades = stack
            .layers
            .iter()
            .map(|layer| {
                let to = layer.grade_to.as_ref()?;
                match (&layer.material.substance, &to.substance) {
                    (Substance::Alloy(from), Substance::Alloy(to)) => Some((*from, *to)),
                    _ => None,
                }
            })
            .collect();
        Ok(Self {
            layers,
            substrate,
            offsets,
            sections,
            well_thickness_nm: stack.well_thickness_nm(),
            centre_nm: 0.5 * (region.bottom_nm + region.top_nm),
            slope_ev_nm: 1e-4 * stack.model.field_kv_cm,
            grades,
            parameters,
            temperature_k,
        })
    }

    /// Lowest and highest position of the solved region, nm above the substrate.
    ///
    /// # Panics
    ///
    /// Never: a region has sections.
    #[must_use]
    pub fn walls_nm(&self) -> (f64, f64) {
        let first = self.sections.first().expect("a region has sections");
        let last = self.sections.last().expect("a region has sections");
        (first.bottom_nm, last.top_nm)
    }

    /// Whether the solved region is its own mirror image, and no field is on.
    #[must_use]
    pub fn is_symmetric(&self) -> bool {
        let near = |a: f64, b: f64| (a - b).abs() < 1e-9;
        let same = |a: &Strained, b: &Strained| {
            let values = |n: &Strained| {
                [
                    n.edges.conduction_ev,
                    n.edges.heavy_ev,
                    n.edges.light_ev,
                    n.edges.valence_mean_ev,
                    n.crystal.split_off_ev,
                    n.crystal.luttinger[0],
                    n.crystal.luttinger[1],
                    n.crystal.luttinger[2],
                ]
            };
            values(a)
                .into_iter()
                .zip(values(b))
                .all(|(a, b)| near(a, b))
        };
        let mirror = |section: &Section, other: &Section| {
            near(
                section.top_nm - section.bottom_nm,
                other.top_nm - other.bottom_nm,
            ) && same(&self.at(section, 0.0), &self.at(other, 1.0))
                && same(&self.at(section, 1.0), &self.at(other, 0.0))
        };
        self.slope_ev_nm == 0.0
            && self
                .sections
                .iter()
                .zip(self.sections.iter().rev())
                .all(|(a, b)| mirror(a, b))
    }

    /// The numbers of a section at the share `within` of the way up it.
    #[must_use]
    pub fn at(&self, section: &Section, within: f64) -> Strained {
        let numbers = &self.layers[section.layer];
        let share = section.shares.0 + (section.shares.1 - section.shares.0) * within;
        if section.shares.0 == section.shares.1 {
            // Uniform, or a graded layer's end prolonged.
            return if share == 0.0 {
                numbers.lower
            } else {
                numbers.upper
            };
        }
        let Some((from, to)) = &self.grades[section.layer] else {
            return numbers.lower;
        };
        let crystal =
            self.parameters
                .crystal(&from.towards(to, share), self.temperature_k, self.offsets);
        Strained {
            crystal,
            edges: crystal.on(self.substrate.lattice_nm),
        }
    }

    /// A grid of the solved region whose nodes include every layer boundary: each section is cut
    /// into equal intervals no longer than `step_nm` (four times that far from the wells), and each
    /// of these is halved `halvings` times.
    ///
    /// In a graded layer, and in a field, every interval carries the numbers of its own middle, so
    /// that the error of the grid stays of second order.
    #[must_use]
    pub fn grid(&self, step_nm: f64, halvings: u32) -> Vec<Cells> {
        let mut cells = Vec::new();
        for (index, section) in self.sections.iter().enumerate() {
            let thickness = section.top_nm - section.bottom_nm;
            let step_nm = if section.far {
                FAR_FACTOR * step_nm
            } else {
                step_nm
            };
            let least = (thickness / step_nm - 1e-9).ceil().max(1.0);
            let intervals = (least as usize) << halvings;
            let length_nm = thickness / intervals as f64;
            let graded = section.shares.0 != section.shares.1;
            if !graded && self.slope_ev_nm == 0.0 {
                cells.push(Cells {
                    intervals,
                    length_nm,
                    section: index,
                    numbers: self.at(section, 0.0),
                    tilt_ev: 0.0,
                });
                continue;
            }
            for interval in 0..intervals {
                let within = (interval as f64 + 0.5) / intervals as f64;
                let middle_nm = section.bottom_nm + within * thickness;
                cells.push(Cells {
                    intervals: 1,
                    length_nm,
                    section: index,
                    numbers: self.at(section, within),
                    tilt_ev: self.slope_ev_nm * (middle_nm - self.centre_nm),
                });
            }
        }
        cells
    }

    /// Band edges along the solved region, to be joined by straight lines: two points at every
    /// boundary, one from either side, and a few more inside graded layers, whose edges bend.
    #[must_use]
    pub fn edge_points(&self) -> Vec<EdgePoint> {
        const GRADE_POINTS: usize = 16;
        let mut points = Vec::new();
        for section in &self.sections {
            let graded = section.shares.0 != section.shares.1;
            let pieces = if graded { GRADE_POINTS } else { 1 };
            for piece in 0..=pieces {
                let within = piece as f64 / pieces as f64;
                let position_nm = section.bottom_nm + within * (section.top_nm - section.bottom_nm);
                let tilt_ev = self.slope_ev_nm * (position_nm - self.centre_nm);
                let edges = self.at(section, within).edges;
                points.push(EdgePoint {
                    position_nm,
                    layer: section.layer,
                    conduction_ev: edges.conduction_ev + tilt_ev,
                    heavy_ev: edges.heavy_ev + tilt_ev,
                    light_ev: edges.light_ev + tilt_ev,
                });
            }
        }
        points
    }

    /// Both ends of every layer that lies (in part) in the solved region outside the outermost
    /// wells.
    pub fn outside(&self) -> impl Iterator<Item = &Strained> {
        self.sections
            .iter()
            .filter(|section| section.outside)
            .flat_map(|section| {
                [
                    &self.layers[section.layer].lower,
                    &self.layers[section.layer].upper,
                ]
            })
    }

    /// Both ends of every well, each with half its thickness in nm.
    pub fn wells<'b>(&'b self, stack: &'b Stack) -> impl Iterator<Item = (&'b Strained, f64)> {
        stack
            .layers
            .iter()
            .zip(&self.layers)
            .filter(|(layer, _)| layer.role == Role::Well)
            .flat_map(|(layer, numbers)| {
                [
                    (&numbers.lower, 0.5 * layer.thickness_nm),
                    (&numbers.upper, 0.5 * layer.thickness_nm),
                ]
            })
    }
}

/// Where the wells lie.
struct Region {
    /// Layers that count as wells: the outermost wells, steps next to them, and all between.
    first: usize,
    last: usize,
    /// Lower end of the first well and upper end of the last, nm above the substrate.
    bottom_nm: f64,
    top_nm: f64,
    /// Lower end of every layer, nm above the substrate.
    bottoms_nm: Vec<f64>,
    /// Steps that belong to a well, and the wells.
    in_wells: Vec<bool>,
}

impl Region {
    fn of(stack: &Stack) -> Result<Self, Unsolvable> {
        let mut position = 0.0;
        let bottoms_nm: Vec<f64> = stack
            .layers
            .iter()
            .map(|layer| {
                let bottom = position;
                position += layer.thickness_nm;
                bottom
            })
            .collect();
        let role = |index: usize| stack.layers[index].role;
        let wells: Vec<usize> = (0..stack.layers.len())
            .filter(|&index| role(index) == Role::Well)
            .collect();
        let (Some(&first_well), Some(&last_well)) = (wells.first(), wells.last()) else {
            return Err(Unsolvable::NoWell);
        };
        // A step counts if it touches a well, directly or through other steps.
        let mut in_wells: Vec<bool> = (0..stack.layers.len())
            .map(|index| role(index) == Role::Well)
            .collect();
        for &well in &wells {
            let mut below = well;
            while below > 0 && role(below - 1) == Role::Step {
                below -= 1;
                in_wells[below] = true;
            }
            let mut above = well;
            while above + 1 < stack.layers.len() && role(above + 1) == Role::Step {
                above += 1;
                in_wells[above] = true;
            }
        }
        let first = in_wells
            .iter()
            .position(|&inside| inside)
            .unwrap_or(first_well);
        let last = in_wells
            .iter()
            .rposition(|&inside| inside)
            .unwrap_or(last_well);
        for (side, index, beside) in [
            ("lowest", 0, first == 0),
            ("topmost", last, last + 1 == stack.layers.len()),
        ] {
            if beside {
                return Err(Unsolvable::OutermostWell {
                    side,
                    row: stack.layers[index].row,
                    role: role(index).word(),
                });
            }
        }
        Ok(Self {
            first,
            last,
            bottom_nm: bottoms_nm[first_well],
            top_nm: bottoms_nm[last_well] + stack.layers[last_well].thickness_nm,
            bottoms_nm,
            in_wells,
        })
    }

    fn sections(&self, stack: &Stack) -> Vec<Section> {
        let (low, high) = (self.bottom_nm - REACH_NM, self.top_nm + REACH_NM);
        // In a field states lean on the far walls too: no part of the region is smooth.
        let near = if stack.model.field_kv_cm == 0.0 {
            let last = &stack.layers[self.last];
            let below = self.bottoms_nm[self.first] - NEAR_NM;
            (
                below,
                self.bottoms_nm[self.last] + last.thickness_nm + NEAR_NM,
            )
        } else {
            (low, high)
        };
        let mut sections = Vec::new();
        let count = stack.layers.len();
        for (index, layer) in stack.layers.iter().enumerate() {
            let bottom = self.bottoms_nm[index];
            let top = bottom + layer.thickness_nm;
            let graded = layer.grade_to.is_some();
            let mut add = |from: f64, to: f64, shares: &dyn Fn(f64) -> f64| {
                // Cut where the near part of the region begins and ends.
                let mut cuts = vec![from];
                cuts.extend(
                    [near.0, near.1]
                        .into_iter()
                        .filter(|&at| at > from && at < to),
                );
                cuts.push(to);
                for pair in cuts.windows(2) {
                    if pair[1] - pair[0] > 1e-9 {
                        let middle = 0.5 * (pair[0] + pair[1]);
                        sections.push(Section {
                            layer: index,
                            bottom_nm: pair[0],
                            top_nm: pair[1],
                            in_wells: self.in_wells[index],
                            outside: index < self.first || index > self.last,
                            shares: (shares(pair[0]), shares(pair[1])),
                            far: middle < near.0 || middle > near.1,
                        });
                    }
                }
            };
            if index == 0 {
                add(low, bottom, &|_| 0.0);
            }
            add(bottom.max(low), top.min(high), &|position| {
                if graded {
                    (position - bottom) / layer.thickness_nm
                } else {
                    0.0
                }
            });
            if index + 1 == count {
                add(top, high, &|_| if graded { 1.0 } else { 0.0 });
            }
        }
        sections
    }
}

/// The offset rule of a stack: that of its substrate and of the compositions in the solved region.
fn offsets(stack: &Stack, sections: &[Section], parameters: &Parameters) -> Offsets {
    let share = stack.model.conduction_share;
    match (&stack.substrate.substance, share) {
        (Substance::Alloy(substrate), _) => {
            let compositions = sections
                .iter()
                .flat_map(|section| {
                    let layer = &stack.layers[section.layer];
                    std::iter::once(&layer.material).chain(&layer.grade_to)
                })
                .filter_map(|material| match &material.substance {
                    Substance::Alloy(composition) => Some(composition),
                    Substance::Own { .. } => None,
                });
            parameters.offsets(
                substrate,
                compositions,
                share,
                stack.operation.temperature_k,
            )
        }
        (Substance::Own { crystal, .. }, Some(conduction_share)) => Offsets::Share {
            conduction_share,
            anchor_valence_ev: crystal.valence_edge_ev,
            anchor_gap_ev: crystal.gap_ev,
        },
        (Substance::Own { .. }, None) => Offsets::Table,
    }
}
