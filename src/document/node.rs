//! The parsed tree of a question, before anyone has asked what it means.

use std::borrow::Cow;

use serde::de::{Deserialize, Deserializer, MapAccess, SeqAccess, Visitor};

use super::Code;
use super::fault::{Fault, Path, Segment};

/// A value. Objects keep repeated names, so that they can be refused by name.
#[derive(Clone, Debug, PartialEq)]
pub enum Node<'a> {
    /// Nothing: a missing value.
    Null,
    /// True or false.
    Bool(bool),
    /// A number.
    Number(f64),
    /// Text.
    Text(Cow<'a, str>),
    /// A list.
    List(Vec<Node<'a>>),
    /// Names with values, in the order given.
    Object(Vec<(Cow<'a, str>, Node<'a>)>),
    /// A value from a notation without types (a URL): as written, and as it would read.
    Loose(Cow<'a, str>, Box<Node<'a>>),
}

impl<'a> Node<'a> {
    /// The value with its most specific type.
    pub fn plain(&self) -> &Node<'a> {
        match self {
            Node::Loose(_, parsed) => parsed,
            node => node,
        }
    }

    /// Whether it is null.
    pub fn is_null(&self) -> bool {
        matches!(self.plain(), Node::Null)
    }

    /// What kind of value it is, for messages.
    pub fn describe(&self) -> String {
        match self {
            Node::Null => "null".into(),
            Node::Bool(value) => value.to_string(),
            Node::Number(value) => format!("the number {value}"),
            Node::Text(text) => format!("the text {text:?}"),
            Node::List(items) => format!("a list of {}", items.len()),
            Node::Object(_) => "an object".into(),
            Node::Loose(raw, _) => format!("{raw:?}"),
        }
    }

    /// The same tree with nothing borrowed.
    pub fn into_owned(self) -> Node<'static> {
        let own = |text: Cow<'a, str>| Cow::Owned(text.into_owned());
        match self {
            Node::Null => Node::Null,
            Node::Bool(value) => Node::Bool(value),
            Node::Number(value) => Node::Number(value),
            Node::Text(text) => Node::Text(own(text)),
            Node::List(items) => Node::List(items.into_iter().map(Node::into_owned).collect()),
            Node::Object(members) => Node::Object(
                members
                    .into_iter()
                    .map(|(name, node)| (own(name), node.into_owned()))
                    .collect(),
            ),
            Node::Loose(raw, parsed) => Node::Loose(own(raw), Box::new(parsed.into_owned())),
        }
    }

    /// Reads JSON text (RFC 8259) in UTF-8.
    ///
    /// # Errors
    /// The first fault of syntax, with its line and column.
    pub fn from_json(text: &'a [u8]) -> Result<Node<'a>, Fault> {
        // All at once, since to look at every text for itself would cost as much as to read it.
        let read = match std::str::from_utf8(text) {
            Ok(text) => serde_json::from_str(text),
            Err(_) => serde_json::from_slice(text),
        };
        read.map_err(|error| {
            let message = error.to_string();
            if message.starts_with("number out of range") {
                let detail = format!(
                    "{message}: the largest double is about 1.8e308; choose a unit in which the \
                     value is smaller"
                );
                return Fault::whole(Code::NumberOutOfRange, detail);
            }
            let hint = if text.is_empty() {
                "; the body is empty: send the question as JSON"
            } else if message.contains("expected value") {
                "; NaN and Infinity are not JSON: leave a missing value null"
            } else {
                ""
            };
            Fault::whole(
                Code::Syntax,
                format!("not well-formed JSON: {message}{hint}"),
            )
        })
    }
}

struct NodeVisitor;

impl<'de> Visitor<'de> for NodeVisitor {
    type Value = Node<'de>;

    fn expecting(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str("any JSON value")
    }
    fn visit_unit<E>(self) -> Result<Node<'de>, E> {
        Ok(Node::Null)
    }
    fn visit_bool<E>(self, value: bool) -> Result<Node<'de>, E> {
        Ok(Node::Bool(value))
    }
    fn visit_i64<E>(self, value: i64) -> Result<Node<'de>, E> {
        Ok(Node::Number(value as f64))
    }
    fn visit_u64<E>(self, value: u64) -> Result<Node<'de>, E> {
        Ok(Node::Number(value as f64))
    }
    fn visit_f64<E>(self, value: f64) -> Result<Node<'de>, E> {
        Ok(Node::Number(value))
    }
    fn visit_borrowed_str<E>(self, value: &'de str) -> Result<Node<'de>, E> {
        Ok(Node::Text(Cow::Borrowed(value)))
    }
    fn visit_str<E>(self, value: &str) -> Result<Node<'de>, E> {
        Ok(Node::Text(Cow::Owned(value.to_owned())))
    }
    fn visit_seq<A: SeqAccess<'de>>(self, mut seq: A) -> Result<Node<'de>, A::Error> {
        // Nothing is set aside before it is needed: a body may hold any number of empty lists.
        let mut items = Vec::new();
        while let Some(item) = seq.next_element()? {
            items.push(item);
        }
        Ok(Node::List(items))
    }
    fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<Node<'de>, A::Error> {
        let mut members = Vec::new();
        while let Some(Key(name)) = map.next_key()? {
            members.push((name, map.next_value()?));
        }
        Ok(Node::Object(members))
    }
}

impl<'de> Deserialize<'de> for Node<'de> {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Node<'de>, D::Error> {
        deserializer.deserialize_any(NodeVisitor)
    }
}

/// A member's name, borrowed where it holds no escapes.
struct Key<'a>(Cow<'a, str>);

impl<'de> Deserialize<'de> for Key<'de> {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Key<'de>, D::Error> {
        struct KeyVisitor;
        impl<'de> Visitor<'de> for KeyVisitor {
            type Value = Key<'de>;
            fn expecting(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                f.write_str("a name")
            }
            fn visit_borrowed_str<E>(self, value: &'de str) -> Result<Key<'de>, E> {
                Ok(Key(Cow::Borrowed(value)))
            }
            fn visit_str<E>(self, value: &str) -> Result<Key<'de>, E> {
                Ok(Key(Cow::Owned(value.to_owned())))
            }
        }
        deserializer.deserialize_str(KeyVisitor)
    }
}

/// Where a node stands: a chain back to the root, spelled out only when a fault is reported.
#[derive(Clone, Copy, Debug)]
pub struct Place<'p> {
    parent: Option<&'p Place<'p>>,
    step: Step<'p>,
}

#[derive(Clone, Copy, Debug)]
enum Step<'p> {
    Root,
    Field(&'p str),
    Index(usize),
}

impl<'p> Place<'p> {
    /// The question itself.
    pub const ROOT: Place<'static> = Place {
        parent: None,
        step: Step::Root,
    };

    /// A member of the value at this place.
    pub fn field(&'p self, name: &'p str) -> Place<'p> {
        Place {
            parent: Some(self),
            step: Step::Field(name),
        }
    }

    /// An element of the list at this place.
    pub fn index(&'p self, index: usize) -> Place<'p> {
        Place {
            parent: Some(self),
            step: Step::Index(index),
        }
    }

    /// The place as a path of its own.
    pub fn path(&self) -> Path {
        let mut path = self.parent.map(Place::path).unwrap_or_default();
        match self.step {
            Step::Root => {}
            Step::Field(name) => path.0.push(Segment::Field(name.to_owned())),
            Step::Index(index) => path.0.push(Segment::Index(index)),
        }
        path
    }
}
