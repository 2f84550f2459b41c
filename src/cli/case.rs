//! The files that a command reads.

use super::complaint::Complaint;
use super::flags::StructureFile;
use super::outlet::{Outlet, remark as write_remark};
use super::shipped;
use crate::evaluation;
use crate::materials::{Offsets, Parameters};
use crate::sheet::order::Since;
use crate::sheet::{self, Stamp};
use crate::source::{LARGEST_TEXT_BYTES, Place, Unreadable, nearest, text};
use crate::structure::{self, Overrides, Reading};
use std::fs::{self, File};
use std::io::{self, ErrorKind, Read as _};
use std::path::Path;

/// A file with the name that messages call it by.
pub(super) struct Text {
    pub(super) name: String,
    pub(super) content: String,
    pub(super) sha256: String,
    /// Whether the bytes began with a byte-order mark, which the text has not.
    pub(super) had_byte_order_mark: bool,
}

impl Text {
    /// Reads a file, or standard input for `-`.
    pub(super) fn read(path: &Path) -> Result<Self, Complaint> {
        let from_standard_input = path.as_os_str() == "-";
        let name = if from_standard_input {
            "standard input".to_owned()
        } else {
            path.display().to_string()
        };
        // One byte more than is read: enough to see that there are too many.
        let most = LARGEST_TEXT_BYTES as u64 + 1;
        let mut bytes = Vec::new();
        let read = if from_standard_input {
            io::stdin().lock().take(most).read_to_end(&mut bytes)
        } else {
            File::open(path).and_then(|file| file.take(most).read_to_end(&mut bytes))
        };
        read.map_err(|error| unreadable(path, &name, &error))?;
        let content = text(&bytes)
            .map_err(|error| no_text(path, &name, &error))?
            .to_owned();
        Ok(Self {
            name,
            content,
            sha256: sheet::sha256(&bytes),
            had_byte_order_mark: bytes.starts_with("\u{feff}".as_bytes()),
        })
    }
}

/// What is wrong with the bytes of a file. Of one that is too large only the beginning was read.
fn no_text(path: &Path, name: &str, error: &Unreadable) -> Complaint {
    let Unreadable::TooLarge { bytes: read } = error else {
        return Complaint::input(format!("{name}: {error}"));
    };
    let size = match fs::metadata(path) {
        Ok(file) if file.is_file() => format!("{} bytes", file.len()),
        _ => format!("{read} bytes or more"),
    };
    Complaint::input(format!(
        "`{name}` has {size}, and at most {LARGEST_TEXT_BYTES} are read"
    ))
    .with_remedy("check that it is the file you mean, or leave out what is not needed")
}

fn unreadable(path: &Path, name: &str, error: &io::Error) -> Complaint {
    if path.is_dir() {
        return Complaint::input(format!("`{name}` is a folder"))
            .with_remedy("give a structure file in it");
    }
    match error.kind() {
        ErrorKind::NotFound => {
            let complaint = Complaint::input(format!("there is no file `{name}`"));
            let stem = path.file_stem().and_then(|stem| stem.to_str());
            match stem.and_then(|stem| nearest(stem, shipped::names())) {
                Some(shipped) => complaint.with_remedy(format!(
                    "write the shipped structure to one: stepwell new {shipped} > {shipped}.toml"
                )),
                None => complaint.with_remedy("`stepwell new` lists structures to start from"),
            }
        }
        ErrorKind::PermissionDenied => {
            Complaint::input(format!("`{name}` can't be read: it is not allowed"))
                .with_remedy("check the permissions of the file and of its folder")
        }
        _ => Complaint::input(format!("`{name}` can't be read: {error}"))
            .with_remedy("copy it to another place and give that"),
    }
}

/// The shipped parameters with a file laid over them, if one is given.
pub(super) fn parameters(overlay: Option<&Path>, outlet: &Outlet) -> Result<Parameters, Complaint> {
    let Some(path) = overlay else {
        return Ok(Parameters::shipped());
    };
    let overlay = Text::read(path)?;
    Parameters::shipped()
        .with_overlay(&overlay.content, &overlay.name)
        .map_err(|faults| {
            Complaint::faults(
                &faults,
                &overlay.name,
                &overlay.content,
                outlet.error_colour(),
            )
        })
}

/// A structure file that was accepted, with the parameters it was read with.
pub(super) struct Case {
    source: Text,
    pub(super) parameters: Parameters,
    pub(super) reading: Reading,
}

impl Case {
    /// Reads the structure file that the command line names.
    pub(super) fn of(
        file: &StructureFile,
        overrides: &Overrides,
        outlet: &Outlet,
    ) -> Result<Self, Complaint> {
        Self::read(&file.path, file.overlay.as_deref(), overrides, outlet)
    }

    /// Reads a structure file.
    pub(super) fn read(
        path: &Path,
        overlay: Option<&Path>,
        overrides: &Overrides,
        outlet: &Outlet,
    ) -> Result<Self, Complaint> {
        let parameters = parameters(overlay, outlet)?;
        let source = Text::read(path)?;
        let reading =
            structure::read(&source.content, &parameters, overrides).map_err(|faults| {
                if Since::read(&source.content).is_ok() {
                    return Complaint::input(format!("`{}` is a design sheet", source.name))
                        .with_remedy(format!("this is for it: stepwell check {}", source.name));
                }
                Complaint::faults(
                    &faults,
                    &source.name,
                    &source.content,
                    outlet.error_colour(),
                )
            })?;
        Ok(Self {
            source,
            parameters,
            reading,
        })
    }

    /// The text of the file.
    pub(super) fn text(&self) -> &str {
        &self.source.content
    }

    /// SHA-256 of the bytes of the file.
    pub(super) fn sha256(&self) -> &str {
        &self.source.sha256
    }

    /// The same file under other conditions.
    pub(super) fn under(self, overrides: &Overrides, outlet: &Outlet) -> Result<Self, Complaint> {
        let reading = structure::read(&self.source.content, &self.parameters, overrides).map_err(
            |faults| {
                Complaint::faults(
                    &faults,
                    &self.source.name,
                    &self.source.content,
                    outlet.error_colour(),
                )
            },
        )?;
        Ok(Self { reading, ..self })
    }

    /// The same with the target of the file as it is meant without `overrides`: one that gives no
    /// temperature is for that of [operation], wherever else the structure is looked at.
    pub(super) fn with_own_target(mut self, overrides: &Overrides) -> Self {
        let as_written = Overrides {
            temperature_k: None,
            ..overrides.clone()
        };
        if overrides.temperature_k.is_some()
            && let Some(target) = &mut self.reading.stack.target
            && target.temperature_k.is_none()
            && let Ok(written) =
                structure::read(&self.source.content, &self.parameters, &as_written)
            && written.stack.operation.temperature_given
        {
            target.temperature_k = Some(written.stack.operation.temperature_k);
        }
        self
    }

    /// What results hang on.
    pub(super) fn stamp(&self, offsets: Option<Offsets>) -> Stamp {
        Stamp::new(
            &self.reading.stack,
            &self.parameters,
            offsets,
            &self.source.sha256,
        )
    }

    /// Writes the remarks on the file to standard error.
    pub(super) fn remark_on_file(&self, outlet: &Outlet) {
        for remark in &self.reading.remarks {
            let line = remark
                .span()
                .map(|span| Place::of(&self.source.content, span.start).line);
            let place = line.map(|line| (self.source.name.as_str(), line));
            write_remark(&sheet::remark(
                &remark.message(),
                Some(&remark.advice()),
                place,
                outlet.error_colour(),
            ));
        }
    }
}

/// Writes remarks on results to standard error.
pub(super) fn remark_on_results<'a>(
    remarks: impl IntoIterator<Item = &'a evaluation::Remark>,
    outlet: &Outlet,
) {
    for remark in remarks {
        write_remark(&sheet::remark(
            &remark.message(),
            remark.advice().as_deref(),
            None,
            outlet.error_colour(),
        ));
    }
}
