//! Standard output, standard error, and files.

use super::Ending;
use super::complaint::Complaint;
use crate::source::Colour;
use std::fs;
use std::io::{self, ErrorKind, IsTerminal as _, Write as _};
use std::path::{Path, PathBuf};

/// The colours of standard output and standard error.
#[derive(Debug)]
pub(super) struct Outlet {
    /// Of standard output.
    colour: Colour,
    /// Of standard error.
    error_colour: Colour,
}

impl Outlet {
    /// Standard output and standard error of the process: in colour on a terminal, unless NO_COLOR
    /// is set and not empty.
    pub(super) fn of_process() -> Self {
        let wanted = std::env::var_os("NO_COLOR").is_none_or(|value| value.is_empty())
            && std::env::var_os("TERM").is_none_or(|term| term != "dumb");
        let colour = |is_terminal: bool| {
            if wanted && is_terminal {
                Colour::Always
            } else {
                Colour::Never
            }
        };
        Self {
            colour: colour(io::stdout().is_terminal()),
            error_colour: colour(io::stderr().is_terminal()),
        }
    }

    /// Colour of results.
    pub(super) fn colour(&self) -> Colour {
        self.colour
    }

    /// Colour of remarks and complaints.
    pub(super) fn error_colour(&self) -> Colour {
        self.error_colour
    }

    pub(super) fn has_colour(&self) -> bool {
        self.colour == Colour::Always
    }

    pub(super) fn has_error_colour(&self) -> bool {
        self.error_colour == Colour::Always
    }

    /// Writes a complaint to standard error.
    pub(super) fn complain(&self, complaint: &Complaint) {
        remark(&complaint.text(self.error_colour));
    }
}

/// Writes a result to standard output. A reader that has gone away is no fault.
pub(super) fn print(text: &str) -> Result<(), Complaint> {
    let mut out = io::stdout().lock();
    let written = out.write_all(text.as_bytes()).and_then(|()| out.flush());
    match written {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => Err(Complaint::new(
            Ending::Failed,
            format!("standard output can't be written: {error}"),
        )
        .with_remedy(room_for_it(error.kind()))),
        _ => Ok(()),
    }
}

/// Writes a remark to standard error; nobody has to read it.
pub(super) fn remark(text: &str) {
    let _ = io::stderr().lock().write_all(text.as_bytes());
}

/// Files that a run will write, looked at before the work and written after it.
#[derive(Debug, Default)]
pub(super) struct Files {
    force: bool,
    paths: Vec<PathBuf>,
}

impl Files {
    pub(super) fn new(force: bool) -> Self {
        Self {
            force,
            paths: Vec::new(),
        }
    }

    /// Announces a file in a folder that is there, so that what is in the way is complained of
    /// before any work.
    pub(super) fn announce(&mut self, path: &Path, flag: &str) -> Result<(), Complaint> {
        if let Some(folder) = path.parent()
            && !folder.as_os_str().is_empty()
            && !folder.is_dir()
        {
            return Err(Complaint::usage(format!(
                "{flag} {}: there is no such folder",
                path.display()
            ))
            .with_remedy("make the folder first"));
        }
        self.announce_in_any_folder(path, flag)
    }

    /// Announces a file in a folder that is made when it is written.
    pub(super) fn announce_in_any_folder(
        &mut self,
        path: &Path,
        flag: &str,
    ) -> Result<(), Complaint> {
        if path.as_os_str().is_empty() {
            return Err(Complaint::usage(format!("{flag} has an empty path"))
                .with_remedy("give the name of a file"));
        }
        if path.is_dir() {
            return Err(
                Complaint::usage(format!("{flag}: `{}` is a folder", path.display()))
                    .with_remedy("give the name of a file in it"),
            );
        }
        if self.paths.iter().any(|known| known == path) {
            return Err(
                Complaint::usage(format!("`{}` is asked for twice", path.display()))
                    .with_remedy("give each file a name of its own"),
            );
        }
        if !self.force && is_in_the_way(path) {
            return Err(in_the_way(path));
        }
        self.paths.push(path.to_owned());
        Ok(())
    }

    /// Writes a file: it appears whole or not at all, and never in place of another without
    /// `--force`.
    pub(super) fn write(&self, path: &Path, text: &str) -> Result<(), Complaint> {
        self.write_bytes(path, text.as_bytes())
    }

    /// The same for what is no text.
    pub(super) fn write_bytes(&self, path: &Path, bytes: &[u8]) -> Result<(), Complaint> {
        let failed = |error: io::Error| unwritable(path, &error);
        // What is no plain file (a pipe, a terminal) can only be written to, and holds nothing.
        if fs::metadata(path).is_ok_and(|it| !it.is_file()) {
            return fs::write(path, bytes).map_err(failed);
        }
        // A link stays what it is: the file behind it is replaced.
        let path = fs::canonicalize(path).unwrap_or_else(|_| path.to_owned());
        let folder = match path.parent() {
            Some(folder) if !folder.as_os_str().is_empty() => folder,
            _ => Path::new("."),
        };
        let mut builder = tempfile::Builder::new();
        #[cfg(unix)]
        let builder = {
            use std::os::unix::fs::PermissionsExt as _;
            builder.permissions(fs::Permissions::from_mode(0o666))
        };
        let mut file = builder.tempfile_in(folder).map_err(failed)?;
        file.write_all(bytes).map_err(failed)?;
        let persisted = if self.force {
            file.persist(&path)
        } else {
            file.persist_noclobber(&path)
        };
        match persisted {
            Ok(_) => Ok(()),
            Err(error) if error.error.kind() == ErrorKind::AlreadyExists => Err(in_the_way(&path)),
            Err(error) => Err(failed(error.error)),
        }
    }
}

/// Writes behind what a file holds; a file that is not there is made, with `head` before. Where it
/// can't be written whole the file is left as it was.
pub(super) fn append(path: &Path, head: &str, text: &str) -> Result<(), Complaint> {
    let opened = fs::OpenOptions::new().append(true).open(path);
    match opened {
        Ok(mut file) => whole_or_nothing(&mut file, |file| file.write_all(text.as_bytes()))
            .map_err(|error| unwritable(path, &error)),
        Err(error) if error.kind() == ErrorKind::NotFound => {
            Files::new(false).write(path, &format!("{head}{text}"))
        }
        Err(error) => Err(unwritable(path, &error)),
    }
}

/// Writes behind what a file holds; what was written of it is cut off again where that fails.
fn whole_or_nothing(
    file: &mut fs::File,
    write: impl FnOnce(&mut fs::File) -> io::Result<()>,
) -> io::Result<()> {
    let before = file.metadata()?.len();
    let written = write(file).and_then(|()| file.sync_data());
    if written.is_err() {
        file.set_len(before)?;
    }
    written
}

fn is_in_the_way(path: &Path) -> bool {
    match fs::symlink_metadata(path) {
        Ok(found) if found.is_symlink() => fs::metadata(path).is_ok_and(|it| it.is_file()),
        Ok(found) => found.is_file(),
        Err(_) => false,
    }
}

fn in_the_way(path: &Path) -> Complaint {
    Complaint::usage(format!("`{}` exists and is left as it is", path.display()))
        .with_remedy("--force writes over it")
}

/// Why a file can't be written.
pub(super) fn unwritable(path: &Path, error: &io::Error) -> Complaint {
    let shown = path.display();
    let reason = match error.kind() {
        ErrorKind::NotFound => "there is no such folder".to_owned(),
        ErrorKind::PermissionDenied => "it is not allowed".to_owned(),
        ErrorKind::IsADirectory => "it is a folder".to_owned(),
        _ => error.to_string(),
    };
    Complaint::new(
        Ending::Failed,
        format!("`{shown}` can't be written: {reason}"),
    )
    .with_remedy(room_for_it(error.kind()))
}

/// What lets a file, or a folder, be made.
pub(super) fn room_for_it(kind: ErrorKind) -> &'static str {
    match kind {
        ErrorKind::NotFound => "make the folder first",
        ErrorKind::PermissionDenied | ErrorKind::ReadOnlyFilesystem => {
            "choose another place, or check the permissions of the folder"
        }
        ErrorKind::StorageFull | ErrorKind::QuotaExceeded => {
            "free some space there, or choose another place"
        }
        ErrorKind::IsADirectory => "rename or remove that folder, or choose another name",
        _ => "choose another place",
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_reason_has_its_remedy() {
        for (kind, remedy) in [
            (ErrorKind::PermissionDenied, "check the permissions"),
            (ErrorKind::StorageFull, "free some space"),
            (ErrorKind::IsADirectory, "choose another name"),
            (ErrorKind::NotFound, "make the folder first"),
            (ErrorKind::Other, "choose another place"),
        ] {
            let text = unwritable(Path::new("a.csv"), &kind.into()).text(Colour::Never);
            assert!(text.contains(remedy), "{kind}: {text}");
        }
    }

    #[test]
    fn an_append_that_stops_halfway_leaves_the_old_file() {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("ledger.toml");
        fs::write(&path, "old\n").expect("written");
        let mut file = fs::OpenOptions::new()
            .append(true)
            .open(&path)
            .expect("there");
        let stopped = whole_or_nothing(&mut file, |file| {
            file.write_all(b"half an en")?;
            Err(io::Error::other("the disk is full"))
        });
        assert!(stopped.is_err());
        assert_eq!(fs::read_to_string(&path).expect("there"), "old\n");
        append(&path, "head\n", "new\n").expect("written");
        assert_eq!(fs::read_to_string(&path).expect("there"), "old\nnew\n");
    }
}
