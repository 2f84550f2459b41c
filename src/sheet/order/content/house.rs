//! What stays in the house.

use super::{Block, Digits, Line, Row, Section, Span, Table, said, words};
use crate::sheet::order::document::Document;
use serde_json::Value;

/// Adds the sections of the house's copy.
pub(super) fn add(document: &Document, sections: &mut Vec<Section>) {
    sections.extend([
        device(document),
        emission(document),
        budget(document),
        gain(document),
        spread(document),
        threshold(),
        findings(document),
        model(document),
        questions(document),
    ]);
}

fn section(heading: &str, blocks: Vec<Block>) -> Section {
    Section {
        heading: heading.to_owned(),
        blocks,
    }
}

fn one(cell: Span) -> Vec<Line> {
    vec![vec![cell]]
}

fn cells(cells: Vec<Vec<Line>>) -> Row {
    Row::Cells {
        cells,
        is_changed: false,
    }
}

/// Words of the record, each on a line.
fn told(document: &Document, pointer: &str) -> Vec<Line> {
    let items = document.list_at(pointer).iter().filter_map(Value::as_str);
    items.map(|item| vec![said(item)]).collect()
}

fn device(document: &Document) -> Section {
    let mut rows = vec![(
        "Structure".to_owned(),
        one(said(document.text_at("/house/title"))),
    )];
    rows.extend(
        document
            .field("purpose", "")
            .map(|lines| ("Purpose".to_owned(), lines)),
    );
    let mut blocks = vec![
        Block::Paragraph(vec![words(
            "From here to the stamp: for the house only. None of it is on the grower’s copy.",
        )]),
        Block::Pairs(rows),
    ];
    blocks.extend(document.field("house_notes", "").map(|items| Block::List {
        name: vec![words("Notes of the house:")],
        items,
        is_ranked: false,
    }));
    section("Device", blocks)
}

fn emission(document: &Document) -> Section {
    let mut blocks = Vec::new();
    let heading = "Emission at working conditions";
    if document.map_at("/house/emission").is_none() {
        blocks.push(Block::Paragraph(vec![
            Span::Blank,
            words(" No levels came out."),
        ]));
        return section(heading, blocks);
    }
    let row = |name: &str, key: &str| {
        cells(vec![
            one(words(name)),
            one(document.shown(format!("/house/emission/{key}"), Digits::Fixed(2))),
        ])
    };
    blocks.push(Block::Table(Table {
        caption: vec![
            words("Wavelengths in vacuum at "),
            document.shown("/house/temperature_k", Digits::Fixed(2)),
            words(" K, as calculated; house offsets are not in them."),
        ],
        heads: vec!["Of what", "nm"],
        widths: vec![4, 1],
        rows: vec![
            row("edge of the first transition", "first_transition_nm"),
            row("photoluminescence peak at low injection", "pl_nm"),
            row(
                "peak of gain, without gap shrinkage",
                "gain_peak_unshrunk_nm",
            ),
            row("peak of gain at the working density", "gain_peak_nm"),
        ],
    }));
    blocks.push(Block::Figure(1));
    section(heading, blocks)
}

fn budget(document: &Document) -> Section {
    let terms = document.list_at("/house/budget");
    let rows = (0..terms.len())
        .filter(|index| {
            let at = format!("/house/budget/{index}/adds_mev");
            document.number_at(&at) != Some(0.0)
        })
        .map(|index| {
            let at = |key: &str| format!("/house/budget/{index}/{key}");
            cells(vec![
                one(words(document.text_at(&at("term")))),
                one(document.shown(at("adds_mev"), Digits::Fixed(1))),
                one(document.shown(at("sum_mev"), Digits::Fixed(1))),
                one(document.shown(at("sum_nm"), Digits::Fixed(1))),
            ])
        })
        .collect();
    section(
        "From the bulk gap to the first transition",
        vec![Block::Table(Table {
            caption: vec![words("The budget, term by term; no gap shrinkage.")],
            heads: vec!["Term", "adds, meV", "sum, meV", "sum as nm"],
            widths: vec![6, 2, 2, 2],
            rows,
        })],
    )
}

fn gain(document: &Document) -> Section {
    let heading = "Gain by carrier density";
    let densities = document.list_at("/house/densities");
    if densities.is_empty() {
        return section(
            heading,
            vec![Block::Paragraph(vec![
                Span::Blank,
                words(" No spectra came out."),
            ])],
        );
    }
    let rows = (0..densities.len())
        .map(|index| {
            let shown = |key: &str, digits| {
                one(document.shown(format!("/house/densities/{index}/{key}"), digits))
            };
            cells(vec![
                shown("density_cm3", Digits::Power(4)),
                shown("te_gain_cm", Digits::Fixed(0)),
                shown("te_peak_nm", Digits::Fixed(1)),
                shown("tm_gain_cm", Digits::Fixed(0)),
                shown("tm_peak_nm", Digits::Fixed(1)),
                shown("emission_nm", Digits::Fixed(1)),
                shown("radiative_current_a_cm2", Digits::Fixed(1)),
            ])
        })
        .collect();
    let mut law = vec![
        words("Transparency at "),
        document.shown("/house/transparency_cm3", Digits::Power(4)),
        words(" cm⁻³."),
    ];
    if document.map_at("/house/law").is_some() {
        law.extend([
            words(format!(
                " Logarithmic law, {}: ",
                document.text_at("/house/law/polarization")
            )),
            document.shown("/house/law/g0_cm", Digits::Fixed(0)),
            words(" cm⁻¹ × ln(N / "),
            document.shown("/house/law/transparency_cm3", Digits::Power(4)),
            words(" cm⁻³)."),
        ]);
    }
    section(
        heading,
        vec![
            Block::Table(Table {
                caption: vec![words(
                    "Gain of the well material, before any confinement factor; densities per volume of \
                     the wells, currents of all wells; wavelengths in vacuum with gap shrinkage.",
                )],
                heads: vec![
                    "Density, cm⁻³",
                    "TE, cm⁻¹",
                    "TE at, nm",
                    "TM, cm⁻¹",
                    "TM at, nm",
                    "Emission, nm",
                    "Radiative, A/cm²",
                ],
                widths: vec![3, 2, 2, 2, 2, 3, 3],
                rows,
            }),
            Block::Paragraph(law),
            Block::Figure(2),
        ],
    )
}

fn spread(document: &Document) -> Section {
    let heading = "Sensitivities and yield";
    if document.map_at("/house/spread").is_none() {
        return section(
            heading,
            vec![Block::Paragraph(vec![
                Span::Blank,
                words(" Left blank; see what is left blank below."),
            ])],
        );
    }
    let shown = |key: &str, digits| document.shown(format!("/house/spread/{key}"), digits);
    let count = document.list_at("/house/spread/sensitivities").len();
    let rows = (0..count)
        .map(|index| {
            let at = |key: &str| format!("/house/spread/sensitivities/{index}/{key}");
            cells(vec![
                one(words(document.text_at(&at("variable")))),
                vec![vec![
                    document.shown(at("sigma"), Digits::Plain),
                    words(format!(" {}", document.text_at(&at("unit")))),
                ]],
                one(document.shown(at("nm"), Digits::Fixed(2))),
                one(document.shown(at("variance_percent"), Digits::Fixed(1))),
            ])
        })
        .collect();
    let table = Table {
        caption: vec![words(format!(
            "What one sigma of growth does to the {}; solved with {} valence bands.",
            document.text_at("/house/spread/of"),
            document.text_at("/house/spread/bands")
        ))],
        heads: vec!["Variable", "One sigma", "moves, nm", "of the variance, %"],
        widths: vec![3, 2, 2, 3],
        rows,
    };
    let mut wafers = vec![
        words("Designed "),
        shown("nominal_nm", Digits::Fixed(2)),
        words(" nm in vacuum, sigma "),
        shown("sigma_nm", Digits::Fixed(2)),
        words(" nm over "),
        shown("draws", Digits::Plain),
        words(" wafers drawn (seed "),
        shown("seed", Digits::Plain),
        words("). "),
    ];
    if document.number_at("/house/spread/yield_percent").is_some() {
        wafers.extend([
            words("Inside "),
            shown("target_nm", Digits::Fixed(2)),
            words(" ± "),
            shown("tolerance_nm", Digits::Plain),
            words(" nm: "),
            shown("yield_percent", Digits::Fixed(1)),
            words(" %; with an error of "),
            shown("model_sigma_nm", Digits::Plain),
            words(" nm of the calculation itself "),
            shown("yield_with_model_error_percent", Digits::Fixed(1)),
            words(" %."),
        ]);
    } else {
        wafers.push(words(
            "No yield: the file has no window for this wavelength.",
        ));
    }
    section(
        heading,
        vec![
            Block::Table(table),
            Block::Paragraph(wafers),
            Block::Figure(3),
        ],
    )
}

fn threshold() -> Section {
    section(
        "Threshold",
        vec![Block::Pairs(vec![
            ("Threshold density".to_owned(), one(Span::Blank)),
            ("Threshold current density".to_owned(), one(Span::Blank)),
        ])],
    )
}

fn findings(document: &Document) -> Section {
    let count = document.list_at("/house/findings").len();
    let rows = (0..count)
        .map(|index| {
            let at = |key: &str| format!("/house/findings/{index}/{key}");
            let mut message = vec![vec![said(document.text_at(&at("message")))]];
            let advice = document.text_at(&at("advice"));
            if !advice.is_empty() {
                message.push(vec![words("→ "), said(advice)]);
            }
            cells(vec![
                one(words(document.text_at(&at("code")))),
                one(words(document.text_at(&at("standing")))),
                message,
            ])
        })
        .collect();
    section(
        "Remarks and findings",
        vec![Block::Table(Table {
            caption: vec![words(
                "The structure against physics and the limits of the house: ok, stated (a figure \
                 without a limit), look (worth a look), outside.",
            )],
            heads: vec!["Finding", "Stands", "In words"],
            widths: vec![3, 2, 11],
            rows,
        })],
    )
}

fn model(document: &Document) -> Section {
    let sources = document.list_at("/house/sources");
    let rows = (0..sources.len())
        .map(|index| {
            let at = format!("/house/sources/{index}");
            let count = document.list_at(&format!("{at}/citations")).len();
            let mut numbers: Line = Vec::new();
            for place in 0..count {
                if place > 0 {
                    numbers.push(words(", "));
                }
                numbers.push(document.shown(format!("{at}/citations/{place}"), Digits::Plain));
            }
            cells(vec![
                one(said(document.text_at(&format!("{at}/formula")))),
                vec![numbers],
            ])
        })
        .collect();
    let mut blocks = vec![Block::List {
        name: vec![words("Switches of the model:")],
        items: told(document, "/house/model"),
        is_ranked: false,
    }];
    if !sources.is_empty() {
        blocks.push(Block::Table(Table {
            caption: vec![words("Which sources the numbers of each alloy come from.")],
            heads: vec!["Alloy", "Sources"],
            widths: vec![2, 3],
            rows,
        }));
        let citations = document
            .list_at("/house/citations")
            .iter()
            .enumerate()
            .filter_map(|(index, citation)| {
                let number = words(format!("[{}] ", index + 1));
                Some(vec![number, said(citation.as_str()?)])
            });
        blocks.push(Block::List {
            name: vec![words("Sources:")],
            items: citations.collect(),
            is_ranked: false,
        });
    }
    section("Model and parameters", blocks)
}

fn questions(document: &Document) -> Section {
    let mut blocks = Vec::new();
    blocks.extend(
        document
            .field("open_questions", "")
            .map(|items| Block::List {
                name: vec![words("Still to be settled:")],
                items,
                is_ranked: false,
            }),
    );
    blocks.push(Block::List {
        name: vec![words("Left blank:")],
        items: told(document, "/house/blank"),
        is_ranked: false,
    });
    section("Open questions", blocks)
}
