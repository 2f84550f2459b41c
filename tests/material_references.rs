//! The shipped data against published numbers: one trial for each row of the files in `reference/`
//! that are marked as belonging to the materials floor.

use libtest_mimic::{Arguments, Failed, Trial};
use serde::Deserialize;
use std::{fs, path::Path, sync::Arc};
use stepwell::materials::{
    Composition, Crystal, Edges, Element, Elements, Offsets, Parameters, solve_composition,
};
use stepwell::units::photon_ev;

#[derive(Deserialize)]
struct Reference {
    citation: String,
    known: String,
    tolerance_reason: String,
    floor: String,
    check: Vec<Check>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Check {
    quantity: String,
    material: Option<String>,
    /// Second material of an offset.
    barrier: Option<String>,
    /// Compounds whose numbers are taken in straight mixture, without bowing.
    between: Option<[String; 2]>,
    share: Option<f64>,
    family: Option<String>,
    element: Option<String>,
    substrate: Option<String>,
    /// Substrate whose offset rule holds.
    rule: Option<String>,
    #[serde(default = "room_k")]
    temperature_k: f64,
    wavelength_nm: Option<f64>,
    value: Option<f64>,
    range: Option<[f64; 2]>,
    tolerance: f64,
}

fn room_k() -> f64 {
    300.0
}

type Outcome<T> = Result<T, Failed>;

fn main() {
    let arguments = Arguments::from_args();
    let parameters = Arc::new(Parameters::shipped());
    let mut trials = Vec::new();
    for (name, text) in files() {
        // other floors keep their numbers beside these
        let head: toml::Table = text.parse().expect("a reference file is TOML");
        if head.get("floor").and_then(toml::Value::as_str) != Some("materials") {
            continue;
        }
        let reference: Reference =
            toml::from_str(&text).unwrap_or_else(|error| panic!("{name}: {error}"));
        for statement in [
            &reference.citation,
            &reference.known,
            &reference.tolerance_reason,
            &reference.floor,
        ] {
            assert!(!statement.is_empty(), "{name} leaves a statement empty");
        }
        assert!(!reference.check.is_empty(), "{name} holds no check");
        for check in reference.check {
            let parameters = Arc::clone(&parameters);
            let subject = check.material.clone().or_else(|| check.family.clone());
            let title = format!(
                "{name}: {} {} at {} K",
                check.quantity,
                subject.unwrap_or_default(),
                check.temperature_k
            );
            trials.push(Trial::test(title, move || run(&parameters, &check)));
        }
    }
    assert!(!trials.is_empty(), "no reference file for the materials");
    libtest_mimic::run(&arguments, trials).exit();
}

fn files() -> Vec<(String, String)> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("reference");
    let mut files: Vec<(String, String)> = fs::read_dir(folder)
        .expect("the folder of references")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|it| it == "toml"))
        .map(|path| {
            let name = path.file_stem().expect("a name").to_string_lossy();
            (name.into_owned(), fs::read_to_string(&path).expect("text"))
        })
        .collect();
    files.sort();
    files
}

fn run(parameters: &Parameters, check: &Check) -> Outcome<()> {
    let got = computed(parameters, check)?;
    let [low, high] = match (check.value, check.range) {
        (Some(value), None) => [value, value],
        (None, Some(range)) => range,
        _ => return Err("give either value or range".into()),
    };
    let miss = if got < low {
        got - low
    } else {
        (got - high).max(0.0)
    };
    // written so that NaN fails
    if miss.abs() <= check.tolerance {
        Ok(())
    } else {
        Err(format!(
            "computed {got}, published {low} to {high}: off by {miss:+e}, tolerance {}",
            check.tolerance
        )
        .into())
    }
}

fn composition(text: Option<&String>) -> Outcome<Composition> {
    let text = text.ok_or("a material is missing")?;
    Composition::parse(text).map_err(|fault| fault.message.into())
}

fn crystal(parameters: &Parameters, check: &Check, text: Option<&String>) -> Outcome<Crystal> {
    let composition = composition(text)?;
    let offsets = match &check.rule {
        None => Offsets::Table,
        rule => {
            let substrate = self::composition(rule.as_ref())?;
            parameters.offsets(&substrate, [&composition], None, check.temperature_k)
        }
    };
    Ok(parameters.crystal(&composition, check.temperature_k, offsets))
}

fn edges(parameters: &Parameters, check: &Check, crystal: &Crystal) -> Outcome<Edges> {
    let substrate = self::crystal(parameters, check, check.substrate.as_ref())?;
    Ok(crystal.on(substrate.lattice_nm))
}

fn computed(parameters: &Parameters, check: &Check) -> Outcome<f64> {
    if check.between.is_some() {
        return straight_mixture(parameters, check);
    }
    match check.quantity.as_str() {
        "matched_fraction" => return matched_fraction(parameters, check),
        "direct_until" => return direct_until(parameters, check),
        "index" => return index(parameters, check),
        _ => {}
    }
    let material = crystal(parameters, check, check.material.as_ref())?;
    if check.barrier.is_some() {
        return offset(parameters, check, &material);
    }
    Ok(match check.quantity.as_str() {
        "gap_ev" => material.gap_ev,
        "gap_x_ev" => material.gap_x_ev,
        "gap_l_ev" => material.gap_l_ev,
        "electron_mass" => material.electron_mass,
        "heavy_mass" => material.heavy_mass_growth(),
        "light_mass" => material.light_mass_growth(),
        "gamma1" => material.luttinger[0],
        "gamma2" => material.luttinger[1],
        "gamma3" => material.luttinger[2],
        "kane_energy_ev" => material.kane_energy_ev,
        "strained_gap_ev" => edges(parameters, check, &material)?.gap_ev(),
        "strain_percent" => 100.0 * edges(parameters, check, &material)?.in_plane_strain,
        other => return Err(format!("unknown quantity {other}").into()),
    })
}

fn offset(parameters: &Parameters, check: &Check, well: &Crystal) -> Outcome<f64> {
    let barrier = crystal(parameters, check, check.barrier.as_ref())?;
    let valence = well.valence_edge_ev - barrier.valence_edge_ev;
    let conduction = barrier.gap_ev - well.gap_ev - valence;
    Ok(match check.quantity.as_str() {
        "valence_offset_ev" => valence,
        "conduction_offset_ev" => conduction,
        "conduction_share" => conduction / (conduction + valence),
        // the barrier is the substrate: only the well is strained
        "strained_conduction_share" => {
            let edges = well.on(barrier.lattice_nm);
            let conduction = barrier.valence_edge_ev + barrier.gap_ev - edges.conduction_ev;
            let valence = edges.heavy_ev - barrier.valence_edge_ev;
            conduction / (conduction + valence)
        }
        other => return Err(format!("unknown offset {other}").into()),
    })
}

/// The strain law alone: every number of the crystal in straight mixture.
fn straight_mixture(parameters: &Parameters, check: &Check) -> Outcome<f64> {
    let [from, to] = check.between.as_ref().ok_or("two compounds")?;
    let share = check.share.ok_or("a share is missing")?;
    let from = crystal(parameters, check, Some(from))?;
    let to = crystal(parameters, check, Some(to))?;
    let mean = |of: fn(&Crystal) -> f64| (1.0 - share) * of(&from) + share * of(&to);
    let layer = Crystal {
        lattice_nm: mean(|it| it.lattice_nm),
        gap_ev: mean(|it| it.gap_ev),
        valence_edge_ev: 0.0,
        split_off_ev: mean(|it| it.split_off_ev),
        ac_ev: mean(|it| it.ac_ev),
        av_ev: mean(|it| it.av_ev),
        b_ev: mean(|it| it.b_ev),
        c11_gpa: mean(|it| it.c11_gpa),
        c12_gpa: mean(|it| it.c12_gpa),
        ..from
    };
    let edges = edges(parameters, check, &layer)?;
    let conduction_shift = edges.conduction_ev - layer.gap_ev;
    Ok(match check.quantity.as_str() {
        "lattice_nm" => layer.lattice_nm,
        "in_plane_strain" => edges.in_plane_strain,
        "conduction_shift_ev" => conduction_shift,
        "mean_valence_shift_ev" => edges.valence_mean_ev,
        "shear_ev" => edges.shear_ev,
        "heavy_shift_ev" => edges.heavy_ev,
        "light_shift_ev" => edges.light_ev,
        "heavy_gap_shift_ev" => conduction_shift - edges.heavy_ev,
        other => return Err(format!("unknown shift {other}").into()),
    })
}

fn element(check: &Check) -> Outcome<Element> {
    let symbol = check.element.as_deref().ok_or("an element is missing")?;
    Element::from_symbol(symbol).ok_or_else(|| "unknown element".into())
}

fn matched_fraction(parameters: &Parameters, check: &Check) -> Outcome<f64> {
    let family = check.family.as_deref().ok_or("a family is missing")?;
    let elements = Elements::parse(family).map_err(|fault| fault.message)?;
    let substrate = crystal(parameters, check, check.substrate.as_ref())?;
    let matched = solve_composition(parameters, &elements, substrate.lattice_nm, None, Some(0.0))
        .map_err(|error| error.to_string())?;
    Ok(matched.fraction(element(check)?))
}

/// The least fraction of an element, in steps of 0.0005, at which AlGaAs is no longer direct.
fn direct_until(parameters: &Parameters, check: &Check) -> Outcome<f64> {
    if check.family.as_deref() != Some("AlGaAs") {
        return Err("only of AlGaAs".into());
    }
    let (from, to) = (
        composition(Some(&"GaAs".to_owned()))?,
        composition(Some(&"AlAs".to_owned()))?,
    );
    (0..=2000)
        .map(|step| from.towards(&to, f64::from(step) / 2000.0))
        .find(|mixed| {
            let crystal = parameters.crystal(mixed, check.temperature_k, Offsets::Table);
            !crystal.is_direct()
        })
        .map(|mixed| mixed.fraction(Element::Al))
        .ok_or_else(|| "direct throughout".into())
}

fn index(parameters: &Parameters, check: &Check) -> Outcome<f64> {
    let material = composition(check.material.as_ref())?;
    let substrate = match &check.substrate {
        None => None,
        text => Some(composition(text.as_ref())?),
    };
    let wavelength_nm = check.wavelength_nm.ok_or("a wavelength is missing")?;
    Ok(parameters.index(&material, substrate.as_ref(), photon_ev(wavelength_nm)))
}
