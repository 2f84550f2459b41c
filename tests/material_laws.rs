//! Laws that hold for any composition, and what a parameter file may and may not say.

use proptest::prelude::*;
use std::sync::LazyLock;
use stepwell::materials::{
    Composition, Crystal, Element, Elements, IndexModel, Offsets, Parameters, SolveError,
    solve_composition,
};
use stepwell::units::{photon_ev, wavelength_nm};

static SHIPPED: LazyLock<Parameters> = LazyLock::new(Parameters::shipped);

fn composition(formula: &str) -> Composition {
    Composition::parse(formula).unwrap_or_else(|fault| panic!("{formula}: {}", fault.message))
}

fn crystal(formula: &str, temperature_k: f64) -> Crystal {
    SHIPPED.crystal(&composition(formula), temperature_k, Offsets::Table)
}

/// Refuses NaN, keeps the sign, prints the miss.
fn assert_close(got: f64, want: f64, tolerance: f64, what: &str) {
    assert!(
        (got - want).abs() <= tolerance,
        "{what}: got {got}, want {want}, off by {:e}, tolerance {tolerance:e}",
        got - want
    );
}

fn numbers(crystal: &Crystal) -> Vec<(&'static str, f64)> {
    vec![
        ("lattice", crystal.lattice_nm),
        ("gap", crystal.gap_ev),
        ("gap to X", crystal.gap_x_ev),
        ("gap to L", crystal.gap_l_ev),
        ("valence edge", crystal.valence_edge_ev),
        ("spin-orbit splitting", crystal.split_off_ev),
        ("electron mass", crystal.electron_mass),
        ("gamma1", crystal.luttinger[0]),
        ("gamma2", crystal.luttinger[1]),
        ("gamma3", crystal.luttinger[2]),
        ("Kane energy", crystal.kane_energy_ev),
        ("ac", crystal.ac_ev),
        ("av", crystal.av_ev),
        ("b", crystal.b_ev),
        ("c11", crystal.c11_gpa),
        ("c12", crystal.c12_gpa),
    ]
}

/// Fractions of three elements, any of which may be absent.
fn sublattice() -> impl Strategy<Value = [f64; 3]> {
    (prop::array::uniform3(0.0..1.0f64), 1..8u8).prop_map(|(mut weights, present)| {
        for (place, weight) in weights.iter_mut().enumerate() {
            if present & (1 << place) == 0 {
                *weight = 0.0;
            } else {
                *weight += 0.01;
            }
        }
        let sum: f64 = weights.iter().sum();
        weights.map(|weight| weight / sum)
    })
}

/// Any composition that the shipped data cover.
fn covered() -> impl Strategy<Value = Composition> {
    (sublattice(), sublattice())
        .prop_map(|(group_iii, group_v)| Composition { group_iii, group_v })
        .prop_filter("P beside Sb has no data", |it| SHIPPED.covers(it).is_ok())
}

proptest! {
    #![proptest_config(ProptestConfig { rng_seed: proptest::test_runner::RngSeed::Fixed(1), failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn a_formula_reads_back_to_the_last_printed_decimal(composition in covered()) {
        let formula = composition.formula();
        let read = Composition::parse(&formula).expect("a printed formula");
        for element in Element::ALL {
            prop_assert!((read.fraction(element) - composition.fraction(element)).abs() <= 1.0001e-4);
        }
        prop_assert_eq!(read.formula(), formula);
    }

    #[test]
    fn the_order_of_elements_does_not_matter(composition in covered()) {
        let symbols: Vec<String> = Element::ALL
            .into_iter()
            .filter(|&element| composition.fraction(element) > 0.0)
            .map(|element| format!("{}{:.9}", element.symbol(), composition.fraction(element)))
            .collect();
        let forwards = symbols.concat();
        let backwards: String = symbols.into_iter().rev().collect();
        let one = SHIPPED.crystal(&Composition::parse(&forwards).expect("formula"), 250.0, Offsets::Table);
        let other = SHIPPED.crystal(&Composition::parse(&backwards).expect("formula"), 250.0, Offsets::Table);
        prop_assert_eq!(one, other);
    }

    #[test]
    fn no_formula_makes_the_reader_panic(text in "[AGIPSalnsbxyz0-9., \u{2080}\u{e9}()+-]{0,24}") {
        if let Err(fault) = Composition::parse(&text) {
            prop_assert!(fault.span.end <= text.len() && fault.span.start <= fault.span.end);
            prop_assert!(text.is_char_boundary(fault.span.start) && text.is_char_boundary(fault.span.end));
            prop_assert!(fault.help.is_some());
        }
    }

    #[test]
    fn an_alloy_runs_into_its_end_without_a_step(from in covered(), to in covered(), temperature_k in 0.0..400.0f64) {
        prop_assume!(SHIPPED.covers(&from.towards(&to, 0.5)).is_ok());
        let end = SHIPPED.crystal(&from, temperature_k, Offsets::Table);
        let near = SHIPPED.crystal(&from.towards(&to, 1e-9), temperature_k, Offsets::Table);
        for ((what, at), (_, beside)) in numbers(&end).into_iter().zip(numbers(&near)) {
            prop_assert!((at - beside).abs() < 1e-5 * at.abs().max(1.0), "{what}: {at}, {beside}");
        }
    }

    #[test]
    fn an_index_is_defined_at_any_photon_energy(
        composition in covered(),
        on in prop::sample::select(vec!["InP", "GaAs", "GaSb"]),
        photon_ev in -1.0..10.0f64,
    ) {
        let substrate = self::composition(on);
        let index = SHIPPED.index(&composition, Some(&substrate), photon_ev);
        prop_assert!((1.0..7.0).contains(&index), "{index}");
    }

    #[test]
    fn a_solved_composition_has_what_was_asked_for(
        family in prop::sample::select(vec!["AlGaInAs", "InGaAsP", "AlGaInP", "GaInAsSb"]),
        on in prop::sample::select(vec!["InP", "GaAs", "GaSb"]),
        strain in -0.02..0.02f64,
        share in 0.0..1.0f64,
    ) {
        let elements = Elements::parse(family).expect("a family");
        let substrate_nm = crystal(on, 300.0).lattice_nm;
        let range = match solve_composition(&SHIPPED, &elements, substrate_nm, Some(1.0), Some(strain)) {
            Err(SolveError::GapOutOfReach { shortest_nm: Some(shortest), longest_nm, .. }) =>
                [shortest, longest_nm.unwrap_or(10.0 * shortest)],
            Err(SolveError::StrainOutOfReach { .. }) => return Ok(()),
            other => return Err(TestCaseError::fail(format!("{other:?}"))),
        };
        let gap_nm = range[0] + (range[1] - range[0]) * share;
        let solutions = match solve_composition(&SHIPPED, &elements, substrate_nm, Some(gap_nm), Some(strain)) {
            Ok(composition) => vec![composition],
            Err(SolveError::Several { solutions, .. }) => solutions,
            Err(error) => return Err(TestCaseError::fail(error.to_string())),
        };
        for solution in solutions {
            let edges = SHIPPED.crystal(&solution, 300.0, Offsets::Table).on(substrate_nm);
            prop_assert!((edges.in_plane_strain - strain).abs() < 1e-9);
            prop_assert!((edges.gap_ev() - photon_ev(gap_nm)).abs() < 2e-6);
        }
    }
}

#[test]
fn a_ternary_of_one_kind_is_its_compound() {
    // the numbers of the compounds as the data file states them
    let gaas = crystal("GaAs", 0.0);
    assert_close(gaas.gap_ev, 1.519, 1e-12, "gap at 0 K");
    assert_close(gaas.luttinger[0], 6.98, 1e-12, "gamma1");
    assert_close(gaas.luttinger[1], 2.06, 1e-12, "gamma2");
    assert_close(gaas.luttinger[2], 2.93, 1e-12, "gamma3");
    assert_eq!(crystal("Al0Ga1As1", 77.0), crystal("GaAs", 77.0));
}

#[test]
fn compression_widens_the_gap_of_gaas() {
    let gaas = crystal("GaAs", 300.0);
    let squeezed = gaas.on(0.99 * gaas.lattice_nm);
    // tr = 2 ε∥ (1 − C12/C11); the gap at the band mean moves by (a_c − a_v) tr, a_v > 0
    let trace = -0.02 * (1.0 - gaas.c12_gpa / gaas.c11_gpa);
    let widened = squeezed.conduction_ev - squeezed.valence_mean_ev - gaas.gap_ev;
    assert_close(
        widened,
        -8.33 * trace,
        1e-9,
        "the gap of GaAs moves by -8.33 eV tr",
    );
    assert!(squeezed.valence_mean_ev < gaas.valence_edge_ev);
    assert!(squeezed.heavy_ev > squeezed.light_ev);
}

#[test]
fn gap_laws_with_corners() {
    // GaP: E(0) + A (1 − coth(θ/T)); InP X: E(0) − α T, for β = 0
    let gap = 2.886 + 0.1081 * (1.0 - (164.0f64 / 300.0).tanh().recip());
    assert_close(crystal("GaP", 300.0).gap_ev, gap, 1e-12, "GaP");
    assert_close(crystal("GaP", 0.0).gap_ev, 2.886, 1e-12, "GaP at 0 K");
    assert_close(
        crystal("InP", 200.0).gap_x_ev,
        2.384 - 0.074,
        1e-12,
        "InP X",
    );
    assert_close(crystal("InP", 0.0).gap_x_ev, 2.384, 1e-12, "InP X at 0 K");
}

#[test]
fn offset_rules_by_substrate() {
    let (gaas, inp) = (composition("GaAs"), composition("InP"));
    let ingaasp = composition("Ga0.3In0.7As0.6P0.4");
    let algainas = composition("Al0.2Ga0.27In0.53As");
    assert_eq!(
        SHIPPED.offsets(&gaas, [&algainas], None, 300.0),
        Offsets::TableUnbowedInGaAs
    );
    assert_eq!(
        SHIPPED.offsets(&inp, [&ingaasp, &algainas], None, 300.0),
        Offsets::Table
    );
    let rule = SHIPPED.offsets(&inp, [&ingaasp, &inp], None, 300.0);
    let layer = SHIPPED.crystal(&ingaasp, 300.0, rule);
    let bare = SHIPPED.crystal(&inp, 300.0, rule);
    assert_close(
        bare.valence_edge_ev,
        crystal("InP", 300.0).valence_edge_ev,
        1e-12,
        "the anchor stays",
    );
    let step = layer.valence_edge_ev - bare.valence_edge_ev;
    assert_close(
        step,
        0.59 * (bare.gap_ev - layer.gap_ev),
        1e-12,
        "59 % falls to the valence band",
    );
    // on GaAs the valence edge of InGaAs runs straight, inside a quaternary too
    let unbowed = SHIPPED.crystal(&algainas, 300.0, Offsets::TableUnbowedInGaAs);
    let bowed = SHIPPED.crystal(&algainas, 300.0, Offsets::Table);
    assert_close(
        bowed.valence_edge_ev - unbowed.valence_edge_ev,
        0.38 * 0.27 * 0.53,
        1e-12,
        "the InGaAs share of the bowing",
    );
}

#[test]
fn every_number_has_a_source_and_a_standing() {
    let table = SHIPPED.table();
    let mut count = 0;
    for material in table.binaries.values().chain(table.ternaries.values()) {
        for (word, entry) in &material.entries {
            let name = &material.name;
            assert!(
                table.sources.contains_key(&entry.source),
                "{name} {word}: {}",
                entry.source
            );
            assert!(
                SHIPPED.status_meaning(&entry.status).is_some(),
                "{name} {word}: {}",
                entry.status
            );
            count += 1;
        }
        for alternate in &material.alternates {
            assert!(table.sources.contains_key(&alternate.source));
            assert!(!alternate.note.is_empty());
        }
    }
    assert_eq!(table.binaries.len(), 9);
    assert_eq!(table.ternaries.len(), 15);
    assert!(count > 300, "{count}");
    for rule in SHIPPED.offset_rules() {
        assert!(table.sources.contains_key(&rule.source), "{}", rule.well);
    }
    for model in [
        IndexModel::AlGaAs,
        IndexModel::InGaAs,
        IndexModel::InGaAsPOnInP,
        IndexModel::EqualGapOnInP,
        IndexModel::InGaAsP,
        IndexModel::AlGaInAsOnInP,
        IndexModel::Compounds,
    ] {
        let statement = SHIPPED.index_statement(model);
        assert!(table.sources.contains_key(&statement.source), "{model:?}");
        assert!(SHIPPED.status_meaning(&statement.status).is_some());
    }
}

#[test]
fn one_digest_for_one_set_of_numbers() {
    let shipped = SHIPPED.sha256();
    let lay = |text: &str| {
        Parameters::shipped()
            .with_overlay(text, "house.toml")
            .unwrap_or_else(|faults| panic!("{faults:?}"))
    };
    let restated = lay("# a comment\n[binary.GaAs]\nep = 28.8\nsource.default = \"V2001\"\n");
    assert_eq!(restated.sha256(), shipped);
    let changed = lay("[binary.GaAs]\nep = 25.7\n[binary.GaAs.source]\ndefault = \"house\"\n");
    assert_ne!(changed.sha256(), shipped);
    assert_eq!(changed.files(), ["iii_v.toml", "house.toml"]);
    let gaas = changed.crystal(&composition("GaAs"), 300.0, Offsets::Table);
    assert_close(gaas.kane_energy_ev, 25.7, 1e-12, "the number laid over");
    let entry =
        &changed.table().binaries[&Elements::parse("GaAs").expect("elements")].entries["ep"];
    assert_eq!(
        (entry.source.as_str(), entry.status.as_str()),
        ("house", "U")
    );
}

#[test]
fn a_ternary_laid_over_closes_a_gap_in_the_data() {
    let both = composition("GaP0.3Sb0.7");
    let missing = SHIPPED.covers(&both).expect_err("no data");
    assert_eq!(missing.ternary, "GaPSb");
    assert!(missing.to_string().contains("iii_v.toml"), "{missing}");
    let text = "[ternary.GaPSb]\nend_x = \"GaP\"\nend_1mx = \"GaSb\"\neg_gamma = 2.7\nsource.default = \"house\"\n";
    let with = Parameters::shipped()
        .with_overlay(text, "house.toml")
        .expect("a ternary");
    assert!(with.covers(&both).is_ok());
    let straight = SHIPPED.crystal(&both, 300.0, Offsets::Table).gap_ev;
    let bowed = with.crystal(&both, 300.0, Offsets::Table).gap_ev;
    assert_close(straight - bowed, 2.7 * 0.21, 1e-12, "its bowing");
}

#[test]
fn bowings_that_vary_follow_the_end_they_are_stated_for() {
    // the same law of AlGaAs, stated once from each end: C(x) = -0.127 + 1.31 x
    let other_way = "[ternary.GaPSb]\nend_x = \"GaSb\"\nend_1mx = \"GaP\"\neg_gamma = [1.183, -1.31]\nsource.default = \"a\"\n";
    let one_way = "[ternary.GaPSb]\nend_x = \"GaP\"\nend_1mx = \"GaSb\"\neg_gamma = [-0.127, 1.31]\nsource.default = \"a\"\n";
    let gap = |text: &str| {
        let parameters = Parameters::shipped()
            .with_overlay(text, "a.toml")
            .expect("a ternary");
        parameters
            .crystal(&composition("GaP0.3Sb0.7"), 300.0, Offsets::Table)
            .gap_ev
    };
    assert_close(gap(other_way), gap(one_way), 1e-12, "either way");
    let straight = SHIPPED
        .crystal(&composition("GaP0.3Sb0.7"), 300.0, Offsets::Table)
        .gap_ev;
    let bowing = 0.21 * (-0.127 + 1.31 * 0.3);
    assert_close(gap(one_way), straight - bowing, 1e-12, "its size");
}

/// Faults of a file laid over: what each says and where.
fn refused(text: &str) -> Vec<(String, String)> {
    let faults = Parameters::shipped()
        .with_overlay(text, "house.toml")
        .expect_err("refused");
    faults
        .into_iter()
        .map(|fault| (text[fault.span].to_owned(), fault.message))
        .collect()
}

#[test]
fn faults_of_a_parameter_file() {
    let cases = [
        (
            "[binary.GaAs]\nep = 25.7\n",
            "ep",
            "ep of GaAs has no source",
        ),
        (
            "[binary.GaAs]\ngamm1 = 7\nsource.default = \"a\"\n",
            "gamm1",
            "there is no quantity of GaAs \"gamm1\"",
        ),
        ("[binary.GsAs]\n", "GsAs", "there is no compound \"GsAs\""),
        ("[ternary.GaAs]\n", "GaAs", "there is no ternary \"GaAs\""),
        (
            "[binary.InAs]\nep = nan\nsource.default = \"a\"\n",
            "nan",
            "a finite number expected, not nan",
        ),
        (
            "[binary.InAs]\nep = \"21\"\nsource.default = \"a\"\n",
            "\"21\"",
            "a finite number expected, not \"21\"",
        ),
        ("[index]\n", "[index]", "there is no table \"index\""),
        (
            "[units]\nc11 = \"dyn/cm2\"\n",
            "\"dyn/cm2\"",
            "c11 is taken in GPa, not in dyn/cm2",
        ),
        (
            "[binary.InAs]\nav = 1.0\nsource.default = \"a\"\n",
            "av",
            "InAs in house.toml: av = 1 has the other sign: the edge moves by -av*tr, so av is negative",
        ),
        (
            "[binary.GaAs]\nc12 = 200.0\nsource.default = \"a\"\n",
            "c12",
            "GaAs in house.toml: c11 = 122.1 and c12 = 200 make no stable crystal: c11 > c12",
        ),
        (
            "[ternary.InGaAs]\nend_x = \"GaAs\"\nend_1mx = \"InAs\"\n",
            "\"GaAs\"",
            "InGaAs has its ends the other way elsewhere",
        ),
        (
            "[ternary.GaPSb]\neg_gamma = 2.7\nsource.default = \"a\"\n",
            "GaPSb",
            "GaPSb does not say between which compounds it lies",
        ),
    ];
    for (text, place, message) in cases {
        let (found, said) = &refused(text)[0];
        assert_eq!(said, message);
        assert!(
            found == place || place.contains(found.as_str()),
            "{message}: at {found:?}"
        );
    }
}

#[test]
fn every_fault_of_a_parameter_file_at_once() {
    let text = "[binary.GaAs]\nep = inf\ngamm1 = 1\n[binary.Ga]\n[shells]\n";
    assert_eq!(refused(text).len(), 4);
}

#[test]
fn faults_of_a_formula() {
    let cases = [
        (
            "AlxGa1-xAs",
            "Alx",
            "\"Alx\" has a letter where its fraction belongs",
        ),
        ("Ga1-xAlxAs", "1-", "\"1-\" is no fraction"),
        (
            "In0.5Ga0.4As",
            "In0.5Ga0.4",
            "the fractions of In, Ga sum to 0.9, 0.1 too little",
        ),
        (
            "In0.5Ga0.6As",
            "In0.5Ga0.6",
            "the fractions of In, Ga sum to 1.1, 0.1 too much",
        ),
        ("InGaAs", "In", "In has no fraction"),
        ("GaN", "N", "\"N\" is no element of the parameter data"),
        (
            "In0.5Ga0.5",
            "In0.5Ga0.5",
            "the formula has none of P, As or Sb",
        ),
        ("GaGaAs", "Ga", "Ga stands twice in the formula \"GaGaAs\""),
        ("In0,5Ga0.5As", "0,5", "\"0,5\" is no fraction"),
        ("  gaas", "gaas", "\"gaas\" is no element"),
        ("Ga1.5As", "1.5", "the fraction 1.5 is above 1"),
    ];
    for (formula, place, message) in cases {
        let fault = Composition::parse(formula).expect_err("refused");
        assert_eq!(fault.message, message);
        assert_eq!(&formula[fault.span], place, "{formula}");
    }
    assert!(Composition::parse("").is_err());
    let third = composition("Al0.333333Ga0.333333In0.333333As");
    assert_close(third.group_iii.iter().sum(), 1.0, 1e-15, "normalised");
    assert_eq!(third.formula().matches("0.333").count(), 3);
}

#[test]
fn conditions_that_do_not_settle_a_composition() {
    let substrate_nm = crystal("InP", 300.0).lattice_nm;
    let solve = |family: &str, gap_nm, strain| {
        let elements = Elements::parse(family).expect("a family");
        solve_composition(&SHIPPED, &elements, substrate_nm, gap_nm, strain)
    };
    let few = solve("AlGaInAs", Some(1300.0), None).expect_err("one of two");
    assert_eq!(
        few.to_string(),
        "AlGaInAs has 2 fractions to choose, and only a gap is given"
    );
    assert_eq!(few.help(), "give its strain too");
    let many = solve("InGaAs", Some(1600.0), Some(0.0)).expect_err("two of one");
    assert!(matches!(many, SolveError::TooMany { .. }), "{many}");
    let beyond = solve("InGaAs", None, Some(0.05)).expect_err("5 % tensile");
    assert_eq!(
        beyond.to_string(),
        "GaInAs reaches from 3.113 % compressive to 3.829 % tensile on this substrate, not 5.000 % tensile"
    );
    let Err(SolveError::Several { solutions, .. }) = solve("GaAsSb", Some(1700.0), None) else {
        panic!("GaAsSb bows enough to have a gap of 1700 nm on InP twice");
    };
    assert_eq!(solutions.len(), 2);
    for solution in solutions {
        let gap_ev = SHIPPED
            .crystal(&solution, 300.0, Offsets::Table)
            .on(substrate_nm)
            .gap_ev();
        assert_close(wavelength_nm(gap_ev), 1700.0, 2e-3, &solution.formula());
    }
    // the end of the line itself, and the compound without conditions
    let end = wavelength_nm(crystal("InP", 300.0).gap_ev);
    let inp = solve("InGaAsP", Some(end), Some(0.0)).expect("the end");
    assert_eq!(inp.formula(), "InP");
    assert_eq!(
        solve("InP", None, None).expect("a compound").formula(),
        "InP"
    );
}

#[test]
fn closed_forms_of_the_index_by_alloy() {
    let inp = composition("InP");
    let gaas = composition("GaAs");
    let model = |formula: &str, substrate: &Composition, nm: f64| {
        let refraction = SHIPPED.refraction(&composition(formula), Some(substrate), photon_ev(nm));
        (refraction.model, refraction.advice.len())
    };
    let cases = [
        ("Al0.3Ga0.7As", &gaas, 980.0, IndexModel::AlGaAs, 0),
        ("In0.2Ga0.8As", &gaas, 1300.0, IndexModel::InGaAs, 0),
        ("In0.7Ga0.3As", &inp, 3000.0, IndexModel::InGaAs, 1),
        ("InP", &inp, 1550.0, IndexModel::InGaAsPOnInP, 0),
        (
            "Ga0.2755In0.7245As0.6P0.4",
            &inp,
            1550.0,
            IndexModel::InGaAsPOnInP,
            0,
        ),
        ("Ga0.2In0.8As0.8P0.2", &inp, 1900.0, IndexModel::InGaAsP, 0),
        ("GaAs0.9P0.1", &gaas, 980.0, IndexModel::InGaAsP, 0),
        ("Al0.48In0.52As", &inp, 1550.0, IndexModel::AlGaInAsOnInP, 0),
        ("Al0.48In0.52As", &inp, 860.0, IndexModel::EqualGapOnInP, 2),
        (
            "Al0.05Ga0.415In0.535As",
            &inp,
            1700.0,
            IndexModel::EqualGapOnInP,
            0,
        ),
        (
            "Al0.2Ga0.1In0.7As",
            &inp,
            1550.0,
            IndexModel::AlGaInAsOnInP,
            1,
        ),
        ("GaAs0.5Sb0.5", &inp, 2500.0, IndexModel::Compounds, 1),
    ];
    for (formula, substrate, nm, wanted, remarks) in cases {
        let (got, advice) = model(formula, substrate, nm);
        assert_eq!((got, advice), (wanted, remarks), "{formula} at {nm} nm");
    }
    assert!(SHIPPED.index(&inp, Some(&inp), f64::NAN).is_finite());
    assert!(SHIPPED.index(&inp, None, f64::INFINITY).is_finite());
}

#[test]
fn a_description_names_the_source_of_each_number() {
    let ingaas = composition("In0.2Ga0.8As");
    let gaas = composition("GaAs");
    let description = SHIPPED
        .describe(&ingaas, Some(&gaas), 298.15, Some(1.26))
        .expect("covered");
    let mut figures = description.sections.iter().flat_map(|it| &it.figures);
    assert!(figures.clone().count() > 20);
    for figure in figures.clone() {
        assert!(!figure.sources.is_empty(), "{}", figure.name);
        for source in &figure.sources {
            assert!(description.citations.contains_key(source), "{source}");
        }
        for status in &figure.statuses {
            assert!(!description.statuses[status].is_empty(), "{status}");
        }
        assert!(figure.values.iter().all(|value| value.is_finite()));
    }
    let of = |name: &str| {
        figures
            .clone()
            .find(|figure| figure.name == name)
            .unwrap_or_else(|| panic!("{name}"))
            .values[0]
    };
    // (a − a_s)/a_s, and the same across the strained layer: 1 + 2 C12/C11 times as large
    let relaxed = of("mismatch, relaxed");
    assert_close(relaxed, 14325.0, 10.0, "relaxed mismatch");
    let stiffness = 1.0 + 2.0 * description.crystal.c12_gpa / description.crystal.c11_gpa;
    assert_close(
        of("mismatch, perpendicular"),
        relaxed * stiffness,
        1.0,
        "perpendicular",
    );
    assert_eq!(description.index.len(), 2);
    assert!(figures.next().is_some());
    let families = SHIPPED.families();
    assert_eq!(families.len(), 24);
    assert!(
        families
            .iter()
            .all(|family| family.gap_ev[0] < family.gap_ev[1] + 1e-12)
    );
}
