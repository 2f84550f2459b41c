//! The validated stack: what the file said, checked, expanded, in the trade's units.

use super::{Growth, Limits, Order};
use crate::materials::{Composition, Crystal, Offsets, Parameters};

/// What a layer is made of.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Substance {
    /// An alloy by composition: its numbers come from the parameter data at any temperature.
    Alloy(Composition),
    /// A material by its own numbers, the same at every temperature.
    Own {
        /// Its numbers (gaps to X and L infinite).
        crystal: Crystal,
        /// Its refractive index, where the file gives one.
        index: Option<f64>,
    },
}

impl Substance {
    /// Its numbers at a temperature; own numbers hold at every temperature and under every rule.
    #[must_use]
    pub fn crystal(
        &self,
        parameters: &Parameters,
        temperature_k: f64,
        offsets: Offsets,
    ) -> Crystal {
        match self {
            Self::Alloy(composition) => parameters.crystal(composition, temperature_k, offsets),
            Self::Own { crystal, .. } => *crystal,
        }
    }

    /// Its composition, where it has one.
    #[must_use]
    pub fn composition(&self) -> Option<&Composition> {
        match self {
            Self::Alloy(composition) => Some(composition),
            Self::Own { .. } => None,
        }
    }
}

/// A substance under the name that the file gives it.
#[derive(Clone, Debug, PartialEq)]
pub struct Material {
    /// The key of `[materials.*]`, or the formula as written.
    pub name: String,
    /// What it is.
    pub substance: Substance,
}

impl Material {
    /// The formula of an alloy (`Al0.35Ga0.13In0.52As`), or the name of a material of own numbers.
    #[must_use]
    pub fn formula(&self) -> String {
        match &self.substance {
            Substance::Alloy(composition) => composition.formula(),
            Substance::Own { .. } => self.name.clone(),
        }
    }
}

/// The part that a layer plays.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Role {
    /// Starts the epitaxy on the substrate.
    Buffer,
    /// Holds the light in, and carries current.
    Cladding,
    /// Between cladding and wells: guides the light, holds the carriers near.
    Confinement,
    /// Between and next to the wells.
    Barrier,
    /// Where carriers are meant to be.
    Well,
    /// Next to a well and part of its potential, but not of its thickness.
    Step,
    /// Keeps dopants or interfaces apart.
    Spacer,
    /// Keeps electrons (or an etch) from going further.
    Stop,
    /// Carries the metal.
    Contact,
    /// Protects the surface; often removed.
    Cap,
}

impl Role {
    /// Every role, in the order of this list.
    pub const ALL: [Self; 10] = [
        Self::Buffer,
        Self::Cladding,
        Self::Confinement,
        Self::Barrier,
        Self::Well,
        Self::Step,
        Self::Spacer,
        Self::Stop,
        Self::Contact,
        Self::Cap,
    ];

    /// The word for it in files and reports.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Buffer => "buffer",
            Self::Cladding => "cladding",
            Self::Confinement => "confinement",
            Self::Barrier => "barrier",
            Self::Well => "well",
            Self::Step => "step",
            Self::Spacer => "spacer",
            Self::Stop => "stop",
            Self::Contact => "contact",
            Self::Cap => "cap",
        }
    }

    /// The part it plays, in a few words.
    #[must_use]
    pub fn meaning(self) -> &'static str {
        match self {
            Self::Buffer => "starts the epitaxy on the substrate",
            Self::Cladding => "holds the light in, and carries current",
            Self::Confinement => {
                "between cladding and wells: guides the light, holds the carriers near"
            }
            Self::Barrier => "between the wells and next to them",
            Self::Well => "where carriers are meant to be; densities are per volume of the wells",
            Self::Step => "next to a well: part of its potential, not of its thickness",
            Self::Spacer => "keeps dopants or interfaces apart",
            Self::Stop => "keeps electrons, or an etch, from going further",
            Self::Contact => "carries the metal",
            Self::Cap => "protects the surface; often removed",
        }
    }
}

/// Dopants of one layer.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Doping {
    /// Density of donors, cm⁻³.
    pub donors_cm3: f64,
    /// Density of acceptors, cm⁻³.
    pub acceptors_cm3: f64,
    /// The element, where the file names it.
    pub dopant: Option<String>,
}

/// One layer of the expanded stack.
#[derive(Clone, Debug, PartialEq)]
pub struct Layer {
    /// The part it plays.
    pub role: Role,
    /// Its material; of a graded layer the one at the substrate-side end.
    pub material: Material,
    /// Of a graded layer the material at the surface-side end: the composition runs straight.
    pub grade_to: Option<Material>,
    /// Thickness, nm.
    pub thickness_nm: f64,
    /// Dopants.
    pub doping: Doping,
    /// Number of the row of the file (from 1, groups counted as one row each) it came from.
    pub row: usize,
}

impl Layer {
    /// The materials at its substrate-side and its surface-side end: the same where it is uniform.
    #[must_use]
    pub fn ends(&self) -> [&Material; 2] {
        [
            &self.material,
            self.grade_to.as_ref().unwrap_or(&self.material),
        ]
    }
}

/// Temperature and densities.
#[derive(Clone, Debug, PartialEq)]
pub struct Operation {
    /// Lattice and carrier temperature, K.
    pub temperature_k: f64,
    /// Whether the file (or the command line) gave it; else it is the default of 300 K.
    pub temperature_given: bool,
    /// Densities per volume of the wells, cm⁻³, rising.
    pub densities_cm3: Vec<f64>,
    /// The working density, cm⁻³.
    pub working_density_cm3: f64,
}

/// How the valence bands are treated.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Bands {
    /// One band at a time: heavy and light holes as parabolas.
    Single,
    /// Heavy, light and split-off holes mixed.
    Mixed,
}

impl Bands {
    /// The word for it in files and reports.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Single => "single",
            Self::Mixed => "mixed",
        }
    }
}

/// The shape of the homogeneous line.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Lineshape {
    /// Hyperbolic secant: short tails.
    Sech,
    /// Gaussian: the shortest tails.
    Gaussian,
    /// Lorentzian: long tails, for comparison.
    Lorentzian,
}

impl Lineshape {
    /// Every shape.
    pub const ALL: [Self; 3] = [Self::Sech, Self::Gaussian, Self::Lorentzian];

    /// The word for it in files and reports.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Sech => "sech",
            Self::Gaussian => "gaussian",
            Self::Lorentzian => "lorentzian",
        }
    }
}

/// The switches of the model.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Model {
    /// Treatment of the valence bands.
    pub bands: Bands,
    /// Whether the electron mass depends on energy.
    pub nonparabolic: bool,
    /// Shape of the line.
    pub lineshape: Lineshape,
    /// Intraband relaxation time τ, fs; the half width is ħ/τ.
    pub intraband_fs: f64,
    /// Gap shrinkage at 1e18 cm⁻³, meV.
    pub shrinkage_mev: f64,
    /// Share of the gap difference that falls to the conduction band, where the file fixes it.
    pub conduction_share: Option<f64>,
    /// Field along growth, kV/cm: the electron's potential energy rises towards the surface.
    pub field_kv_cm: f64,
    /// Refractive index of the wells, where the file fixes it.
    pub index: Option<f64>,
}

impl Default for Model {
    fn default() -> Self {
        Self {
            bands: Bands::Mixed,
            nonparabolic: true,
            lineshape: Lineshape::Sech,
            intraband_fs: 100.0,
            shrinkage_mev: 32.0,
            conduction_share: None,
            field_kv_cm: 0.0,
            index: None,
        }
    }
}

/// Which wavelength of a structure is meant.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Wavelength {
    /// Of the first transition, without gap shrinkage.
    Transition,
    /// Of the peak of photoluminescence at low injection.
    Photoluminescence,
    /// Of peak gain at a carrier density, with gap shrinkage.
    Gain,
}

impl Wavelength {
    /// Every kind.
    pub const ALL: [Self; 3] = [Self::Transition, Self::Photoluminescence, Self::Gain];

    /// The word for it in files and reports.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Transition => "transition",
            Self::Photoluminescence => "pl",
            Self::Gain => "gain",
        }
    }

    /// What it is, in a few words.
    #[must_use]
    pub fn meaning(self) -> &'static str {
        match self {
            Self::Transition => "first transition",
            Self::Photoluminescence => "photoluminescence peak",
            Self::Gain => "gain peak",
        }
    }
}

/// What a wavelength is measured in.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Medium {
    /// Vacuum.
    #[default]
    Vacuum,
    /// Standard air.
    Air,
}

impl Medium {
    /// Both.
    pub const ALL: [Self; 2] = [Self::Vacuum, Self::Air];

    /// The word for it in files and reports.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Vacuum => "vacuum",
            Self::Air => "air",
        }
    }
}

/// The wavelength that a structure is meant to have.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Target {
    /// Which wavelength.
    pub kind: Wavelength,
    /// How long, nm in its medium.
    pub wavelength_nm: f64,
    /// The medium.
    pub medium: Medium,
    /// Temperature at which it is meant, K; `None` for that of the operation.
    pub temperature_k: Option<f64>,
    /// Carrier density of peak gain, cm⁻³; `None` for the working density.
    pub density_cm3: Option<f64>,
    /// How far off is still accepted, nm to either side.
    pub tolerance_nm: Option<f64>,
}

/// A structure that has passed every check of its file.
#[derive(Clone, Debug, PartialEq)]
pub struct Stack {
    /// What the file calls it.
    pub title: String,
    /// The substrate, (001).
    pub substrate: Material,
    /// Every layer, groups written out, from the substrate up.
    pub layers: Vec<Layer>,
    /// Temperature and densities.
    pub operation: Operation,
    /// Switches of the model.
    pub model: Model,
    /// The wavelength that it is meant to have, where the file says one.
    pub target: Option<Target>,
    /// Errors of growth, where the file states them.
    pub growth: Option<Growth>,
    /// Limits of the house, where the file gives any.
    pub limits: Option<Limits>,
    /// What an order says beside the layers, where the file says anything.
    pub order: Option<Order>,
}

impl Stack {
    /// Total thickness of the layers whose role is `well`, nm.
    #[must_use]
    pub fn well_thickness_nm(&self) -> f64 {
        self.wells().map(|layer| layer.thickness_nm).sum()
    }

    /// Number of wells.
    #[must_use]
    pub fn well_count(&self) -> usize {
        self.wells().count()
    }

    /// The wells, from the substrate up.
    pub fn wells(&self) -> impl Iterator<Item = &Layer> {
        self.layers.iter().filter(|layer| layer.role == Role::Well)
    }
}
