//! How a document is laid out on lines.

use serde::Serialize;
use serde_json::Serializer;
use serde_json::ser::Formatter;
use std::io::{self, Write};

/// A document as text, a line feed at its end. Numbers that are not finite come out as `null`.
pub(super) fn text(document: &impl Serialize) -> String {
    let mut bytes = Vec::new();
    let mut serializer = Serializer::with_formatter(&mut bytes, Lines::default());
    document
        .serialize(&mut serializer)
        .expect("the documents hold text keys only, and memory takes every byte");
    bytes.push(b'\n');
    String::from_utf8(bytes).expect("JSON is UTF-8")
}

/// Keys of an object on lines of their own, a list on one line: spectra of hundreds of numbers
/// would fill hundreds of lines otherwise.
#[derive(Default)]
struct Lines {
    depth: usize,
    has_keys: bool,
}

impl Lines {
    fn feed<W: ?Sized + Write>(&self, writer: &mut W) -> io::Result<()> {
        writer.write_all(b"\n")?;
        for _ in 0..self.depth {
            writer.write_all(b"  ")?;
        }
        Ok(())
    }
}

impl Formatter for Lines {
    fn begin_array_value<W: ?Sized + Write>(
        &mut self,
        writer: &mut W,
        first: bool,
    ) -> io::Result<()> {
        if first {
            Ok(())
        } else {
            writer.write_all(b", ")
        }
    }

    fn begin_object<W: ?Sized + Write>(&mut self, writer: &mut W) -> io::Result<()> {
        self.depth += 1;
        self.has_keys = false;
        writer.write_all(b"{")
    }

    fn end_object<W: ?Sized + Write>(&mut self, writer: &mut W) -> io::Result<()> {
        self.depth -= 1;
        if self.has_keys {
            self.feed(writer)?;
        }
        writer.write_all(b"}")
    }

    fn begin_object_key<W: ?Sized + Write>(
        &mut self,
        writer: &mut W,
        first: bool,
    ) -> io::Result<()> {
        if !first {
            writer.write_all(b",")?;
        }
        self.feed(writer)
    }

    fn begin_object_value<W: ?Sized + Write>(&mut self, writer: &mut W) -> io::Result<()> {
        writer.write_all(b": ")
    }

    fn end_object_value<W: ?Sized + Write>(&mut self, _writer: &mut W) -> io::Result<()> {
        self.has_keys = true;
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    #[test]
    fn lists_stay_on_a_line_and_keys_do_not() {
        let document = json!({"a": [1.5, 2.0], "b": [{"c": null}], "d": {}, "e": f64::NAN});
        let text = super::text(&document);
        assert_eq!(
            text,
            "{\n  \"a\": [1.5, 2.0],\n  \"b\": [{\n    \"c\": null\n  }],\n  \"d\": {},\n  \"e\": null\n}\n"
        );
        let back: serde_json::Value = serde_json::from_str(&text).expect("JSON");
        assert_eq!(back, document);
    }
}
