//! What a result hangs on, said on every output: program, input, parameters, switches.

use super::number::{plain, power, temperature};
use super::page::Page;
use crate::materials::{Offsets, Parameters};
use crate::structure::Stack;
use serde::Serialize;
use sha2::{Digest as _, Sha256};
use std::fmt::Write as _;

/// What a result hangs on. Two outputs with equal stamps come from the same numbers.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Stamp {
    /// Name and version of the program.
    pub program: String,
    /// SHA-256 of the bytes of the structure file; `None` where there was none.
    pub input_sha256: Option<String>,
    /// SHA-256 of the parameter data in force.
    pub parameters_sha256: String,
    /// The files that the parameter data came from.
    pub parameter_files: Vec<String>,
    /// Temperature, K.
    pub temperature_k: Option<f64>,
    /// Whether the temperature is the default, since nobody gave one.
    pub temperature_is_default: Option<bool>,
    /// Densities, cm⁻³.
    pub densities_cm3: Vec<f64>,
    /// Working density, cm⁻³.
    pub working_density_cm3: Option<f64>,
    /// Switches of the model.
    pub model: Option<Switches>,
    /// Seed of random numbers; `None` where none were drawn.
    pub seed: Option<u64>,
}

/// Switches of the model.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Switches {
    /// `single` or `mixed`.
    pub bands: &'static str,
    /// Whether the electron mass rises with energy.
    pub nonparabolic: bool,
    /// Shape of the line.
    pub lineshape: &'static str,
    /// Intraband relaxation time, fs.
    pub intraband_fs: f64,
    /// Gap shrinkage at 1e18 cm⁻³, meV.
    pub shrinkage_mev: f64,
    /// The offset rule in words; `None` where no level was solved for.
    pub offsets: Option<String>,
    /// Field along growth, kV/cm.
    pub field_kv_cm: f64,
    /// Refractive index, where the file fixes it.
    pub index: Option<f64>,
}

/// SHA-256 of bytes, in hexadecimal.
#[must_use]
pub fn sha256(bytes: &[u8]) -> String {
    Sha256::digest(bytes)
        .iter()
        .fold(String::new(), |mut text, byte| {
            let _ = write!(text, "{byte:02x}");
            text
        })
}

impl Stamp {
    /// The stamp of parameter data alone.
    #[must_use]
    pub fn of_parameters(parameters: &Parameters) -> Self {
        Self {
            program: concat!("stepwell ", env!("CARGO_PKG_VERSION")).to_owned(),
            input_sha256: None,
            parameters_sha256: parameters.sha256(),
            parameter_files: parameters.files(),
            temperature_k: None,
            temperature_is_default: None,
            densities_cm3: Vec::new(),
            working_density_cm3: None,
            model: None,
            seed: None,
        }
    }

    /// The stamp of what is computed from a structure.
    ///
    /// # Arguments
    ///
    /// * `input_sha256` – [`sha256`] of the bytes of the structure file
    /// * `offsets` – the rule that placed the valence edges, where there is a profile
    #[must_use]
    pub fn new(
        stack: &Stack,
        parameters: &Parameters,
        offsets: Option<Offsets>,
        input_sha256: &str,
    ) -> Self {
        let (operation, model) = (&stack.operation, &stack.model);
        Self {
            input_sha256: Some(input_sha256.to_owned()),
            temperature_k: Some(operation.temperature_k),
            temperature_is_default: Some(!operation.temperature_given),
            densities_cm3: operation.densities_cm3.clone(),
            working_density_cm3: Some(operation.working_density_cm3),
            model: Some(Switches {
                bands: model.bands.word(),
                nonparabolic: model.nonparabolic,
                lineshape: model.lineshape.word(),
                intraband_fs: model.intraband_fs,
                shrinkage_mev: model.shrinkage_mev,
                offsets: offsets.map(|offsets| offsets.description()),
                field_kv_cm: model.field_kv_cm,
                index: model.index,
            }),
            ..Self::of_parameters(parameters)
        }
    }

    /// The conditions and switches, each in a few words.
    #[must_use]
    pub fn words(&self) -> Vec<String> {
        let mut words = Vec::new();
        if let Some(kelvin) = self.temperature_k {
            let default = self.temperature_is_default == Some(true);
            let note = if default {
                ", the default since none is given"
            } else {
                ""
            };
            words.push(format!("{}{note}", temperature(kelvin)));
        }
        words.extend(
            self.working_density_cm3
                .map(|density| format!("working density {} cm⁻³", power(density, 6))),
        );
        words.extend(self.model.iter().flat_map(Switches::words));
        if let Some(seed) = self.seed {
            words.push(format!("seed {seed}"));
        }
        words
    }

    /// The stamp on one line.
    #[must_use]
    pub fn line(&self) -> String {
        let mut parts = vec![self.program.clone()];
        parts.extend(
            self.input_sha256
                .iter()
                .map(|sum| format!("input sha256 {sum}")),
        );
        parts.push(format!("parameters sha256 {}", self.parameters_sha256));
        parts.push(format!(
            "parameter files {}",
            self.parameter_files.join(" + ")
        ));
        parts.extend(self.words());
        super::page::tidy(&parts.join("; "))
    }

    /// The stamp at the foot of a page.
    pub(super) fn write(&self, page: &mut Page) {
        const COLUMN: usize = 14;
        page.heading("Stamp");
        page.pair_at(COLUMN, "program", &self.program);
        if let Some(sum) = &self.input_sha256 {
            page.pair_at(COLUMN, "input", sum);
        }
        page.pair_at(COLUMN, "parameters", &self.parameters_sha256);
        if self.parameter_files.len() > 1 {
            page.pair_at(COLUMN, "files", &self.parameter_files.join(" + "));
        }
        let words = self.words();
        if !words.is_empty() {
            page.pair_at(COLUMN, "model", &words.join("; "));
        }
    }
}

impl Switches {
    fn words(&self) -> Vec<String> {
        let mut words = vec![
            format!("{} valence bands", self.bands),
            if self.nonparabolic {
                "electron mass rising with energy".to_owned()
            } else {
                "constant electron masses".to_owned()
            },
            format!("{} line of {} fs", self.lineshape, plain(self.intraband_fs)),
            if self.shrinkage_mev > 0.0 {
                format!(
                    "gap shrinkage {} meV at {} cm⁻³",
                    plain(self.shrinkage_mev),
                    power(1e18, 1)
                )
            } else {
                "no gap shrinkage".to_owned()
            },
        ];
        words.extend(self.offsets.clone());
        words.push(if self.field_kv_cm == 0.0 {
            "no field".to_owned()
        } else {
            format!("field {} kV/cm", plain(self.field_kv_cm))
        });
        words.push(self.index.map_or_else(
            || "index by its model".to_owned(),
            |index| format!("index {} as given", plain(index)),
        ));
        words
    }
}
