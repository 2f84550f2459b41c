//! Compositions asked for by what they must have: a gap, a strain, or both.

use super::composition_line::{Line, corners, curved, distance, straight};
use super::{Composition, Elements, MissingTernary, Offsets, Parameters};
use crate::numerics::roots::bracketed_root;
use crate::units::{photon_ev, wavelength_nm};

/// Temperature at which a gap and a strain are meant, K.
const PRESCRIPTION_K: f64 = 300.0;
/// Points at which a line of compositions is looked at before roots are refined.
const SCAN: usize = 512;
/// A gap that misses by less is met, eV: 0.001 nm at 1.3 µm.
const GAP_TOLERANCE_EV: f64 = 1e-6;
/// Two solutions with no fraction further apart are one.
const SAME_FRACTION: f64 = 1e-5;
/// Relative miss of a lattice constant at the end of what is reachable that counts as the end.
const LATTICE_TOLERANCE: f64 = 1e-9;

/// Why no single composition was found.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum SolveError {
    /// A condition that means nothing.
    #[error("{0}")]
    Senseless(String),
    /// Fewer conditions than fractions to choose.
    #[error("{elements} has {free} fractions to choose, and {given} given")]
    TooFew {
        /// The elements.
        elements: String,
        /// How many fractions are free.
        free: usize,
        /// What is given, as a clause: `only a gap is`.
        given: String,
        /// What would settle it.
        missing: String,
    },
    /// More conditions than fractions to choose.
    #[error("{elements} has {choice}, and {given} given")]
    TooMany {
        /// The elements.
        elements: String,
        /// What there is to choose, as a clause.
        choice: String,
        /// What is given, as a clause.
        given: String,
    },
    /// No composition of these elements has that strain on this substrate.
    #[error("{elements} reaches from {} to {} on this substrate, not {}",
        strain_words(*.most_compressive), strain_words(*.most_tensile), strain_words(*.asked))]
    StrainOutOfReach {
        /// The elements.
        elements: String,
        /// In-plane strain asked for.
        asked: f64,
        /// The lowest in-plane strain (negative is compressive).
        most_compressive: f64,
        /// The highest.
        most_tensile: f64,
    },
    /// No composition of that strain has that gap.
    #[error("{line} reaches gaps {}, not {asked_nm} nm", gap_range_words(*.shortest_nm, *.longest_nm))]
    GapOutOfReach {
        /// The elements and, where it is given, the strain.
        line: String,
        /// Gap asked for, as a wavelength in nm.
        asked_nm: f64,
        /// The widest gap of the line as a wavelength, nm; none if the gap is closed everywhere.
        shortest_nm: Option<f64>,
        /// The narrowest gap as a wavelength, nm; none if the gap closes.
        longest_nm: Option<f64>,
    },
    /// Several compositions have both.
    #[error("{} compositions of {elements} meet this: {}", .solutions.len(), formulas(.solutions))]
    Several {
        /// The elements.
        elements: String,
        /// All of them.
        solutions: Vec<Composition>,
    },
    /// The data lack a ternary that these elements mix.
    #[error(transparent)]
    Missing(#[from] MissingTernary),
}

impl SolveError {
    /// What to do about it.
    #[must_use]
    pub fn help(&self) -> String {
        match self {
            Self::Senseless(_) => {
                "gaps are positive wavelengths in nm, strains a few per cent".to_owned()
            }
            Self::TooFew { missing, .. } => missing.clone(),
            Self::TooMany { .. } => {
                "leave a condition out, or write the composition as a formula".to_owned()
            }
            Self::StrainOutOfReach { .. } => {
                "ask for a strain within that range, or for other elements".to_owned()
            }
            Self::GapOutOfReach { .. } => {
                "ask for a gap within that range, for another strain or for other elements"
                    .to_owned()
            }
            Self::Several { .. } => "write the one that is meant as a formula".to_owned(),
            Self::Missing(_) => {
                "lay a parameter file with these bowings over the shipped one".to_owned()
            }
        }
    }
}

/// The composition of these elements that has a gap, an in-plane strain, or both, at 300 K.
///
/// A ternary is settled by one condition and a quaternary by both. The strain alone fixes a line of
/// compositions (the lattice constant follows Vegard); along it, or along a ternary, all
/// compositions of the gap are looked for, the turning points and the ends included.
///
/// # Arguments
///
/// * `substrate_lattice_nm` – lattice constant of the substrate at 300 K, nm
/// * `gap_nm` – gap of the strained bulk layer, [`gap_ev`](super::Edges::gap_ev), as a wavelength in nm
/// * `in_plane_strain` – (a_substrate − a)/a, negative is compressive
///
/// # Errors
///
/// Too few or too many conditions; a strain or gap out of reach, with the range that is reached;
/// several compositions that meet the conditions, all of them named.
pub fn solve_composition(
    parameters: &Parameters,
    elements: &Elements,
    substrate_lattice_nm: f64,
    gap_nm: Option<f64>,
    in_plane_strain: Option<f64>,
) -> Result<Composition, SolveError> {
    refuse_senseless(substrate_lattice_nm, gap_nm, in_plane_strain)?;
    count_conditions(*elements, gap_nm.is_some(), in_plane_strain.is_some())?;
    parameters.covers(&even_mixture(*elements))?;

    let task = Task {
        parameters,
        elements,
        substrate_lattice_nm,
    };
    let line = match in_plane_strain {
        Some(strain) => task.strain_line(strain)?,
        None => Line::whole(*elements),
    };
    let Some(gap_nm) = gap_nm else {
        return Ok(line.at(0.0));
    };
    let mut solutions = task.compositions_of_gap(&line, gap_nm, in_plane_strain)?;
    if solutions.len() > 1 {
        return Err(SolveError::Several {
            elements: elements.to_string(),
            solutions,
        });
    }
    Ok(solutions.swap_remove(0))
}

fn refuse_senseless(
    substrate_lattice_nm: f64,
    gap_nm: Option<f64>,
    in_plane_strain: Option<f64>,
) -> Result<(), SolveError> {
    let refuse = |what: String| Err(SolveError::Senseless(what));
    if !(substrate_lattice_nm.is_finite() && substrate_lattice_nm > 0.0) {
        return refuse(format!(
            "{substrate_lattice_nm} nm is no lattice constant of a substrate"
        ));
    }
    if let Some(gap) = gap_nm
        && !(gap.is_finite() && gap > 0.0)
    {
        return refuse(format!("{gap} nm is no gap"));
    }
    if let Some(strain) = in_plane_strain
        && (strain.is_nan() || strain.abs() >= 0.5)
    {
        return refuse(format!("{} % is no strain of a crystal", 100.0 * strain));
    }
    Ok(())
}

/// Whether as many conditions are given as there are fractions to choose.
fn count_conditions(elements: Elements, gap: bool, strain: bool) -> Result<(), SolveError> {
    let free = elements.free_fractions();
    let given = match (gap, strain) {
        (true, true) => "a gap and a strain are",
        (true, false) => "only a gap is",
        (false, true) => "only a strain is",
        (false, false) => "neither a gap nor a strain is",
    };
    let conditions = usize::from(gap) + usize::from(strain);
    if conditions < free {
        let missing = match (free, gap, strain) {
            (3.., ..) => {
                "a gap and a strain settle two fractions: write the composition as a formula"
            }
            (1, ..) => "give its gap or its strain",
            (_, true, false) => "give its strain too",
            (_, false, true) => "give its gap too",
            _ => "give its gap and its strain",
        };
        return Err(SolveError::TooFew {
            elements: elements.to_string(),
            free,
            given: given.to_owned(),
            missing: missing.to_owned(),
        });
    }
    if conditions > free {
        let choice = if free == 0 {
            "no fraction to choose"
        } else {
            "one fraction to choose"
        };
        return Err(SolveError::TooMany {
            elements: elements.to_string(),
            choice: choice.to_owned(),
            given: given.replace("only ", ""),
        });
    }
    Ok(())
}

/// Equal shares of all elements.
fn even_mixture(elements: Elements) -> Composition {
    let even = |present: [bool; 3]| {
        let count = present.iter().filter(|&&here| here).count() as f64;
        present.map(|here| if here { count.recip() } else { 0.0 })
    };
    Composition {
        group_iii: even(elements.group_iii),
        group_v: even(elements.group_v),
    }
}

/// What stays the same while a composition is looked for.
struct Task<'a> {
    parameters: &'a Parameters,
    elements: &'a Elements,
    substrate_lattice_nm: f64,
}

impl Task<'_> {
    fn lattice_nm(&self, composition: &Composition) -> f64 {
        self.parameters
            .crystal(composition, PRESCRIPTION_K, Offsets::Table)
            .lattice_nm
    }

    fn gap_ev(&self, composition: &Composition) -> f64 {
        self.parameters
            .crystal(composition, PRESCRIPTION_K, Offsets::Table)
            .on(self.substrate_lattice_nm)
            .gap_ev()
    }

    /// All compositions of a strain.
    fn strain_line(&self, strain: f64) -> Result<Line, SolveError> {
        let corners = corners(*self.elements);
        let lattices_nm: Vec<f64> = corners
            .iter()
            .map(|corner| self.lattice_nm(corner))
            .collect();
        let least = lattices_nm.iter().copied().fold(f64::INFINITY, f64::min);
        let most = lattices_nm.iter().copied().fold(0.0, f64::max);
        let asked = self.substrate_lattice_nm / (1.0 + strain);
        let slack = LATTICE_TOLERANCE * asked;
        if asked < least - slack || asked > most + slack {
            return Err(SolveError::StrainOutOfReach {
                elements: self.elements.to_string(),
                asked: strain,
                most_compressive: self.substrate_lattice_nm / most - 1.0,
                most_tensile: self.substrate_lattice_nm / least - 1.0,
            });
        }
        let lattice_nm = asked.clamp(least, most);
        if self.elements.group_iii.iter().filter(|&&here| here).count() == 2 && corners.len() == 4 {
            Ok(curved(&corners, &lattices_nm, lattice_nm))
        } else {
            Ok(straight(&corners, &lattices_nm, lattice_nm))
        }
    }

    /// Every composition of a line with that gap, at least one.
    fn compositions_of_gap(
        &self,
        line: &Line,
        gap_nm: f64,
        strain: Option<f64>,
    ) -> Result<Vec<Composition>, SolveError> {
        let target_ev = photon_ev(gap_nm);
        let miss = |share: f64| self.gap_ev(&line.at(share)) - target_ev;
        let (roots, range) = roots(miss);
        let mut solutions: Vec<Composition> = Vec::new();
        for composition in roots.into_iter().map(|share| line.at(share)) {
            if !solutions.iter().any(|known| are_same(known, &composition)) {
                solutions.push(composition);
            }
        }
        if solutions.is_empty() {
            let wavelength = |miss_ev: f64| {
                let gap_ev = target_ev + miss_ev;
                (gap_ev > 0.0).then(|| wavelength_nm(gap_ev))
            };
            let elements = self.elements;
            return Err(SolveError::GapOutOfReach {
                line: strain.map_or_else(
                    || format!("{elements} on this substrate"),
                    |strain| format!("{elements} at {}", strain_words(strain)),
                ),
                asked_nm: gap_nm,
                shortest_nm: wavelength(range[1]),
                longest_nm: wavelength(range[0]),
            });
        }
        Ok(solutions)
    }
}

fn are_same(a: &Composition, b: &Composition) -> bool {
    distance(a, b) < SAME_FRACTION
}

/// Every zero of a function between 0 and 1, rising, and the least and greatest value it takes.
fn roots(miss: impl Fn(f64) -> f64) -> (Vec<f64>, [f64; 2]) {
    let share = |point: usize| point as f64 / SCAN as f64;
    let mut shares: Vec<f64> = (0..=SCAN).map(share).collect();
    let scanned: Vec<f64> = shares.iter().map(|&share| miss(share)).collect();
    // where the function turns, it may cross zero twice between two points: add the turning points
    for point in 0..=SCAN {
        let (left, right) = (point.saturating_sub(1), (point + 1).min(SCAN));
        for sign in [1.0, -1.0] {
            let value = sign * scanned[point];
            if value <= sign * scanned[left] && value <= sign * scanned[right] {
                shares.push(minimum(|at| sign * miss(at), share(left), share(right)));
            }
        }
    }
    shares.sort_by(f64::total_cmp);
    let values: Vec<f64> = shares.iter().map(|&share| miss(share)).collect();
    let mut roots = Vec::new();
    for (point, &value) in values.iter().enumerate() {
        if value.abs() < GAP_TOLERANCE_EV {
            roots.push(shares[point]);
        } else if point > 0
            && values[point - 1].abs() >= GAP_TOLERANCE_EV
            && (value > 0.0) != (values[point - 1] > 0.0)
        {
            roots.push(bracketed_root(
                &miss,
                shares[point - 1],
                shares[point],
                1e-14,
            ));
        }
    }
    let least = values.iter().copied().fold(f64::INFINITY, f64::min);
    let most = values.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    (roots, [least, most])
}

/// Place of the least value between two points, by golden sections.
fn minimum(function: impl Fn(f64) -> f64, mut left: f64, mut right: f64) -> f64 {
    let golden = 0.5 * (5f64.sqrt() - 1.0);
    for _ in 0..40 {
        let inner_left = right - golden * (right - left);
        let inner_right = left + golden * (right - left);
        if function(inner_left) <= function(inner_right) {
            right = inner_right;
        } else {
            left = inner_left;
        }
    }
    0.5 * (left + right)
}

/// An in-plane strain by its name.
fn strain_words(strain: f64) -> String {
    let percent = 100.0 * strain.abs();
    if strain.abs() < 1e-9 {
        "no strain".to_owned()
    } else if strain < 0.0 {
        format!("{percent:.3} % compressive")
    } else {
        format!("{percent:.3} % tensile")
    }
}

fn gap_range_words(shortest_nm: Option<f64>, longest_nm: Option<f64>) -> String {
    match (shortest_nm, longest_nm) {
        (Some(shortest), Some(longest)) => format!("from {shortest:.2} nm to {longest:.2} nm"),
        (Some(shortest), None) => format!("from {shortest:.2} nm upwards"),
        _ => "that are all closed".to_owned(),
    }
}

fn formulas(solutions: &[Composition]) -> String {
    let formulas: Vec<String> = solutions.iter().map(Composition::formula).collect();
    formulas.join(", ")
}
