//! The keys of the parameter data: what each means, its unit, and whether a compound must have it.

/// A key of the tables `[binary.*]` or `[ternary.*]`.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Key {
    /// The word in the file.
    pub word: &'static str,
    /// What it is.
    pub meaning: &'static str,
    /// Its unit; `1` for a pure number.
    pub unit: &'static str,
    /// Whether every compound must have it.
    pub required: bool,
}

const fn key(word: &'static str, meaning: &'static str, unit: &'static str) -> Key {
    Key {
        word,
        meaning,
        unit,
        required: true,
    }
}

const fn optional(word: &'static str, meaning: &'static str, unit: &'static str) -> Key {
    Key {
        required: false,
        ..key(word, meaning, unit)
    }
}

/// Keys of a compound.
pub const BINARY_KEYS: &[Key] = &[
    key("a_300", "lattice constant at 300 K", "angstrom"),
    key(
        "da_dt",
        "thermal expansion of the lattice constant",
        "angstrom/K",
    ),
    key("eg_gamma_0", "direct gap at 0 K", "eV"),
    key("alpha_gamma", "Varshni alpha of the direct gap", "eV/K"),
    key("beta_gamma", "Varshni beta of the direct gap", "K"),
    optional(
        "coth_a",
        "amplitude of the coth law of the direct gap",
        "eV",
    ),
    optional(
        "coth_theta",
        "temperature of the coth law of the direct gap",
        "K",
    ),
    key("eg_x_0", "gap to the X valleys at 0 K", "eV"),
    key("alpha_x", "Varshni alpha of the X gap", "eV/K"),
    key("beta_x", "Varshni beta of the X gap", "K"),
    key("eg_l_0", "gap to the L valleys at 0 K", "eV"),
    key("alpha_l", "Varshni alpha of the L gap", "eV/K"),
    key("beta_l", "Varshni beta of the L gap", "K"),
    key("delta_so", "spin-orbit splitting", "eV"),
    key("me_gamma", "electron mass at the band edge", "m0"),
    optional("me_l_long", "longitudinal electron mass, L", "m0"),
    optional("me_l_trans", "transverse electron mass, L", "m0"),
    optional("me_l_dos", "density-of-states mass of one valley, L", "m0"),
    optional("me_x_long", "longitudinal electron mass, X", "m0"),
    optional("me_x_trans", "transverse electron mass, X", "m0"),
    optional("me_x_dos", "density-of-states mass of one valley, X", "m0"),
    optional("m_so", "split-off mass", "m0"),
    key("gamma1", "Luttinger parameter gamma1", "1"),
    key("gamma2", "Luttinger parameter gamma2", "1"),
    key("gamma3", "Luttinger parameter gamma3", "1"),
    key("ep", "Kane energy", "eV"),
    optional("f", "Kane parameter F", "1"),
    key("vbo", "valence-band top on the common scale", "eV"),
    key("ac", "conduction deformation potential", "eV"),
    key("av", "valence deformation potential", "eV"),
    key("b", "shear deformation potential, tetragonal", "eV"),
    key("d", "shear deformation potential, rhombohedral", "eV"),
    key("c11", "elastic constant C11", "GPa"),
    key("c12", "elastic constant C12", "GPa"),
    key("c44", "elastic constant C44", "GPa"),
    key("eps_static", "static dielectric constant", "1"),
    key("eps_inf", "high-frequency dielectric constant", "1"),
];

/// Keys of the bowings of a ternary; one that is not there means no bowing.
pub const TERNARY_KEYS: &[Key] = &[
    optional("eg_gamma", "bowing of the direct gap", "eV"),
    optional("eg_x", "bowing of the X gap", "eV"),
    optional("eg_l", "bowing of the L gap", "eV"),
    optional("delta_so", "bowing of the spin-orbit splitting", "eV"),
    optional("me_gamma", "bowing of the electron mass", "m0"),
    optional(
        "m_hh_001",
        "bowing of the heavy-hole mass along growth",
        "m0",
    ),
    optional(
        "m_lh_001",
        "bowing of the light-hole mass along growth",
        "m0",
    ),
    optional("g3_minus_g2", "bowing of gamma3 - gamma2", "1"),
    optional("ep", "bowing of the Kane energy", "eV"),
    optional("f", "bowing of the Kane parameter F", "1"),
    optional("vbo", "bowing of the valence-band top", "eV"),
    optional("ac", "bowing of the conduction deformation potential", "eV"),
];

/// The key of that word.
#[must_use]
pub(super) fn find(keys: &'static [Key], word: &str) -> Option<&'static Key> {
    keys.iter().find(|key| key.word == word)
}
