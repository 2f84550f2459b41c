//! The program: words in, files and exit code out.

use std::process::ExitCode;

fn main() -> ExitCode {
    stepwell::cli::run(std::env::args_os())
}
