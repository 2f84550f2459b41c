//! Text with places: what is wrong in a file, where it stands, and how to mend it.
//!
//! This module knows nobody: it holds no word of the structure file or of physics.

use std::ops::Range;

/// One fault at its place in a text.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostic {
    /// Bytes of the text that the fault concerns.
    pub span: Range<usize>,
    /// What is wrong.
    pub message: String,
    /// What to do about it.
    pub help: Option<String>,
}

impl Diagnostic {
    /// A fault without advice yet.
    #[must_use]
    pub fn new(span: Range<usize>, message: impl Into<String>) -> Self {
        Self {
            span,
            message: message.into(),
            help: None,
        }
    }

    /// The same with advice.
    #[must_use]
    pub fn with_help(mut self, help: impl Into<String>) -> Self {
        self.help = Some(help.into());
        self
    }
}
