//! The strain budget of a stack: what every layer, and wells and barriers together, use up of what
//! coherent growth allows.
//!
//! A layer is held against the critical thickness by force balance, that of a single layer with a
//! free surface and that of a layer grown over, and against the far more generous one by energy
//! balance: a band between which practice lies. Wells and barriers together are held against the
//! same band as one film of their mean lattice constant. The balance says which barrier would take
//! the mean in-plane stress away.

use super::{CriticalThickness, Film, Setting, plane_stiffness_gpa, stress_free_lattice_nm};
use crate::materials::{Crystal, Mismatch, Offsets, Parameters};
use crate::structure::{Layer, Role, Stack};

/// Critical thicknesses of one film, the most careful first.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CriticalBand {
    /// Force balance of a single layer with a free surface.
    pub overlayer: CriticalThickness,
    /// Force balance of a layer that is grown over.
    pub buried: CriticalThickness,
    /// Energy balance: beyond it no theory knows a coherent film.
    pub energy_balance: CriticalThickness,
}

impl CriticalBand {
    fn of(film: &Film) -> Self {
        Self {
            overlayer: film.force_balance(Setting::Overlayer),
            buried: film.force_balance(Setting::Buried),
            energy_balance: film.energy_balance(),
        }
    }

    /// The force-balance limit of a film that is grown over, or is not.
    #[must_use]
    pub fn limit(&self, is_buried: bool) -> CriticalThickness {
        if is_buried {
            self.buried
        } else {
            self.overlayer
        }
    }
}

/// One layer's part of the budget; equal layers are counted together.
#[derive(Clone, Debug, PartialEq)]
pub struct LayerStrain {
    /// Index in the stack of the first such layer.
    pub layer: usize,
    /// How many there are.
    pub count: usize,
    /// Its role.
    pub role: Role,
    /// Its formula; of a graded layer that of the more strained end, whose numbers follow.
    pub formula: String,
    /// Thickness of one, nm.
    pub thickness_nm: f64,
    /// Mismatch to the substrate.
    pub mismatch: Mismatch,
    /// Whether something grows over it.
    pub is_buried: bool,
    /// How thick it may be.
    pub critical: CriticalBand,
}

impl LayerStrain {
    /// Strain times thickness of one layer, % nm.
    #[must_use]
    pub fn strain_thickness_percent_nm(&self) -> f64 {
        self.mismatch.strain_percent() * self.thickness_nm
    }

    /// Thickness over that of the force balance; infinite where no thickness is coherent.
    #[must_use]
    pub fn critical_share(&self) -> f64 {
        share(self.thickness_nm, self.critical.limit(self.is_buried))
    }
}

/// Wells, steps and barriers together.
#[derive(Clone, Debug, PartialEq)]
pub struct ActiveStrain {
    /// Indices of the first and the last layer.
    pub layers: (usize, usize),
    /// Thickness, nm.
    pub thickness_nm: f64,
    /// Mismatch of the film of mean in-plane stress zero.
    pub mean: Mismatch,
    /// Sum of in-plane stress times thickness, N/m, positive where the film pushes outward
    /// (compressive).
    pub force_n_m: f64,
    /// How thick a film of the mean lattice constant may be.
    pub critical: CriticalBand,
    /// Whether something grows over it.
    pub is_buried: bool,
}

impl ActiveStrain {
    /// Mean strain times thickness, % nm.
    #[must_use]
    pub fn strain_thickness_percent_nm(&self) -> f64 {
        self.mean.strain_percent() * self.thickness_nm
    }

    /// Thickness over that of the force balance; infinite where no thickness is coherent.
    #[must_use]
    pub fn critical_share(&self) -> f64 {
        share(self.thickness_nm, self.critical.limit(self.is_buried))
    }
}

/// The barrier that takes the mean in-plane stress away.
#[derive(Clone, Debug, PartialEq)]
pub struct Balance {
    /// The barrier material that is to balance, the one with the most thickness.
    pub formula: String,
    /// Its thickness as it is, all such barriers together, nm.
    pub thickness_nm: f64,
    /// Number of such barriers.
    pub count: usize,
    /// Mismatch that these barriers must have at their thickness, their stiffness kept; `None`
    /// where no lattice constant would do.
    pub mismatch: Option<Mismatch>,
    /// Factor by which their thickness must grow at the strain that they have; `None` where they
    /// are not strained against the rest.
    pub thickness_factor: Option<f64>,
}

impl Balance {
    /// The factor where anybody would grow it; barriers that had to be more than ten times as thick
    /// have no strain to speak of.
    #[must_use]
    pub fn practicable_factor(&self) -> Option<f64> {
        const MOST: f64 = 10.0;
        self.thickness_factor.filter(|factor| *factor <= MOST)
    }
}

/// The strain budget of a stack.
#[derive(Clone, Debug, PartialEq)]
pub struct StrainBudget {
    /// Lattice constant of the substrate, nm.
    pub substrate_lattice_nm: f64,
    /// Every layer from the substrate up, equal ones once.
    pub layers: Vec<LayerStrain>,
    /// Wells and barriers together; `None` without a well.
    pub active: Option<ActiveStrain>,
    /// What would balance them; `None` without a barrier.
    pub balance: Option<Balance>,
}

/// One crystal of a stack with the thickness that it stands for, nm.
type Share = (Crystal, f64);

impl StrainBudget {
    /// The well that uses most of its critical thickness.
    #[must_use]
    pub fn tightest_well(&self) -> Option<&LayerStrain> {
        let wells = self.layers.iter().filter(|layer| layer.role == Role::Well);
        wells.max_by(|a, b| a.critical_share().total_cmp(&b.critical_share()))
    }

    /// The budget of a stack at its working temperature.
    #[must_use]
    pub fn new(stack: &Stack, parameters: &Parameters) -> Self {
        let kelvin = stack.operation.temperature_k;
        // Lattice and stiffness hang on no offset rule.
        let crystal = |substance: &crate::structure::Substance| {
            substance.crystal(parameters, kelvin, Offsets::Table)
        };
        let substrate_lattice_nm = crystal(&stack.substrate.substance).lattice_nm;
        let ends = |layer: &Layer| layer.ends().map(|material| crystal(&material.substance));
        let mut layers: Vec<LayerStrain> = Vec::new();
        for (index, layer) in stack.layers.iter().enumerate() {
            let is_buried = index + 1 < stack.layers.len();
            let equal = |known: &LayerStrain| {
                let first = &stack.layers[known.layer];
                known.is_buried == is_buried
                    && first.role == layer.role
                    && first.thickness_nm == layer.thickness_nm
                    && are_alike(first, layer)
            };
            if let Some(known) = layers.iter_mut().find(|known| equal(known)) {
                known.count += 1;
            } else {
                let ends = ends(layer);
                layers.push(of_layer(
                    layer,
                    index,
                    ends,
                    substrate_lattice_nm,
                    is_buried,
                ));
            }
        }
        let span = active_layers(stack);
        let shares = |range: std::ops::RangeInclusive<usize>| -> Vec<Share> {
            stack.layers[range]
                .iter()
                .flat_map(|layer| ends(layer).map(|crystal| (crystal, 0.5 * layer.thickness_nm)))
                .collect()
        };
        let active = span.and_then(|(first, last)| {
            let is_buried = last + 1 < stack.layers.len();
            active(
                (first, last),
                &shares(first..=last),
                substrate_lattice_nm,
                is_buried,
            )
        });
        let balance = span.and_then(|(first, last)| {
            balance(&stack.layers[first..=last], &ends, substrate_lattice_nm)
        });
        Self {
            substrate_lattice_nm,
            layers,
            active,
            balance,
        }
    }
}

/// Whether two layers are made of the same, a grade up counting as one down.
fn are_alike(one: &Layer, other: &Layer) -> bool {
    let substances = |layer: &Layer| layer.ends().map(|material| material.substance);
    let [lower, upper] = substances(other);
    substances(one) == [lower, upper] || substances(one) == [upper, lower]
}

fn share(thickness_nm: f64, limit: CriticalThickness) -> f64 {
    match limit {
        CriticalThickness::Unlimited => 0.0,
        CriticalThickness::UpTo { thickness_nm: most } => thickness_nm / most,
        CriticalThickness::NoneCoherent => f64::INFINITY,
    }
}

fn of_layer(
    layer: &Layer,
    index: usize,
    ends: [Crystal; 2],
    substrate_lattice_nm: f64,
    is_buried: bool,
) -> LayerStrain {
    let [lower, upper] = ends.map(|crystal| Mismatch::of(&crystal, substrate_lattice_nm));
    let worse = usize::from(upper.relaxed.abs() > lower.relaxed.abs());
    LayerStrain {
        layer: index,
        count: 1,
        role: layer.role,
        formula: layer.ends()[worse].formula(),
        thickness_nm: layer.thickness_nm,
        mismatch: [lower, upper][worse],
        is_buried,
        critical: CriticalBand::of(&Film::new(&ends[worse], substrate_lattice_nm)),
    }
}

/// The outermost wells with the barriers and steps that stand next to them, and all between.
fn active_layers(stack: &Stack) -> Option<(usize, usize)> {
    let is_well = |layer: &Layer| layer.role == Role::Well;
    let belongs = |layer: &Layer| matches!(layer.role, Role::Barrier | Role::Step);
    let first = stack.layers.iter().position(is_well)?;
    let last = stack.layers.iter().rposition(is_well)?;
    let below = stack.layers[..first]
        .iter()
        .rev()
        .take_while(|it| belongs(it))
        .count();
    let above = stack.layers[last + 1..]
        .iter()
        .take_while(|it| belongs(it))
        .count();
    Some((first - below, last + above))
}

fn active(
    layers: (usize, usize),
    shares: &[Share],
    substrate_lattice_nm: f64,
    is_buried: bool,
) -> Option<ActiveStrain> {
    let lattice_nm = stress_free_lattice_nm(shares)?;
    let thickness_nm: f64 = shares.iter().map(|(_, thickness_nm)| thickness_nm).sum();
    let mean = |of: fn(&Crystal) -> f64| {
        shares
            .iter()
            .map(|(crystal, nm)| of(crystal) * nm)
            .sum::<f64>()
            / thickness_nm
    };
    // Of the mean film only these three count.
    let film = Crystal {
        lattice_nm,
        c11_gpa: mean(|crystal| crystal.c11_gpa),
        c12_gpa: mean(|crystal| crystal.c12_gpa),
        ..shares.first()?.0
    };
    Some(ActiveStrain {
        layers,
        thickness_nm,
        mean: Mismatch::of(&film, substrate_lattice_nm),
        force_n_m: shares
            .iter()
            .map(|share| -force_n_m(share, substrate_lattice_nm))
            .sum(),
        critical: CriticalBand::of(&Film::new(&film, substrate_lattice_nm)),
        is_buried,
    })
}

/// In-plane stress times thickness, N/m (GPa nm), positive where the film is tensile.
fn force_n_m((crystal, thickness_nm): &Share, substrate_lattice_nm: f64) -> f64 {
    let strain = (substrate_lattice_nm - crystal.lattice_nm) / crystal.lattice_nm;
    plane_stiffness_gpa(crystal) * strain * thickness_nm
}

/// Stress times thickness as it enters the balance at the substrate's in-plane constant.
fn pull((crystal, thickness_nm): &Share, substrate_lattice_nm: f64) -> f64 {
    super::weight(crystal) * (substrate_lattice_nm - crystal.lattice_nm) * thickness_nm
}

fn balance(
    layers: &[Layer],
    ends: &impl Fn(&Layer) -> [Crystal; 2],
    substrate_lattice_nm: f64,
) -> Option<Balance> {
    let barriers = || {
        layers
            .iter()
            .filter(|layer| layer.role == Role::Barrier && layer.grade_to.is_none())
    };
    let same = |a: &Layer, b: &Layer| a.material.substance == b.material.substance;
    let together = |of: &Layer| -> f64 {
        barriers()
            .filter(|it| same(it, of))
            .map(|it| it.thickness_nm)
            .sum()
    };
    // Of equal totals the first from the substrate.
    let barrier = barriers().fold(None, |best: Option<&Layer>, layer| match best {
        Some(known) if together(known) >= together(layer) => Some(known),
        _ => Some(layer),
    })?;
    let is_partner = |layer: &&Layer| {
        layer.role == Role::Barrier && layer.grade_to.is_none() && same(layer, barrier)
    };
    let rest: f64 = layers
        .iter()
        .filter(|layer| !is_partner(layer))
        .flat_map(|layer| ends(layer).map(|crystal| (crystal, 0.5 * layer.thickness_nm)))
        .map(|share| pull(&share, substrate_lattice_nm))
        .sum();
    let thickness_nm = together(barrier);
    let [crystal, _] = ends(barrier);
    let own = pull(&(crystal, thickness_nm), substrate_lattice_nm);
    // A (a_s − a)/a² t = −rest is quadratic in a.
    let slope = -rest / (plane_stiffness_gpa(&crystal) * thickness_nm);
    let root = 1.0 + 4.0 * slope * substrate_lattice_nm;
    let mismatch = (root > 0.0).then(|| {
        // The root that is a_s where nothing is to be balanced, free of cancellation.
        let lattice_nm = 2.0 * substrate_lattice_nm / (1.0 + root.sqrt());
        Mismatch::of(
            &Crystal {
                lattice_nm,
                ..crystal
            },
            substrate_lattice_nm,
        )
    });
    Some(Balance {
        formula: barrier.material.formula(),
        thickness_nm,
        count: layers.iter().filter(is_partner).count(),
        mismatch,
        thickness_factor: (own * rest < 0.0).then(|| -rest / own),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::structure::{Overrides, read};

    fn budget(text: &str) -> StrainBudget {
        let parameters = Parameters::shipped();
        let reading = read(text, &parameters, &Overrides::default()).expect("a sound file");
        StrainBudget::new(&reading.stack, &parameters)
    }

    fn file(wells: usize, barrier: &str, barrier_nm: f64) -> String {
        format!(
            "format = 1\n[substrate]\nmaterial = \"GaAs\"\n\
             [[layers]]\nrole = \"confinement\"\nmaterial = \"GaAs\"\nthickness_nm = 50\n\
             [[layers]]\nrole = \"barrier\"\nmaterial = \"{barrier}\"\nthickness_nm = {barrier_nm}\n\
             [[layers]]\nrepeat = {wells}\nlayers = [\n\
             {{ role = \"well\", material = \"In0.2Ga0.8As\", thickness_nm = 8 }},\n\
             {{ role = \"barrier\", material = \"{barrier}\", thickness_nm = {barrier_nm} }},\n]\n\
             [[layers]]\nrole = \"confinement\"\nmaterial = \"GaAs\"\nthickness_nm = 50\n"
        )
    }

    #[test]
    fn equal_layers_are_counted_once_and_the_topmost_is_not_grown_over() {
        let budget = budget(&file(3, "GaAs0.8P0.2", 10.0));
        let counts: Vec<(Role, usize, bool)> = budget
            .layers
            .iter()
            .map(|layer| (layer.role, layer.count, layer.is_buried))
            .collect();
        assert_eq!(
            counts,
            [
                (Role::Confinement, 1, true),
                (Role::Barrier, 4, true),
                (Role::Well, 3, true),
                (Role::Confinement, 1, false),
            ]
        );
    }

    /// The advice, followed, leaves nothing to balance: once by strain, once by thickness.
    #[test]
    fn the_balance_balances() {
        let before = budget(&file(3, "GaAs0.8P0.2", 10.0));
        let advice = before.balance.expect("barriers");
        assert_eq!(advice.count, 4);
        let factor = advice.thickness_factor.expect("tensile barriers");
        let thicker = budget(&file(3, "GaAs0.8P0.2", 10.0 * factor));
        let active = thicker.active.expect("wells");
        assert!(active.mean.relaxed.abs() < 1e-12, "{}", active.mean.relaxed);
        // GaAsP of that lattice constant (Vegard from GaAs to GaP); its stiffness differs a little
        // from that of the barrier it replaces.
        let wanted = advice.mismatch.expect("a lattice constant").relaxed;
        let gap = budget(&file(1, "GaP", 1.0)).layers[1].mismatch.relaxed;
        let other = budget(&file(
            3,
            &format!("GaAs{}P{}", 1.0 - wanted / gap, wanted / gap),
            10.0,
        ));
        let left = other.active.expect("wells").mean.relaxed;
        let was = before.active.expect("wells").mean.relaxed;
        assert!((left / was).abs() < 0.05, "{left} of {was}");
    }

    #[test]
    fn barriers_that_are_not_strained_cannot_balance_by_thickness() {
        let balance = budget(&file(2, "GaAs", 10.0)).balance.expect("barriers");
        assert_eq!(balance.thickness_factor, None);
        let wanted = balance.mismatch.expect("a lattice constant");
        assert!(wanted.relaxed < 0.0, "tensile against compressive wells");
    }

    /// One well between matched barriers: force and mean strain are the well's.
    #[test]
    fn the_mean_is_diluted_by_matched_barriers() {
        let budget = budget(&file(1, "GaAs", 12.0));
        let well = budget
            .layers
            .iter()
            .find(|it| it.role == Role::Well)
            .expect("a well");
        let active = budget.active.expect("a well");
        assert!((active.thickness_nm - 32.0).abs() < 1e-12);
        let diluted = well.mismatch.relaxed * 8.0 / 32.0;
        // InGaAs is softer than GaAs and has a little less than its share.
        let share = active.mean.relaxed / diluted;
        assert!((0.9..1.0).contains(&share), "{share}");
        assert!(active.force_n_m > 0.0);
    }
}
