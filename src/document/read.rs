//! Reading typed values out of a tree. Every fault is noted and reading goes on, so that one
//! answer names all of them.

use std::borrow::Cow;

use super::Code;
use super::fault::Fault;
use super::node::{Node, Place};

/// The faults found so far.
#[derive(Debug, Default)]
pub struct Faults(pub Vec<Fault>);

impl Faults {
    /// So many faults are noted; whoever made more mends these first.
    pub const MOST: usize = 100;

    /// Notes a fault at a place.
    pub fn note(&mut self, place: &Place, code: Code, detail: impl Into<String>) {
        if self.0.len() < Faults::MOST {
            self.0.push(Fault::at(&place.path(), code, detail));
        }
    }

    fn wrong_type<T>(&mut self, node: &Node, place: &Place, expected: &str) -> Option<T> {
        let detail = format!("expected {expected}, got {}", node.describe());
        self.note(place, Code::WrongType, detail);
        None
    }

    /// A finite number.
    pub fn number(&mut self, node: &Node, place: &Place) -> Option<f64> {
        match node.plain() {
            Node::Number(value) if value.is_finite() => Some(*value),
            Node::Number(_) => {
                let detail = format!(
                    "{} is not a finite double; the largest is about 1.8e308",
                    node.describe()
                );
                self.note(place, Code::NumberOutOfRange, detail);
                None
            }
            _ => self.wrong_type(node, place, "a number"),
        }
    }

    /// A text.
    pub fn text<'n>(&mut self, node: &'n Node, place: &Place) -> Option<&'n str> {
        match node {
            Node::Text(text) | Node::Loose(text, _) => Some(text),
            _ => self.wrong_type(node, place, "a text"),
        }
    }

    /// True or false.
    pub fn boolean(&mut self, node: &Node, place: &Place) -> Option<bool> {
        match node.plain() {
            Node::Bool(value) => Some(*value),
            _ => self.wrong_type(node, place, "true or false"),
        }
    }

    /// A whole number that is not negative.
    pub fn whole(&mut self, node: &Node, place: &Place) -> Option<u64> {
        match node.plain() {
            Node::Number(value) if *value >= 0.0 && value.fract() == 0.0 && *value < 9.1e15 => {
                Some(*value as u64)
            }
            _ => self.wrong_type(node, place, "a whole number from 0 to 9e15"),
        }
    }

    /// A list of any length; a single value of a notation without types counts as one of one.
    pub fn list<'n, 'a>(&mut self, node: &'n Node<'a>, place: &Place) -> Option<&'n [Node<'a>]> {
        match (node, node.plain()) {
            (_, Node::List(items)) => Some(items),
            (Node::Loose(..), plain) if !matches!(plain, Node::Object(_)) => {
                Some(std::slice::from_ref(node))
            }
            _ => self.wrong_type(node, place, "a list"),
        }
    }

    /// A list of exactly N values.
    pub fn items<'n, 'a, const N: usize>(
        &mut self,
        node: &'n Node<'a>,
        place: &Place,
        what: &str,
    ) -> Option<&'n [Node<'a>; N]> {
        let items = self.list(node, place)?;
        if let Ok(items) = items.try_into() {
            return Some(items);
        }
        let detail = format!("expected {what}, got {} of them", items.len());
        self.note(place, Code::WrongLength, detail);
        None
    }

    /// N numbers.
    pub fn numbers<const N: usize>(
        &mut self,
        node: &Node,
        place: &Place,
        what: &str,
    ) -> Option<[f64; N]> {
        let items = self.items::<N>(node, place, what)?;
        all(std::array::from_fn(|i| {
            self.number(&items[i], &place.index(i))
        }))
    }

    /// A vector of three numbers.
    pub fn vector(&mut self, node: &Node, place: &Place) -> Option<[f64; 3]> {
        self.numbers(node, place, "three numbers [x, y, z]")
    }

    /// A vector of three numbers, each of which may be missing.
    pub fn partial_vector(&mut self, node: &Node, place: &Place) -> Option<[Option<f64>; 3]> {
        if node.is_null() {
            return Some([None; 3]);
        }
        let items = self.items::<3>(node, place, "three numbers [x, y, z]")?;
        all(std::array::from_fn(|i| {
            let item = &items[i];
            if item.is_null() {
                Some(None)
            } else {
                self.number(item, &place.index(i)).map(Some)
            }
        }))
    }

    /// A matrix of N rows of M numbers.
    pub fn matrix<const N: usize, const M: usize>(
        &mut self,
        node: &Node,
        place: &Place,
    ) -> Option<[[f64; M]; N]> {
        let rows = self.items::<N>(node, place, &format!("{N} rows of {M} numbers"))?;
        let what = format!("{M} numbers in a row");
        all(std::array::from_fn(|i| {
            self.numbers(&rows[i], &place.index(i), &what)
        }))
    }

    /// One of a few words.
    pub fn choice<T: Copy>(
        &mut self,
        node: &Node,
        place: &Place,
        choices: &[(&str, T)],
    ) -> Option<T> {
        let text = self.text(node, place)?;
        if let Some((_, value)) = choices.iter().find(|(name, _)| *name == text) {
            return Some(*value);
        }
        let names: Vec<&str> = choices.iter().map(|(name, _)| *name).collect();
        let detail = format!("{text:?} is not one of {}", names.join(", "));
        self.note(place, Code::UnknownChoice, detail);
        None
    }

    /// The members of an object, all of which must be among `known`. Null counts as absent.
    pub fn members<'n, 'a>(
        &mut self,
        node: &'n Node<'a>,
        place: &Place,
        known: &[&str],
    ) -> Option<Members<'n, 'a>> {
        let Node::Object(members) = node.plain() else {
            let expected = format!("an object with {}", known.join(", "));
            return self.wrong_type(node, place, &expected);
        };
        // Only known names are compared with those before: a body may hold any number of others.
        let mut seen = 0_u64;
        for (name, _) in members {
            let place = place.field(name);
            let Some(i) = known.iter().position(|known| known == name) else {
                let detail = format!("{name:?} is not known here; known are {}", known.join(", "));
                self.note(&place, Code::UnknownField, detail);
                continue;
            };
            if seen & 1 << i != 0 {
                let detail = format!("{name:?} is given twice");
                self.note(&place, Code::RepeatedField, detail);
            }
            seen |= 1 << i;
        }
        Some(Members(members))
    }

    /// The members of an object that may have any names.
    pub fn any_members<'n, 'a>(
        &mut self,
        node: &'n Node<'a>,
        place: &Place,
        expected: &str,
    ) -> Option<Members<'n, 'a>> {
        match node.plain() {
            Node::Object(members) => Some(Members(members)),
            _ => self.wrong_type(node, place, expected),
        }
    }

    /// The only one of `names` that is present.
    pub fn exactly_one<'n, 'a>(
        &mut self,
        members: Members<'n, 'a>,
        place: &Place,
        names: &[&'static str],
    ) -> Option<(&'static str, &'n Node<'a>)> {
        let mut present = names
            .iter()
            .filter_map(|name| Some((*name, members.get(name)?)));
        let Some(first) = present.next() else {
            let detail = format!("one of {} is needed", names.join(", "));
            self.note(place, Code::MissingField, detail);
            return None;
        };
        let others: Vec<&str> = present.map(|(name, _)| name).collect();
        if others.is_empty() {
            return Some(first);
        }
        let detail = format!(
            "{} and {} exclude each other; exactly one of {} is expected",
            first.0,
            others.join(", "),
            names.join(", ")
        );
        self.note(place, Code::ConflictingFields, detail);
        None
    }

    /// A member that must be present.
    pub fn needed<'n, 'a>(
        &mut self,
        members: Members<'n, 'a>,
        place: &Place,
        name: &str,
    ) -> Option<&'n Node<'a>> {
        let found = members.get(name);
        if found.is_none() {
            self.note(
                place,
                Code::MissingField,
                format!("{name:?} is needed here"),
            );
        }
        found
    }
}

/// All of the values, or none.
fn all<T, const N: usize>(values: [Option<T>; N]) -> Option<[T; N]> {
    let whole = values.iter().all(Option::is_some);
    whole.then(|| values.map(|value| value.expect("all are there")))
}

/// The members of an object.
#[derive(Clone, Copy, Debug)]
pub struct Members<'n, 'a>(&'n [(Cow<'a, str>, Node<'a>)]);

impl<'n, 'a> Members<'n, 'a> {
    /// A member's value, unless it is absent or null.
    pub fn get(&self, name: &str) -> Option<&'n Node<'a>> {
        self.given(name).filter(|node| !node.is_null())
    }

    /// A member's value, null included.
    pub fn given(&self, name: &str) -> Option<&'n Node<'a>> {
        self.0
            .iter()
            .find(|(own, _)| own == name)
            .map(|(_, node)| node)
    }

    /// Names and values, in the order given.
    pub fn iter(&self) -> impl Iterator<Item = (&'n str, &'n Node<'a>)> {
        self.0.iter().map(|(name, node)| (name.as_ref(), node))
    }
}
