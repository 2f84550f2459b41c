//! From bytes to text.

use thiserror::Error;

use super::Place;

/// Largest text that is read, bytes: a hundred times what any structure needs.
pub const LARGEST_TEXT_BYTES: usize = 4 << 20;

/// Why bytes are not a text that can be read.
#[derive(Clone, Debug, Error, PartialEq, Eq)]
pub enum Unreadable {
    /// More bytes than any such file has.
    #[error("the file has {bytes} bytes, and at most {LARGEST_TEXT_BYTES} are read")]
    TooLarge {
        /// Its size.
        bytes: usize,
    },
    /// Two bytes a character.
    #[error("the file is UTF-16 text: save it as UTF-8")]
    Utf16,
    /// A zero byte: an archive, a picture, a program.
    #[error(
        "the file is not text (byte {byte}, on line {line}, is zero): give a structure file in TOML"
    )]
    Binary {
        /// Line, from 1.
        line: usize,
        /// Byte of the file, from 1.
        byte: usize,
    },
    /// Text in another encoding.
    #[error(
        "the file is not UTF-8 text: byte {byte} (0x{value:02x}), on line {line}, column {column}, belongs to no character; save it as UTF-8"
    )]
    NotUtf8 {
        /// Line, from 1.
        line: usize,
        /// Column in characters, from 1.
        column: usize,
        /// Byte of the file, from 1.
        byte: usize,
        /// Its value.
        value: u8,
    },
}

/// The text in `bytes`, a byte-order mark left out.
///
/// # Errors
///
/// [`Unreadable`] for what is too large, not UTF-8 or not text at all, with the place.
pub fn text(bytes: &[u8]) -> Result<&str, Unreadable> {
    if bytes.len() > LARGEST_TEXT_BYTES {
        return Err(Unreadable::TooLarge { bytes: bytes.len() });
    }
    if bytes.starts_with(&[0xff, 0xfe]) || bytes.starts_with(&[0xfe, 0xff]) {
        return Err(Unreadable::Utf16);
    }
    if let Some(at) = bytes.iter().position(|byte| *byte == 0) {
        let line = bytes[..at].split(|byte| *byte == b'\n').count();
        return Err(Unreadable::Binary { line, byte: at + 1 });
    }
    let text = str::from_utf8(bytes).map_err(|error| {
        let at = error.valid_up_to();
        let good = String::from_utf8_lossy(&bytes[..at]);
        let place = Place::of(&good, good.len());
        Unreadable::NotUtf8 {
            line: place.line,
            column: place.column,
            byte: at + 1,
            value: bytes[at],
        }
    })?;
    Ok(text.strip_prefix('\u{feff}').unwrap_or(text))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_byte_order_mark_is_left_out() {
        assert_eq!(text(b"\xef\xbb\xbfformat = 1\r\n"), Ok("format = 1\r\n"));
    }

    #[test]
    fn latin_1_is_refused_at_its_byte() {
        let refused = text(b"format = 1\ntitle = \"M\xfcnze\"\n");
        let expected = Unreadable::NotUtf8 {
            line: 2,
            column: 11,
            byte: 22,
            value: 0xfc,
        };
        assert_eq!(refused, Err(expected));
    }

    #[test]
    fn a_character_cut_off_at_the_end_is_refused() {
        assert!(matches!(
            text(b"a = \xc3"),
            Err(Unreadable::NotUtf8 { byte: 5, .. })
        ));
    }

    #[test]
    fn binary_and_two_byte_text_and_giants_are_named() {
        assert_eq!(
            text(b"\x7fELF\n\0"),
            Err(Unreadable::Binary { line: 2, byte: 6 })
        );
        assert_eq!(text(b"\xff\xfef\0o\0"), Err(Unreadable::Utf16));
        let giant = vec![b'#'; LARGEST_TEXT_BYTES + 1];
        assert_eq!(
            text(&giant),
            Err(Unreadable::TooLarge { bytes: giant.len() })
        );
    }
}
