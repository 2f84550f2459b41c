//! Structures, posed as the file that a user would write and answered by the evaluation.

use crate::judgement::Check;
use crate::{Answer, Problem};
use serde::Deserialize;
use std::cell::OnceCell;
use std::collections::BTreeMap;
use std::f64::consts::PI;
use std::fmt::Write as _;
use stepwell::evaluation::Evaluation;
use stepwell::materials::Parameters;
use stepwell::structure::{self, Overrides};
use stepwell::subbands::Level;
use stepwell::units::HBAR2_OVER_2M0_EV_NM2;

/// A structure: its layers from the substrate up, materials by formula or by own numbers.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct StackProblem {
    name: String,
    /// A formula; without one every material is of own numbers, on the lattice of the first.
    substrate: Option<String>,
    /// Layers (role, material, thickness in nm).
    layers: Vec<(String, String, f64)>,
    /// How often all layers but the first and the last are grown.
    #[serde(default = "once")]
    repeat: usize,
    /// Materials by own numbers.
    #[serde(default)]
    own: BTreeMap<String, Own>,
    /// Materials in the words of the file (`alloy` with `gap_nm`, a strain).
    #[serde(default)]
    materials: toml::Table,
    #[serde(default)]
    operation: toml::Table,
    #[serde(default)]
    model: toml::Table,
    check: Vec<Check>,
    #[serde(skip)]
    solved: OnceCell<Result<Evaluation<'static>, String>>,
}

fn once() -> usize {
    1
}

/// The numbers that a problem of quantum wells states. What it does not state is given values that
/// do not matter to it.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Own {
    conduction_ev: f64,
    electron_mass: f64,
    valence_ev: f64,
    /// Masses along growth.
    #[serde(default = "heavy_mass")]
    heavy_mass: f64,
    #[serde(default = "light_mass")]
    light_mass: f64,
    /// In place of the hole masses.
    luttinger: Option<[f64; 3]>,
    #[serde(default = "lattice_nm")]
    lattice_nm: f64,
    #[serde(default = "split_off_ev")]
    split_off_ev: f64,
}

fn heavy_mass() -> f64 {
    0.4
}

fn light_mass() -> f64 {
    0.1
}

fn lattice_nm() -> f64 {
    0.565
}

fn split_off_ev() -> f64 {
    0.34
}

impl Own {
    /// The table of numbers; the deformation potentials are those that move the valence edges of
    /// a strained layer and nothing else.
    fn write(&self, name: &str) -> String {
        let [first, second, third] = self.luttinger.unwrap_or_else(|| {
            let (heavy, light) = (self.heavy_mass.recip(), self.light_mass.recip());
            let second = 0.25 * (light - heavy);
            [0.5 * (heavy + light), second, second]
        });
        format!(
            "[materials.{name}.numbers]\n\
             lattice_nm = {:?}\ngap_ev = {:?}\nvalence_edge_ev = {:?}\nelectron_mass = {:?}\n\
             luttinger = [{first:?}, {second:?}, {third:?}]\n\
             split_off_ev = {:?}\nkane_energy_ev = 25.0\nac_ev = 0.0\nav_ev = 0.0\nb_ev = -2.0\n\
             c11_gpa = 120.0\nc12_gpa = 55.0\nindex = 3.5\n",
            self.lattice_nm,
            self.conduction_ev - self.valence_ev,
            self.valence_ev,
            self.electron_mass,
            self.split_off_ev,
        )
    }
}

impl StackProblem {
    /// The structure file.
    fn text(&self) -> String {
        let substrate = self.substrate.as_ref().or_else(|| self.own.keys().next());
        let mut text = format!(
            "format = 1\n[substrate]\nmaterial = {:?}\n",
            substrate.expect("a substrate or own numbers")
        );
        for (name, own) in &self.own {
            text.push_str(&own.write(name));
        }
        for (key, table) in [
            ("materials", &self.materials),
            ("operation", &self.operation),
            ("model", &self.model),
        ] {
            if !table.is_empty() {
                let mut outer = toml::Table::new();
                outer.insert(key.to_owned(), toml::Value::Table(table.clone()));
                let _ = write!(text, "{outer}");
            }
        }
        let layer = |(role, material, nm): &(String, String, f64)| {
            format!("role = {role:?}, material = {material:?}, thickness_nm = {nm:?}")
        };
        let [first, inner @ .., last] = self.layers.as_slice() else {
            panic!("{}: wells stand between two layers", self.name)
        };
        let rows: Vec<String> = std::iter::once(format!("  {{ {} }},", layer(first)))
            .chain(std::iter::repeat_n(inner, self.repeat).map(|inner| {
                inner
                    .iter()
                    .map(|row| format!("  {{ {} }},", layer(row)))
                    .collect::<Vec<_>>()
                    .join("\n")
            }))
            .chain(std::iter::once(format!("  {{ {} }},", layer(last))))
            .collect();
        // Rows before tables: TOML wants plain keys first.
        text.replacen(
            "format = 1\n",
            &format!("format = 1\nlayers = [\n{}\n]\n", rows.join("\n")),
            1,
        )
    }

    fn solve(&self) -> Result<Evaluation<'static>, String> {
        // One evaluation a problem for the length of the run.
        let parameters: &'static Parameters = Box::leak(Box::new(Parameters::shipped()));
        let text = self.text();
        let reading =
            structure::read(&text, parameters, &Overrides::default()).map_err(|faults| {
                let messages: Vec<String> = faults.into_iter().map(|fault| fault.message).collect();
                format!("refused: {}", messages.join("; "))
            })?;
        let stack = Box::leak(Box::new(reading.stack));
        Evaluation::new(stack, parameters).map_err(|error| error.to_string())
    }
}

/// Level `number` (from 1) of a ladder.
fn level<'a>(ladder: &'a [Level], name: &str) -> Result<&'a Level, String> {
    let number: usize = name
        .trim_start_matches(|c: char| !c.is_ascii_digit())
        .parse()
        .map_err(|_| format!("which level is {name}?"))?;
    ladder
        .get(number - 1)
        .ok_or_else(|| format!("{name} is not bound"))
}

/// The level of a name such as `e1`, `hh2`, `lh1`.
fn named<'a>(evaluation: &'a Evaluation<'_>, name: &str) -> Result<&'a Level, String> {
    let bands = &evaluation.bands;
    if name.starts_with("hh") {
        level(&bands.heavy, name)
    } else if name.starts_with("lh") {
        level(&bands.light, name)
    } else if name.starts_with('e') {
        level(&bands.electron, name)
    } else {
        Err(format!("no band is called {name}"))
    }
}

/// Distance of a level from the edge of the wells that it lies in, eV, at least zero.
fn confinement_ev(evaluation: &Evaluation<'_>, name: &str) -> Answer {
    let energy = named(evaluation, name)?.energy_ev;
    let wells = evaluation.profile.wells(evaluation.stack);
    Ok(if name.starts_with("hh") {
        wells
            .map(|(numbers, _)| numbers.edges.heavy_ev)
            .fold(f64::NEG_INFINITY, f64::max)
            - energy
    } else if name.starts_with("lh") {
        wells
            .map(|(numbers, _)| numbers.edges.light_ev)
            .fold(f64::NEG_INFINITY, f64::max)
            - energy
    } else {
        energy
            - wells
                .map(|(numbers, _)| numbers.edges.conduction_ev)
                .fold(f64::INFINITY, f64::min)
    })
}

/// φ² at a place counted from the middle of the wells, 1/nm.
fn density_per_nm(evaluation: &Evaluation<'_>, level: &Level, off_nm: f64) -> Answer {
    let place = evaluation.profile.centre_nm + off_nm;
    let positions = &evaluation.bands.nodes.positions_nm;
    let above = positions.partition_point(|&it| it < place - 1e-9);
    let at = *positions.get(above).ok_or("outside of the grid")?;
    if (at - place).abs() > 1e-6 {
        return Err(format!("no node at {place} nm"));
    }
    Ok(level.envelope[above].powi(2))
}

/// Decay length of φ in the barrier above the wells, from two places 6 nm apart.
fn decay_nm(evaluation: &Evaluation<'_>, level: &Level) -> Answer {
    let half = 0.5 * evaluation.profile.well_thickness_nm;
    let near = density_per_nm(evaluation, level, half + 1.0)?;
    let far = density_per_nm(evaluation, level, half + 7.0)?;
    Ok(12.0 / (near / far).ln())
}

/// Distance of a zone-centre state of mixed bands from the edge of the wells that it lies in, eV:
/// the `number`-th (from 1) of the mainly heavy, or of the other states.
fn mixed_confinement_ev(evaluation: &Evaluation<'_>, heavy: bool, number: usize) -> Answer {
    let mixed = evaluation.mixed.as_ref().ok_or("bands are single")?;
    let state = mixed
        .zone_centre
        .iter()
        .filter(|state| (state.heavy > 0.5) == heavy)
        .nth(number.checked_sub(1).ok_or("states count from 1")?)
        .ok_or("it is not bound")?;
    let edge = evaluation
        .profile
        .wells(evaluation.stack)
        .map(|(numbers, _)| {
            if heavy {
                numbers.edges.heavy_ev
            } else {
                numbers.edges.light_ev
            }
        })
        .fold(f64::NEG_INFINITY, f64::max);
    Ok(edge - state.energy_ev)
}

/// Cyclotron mass ħ² k/(dE/dk) of the highest valence state at the Fermi wave number of cold holes
/// that fill nothing else, free-electron masses.
fn cyclotron_mass(evaluation: &Evaluation<'_>, sheet_density_cm2: f64) -> Answer {
    let mixed = evaluation.mixed.as_ref().ok_or("bands are single")?;
    let [block] = &mixed.blocks[..] else {
        return Err("the two blocks differ".to_owned());
    };
    // Both spins fill a circle of k²/2π states per area.
    let fermi_per_nm = (2.0 * PI * 1e-14 * sheet_density_cm2).sqrt();
    let k = &mixed.k_per_nm;
    let middle = k.partition_point(|&it| it < fermi_per_nm);
    if middle == 0 || middle + 1 >= k.len() {
        return Err("its Fermi wave number is out of reach".to_owned());
    }
    let energy = |at: usize| block[at].energy_ev[0];
    // The slope of the parabola through three neighbours.
    let secant = |at: usize| (energy(at + 1) - energy(at)) / (k[at + 1] - k[at]);
    let (below, above) = (secant(middle - 1), secant(middle));
    let bend = (above - below) / (k[middle + 1] - k[middle - 1]);
    let slope = below + bend * (2.0 * fermi_per_nm - k[middle - 1] - k[middle]);
    Ok(-2.0 * HBAR2_OVER_2M0_EV_NM2 * fermi_per_nm / slope)
}

fn from_ladder(evaluation: &Evaluation<'_>, quantity: &str) -> Answer {
    let bands = &evaluation.bands;
    if let Some((name, what)) = quantity.split_once(' ') {
        let found = named(evaluation, name)?;
        return match what {
            "in_wells" => Ok(found.in_wells),
            "decay_nm" => decay_nm(evaluation, found),
            "density_at_centre_per_nm" => density_per_nm(evaluation, found, 0.0),
            "in_plane_mass" => Ok(found.in_plane_mass),
            "confinement_ev" => confinement_ev(evaluation, name),
            _ => {
                // `e2 e1 apart_mev`, `e1 hh1 transition_ev`.
                let (other, what) = what
                    .split_once(' ')
                    .ok_or_else(|| format!("unknown quantity {quantity}"))?;
                let apart = found.energy_ev - named(evaluation, other)?.energy_ev;
                match what {
                    "apart_ev" => Ok(apart.abs()),
                    "apart_mev" => Ok(1e3 * apart.abs()),
                    "transition_ev" => Ok(apart),
                    "transition_nm" => Ok(stepwell::units::wavelength_nm(apart)),
                    _ => Err(format!("unknown quantity {quantity}")),
                }
            }
        };
    }
    match quantity {
        "electron_levels" => Ok(bands.electron.len() as f64),
        "heavy_levels" => Ok(bands.heavy.len() as f64),
        "overlap_squared" => transition_overlap(evaluation),
        "overlap" => Ok(transition_overlap(evaluation)?.sqrt()),
        other => Err(format!("unknown quantity {other}")),
    }
}

fn transition_overlap(evaluation: &Evaluation<'_>) -> Answer {
    evaluation
        .transitions
        .iter()
        .find(|transition| transition.electron == 1 && transition.hole == "hh1")
        .map(|transition| transition.overlap)
        .ok_or_else(|| "e1-hh1 is not among the transitions".to_owned())
}

/// Rise of peak TE gain per density between 4 and 6e17 cm⁻³ above transparency.
fn differential_gain_cm2(evaluation: &Evaluation<'_>, transparency_cm3: f64) -> Answer {
    let mut stack = evaluation.stack.clone();
    stack.operation.densities_cm3 = vec![transparency_cm3 + 4e17, transparency_cm3 + 6e17];
    let runs = Evaluation::new(&stack, evaluation.parameters)
        .and_then(|evaluation| evaluation.spectrum())
        .map_err(|error| error.to_string())?
        .runs;
    match (runs[0].te, runs[1].te) {
        (Some(low), Some(high)) => {
            Ok((high.gain_cm - low.gain_cm) / (runs[1].density_cm3 - runs[0].density_cm3))
        }
        _ => Err("no gain above transparency".to_owned()),
    }
}

impl Problem for StackProblem {
    fn name(&self) -> &str {
        &self.name
    }

    fn checks(&self) -> &[Check] {
        &self.check
    }

    fn answer(&self, check: &Check) -> Answer {
        let evaluation = self
            .solved
            .get_or_init(|| self.solve())
            .as_ref()
            .map_err(Clone::clone)?;
        let transparency = || {
            evaluation
                .transparency_cm3()
                .ok_or_else(|| "never transparent".to_owned())
        };
        let spectrum = || evaluation.spectrum().map_err(|error| error.to_string());
        let missing = || "there is none".to_owned();
        match check.quantity.as_str() {
            "first_transition_ev" => Ok(evaluation.first_transition_ev()),
            "first_transition_nm" => Ok(evaluation.emission().first_transition_nm),
            "pl_nm" => evaluation.emission().pl_nm.ok_or_else(missing),
            "gain_peak_nm" => evaluation.emission().gain_peak_nm.ok_or_else(missing),
            "transparency_cm3" => transparency(),
            "transparency_cm2" => Ok(transparency()? * 1e-7 * evaluation.profile.well_thickness_nm),
            "fit_transparency_cm3" => spectrum()?
                .fit
                .map(|(_, fit)| fit.transparency_cm3)
                .ok_or_else(missing),
            "fit_g0_cm" => spectrum()?
                .fit
                .map(|(_, fit)| fit.g0_cm)
                .ok_or_else(missing),
            "gain_peak_unshrunk_nm" => evaluation
                .emission()
                .gain_peak_unshrunk_nm
                .ok_or_else(missing),
            "differential_gain_above_transparency_cm2" => {
                differential_gain_cm2(evaluation, transparency()?)
            }
            "conduction_depth_ev" => {
                let well = evaluation
                    .profile
                    .wells(evaluation.stack)
                    .map(|(numbers, _)| numbers.edges.conduction_ev)
                    .fold(f64::INFINITY, f64::min);
                let outside = evaluation
                    .profile
                    .outside()
                    .map(|numbers| numbers.edges.conduction_ev)
                    .fold(f64::INFINITY, f64::min);
                Ok(outside - well)
            }
            "cyclotron_mass" => cyclotron_mass(evaluation, check.at.ok_or("at which density?")?),
            other => {
                let words: Vec<&str> = other.split(' ').collect();
                match words[..] {
                    [
                        "mixed",
                        kind @ ("heavy" | "light"),
                        number,
                        "confinement_ev",
                    ] => {
                        let number = number
                            .parse()
                            .map_err(|_| format!("which state is {number}?"))?;
                        mixed_confinement_ev(evaluation, kind == "heavy", number)
                    }
                    _ => from_ladder(evaluation, other),
                }
            }
        }
    }
}
