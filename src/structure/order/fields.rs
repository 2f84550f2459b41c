//! Every field of an order, in the order in which sheets print them.

use crate::structure::keys::{Key, Kind, Table, number};

/// What stands in a field of which the file says nothing.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Usual {
    /// A usual number (common practice), in the unit of the field.
    Number(f64),
    /// Usual words (common practice).
    Text(&'static str),
    /// A usual list (common practice).
    List(&'static [&'static str]),
    /// Nothing is usual: an order asks for it.
    Asked,
    /// An order does without it.
    Nothing,
}

/// A field of an order.
pub struct Field {
    /// Its key, behind the name of its table where it is not in `[order]` itself: `wafer.offcut`.
    pub path: &'static str,
    /// What a sheet calls it.
    pub label: &'static str,
    /// What stands in it where the file says nothing.
    pub usual: Usual,
    /// Whether it is on the grower's copy too.
    pub for_grower: bool,
    key: &'static Key,
}

impl Field {
    /// The key by itself.
    pub(super) fn key(&self) -> &'static str {
        self.key.name
    }

    pub(super) fn kind(&self) -> &'static Kind {
        &self.key.kind
    }

    /// Unit of its number, empty where it has none.
    #[must_use]
    pub fn unit(&self) -> &'static str {
        match &self.key.kind {
            Kind::Number(magnitude) => magnitude.unit,
            _ => "",
        }
    }
}

/// Every field, table by table.
pub fn order_fields() -> impl Iterator<Item = &'static Field> {
    SECTIONS.iter().flat_map(|(_, fields)| fields.iter())
}

/// The tables of `[order]` with their fields; the first is `[order]` itself.
pub(in crate::structure) static SECTIONS: [(&str, &[Field]); 6] = [
    ("", HEAD_FIELDS),
    ("wafer", WAFER_FIELDS),
    ("tolerances", TOLERANCE_FIELDS),
    ("targets", TARGET_FIELDS),
    ("acceptance", ACCEPTANCE_FIELDS),
    ("handling", HANDLING_FIELDS),
];

/// One table of fields and the keys that the reader goes by: each field says its key and kind, its
/// label, what is usual, who reads it, the default in words, and what it means; behind `with` stand
/// further keys, which are no fields.
macro_rules! fields {
    (
        $fields:ident, $keys:ident, $prefix:literal, with [$($further:expr),*];
        $($name:literal $kind:expr, $label:literal, $usual:expr, $reader:ident, $default:expr, $doc:literal;)*
    ) => {
        static $keys: &[Key] = &[
            $(Key { name: $name, kind: $kind, default: $default, doc: $doc },)*
            $($further,)*
        ];
        static $fields: &[Field] = {
            static LIST: [Field; [$($name),*].len()] = {
                let mut place = 0;
                [$({
                    place += 1;
                    Field {
                        path: concat!($prefix, $name),
                        label: $label,
                        usual: $usual,
                        for_grower: reader!($reader),
                        key: &$keys[place - 1],
                    }
                }),*]
            };
            &LIST
        };
    };
}

macro_rules! reader {
    (all) => {
        true
    };
    (house) => {
        false
    };
}

/// How the manual says that the usual words of a field are printed and marked.
const PRACTICE: &str = "common practice, printed and marked as such";
/// Most items of a list.
const MOST: usize = 40;

const fn table(name: &'static str, table: &'static Table, doc: &'static str) -> Key {
    Key {
        name,
        kind: Kind::Table(table),
        default: "",
        doc,
    }
}

/// `[order]`.
pub(in crate::structure) static ORDER: Table = Table {
    path: "order",
    doc: "What a design sheet says beside the layers, for `sheet`. What is left out is printed as \
          common practice and marked so, or asked for; nothing is invented.",
    keys: HEAD_KEYS,
};

fields! {
    HEAD_FIELDS, HEAD_KEYS, "", with [
        table("wafer", &WAFER, "the substrates to grow on"),
        table("tolerances", &TOLERANCES, "of the layers"),
        table("targets", &TARGETS, "on the finished wafer"),
        table("acceptance", &ACCEPTANCE, "what is a reject, and what goes first"),
        table("handling", &HANDLING, "maps, sampling, data, packing")
    ];
    "id" Kind::Text, "Sheet", Usual::Asked, all, "", "name of the sheet, the same over its revisions";
    "revision" Kind::Text, "Revision", Usual::Asked, all, "", "which revision of the sheet this is";
    "status" Kind::Word(|| vec!["draft", "issued", "superseded"]), "Status", Usual::Asked, all, "",
        "whether it may be grown";
    "date" Kind::Text, "Date", Usual::Asked, all, "", "day of the revision: \"2031-05-02\"";
    "quantity" Kind::Count(1, 10_000), "Wafers", Usual::Asked, all, "", "how many wafers are ordered";
    "quantity_note" Kind::Prose, "Of which", Usual::Nothing, all, "",
        "wafers a run, calibration wafers, who pays for rejects";
    "author" Kind::Text, "Author", Usual::Asked, all, "", "who answers for the sheet";
    "checker" Kind::Text, "Checked by", Usual::Asked, all, "", "who checked it";
    "contact" Kind::Prose, "Questions to", Usual::Asked, all, "", "whom the grower asks while growing";
    "supersedes" Kind::Text, "Supersedes", Usual::Nothing, all, "", "the sheet that this one replaces";
    "previous_runs" Kind::Prose, "Previous runs", Usual::Nothing, all, "",
        "run numbers of earlier wafers of this kind";
    "growth_method" Kind::Text, "Growth method", Usual::Nothing, all, "", "MOVPE, MBE, ...";
    "confidentiality" Kind::Prose, "Confidentiality", Usual::Nothing, all, "", "who may read the sheet";
    "export_classification" Kind::Prose, "Export classification", Usual::Asked, all, "",
        "for trade compliance to fill in; the program never judges it";
    "notes" Kind::Texts(MOST), "Notes", Usual::Nothing, all, "", "what else the grower should know";
    "cautions" Kind::Texts(MOST), "Further cautions", Usual::Nothing, all, "",
        "cautions beyond those that the materials call for";
    "purpose" Kind::Prose, "Purpose", Usual::Nothing, house, "",
        "what the device is for; never on the grower's copy";
    "house_notes" Kind::Texts(MOST), "Notes of the house", Usual::Nothing, house, "",
        "remarks that stay in the house";
    "open_questions" Kind::Texts(MOST), "Open questions", Usual::Nothing, house, "",
        "what is still to be settled; never on the grower's copy";
}

static WAFER: Table = Table {
    path: "order.wafer",
    doc: "The substrates; their material is that of [substrate].",
    keys: WAFER_KEYS,
};

fields! {
    WAFER_FIELDS, WAFER_KEYS, "wafer.", with [];
    "diameter_mm" number("mm", (5.0, 450.0), (50.0, 200.0)), "Diameter", Usual::Asked, all, "", "diameter";
    "thickness_um" Kind::Text, "Thickness, µm", Usual::Asked, all, "", "thickness with tolerance: \"350 ± 25\"";
    "orientation" Kind::Prose, "Orientation",
        Usual::Text("(001), in the trade written (100), within 0.1°"), all, PRACTICE,
        "orientation with tolerance";
    "offcut" Kind::Prose, "Off-cut", Usual::Asked, all, "", "angle and direction of a wanted off-cut, or \"none\"";
    "doping" Kind::Prose, "Doping", Usual::Asked, all, "", "type, dopant and density: \"n, S, 2e18 to 8e18 cm^-3\"";
    "flats" Kind::Prose, "Flats", Usual::Asked, all, "", "flats or notch; they fix the cleaving directions";
    "finish" Kind::Prose, "Finish", Usual::Text("polished on one side, epi-ready"), all, PRACTICE, "polish and cleaning";
    "etch_pits" Kind::Prose, "Etch pits", Usual::Nothing, all, "", "largest density of etch pits";
    "lot" Kind::Prose, "Lot", Usual::Text("supplier, ingot and lot recorded with the run"), all, PRACTICE,
        "what is kept for tracing";
}

static TOLERANCES: Table = Table {
    path: "order.tolerances",
    doc: "How far a layer may be off, to either side.",
    keys: TOLERANCE_KEYS,
};

fields! {
    TOLERANCE_FIELDS, TOLERANCE_KEYS, "tolerances.", with [];
    "thick_percent" number("%", (0.01, 50.0), (1.0, 20.0)), "Thickness of thick layers",
        Usual::Number(5.0), all, "5, common practice", "thickness of layers other than the ones below";
    "confinement_percent" number("%", (0.01, 50.0), (1.0, 20.0)), "Thickness of confinement layers",
        Usual::Number(5.0), all, "5, common practice", "thickness of confinement layers";
    "active_percent" number("%", (0.01, 50.0), (0.5, 10.0)), "Thickness of wells, barriers and steps",
        Usual::Number(4.0), all, "4, common practice", "thickness of wells, barriers and steps";
    "fraction" number("", (1e-5, 0.2), (5e-4, 0.02)), "Fraction of an element",
        Usual::Number(0.005), all, "0.005, common practice", "fraction of an element on its sublattice";
    "gap_nm" number("nm", (0.01, 500.0), (1.0, 30.0)), "Gap wavelength of bulk alloys",
        Usual::Number(10.0), all, "10, common practice", "gap wavelength of bulk alloys";
    "mismatch_ppm" number("ppm", (1.0, 50_000.0), (50.0, 2_000.0)), "Relaxed mismatch of other layers",
        Usual::Number(500.0), all, "500, common practice", "relaxed mismatch of layers other than wells, barriers and steps";
    "strain_percent" number("%", (1e-3, 5.0), (0.01, 0.3)), "Strain of wells, barriers and steps",
        Usual::Number(0.1), all, "0.1, common practice", "in-plane strain of wells, barriers and steps, absolute";
    "doping_percent" number("%", (0.1, 1_000.0), (5.0, 100.0)), "Doping",
        Usual::Number(30.0), all, "30, common practice", "density of dopants";
    "undoped_cm3" number("cm^-3", (1e12, 1e19), (1e14, 1e17)), "Undoped layers stay below",
        Usual::Number(1e16), all, "1e16, common practice", "highest net density of a layer without dopants";
}

static TARGETS: Table = Table {
    path: "order.targets",
    doc: "What the finished wafer is measured against. Peaks and angles are computed from the layers.",
    keys: TARGET_KEYS,
};

fields! {
    TARGET_FIELDS, TARGET_KEYS, "targets.", with [];
    "bench_temperature_c" number("C", (-272.15, 226.85), (10.0, 40.0)), "Temperature of the bench",
        Usual::Number(25.0), all, "25, common practice",
        "at which wafers are measured: photoluminescence, X-ray";
    "pl_tolerance_nm" number("nm", (0.01, 500.0), (1.0, 20.0)), "Photoluminescence peak, wafer mean",
        Usual::Number(5.0), all, "that of [target] for kind = \"pl\"; else 5, common practice",
        "how far the mean over a wafer may be off";
    "pl_offset_nm" number("nm", (-200.0, 200.0), (-40.0, 40.0)), "Offset of photoluminescence",
        Usual::Nothing, all, "none", "measured less calculated peak of this family, added to the target";
    "pl_spread_nm" number("nm", (0.01, 200.0), (0.3, 10.0)), "Photoluminescence over a wafer, one sigma",
        Usual::Number(2.0), all, "2, common practice", "largest standard deviation inside the exclusion";
    "pl_fwhm_mev" number("meV", (0.1, 500.0), (10.0, 80.0)), "Full width at half maximum",
        Usual::Number(45.0), all, "45, common practice", "largest width of the line at the bench";
    "pl_conditions" Kind::Prose, "Measured how",
        Usual::Text("low injection, pump wavelength and power density stated; the peak is the highest point of the smoothed line; cap on"),
        all, PRACTICE, "pump, definition of the peak, cap on or off";
    "pl_intensity" Kind::Prose, "Intensity", Usual::Text("recorded against the grower's reference wafer"),
        all, PRACTICE, "against which reference, and how much of it";
    "period_percent" number("%", (0.01, 50.0), (0.5, 5.0)), "Period",
        Usual::Number(2.5), all, "2.5, common practice", "period of wells and barriers, by X-ray";
    "zero_order_ppm" number("ppm", (1.0, 10_000.0), (50.0, 500.0)), "Mean mismatch, perpendicular",
        Usual::Number(150.0), all, "150, common practice", "perpendicular mean mismatch of a period, by the zero order";
    "satellites" Kind::Count(0, 20), "Satellites in sight on either side", Usual::Number(2.0), all,
        "2, common practice", "orders that must be seen on either side of the zero order";
    "thickness_percent" number("%", (0.01, 50.0), (1.0, 10.0)), "Total thickness",
        Usual::Number(5.0), all, "5, common practice", "thickness of the whole epitaxy";
    "doping_profile" Kind::Prose, "Doping profile",
        Usual::Text("as in the table, junction within 50 nm, by capacitance and voltage over etched depth"),
        all, PRACTICE, "how doping is verified";
    "defects" Kind::Prose, "Surface defects",
        Usual::Text("at most 100 cm⁻²; instrument and classes named with the data"), all, PRACTICE,
        "largest density of surface defects, and how they are counted";
    "bow_um" number("µm", (0.1, 1_000.0), (5.0, 100.0)), "Bow after growth",
        Usual::Number(50.0), all, "50, common practice", "largest bow of the grown wafer";
}

static ACCEPTANCE: Table = Table {
    path: "order.acceptance",
    doc: "A ladder: what must hold, what should, what is only recorded; and what goes first when not \
          all of it can be had.",
    keys: ACCEPTANCE_KEYS,
};

fields! {
    ACCEPTANCE_FIELDS, ACCEPTANCE_KEYS, "acceptance.", with [];
    "must" Kind::Texts(MOST), "Must hold, or the wafer is a reject",
        Usual::List(&[
            "photoluminescence peak, wafer mean, within its tolerance",
            "period within its tolerance",
            "number and order of layers as in the table",
            "no cracks, slip or haze inside the exclusion",
        ]), all, PRACTICE, "what makes a reject";
    "should" Kind::Texts(MOST), "Should hold; a wafer outside is accepted only by agreement",
        Usual::List(&[
            "photoluminescence over a wafer within its sigma",
            "mean mismatch within its tolerance",
            "doping within its tolerance",
            "surface defects",
        ]), all, PRACTICE, "what is accepted with a concession only";
    "record" Kind::Texts(MOST), "Recorded only",
        Usual::List(&["width and intensity of the photoluminescence", "bow"]), all, PRACTICE,
        "what is measured and decides nothing";
    "ranking" Kind::Texts(MOST), "When not all can be met, in this order",
        Usual::List(&["photoluminescence peak", "period", "mean mismatch", "doping"]), all, PRACTICE,
        "what is held first";
    "trims" Kind::Texts(MOST), "May be trimmed without asking", Usual::List(&["nothing"]), all, PRACTICE,
        "what the grower may move by himself, and how far";
    "fixed" Kind::Texts(MOST), "Never without asking",
        Usual::List(&["compositions", "number of wells", "dopants and their setback from the wells"]),
        all, PRACTICE, "what the grower may not move";
}

static HANDLING: Table = Table {
    path: "order.handling",
    doc: "How wafers are mapped, sampled, packed, and what comes back with them.",
    keys: HANDLING_KEYS,
};

fields! {
    HANDLING_FIELDS, HANDLING_KEYS, "handling.", with [];
    "exclusion_mm" number("mm", (0.0, 50.0), (1.0, 10.0)), "Edge exclusion", Usual::Number(3.0), all,
        "3, common practice", "width of the rim that does not count, flats and handling marks beside";
    "grid_mm" number("mm", (0.01, 50.0), (0.2, 10.0)), "Grid of maps", Usual::Number(2.0), all,
        "2, common practice", "largest step of a map";
    "coordinates" Kind::Prose, "Coordinates",
        Usual::Text("mm from the centre of the wafer, y away from the primary flat, seen from the grown side"),
        all, PRACTICE, "origin and axes of maps";
    "statistics" Kind::Prose, "Statistics",
        Usual::Text("mean, median, standard deviation, least, greatest, and the share of points inside the tolerance; uniformity is the standard deviation over the mean"),
        all, PRACTICE, "what is reported of a map, each defined";
    "sampling" Kind::Texts(MOST), "Sampling",
        Usual::List(&[
            "photoluminescence map and visual inspection: every wafer",
            "X-ray: centre of one wafer a run",
            "doping profile: one wafer a run, destructive",
            "mass spectrometry of dopants: once a campaign, destructive",
        ]), all, PRACTICE, "what is measured on which wafers";
    "returned" Kind::Texts(MOST), "Data to be returned",
        Usual::List(&[
            "maps as text: x_mm, y_mm, peak_nm, width, intensity",
            "rocking curves as text in two columns, as measured",
            "run number, place in the reactor, dates, and what was trimmed",
        ]), all, PRACTICE, "files, formats, units";
    "packing" Kind::Texts(MOST), "Packing and labels",
        Usual::List(&[
            "one wafer a carrier, nothing touches the grown side",
            "label: sheet, revision, run, wafer",
            "broken pieces are kept and sent along",
        ]), all, PRACTICE, "carriers, labels, pieces kept";
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Fields and keys are two lists of one table: they must not slip against each other.
    #[test]
    fn every_field_is_the_key_of_its_own_name() {
        for (section, fields) in SECTIONS {
            for field in fields {
                let path = if section.is_empty() {
                    field.key().to_owned()
                } else {
                    format!("{section}.{}", field.key())
                };
                assert_eq!(field.path, path);
            }
        }
    }

    /// Usual numbers would be accepted in a file, and are met in practice.
    #[test]
    fn what_is_usual_is_usual() {
        for field in order_fields() {
            match (field.usual, field.kind()) {
                (Usual::Number(value), Kind::Number(magnitude)) => {
                    let (low, high) = magnitude.usual;
                    assert!((low..=high).contains(&value), "{}", field.path);
                }
                (Usual::Number(value), Kind::Count(low, high)) => {
                    assert!((*low..=*high).contains(&(value as u64)), "{}", field.path);
                }
                (Usual::Text(_), Kind::Text | Kind::Prose)
                | (Usual::List(_), Kind::Texts(_))
                | (Usual::Asked | Usual::Nothing, _) => {}
                _ => panic!("{} is usual in another kind", field.path),
            }
        }
    }
}
