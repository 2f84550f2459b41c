//! Text with places: what is wrong in a file, where it stands, and how to mend it.
//!
//! This module knows nobody: it holds no word of the structure file or of physics. Bytes become
//! text in [`text`], a fault is a [`Diagnostic`] at a range of bytes of that text, and
//! [`report`] shows faults the way compilers do: name, line, column, the line itself, a caret and
//! advice.
//!
//! ```
//! use stepwell::source::{Colour, Diagnostic, report};
//!
//! let text = "thicknes_nm = 8.0\n";
//! let fault = Diagnostic::new(0..11, "unknown key `thicknes_nm`").with_help("did you mean `thickness_nm`?");
//! let shown = report(&[fault], "my.toml", text, Colour::Never);
//! assert!(shown.contains("my.toml:1:1"));
//! ```

mod diagnostic;
mod spelling;
mod text;
mod tidy;

pub use diagnostic::{Colour, Diagnostic, Place, report};
pub use spelling::{nearest, one_of};
pub use text::{LARGEST_TEXT_BYTES, Unreadable, text};
pub use tidy::tidy;
