//! A document in TOML, read into the same tree as a question; it knows the line of every place.

use std::borrow::Cow;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::Code;
use super::fault::{Path, Segment};
use super::node::Node;

/// A parsed TOML file: the tree, and where its parts stand in the text.
#[derive(Debug)]
pub struct Toml<'t> {
    text: &'t str,
    table: Spanned<DeTable<'t>>,
}

/// A fault of syntax: its line (from 1) and what was wrong.
#[derive(Clone, Debug, PartialEq)]
pub struct SyntaxFault {
    /// Line, from 1.
    pub line: usize,
    /// Which problem it is: `syntax` or `repeated_field`.
    pub code: Code,
    /// What was wrong.
    pub detail: String,
}

impl<'t> Toml<'t> {
    /// Reads TOML 1.1 text.
    ///
    /// # Errors
    /// Every fault of syntax, a key given twice among them.
    pub fn parse(text: &'t str) -> Result<Toml<'t>, Vec<SyntaxFault>> {
        let (table, errors) = DeTable::parse_recoverable(text);
        if errors.is_empty() {
            return Ok(Toml { text, table });
        }
        let faults = errors.iter().map(|error| SyntaxFault {
            line: line(text, error.span().map_or(0, |span| span.start)),
            code: match error.message() {
                "duplicate key" => Code::RepeatedField,
                _ => Code::Syntax,
            },
            detail: format!("not well-formed TOML: {}", error.message()),
        });
        Err(faults.collect())
    }

    /// The tree; names stand in the order of the file.
    pub fn node(&self) -> Node<'_> {
        self.object(self.table.get_ref())
    }

    fn object<'n>(&self, table: &'n DeTable<'_>) -> Node<'n>
    where
        't: 'n,
    {
        let mut members: Vec<_> = table.iter().collect();
        members.sort_by_key(|(key, _)| key.span().start);
        let named = |(key, value): (&'n Spanned<Cow<str>>, _)| {
            (Cow::Borrowed(key.get_ref().as_ref()), self.value(value))
        };
        Node::Object(members.into_iter().map(named).collect())
    }

    fn value<'n>(&self, value: &'n Spanned<DeValue<'_>>) -> Node<'n>
    where
        't: 'n,
    {
        match value.get_ref() {
            DeValue::String(text) => Node::Text(Cow::Borrowed(text)),
            // What no double can hold is refused where a number is expected.
            DeValue::Float(number) => Node::Number(number.as_str().parse().unwrap_or(f64::NAN)),
            DeValue::Integer(number) => Node::Number(match number.radix() {
                10 => number.as_str().parse().unwrap_or(f64::NAN),
                radix => {
                    u128::from_str_radix(number.as_str(), radix).map_or(f64::NAN, |n| n as f64)
                }
            }),
            DeValue::Boolean(value) => Node::Bool(*value),
            // As written: a parsed date would hold no more than nanoseconds.
            DeValue::Datetime(_) => Node::Text(Cow::Borrowed(&self.text[value.span()])),
            DeValue::Array(items) => {
                Node::List(items.iter().map(|item| self.value(item)).collect())
            }
            DeValue::Table(table) => self.object(table),
        }
    }

    /// The line (from 1) of the deepest part of the path that the file has.
    pub fn line(&self, path: &Path) -> usize {
        let mut start = 0;
        let mut inside: Option<&DeValue> = None;
        for segment in &path.0 {
            let next = match (segment, inside) {
                (Segment::Field(name), None) => member(self.table.get_ref(), name),
                (Segment::Field(name), Some(DeValue::Table(table))) => member(table, name),
                (Segment::Index(i), Some(DeValue::Array(items))) => items
                    .get(*i)
                    .map(|item| (item.span().start, item.get_ref())),
                _ => None,
            };
            let Some((at, value)) = next else { break };
            start = at;
            inside = Some(value);
        }
        line(self.text, start)
    }
}

/// Where a member's name stands, and its value.
fn member<'n, 't>(table: &'n DeTable<'t>, name: &str) -> Option<(usize, &'n DeValue<'t>)> {
    let (key, value) = table.get_key_value(name)?;
    Some((key.span().start, value.get_ref()))
}

fn line(text: &str, offset: usize) -> usize {
    let before = text.as_bytes().iter().take(offset);
    1 + before.filter(|byte| **byte == b'\n').count()
}
