//! What moves, what gives way, and the file that comes of it.

use crate::{Design, formula_well, moving, prescribed_well};
use stepwell::design::{Move, Quantity};
use stepwell::materials::Element;

fn share(name: &str, element: Element) -> Move {
    moving(name, Quantity::Share(element), 0.1, 0.3)
}

fn giving_way(text: &str, moves: Vec<Move>) -> Vec<String> {
    Design::new(text.to_owned()).variation(moves).giving_way()
}

#[test]
fn what_gives_way_is_said_in_whole_sentences() {
    let prescribed = prescribed_well(6.0, 1400.0, -1.0, "single");
    let phosphide = prescribed.replacen("AlGaInAs", "InGaAsP", 1);
    let by_formula = prescribed.replacen(
        "alloy = \"AlGaInAs\"    # any order\ngap_nm = 1400\ncompressive_percent = 1",
        "formula = \"Al0.2Ga0.2In0.6As\"",
        1,
    );
    let strain = || moving("well", Quantity::Strain, -1.5, 0.0);
    let gap = || moving("well", Quantity::Gap, 1300.0, 1500.0);
    let thickness = moving("well", Quantity::Thickness, 3.0, 9.0);
    for (text, moves, sentences) in [
        (&prescribed, vec![thickness], &[][..]),
        (
            &prescribed,
            vec![strain()],
            &["well: the composition follows; its gap stays 1400.0 nm"],
        ),
        (
            &prescribed,
            vec![gap()],
            &["well: the composition follows; its strain stays 1.000 % compressive"],
        ),
        (
            &prescribed,
            vec![gap(), strain()],
            &["well: the composition follows"],
        ),
        (
            &prescribed,
            vec![share("well", Element::Ga)],
            &[
                "well: Ga at the expense of Al and In, in the proportion in which its strain stays \
               1.000 % compressive",
            ],
        ),
        (
            &phosphide,
            vec![share("well", Element::P)],
            &[
                "well: P at the expense of As; Ga and In follow, so that its strain stays 1.000 % \
               compressive",
            ],
        ),
        (
            &phosphide,
            vec![share("well", Element::P), share("well", Element::Ga)],
            &["well: Ga at the expense of In, P at the expense of As"],
        ),
        (
            &by_formula,
            vec![share("well", Element::Al)],
            &["well: Al at the expense of Ga and In, whose ratio stays"],
        ),
        (
            &by_formula,
            vec![share("well", Element::Al), share("well", Element::Ga)],
            &["well: Al and Ga at the expense of In"],
        ),
    ] {
        assert_eq!(giving_way(text, moves), sentences);
    }
    let ternary = formula_well(8.0, 0.2);
    for (moves, sentence) in [
        (
            vec![share("well", Element::In)],
            "In0.2Ga0.8As: In at the expense of Ga",
        ),
        (vec![strain()], "In0.2Ga0.8As: the composition follows"),
    ] {
        assert_eq!(giving_way(&ternary, moves), [sentence]);
    }
}

#[test]
fn a_file_differs_in_what_moved_and_in_nothing_else() {
    let text = prescribed_well(6.0, 1400.0, -1.0, "single");
    let design = Design::new(text.clone());
    let variation = design.variation(vec![
        moving("well", Quantity::Thickness, 3.0, 9.0),
        moving("well", Quantity::Strain, -1.5, 1.0),
    ]);
    let moved = variation.text(&text, &[4.5, 0.25]).expect("a structure");
    let expected = text
        .replace(
            "thickness_nm = 6 # the width",
            "thickness_nm = 4.5 # the width",
        )
        .replace("compressive_percent = 1 ", "tensile_percent = 0.25 ");
    assert_eq!(moved, expected);
    // A formula is replaced where it stands, its comment stays.
    let text = formula_well(8.0, 0.2);
    let design = Design::new(text.clone());
    let variation = design.variation(vec![share("well", Element::In)]);
    let moved = variation.text(&text, &[0.123_456_7]).expect("a structure");
    assert_eq!(
        moved,
        text.replace("In0.2Ga0.8As", "In0.123457Ga0.876543As")
    );
}
