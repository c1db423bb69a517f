//! One thing wrong with a question, and the place where it stands.

use super::Code;

/// One step of a path into a question: a field name or a list index (from 0).
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Segment {
    /// A member of an object.
    Field(String),
    /// An element of a list.
    Index(usize),
}

/// Where a value stands in the question, from the root.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Path(pub Vec<Segment>);

impl Path {
    /// The path as a JSON Pointer (RFC 6901), for a question sent as a body.
    pub fn pointer(&self) -> String {
        let mut text = String::new();
        for segment in &self.0 {
            text.push('/');
            match segment {
                Segment::Field(name) => text += &name.replace('~', "~0").replace('/', "~1"),
                Segment::Index(index) => text += &index.to_string(),
            }
        }
        text
    }

    /// The path as a query parameter, for a question sent by URL.
    pub fn parameter(&self) -> String {
        let parts: Vec<String> = self
            .0
            .iter()
            .map(|segment| match segment {
                Segment::Field(name) => name.clone(),
                Segment::Index(index) => index.to_string(),
            })
            .collect();
        parts.join(".")
    }

    /// The path of a member of the value at this path.
    pub fn field(&self, name: &str) -> Path {
        self.with(Segment::Field(name.to_owned()))
    }

    /// The path of an element of the list at this path.
    pub fn index(&self, index: usize) -> Path {
        self.with(Segment::Index(index))
    }

    /// The path as far as its names can be read; past that, the value that holds them.
    fn without_long_names(&self) -> Path {
        let long =
            |segment: &&Segment| matches!(segment, Segment::Field(name) if name.len() > LONG);
        Path(
            self.0
                .iter()
                .take_while(|segment| !long(segment))
                .cloned()
                .collect(),
        )
    }

    fn with(&self, segment: Segment) -> Path {
        let mut segments = self.0.clone();
        segments.push(segment);
        Path(segments)
    }
}

/// One fault: what was wrong and what would be right (`detail`), and where.
#[derive(Clone, Debug, PartialEq)]
pub struct Fault {
    /// Which problem it is.
    pub code: Code,
    /// What was wrong and what would be right.
    pub detail: String,
    /// The place in the question; `None` when the fault is of the request as a whole.
    pub path: Option<Path>,
}

impl Fault {
    /// A fault at a place in the question.
    pub fn at(path: &Path, code: Code, detail: impl Into<String>) -> Fault {
        Fault {
            code,
            detail: short(detail.into()),
            path: Some(path.without_long_names()),
        }
    }

    /// A fault of the request as a whole.
    pub fn whole(code: Code, detail: impl Into<String>) -> Fault {
        Fault {
            code,
            detail: short(detail.into()),
            path: None,
        }
    }
}

/// Most characters of a detail, which is for people to read, and bytes of a name in a path.
const LONG: usize = 1000;

/// The text without its middle, when what it quotes is too long to be read.
fn short(text: String) -> String {
    if text.chars().nth(LONG).is_none() {
        return text;
    }
    let head: String = text.chars().take(LONG / 2).collect();
    let end: String = text.chars().rev().take(LONG / 2).collect();
    format!("{head} ... {}", end.chars().rev().collect::<String>())
}
