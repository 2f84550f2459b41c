//! The design loop: aim, chart, weigh, by the library and by the program.

mod movement;
mod outline;
mod planted;
mod program;
mod recipes;

use stepwell::design::{Aim, Move, Outcome, Progress, Quantity, Search, Variation, aim};
use stepwell::materials::Parameters;
use stepwell::structure::{Manuscript, Medium, Overrides, Stack, Wavelength, read};

/// A structure file, read.
struct Design {
    text: String,
    stack: Stack,
    parameters: Parameters,
}

impl Design {
    fn new(text: String) -> Self {
        let parameters = Parameters::shipped();
        let reading = read(&text, &parameters, &Overrides::default())
            .unwrap_or_else(|faults| panic!("{faults:?}\n{text}"));
        Self {
            text,
            stack: reading.stack,
            parameters,
        }
    }

    fn variation(&self, moves: Vec<Move>) -> Variation<'_> {
        let manuscript = Manuscript::new(&self.text).expect("TOML");
        Variation::new(&self.stack, &manuscript, &self.parameters, moves)
            .unwrap_or_else(|error| panic!("{error}\n{}", self.text))
    }

    fn aimed(&self, moves: Vec<Move>, kind: Wavelength, wavelength_nm: f64) -> Outcome {
        self.searched(moves, kind, wavelength_nm, &Search::default())
    }

    fn searched(
        &self,
        moves: Vec<Move>,
        kind: Wavelength,
        wavelength_nm: f64,
        search: &Search,
    ) -> Outcome {
        let target = Aim {
            kind,
            wavelength_nm,
            medium: Medium::Vacuum,
        };
        aim(
            &self.variation(moves),
            &self.text,
            &Overrides::default(),
            &target,
            search,
            &Progress::silent(),
        )
        .expect("an outcome")
    }
}

fn moving(name: &str, quantity: Quantity, from: f64, to: f64) -> Move {
    Move {
        name: name.to_owned(),
        quantity,
        from,
        to,
    }
}

/// One AlGaInAs well on InP, asked for by gap and strain (negative is compressive).
fn prescribed_well(thickness_nm: f64, gap_nm: f64, strain_percent: f64, bands: &str) -> String {
    let strain = if strain_percent < 0.0 {
        format!("compressive_percent = {}", -strain_percent)
    } else {
        format!("tensile_percent = {strain_percent}")
    };
    format!(
        "format = 1
title = \"Estuary study\"
[substrate]
material = \"InP\"
[materials.well]      # what the wells are made of
alloy = \"AlGaInAs\"    # any order
gap_nm = {gap_nm}
{strain}   # by its sense
[materials.barrier]
alloy = \"AlGaInAs\"
gap_nm = 1080
matched = true
[[layers]]
role = \"barrier\"
material = \"barrier\"
thickness_nm = 30
[[layers]]
role = \"well\"
material = \"well\"
thickness_nm = {thickness_nm} # the width
[[layers]]
role = \"barrier\"
material = \"barrier\"
thickness_nm = 30
[operation]
temperature_k = 300
densities_cm3 = [4e18]
[model]
bands = \"{bands}\"
"
    )
}

/// One InGaAs well between GaAs on GaAs, given by its formula.
fn formula_well(thickness_nm: f64, indium: f64) -> String {
    format!(
        "format = 1
[substrate]
material = \"GaAs\"
[[layers]]
role = \"barrier\"
material = \"GaAs\"
thickness_nm = 40
[[layers]]
role = \"well\"
material = \"In{indium}Ga{}As\"   # by composition
thickness_nm = {thickness_nm}
[[layers]]
role = \"barrier\"
material = \"GaAs\"
thickness_nm = 40
[operation]
temperature_k = 300
densities_cm3 = [4e18]
[model]
bands = \"single\"
",
        ((1.0 - indium) * 1e6).round() / 1e6
    )
}
