//! Flags of the commands that design: aim, chart, weigh.

use super::{Conditions, Output, StructureFile};
use clap::Args;
use std::path::PathBuf;

#[derive(Debug, Args)]
pub(in crate::cli) struct Aim {
    #[command(flatten)]
    pub(in crate::cli) file: StructureFile,
    #[command(flatten)]
    pub(in crate::cli) target: Target,
    /// What may change, and how far: well.thickness=4..12nm; once to three times
    #[arg(long = "move", value_name = "NAME.NUMBER=FROM..TO")]
    pub(in crate::cli) moves: Vec<String>,
    /// Structures along the lines of solutions of two moves
    #[arg(long, value_name = "COUNT", default_value_t = 9, value_parser = clap::value_parser!(u16).range(1..=1000))]
    pub(in crate::cli) samples: u16,
    /// Values of a third move
    #[arg(long, value_name = "COUNT", default_value_t = 5, value_parser = clap::value_parser!(u16).range(2..=100))]
    pub(in crate::cli) slices: u16,
    /// Write every solution as a structure file into a folder
    #[arg(long, value_name = "FOLDER")]
    pub(in crate::cli) write: Option<PathBuf>,
    #[command(flatten)]
    pub(in crate::cli) conditions: Conditions,
    #[command(flatten)]
    pub(in crate::cli) output: Output,
}

/// The wavelength that is meant, before that of the file.
#[derive(Debug, Args)]
pub(in crate::cli) struct Target {
    /// Which wavelength: transition, pl or gain
    #[arg(long, value_name = "KIND")]
    pub(in crate::cli) kind: Option<String>,
    /// How long: 1310nm
    #[arg(long, value_name = "WAVELENGTH")]
    pub(in crate::cli) wavelength: Option<String>,
    /// What it is measured in: vacuum or air
    #[arg(long, value_name = "MEDIUM")]
    pub(in crate::cli) medium: Option<String>,
}

#[derive(Debug, Args)]
pub(in crate::cli) struct Chart {
    #[command(flatten)]
    pub(in crate::cli) file: StructureFile,
    /// What changes from left to right: well.thickness=4..12nm
    #[arg(long, value_name = "NAME.NUMBER=FROM..TO")]
    pub(in crate::cli) across: String,
    /// What changes from bottom to top: well.In=0.1..0.3
    #[arg(long, value_name = "NAME.NUMBER=FROM..TO")]
    pub(in crate::cli) up: String,
    /// What is shown: transition, pl, gain (wavelengths), peak-gain, transparency, te-tm, strain,
    /// critical
    #[arg(long, value_name = "FIGURE", default_value = "transition")]
    pub(in crate::cli) of: String,
    /// Points across and up
    #[arg(long, value_name = "COLUMNSxROWS", default_value = "40x30")]
    pub(in crate::cli) points: String,
    #[command(flatten)]
    pub(in crate::cli) target: Target,
    /// Compute only one of several equal parts, for a cluster: 3/16
    #[arg(long, value_name = "PART/PARTS", requires = "csv", conflicts_with_all = ["figure", "join", "json"])]
    pub(in crate::cli) part: Option<String>,
    /// Put the CSV files of all parts together
    #[arg(long, value_name = "PART.csv", num_args = 1.., conflicts_with = "resume")]
    pub(in crate::cli) join: Vec<PathBuf>,
    /// Go on with an interrupted chart from its partial file
    #[arg(long, requires = "csv")]
    pub(in crate::cli) resume: bool,
    /// Draw the chart with contour lines
    #[arg(long, value_name = "PATH.svg")]
    pub(in crate::cli) figure: Option<PathBuf>,
    #[command(flatten)]
    pub(in crate::cli) conditions: Conditions,
    #[command(flatten)]
    pub(in crate::cli) output: Output,
}

#[derive(Debug, Args)]
pub(in crate::cli) struct Weigh {
    /// Structure files (TOML); the first at its working density sets the measure
    #[arg(value_name = "FILE", required = true)]
    pub(in crate::cli) paths: Vec<PathBuf>,
    /// Lay the numbers of a file over the shipped parameters
    #[arg(long = "materials", value_name = "FILE")]
    pub(in crate::cli) overlay: Option<PathBuf>,
    /// Also weigh the material of the first file's well in bulk, strained and unstrained
    #[arg(long)]
    pub(in crate::cli) bulk: bool,
    /// What is equal: volume or sheet density, current or gain
    #[arg(long, value_name = "MEASURE", default_value = "volume")]
    pub(in crate::cli) at_equal: String,
    /// Draw gain spectra and densities of states over one another
    #[arg(long, value_name = "PATH.svg")]
    pub(in crate::cli) figure: Option<PathBuf>,
    #[command(flatten)]
    pub(in crate::cli) conditions: Conditions,
    #[command(flatten)]
    pub(in crate::cli) output: Output,
}

pub(super) const AIM_EXAMPLES: &str = "\
Examples:
  stepwell aim my.toml --move well.thickness=4..12nm
  stepwell aim my.toml --kind pl --wavelength 1310nm --at 85C \\
      --move well.thickness=3..9nm --move well.strain=0..1.2%compressive \\
      --samples 3 --write candidates/
  stepwell aim my.toml --move well.In=0.15..0.25 --json

NAME is a material of the file, or a role whose layers are all alike. Its number
is thickness (nm), the share of an element on its sublattice (0 to 1), strain
(1%tensile..1.5%compressive) or gap (1200..1600nm, of the strained bulk layer).
What gives way when a composition moves is said with the result.
Without --wavelength the file's [target] is aimed at. One move gives every
solution; two give the lines of solutions; three give lines at values of the
third.
Files that are written differ from yours in nothing but what moved.
Exit code 4 if there is no solution; the nearest structure is then shown.";

pub(super) const CHART_EXAMPLES: &str = "\
Examples:
  stepwell chart my.toml --across well.thickness=4..12nm \\
      --up well.strain=1%tensile..1.5%compressive --of pl --figure plane.svg
  stepwell chart my.toml --across well.thickness=4..12nm --up well.In=0.1..0.3 \\
      --of peak-gain --points 100x100 --csv plane.csv --figure plane.svg
  ... --csv plane.csv --resume              after Ctrl-C (exit code 130): go on
  ... --part 3/16 --csv part-3.csv          one of sixteen parts, on a cluster
  ... --join part-*.csv --csv plane.csv     all parts, the same bytes as one run

Figures: transition, pl and gain are wavelengths (nm in vacuum); peak-gain and
te-tm (cm^-1) are at the working density; transparency is a density (cm^-3);
strain is of the well (%, negative where compressive); critical is its thickness
over the critical thickness of a layer that is grown over.
Drawn beside it: the target bold, zero strain, where heavy and light holes
cross, the critical thickness as a hatched band, and the file's own point.";

pub(super) const WEIGH_EXAMPLES: &str = "\
Examples:
  stepwell weigh a.toml b.toml
  stepwell weigh a.toml b.toml --at-equal current --figure two.svg
  stepwell weigh my.toml --bulk --at-equal sheet

Columns are compared at what is equal: the first file at its working density (or
--density) sets the measure. Bulk is as thick as all wells of the first file
together, its bands parabolic and its masses means over all directions.";
