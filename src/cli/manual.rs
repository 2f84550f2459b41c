//! The manual page: commands and options from the flags, keys from the table of keys.

use super::Ending;
use super::complaint::Complaint;
use super::flags::Flags;
use super::outlet::print;
use crate::structure::{Role, key_reference};
use clap::{Command, CommandFactory as _};
use clap_mangen::Man;
use clap_mangen::roff::{Roff, bold, roman};
use std::io;

const ENDINGS: [(&str, &str); 7] = [
    ("0", "done"),
    ("1", "the computation failed"),
    ("2", "the command line is wrong"),
    ("3", "the input is wrong"),
    ("4", "no answer inside the limits"),
    ("5", "checked and found outside"),
    ("130", "interrupted"),
];

const EXAMPLES: [(&str, &str); 8] = [
    (
        "stepwell new estuary-1310 > my.toml",
        "a structure to start from, with comments",
    ),
    ("stepwell levels my.toml", "its levels and wavelengths"),
    (
        "stepwell spectrum my.toml --at 85C --density 2e18,3e18 --csv hot/",
        "its gain when hot, every table in a folder",
    ),
    (
        "stepwell check my.toml",
        "what may be wrong with it; exit code 5 if something is outside",
    ),
    (
        "stepwell xray my.toml --figure rocking.svg",
        "what a diffractometer will see of the wafer",
    ),
    (
        "stepwell sheet my.toml --for grower --out order/ --pdf",
        "the design sheet of an order: page, PDF, layer table, record",
    ),
    (
        "stepwell restate 850ppm --mismatch relaxed --on InP",
        "one quantity said another way",
    ),
    (
        "stepwell materials In0.2Ga0.8As --on GaAs --at 25C",
        "one alloy with every derived number, its source and its standing",
    ),
];

/// `stepwell manual`: the page in the language of `man`.
pub(super) fn write() -> Result<Ending, Complaint> {
    let mut page = Vec::new();
    render(&mut page).map_err(|error| {
        Complaint::new(
            Ending::Failed,
            format!("the manual can't be written: {error}"),
        )
    })?;
    print(&String::from_utf8_lossy(&page))?;
    Ok(Ending::Done)
}

fn render(page: &mut Vec<u8>) -> io::Result<()> {
    let command = Flags::command();
    let man = Man::new(command.clone());
    man.render_title(page)?;
    man.render_name_section(page)?;
    man.render_synopsis_section(page)?;
    man.render_description_section(page)?;
    commands(&command).to_writer(page)?;
    reference().to_writer(page)
}

/// Every command with its arguments.
fn commands(program: &Command) -> Roff {
    let mut roff = Roff::new();
    roff.control("SH", ["COMMANDS"]);
    for command in program.get_subcommands() {
        let arguments: Vec<String> = command
            .get_positionals()
            .map(|argument| {
                let name = argument.get_value_names().and_then(<[_]>::first);
                let name = name.map_or(argument.get_id().as_str(), |name| name.as_str());
                if argument.is_required_set() {
                    name.to_owned()
                } else {
                    format!("[{name}]")
                }
            })
            .collect();
        roff.control("TP", []);
        roff.text([bold(format!(
            "stepwell {} {}",
            command.get_name(),
            arguments.join(" ")
        ))]);
        roff.text([roman(
            command
                .get_about()
                .map(ToString::to_string)
                .unwrap_or_default(),
        )]);
        roff.control("RS", []);
        let arguments = command.get_arguments().filter(|it| it.get_id() != "help");
        for argument in arguments {
            let value = argument
                .get_value_names()
                .filter(|_| argument.get_action().takes_values())
                .and_then(<[_]>::first);
            let name = match (argument.get_long(), value) {
                (Some(long), Some(value)) => format!("--{long} {value}"),
                (Some(long), None) => format!("--{long}"),
                (None, Some(value)) => value.to_string(),
                (None, None) => argument.get_id().to_string(),
            };
            roff.control("TP", []);
            roff.text([bold(name)]);
            roff.text([roman(
                argument
                    .get_help()
                    .map(ToString::to_string)
                    .unwrap_or_default(),
            )]);
        }
        roff.control("RE", []);
    }
    roff
}

/// Roles, keys, exit status, environment, examples.
fn reference() -> Roff {
    let mut roff = Roff::new();
    roff.control("SH", ["ROLES"]);
    for role in Role::ALL {
        entry(&mut roff, role.word(), role.meaning());
    }
    roff.control("SH", ["KEYS"]);
    roff.control("nf", []);
    for line in key_reference().lines() {
        roff.text([roman(line)]);
    }
    roff.control("fi", []);
    roff.control("SH", ["EXIT STATUS"]);
    for (code, meaning) in ENDINGS {
        entry(&mut roff, code, meaning);
    }
    roff.control("SH", ["ENVIRONMENT"]);
    entry(&mut roff, "NO_COLOR", "if set and not empty: no colours");
    roff.control("SH", ["EXAMPLES"]);
    for (words, meaning) in EXAMPLES {
        entry(&mut roff, words, meaning);
    }
    roff
}

fn entry(roff: &mut Roff, name: &str, meaning: &str) {
    roff.control("TP", []);
    roff.text([bold(name)]);
    roff.text([roman(meaning)]);
}
