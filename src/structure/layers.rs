//! Layers and groups: rows of the file become the layers of the stack.

use std::ops::Range;

use super::file::Row;
use super::keys::{LONGEST_ACTIVE_REGION_NM, MOST_LAYERS, MOST_WELLS, USUAL_WELL_NM, WELL_NM};
use super::number::shown;
use super::palette::Palette;
use super::reader::{Field, Findings, Given, brief};
use super::{Doping, Layer, Material, Remark, Role, Substance};
use crate::materials::{Composition, Offsets, Parameters};
use crate::source::Diagnostic;

/// Elements that act as donors, and as acceptors, in every III-V compound (common practice;
/// C, Si and Ge are amphoteric and left out).
const DONORS: [&str; 4] = ["S", "Se", "Te", "Sn"];
const ACCEPTORS: [&str; 4] = ["Be", "Mg", "Zn", "Cd"];

/// The layers of the file on their way to those of the stack.
pub(super) struct Layers<'a> {
    palette: Palette<'a>,
    parameters: &'a Parameters,
    temperature_k: f64,
    /// Barriers that were remarked already.
    remarked: Vec<String>,
}

impl<'a> Layers<'a> {
    /// No layer read yet.
    pub(super) fn new(
        palette: Palette<'a>,
        parameters: &'a Parameters,
        temperature_k: f64,
    ) -> Self {
        Self {
            palette,
            parameters,
            temperature_k,
            remarked: Vec::new(),
        }
    }

    /// Every layer, groups written out; `None` after a complaint.
    pub(super) fn expanded(
        &mut self,
        given: Option<&Given<Vec<Row>>>,
        findings: &mut Findings,
    ) -> Option<Vec<Layer>> {
        const HELP: &str = "write `[[layers]]` with `role`, `material` and `thickness_nm` below, from the substrate up";
        let rows = match given {
            None => {
                findings
                    .faults
                    .push(Diagnostic::new(0..0, "the file has no layers").with_help(HELP));
                return None;
            }
            Some(given) => given.value.as_ref()?,
        };
        let before = findings.faults.len();
        let mut expanded: Vec<Layer> = Vec::new();
        let mut wells = 0;
        let mut wells_meant = false;
        let mut full = false;
        for (number, row) in rows.iter().enumerate() {
            wells_meant |= means_a_well(row);
            let Some((repeat, accepted)) = self.row(row, number + 1, findings) else {
                continue;
            };
            let is_well = |layer: &&Layer| layer.role == Role::Well;
            let new_wells = repeat * accepted.iter().filter(is_well).count();
            if full {
                continue;
            }
            if let Some(fault) = too_many(
                &row.span,
                expanded.len() + repeat * accepted.len(),
                wells + new_wells,
            ) {
                findings.faults.push(fault);
                full = true;
                continue;
            }
            wells += new_wells;
            for _ in 0..repeat {
                expanded.extend_from_slice(&accepted);
            }
        }
        if !wells_meant {
            let span = rows.first().map_or(0..0, |row| row.span.clone());
            findings.faults.push(
                Diagnostic::new(span, "no layer is a well")
                    .with_help("give the layers that hold the carriers `role = \"well\"`"),
            );
        }
        if findings.faults.len() > before {
            return None;
        }
        if let Some(fault) = too_far_apart(rows, &expanded) {
            findings.faults.push(fault);
            return None;
        }
        Some(expanded)
    }

    /// The palette after use.
    pub(super) fn palette(&self) -> &Palette<'a> {
        &self.palette
    }

    /// The layers of one row and how often they are grown.
    fn row(
        &mut self,
        row: &Row,
        number: usize,
        findings: &mut Findings,
    ) -> Option<(usize, Vec<Layer>)> {
        if row.repeat.is_none() && row.layers.is_none() {
            return self
                .layer(row, number, findings)
                .map(|layer| (1, vec![layer]));
        }
        if let Some((name, key)) = layer_key(row) {
            findings.faults.push(
                Diagnostic::new(key, format!("a group of layers has no `{name}` of its own"))
                    .with_help(
                        "a row is one layer, or a group: `repeat = 6` and `layers = [{ role = ... }, ...]`",
                    ),
            );
            return None;
        }
        let Some(layers) = &row.layers else {
            findings.faults.push(
                Diagnostic::new(row.span.clone(), "the group has no `layers`").with_help(
                    "write `layers = [{ role = ..., material = ..., thickness_nm = ... }, ...]`",
                ),
            );
            return None;
        };
        if row.repeat.is_none() {
            findings.faults.push(
                Diagnostic::new(row.span.clone(), "the group has no `repeat`")
                    .with_help("say how many times it is grown: `repeat = 6`"),
            );
        }
        let inner = layers.value.as_ref()?;
        if inner.is_empty() {
            findings.faults.push(
                Diagnostic::new(layers.span.clone(), "the group is empty")
                    .with_help("give it layers, or leave it out"),
            );
        }
        let mut accepted = Vec::with_capacity(inner.len());
        let mut complete = true;
        for layer in inner {
            if let Some(key) = (layer.repeat.as_ref().map(|given| &given.key))
                .or(layer.layers.as_ref().map(|given| &given.key))
            {
                findings.faults.push(
                    Diagnostic::new(key.clone(), "a group holds layers, not groups")
                        .with_help("write the inner group out, or make it a row of its own"),
                );
                complete = false;
                continue;
            }
            match self.layer(layer, number, findings) {
                Some(layer) => accepted.push(layer),
                None => complete = false,
            }
        }
        let repeat = usize::try_from(row.repeat.as_ref()?.value?).ok()?;
        (complete && !accepted.is_empty()).then_some((repeat, accepted))
    }

    fn layer(&mut self, row: &Row, number: usize, findings: &mut Findings) -> Option<Layer> {
        let missing: Vec<&str> = [
            ("role", row.role.is_none()),
            ("material", row.material.is_none()),
            ("thickness_nm", row.thickness_nm.is_none()),
        ]
        .into_iter()
        .filter_map(|(name, absent)| absent.then_some(name))
        .collect();
        if !missing.is_empty() {
            let names: Vec<String> = missing.iter().map(|name| format!("`{name}`")).collect();
            findings.faults.push(
                Diagnostic::new(
                    row.span.clone(),
                    format!("the layer has no {}", names.join(", no ")),
                )
                .with_help("a layer has `role`, `material` and `thickness_nm`"),
            );
        }
        let role = role(row.role.as_ref());
        let thickness_nm = thickness_nm(role, row.thickness_nm.as_ref(), findings);
        let material = self.material(row.material.as_ref(), role, findings);
        let grade_to = row
            .grade_to
            .as_ref()
            .map(|given| self.material(Some(given), role, findings));
        if let Some(given) = &row.grade_to {
            grades(material.as_ref(), row.material.as_ref(), findings);
            grades(
                grade_to.as_ref().and_then(Option::as_ref),
                Some(given),
                findings,
            );
            if let (Some(material), Some(Some(end))) = (&material, &grade_to) {
                self.grade_is_covered(material, end, &given.span, findings);
            }
        }
        let doping = doping(row, findings);
        Some(Layer {
            role: role?,
            material: material?,
            grade_to: match grade_to {
                Some(end) => Some(end?),
                None => None,
            },
            thickness_nm: thickness_nm?,
            doping: doping?,
            row: number,
        })
    }

    fn material(
        &mut self,
        given: Option<&Given<String>>,
        role: Option<Role>,
        findings: &mut Findings,
    ) -> Option<Material> {
        let given = given?;
        let material = self
            .palette
            .material(given.value.as_ref()?, &given.span, findings)?;
        if let (Some(role), Substance::Alloy(composition)) = (role, &material.substance) {
            self.valleys(role, composition, &given.span, findings);
        }
        Some(material)
    }

    /// An indirect well emits next to nothing: refused. An indirect barrier is remarked.
    fn valleys(
        &mut self,
        role: Role,
        composition: &Composition,
        span: &Range<usize>,
        findings: &mut Findings,
    ) {
        let crystal = self
            .parameters
            .crystal(composition, self.temperature_k, Offsets::Table);
        let (valley, gap_ev) = if crystal.gap_x_ev < crystal.gap_l_ev {
            ("X", crystal.gap_x_ev)
        } else {
            ("L", crystal.gap_l_ev)
        };
        let below_mev = 1e3 * (crystal.gap_ev - gap_ev);
        if below_mev <= 0.0 {
            return;
        }
        let formula = composition.formula();
        if role == Role::Well {
            findings.faults.push(
                Diagnostic::new(
                    span.clone(),
                    format!(
                        "a well of {formula} is indirect at {} K: its {valley} gap ({gap_ev:.3} eV) lies below the direct one ({:.3} eV)",
                        shown(self.temperature_k),
                        crystal.gap_ev
                    ),
                )
                .with_help("it would hardly emit: choose a composition with less of the wide-gap element"),
            );
        } else if role == Role::Barrier && !self.remarked.contains(&formula) {
            self.remarked.push(formula.clone());
            findings.remarks.push(Remark::IndirectBarrier {
                span: span.clone(),
                formula,
                valley,
                below_mev,
            });
        }
    }

    /// A grade between two alloys may pass through elements that neither end mixes.
    fn grade_is_covered(
        &self,
        from: &Material,
        to: &Material,
        span: &Range<usize>,
        findings: &mut Findings,
    ) {
        if let (Substance::Alloy(from), Substance::Alloy(to)) = (&from.substance, &to.substance)
            && let Err(missing) = self.parameters.covers(&from.towards(to, 0.5))
        {
            findings.faults.push(
                Diagnostic::new(span.clone(), missing.to_string())
                    .with_help("grade between alloys of one family"),
            );
        }
    }
}

/// Wells have bounds of their own.
fn thickness_nm(
    role: Option<Role>,
    given: Option<&Given<f64>>,
    findings: &mut Findings,
) -> Option<f64> {
    let given = given?;
    let thickness_nm = given.value?;
    if role != Some(Role::Well) {
        return Some(thickness_nm);
    }
    let (thinnest, thickest) = WELL_NM;
    if !(thinnest..=thickest).contains(&thickness_nm) {
        let message = format!(
            "a well of {} nm: possible is {thinnest} to {thickest} nm",
            shown(thickness_nm)
        );
        let help = if thickness_nm > thickest {
            "check the unit (nm, not angstrom) and the role: `confinement` and `cladding` are thick"
        } else {
            "less than one layer of atoms: check the unit (nm, not um)"
        };
        findings
            .faults
            .push(Diagnostic::new(given.span.clone(), message).with_help(help));
        return None;
    }
    if !(USUAL_WELL_NM.0..=USUAL_WELL_NM.1).contains(&thickness_nm) {
        findings.remarks.push(Remark::Unusual {
            span: given.span.clone(),
            key: "thickness_nm",
            value: thickness_nm,
            unit: "nm",
            usual: USUAL_WELL_NM,
        });
    }
    Some(thickness_nm)
}

fn role(given: Option<&Given<String>>) -> Option<Role> {
    let word = given?.value.as_deref()?;
    Role::ALL.into_iter().find(|role| role.word() == word)
}

/// Whether a row says that it is or holds a well, or might have said so.
fn means_a_well(row: &Row) -> bool {
    let refused = row.role.as_ref().is_some_and(|given| given.value.is_none());
    let group_refused = row
        .layers
        .as_ref()
        .is_some_and(|given| given.value.is_none());
    let mut inner = row
        .layers
        .iter()
        .flat_map(|given| given.value.iter())
        .flatten();
    refused
        || group_refused
        || role(row.role.as_ref()) == Some(Role::Well)
        || inner.any(means_a_well)
}

/// A key that only a layer has, and its place.
fn layer_key(row: &Row) -> Option<(&'static str, Range<usize>)> {
    let texts = [
        ("role", &row.role),
        ("material", &row.material),
        ("grade_to", &row.grade_to),
        ("dopant", &row.dopant),
    ];
    let numbers = [
        ("thickness_nm", &row.thickness_nm),
        ("donors_cm3", &row.donors_cm3),
        ("acceptors_cm3", &row.acceptors_cm3),
    ];
    let texts = texts
        .into_iter()
        .filter_map(|(name, field)| field.as_ref().map(|given| (name, given.key.clone())));
    let numbers = numbers
        .into_iter()
        .filter_map(|(name, field)| field.as_ref().map(|given| (name, given.key.clone())));
    texts.chain(numbers).min_by_key(|(_, key)| key.start)
}

fn too_many(span: &Range<usize>, layers: usize, wells: usize) -> Option<Diagnostic> {
    let (count, most, what) = if wells > MOST_WELLS {
        (wells, MOST_WELLS, "wells")
    } else if layers > MOST_LAYERS {
        (layers, MOST_LAYERS, "layers")
    } else {
        return None;
    };
    let message =
        format!("the structure has {count} {what} up to here: at most {most} are possible");
    Some(Diagnostic::new(span.clone(), message).with_help("check `repeat`"))
}

/// Levels are solved over everything between the outermost wells.
fn too_far_apart(rows: &[Row], layers: &[Layer]) -> Option<Diagnostic> {
    let first = layers.iter().position(|layer| layer.role == Role::Well)?;
    let last = layers.iter().rposition(|layer| layer.role == Role::Well)?;
    let length_nm: f64 = layers[first..=last]
        .iter()
        .map(|layer| layer.thickness_nm)
        .sum();
    if length_nm <= LONGEST_ACTIVE_REGION_NM {
        return None;
    }
    let row = rows.get(layers[last].row - 1)?;
    Some(
        Diagnostic::new(
            row.span.clone(),
            format!(
                "the wells reach over {} nm: at most {} nm are possible",
                shown(length_nm.round()),
                shown(LONGEST_ACTIVE_REGION_NM)
            ),
        )
        .with_help("wells far apart do not know of each other: make them separate structures"),
    )
}

/// A grade runs between compositions: both its ends are alloys.
fn grades(material: Option<&Material>, given: Option<&Given<String>>, findings: &mut Findings) {
    if let (Some(material), Some(given)) = (material, given)
        && let Substance::Own { .. } = material.substance
    {
        findings.faults.push(
            Diagnostic::new(
                given.span.clone(),
                format!(
                    "`{}` has its own numbers and no composition: it can't be graded",
                    material.name
                ),
            )
            .with_help("grade between formulas, or write the grade as thin layers"),
        );
    }
}

fn doping(row: &Row, findings: &mut Findings) -> Option<Doping> {
    if let (Some(donors), Some(acceptors)) = (&row.donors_cm3, &row.acceptors_cm3) {
        let later = donors.key.start.max(acceptors.key.start);
        let key = if later == donors.key.start {
            &donors.key
        } else {
            &acceptors.key
        };
        findings.faults.push(
            Diagnostic::new(
                key.clone(),
                "the layer has both `donors_cm3` and `acceptors_cm3`",
            )
            .with_help("give the net doping as one of the two"),
        );
        return None;
    }
    let density = |field: &Field<f64>| match field {
        Some(given) => given.value,
        None => Some(0.0),
    };
    let dopant = match &row.dopant {
        None => None,
        Some(given) => {
            let symbol = given.value.as_ref()?;
            dopant_is_plausible(row, given, symbol, findings)?;
            Some(symbol.clone())
        }
    };
    Some(Doping {
        donors_cm3: density(&row.donors_cm3)?,
        acceptors_cm3: density(&row.acceptors_cm3)?,
        dopant,
    })
}

fn dopant_is_plausible(
    row: &Row,
    given: &Given<String>,
    symbol: &str,
    findings: &mut Findings,
) -> Option<()> {
    let mut letters = symbol.chars();
    let is_symbol = letters
        .next()
        .is_some_and(|letter| letter.is_ascii_uppercase())
        && letters.clone().count() <= 1
        && letters.all(|letter| letter.is_ascii_lowercase());
    if !is_symbol {
        findings.faults.push(
            Diagnostic::new(
                given.span.clone(),
                format!("the dopant \"{}\" is no chemical symbol", brief(symbol)),
            )
            .with_help("write the element: \"Si\", \"S\", \"Zn\", \"Be\", \"C\", ..."),
        );
        return None;
    }
    if row.donors_cm3.is_none() && row.acceptors_cm3.is_none() {
        findings.faults.push(
            Diagnostic::new(given.key.clone(), "the layer has a `dopant` and no density")
                .with_help("give `donors_cm3` or `acceptors_cm3`, or leave the dopant out"),
        );
        return None;
    }
    let usually = if row.donors_cm3.is_some() && ACCEPTORS.contains(&symbol) {
        Some("acceptor")
    } else if row.acceptors_cm3.is_some() && DONORS.contains(&symbol) {
        Some("donor")
    } else {
        None
    };
    if let Some(usually) = usually {
        findings.remarks.push(Remark::UnusualDopant {
            span: given.span.clone(),
            dopant: symbol.to_owned(),
            usually,
        });
    }
    Some(())
}
