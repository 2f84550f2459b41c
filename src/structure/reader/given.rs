//! The values that a file gives, each in its place and of the kind that its key asks for.

use std::collections::BTreeMap;
use std::ops::Range;

/// A value in its place; without one where it was refused.
#[derive(Clone, Debug)]
pub(in crate::structure) struct Given<T> {
    /// Bytes of the key.
    pub(in crate::structure) key: Range<usize>,
    /// Bytes of the value.
    pub(in crate::structure) span: Range<usize>,
    /// The value; `None` after a complaint.
    pub(in crate::structure) value: Option<T>,
}

/// The value of a key, if the key is there.
pub(in crate::structure) type Field<T> = Option<Given<T>>;

/// What a field holds, if the key is there and its value was not refused.
pub(in crate::structure) fn value<T: Clone>(field: &Field<T>) -> Option<T> {
    field.as_ref().and_then(|given| given.value.clone())
}

/// A table of the file, its keys checked one by one.
#[derive(Clone, Debug)]
pub(in crate::structure) struct Values {
    /// Bytes of its head, or of all of it where it is written inline.
    pub(in crate::structure) span: Range<usize>,
    pub(super) entries: BTreeMap<&'static str, Given<Value>>,
}

/// A value, checked by itself.
#[derive(Clone, Debug)]
pub(super) enum Value {
    Text(String),
    Flag(bool),
    Count(u64),
    Number(f64),
    Texts(Vec<(Range<usize>, String)>),
    Numbers(Vec<(Range<usize>, f64)>),
    Table(Values),
    Named(Vec<(String, Given<Values>)>),
    Rows(Vec<Values>),
}

impl Values {
    fn take<T>(&mut self, name: &str, convert: impl Fn(Value) -> Option<T>) -> Field<T> {
        self.entries.remove(name).map(|given| Given {
            key: given.key,
            span: given.span,
            value: given.value.and_then(convert),
        })
    }

    /// Names of the keys that are there, refused values among them.
    pub(in crate::structure) fn names(&self) -> impl Iterator<Item = &'static str> {
        self.entries.keys().copied()
    }

    pub(in crate::structure) fn text(&mut self, name: &str) -> Field<String> {
        self.take(name, |value| match value {
            Value::Text(text) => Some(text),
            _ => None,
        })
    }

    pub(in crate::structure) fn flag(&mut self, name: &str) -> Field<bool> {
        self.take(name, |value| match value {
            Value::Flag(flag) => Some(flag),
            _ => None,
        })
    }

    pub(in crate::structure) fn count(&mut self, name: &str) -> Field<u64> {
        self.take(name, |value| match value {
            Value::Count(count) => Some(count),
            _ => None,
        })
    }

    pub(in crate::structure) fn number(&mut self, name: &str) -> Field<f64> {
        self.take(name, |value| match value {
            Value::Number(number) => Some(number),
            _ => None,
        })
    }

    pub(in crate::structure) fn texts(&mut self, name: &str) -> Field<Vec<(Range<usize>, String)>> {
        self.take(name, |value| match value {
            Value::Texts(texts) => Some(texts),
            _ => None,
        })
    }

    pub(in crate::structure) fn numbers(&mut self, name: &str) -> Field<Vec<(Range<usize>, f64)>> {
        self.take(name, |value| match value {
            Value::Numbers(numbers) => Some(numbers),
            _ => None,
        })
    }

    pub(in crate::structure) fn table(&mut self, name: &str) -> Field<Values> {
        self.take(name, |value| match value {
            Value::Table(values) => Some(values),
            _ => None,
        })
    }

    pub(in crate::structure) fn named(
        &mut self,
        name: &str,
    ) -> Field<Vec<(String, Given<Values>)>> {
        self.take(name, |value| match value {
            Value::Named(tables) => Some(tables),
            _ => None,
        })
    }

    pub(in crate::structure) fn rows(&mut self, name: &str) -> Field<Vec<Values>> {
        self.take(name, |value| match value {
            Value::Rows(rows) => Some(rows),
            _ => None,
        })
    }
}
