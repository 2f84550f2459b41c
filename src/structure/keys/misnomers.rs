//! Words that are no keys and are often written for them.

/// A word that is no key and is often written for one.
pub(in crate::structure) struct Misnomer {
    /// The word.
    pub(in crate::structure) word: &'static str,
    /// The key that its author had in mind.
    pub(in crate::structure) meant: &'static str,
    /// What to write.
    pub(in crate::structure) help: &'static str,
}

/// Words that are often written for keys.
pub(in crate::structure) const MISNOMERS: [Misnomer; 15] = {
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
