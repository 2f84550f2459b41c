//! Every key of the structure file, in one table: the reader, the editor schema and the key
//! reference of the manual are all driven by it.

use super::growth::GROWTH;
use super::order::ORDER;
use super::{Bands, Lineshape, Medium, Role, Wavelength};

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

pub(super) const fn number(unit: &'static str, possible: (f64, f64), usual: (f64, f64)) -> Kind {
    Kind::Number(Magnitude {
        unit,
        possible,
        usual,
    })
}

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

pub(super) const DENSITY: Magnitude = Magnitude {
    unit: "cm^-3",
    possible: (1e12, 1e21),
    usual: (1e16, 2e19),
};

/// The file.
pub(super) static FILE: Table = Table {
    path: "",
    doc: "A structure file holds these keys and tables; it is TOML 1.0.",
    keys: &[
        Key {
            name: "format",
            kind: Kind::Count(1, 1),
            default: "",
            doc: "version of the file format, always 1",
        },
        Key {
            name: "title",
            kind: Kind::Text,
            default: "untitled",
            doc: "what outputs call the structure",
        },
        Key {
            name: "substrate",
            kind: Kind::Table(&SUBSTRATE),
            default: "",
            doc: "the wafer, (001)",
        },
        Key {
            name: "materials",
            kind: Kind::Named(&MATERIAL),
            default: "",
            doc: "materials under names of your own",
        },
        Key {
            name: "layers",
            kind: Kind::Rows(&ROW),
            default: "",
            doc: "layers and groups of layers, from the substrate up",
        },
        Key {
            name: "operation",
            kind: Kind::Table(&OPERATION),
            default: "",
            doc: "temperature and carrier densities",
        },
        Key {
            name: "model",
            kind: Kind::Table(&MODEL),
            default: "",
            doc: "switches of the model",
        },
        Key {
            name: "growth",
            kind: Kind::Table(&GROWTH),
            default: "",
            doc: "by how much growth varies from run to run",
        },
        Key {
            name: "target",
            kind: Kind::Table(&TARGET),
            default: "none",
            doc: "the wavelength that the structure is meant to have",
        },
        Key {
            name: "limits",
            kind: Kind::Table(&LIMITS),
            default: "",
            doc: "limits of the house, for `check`",
        },
        Key {
            name: "order",
            kind: Kind::Table(&ORDER),
            default: "",
            doc: "what a design sheet says beside the layers, for `sheet`",
        },
    ],
};

static SUBSTRATE: Table = Table {
    path: "substrate",
    doc: "The wafer. Layers are coherent with it: its lattice constant sets their strain.",
    keys: &[Key {
        name: "material",
        kind: Kind::Text,
        default: "",
        doc: "a formula, or a name from [materials] that is not itself asked for by gap or strain",
    }],
};

/// A named material.
pub(super) static MATERIAL: Table = Table {
    path: "materials.NAME",
    doc: "A material by composition (`formula`), by what it must have (`alloy` with `gap_nm`, \
          a strain, or both), or by its own `numbers`.",
    keys: &[
        Key {
            name: "formula",
            kind: Kind::Text,
            default: "",
            doc: "composition, elements in any order: \"In0.53Ga0.47As\"; each sublattice sums to 1",
        },
        Key {
            name: "alloy",
            kind: Kind::Text,
            default: "",
            doc: "elements whose fractions are to be found from gap and strain: \"AlGaInAs\"",
        },
        Key {
            name: "gap_nm",
            kind: number("nm", (150.0, 20_000.0), (400.0, 5_000.0)),
            default: "",
            doc: "wavelength of the gap of the strained bulk layer at 300 K, before confinement",
        },
        Key {
            name: "compressive_percent",
            kind: number("%", (0.0, 5.0), (0.0, 2.0)),
            default: "",
            doc: "in-plane strain at 300 K, the layer being wider than the substrate",
        },
        Key {
            name: "tensile_percent",
            kind: number("%", (0.0, 5.0), (0.0, 2.0)),
            default: "",
            doc: "in-plane strain at 300 K, the layer being narrower than the substrate",
        },
        Key {
            name: "matched",
            kind: Kind::Flag,
            default: "",
            doc: "true: the lattice constant of the substrate at 300 K",
        },
        Key {
            name: "numbers",
            kind: Kind::Table(&NUMBERS),
            default: "",
            doc: "the material's own numbers, in place of the parameter data",
        },
    ],
};

/// A material's own numbers.
pub(super) static NUMBERS: Table = Table {
    path: "materials.NAME.numbers",
    doc: "A house calibration or a test problem: all but `index` are needed, and they hold at \
          every temperature.",
    keys: &[
        Key {
            name: "lattice_nm",
            kind: number("nm", (0.3, 1.0), (0.54, 0.66)),
            default: "",
            doc: "lattice constant",
        },
        Key {
            name: "gap_ev",
            kind: number("eV", (0.01, 10.0), (0.2, 3.0)),
            default: "",
            doc: "direct gap without strain, at the working temperature",
        },
        Key {
            name: "valence_edge_ev",
            kind: number("eV", (-20.0, 20.0), (-2.5, 1.0)),
            default: "",
            doc: "valence edge without strain, on the offset scale of the parameter data (InSb 0)",
        },
        Key {
            name: "split_off_ev",
            kind: number("eV", (0.0, 20.0), (0.03, 1.0)),
            default: "",
            doc: "spin-orbit splitting",
        },
        Key {
            name: "electron_mass",
            kind: number("", (0.001, 10.0), (0.01, 0.3)),
            default: "",
            doc: "electron mass at the band edge, in free-electron masses",
        },
        Key {
            name: "luttinger",
            kind: Kind::Numbers(
                Magnitude {
                    unit: "",
                    possible: (-20.0, 100.0),
                    usual: (0.3, 40.0),
                },
                3,
                3,
            ),
            default: "",
            doc: "Luttinger parameters gamma1, gamma2, gamma3 of the six-band model",
        },
        Key {
            name: "kane_energy_ev",
            kind: number("eV", (0.0, 100.0), (10.0, 35.0)),
            default: "",
            doc: "Kane energy Ep, the strength of the optical matrix element",
        },
        Key {
            name: "ac_ev",
            kind: number("eV", (-30.0, 30.0), (-12.0, 0.0)),
            default: "",
            doc: "deformation potential of the conduction edge: it moves by +ac (exx + eyy + ezz)",
        },
        Key {
            name: "av_ev",
            kind: number("eV", (0.0, 30.0), (0.0, 3.0)),
            default: "",
            doc: "deformation potential of the valence edge, written positive: it moves by +av (exx + eyy + ezz)",
        },
        Key {
            name: "b_ev",
            kind: number("eV", (-10.0, 0.0), (-3.0, -1.0)),
            default: "",
            doc: "shear deformation potential, negative",
        },
        Key {
            name: "c11_gpa",
            kind: number("GPa", (1.0, 1000.0), (60.0, 160.0)),
            default: "",
            doc: "elastic constant C11",
        },
        Key {
            name: "c12_gpa",
            kind: number("GPa", (0.0, 1000.0), (30.0, 80.0)),
            default: "",
            doc: "elastic constant C12, below C11",
        },
        Key {
            name: "index",
            kind: number("", (1.0, 6.0), (2.7, 4.5)),
            default: "none: [model] index is then needed for spectra",
            doc: "refractive index at the emission wavelength",
        },
    ],
};

/// A layer or a group.
pub(super) static ROW: Table = Table {
    path: "layers",
    doc: "One layer (`role`, `material`, `thickness_nm`), or a group (`repeat`, `layers`) that is \
          grown `repeat` times.",
    keys: &[
        Key {
            name: "role",
            kind: Kind::Word(|| Role::ALL.map(Role::word).to_vec()),
            default: "",
            doc: "the part it plays",
        },
        Key {
            name: "material",
            kind: Kind::Text,
            default: "",
            doc: "a name from [materials], or a formula",
        },
        Key {
            name: "grade_to",
            kind: Kind::Text,
            default: "",
            doc: "material at the surface-side end: the composition runs straight, in growth order",
        },
        Key {
            name: "thickness_nm",
            kind: number("nm", (0.05, 100_000.0), (0.5, 5_000.0)),
            default: "",
            doc: "thickness (wells: 0.2 to 500 nm)",
        },
        Key {
            name: "donors_cm3",
            kind: number("cm^-3", (0.0, 1e21), (0.0, 2e19)),
            default: "0",
            doc: "density of donors",
        },
        Key {
            name: "acceptors_cm3",
            kind: number("cm^-3", (0.0, 1e21), (0.0, 1e20)),
            default: "0",
            doc: "density of acceptors",
        },
        Key {
            name: "dopant",
            kind: Kind::Text,
            default: "",
            doc: "chemical symbol of the dopant",
        },
        Key {
            name: "repeat",
            kind: Kind::Count(1, MOST_LAYERS as u64),
            default: "",
            doc: "of a group: how many times it is grown",
        },
        Key {
            name: "layers",
            kind: Kind::Rows(&ROW),
            default: "",
            doc: "of a group: its layers, from the substrate up",
        },
    ],
};

/// Temperature and densities.
pub(super) static OPERATION: Table = Table {
    path: "operation",
    doc: "The conditions that results are for.",
    keys: &[
        Key {
            name: "temperature_c",
            kind: number("C", (-272.15, 726.85), (-73.15, 176.85)),
            default: "300 K, and outputs say so",
            doc: "temperature of lattice and carriers, Celsius",
        },
        Key {
            name: "temperature_k",
            kind: number("K", (1.0, 1000.0), (200.0, 450.0)),
            default: "300 K, and outputs say so",
            doc: "the same in kelvin; give one of the two",
        },
        Key {
            name: "densities_cm3",
            kind: Kind::Numbers(DENSITY, 1, 100),
            default: "1e18, 2e18, 3e18, 4e18, 5e18",
            doc: "carrier densities for spectra, per volume of the wells",
        },
        Key {
            name: "working_density_cm3",
            kind: Kind::Number(DENSITY),
            default: "the highest of densities_cm3",
            doc: "the density at which the gain peak is reported",
        },
    ],
};

/// Switches of the model.
pub(super) static MODEL: Table = Table {
    path: "model",
    doc: "Every key is optional; outputs name what was on.",
    keys: &[
        Key {
            name: "bands",
            kind: Kind::Word(|| [Bands::Mixed, Bands::Single].map(Bands::word).to_vec()),
            default: "mixed",
            doc: "valence bands mixed, or heavy and light holes each by itself",
        },
        Key {
            name: "nonparabolic",
            kind: Kind::Flag,
            default: "true",
            doc: "electron mass rising with energy; false: constant masses",
        },
        Key {
            name: "lineshape",
            kind: Kind::Word(|| Lineshape::ALL.map(Lineshape::word).to_vec()),
            default: "sech",
            doc: "shape of the homogeneous line",
        },
        Key {
            name: "intraband_fs",
            kind: number("fs", (1.0, 10_000.0), (30.0, 500.0)),
            default: "100",
            doc: "intraband relaxation time tau; the half width of the line is hbar/tau",
        },
        Key {
            name: "shrinkage_mev",
            kind: number("meV", (0.0, 200.0), (0.0, 60.0)),
            default: "32",
            doc: "gap shrinkage at 1e18 cm^-3, growing with the cube root of density; 0: none",
        },
        Key {
            name: "conduction_share",
            kind: number("", (0.0, 1.0), (0.3, 0.8)),
            default: "the offset rule of the material pair",
            doc: "share of the gap difference that falls to the conduction band",
        },
        Key {
            name: "field_kv_cm",
            kind: number("kV/cm", (-2_000.0, 2_000.0), (-300.0, 300.0)),
            default: "0",
            doc: "electric field along growth; positive: the electron's energy rises towards the surface",
        },
        Key {
            name: "index",
            kind: number("", (1.0, 6.0), (2.7, 4.5)),
            default: "the index model at the first transition",
            doc: "refractive index of the wells",
        },
    ],
};

/// The wavelength that a structure is meant to have.
pub(super) static TARGET: Table = Table {
    path: "target",
    doc: "What `aim` aims at and others hold a structure against. A wavelength means something \
          only with its kind, its medium and its temperature.",
    keys: &[
        Key {
            name: "kind",
            kind: Kind::Word(|| Wavelength::ALL.map(Wavelength::word).to_vec()),
            default: "pl",
            doc: "of the first transition, of photoluminescence at low injection, or of peak gain",
        },
        Key {
            name: "wavelength_nm",
            kind: number("nm", (150.0, 20_000.0), (400.0, 5_000.0)),
            default: "",
            doc: "the wavelength; the one key that is needed",
        },
        Key {
            name: "medium",
            kind: Kind::Word(|| Medium::ALL.map(Medium::word).to_vec()),
            default: "vacuum",
            doc: "what the wavelength is measured in; air shortens it by about 0.03 %",
        },
        Key {
            name: "temperature_c",
            kind: number("C", (-272.15, 726.85), (-73.15, 176.85)),
            default: "the temperature of [operation]",
            doc: "temperature at which it is meant, Celsius",
        },
        Key {
            name: "density_cm3",
            kind: Kind::Number(DENSITY),
            default: "the working density of [operation]",
            doc: "carrier density of peak gain, for kind = \"gain\"",
        },
        Key {
            name: "tolerance_nm",
            kind: number("nm", (0.001, 1000.0), (0.5, 50.0)),
            default: "none",
            doc: "how far off is still accepted, to either side",
        },
    ],
};

/// Limits of the house.
pub(super) static LIMITS: Table = Table {
    path: "limits",
    doc: "What the house accepts. Every key is optional; a limit is compared where it is given and \
          never assumed.",
    keys: &[
        Key {
            name: "strain_percent_max",
            kind: number("%", (0.0, 10.0), (0.1, 3.0)),
            default: "none",
            doc: "largest in-plane strain of a layer, either sense",
        },
        Key {
            name: "strain_thickness_percent_nm_max",
            kind: number("% nm", (0.0, 10_000.0), (1.0, 100.0)),
            default: "none",
            doc: "largest product of strain and thickness of a layer",
        },
        Key {
            name: "net_strain_percent_max",
            kind: number("%", (0.0, 10.0), (0.01, 2.0)),
            default: "none",
            doc: "largest mean strain of wells and barriers together",
        },
        Key {
            name: "critical_share_max",
            kind: number("", (0.0, 100.0), (0.3, 3.0)),
            default: "none",
            doc: "largest share of the critical thickness by force balance that a layer may use",
        },
        Key {
            name: "mismatch_ppm_max",
            kind: number("ppm", (0.0, 100_000.0), (100.0, 5_000.0)),
            default: "none",
            doc: "largest relaxed mismatch of buffer, cladding, contact and cap, either sense",
        },
        Key {
            name: "layer_nm_min",
            kind: number("nm", (0.0, 1_000.0), (0.2, 20.0)),
            default: "none",
            doc: "thinnest layer that the grower controls",
        },
        Key {
            name: "well_nm_min",
            kind: number("nm", (0.0, 1_000.0), (0.5, 20.0)),
            default: "none",
            doc: "thinnest well",
        },
        Key {
            name: "barrier_kt_min",
            kind: number("kT", (0.0, 1_000.0), (1.0, 20.0)),
            default: "none; below 4, common practice, a look",
            doc: "least height of the barriers above the first level, at the working temperature",
        },
        Key {
            name: "coupling_mev_max",
            kind: number("meV", (0.0, 1_000.0), (0.1, 50.0)),
            default: "none; above 2 it is remarked",
            doc: "widest spread of the first level over equal wells",
        },
        Key {
            name: "acceptor_setback_nm_min",
            kind: number("nm", (0.0, 100_000.0), (5.0, 1_000.0)),
            default: "none",
            doc: "least distance from the wells to a layer with acceptors",
        },
        Key {
            name: "without_elements",
            kind: Kind::Text,
            default: "none",
            doc: "elements that no layer may hold, by symbol: \"Al, Sb\"",
        },
    ],
};

/// A word that is no key and is often written for one.
pub(super) struct Misnomer {
    /// The word.
    pub(super) word: &'static str,
    /// The key that its author had in mind.
    pub(super) meant: &'static str,
    /// What to write.
    pub(super) help: &'static str,
}

/// Words that are often written for keys.
pub(super) const MISNOMERS: [Misnomer; 15] = {
    const fn one(word: &'static str, meant: &'static str, help: &'static str) -> Misnomer {
        Misnomer { word, meant, help }
    }
    const SENSE: &str = "name its sense: `compressive_percent` or `tensile_percent`";
    const LENGTH: &str = "lengths are in nm: `thickness_nm`";
    const TYPE: &str = "say which: `donors_cm3` or `acceptors_cm3`";
    [
        one("strain", "compressive_percent", SENSE),
        one("strain_percent", "compressive_percent", SENSE),
        one("mismatch_ppm", "compressive_percent", SENSE),
        one("thickness_um", "thickness_nm", LENGTH),
        one("thickness_a", "thickness_nm", LENGTH),
        one("thickness_angstrom", "thickness_nm", LENGTH),
        one("doping", "donors_cm3", TYPE),
        one("doping_cm3", "donors_cm3", TYPE),
        one("n_cm3", "donors_cm3", "write `donors_cm3`"),
        one("p_cm3", "acceptors_cm3", "write `acceptors_cm3`"),
        one(
            "temperature",
            "temperature_c",
            "write `temperature_c` or `temperature_k`",
        ),
        one("gap_um", "gap_nm", "gaps of alloys are in nm: `gap_nm`"),
        one(
            "wavelength_nm",
            "gap_nm",
            "a material has `gap_nm`, the gap of its strained bulk layer",
        ),
        one(
            "composition",
            "formula",
            "write `formula = \"In0.53Ga0.47As\"`",
        ),
        one("periods", "repeat", "write `repeat`"),
    ]
};
