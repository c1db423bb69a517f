//! The place in a way where the quantity of a sweep is left out.

use std::borrow::Cow;

use super::Over;
use crate::document::{Code, Faults, Node, Path, Place, Segment};

/// The step that lacks the quantity.
#[derive(Debug)]
pub(super) struct Gap {
    over: Over,
    path: Path,
}

/// What a step must name, and what it must not, to be the one.
struct Lacking {
    shorthand: &'static str,
    kind: &'static str,
    has: &'static str,
    lacks: &'static [&'static str],
}

impl Over {
    fn lacking(self) -> Lacking {
        match self {
            Over::Beta | Over::Rapidity => Lacking {
                shorthand: "boost",
                kind: "boost",
                has: "direction",
                lacks: &["beta", "gamma", "rapidity", "kinetic_energy"],
            },
            Over::Angle => Lacking {
                shorthand: "rotation",
                kind: "rotate",
                has: "axis",
                lacks: &["angle"],
            },
        }
    }
}

impl Gap {
    /// Finds the only gap of a way.
    pub(super) fn find(tree: &Node, over: Over, faults: &mut Faults) -> Option<Gap> {
        let lacking = over.lacking();
        let mut found = Vec::new();
        let root = Path::default();
        if let Some(step) = member(tree, lacking.shorthand)
            && lacking.is_gap(step)
        {
            found.push(root.field(lacking.shorthand));
        }
        if let Some(Node::List(steps)) = member(tree, "steps").map(Node::plain) {
            for (i, step) in steps.iter().enumerate() {
                if let Some(step) = member(step, lacking.kind)
                    && lacking.is_gap(step)
                {
                    found.push(root.field("steps").index(i).field(lacking.kind));
                }
            }
        }
        if found.len() == 1 {
            return found.pop().map(|path| Gap { over, path });
        }
        let detail = format!(
            "a sweep over {} needs exactly one step of the way that leaves it out, a {} with \
             {:?} and without {}, but {} do; such as {}.{}={}",
            over.name(),
            lacking.kind,
            lacking.has,
            lacking.lacks.join(", "),
            found.len(),
            lacking.shorthand,
            lacking.has,
            "1,0,0",
        );
        faults.note(&Place::ROOT, Code::MissingField, detail);
        None
    }

    /// Puts a value there.
    pub(super) fn fill(&self, tree: &mut Node<'static>, value: f64) {
        let Some(Node::Object(step)) = node_at(tree, &self.path.0) else {
            return;
        };
        step.retain(|(name, _)| name != self.over.name());
        step.push((Cow::Borrowed(self.over.name()), Node::Number(value)));
    }

    /// Whether a path leads to the step or to the value put there.
    pub(super) fn is_at(&self, path: &Path) -> bool {
        *path == self.path || *path == self.path.field(self.over.name())
    }
}

impl Lacking {
    fn is_gap(&self, step: &Node) -> bool {
        member(step, self.has).is_some()
            && self.lacks.iter().all(|name| member(step, name).is_none())
    }
}

/// A member of an object that is neither absent nor null.
fn member<'n, 'a>(node: &'n Node<'a>, name: &str) -> Option<&'n Node<'a>> {
    let Node::Object(members) = node.plain() else {
        return None;
    };
    let (_, node) = members.iter().find(|(own, _)| own == name)?;
    (!node.is_null()).then_some(node)
}

fn node_at<'n>(node: &'n mut Node<'static>, path: &[Segment]) -> Option<&'n mut Node<'static>> {
    let Some((first, rest)) = path.split_first() else {
        return Some(node);
    };
    match (node, first) {
        (Node::Loose(_, node), _) => node_at(node, path),
        (Node::Object(members), Segment::Field(name)) => {
            let (_, node) = members.iter_mut().find(|(own, _)| own == name)?;
            node_at(node, rest)
        }
        (Node::List(items), Segment::Index(i)) => node_at(items.get_mut(*i)?, rest),
        _ => None,
    }
}
