//! Structures of own numbers, told to the program as files.

use std::fmt::Write as _;
use stepwell::materials::Parameters;
use stepwell::profile::Profile;
use stepwell::structure::{self, Bands, Overrides, Stack};
use stepwell::subbands::{MixedBands, SingleBands, mixed, single};

/// Lattice constant of the substrate, nm.
const LATTICE_NM: f64 = 0.58;
/// Shear deformation potential of every material, eV.
pub(crate) const B_EV: f64 = -1.8;
/// Hydrostatic deformation potential of every valence band, eV.
pub(crate) const AV_EV: f64 = 1.1;
/// Elastic constants of every material, GPa.
pub(crate) const C11_GPA: f64 = 100.0;
/// See [`C11_GPA`].
pub(crate) const C12_GPA: f64 = 52.0;

/// What the valence states of a layer hang on.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Numbers {
    pub(crate) valence_edge_ev: f64,
    pub(crate) split_off_ev: f64,
    pub(crate) luttinger: [f64; 3],
    /// In-plane strain (a_substrate − a)/a: negative is compressive.
    pub(crate) strain: f64,
}

/// One layer, from the substrate up.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Layer {
    pub(crate) role: &'static str,
    pub(crate) thickness_nm: f64,
    pub(crate) numbers: Numbers,
}

pub(crate) fn barrier(thickness_nm: f64, numbers: Numbers) -> Layer {
    Layer {
        role: "barrier",
        thickness_nm,
        numbers,
    }
}

pub(crate) fn well(thickness_nm: f64, numbers: Numbers) -> Layer {
    Layer {
        role: "well",
        thickness_nm,
        numbers,
    }
}

/// A compressive well and its unstrained barrier.
pub(crate) const WELL: Numbers = Numbers {
    valence_edge_ev: 0.0,
    split_off_ev: 0.33,
    luttinger: [9.5, 3.3, 4.1],
    strain: -0.007,
};
/// See [`WELL`].
pub(crate) const BARRIER: Numbers = Numbers {
    valence_edge_ev: -0.18,
    split_off_ev: 0.31,
    luttinger: [6.5, 1.9, 2.6],
    strain: 0.0,
};
/// Between the two, tensile.
pub(crate) const STEP: Numbers = Numbers {
    valence_edge_ev: -0.08,
    split_off_ev: 0.36,
    luttinger: [7.4, 2.2, 3.0],
    strain: 0.004,
};

/// The structure file of some layers; `model` is the text of that table.
pub(crate) fn text(layers: &[Layer], model: &str) -> String {
    let rows: Vec<String> = layers
        .iter()
        .enumerate()
        .map(|(index, layer)| {
            format!(
                "  {{ role = {:?}, material = \"m{index}\", thickness_nm = {:?} }},",
                layer.role, layer.thickness_nm
            )
        })
        .collect();
    let mut text = format!(
        "format = 1\nlayers = [\n{}\n]\n[substrate]\nmaterial = \"ground\"\n",
        rows.join("\n")
    );
    let ground = Numbers {
        strain: 0.0,
        ..BARRIER
    };
    let named = layers
        .iter()
        .enumerate()
        .map(|(index, layer)| (format!("m{index}"), layer.numbers));
    for (name, numbers) in named.chain([("ground".to_owned(), ground)]) {
        // Every conduction edge stands as far above the valence edge as makes wells of all bands.
        let gap_ev = 0.9 - 2.5 * numbers.valence_edge_ev;
        let _ = writeln!(
            text,
            "[materials.{name}.numbers]\nlattice_nm = {:?}\ngap_ev = {gap_ev:?}\n\
             valence_edge_ev = {:?}\nsplit_off_ev = {:?}\nelectron_mass = 0.05\nluttinger = {:?}\n\
             kane_energy_ev = 24.0\nac_ev = -5.0\nav_ev = {AV_EV:?}\nb_ev = {B_EV:?}\n\
             c11_gpa = {C11_GPA:?}\nc12_gpa = {C12_GPA:?}\nindex = 3.4",
            LATTICE_NM / (1.0 + numbers.strain),
            numbers.valence_edge_ev,
            numbers.split_off_ev,
            numbers.luttinger,
        );
    }
    let _ = write!(
        text,
        "[operation]\ntemperature_k = 300.0\ndensities_cm3 = [2e18, 4e18]\n[model]\n{model}\n"
    );
    text
}

/// The stack of a structure file, its valence bands mixed.
pub(crate) fn read(text: &str) -> Stack {
    let overrides = Overrides {
        bands: Some(Bands::Mixed),
        ..Overrides::default()
    };
    match structure::read(text, &Parameters::shipped(), &overrides) {
        Ok(reading) => reading.stack,
        Err(faults) => panic!("{}\n{text}", faults[0].message),
    }
}

/// Both kinds of bands of a stack, the mixed ones until the highest has fallen by `depth_ev`.
pub(crate) fn solved<T>(
    stack: &Stack,
    depth_ev: f64,
    then: impl FnOnce(&Profile<'_>, &SingleBands, &MixedBands) -> T,
) -> T {
    let parameters = Parameters::shipped();
    let profile = Profile::new(stack, &parameters).expect("a well between barriers");
    let bands = single(&profile, true).expect("certified levels");
    let states = mixed(&profile, &bands, depth_ev).expect("certified states");
    then(&profile, &bands, &states)
}

/// The mixed bands of some layers.
pub(crate) fn mixed_bands(layers: &[Layer], depth_ev: f64) -> MixedBands {
    solved(&read(&text(layers, "")), depth_ev, |_, _, states| {
        states.clone()
    })
}

/// The structure files that are shipped, by name.
pub(crate) fn shipped() -> Vec<(String, String)> {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("structures");
    let mut files: Vec<(String, String)> = std::fs::read_dir(folder)
        .expect("the folder of structures")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|it| it == "toml"))
        .map(|path| {
            let name = path.file_stem().expect("a name").to_string_lossy();
            let text = std::fs::read_to_string(&path).expect("text");
            (name.into_owned(), text)
        })
        .collect();
    files.sort();
    assert!(files.len() > 5, "the structures are missing");
    files
}

/// Numbers from a fixed sequence (splitmix64): the same structures in every run.
pub(crate) struct Random(pub(crate) u64);

impl Random {
    pub(crate) fn between(&mut self, low: f64, high: f64) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut word = self.0;
        word = (word ^ (word >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        word = (word ^ (word >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        word ^= word >> 31;
        low + (high - low) * (word >> 11) as f64 / (1u64 << 53) as f64
    }

    pub(crate) fn below(&mut self, count: usize) -> usize {
        (self.between(0.0, count as f64) as usize).min(count - 1)
    }

    /// Numbers as the zincblende crystals have them: γ3 above γ2, both heavy masses positive.
    fn numbers(&mut self, edge_ev: (f64, f64)) -> Numbers {
        let third = self.between(1.2, 6.0);
        Numbers {
            valence_edge_ev: self.between(edge_ev.0, edge_ev.1),
            split_off_ev: self.between(0.08, 0.8),
            luttinger: [
                2.0 * third + self.between(0.9, 1.8),
                third * self.between(0.65, 0.92),
                third,
            ],
            strain: self.between(-0.012, 0.012),
        }
    }

    /// One to three strained wells, as a rule without any symmetry.
    pub(crate) fn layers(&mut self) -> Vec<Layer> {
        const OUTSIDE_EV: (f64, f64) = (-0.45, -0.16);
        let mut layers = vec![barrier(self.between(20.0, 80.0), self.numbers(OUTSIDE_EV))];
        for index in 0..=self.below(3) {
            if index > 0 {
                layers.push(barrier(self.between(1.0, 12.0), self.numbers(OUTSIDE_EV)));
            }
            let inside = self.numbers((-0.06, 0.0));
            layers.push(well(self.between(2.0, 11.0), inside));
        }
        layers.push(barrier(self.between(20.0, 80.0), self.numbers(OUTSIDE_EV)));
        layers
    }
}
