//! The sheet as a PDF: the same content and the same figures as the page.
//!
//! Blocks are laid out on sheets of paper first ([`layout`]), which is data that a test can look at;
//! [`writing`] makes a document of it. Two fonts are part of the program and of every document, so
//! that it looks the same everywhere.

mod drawing;
mod font;
mod layout;
mod table;
#[cfg(test)]
mod tests;
mod typesetting;
mod writing;

use super::content::content;
use super::document::Document;
use super::figures::Figures;

/// Size of the paper.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Paper {
    /// 210 mm × 297 mm.
    #[default]
    A4,
    /// 8.5 in × 11 in.
    Letter,
}

impl Paper {
    /// Both.
    pub const ALL: [Self; 2] = [Self::A4, Self::Letter];

    /// The word for it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::A4 => "a4",
            Self::Letter => "letter",
        }
    }

    /// Width and height, points of 1/72 in.
    fn size_pt(self) -> (f64, f64) {
        match self {
            Self::A4 => (595.28, 841.89),
            Self::Letter => (612.0, 792.0),
        }
    }
}

impl Document {
    /// The sheet as a PDF.
    #[must_use]
    pub fn pdf(&self, figures: &Figures, paper: Paper) -> Vec<u8> {
        let content = content(self);
        let foot = format!(
            "{} · {} · structure {}",
            content.name,
            content.copy,
            self.text_at("/stamp/structure_sha256")
                .chars()
                .take(12)
                .collect::<String>()
        );
        let pages = layout::pages(&content, figures, paper, &foot);
        writing::document(&pages, paper, &content.name, self.text_at("/stamp/program"))
    }
}
