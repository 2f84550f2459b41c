//! What both copies say.

use super::{Block, Digits, Line, Row, Section, Span, Table, said, words};
use crate::materials::Sense;
use crate::sheet::order::document::Document;
use crate::structure::{OrderField, order_fields};
use serde_json::Value;

/// Fields whose labels tell nothing without their heading, and where they stand.
const HEADER: [&str; 14] = [
    "id",
    "revision",
    "status",
    "date",
    "quantity",
    "quantity_note",
    "author",
    "checker",
    "contact",
    "supersedes",
    "previous_runs",
    "growth_method",
    "confidentiality",
    "export_classification",
];

/// Everything but the stamp.
pub(super) fn sections(document: &Document) -> Vec<Section> {
    let mut sections = vec![header(document)];
    sections.extend(changes(document));
    sections.push(substrate(document));
    sections.push(layers(document));
    sections.push(targets(document));
    sections.push(acceptance(document));
    sections.push(handling(document));
    sections.extend(notes(document));
    sections.push(cautions(document));
    sections
}

fn section(heading: &str, blocks: Vec<Block>) -> Section {
    Section {
        heading: heading.to_owned(),
        blocks,
    }
}

fn label(field: &OrderField) -> String {
    field.label.to_owned()
}

/// Fields under their labels; what an order does without is left out.
fn pairs<'a>(
    document: &Document,
    fields: impl Iterator<Item = &'a OrderField>,
) -> Vec<(String, Vec<Line>)> {
    fields
        .filter_map(|field| Some((label(field), document.field(field.path, field_unit(field))?)))
        .collect()
}

/// Units as they are printed: those of the file are in letters that every keyboard has.
fn field_unit(field: &OrderField) -> &'static str {
    match field.unit() {
        "cm^-3" => "cm⁻³",
        "C" => "°C",
        unit => unit,
    }
}

fn header(document: &Document) -> Section {
    let of_header = HEADER
        .iter()
        .filter_map(|path| order_fields().find(|field| field.path == *path));
    let mut blocks = vec![Block::Pairs(pairs(document, of_header))];
    let asked: Vec<&str> = document
        .list_at("/asked_for")
        .iter()
        .filter_map(Value::as_str)
        .collect();
    if !asked.is_empty() {
        blocks.push(Block::Paragraph(vec![
            Span::Asked,
            words(" To be filled in before this sheet is issued: "),
            said(&format!("{}.", asked.join("; "))),
        ]));
    }
    section("Order", blocks)
}

fn changes(document: &Document) -> Option<Section> {
    document.map_at("/since")?;
    let revision = document.text_at("/since/revision");
    let since = if revision.is_empty() {
        "Changes since the earlier sheet".to_owned()
    } else {
        format!("Changes since revision {revision}")
    };
    let items: Vec<Line> = document
        .changes()
        .iter()
        .map(|change| vec![said(change)])
        .collect();
    let block = if items.is_empty() {
        Block::Paragraph(vec![words("Nothing that is ordered has changed.")])
    } else {
        Block::List {
            name: vec![words("Layers that are others are marked Δ in their table:")],
            items,
            is_ranked: false,
        }
    };
    Some(Section {
        heading: crate::sheet::page::tidy(&since),
        blocks: vec![block],
    })
}

fn substrate(document: &Document) -> Section {
    let mut rows = vec![(
        "Material".to_owned(),
        vec![vec![said(document.text_at("/substrate/formula"))]],
    )];
    let of_wafer = order_fields().filter(|field| field.path.starts_with("wafer."));
    rows.extend(pairs(document, of_wafer));
    section("Substrate", vec![Block::Pairs(rows)])
}

fn layers(document: &Document) -> Section {
    let counts = vec![
        words("Counted as they are grown: "),
        document.shown("/counts/wells", Digits::Plain),
        words(plural(document, "wells", " well", ", ")),
        document.shown("/counts/inner_barriers", Digits::Plain),
        words(plural(document, "inner_barriers", " inner barrier", ", ")),
        document.shown("/counts/outer_barriers", Digits::Plain),
        words(plural(document, "outer_barriers", " outer barrier", ".")),
    ];
    let tolerances = order_fields().filter(|field| field.path.starts_with("tolerances."));
    section(
        "Layers",
        vec![
            Block::Paragraph(counts),
            Block::Table(layer_table(document)),
            Block::Paragraph(vec![words(
                "Tolerances are to either side. Fractions are shares of a sublattice: Al, Ga and In \
                 make one, P, As and Sb the other. Relaxed mismatch is that of the free layer, \
                 perpendicular mismatch what a (00l) reflection of the coherent layer shows; the two \
                 differ by a factor near 2. Compressive: the free layer is wider than the substrate. \
                 The gap is that of the strained bulk layer before any confinement, as a wavelength in \
                 vacuum. In a graded layer the composition runs straight from the first line to the \
                 second, in growth order.",
            )]),
            Block::Pairs(pairs(document, tolerances)),
        ],
    )
}

fn plural(document: &Document, key: &str, thing: &str, stop: &str) -> String {
    let is_one = document.number_at(&format!("/counts/{key}")) == Some(1.0);
    format!("{thing}{}{stop}", if is_one { "" } else { "s" })
}

fn layer_table(document: &Document) -> Table {
    let celsius = document.shown("/targets/pl_temperature_c", Digits::Plain);
    let layers = document.list_at("/layers");
    let mut rows = vec![Row::Banner(vec![words("▲ surface · growth goes up ▲")])];
    let changed: Vec<&str> = document
        .list_at("/changes")
        .iter()
        .filter_map(|change| change.get("place").and_then(Value::as_str))
        .collect();
    rows.extend((0..layers.len()).rev().map(|index| {
        let at = format!("/layers/{index}");
        let below = format!("{at}/");
        let is_changed = changed
            .iter()
            .any(|place| *place == at || place.starts_with(&below));
        layer_row(document, &at, is_changed)
    }));
    let mut substrate = vec![vec![vec![words("0")]], vec![vec![words("substrate")]]];
    substrate.push(vec![vec![said(document.text_at("/substrate/formula"))]]);
    substrate.resize(8, vec![vec![]]);
    rows.push(Row::Cells {
        cells: substrate,
        is_changed: false,
    });
    Table {
        caption: vec![
            words(
                "Numbered from the substrate, printed with the surface on top: growth goes from the \
                 bottom of the table to its top. Gaps, strains and mismatches at ",
            ),
            celsius,
            words(" °C."),
        ],
        heads: vec![
            "No.",
            "Layer",
            "Composition",
            "Thickness, nm",
            "Strain, %",
            "Mismatch, ppm: relaxed / perpendicular",
            "Gap, nm",
            "Doping, cm⁻³",
        ],
        widths: vec![6, 12, 27, 12, 15, 15, 10, 15],
        rows,
    }
}

fn layer_row(document: &Document, at: &str, is_changed: bool) -> Row {
    let at_key = |key: &str| format!("{at}/{key}");
    let upper = at_key("grade_to");
    let is_graded = document.map_at(&upper).is_some();
    let mut ends = vec![at.to_owned()];
    ends.extend(is_graded.then_some(upper));
    // Of a grade both ends, in growth order, by their names in every cell.
    let of_ends = |line: &dyn Fn(&str) -> Line| -> Vec<Line> {
        let of_end = |(place, end): (usize, &String)| {
            let lead = match (is_graded, place) {
                (false, _) => None,
                (true, 0) => Some(words("from ")),
                (true, _) => Some(words("to ")),
            };
            lead.into_iter().chain(line(end)).collect()
        };
        ends.iter().enumerate().map(of_end).collect()
    };
    let mut number = vec![document.shown(at_key("number"), Digits::Plain)];
    if is_changed {
        number.push(words(" Δ"));
    }
    let mut layer = vec![vec![words(document.text_at(&at_key("role")))]];
    if is_graded {
        layer.push(vec![words("graded")]);
    }
    if document.map_at(&at_key("period")).is_some() {
        layer.push(vec![
            words("period "),
            document.shown(at_key("period/place"), Digits::Plain),
            words(" of "),
            document.shown(at_key("period/of"), Digits::Plain),
        ]);
    }
    let thickness = vec![vec![
        length(document, at_key("thickness_nm")),
        words(" ± "),
        length(document, at_key("thickness_tolerance_nm")),
    ]];
    let cells = vec![
        vec![number],
        layer,
        of_ends(&|end| composition(document, end)),
        thickness,
        of_ends(&|end| {
            let place = format!("{end}/strain_percent");
            // A zero that is printed has no sense, whatever its last digits.
            let is_zero = document.number_at(&place).is_none_or(|it| it.abs() < 5e-3);
            let sense = if is_zero {
                Sense::Matched.word()
            } else {
                document.text_at(&format!("{end}/strain"))
            };
            vec![
                document.shown(&place, Digits::Fixed(2)),
                words(format!(" {sense}")),
            ]
        }),
        of_ends(&|end| {
            let ppm =
                |kind: &str| document.shown(format!("{end}/{kind}_mismatch_ppm"), Digits::Fixed(0));
            vec![ppm("relaxed"), words(" / "), ppm("perpendicular")]
        }),
        of_ends(&|end| {
            let is_direct = document.value.pointer(&format!("{end}/direct"));
            let note = if is_direct == Some(&Value::Bool(false)) {
                " (indirect)"
            } else {
                ""
            };
            vec![
                document.shown(format!("{end}/gap_nm"), Digits::Fixed(0)),
                words(note),
            ]
        }),
        doping(document, at),
    ];
    Row::Cells { cells, is_changed }
}

/// A length to a thousandth of a nm, without zeros at its end.
fn length(document: &Document, at: String) -> Span {
    let nm = document.number_at(&at).unwrap_or(0.0);
    let is_whole = |scale: f64| (nm * scale - (nm * scale).round()).abs() < 1e-6;
    let decimals = [1.0, 10.0, 100.0].iter().position(|&scale| is_whole(scale));
    document.shown(at, Digits::Fixed(decimals.unwrap_or(3)))
}

/// Every element with four decimals, group III first.
fn composition(document: &Document, end: &str) -> Line {
    let Some(fractions) = document.map_at(&format!("{end}/composition")) else {
        return vec![
            said(document.text_at(&format!("{end}/formula"))),
            words(": composition "),
            Span::Asked,
        ];
    };
    let mut line = Line::new();
    let mut needs_space = false;
    for symbol in ["Al", "Ga", "In", "P", "As", "Sb"] {
        let Some(fraction) = fractions.get(symbol).and_then(Value::as_f64) else {
            continue;
        };
        let space = if needs_space { " " } else { "" };
        needs_space = fraction < 1.0;
        if needs_space {
            line.push(words(format!("{space}{symbol}\u{a0}")));
            let place = format!("{end}/composition/{symbol}");
            line.push(document.shown(place, Digits::Fixed(4)));
        } else {
            line.push(words(format!("{space}{symbol}")));
        }
    }
    line
}

fn doping(document: &Document, at: &str) -> Vec<Line> {
    let conduction = document.text_at(&format!("{at}/conduction"));
    if document.number_at(&format!("{at}/density_cm3")).is_none() {
        return vec![
            vec![words("undoped")],
            vec![
                words("below "),
                document.shown("/order/tolerances.undoped_cm3/value", Digits::Power(3)),
            ],
        ];
    }
    let dopant = document.text_at(&format!("{at}/dopant"));
    let mut first = vec![words(format!("{conduction}, "))];
    first.push(if dopant.is_empty() {
        Span::Asked
    } else {
        said(dopant)
    });
    vec![
        first,
        vec![
            document.shown(format!("{at}/density_cm3"), Digits::Power(4)),
            words(" ± "),
            document.shown("/order/tolerances.doping_percent/value", Digits::Plain),
            words(" %"),
        ],
    ]
}

fn targets(document: &Document) -> Section {
    let mut rows = Vec::new();
    let mut row = |quantity: Line, target: Vec<Line>, tolerance: Line| {
        let cells = vec![vec![quantity], target, vec![tolerance]];
        rows.push(Row::Cells {
            cells,
            is_changed: false,
        });
    };
    let number = |key: &str, digits| document.shown(format!("/targets/{key}"), digits);
    let marked = |mut line: Line, path: &str| {
        line.extend(document.practice(path));
        line
    };
    let pl_missing = document.text_at("/targets/pl_missing");
    if pl_missing.is_empty() {
        row(
            vec![words("Photoluminescence peak, wafer mean")],
            vec![
                vec![number("pl_nm", Digits::Fixed(1)), words(" nm in vacuum")],
                vec![number("pl_air_nm", Digits::Fixed(1)), words(" nm in air")],
            ],
            marked(
                vec![
                    words("± "),
                    number("pl_tolerance_nm", Digits::Plain),
                    words(" nm"),
                ],
                "targets.pl_tolerance_nm",
            ),
        );
    } else {
        row(
            vec![words("Photoluminescence peak, wafer mean")],
            vec![vec![Span::Asked, words(format!(" {pl_missing}"))]],
            vec![Span::Blank],
        );
    }
    for (path, name) in [
        ("targets.pl_spread_nm", "Photoluminescence over a wafer"),
        ("targets.pl_fwhm_mev", "Full width at half maximum"),
    ] {
        let unit = if path.ends_with("mev") {
            "meV"
        } else {
            "nm, one sigma"
        };
        let limit = document.field(path, unit).unwrap_or_default();
        let lines = limit.into_iter().map(|mut line| {
            line.insert(0, words("at most "));
            line
        });
        row(vec![words(name)], lines.collect(), vec![]);
    }
    xray(document, &mut row);
    row(
        vec![words("Total thickness of the epitaxy")],
        vec![vec![number("total_nm", Digits::Fixed(0)), words(" nm")]],
        marked(
            vec![
                words("± "),
                number("total_tolerance_nm", Digits::Fixed(0)),
                words(" nm"),
            ],
            "targets.thickness_percent",
        ),
    );
    let table = Table {
        caption: vec![
            words("At the bench, "),
            number("pl_temperature_c", Digits::Plain),
            words(" °C ("),
            number("pl_temperature_k", Digits::Fixed(2)),
            words(" K)."),
        ],
        heads: vec!["Quantity", "Target", "Tolerance"],
        widths: vec![4, 5, 3],
        rows,
    };
    let listed = [
        "targets.bench_temperature_c",
        "targets.pl_conditions",
        "targets.pl_intensity",
        "targets.satellites",
        "targets.doping_profile",
        "targets.defects",
        "targets.bow_um",
        "targets.pl_offset_nm",
    ];
    let fields = listed
        .iter()
        .filter_map(|path| order_fields().find(|field| field.path == *path));
    let mut blocks = vec![
        Block::Paragraph(vec![words(
            "Peaks and angles are calculated from the very layers above. X-rays are Cu Kα1 in an ω–2θ \
             scan; offsets are in ω from the substrate’s peak, compressive layers to the left \
             (negative). A detector that reads 2θ moves twice as far.",
        )]),
        Block::Table(table),
    ];
    blocks.push(Block::Pairs(pairs(document, fields)));
    blocks.push(Block::Figure(0));
    section("Targets on the finished wafer", blocks)
}

fn xray(document: &Document, row: &mut impl FnMut(Line, Vec<Line>, Line)) {
    let number = |key: &str, digits| document.shown(format!("/targets/{key}"), digits);
    let missing = document.text_at("/targets/xray_missing");
    if !missing.is_empty() {
        let blank = vec![vec![Span::Blank, words(format!(" {missing}"))]];
        row(vec![words("X-ray period")], blank, vec![]);
        return;
    }
    let reflection = document.text_at("/targets/xray_reflection");
    row(
        vec![words(format!("Period, by {reflection} satellites"))],
        vec![vec![
            number("xray_period_nm", Digits::Fixed(3)),
            words(" nm, "),
            number("xray_periods", Digits::Plain),
            words(" periods; satellites "),
            number("satellite_spacing_arcsec", Digits::Fixed(0)),
            words("″ apart"),
        ]],
        [
            words("± "),
            number("xray_period_tolerance_nm", Digits::Fixed(3)),
            words(" nm"),
        ]
        .into_iter()
        .chain(document.practice("targets.period_percent"))
        .collect(),
    );
    row(
        vec![words(format!("Zero order, {reflection}"))],
        vec![
            vec![
                number("zero_order_arcsec", Digits::Fixed(0)),
                words("″ from the substrate"),
            ],
            vec![
                number("mean_perpendicular_mismatch_ppm", Digits::Fixed(0)),
                words(format!(
                    " ppm perpendicular, {}",
                    document.text_at("/targets/mean_strain")
                )),
            ],
            vec![
                number("mean_relaxed_mismatch_ppm", Digits::Fixed(0)),
                words(" ppm relaxed"),
            ],
        ],
        [
            words("± "),
            number("zero_order_tolerance_arcsec", Digits::Fixed(0)),
            words("″, ± "),
            document.shown("/order/targets.zero_order_ppm/value", Digits::Plain),
            words(" ppm perpendicular"),
        ]
        .into_iter()
        .chain(document.practice("targets.zero_order_ppm"))
        .collect(),
    );
    let orders = document.list_at("/targets/satellite_orders");
    let mut line: Line = Vec::new();
    for (index, order) in orders.iter().enumerate() {
        // The outer ones are seldom seen; they are in the record.
        if order.as_i64().is_some_and(|order| order.abs() > 3) {
            continue;
        }
        if !line.is_empty() {
            line.push(words(", "));
        }
        line.push(document.shown(format!("/targets/satellite_orders/{index}"), Digits::Plain));
        line.push(words(":\u{a0}"));
        line.push(document.shown(
            format!("/targets/satellites_arcsec/{index}"),
            Digits::Fixed(0),
        ));
        line.push(words("″"));
    }
    row(
        vec![words("Satellites, order: offset from the substrate")],
        vec![line],
        vec![],
    );
}

/// Every list of a table of the order under its label.
fn lists(document: &Document, prefix: &str) -> Vec<Block> {
    let mut blocks = Vec::new();
    let mut rows = Vec::new();
    for field in order_fields().filter(|field| field.path.starts_with(prefix)) {
        let Some(lines) = document.field(field.path, field_unit(field)) else {
            continue;
        };
        let is_list = document
            .value
            .pointer(&format!("/order/{}/value", field.path))
            .is_some_and(Value::is_array);
        if is_list {
            blocks.push(Block::List {
                name: std::iter::once(words(field.label))
                    .chain(document.practice(field.path))
                    .collect(),
                items: lines,
                is_ranked: field.path == "acceptance.ranking",
            });
        } else {
            rows.push((label(field), lines));
        }
    }
    if !rows.is_empty() {
        blocks.insert(0, Block::Pairs(rows));
    }
    blocks
}

fn acceptance(document: &Document) -> Section {
    section("Acceptance", lists(document, "acceptance."))
}

fn handling(document: &Document) -> Section {
    section(
        "Maps, sampling, data and packing",
        lists(document, "handling."),
    )
}

fn notes(document: &Document) -> Option<Section> {
    let items = document.field("notes", "")?;
    let list = Block::List {
        name: vec![words("To be read before growth:")],
        items,
        is_ranked: false,
    };
    Some(section("Notes", vec![list]))
}

fn cautions(document: &Document) -> Section {
    let built_in = document.list_at("/cautions").iter();
    let mut items: Vec<Line> = built_in
        .filter_map(Value::as_str)
        .map(|caution| vec![words(caution)])
        .collect();
    let further = document.field("cautions", "").unwrap_or_default();
    // What defers to those who are qualified stays the last word.
    let last = items.len().saturating_sub(1);
    items.splice(last..last, further);
    section(
        "Cautions",
        vec![Block::List {
            name: vec![words("Wafers of these materials, and their growth:")],
            items,
            is_ranked: false,
        }],
    )
}

/// What the numbers hang on.
pub(super) fn stamp(document: &Document) -> Section {
    let text = |key: &str| vec![vec![words(document.text_at(&format!("/stamp/{key}")))]];
    let files: Vec<&str> = document
        .list_at("/stamp/parameter_files")
        .iter()
        .filter_map(Value::as_str)
        .collect();
    section(
        "Stamp",
        vec![
            Block::Pairs(vec![
                ("Program".to_owned(), text("program")),
                ("Structure, SHA-256".to_owned(), text("structure_sha256")),
                ("Source, SHA-256".to_owned(), text("source_sha256")),
                ("Parameters, SHA-256".to_owned(), text("parameters_sha256")),
                (
                    "Parameter files".to_owned(),
                    vec![vec![said(&files.join(" + "))]],
                ),
            ]),
            Block::Paragraph(vec![words(
                "The record sheet.json beside this page holds the structure and every number; whoever \
                 has the program can compute them again from it and see whether all agree.",
            )]),
        ],
    )
}
