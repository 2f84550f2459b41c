//! The two fonts of the documents: glyphs and their widths.

use std::sync::LazyLock;

/// Regular or bold.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Face {
    Regular,
    Bold,
}

impl Face {
    pub(super) const ALL: [Self; 2] = [Self::Regular, Self::Bold];

    pub(super) fn font(self) -> &'static Font {
        match self {
            Self::Regular => &REGULAR,
            Self::Bold => &BOLD,
        }
    }
}

/// What stands for a character that a font does not have.
pub(super) const STRANGER: char = '\u{fffd}';

static REGULAR: LazyLock<Font> = LazyLock::new(|| {
    Font::of(
        "DejaVuSans",
        include_bytes!("fonts/dejavu-sans-regular.ttf"),
    )
});
static BOLD: LazyLock<Font> = LazyLock::new(|| {
    Font::of(
        "DejaVuSans-Bold",
        include_bytes!("fonts/dejavu-sans-bold.ttf"),
    )
});

/// A font.
pub(super) struct Font {
    /// Its name in documents.
    pub(super) name: &'static str,
    /// Its file.
    pub(super) bytes: &'static [u8],
    face: ttf_parser::Face<'static>,
    per_em: f64,
}

impl Font {
    fn of(name: &'static str, bytes: &'static [u8]) -> Self {
        let face = ttf_parser::Face::parse(bytes, 0)
            .expect("the fonts are part of the program, and a test reads them");
        let per_em = f64::from(face.units_per_em());
        Self {
            name,
            bytes,
            face,
            per_em,
        }
    }

    /// The glyph of a character; that of [`STRANGER`] where there is none.
    pub(super) fn glyph(&self, character: char) -> u16 {
        let glyph = |it| self.face.glyph_index(it);
        glyph(character)
            .or_else(|| glyph(STRANGER))
            .map_or(0, |it| it.0)
    }

    /// Whether the font has a character.
    pub(super) fn has(&self, character: char) -> bool {
        self.face.glyph_index(character).is_some()
    }

    /// How far the next glyph stands, em.
    pub(super) fn advance_em(&self, glyph: u16) -> f64 {
        let advance = self.face.glyph_hor_advance(ttf_parser::GlyphId(glyph));
        f64::from(advance.unwrap_or(0)) / self.per_em
    }

    /// Width of a text, em.
    pub(super) fn width_em(&self, text: &str) -> f64 {
        text.chars().map(|it| self.advance_em(self.glyph(it))).sum()
    }

    /// How many glyphs there are.
    pub(super) fn glyphs(&self) -> u16 {
        self.face.number_of_glyphs()
    }

    /// A measure in thousandths of an em, as documents have them.
    fn thousandths(&self, units: i16) -> f32 {
        (1e3 * f64::from(units) / self.per_em) as f32
    }

    /// Lowest left and highest right corner of any glyph, thousandths of an em.
    pub(super) fn bounds(&self) -> [f32; 4] {
        let bounds = self.face.global_bounding_box();
        [bounds.x_min, bounds.y_min, bounds.x_max, bounds.y_max].map(|it| self.thousandths(it))
    }

    /// Ascent, descent and height of capitals, thousandths of an em.
    pub(super) fn heights(&self) -> [f32; 3] {
        let capitals = self.face.capital_height().unwrap_or(self.face.ascender());
        [self.face.ascender(), self.face.descender(), capitals].map(|it| self.thousandths(it))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The fonts are read, have what sheets are written in, and agree with each other in size.
    #[test]
    fn both_fonts_have_the_characters_of_sheets() {
        for face in Face::ALL {
            let font = face.font();
            for character in "Aa0±×·−–—’“”…→▲Δωθµ°″⁻⁰¹²³⁴⁵⁶⁷⁸⁹₀α∥≤éŁčЖ✓•".chars()
            {
                assert!(font.has(character), "{}: {character}", font.name);
            }
            assert!(!font.has('漢'));
            assert_eq!(font.glyph('漢'), font.glyph(STRANGER));
            assert!((font.width_em("0000") - 4.0 * font.width_em("1")).abs() < 1e-9);
        }
    }
}
