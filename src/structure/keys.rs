//! What a key is, and the keys that a file may hold: the reader, the editor schema and the key
//! reference of the manual are all driven by their tables.

mod misnomers;
mod structure_file;

pub(super) use misnomers::MISNOMERS;
pub(super) use structure_file::{FILE, MODEL, NUMBERS, OPERATION, ROW, TARGET};

/// One table of the file and the keys it may hold.
pub(super) struct Table {
    /// Its path as a reader writes it, `NAME` standing for a name of the user's choice.
    pub(super) path: &'static str,
    /// What it is for.
    pub(super) doc: &'static str,
    /// Its keys, in the order in which they are written and explained.
    pub(super) keys: &'static [Key],
}

/// One key.
pub(super) struct Key {
    /// The key itself, with its unit at the end.
    pub(super) name: &'static str,
    /// What its value is.
    pub(super) kind: Kind,
    /// What holds where the key is left out; empty where nothing does.
    pub(super) default: &'static str,
    /// What it means, in one line.
    pub(super) doc: &'static str,
}

/// What a value is, and within which bounds.
pub(super) enum Kind {
    /// A few words on one line.
    Text,
    /// Free text on one line.
    Prose,
    /// One of some words.
    Word(fn() -> Vec<&'static str>),
    /// `true` or `false`.
    Flag,
    /// A whole number from the first to the second.
    Count(u64, u64),
    /// A number.
    Number(Magnitude),
    /// A list of texts, so many at most.
    Texts(usize),
    /// A list of numbers, as many as from the second to the third.
    Numbers(Magnitude, usize, usize),
    /// A table.
    Table(&'static Table),
    /// Tables under names of the user's choice.
    Named(&'static Table),
    /// A list of tables.
    Rows(&'static Table),
}

/// Which numbers are possible, and which of them are met in practice.
///
/// Bounds are common practice of the trade, wide enough for test problems; what lies outside of
/// the possible is refused, what is possible and unusual is remarked.
#[derive(Clone, Copy)]
pub(super) struct Magnitude {
    /// Unit, as it is printed; empty for a plain number.
    pub(super) unit: &'static str,
    /// Lowest and highest possible value.
    pub(super) possible: (f64, f64),
    /// Lowest and highest value that raises no brow.
    pub(super) usual: (f64, f64),
}

impl Table {
    /// The key of that name.
    pub(super) fn key(&self, name: &str) -> Option<&Key> {
        self.keys.iter().find(|key| key.name == name)
    }

    /// The names of its keys, in order.
    pub(super) fn names(&self) -> impl Iterator<Item = &'static str> + use<> {
        let keys: &'static [Key] = self.keys;
        keys.iter().map(|key| key.name)
    }
}

/// A number of a unit, with its possible and its usual bounds.
pub(super) const fn number(unit: &'static str, possible: (f64, f64), usual: (f64, f64)) -> Kind {
    Kind::Number(Magnitude {
        unit,
        possible,
        usual,
    })
}

/// The key that says the version of a format.
pub(super) const FORMAT: Key = Key {
    name: "format",
    kind: Kind::Count(1, 1),
    default: "",
    doc: "version of the file format, always 1",
};

/// Most layers that a stack may have once its groups are written out.
pub(super) const MOST_LAYERS: usize = 10_000;
/// Most wells.
pub(super) const MOST_WELLS: usize = 200;
/// Most named materials.
pub(super) const MOST_MATERIALS: usize = 200;
/// Thinnest and thickest well, nm: below is less than a monolayer (half a lattice constant, about
/// 0.28 nm), above is no longer a film whose levels are told apart.
pub(super) const WELL_NM: (f64, f64) = (0.2, 500.0);
/// Thinnest and thickest well that raises no brow, nm (common practice; wider is bulk-like).
pub(super) const USUAL_WELL_NM: (f64, f64) = (2.0, 30.0);
/// Furthest that the first and the last well may stand apart, outer edges, nm.
pub(super) const LONGEST_ACTIVE_REGION_NM: f64 = 10_000.0;
