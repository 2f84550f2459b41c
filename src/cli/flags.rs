//! The command line as it is written. Nothing is judged here beyond what is a flag and what is not.

mod design;

pub(super) use design::{Aim, Chart, Target, Weigh};

use clap::{Args, Parser, Subcommand};
use design::{AIM_EXAMPLES, CHART_EXAMPLES, WEIGH_EXAMPLES};
use std::path::PathBuf;

/// Width of help texts, columns: the same everywhere.
const COLUMNS: usize = 80;

/// Quantum-well active regions from one plain-text structure file: levels, gain and wavelength.
///
/// A structure file names the layers of an epitaxial stack from the substrate up, each with its
/// material, its thickness and the part it plays. From it come the levels of the wells, the
/// wavelengths they emit, and their gain against photon energy.
#[derive(Debug, Parser)]
#[command(name = "stepwell", version, term_width = COLUMNS, after_help = ROOT_EXAMPLES, after_long_help = ROOT_LONG)]
#[command(disable_help_subcommand = true)]
pub(super) struct Flags {
    #[command(subcommand)]
    pub(super) command: Option<Command>,
}

#[derive(Debug, Subcommand)]
pub(super) enum Command {
    /// Subbands, transitions, wavelengths, and the budget from bulk gap to transition
    #[command(after_help = LEVELS_EXAMPLES, term_width = COLUMNS)]
    Levels(Levels),
    /// Gain, absorption, spontaneous emission and photoluminescence by carrier density
    #[command(after_help = SPECTRUM_EXAMPLES, term_width = COLUMNS)]
    Spectrum(Spectrum),
    /// A structure against physics: barriers, strain, coupling, doping, odd numbers
    #[command(after_help = CHECK_EXAMPLES, term_width = COLUMNS)]
    Check(Check),
    /// Growth errors to wavelength and yield: sensitivities and random wafers
    #[command(after_help = SPREAD_EXAMPLES, term_width = COLUMNS)]
    Spread(Spread),
    /// Measured photoluminescence and X-ray against the design: what was grown
    #[command(after_help = RECONCILE_EXAMPLES, term_width = COLUMNS)]
    Reconcile(Reconcile),
    /// Every structure that has the wavelength asked for, each with its limits
    #[command(after_help = AIM_EXAMPLES, term_width = COLUMNS)]
    Aim(Aim),
    /// A wavelength, gain or strain over two numbers of a structure, as contour lines
    #[command(after_help = CHART_EXAMPLES, term_width = COLUMNS)]
    Chart(Chart),
    /// Structures side by side, or a well beside its bulk, at equal density, current or gain
    #[command(after_help = WEIGH_EXAMPLES, term_width = COLUMNS)]
    Weigh(Weigh),
    /// The design sheet of an epitaxy order, for the grower or for the house
    #[command(after_help = SHEET_EXAMPLES, term_width = COLUMNS)]
    Sheet(Sheet),
    /// What X-rays see of the wafer: peaks, zero order, satellites, rocking curve
    #[command(after_help = XRAY_EXAMPLES, term_width = COLUMNS)]
    Xray(Xray),
    /// One quantity said another way: nm and eV, air and vacuum, kinds of mismatch
    #[command(after_help = RESTATE_EXAMPLES, term_width = COLUMNS)]
    Restate(Restate),
    /// Parameters with their sources: all families, one alloy, or all that a file uses
    #[command(after_help = MATERIALS_EXAMPLES, term_width = COLUMNS)]
    Materials(Materials),
    /// Starting structures: a list, or one of them as a file with comments
    #[command(after_help = NEW_EXAMPLES, term_width = COLUMNS)]
    New {
        /// Name of the structure to write to standard output; none lists them
        #[arg(value_name = "NAME")]
        name: Option<String>,
    },
    /// JSON Schema of the structure file, for editors that complete keys
    #[command(term_width = COLUMNS)]
    Schema,
    /// Completion script for a shell
    #[command(term_width = COLUMNS)]
    Completions {
        /// The shell
        #[arg(value_enum)]
        shell: clap_complete::Shell,
    },
    /// Manual page with every key of the structure file: read it with `man -l -`
    #[command(term_width = COLUMNS)]
    Manual,
}

#[derive(Debug, Args)]
pub(super) struct Levels {
    #[command(flatten)]
    pub(super) file: StructureFile,
    #[command(flatten)]
    pub(super) conditions: Conditions,
    #[command(flatten)]
    pub(super) output: Output,
    /// Also write the matrix whose eigenvalues are the levels, as a Matrix Market file
    #[arg(long, value_name = "FILE.mtx")]
    pub(super) matrix: Option<PathBuf>,
    /// The band of the matrix: electron, heavy, light, valence or valence-mirror (the two blocks of
    /// mixed holes)
    #[arg(long, value_name = "BAND", requires = "matrix")]
    pub(super) matrix_of: Option<String>,
    /// In-plane wave number of a valence matrix, 1/nm [default: 0]
    #[arg(
        long,
        value_name = "K",
        requires = "matrix_of",
        allow_negative_numbers = true
    )]
    pub(super) at_k: Option<f64>,
    /// Draw band edges and envelopes
    #[arg(long, value_name = "PATH.svg")]
    pub(super) figure: Option<PathBuf>,
}

#[derive(Debug, Args)]
pub(super) struct Spectrum {
    #[command(flatten)]
    pub(super) file: StructureFile,
    #[command(flatten)]
    pub(super) conditions: Conditions,
    #[command(flatten)]
    pub(super) output: Output,
    /// Draw gain against photon energy, and peak gain against density
    #[arg(long, value_name = "PATH.svg")]
    pub(super) figure: Option<PathBuf>,
}

#[derive(Debug, Args)]
pub(super) struct Check {
    #[command(flatten)]
    pub(super) file: StructureFile,
    #[command(flatten)]
    pub(super) conditions: Conditions,
    #[command(flatten)]
    pub(super) output: Output,
}

#[derive(Debug, Args)]
pub(super) struct Spread {
    #[command(flatten)]
    pub(super) file: StructureFile,
    #[command(flatten)]
    pub(super) conditions: Conditions,
    /// Of which wavelength: transition, pl or gain; goes before the kind of [target]
    #[arg(long, value_name = "KIND")]
    pub(super) kind: Option<String>,
    /// How many wafers are drawn
    #[arg(long, value_name = "COUNT", default_value = "100000")]
    pub(super) draws: String,
    /// Seed of the random numbers: the same seed draws the same wafers
    #[arg(long, value_name = "NUMBER", default_value_t = 1)]
    pub(super) seed: u64,
    /// A yield in per cent: how small errors must be to reach it
    #[arg(long = "yield", value_name = "PERCENT")]
    pub(super) wanted_yield: Option<String>,
    /// Solve every wafer in full, in place of the quadratic law (slow)
    #[arg(long)]
    pub(super) each_wafer: bool,
    #[command(flatten)]
    pub(super) output: Output,
    /// Draw the distribution and the sensitivities
    #[arg(long, value_name = "PATH.svg")]
    pub(super) figure: Option<PathBuf>,
}

#[derive(Debug, Args)]
pub(super) struct Reconcile {
    #[command(flatten)]
    pub(super) file: StructureFile,
    /// What came back with the wafer (TOML)
    #[arg(value_name = "RETURNED")]
    pub(super) returned: PathBuf,
    /// Valence bands: mixed, or single (heavy and light holes each by itself)
    #[arg(long, value_name = "BANDS")]
    pub(super) bands: Option<String>,
    /// House offsets: measured photoluminescence against the model, run by run
    #[arg(long, value_name = "LEDGER.toml")]
    pub(super) ledger: Option<PathBuf>,
    /// Append this run to the ledger (--force replaces the same run)
    #[arg(long, requires = "ledger")]
    pub(super) record: bool,
    /// Share of the estimate that a correction takes, above 0 to 1
    #[arg(long, value_name = "SHARE", default_value = "0.7")]
    pub(super) damping: String,
    #[command(flatten)]
    pub(super) output: Output,
}

#[expect(
    clippy::struct_excessive_bools,
    reason = "each is a flag of the command line"
)]
#[derive(Debug, Args)]
pub(super) struct Sheet {
    #[command(flatten)]
    pub(super) file: StructureFile,
    /// Who reads it: grower (what to grow, not what for), or house (everything)
    #[arg(long = "for", value_name = "READER")]
    pub(super) audience: String,
    /// Folder for sheet.html, layers.csv, sheet.json and the figures
    #[arg(long, value_name = "FOLDER")]
    pub(super) out: Option<PathBuf>,
    /// Write the sheet as PDF too, sheet.pdf in the folder
    #[arg(long, requires = "out")]
    pub(super) pdf: bool,
    /// Paper of the PDF: a4 or letter
    #[arg(long, value_name = "PAPER", requires = "pdf", default_value = "a4")]
    pub(super) paper: String,
    /// Tell what has changed since an earlier sheet
    #[arg(long, value_name = "SHEET.json")]
    pub(super) since: Option<PathBuf>,
    /// The record as one JSON document in place of the summary
    #[arg(long)]
    pub(super) json: bool,
    /// Leave out the remarks on standard error
    #[arg(long, short)]
    pub(super) quiet: bool,
    /// Write over files that exist
    #[arg(long)]
    pub(super) force: bool,
}

#[derive(Debug, Args)]
pub(super) struct Xray {
    #[command(flatten)]
    pub(super) file: StructureFile,
    /// Reflection of the (001) wafer: 002, 004 or 006
    #[arg(long, value_name = "00L", default_value = "004")]
    pub(super) reflection: String,
    /// Temperature of the wafer on the diffractometer, if not 300 K: 25C or 298.15K
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    pub(super) at: Option<String>,
    /// Draw the rocking curve
    #[arg(long, value_name = "PATH.svg")]
    pub(super) figure: Option<PathBuf>,
    #[command(flatten)]
    pub(super) output: Output,
}

#[derive(Debug, Args)]
pub(super) struct Restate {
    /// A number with its unit: 1310nm, 0.946eV, 850ppm
    #[arg(value_name = "QUANTITY", allow_hyphen_values = true)]
    pub(super) quantity: String,
    /// Of a mismatch or a strain its sense: compressive or tensile
    #[arg(value_name = "SENSE")]
    pub(super) sense: Option<String>,
    /// The wavelength was read in air, not in vacuum
    #[arg(long)]
    pub(super) air: bool,
    /// It is the peak of bulk photoluminescence, not the gap
    #[arg(long)]
    pub(super) pl: bool,
    /// Temperature, if not 300 K: 25C or 298.15K
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    pub(super) at: Option<String>,
    /// It is a width of this line: 1310nm or 0.946eV, in vacuum
    #[arg(long, value_name = "LINE")]
    pub(super) around: Option<String>,
    /// The thickness that carriers share: 5.5nm
    #[arg(long, value_name = "THICKNESS")]
    pub(super) over: Option<String>,
    /// Kind of a mismatch in ppm: relaxed or perpendicular
    #[arg(long, value_name = "KIND")]
    pub(super) mismatch: Option<String>,
    /// The substrate, by formula
    #[arg(long, value_name = "FORMULA")]
    pub(super) on: Option<String>,
    /// The layer of a mismatch or a strain, by formula
    #[arg(long, value_name = "FORMULA")]
    pub(super) layer: Option<String>,
    /// Elements whose composition has this gap: InGaAsP
    #[arg(long, value_name = "ELEMENTS", requires = "on")]
    pub(super) alloy: Option<String>,
    /// Strain of that alloy: matched, 1%compressive or 0.4%tensile
    #[arg(long, value_name = "STRAIN", requires = "alloy")]
    pub(super) strain: Option<String>,
    /// Lay the numbers of a file over the shipped parameters
    #[arg(long = "materials", value_name = "FILE")]
    pub(super) overlay: Option<PathBuf>,
    #[command(flatten)]
    pub(super) output: Output,
}

#[derive(Debug, Args)]
pub(super) struct Materials {
    /// Formula of a material, elements in any order; none lists the families
    #[arg(value_name = "FORMULA", conflicts_with = "used_by")]
    pub(super) formula: Option<String>,
    /// The substrate that it grows on: strain and band edges are then shown
    #[arg(long, value_name = "FORMULA", requires = "formula")]
    pub(super) on: Option<String>,
    /// Every material of a structure file (`-` reads standard input)
    #[arg(long, value_name = "FILE")]
    pub(super) used_by: Option<PathBuf>,
    /// Temperature: 85C or 358.15K
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    pub(super) at: Option<String>,
    /// Lay the numbers of a file over the shipped parameters
    #[arg(long = "materials", value_name = "FILE")]
    pub(super) overlay: Option<PathBuf>,
    #[command(flatten)]
    pub(super) output: Output,
}

#[derive(Debug, Args)]
pub(super) struct StructureFile {
    /// Structure file (TOML); `-` reads standard input
    #[arg(value_name = "FILE")]
    pub(super) path: PathBuf,
    /// Lay the numbers of a file over the shipped parameters
    #[arg(long = "materials", value_name = "FILE")]
    pub(super) overlay: Option<PathBuf>,
}

/// Conditions that go before those of the file.
#[derive(Debug, Args)]
pub(super) struct Conditions {
    /// Temperature: 85C or 358.15K
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    pub(super) at: Option<String>,
    /// Carrier density per volume of the wells, cm^-3: 3e18, or a list 1e18,2e18
    #[arg(long, value_name = "DENSITY", allow_hyphen_values = true)]
    pub(super) density: Vec<String>,
    /// Valence bands: mixed, or single (heavy and light holes each by itself)
    #[arg(long, value_name = "BANDS")]
    pub(super) bands: Option<String>,
}

/// Where results go.
#[derive(Debug, Args)]
pub(super) struct Output {
    /// Results as one JSON document in place of the tables
    #[arg(long)]
    pub(super) json: bool,
    /// Write CSV: a file takes the principal table, a folder (PATH/) every table
    #[arg(long, value_name = "PATH")]
    pub(super) csv: Option<PathBuf>,
    /// Leave out the remarks on standard error
    #[arg(long, short)]
    pub(super) quiet: bool,
    /// Write over files that exist
    #[arg(long)]
    pub(super) force: bool,
}

const ROOT_EXAMPLES: &str = "\
Begin with:
  stepwell new                                  what structures there are
  stepwell new estuary-1310 > my.toml           one of them, with its comments
  stepwell levels my.toml                       its levels and wavelengths

`stepwell COMMAND --help` shows the options of a command and examples;
`stepwell --help` the roles of layers, units and exit codes.";

const ROOT_LONG: &str = "\
Begin with:
  stepwell new                                  what structures there are
  stepwell new estuary-1310 > my.toml           one of them, with its comments
  stepwell levels my.toml                       its levels and wavelengths
  stepwell spectrum my.toml --at 85C            its gain when hot
  stepwell check my.toml                        what may be wrong with it

Roles of layers:
  buffer       starts the epitaxy on the substrate
  cladding     holds the light in, and carries current
  confinement  between cladding and wells: guides the light, holds the carriers
               near
  barrier      between the wells and next to them
  well         where carriers are meant to be; densities are per volume of the
               wells
  step         next to a well: part of its potential, not of its thickness
  spacer       keeps dopants or interfaces apart
  stop         keeps electrons, or an etch, from going further
  contact      carries the metal
  cap          protects the surface; often removed

Units:
  thickness nm · energy eV or meV as its head says · wavelength nm in vacuum
  density cm^-3, per volume of the wells · gain cm^-1 · current density A/cm^2
  temperature 25C or 298.15K · mass in free-electron masses (m0)
  Strain is said by its sense, compressive or tensile, and never by a sign.

Results go to standard output, remarks to standard error. An existing file is
never written over without --force. NO_COLOR switches colours off.

Exit code:
  0 done   1 the computation failed   2 the command line is wrong
  3 the input is wrong   4 no answer inside the limits
  5 checked and found outside   130 interrupted (Ctrl-C)

`stepwell manual | man -l -` shows all this with every key of the file.";

const LEVELS_EXAMPLES: &str = "\
Examples:
  stepwell levels my.toml
  stepwell levels my.toml --at 85C --json > hot.json
  stepwell levels my.toml --csv tables/
  stepwell levels my.toml --matrix electron.mtx
  stepwell levels my.toml --matrix v.mtx --matrix-of valence --at-k 0.3

Energies are in eV on one scale, holes as electron energies; wavelengths in nm
in vacuum. Levels and transitions are without gap shrinkage; the gain peak is
shown with it and without.
CSV files begin with a line behind # that says what the numbers hang on.";

const SPECTRUM_EXAMPLES: &str = "\
Examples:
  stepwell spectrum my.toml
  stepwell spectrum my.toml --at 85C --density 2e18,3e18,4e18
  stepwell spectrum my.toml --csv gain.csv
  stepwell new estuary-980 | stepwell spectrum -

Densities are of electron-hole pairs per volume of the wells, cm^-3; gain is
that of the well material in cm^-1, before any confinement factor.
CSV files begin with a line behind # that says what the numbers hang on.";

const CHECK_EXAMPLES: &str = "\
Examples:
  stepwell check my.toml
  stepwell check my.toml --at 85C || echo look at it
  stepwell check order/sheet.json

Each finding has a code and stands ok (inside its limit), stated (a figure
without a limit), look (worth a look) or outside. Exit code 5 if anything is
outside. A design sheet (sheet.json) is computed again from the structure that
it holds: exit code 5 if anything on it was edited by hand.";

const SPREAD_EXAMPLES: &str = "\
Examples:
  stepwell spread my.toml
  stepwell spread my.toml --yield 95 --figure spread.svg
  stepwell spread my.toml --kind gain --draws 1e6 --seed 7 --json

The file says in [growth] by how much growth varies from run to run, one sigma:
  [growth]
  rate_percent = 1.0
  flux_percent = { In = 0.5, Ga = 0.5, Al = 0.5 }
and in [target] which wavelength counts as good (`tolerance_nm`). An error of a
flux moves thickness and composition of every layer that holds the element.";

const RECONCILE_EXAMPLES: &str = "\
Examples:
  stepwell reconcile my.toml returned.toml
  stepwell reconcile my.toml returned.toml --ledger house.toml --record

The second file says what came back with the wafer:
  [returned]
  run = \"E-0417\"
  [returned.pl]
  peak_nm = 1314.2        # or map = \"e-0417.csv\", beside this file
  temperature_c = 23
  medium = \"air\"
  [returned.xray]
  period_nm = 14.62
  mean_mismatch_ppm = 850
  mismatch = \"perpendicular\"   # or \"relaxed\"
  sense = \"compressive\"
  [assume]                # what the data can't tell and you vouch for
  barrier_ratio_fixed = true
  moved = [\"well.thickness\", \"well.Ga\"]

Exit code 4 where the data leave something open that no assumption settles, or
where no structure explains them; 5 where the wafer to be expected after the
correction is outside a limit.";

const SHEET_EXAMPLES: &str = "\
Examples:
  stepwell sheet my.toml --for grower --out order-b/
  stepwell sheet my.toml --for grower --out order-b/ --pdf --paper letter
  stepwell sheet my.toml --for house --out house-b/
  stepwell sheet my.toml --for grower --out order-c/ --since order-b/sheet.json
  stepwell check order-c/sheet.json

What the sheet says beside the layers stands in [order]: name, revision,
quantity, substrates, tolerances, acceptance, handling. What is left out is
printed as common practice and marked so, or asked for. The grower's copy holds
no gain, no conditions of the device and no title of the structure.
Any browser prints the page on A4 or Letter; --pdf needs none. `check` with a
sheet.json computes it again from the structure that it holds: a sheet edited by
hand is found out.";

const XRAY_EXAMPLES: &str = "\
Examples:
  stepwell xray my.toml
  stepwell xray my.toml --reflection 002
  stepwell xray my.toml --figure rocking.svg --csv rocking.csv

X-rays are Cu K-alpha1 in an omega-2theta scan. Offsets are in omega, arcsec
from the substrate's peak; a detector that reads 2theta moves twice as far.
A wafer is measured at room temperature: the device's temperature in the file
does not count here. It is a command of its own because it answers the grower,
who has a diffractometer and no interest in levels or gain.";

const RESTATE_EXAMPLES: &str = "\
Examples:
  stepwell restate 1310nm
  stepwell restate 1309.6nm --air
  stepwell restate 1100nm --pl --at 25C
  stepwell restate 1250nm --alloy InGaAsP --strain matched --on InP
  stepwell restate 850ppm --mismatch relaxed --on InP
  stepwell restate 1% compressive --layer In0.7Ga0.3As
  stepwell restate 35nm --around 1310nm
  stepwell restate 2e12cm-2 --over 5.5nm
  stepwell restate 85C

A wavelength is also taken as a gap. What a quantity does not say by itself
(kind of mismatch, thickness) is asked for and never assumed.";

const MATERIALS_EXAMPLES: &str = "\
Examples:
  stepwell materials
  stepwell materials In0.2Ga0.8As --on GaAs --at 25C
  stepwell materials --used-by my.toml";

const NEW_EXAMPLES: &str = "\
Examples:
  stepwell new
  stepwell new estuary-1310 > my.toml";

#[cfg(test)]
mod tests {
    use super::*;
    use crate::structure::Role;
    use clap::CommandFactory as _;

    #[test]
    fn the_flags_make_a_command_line() {
        Flags::command().debug_assert();
    }

    #[test]
    fn help_explains_every_role_in_the_words_of_the_program() {
        let help = ROOT_LONG.split_whitespace().collect::<Vec<_>>().join(" ");
        for role in Role::ALL {
            let entry = format!("{} {}", role.word(), role.meaning());
            assert!(help.contains(&entry), "{entry}");
        }
    }

    #[test]
    fn help_fits_its_width() {
        for text in [
            ROOT_EXAMPLES,
            ROOT_LONG,
            LEVELS_EXAMPLES,
            SPECTRUM_EXAMPLES,
            CHECK_EXAMPLES,
            SPREAD_EXAMPLES,
            RECONCILE_EXAMPLES,
            AIM_EXAMPLES,
            CHART_EXAMPLES,
            WEIGH_EXAMPLES,
            SHEET_EXAMPLES,
            XRAY_EXAMPLES,
            RESTATE_EXAMPLES,
            MATERIALS_EXAMPLES,
            NEW_EXAMPLES,
        ] {
            for line in text.lines() {
                assert!(line.chars().count() <= COLUMNS, "{line}");
            }
        }
    }
}
