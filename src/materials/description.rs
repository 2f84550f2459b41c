//! Everything that the data say of one material, each number with its source; and the families.

use super::interpolation::ternary_elements;
use super::table::{Material, compounds, pair};
use super::{
    Alternate, Composition, Crystal, Edges, Elements, Entry, IndexAdvice, MissingTernary, Offsets,
    Parameters, SHIPPED_NAME, Sense,
};
use crate::units::wavelength_nm;
use std::collections::BTreeMap;

/// Room temperature of the families' ranges, K.
const ROOM_K: f64 = 300.0;

/// A number with what it is and where it comes from.
#[derive(Clone, Debug, PartialEq)]
pub struct Figure {
    /// What it is, in words.
    pub name: &'static str,
    /// The number, or the numbers where several belong together.
    pub values: Vec<f64>,
    /// Their unit; `1` for pure numbers.
    pub unit: &'static str,
    /// Keys of the citations behind it, in order of first use; see [`Description::citations`].
    pub sources: Vec<String>,
    /// Status codes of the numbers behind it, in order; see [`Description::statuses`].
    pub statuses: Vec<String>,
}

/// Figures that belong together.
#[derive(Clone, Debug, PartialEq)]
pub struct Section {
    /// What they are about.
    pub title: &'static str,
    /// The figures.
    pub figures: Vec<Figure>,
}

/// The refractive index at one photon energy.
#[derive(Clone, Debug, PartialEq)]
pub struct IndexFigure {
    /// Photon energy, eV.
    pub photon_ev: f64,
    /// Refractive index at room temperature.
    pub index: f64,
    /// Where the closed form holds, in its own words.
    pub range: String,
    /// Key of its citation.
    pub source: String,
    /// Its status code.
    pub status: String,
    /// Why it is less sure here; nothing inside the range.
    pub advice: Vec<IndexAdvice>,
}

/// All that the data say of one material at one temperature.
#[derive(Clone, Debug, PartialEq)]
pub struct Description {
    /// The formula.
    pub formula: String,
    /// Temperature, K.
    pub temperature_k: f64,
    /// The substrate's formula, where there is one.
    pub substrate: Option<String>,
    /// The numbers of the unstrained crystal.
    pub crystal: Crystal,
    /// The band edges on the substrate.
    pub edges: Option<Edges>,
    /// The offset rule in words.
    pub offsets: String,
    /// The figures in sections.
    pub sections: Vec<Section>,
    /// The index, at the gap and where else it is asked for.
    pub index: Vec<IndexFigure>,
    /// Citations of all keys that occur.
    pub citations: BTreeMap<String, String>,
    /// Meanings of all status codes that occur.
    pub statuses: BTreeMap<String, String>,
    /// The data behind the figures: compounds and ternaries with their numbers, and values not in use.
    pub data: Vec<(String, Vec<Entry>, Vec<Alternate>)>,
}

/// A family of materials in the data.
#[derive(Clone, Debug, PartialEq)]
pub struct Family {
    /// Its name in the data, e.g. `InGaAs`.
    pub name: String,
    /// The compounds it lies between; of a compound itself.
    pub ends: Vec<String>,
    /// Least and greatest direct gap at 300 K, eV.
    pub gap_ev: [f64; 2],
    /// Least and greatest lattice constant at 300 K, nm.
    pub lattice_nm: [f64; 2],
    /// Whether it is direct everywhere, nowhere, or in part.
    pub direct: Directness,
    /// Key of the citation of most of its numbers.
    pub source: String,
}

/// Where in a family the direct gap is the smallest.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Directness {
    /// At every composition.
    Everywhere,
    /// At some.
    InPart,
    /// At none.
    Nowhere,
}

/// How the data behind a figure are put together.
struct Behind<'a> {
    parameters: &'a Parameters,
    composition: &'a Composition,
}

impl Parameters {
    /// Describes a material.
    ///
    /// # Arguments
    ///
    /// * `substrate` – what it grows on; its strain and edges then belong to the description
    /// * `temperature_k` – temperature, K
    /// * `photon_ev` – where the index is wanted beside the gap, eV
    ///
    /// # Errors
    ///
    /// A composition that the data do not cover.
    pub fn describe(
        &self,
        composition: &Composition,
        substrate: Option<&Composition>,
        temperature_k: f64,
        photon_ev: Option<f64>,
    ) -> Result<Description, MissingTernary> {
        self.covers(composition)?;
        if let Some(substrate) = substrate {
            self.covers(substrate)?;
        }
        let offsets = substrate.map_or(Offsets::Table, |substrate| {
            self.offsets(substrate, [composition], None, temperature_k)
        });
        let crystal = self.crystal(composition, temperature_k, offsets);
        let beneath =
            substrate.map(|substrate| self.crystal(substrate, temperature_k, Offsets::Table));
        let edges = beneath.map(|beneath| crystal.on(beneath.lattice_nm));
        let behind = Behind {
            parameters: self,
            composition,
        };
        let mut sections = vec![
            behind.lattice_and_gaps(&crystal),
            behind.masses(&crystal),
            behind.stiffness(&crystal),
        ];
        if let (Some(beneath), Some(edges)) = (&beneath, &edges) {
            let offset_source = self.offset_source(offsets);
            let layers = [&crystal, beneath];
            sections.insert(1, behind.on_substrate(layers, edges, &offset_source));
        } else {
            sections[0].figures.push(behind.figure(
                "valence edge on the common scale",
                vec![crystal.valence_edge_ev],
                "eV",
                &["vbo"],
            ));
        }
        let gap_ev = edges.map_or(crystal.gap_ev, |edges| edges.gap_ev());
        let mut photons = vec![gap_ev];
        photons.extend(photon_ev);
        let index: Vec<IndexFigure> = photons
            .into_iter()
            .map(|photon_ev| self.index_figure(composition, substrate, photon_ev))
            .collect();
        let data = behind.data();
        let (citations, statuses) = self.legend(&sections, &index, &data);
        Ok(Description {
            formula: composition.formula(),
            temperature_k,
            substrate: substrate.map(Composition::formula),
            crystal,
            edges,
            offsets: offsets.description(),
            sections,
            index,
            citations,
            statuses,
            data,
        })
    }

    /// Every compound and ternary of the data, compounds first.
    #[must_use]
    pub fn families(&self) -> Vec<Family> {
        let table = self.table();
        let families = table.binaries.iter().chain(&table.ternaries);
        families
            .map(|(&elements, material)| self.family(elements, material))
            .collect()
    }

    /// What a status code means.
    #[must_use]
    pub fn status_meaning(&self, code: &str) -> Option<&str> {
        match code {
            "U" => Some("From a file laid over the shipped one."),
            code => self.frame.status_codes.get(code).map(String::as_str),
        }
    }

    /// The conventions of the data file (signs, laws), then its rules of interpolation, by key.
    pub fn conventions(&self) -> impl Iterator<Item = (&str, &str)> {
        let frame = &self.frame;
        let texts = frame.conventions.iter().chain(&frame.interpolation);
        texts.map(|(key, text)| (key.as_str(), text.as_str()))
    }

    fn family(&self, elements: Elements, material: &Material) -> Family {
        const STEPS: usize = 100;
        let corners: Vec<Composition> = elements_of(elements);
        let last = corners.len() - 1;
        let mut gap_ev = [f64::INFINITY, f64::NEG_INFINITY];
        let mut lattice_nm = gap_ev;
        let mut direct = 0;
        for step in 0..=STEPS {
            let share = step as f64 / STEPS as f64;
            let composition = corners[0].towards(&corners[last], share);
            let crystal = self.crystal(&composition, ROOM_K, Offsets::Table);
            for (range, value) in [
                (&mut gap_ev, crystal.gap_ev),
                (&mut lattice_nm, crystal.lattice_nm),
            ] {
                range[0] = range[0].min(value);
                range[1] = range[1].max(value);
            }
            direct += usize::from(crystal.is_direct());
        }
        Family {
            name: material.name.clone(),
            ends: corners.iter().map(Composition::formula).collect(),
            gap_ev,
            lattice_nm,
            direct: match direct {
                0 => Directness::Nowhere,
                all if all == STEPS + 1 => Directness::Everywhere,
                _ => Directness::InPart,
            },
            source: most_cited(material),
        }
    }

    fn index_figure(
        &self,
        composition: &Composition,
        substrate: Option<&Composition>,
        photon_ev: f64,
    ) -> IndexFigure {
        let refraction = self.refraction(composition, substrate, photon_ev);
        let statement = self.index_statement(refraction.model);
        IndexFigure {
            photon_ev,
            index: refraction.index,
            range: statement.range.clone(),
            source: statement.source.clone(),
            status: statement.status.clone(),
            advice: refraction.advice,
        }
    }

    /// Source and status of an offset rule beside those of the valence edges.
    fn offset_source(&self, offsets: Offsets) -> Vec<(String, String)> {
        let rule = match offsets {
            Offsets::Table => return Vec::new(),
            Offsets::TableUnbowedInGaAs => self.ingaas_rule(),
            Offsets::Share { .. } => self.ingaasp_rule(),
        };
        vec![(rule.source.clone(), rule.status.clone())]
    }

    /// Citations and meanings of all that occurs.
    fn legend(
        &self,
        sections: &[Section],
        index: &[IndexFigure],
        data: &[(String, Vec<Entry>, Vec<Alternate>)],
    ) -> (BTreeMap<String, String>, BTreeMap<String, String>) {
        let mut citations = BTreeMap::new();
        let mut statuses = BTreeMap::new();
        let figures = sections.iter().flat_map(|section| &section.figures);
        let mut sources: Vec<&String> = figures.clone().flat_map(|it| &it.sources).collect();
        let mut codes: Vec<&String> = figures.flat_map(|it| &it.statuses).collect();
        sources.extend(index.iter().map(|it| &it.source));
        codes.extend(index.iter().map(|it| &it.status));
        for (_, entries, alternates) in data {
            sources.extend(entries.iter().map(|it| &it.source));
            codes.extend(entries.iter().map(|it| &it.status));
            sources.extend(alternates.iter().map(|it| &it.source));
        }
        for source in sources {
            let citation = self.table().citation(source);
            citations.insert(source.clone(), citation.to_owned());
        }
        for code in codes {
            let meaning = self.status_meaning(code).unwrap_or_default();
            statuses.insert(code.clone(), meaning.to_owned());
        }
        (citations, statuses)
    }
}

impl Behind<'_> {
    fn lattice_and_gaps(&self, crystal: &Crystal) -> Section {
        let gap = |name, value, keys: &[&str]| self.figure(name, vec![value], "eV", keys);
        Section {
            title: "lattice and gaps, unstrained",
            figures: vec![
                self.figure(
                    "lattice constant",
                    vec![crystal.lattice_nm],
                    "nm",
                    &["a_300", "da_dt"],
                ),
                gap("gap, direct (Γ)", crystal.gap_ev, GAMMA_KEYS),
                self.figure(
                    "gap as a wavelength",
                    vec![wavelength_nm(crystal.gap_ev)],
                    "nm",
                    GAMMA_KEYS,
                ),
                gap(
                    "gap to X",
                    crystal.gap_x_ev,
                    &["eg_x_0", "alpha_x", "beta_x", "eg_x"],
                ),
                gap(
                    "gap to L",
                    crystal.gap_l_ev,
                    &["eg_l_0", "alpha_l", "beta_l", "eg_l"],
                ),
                gap("spin-orbit splitting", crystal.split_off_ev, &["delta_so"]),
            ],
        }
    }

    fn on_substrate(
        &self,
        [crystal, beneath]: [&Crystal; 2],
        edges: &Edges,
        offset_source: &[(String, String)],
    ) -> Section {
        let relaxed_ppm = 1e6 * (crystal.lattice_nm / beneath.lattice_nm - 1.0);
        let growth_strain = -2.0 * crystal.c12_gpa / crystal.c11_gpa * edges.in_plane_strain;
        let perpendicular_ppm =
            1e6 * (crystal.lattice_nm * (1.0 + growth_strain) / beneath.lattice_nm - 1.0);
        let lattice: &[&str] = &["a_300", "da_dt"];
        let stiff: &[&str] = &["a_300", "da_dt", "c11", "c12"];
        let edge = |name, value, keys: &[&str]| {
            let mut figure = self.figure(name, vec![value], "eV", keys);
            for (source, status) in offset_source {
                push_new(&mut figure.sources, source);
                push_new(&mut figure.statuses, status);
            }
            figure
        };
        let conduction = [&["vbo", "ac", "a_300", "c11", "c12"], GAMMA_KEYS].concat();
        let valence = ["vbo", "av", "b", "delta_so", "a_300", "c11", "c12"];
        let gap = [
            &["ac", "av", "b", "delta_so", "a_300", "c11", "c12"],
            GAMMA_KEYS,
        ]
        .concat();
        Section {
            title: "on the substrate",
            figures: vec![
                self.figure(
                    match edges.sense() {
                        Sense::Compressive => "in-plane strain, compressive",
                        Sense::Tensile => "in-plane strain, tensile",
                        Sense::Matched => "in-plane strain, matched",
                    },
                    vec![edges.strain_percent()],
                    "%",
                    lattice,
                ),
                self.figure("mismatch, relaxed", vec![relaxed_ppm], "ppm", lattice),
                self.figure(
                    "mismatch, perpendicular",
                    vec![perpendicular_ppm],
                    "ppm",
                    stiff,
                ),
                self.figure("gap, strained", vec![edges.gap_ev()], "eV", &gap),
                self.figure(
                    "gap, strained, as a wavelength",
                    vec![wavelength_nm(edges.gap_ev())],
                    "nm",
                    &gap,
                ),
                edge("conduction edge", edges.conduction_ev, &conduction),
                edge("heavy-hole edge", edges.heavy_ev, &valence),
                edge("light-hole edge", edges.light_ev, &valence),
            ],
        }
    }

    fn masses(&self, crystal: &Crystal) -> Section {
        let holes: &[&str] = &["gamma1", "gamma2", "m_hh_001", "m_lh_001"];
        let luttinger: &[&str] = &[
            "gamma1",
            "gamma2",
            "gamma3",
            "m_hh_001",
            "m_lh_001",
            "g3_minus_g2",
        ];
        let mass = |name, value, keys: &[&str]| self.figure(name, vec![value], "m0", keys);
        Section {
            title: "masses and momentum matrix element",
            figures: vec![
                mass("electron mass", crystal.electron_mass, &["me_gamma"]),
                mass(
                    "heavy-hole mass along growth",
                    crystal.heavy_mass_growth(),
                    holes,
                ),
                mass(
                    "light-hole mass along growth",
                    crystal.light_mass_growth(),
                    holes,
                ),
                self.figure(
                    "Luttinger parameters",
                    crystal.luttinger.to_vec(),
                    "1",
                    luttinger,
                ),
                self.figure("Kane energy", vec![crystal.kane_energy_ev], "eV", &["ep"]),
            ],
        }
    }

    fn stiffness(&self, crystal: &Crystal) -> Section {
        let one = |name, value, unit, key: &str| self.figure(name, vec![value], unit, &[key]);
        Section {
            title: "deformation potentials and elastic constants",
            figures: vec![
                one(
                    "conduction deformation potential (edge moves by a_c tr)",
                    crystal.ac_ev,
                    "eV",
                    "ac",
                ),
                one(
                    "valence deformation potential (edge moves by +a_v tr)",
                    crystal.av_ev,
                    "eV",
                    "av",
                ),
                one("shear deformation potential b", crystal.b_ev, "eV", "b"),
                one("elastic constant C11", crystal.c11_gpa, "GPa", "c11"),
                one("elastic constant C12", crystal.c12_gpa, "GPa", "c12"),
            ],
        }
    }

    /// A figure with the sources of the keys that it is made from.
    fn figure(
        &self,
        name: &'static str,
        values: Vec<f64>,
        unit: &'static str,
        keys: &[&str],
    ) -> Figure {
        let mut figure = Figure {
            name,
            values,
            unit,
            sources: Vec::new(),
            statuses: Vec::new(),
        };
        for material in self.materials() {
            // the coth law takes the place of Varshni's where there is one
            let coth = material.entries.contains_key("coth_a");
            let replaced = |key: &str| coth && matches!(key, "alpha_gamma" | "beta_gamma");
            for key in keys.iter().filter(|key| !replaced(key)) {
                if let Some(entry) = material.entries.get(*key) {
                    push_new(&mut figure.sources, &entry.source);
                    push_new(&mut figure.statuses, &entry.status);
                }
            }
        }
        figure.statuses.sort();
        figure
    }

    /// The compounds and ternaries that the composition mixes.
    fn materials(&self) -> Vec<&Material> {
        let table = self.parameters.table();
        let elements = self.composition.elements();
        let binaries = compounds()
            .map(|(cation, anion)| pair(&[cation], &[anion]))
            .filter(|compound| compound.is_within(&elements))
            .filter_map(|compound| table.binaries.get(&compound));
        let ternaries = (0..18)
            .map(|place| ternary_elements(place).0)
            .filter(|ternary| ternary.is_within(&elements))
            .filter_map(|ternary| table.ternaries.get(&ternary));
        binaries.chain(ternaries).collect()
    }

    fn data(&self) -> Vec<(String, Vec<Entry>, Vec<Alternate>)> {
        self.materials()
            .into_iter()
            .map(|material| {
                (
                    material.name.clone(),
                    material.entries.values().cloned().collect(),
                    material.alternates.clone(),
                )
            })
            .collect()
    }
}

/// Keys behind the direct gap.
const GAMMA_KEYS: &[&str] = &[
    "eg_gamma_0",
    "alpha_gamma",
    "beta_gamma",
    "coth_a",
    "coth_theta",
    "eg_gamma",
];

/// The compounds of a set of elements.
fn elements_of(elements: Elements) -> Vec<Composition> {
    compounds()
        .filter(|&(cation, anion)| elements.contains(cation) && elements.contains(anion))
        .map(|(cation, anion)| Composition::binary(cation.place(), anion.place()))
        .collect()
}

/// The source of most numbers of a material; of several equals the first in the alphabet.
fn most_cited(material: &Material) -> String {
    let mut counts: BTreeMap<&str, usize> = BTreeMap::new();
    for entry in material.entries.values() {
        *counts.entry(entry.source.as_str()).or_default() += 1;
    }
    let most = counts.values().max().copied().unwrap_or_default();
    counts
        .into_iter()
        .find(|&(_, count)| count == most)
        .map_or_else(|| SHIPPED_NAME.to_owned(), |(source, _)| source.to_owned())
}

fn push_new(list: &mut Vec<String>, word: &str) {
    if !list.iter().any(|known| known == word) {
        list.push(word.to_owned());
    }
}
