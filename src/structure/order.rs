//! The table `[order]`: what an epitaxy order says beside the layers.
//!
//! Every field stands once, in [`fields`]: its key, what it is called on a sheet, what is usual
//! where the file says nothing, and who may read it. The reader, the editor schema, the manual and
//! the sheets all go by that table.

mod fields;

pub use fields::{Field as OrderField, Usual, order_fields};
pub(super) use fields::{ORDER, SECTIONS};

use super::keys::Kind;
use super::number::exact;
use super::reader::{Field, Findings, Given, Values, brief};
use crate::source::Diagnostic;
use std::collections::BTreeMap;
use std::fmt::Write as _;

/// What stands in a field.
#[derive(Clone, Debug, PartialEq)]
pub enum Entry {
    /// Words on one line.
    Text(String),
    /// Several of them.
    List(Vec<String>),
    /// A number in the unit of the field.
    Number(f64),
}

/// Where an entry comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Origin {
    /// The file says it.
    Given,
    /// The file says nothing, and this is what the trade mostly asks for (common practice).
    CommonPractice,
    /// The file says nothing, nothing is usual, and an order needs it.
    AskedFor,
    /// The file says nothing, and an order does without.
    LeftOut,
}

impl Origin {
    /// The word for it in documents.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Given => "given",
            Self::CommonPractice => "common practice",
            Self::AskedFor => "asked for",
            Self::LeftOut => "left out",
        }
    }
}

/// What the file says of an order.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Order {
    given: BTreeMap<&'static str, Entry>,
}

impl Order {
    /// What stands in a field, and where it comes from.
    ///
    /// # Arguments
    ///
    /// * `path` – `revision`, or with its table `wafer.offcut`
    ///
    /// # Panics
    ///
    /// If there is no such field.
    #[must_use]
    pub fn entry(&self, path: &str) -> (Option<Entry>, Origin) {
        if let Some(entry) = self.given.get(path) {
            return (Some(entry.clone()), Origin::Given);
        }
        let field = order_fields()
            .find(|field| field.path == path)
            .unwrap_or_else(|| panic!("`{path}` is no field of an order"));
        match field.usual {
            Usual::Number(number) => (Some(Entry::Number(number)), Origin::CommonPractice),
            Usual::Text(words) => (Some(Entry::Text(words.to_owned())), Origin::CommonPractice),
            Usual::List(items) => {
                let items = items.iter().map(|&item| item.to_owned()).collect();
                (Some(Entry::List(items)), Origin::CommonPractice)
            }
            Usual::Asked => (None, Origin::AskedFor),
            Usual::Nothing => (None, Origin::LeftOut),
        }
    }

    /// The number of a field, given or usual.
    ///
    /// # Panics
    ///
    /// If there is no such field.
    #[must_use]
    pub fn number(&self, path: &str) -> Option<f64> {
        match self.entry(path).0 {
            Some(Entry::Number(number)) => Some(number),
            _ => None,
        }
    }

    /// The words of a field, given or usual.
    ///
    /// # Panics
    ///
    /// If there is no such field.
    #[must_use]
    pub fn text(&self, path: &str) -> Option<String> {
        match self.entry(path).0 {
            Some(Entry::Text(words)) => Some(words),
            _ => None,
        }
    }

    /// Puts something else into a field; `None` empties it.
    ///
    /// # Panics
    ///
    /// If there is no such field.
    pub fn put(&mut self, path: &str, entry: Option<Entry>) {
        let field = order_fields()
            .find(|field| field.path == path)
            .unwrap_or_else(|| panic!("`{path}` is no field of an order"));
        match entry {
            Some(entry) => self.given.insert(field.path, entry),
            None => self.given.remove(field.path),
        };
    }

    /// The order without what the grower is not to read.
    #[must_use]
    pub fn for_grower(&self) -> Self {
        let mut order = self.clone();
        for field in order_fields().filter(|field| !field.for_grower) {
            order.given.remove(field.path);
        }
        order
    }
}

/// The order of a table; a date that is none is complained of.
pub(super) fn order(field: Field<Values>, findings: &mut Findings) -> Option<Order> {
    let mut values = field?.value?;
    let mut order = Order::default();
    for (section, table) in SECTIONS {
        let mut inner = if section.is_empty() {
            None
        } else {
            match values.table(section).and_then(|given| given.value) {
                Some(inner) => Some(inner),
                None => continue,
            }
        };
        let of = inner.as_mut().unwrap_or(&mut values);
        for field in table {
            let key = field.key();
            let entry = match field.kind() {
                Kind::Text | Kind::Prose | Kind::Word(_) => {
                    let given = of.text(key);
                    if key == "date" {
                        complain_of_no_date(given.as_ref(), findings);
                    }
                    given.and_then(|it| it.value).map(Entry::Text)
                }
                Kind::Count(..) => of
                    .count(key)
                    .and_then(|it| it.value)
                    .map(|count| Entry::Number(count as f64)),
                Kind::Number(_) => of.number(key).and_then(|it| it.value).map(Entry::Number),
                Kind::Texts(_) => of
                    .texts(key)
                    .and_then(|it| it.value)
                    .map(|items| Entry::List(items.into_iter().map(|(_, words)| words).collect())),
                _ => None,
            };
            if let Some(entry) = entry {
                order.given.insert(field.path, entry);
            }
        }
    }
    Some(order)
}

fn complain_of_no_date(given: Option<&Given<String>>, findings: &mut Findings) {
    let Some(Given {
        span,
        value: Some(words),
        ..
    }) = given
    else {
        return;
    };
    if !is_date(words) {
        findings.faults.push(
            Diagnostic::new(span.clone(), format!("\"{}\" is no date", brief(words)))
                .with_help("write year, month and day: \"2031-05-02\""),
        );
    }
}

/// Whether words are a day of the calendar, `YYYY-MM-DD` (ISO 8601).
fn is_date(words: &str) -> bool {
    let parts: Vec<&str> = words.split('-').collect();
    let [year, month, day] = parts.as_slice() else {
        return false;
    };
    let number = |digits: &str, length: usize| -> Option<u32> {
        let is_plain = digits.len() == length && digits.bytes().all(|it| it.is_ascii_digit());
        is_plain.then(|| digits.parse().ok()).flatten()
    };
    let (Some(year), Some(month), Some(day)) = (number(year, 4), number(month, 2), number(day, 2))
    else {
        return false;
    };
    let is_leap = year.is_multiple_of(4) && !year.is_multiple_of(100) || year.is_multiple_of(400);
    let days = match month {
        1 | 3 | 5 | 7 | 8 | 10 | 12 => 31,
        4 | 6 | 9 | 11 => 30,
        2 if is_leap => 29,
        2 => 28,
        _ => 0,
    };
    (1..=days).contains(&day)
}

/// The table as a file says it.
pub(super) fn write(order: &Order, text: &mut String) {
    for (section, table) in SECTIONS {
        let given: Vec<_> = table
            .iter()
            .filter_map(|field| Some((field, order.given.get(field.path)?)))
            .collect();
        if given.is_empty() && !section.is_empty() {
            continue;
        }
        let head = if section.is_empty() {
            "order".to_owned()
        } else {
            format!("order.{section}")
        };
        let _ = writeln!(text, "\n[{head}]");
        for (field, entry) in given {
            let value = match entry {
                Entry::Text(words) => super::write::quoted(words),
                Entry::List(items) => {
                    let items: Vec<String> =
                        items.iter().map(|it| super::write::quoted(it)).collect();
                    format!("[{}]", items.join(", "))
                }
                Entry::Number(number) if matches!(field.kind(), Kind::Count(..)) => {
                    format!("{number}")
                }
                Entry::Number(number) => exact(*number),
            };
            let _ = writeln!(text, "{} = {value}", field.key());
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn dates_are_days_of_the_calendar() {
        for words in ["2031-05-02", "2032-02-29", "2000-02-29", "2031-12-31"] {
            assert!(is_date(words), "{words}");
        }
        for words in [
            "2031-5-2",
            "31-05-02",
            "2031-13-01",
            "2031-02-29",
            "2100-02-29",
            "2031-04-31",
            "2031-00-10",
            "2031-01-00",
            "2031/05/02",
            "02.05.2031",
            "2031-05-02T08:00",
            "２０３１-05-02",
            "",
        ] {
            assert!(!is_date(words), "{words}");
        }
    }

    #[test]
    fn the_grower_is_not_told_what_the_device_is_for() {
        let mut order = Order::default();
        order.put("purpose", Some(Entry::Text("a lamp".to_owned())));
        order.put("id", Some(Entry::Text("E-1".to_owned())));
        let told = order.for_grower();
        assert_eq!(told.text("purpose"), None);
        assert_eq!(told.text("id").as_deref(), Some("E-1"));
    }
}
