//! What the program says when it is called without a command.

use super::Ending;
use super::complaint::Complaint;
use super::outlet::print;

const WELCOME: &str = "\
stepwell computes the active region of a quantum-well laser from one text file:
levels, emission wavelengths, gain.

  stepwell new                            lists structures to start from
  stepwell new estuary-1310 > my.toml     writes one, with comments that teach
  stepwell levels my.toml                 its levels and wavelengths
  stepwell spectrum my.toml               its gain by carrier density
  stepwell --help                         all commands, roles of layers, units
";

pub(super) fn greet() -> Result<Ending, Complaint> {
    print(WELCOME)?;
    Ok(Ending::Done)
}
