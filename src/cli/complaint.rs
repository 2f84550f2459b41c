//! What went wrong, in words, with the remedy and the exit code.

use super::Ending;
use super::outlet::Outlet;
use super::shipped;
use crate::evaluation::Failure;
use crate::source::{Colour, Diagnostic, report};
use clap::error::{ContextKind, ContextValue, ErrorKind};

/// What goes to standard error before a run ends badly.
#[derive(Debug)]
pub(super) struct Complaint {
    pub(super) ending: Ending,
    words: Words,
}

#[derive(Debug)]
enum Words {
    /// A sentence and what to do.
    Said {
        message: String,
        remedy: Option<String>,
    },
    /// Laid out already.
    Ready(String),
}

impl Complaint {
    pub(super) fn new(ending: Ending, message: impl Into<String>) -> Self {
        Self {
            ending,
            words: Words::Said {
                message: message.into(),
                remedy: None,
            },
        }
    }

    /// A flag, or its value, is wrong.
    pub(super) fn usage(message: impl Into<String>) -> Self {
        Self::new(Ending::Usage, message)
    }

    /// The input is wrong.
    pub(super) fn input(message: impl Into<String>) -> Self {
        Self::new(Ending::Input, message)
    }

    pub(super) fn with_remedy(mut self, what_to_do: impl Into<String>) -> Self {
        if let Words::Said { remedy, .. } = &mut self.words {
            *remedy = Some(what_to_do.into());
        }
        self
    }

    /// Faults of a file at their places.
    pub(super) fn faults(faults: &[Diagnostic], name: &str, text: &str, colour: Colour) -> Self {
        let mut ready = report(faults, name, text, colour);
        ready.push('\n');
        Self {
            ending: Ending::Input,
            words: Words::Ready(ready),
        }
    }

    /// A command line that is none.
    pub(super) fn of_flags(error: &clap::Error, outlet: &Outlet) -> Self {
        let word = match error.get(ContextKind::InvalidSubcommand) {
            Some(ContextValue::String(word)) => Some(word.as_str()),
            _ => None,
        };
        if let (ErrorKind::InvalidSubcommand, Some(word)) = (error.kind(), word) {
            let suggested = error.get(ContextKind::SuggestedSubcommand).is_some();
            if !suggested && looks_like_a_file(word) {
                let is_shipped = shipped::names().any(|name| name == word);
                let remedy = if is_shipped {
                    format!("to write that structure: stepwell new {word} > {word}.toml")
                } else {
                    format!("a command comes first: stepwell levels {word}")
                };
                return Self::usage(format!("`{word}` is no command")).with_remedy(remedy);
            }
        }
        let text = error.render();
        let ready = if outlet.has_error_colour() {
            text.ansi().to_string()
        } else {
            text.to_string()
        };
        Self {
            ending: Ending::Usage,
            words: Words::Ready(ready),
        }
    }

    /// As text for a terminal of 80 columns.
    pub(super) fn text(&self, colour: Colour) -> String {
        match &self.words {
            Words::Ready(text) => text.clone(),
            Words::Said { message, remedy } => {
                crate::sheet::complaint(message, remedy.as_deref(), colour)
            }
        }
    }
}

fn looks_like_a_file(word: &str) -> bool {
    let path = std::path::Path::new(word);
    path.extension().is_some_and(|it| it == "toml")
        || path.exists()
        || shipped::names().any(|name| name == word)
}

impl From<Failure> for Complaint {
    fn from(failure: Failure) -> Self {
        let ending = match failure {
            Failure::Unsolvable(_) | Failure::NoIndex { .. } => Ending::Input,
            _ => Ending::Failed,
        };
        let complaint = Self::new(ending, failure.to_string());
        match failure {
            Failure::Uncertified(_) => complaint.with_remedy(
                "change a thickness or a composition by a little, try `--bands single` if the \
                 bands are mixed, or report the file",
            ),
            _ => complaint,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::subbands::Uncertified;

    #[test]
    fn levels_that_were_not_certified_have_a_remedy() {
        let failure = Failure::Uncertified(Uncertified {
            band: "valence in-plane",
            level: 1,
            energy_ev: f64::NAN,
        });
        let complaint = Complaint::from(failure);
        assert_eq!(complaint.ending, Ending::Failed);
        let text = complaint.text(Colour::Never);
        assert!(
            text.contains("--bands single") && text.contains("report the file"),
            "{text}"
        );
        assert!(!text.contains("NaN"), "{text}");
    }
}
