//! Every key of the structure file, in one table.

use crate::structure::growth::GROWTH;
use crate::structure::keys::{FORMAT, Key, Kind, MOST_LAYERS, Magnitude, Table, number};
use crate::structure::order::ORDER;
use crate::structure::{Bands, Lineshape, Medium, Role, Wavelength};

/// A carrier density, per volume of the wells.
const DENSITY: Magnitude = Magnitude {
    unit: "cm^-3",
    possible: (1e12, 1e21),
    usual: (1e16, 2e19),
};

/// The file.
pub(in crate::structure) static FILE: Table = Table {
    path: "",
    doc: "A structure file holds these keys and tables; it is TOML 1.0.",
    keys: &[
        FORMAT,
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
static MATERIAL: Table = Table {
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
pub(in crate::structure) static NUMBERS: Table = Table {
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
pub(in crate::structure) static ROW: Table = Table {
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
pub(in crate::structure) static OPERATION: Table = Table {
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
pub(in crate::structure) static MODEL: Table = Table {
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
pub(in crate::structure) static TARGET: Table = Table {
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
pub(in crate::structure) static LIMITS: Table = Table {
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
