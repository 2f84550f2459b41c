//! What a structure file means once it is accepted: defaults, overrides, groups, remarks, and the
//! editor schema beside the reader.

use stepwell::materials::{Composition, Parameters};
use stepwell::source::Place;
use stepwell::structure::{
    self, Bands, Lineshape, Model, Overrides, Reading, Remark, Role, Substance,
};

const HEAD: &str = "format = 1\n[substrate]\nmaterial = \"GaAs\"\n";
const WELL: &str = "[[layers]]\nrole = \"well\"\nmaterial = \"GaAs\"\nthickness_nm = 8\n";
const BARRIER: &str =
    "[[layers]]\nrole = \"barrier\"\nmaterial = \"Al0.3Ga0.7As\"\nthickness_nm = 20\n";

fn read_with(text: &str, overrides: &Overrides) -> Reading {
    structure::read(text, &Parameters::shipped(), overrides)
        .unwrap_or_else(|faults| panic!("refused: {faults:#?}"))
}

fn read(text: &str) -> Reading {
    read_with(text, &Overrides::default())
}

/// A number of the file, to the last bits of a sum.
fn assert_close(got: f64, want: f64, what: &str) {
    assert!(
        (got - want).abs() <= 1e-12 * want.abs(),
        "{what}: {got} instead of {want}"
    );
}

#[test]
fn what_a_file_leaves_out_takes_its_default_and_the_reader_says_so() {
    let Reading { stack, remarks } = read(&format!("{HEAD}{BARRIER}{WELL}{BARRIER}"));
    assert_eq!(stack.title, "untitled");
    assert_close(stack.operation.temperature_k, 300.0, "temperature");
    assert!(!stack.operation.temperature_given);
    assert_eq!(
        stack.operation.densities_cm3,
        [1e18, 2e18, 3e18, 4e18, 5e18]
    );
    assert_close(stack.operation.working_density_cm3, 5e18, "working density");
    assert_eq!(stack.model, Model::default());
    let [Remark::DefaultTemperature { .. }] = remarks.as_slice() else {
        panic!("{remarks:#?}");
    };
    assert!(remarks[0].message().contains("300 K"));
}

#[test]
fn a_group_is_written_out_in_growth_order_and_rows_are_counted() {
    let group = "[[layers]]\nrepeat = 3\nlayers = [\n { role = \"well\", material = \"GaAs\", thickness_nm = 8 },\n { role = \"barrier\", material = \"Al0.3Ga0.7As\", thickness_nm = 9 },\n]\n";
    let stack = read(&format!("{HEAD}{BARRIER}{group}{BARRIER}")).stack;
    let roles: Vec<Role> = stack.layers.iter().map(|layer| layer.role).collect();
    let (well, barrier) = (Role::Well, Role::Barrier);
    assert_eq!(
        roles,
        [
            barrier, well, barrier, well, barrier, well, barrier, barrier
        ]
    );
    let rows: Vec<usize> = stack.layers.iter().map(|layer| layer.row).collect();
    assert_eq!(rows, [1, 2, 2, 2, 2, 2, 2, 3]);
    assert_eq!(stack.well_count(), 3);
    assert_close(stack.well_thickness_nm(), 24.0, "well thickness");
}

#[test]
fn densities_are_sorted_and_the_working_density_may_stand_outside() {
    let operation = "[operation]\ntemperature_c = 25\ndensities_cm3 = [3e18, 1e18]\nworking_density_cm3 = 5e17\n";
    let stack = read(&format!("{HEAD}{WELL}{operation}")).stack;
    assert_eq!(stack.operation.densities_cm3, [1e18, 3e18]);
    assert_close(stack.operation.working_density_cm3, 5e17, "working density");
    assert_close(stack.operation.temperature_k, 298.15, "temperature");
    assert!(stack.operation.temperature_given);
}

#[test]
fn every_switch_of_the_model_arrives() {
    let model = "[model]\nbands = \"mixed\"\nnonparabolic = false\nlineshape = \"gaussian\"\nintraband_fs = 50\nshrinkage_mev = 0\nconduction_share = 0.6\nfield_kv_cm = -80\nindex = 3.3\n";
    let stack = read(&format!("{HEAD}{WELL}{model}")).stack;
    let expected = Model {
        bands: Bands::Mixed,
        nonparabolic: false,
        lineshape: Lineshape::Gaussian,
        intraband_fs: 50.0,
        shrinkage_mev: 0.0,
        conduction_share: Some(0.6),
        field_kv_cm: -80.0,
        index: Some(3.3),
    };
    assert_eq!(stack.model, expected);
}

#[test]
fn what_is_laid_over_goes_before_the_file() {
    let text = format!(
        "{HEAD}{WELL}[operation]\ntemperature_c = 25\nworking_density_cm3 = 1e18\n[model]\nbands = \"single\"\n"
    );
    let overrides = Overrides {
        temperature_k: Some(358.15),
        densities_cm3: vec![4e18, 2e18],
        bands: Some(Bands::Mixed),
    };
    let stack = read_with(&text, &overrides).stack;
    assert_close(stack.operation.temperature_k, 358.15, "temperature");
    assert_eq!(stack.operation.densities_cm3, [2e18, 4e18]);
    assert_close(stack.operation.working_density_cm3, 4e18, "working density");
    assert_eq!(stack.model.bands, Bands::Mixed);
}

#[test]
fn what_is_laid_over_is_checked_like_the_file() {
    for (temperature_k, density_cm3) in [(3000.0, 1e18), (f64::NAN, 1e18), (300.0, 1e25)] {
        let overrides = Overrides {
            temperature_k: Some(temperature_k),
            densities_cm3: vec![density_cm3],
            bands: None,
        };
        let text = format!("{HEAD}{WELL}");
        let refused = structure::read(&text, &Parameters::shipped(), &overrides);
        let faults = refused.expect_err("an impossible override");
        assert_eq!(faults.len(), 1, "{faults:#?}");
        assert!(
            faults[0].message.starts_with("laid over the file"),
            "{faults:#?}"
        );
    }
}

/// The valleys of AlGaAs shift with temperature at different rates: near 41 % of Al it depends on
/// the temperature which of them is lowest.
#[test]
fn a_well_is_direct_or_not_at_the_working_temperature() {
    let well = "[[layers]]\nrole = \"well\"\nmaterial = \"Al0.41Ga0.59As\"\nthickness_nm = 8\n";
    let at = |kelvin: f64| {
        let overrides = Overrides {
            temperature_k: Some(kelvin),
            ..Overrides::default()
        };
        structure::read(&format!("{HEAD}{well}"), &Parameters::shipped(), &overrides).is_ok()
    };
    let direct: Vec<bool> = [10.0, 300.0, 600.0].map(at).to_vec();
    let parameters = Parameters::shipped();
    let composition = Composition::parse("Al0.41Ga0.59As").expect("a formula");
    let expected: Vec<bool> = [10.0, 300.0, 600.0]
        .map(|kelvin| {
            let crystal =
                parameters.crystal(&composition, kelvin, stepwell::materials::Offsets::Table);
            crystal.gap_ev <= crystal.gap_x_ev.min(crystal.gap_l_ev)
        })
        .to_vec();
    assert_eq!(direct, expected);
    assert!(
        direct.contains(&true) && direct.contains(&false),
        "{direct:?}"
    );
}

#[test]
fn a_prescription_is_met_at_300_k_and_kept_at_every_temperature() {
    let text = "format = 1\n[substrate]\nmaterial = \"InP\"\n[materials.well]\nalloy = \"AlGaInAs\"\ngap_nm = 1420\ncompressive_percent = 1.0\n[[layers]]\nrole = \"well\"\nmaterial = \"well\"\nthickness_nm = 5.5\n";
    let substance = |kelvin| {
        let overrides = Overrides {
            temperature_k: Some(kelvin),
            ..Overrides::default()
        };
        read_with(text, &overrides).stack.layers[0]
            .material
            .substance
    };
    assert_eq!(substance(77.0), substance(360.0));
    let Substance::Alloy(composition) = substance(300.0) else {
        panic!("an alloy was asked for");
    };
    let parameters = Parameters::shipped();
    let crystal = |composition: &Composition| {
        parameters.crystal(composition, 300.0, stepwell::materials::Offsets::Table)
    };
    let inp = Composition::parse("InP").expect("a formula");
    let edges = crystal(&composition).on(crystal(&inp).lattice_nm);
    assert!((stepwell::units::wavelength_nm(edges.gap_ev()) - 1420.0).abs() < 0.01);
    assert!(
        (edges.in_plane_strain + 0.01).abs() < 1e-8,
        "{}",
        edges.in_plane_strain
    );
}

#[test]
fn odd_things_are_remarked_with_advice_and_place() {
    let text = format!(
        "{HEAD}[materials.one]\nformula = \"In0.2Ga0.8As\"\n[materials.two]\nformula = \"Ga0.8In0.2As\"\n[materials.three]\nformula = \"InP\"\n\
         [[layers]]\nrole = \"barrier\"\nmaterial = \"Al0.6Ga0.4As\"\nthickness_nm = 20\n\
         [[layers]]\nrole = \"well\"\nmaterial = \"one\"\nthickness_nm = 200\n\
         [[layers]]\nrole = \"barrier\"\nmaterial = \"Al0.6Ga0.4As\"\nthickness_nm = 20\n\
         [[layers]]\nrole = \"cladding\"\nmaterial = \"two\"\nthickness_nm = 100\ndonors_cm3 = 1e18\ndopant = \"Zn\"\n\
         [operation]\ntemperature_k = 4\n"
    );
    let remarks = read(&text).remarks;
    let expected = [
        ("`one` and `two` are the same material", 6),
        ("no layer is made of `three`", 8),
        (
            "the barrier Al0.6Ga0.4As is indirect: its X valley lies",
            12,
        ),
        ("`thickness_nm` is unusual: 200 nm", 17),
        ("Zn is usually an acceptor", 27),
        ("`temperature_k` is unusual: 4 K", 29),
    ];
    assert_eq!(remarks.len(), expected.len(), "{remarks:#?}");
    for (remark, (beginning, line)) in remarks.iter().zip(expected) {
        let place = remark.span().map(|span| Place::of(&text, span.start).line);
        assert!(remark.message().starts_with(beginning), "{remark:?}");
        assert_eq!(place, Some(line), "{remark:?}");
    }
    assert!(remarks.iter().all(|remark| !remark.advice().is_empty()));
}

#[test]
fn own_numbers_stay_and_the_reader_says_so() {
    let numbers = "[materials.house.numbers]\nlattice_nm = 0.565\ngap_ev = 1.42\nvalence_edge_ev = -0.8\nsplit_off_ev = 0.34\nelectron_mass = 0.067\nluttinger = [6.98, 2.06, 2.93]\nkane_energy_ev = 28.8\nac_ev = -7.17\nav_ev = 1.16\nb_ev = -2.0\nc11_gpa = 122.1\nc12_gpa = 56.6\n";
    let well = WELL.replace("GaAs", "house");
    let overrides = Overrides {
        temperature_k: Some(358.15),
        ..Overrides::default()
    };
    let reading = read_with(&format!("{HEAD}{numbers}{well}"), &overrides);
    let Substance::Own { crystal, index } = reading.stack.layers[0].material.substance else {
        panic!("own numbers were given");
    };
    assert_close(crystal.gap_ev, 1.42, "gap");
    for (got, want) in crystal.luttinger.into_iter().zip([6.98, 2.06, 2.93]) {
        assert_close(got, want, "luttinger");
    }
    assert!(crystal.gap_x_ev.is_infinite() && crystal.gap_l_ev.is_infinite());
    assert_eq!(index, None);
    let kept = Remark::OwnNumbersKept {
        names: vec!["house".to_owned()],
    };
    assert_eq!(reading.remarks, [kept]);
}

#[test]
fn the_schema_accepts_what_the_reader_accepts() {
    let schema = jsonschema::validator_for(&structure::schema()).expect("a schema");
    for entry in std::fs::read_dir("structures").expect("structures") {
        let path = entry.expect("entry").path();
        if path.extension().is_none_or(|extension| extension != "toml") {
            continue;
        }
        let text = std::fs::read_to_string(&path).expect("text");
        let table: toml::Table = toml::from_str(&text).expect("TOML");
        let file = serde_json::to_value(table).expect("JSON");
        let faults: Vec<String> = schema
            .iter_errors(&file)
            .map(|fault| format!("{}: {fault}", fault.instance_path()))
            .collect();
        assert!(faults.is_empty(), "{}: {faults:#?}", path.display());
    }
}

#[test]
fn the_schema_refuses_what_editors_can_see() {
    let schema = jsonschema::validator_for(&structure::schema()).expect("a schema");
    for (good, bad) in [
        ("thickness_nm = 8", "thicknes_nm = 8"),
        ("thickness_nm = 8", "thickness_nm = -8"),
        ("thickness_nm = 8", "thickness_nm = \"8\""),
        ("role = \"well\"", "role = \"wel\""),
        ("format = 1", "format = 2"),
        ("format = 1\n", ""),
    ] {
        let text = format!("{HEAD}{WELL}");
        let validity = |text: &str| {
            let table: toml::Table = toml::from_str(text).expect("TOML");
            schema.is_valid(&serde_json::to_value(table).expect("JSON"))
        };
        assert!(validity(&text));
        assert!(!validity(&text.replace(good, bad)), "{bad}");
    }
}

/// What common TOML editors know: `definitions`, no `const`, no `if`, no numeric exclusive bounds.
#[test]
fn the_schema_keeps_to_the_common_subset() {
    let schema = structure::schema().to_string();
    for word in ["\"$defs\"", "\"const\"", "\"if\"", "\"exclusiveMinimum\""] {
        assert!(!schema.contains(word), "{word}");
    }
}

/// Names of all properties that a schema speaks of.
fn property_names(schema: &serde_json::Value, names: &mut Vec<String>) {
    if let Some(properties) = schema["properties"].as_object() {
        names.extend(properties.keys().cloned());
    }
    if let Some(definitions) = schema["definitions"].as_object() {
        for definition in definitions.values() {
            property_names(definition, names);
        }
    }
}

/// The file that teaches every key does: set, or named in a comment where only one may be set.
#[test]
fn the_example_of_every_key_names_every_key() {
    let example = std::fs::read_to_string("structures/every-key.toml").expect("the example");
    let mut keys = Vec::new();
    property_names(&structure::schema(), &mut keys);
    assert!(keys.len() > 40, "{keys:?}");
    for key in keys {
        let forms = ["KEY = ", "[KEY]", "[KEY.", ".KEY]"];
        let named = forms
            .iter()
            .any(|form| example.contains(&form.replace("KEY", &key)));
        assert!(named, "{key}");
    }
}
