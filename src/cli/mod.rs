//! Words in, files and exit code out; the only place that prints.
//!
//! Flags come first and mean nothing yet (`flags`); [`wishes`] says what they mean, or which flag
//! is wrong and how to mend it. A command reads a [`case`], computes, and hands texts to the
//! [`outlet`]: results on standard output, remarks on standard error, files whole or not at all.

mod case;
mod commands;
mod complaint;
mod design;
mod flags;
mod gauge;
mod manual;
mod moves;
mod outlet;
mod reconcile;
mod sheet;
mod shipped;
mod spread;
mod wafer;
mod watch;
mod welcome;
mod wishes;

use clap::{CommandFactory as _, FromArgMatches as _};
use complaint::Complaint;
use flags::{Command, Flags};
use outlet::{Outlet, print};
use std::ffi::OsString;
use std::process::ExitCode;

/// How a run ended, as its exit code.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Ending {
    /// Done.
    Done = 0,
    /// The computation failed.
    Failed = 1,
    /// The command line is wrong.
    Usage = 2,
    /// The input is wrong.
    Input = 3,
    /// No answer inside the limits.
    Unanswered = 4,
    /// Checked and found outside.
    Outside = 5,
    /// Interrupted by the user, as shells count it (128 and the number of the signal).
    Interrupted = 130,
}

/// Runs the program on its words, the first of which is its own name.
pub fn run(words: impl IntoIterator<Item = OsString>) -> ExitCode {
    let outlet = Outlet::of_process();
    let ending = flags(words, &outlet).and_then(|flags| match flags {
        Some(flags) => obey(flags, &outlet),
        None => Ok(Ending::Done),
    });
    let ending = ending.unwrap_or_else(|complaint| {
        outlet.complain(&complaint);
        complaint.ending
    });
    ExitCode::from(ending as u8)
}

/// The flags among the words; `None` if they asked for help or the version, which is then shown.
fn flags(
    words: impl IntoIterator<Item = OsString>,
    outlet: &Outlet,
) -> Result<Option<Flags>, Complaint> {
    let read = Flags::command()
        .try_get_matches_from(words)
        .and_then(|matches| Flags::from_arg_matches(&matches));
    match read {
        Ok(flags) => Ok(Some(flags)),
        Err(error) if error.use_stderr() => Err(Complaint::of_flags(&error, outlet)),
        Err(help) => {
            let text = help.render();
            print(&if outlet.has_colour() {
                text.ansi().to_string()
            } else {
                text.to_string()
            })?;
            Ok(None)
        }
    }
}

fn obey(flags: Flags, outlet: &Outlet) -> Result<Ending, Complaint> {
    match flags.command {
        None => welcome::greet(),
        Some(Command::Levels(flags)) => commands::levels(&flags, outlet),
        Some(Command::Spectrum(flags)) => commands::spectrum(&flags, outlet),
        Some(Command::Spread(flags)) => spread::spread(&flags, outlet),
        Some(Command::Reconcile(flags)) => reconcile::reconcile(&flags, outlet),
        Some(Command::Check(flags)) => commands::check(&flags, outlet),
        Some(Command::Aim(flags)) => design::aim(&flags, outlet),
        Some(Command::Chart(flags)) => design::chart(&flags, outlet),
        Some(Command::Weigh(flags)) => design::weigh(&flags, outlet),
        Some(Command::Sheet(flags)) => sheet::sheet(&flags, outlet),
        Some(Command::Xray(flags)) => wafer::xray(&flags, outlet),
        Some(Command::Restate(flags)) => wafer::restate(&flags, outlet),
        Some(Command::Materials(flags)) => commands::materials(&flags, outlet),
        Some(Command::New { name }) => shipped::write(name.as_deref(), outlet),
        Some(Command::Schema) => commands::schema(),
        Some(Command::Completions { shell }) => commands::completions(shell),
        Some(Command::Manual) => manual::write(),
    }
}
