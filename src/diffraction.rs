//! What an X-ray diffractometer sees of a stack: where substrate, layers and the satellites of a
//! multi-well reflect, and the rocking curve.
//!
//! All of it is for the symmetric reflections (00l) of a coherent stack on (001) with Cu Kα1, in an
//! ω–2θ scan: offsets are in ω, the angle between beam and surface, counted from the substrate's
//! peak; a detector that reads 2θ moves twice as far. A compressive layer has wider planes along
//! growth and reflects at a smaller angle, to the left of the substrate.
//!
//! # Equation
//!
//! ```text
//!  layer       sin θ = l λ/(2 a⊥) ,     a⊥ = a_s (1 + f⊥)
//!  multi-well  sin θ_n = λ (N + n)/(2 Λ) ,   N = Σ l t_j/a⊥_j planes in a period Λ = Σ t_j
//!  fringes     Δω = λ/(2 t cos θ)
//! ```
//!
//! The zero order n = 0 stands where a layer of the mean plane distance Λ/N would: it gives the
//! mean perpendicular mismatch, the satellites give the period.
//!
//! Refraction is left out: it moves all peaks together by some 3 arcsec, and by less than 1 arcsec
//! against each other.
//!
//! # References
//!
//! A. Segmüller, A. E. Blakeslee, J. Appl. Cryst. 6, 19 (1973); V. S. Speriosu, T. Vreeland, J. Appl.
//! Phys. 56, 1591 (1984); P. F. Fewster, Semicond. Sci. Technol. 8, 1915 (1993).

mod curve;
mod period;
mod scattering;

pub use curve::{CurvePoint, RESOLUTION_ARCSEC, RockingCurve};
pub use scattering::COPPER_K_ALPHA1_NM;

use crate::materials::{Composition, Crystal, Mismatch, Offsets, Parameters};
use crate::structure::{Material, Role, Stack, Substance};
use curve::Slice;
use nalgebra::Complex;
use std::f64::consts::PI;
use std::fmt;
use std::str::FromStr;

/// Scatters in place of a material whose atoms are not known.
const GALLIUM_ARSENIDE: Composition = Composition {
    group_iii: [0.0, 1.0, 0.0],
    group_v: [0.0, 1.0, 0.0],
};
/// Arcseconds in one radian.
const ARCSEC: f64 = 180.0 * 3600.0 / PI;
/// Satellites are listed to this order on either side.
const MOST_SATELLITES: i32 = 5;
/// A graded layer is cut into slices no thicker than this, nm.
const GRADE_SLICE_NM: f64 = 2.0;

/// A symmetric reflection (00l) of a zincblende crystal.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Reflection {
    order: u32,
}

impl Reflection {
    /// The reflection of every epitaxy order: strong for all III-V crystals.
    pub const DEFAULT: Self = Self { order: 4 };

    /// l.
    #[must_use]
    pub fn order(self) -> u32 {
        self.order
    }

    /// Bragg angle of planes `lattice_nm`/l apart, rad; `None` where the wavelength is too long.
    #[must_use]
    pub fn bragg_angle(self, lattice_nm: f64) -> Option<f64> {
        let sine = 0.5 * f64::from(self.order) * COPPER_K_ALPHA1_NM / lattice_nm;
        (sine < 1.0).then(|| sine.asin())
    }
}

impl Default for Reflection {
    fn default() -> Self {
        Self::DEFAULT
    }
}

impl fmt::Display for Reflection {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(formatter, "00{}", self.order)
    }
}

/// Why there is no diffraction to compute.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum NoReflection {
    /// The words are none of (00l) with even l.
    #[error("`{0}` is no reflection of a (001) wafer: 002, 004 and 006 are")]
    Unknown(String),
    /// Odd planes cancel.
    #[error("{0} is extinct: in a zincblende crystal only even (00l) reflect, 002, 004 and 006")]
    Extinct(Reflection),
    /// The planes stand too close.
    #[error(
        "{0} of {1} cannot be reached with Cu Kα1: its planes stand closer than half the wavelength"
    )]
    OutOfReach(Reflection, String),
}

impl FromStr for Reflection {
    type Err = NoReflection;

    fn from_str(word: &str) -> Result<Self, NoReflection> {
        let unknown = || NoReflection::Unknown(word.chars().take(20).collect());
        let plain = word.trim().trim_matches(['(', ')']);
        let digits = plain.strip_prefix("00").ok_or_else(unknown)?;
        let order: u32 = match digits.parse() {
            Ok(order @ 1..=20) if digits.bytes().all(|byte| byte.is_ascii_digit()) => order,
            _ => return Err(unknown()),
        };
        let reflection = Self { order };
        if order.is_multiple_of(2) {
            Ok(reflection)
        } else {
            Err(NoReflection::Extinct(reflection))
        }
    }
}

/// A peak.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Peak {
    /// Bragg angle θ, which is ω of the symmetric scan, degrees.
    pub theta_deg: f64,
    /// ω less that of the substrate, arcsec.
    pub offset_arcsec: f64,
}

impl Peak {
    /// The angle of the detector, degrees.
    #[must_use]
    pub fn two_theta_deg(&self) -> f64 {
        2.0 * self.theta_deg
    }
}

/// Where a layer by itself would reflect.
#[derive(Clone, Debug, PartialEq)]
pub struct LayerPeak {
    /// Index in the stack of the first such layer.
    pub layer: usize,
    /// How many equal ones there are.
    pub count: usize,
    /// Its role.
    pub role: Role,
    /// Formula of this end.
    pub formula: String,
    /// Whether this is the surface-side end of a graded layer.
    pub is_upper_end: bool,
    /// Thickness of one, nm.
    pub thickness_nm: f64,
    /// Mismatch to the substrate.
    pub mismatch: Mismatch,
    /// Its peak; `None` where the wavelength is too long.
    pub peak: Option<Peak>,
    /// Distance of its thickness fringes, arcsec of ω.
    pub fringe_arcsec: f64,
}

/// A satellite of the multi-well.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Satellite {
    /// n; 0 is the zero order.
    pub order: i32,
    /// Where it stands.
    pub peak: Peak,
    /// Intensity over that of the strongest one listed, by one period alone (kinematical).
    pub intensity: f64,
}

/// The repeated part of a multi-well.
#[derive(Clone, Debug, PartialEq)]
pub struct MultiWell {
    /// Thickness of one period, nm.
    pub period_nm: f64,
    /// Number of whole periods.
    pub periods: usize,
    /// Indices of the first layer of the first period, and of the last of the last.
    pub layers: (usize, usize),
    /// Mean mismatch over a period, as the zero order shows it.
    pub mean: Mismatch,
    /// Zero order and satellites, by rising angle.
    pub satellites: Vec<Satellite>,
    /// Distance of neighbouring satellites at the zero order, λ/(2 Λ cos θ), arcsec of ω.
    pub spacing_arcsec: f64,
    /// Distance of the fringes of all periods together, arcsec of ω.
    pub fringe_arcsec: f64,
}

impl MultiWell {
    /// The zero order.
    #[must_use]
    pub fn zero_order(&self) -> Option<&Satellite> {
        self.satellites.iter().find(|it| it.order == 0)
    }
}

/// What a diffractometer sees of a stack.
#[derive(Clone, Debug, PartialEq)]
pub struct Diffraction {
    /// The reflection.
    pub reflection: Reflection,
    /// Temperature of the lattice, K.
    pub temperature_k: f64,
    /// Lattice constant of the substrate, nm.
    pub substrate_lattice_nm: f64,
    /// Its peak.
    pub substrate: Peak,
    /// Every layer from the substrate up, equal ones once, a graded one at both ends.
    pub layers: Vec<LayerPeak>,
    /// Period and satellites, where wells repeat.
    pub multi_well: Option<MultiWell>,
    /// Distance of the fringes of the whole epitaxy, arcsec of ω.
    pub fringe_arcsec: f64,
    /// Materials of own numbers, whose atoms are not known: they scatter like GaAs in the curve.
    pub unknown_atoms: Vec<String>,
    slices: Vec<Slice>,
    substrate_slice: Slice,
}

/// What stays the same over a stack.
struct Setup<'a> {
    parameters: &'a Parameters,
    reflection: Reflection,
    temperature_k: f64,
    substrate_lattice_nm: f64,
}

impl Diffraction {
    /// What is seen of a stack.
    ///
    /// # Arguments
    ///
    /// * `temperature_k` – that of the wafer on the diffractometer, mostly room temperature
    ///   whatever the device works at
    ///
    /// # Errors
    ///
    /// [`NoReflection::OutOfReach`] where the substrate's planes stand too close.
    pub fn new(
        stack: &Stack,
        parameters: &Parameters,
        reflection: Reflection,
        temperature_k: f64,
    ) -> Result<Self, NoReflection> {
        let substrate =
            stack
                .substrate
                .substance
                .crystal(parameters, temperature_k, Offsets::Table);
        let setup = Setup {
            parameters,
            reflection,
            temperature_k,
            substrate_lattice_nm: substrate.lattice_nm,
        };
        let angle = reflection
            .bragg_angle(substrate.lattice_nm)
            .ok_or_else(|| NoReflection::OutOfReach(reflection, stack.substrate.formula()))?;
        let slices_of: Vec<Vec<Slice>> = stack
            .layers
            .iter()
            .map(|layer| setup.slices(layer.ends(), layer.thickness_nm))
            .collect();
        let multi_well =
            period::of(stack).and_then(|found| setup.multi_well(&found, &slices_of, angle));
        let thickness_nm = stack.layers.iter().map(|layer| layer.thickness_nm).sum();
        Ok(Self {
            reflection,
            temperature_k,
            substrate_lattice_nm: substrate.lattice_nm,
            substrate: Peak {
                theta_deg: angle.to_degrees(),
                offset_arcsec: 0.0,
            },
            layers: setup.layers(stack, angle),
            multi_well,
            fringe_arcsec: fringe_arcsec(thickness_nm, angle),
            unknown_atoms: unknown_atoms(stack),
            substrate_slice: setup.slice(&stack.substrate.substance, 0.0),
            slices: slices_of.into_iter().flatten().collect(),
        })
    }

    /// The rocking curve over all that is listed, with a margin.
    #[must_use]
    pub fn rocking_curve(&self) -> RockingCurve {
        let satellites = self.multi_well.iter().flat_map(|multi_well| {
            let strong = multi_well
                .satellites
                .iter()
                .filter(|it| it.order.abs() <= 3);
            strong.map(|it| it.peak.offset_arcsec)
        });
        let peaks = self
            .layers
            .iter()
            .filter_map(|layer| Some(layer.peak?.offset_arcsec));
        let (low, high) = satellites
            .chain(peaks)
            .fold((0.0, 0.0), |(low, high), at: f64| {
                (at.min(low), at.max(high))
            });
        curve::of(
            &self.substrate_slice,
            &self.slices,
            self.reflection,
            self.substrate.theta_deg.to_radians(),
            (low, high),
        )
    }
}

/// Distance of the fringes of a thickness, arcsec of ω.
fn fringe_arcsec(thickness_nm: f64, angle: f64) -> f64 {
    ARCSEC * COPPER_K_ALPHA1_NM / (2.0 * thickness_nm * angle.cos())
}

fn unknown_atoms(stack: &Stack) -> Vec<String> {
    let mut names: Vec<String> = Vec::new();
    let of_layers = stack.layers.iter().flat_map(crate::structure::Layer::ends);
    for material in std::iter::once(&stack.substrate).chain(of_layers) {
        if material.substance.composition().is_none() && !names.contains(&material.name) {
            names.push(material.name.clone());
        }
    }
    names
}

impl Setup<'_> {
    fn crystal(&self, substance: &Substance) -> Crystal {
        substance.crystal(self.parameters, self.temperature_k, Offsets::Table)
    }

    fn peak(&self, lattice_nm: f64, substrate_angle: f64) -> Option<Peak> {
        let angle = self.reflection.bragg_angle(lattice_nm)?;
        Some(Peak {
            theta_deg: angle.to_degrees(),
            offset_arcsec: ARCSEC * (angle - substrate_angle),
        })
    }

    fn layers(&self, stack: &Stack, substrate_angle: f64) -> Vec<LayerPeak> {
        let mut peaks: Vec<LayerPeak> = Vec::new();
        for (index, layer) in stack.layers.iter().enumerate() {
            let equal = |known: &LayerPeak| {
                known.role == layer.role && period::are_equal(&stack.layers[known.layer], layer)
            };
            if peaks.iter().any(equal) {
                peaks
                    .iter_mut()
                    .filter(|known| equal(known))
                    .for_each(|known| known.count += 1);
                continue;
            }
            let ends = layer.ends();
            let ends = if layer.grade_to.is_some() {
                &ends[..]
            } else {
                &ends[..1]
            };
            for (place, material) in ends.iter().enumerate() {
                let crystal = self.crystal(&material.substance);
                let mismatch = Mismatch::of(&crystal, self.substrate_lattice_nm);
                let lattice_nm = crystal.perpendicular_lattice_nm(self.substrate_lattice_nm);
                peaks.push(LayerPeak {
                    layer: index,
                    count: 1,
                    role: layer.role,
                    formula: material.formula(),
                    is_upper_end: place == 1,
                    thickness_nm: layer.thickness_nm,
                    mismatch,
                    peak: self.peak(lattice_nm, substrate_angle),
                    fringe_arcsec: fringe_arcsec(layer.thickness_nm, substrate_angle),
                });
            }
        }
        peaks
    }

    fn slice(&self, substance: &Substance, thickness_nm: f64) -> Slice {
        self.scattering(
            &self.crystal(substance),
            substance.composition(),
            thickness_nm,
        )
    }

    fn scattering(
        &self,
        crystal: &Crystal,
        composition: Option<&Composition>,
        thickness_nm: f64,
    ) -> Slice {
        let lattice_nm = crystal.perpendicular_lattice_nm(self.substrate_lattice_nm);
        let composition = composition.copied().unwrap_or(GALLIUM_ARSENIDE);
        let factor = scattering::structure_factor(&composition, self.reflection, lattice_nm);
        // Where the planes stand too close for the wavelength there is no peak to be near.
        let sine = self
            .reflection
            .bragg_angle(lattice_nm)
            .map_or(1.0, f64::sin);
        let cell_nm3 = self.substrate_lattice_nm * self.substrate_lattice_nm * lattice_nm;
        let per_electron = scattering::ELECTRON_RADIUS_NM * COPPER_K_ALPHA1_NM / (cell_nm3 * sine);
        Slice {
            thickness_nm,
            lattice_nm,
            stiffness_gpa: [crystal.c11_gpa, crystal.c12_gpa],
            reflectivity_per_nm: factor.reflected * per_electron,
            absorption_per_nm: 2.0 * per_electron * factor.absorbed,
        }
    }

    /// A layer in slices of one composition each.
    fn slices(&self, [lower, upper]: [&Material; 2], thickness_nm: f64) -> Vec<Slice> {
        let ends = (lower.substance.composition(), upper.substance.composition());
        let (Some(from), Some(to), false) = (ends.0, ends.1, lower.substance == upper.substance)
        else {
            return vec![self.slice(&lower.substance, thickness_nm)];
        };
        let count = (thickness_nm / GRADE_SLICE_NM).ceil().clamp(1.0, 500.0) as usize;
        (0..count)
            .map(|index| {
                let share = (index as f64 + 0.5) / count as f64;
                let composition = from.towards(to, share);
                let crystal = self.crystal(&Substance::Alloy(composition));
                self.scattering(&crystal, Some(&composition), thickness_nm / count as f64)
            })
            .collect()
    }

    fn multi_well(
        &self,
        found: &period::Period,
        slices_of: &[Vec<Slice>],
        substrate_angle: f64,
    ) -> Option<MultiWell> {
        let slices: Vec<Slice> = slices_of[found.first..found.first + found.layers]
            .iter()
            .flatten()
            .copied()
            .collect();
        let period_nm: f64 = slices.iter().map(|slice| slice.thickness_nm).sum();
        let order = f64::from(self.reflection.order());
        let planes: f64 = slices
            .iter()
            .map(|slice| order * slice.thickness_nm / slice.lattice_nm)
            .sum();
        let mean_lattice_nm = order * period_nm / planes;
        let [c11_gpa, c12_gpa] = [0, 1].map(|place| {
            let sum: f64 = slices
                .iter()
                .map(|it| it.stiffness_gpa[place] * it.thickness_nm)
                .sum();
            sum / period_nm
        });
        let perpendicular = mean_lattice_nm / self.substrate_lattice_nm - 1.0;
        let zero_angle = self.reflection.bragg_angle(mean_lattice_nm)?;
        let mut satellites: Vec<Satellite> = (-MOST_SATELLITES..=MOST_SATELLITES)
            .filter_map(|order| {
                let sine = COPPER_K_ALPHA1_NM * (planes + f64::from(order)) / (2.0 * period_nm);
                let angle = (sine > 0.0 && sine < 1.0).then(|| sine.asin())?;
                Some(Satellite {
                    order,
                    peak: Peak {
                        theta_deg: angle.to_degrees(),
                        offset_arcsec: ARCSEC * (angle - substrate_angle),
                    },
                    intensity: amplitude(&slices, self.reflection, sine).norm_sqr(),
                })
            })
            .collect();
        let strongest = satellites.iter().map(|it| it.intensity).fold(0.0, f64::max);
        for satellite in &mut satellites {
            satellite.intensity /= strongest;
        }
        Some(MultiWell {
            period_nm,
            periods: found.count,
            layers: (found.first, found.first + found.layers * found.count - 1),
            mean: Mismatch::from_perpendicular(perpendicular, c12_gpa / c11_gpa),
            satellites,
            spacing_arcsec: fringe_arcsec(period_nm, zero_angle),
            fringe_arcsec: fringe_arcsec(period_nm * found.count as f64, zero_angle),
        })
    }
}

/// Amplitude that slices scatter at sin θ without weakening the beam.
fn amplitude(slices: &[Slice], reflection: Reflection, sine: f64) -> Complex<f64> {
    let mut reflected = Complex::new(0.0, 0.0);
    for slice in slices {
        reflected = slice.kinematical(reflected, reflection, sine);
    }
    reflected
}
