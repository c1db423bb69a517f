//! A question written as the query of a URL: each parameter is a path into the same tree.
//!
//! `units.e=mV/m&e=0,1.2,0` is `{"units": {"e": "mV/m"}, "e": [0, 1.2, 0]}`. Lists are comma
//! lists; a value that begins with `[` or `{` is JSON text; an empty value is missing.

use std::borrow::Cow;

use percent_encoding::percent_decode;

use super::Code;
use super::fault::{Fault, Path, Segment};
use super::node::Node;

/// Deepest path a parameter may have.
const MAX_DEPTH: usize = 16;

/// What is wrong with a text that cannot be decoded.
const UNDECODABLE: &str = "holds a % that two hex digits do not follow, or is not UTF-8 once \
                           decoded; a literal % is written %25";

/// Reads a query (without the question mark) into a tree.
///
/// # Errors
/// Every parameter that is not well-formed, by name.
pub fn from_query(query: &str) -> Result<Node<'static>, Vec<Fault>> {
    let mut root = Vec::new();
    let mut faults = Vec::new();
    for pair in query.split('&').filter(|pair| !pair.is_empty()) {
        let (name, value) = pair.split_once('=').unwrap_or((pair, ""));
        let Some(name) = decoded(name) else {
            let detail = format!("the name of the parameter {name:?} {UNDECODABLE}");
            faults.push(Fault::whole(Code::Syntax, detail));
            continue;
        };
        let segments: Vec<&str> = name.split('.').collect();
        let path = Path(
            segments
                .iter()
                .map(|s| Segment::Field((*s).to_owned()))
                .collect(),
        );
        if segments.len() > MAX_DEPTH || segments.iter().any(|segment| segment.is_empty()) {
            let detail = format!("{name:?} is not a path of names joined by dots");
            faults.push(Fault::at(&path, Code::Syntax, detail));
            continue;
        }
        let value = decoded(value)
            .ok_or_else(|| Fault::at(&path, Code::Syntax, format!("the value {UNDECODABLE}")));
        match value.and_then(|value| leaf(value, &path)) {
            Ok(node) => insert(&mut root, &segments, node),
            Err(fault) => faults.push(fault),
        }
    }
    if faults.is_empty() {
        Ok(Node::Object(root))
    } else {
        Err(faults)
    }
}

/// Form decoding: + is a space, %xx a byte.
fn decoded(text: &str) -> Option<String> {
    let mut escapes = text.split('%').skip(1);
    let hex = |rest: &str| rest.bytes().take(2).filter(u8::is_ascii_hexdigit).count() == 2;
    if !escapes.all(hex) {
        return None;
    }
    let spaced = text.replace('+', " ");
    percent_decode(spaced.as_bytes())
        .decode_utf8()
        .ok()
        .map(Cow::into_owned)
}

fn leaf(text: String, path: &Path) -> Result<Node<'static>, Fault> {
    if text.starts_with(['[', '{']) {
        return match Node::from_json(text.as_bytes()) {
            Ok(node) => Ok(node.into_owned()),
            Err(fault) => Err(Fault {
                path: Some(path.clone()),
                ..fault
            }),
        };
    }
    if !text.contains(',') {
        return Ok(loose(text));
    }
    let items = text.split(',').map(|item| loose(item.to_owned())).collect();
    Ok(Node::Loose(Cow::Owned(text), Box::new(Node::List(items))))
}

fn loose(text: String) -> Node<'static> {
    let parsed = match text.trim() {
        "" | "null" => Node::Null,
        "true" => Node::Bool(true),
        "false" => Node::Bool(false),
        // Rust reads "nan" and "inf" as numbers; they are not numbers here, and what is too
        // large for a double is refused where a number is expected.
        number if number.starts_with(|c: char| c.is_ascii_digit() || "+-.".contains(c)) => {
            let digits = number.bytes().any(|b| b.is_ascii_digit());
            match number.parse::<f64>() {
                Ok(value) if digits => Node::Number(value),
                _ => Node::Text(Cow::Owned(text.clone())),
            }
        }
        _ => Node::Text(Cow::Owned(text.clone())),
    };
    Node::Loose(Cow::Owned(text), Box::new(parsed))
}

/// Puts a value at the end of a path. Where the path meets a plain value or itself, a second
/// member of the same name is left for the reader to refuse.
fn insert(
    members: &mut Vec<(Cow<'static, str>, Node<'static>)>,
    path: &[&str],
    node: Node<'static>,
) {
    let (first, rest) = (path[0], &path[1..]);
    if rest.is_empty() {
        members.push((Cow::Owned(first.to_owned()), node));
        return;
    }
    let inner = members.iter_mut().find_map(|(name, node)| match node {
        Node::Object(inner) if name == first => Some(inner),
        _ => None,
    });
    match inner {
        Some(inner) => insert(inner, rest, node),
        None => {
            let mut inner = Vec::new();
            insert(&mut inner, rest, node);
            members.push((Cow::Owned(first.to_owned()), Node::Object(inner)));
        }
    }
}
