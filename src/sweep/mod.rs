//! A sweep: one question asked many times, with one quantity of its way running through a range.
//!
//! The way leaves that quantity out of exactly one of its steps, a boost with a direction but no
//! speed or a rotation with an axis but no angle, and the sweep puts it there.

mod answer;
mod gap;

pub use answer::{Columns, Swept};

use std::borrow::Cow;

use crate::document::{Code, Fault, Faults, Members, Node, Path, Place};
use crate::question::{Deployment, Question};
use gap::Gap;

/// The names that a sweep has beside those of a question.
pub const KNOWN: [&str; 5] = ["over", "start", "stop", "points", "scale"];

/// Parts of a question that have no place in a sweep.
const NOT_SWEPT: [&str; 3] = ["include", "signature", "monte_carlo"];

/// How many points there are when the question does not say.
const POINTS: u64 = 200;

/// The quantity that runs.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Over {
    /// β of a boost along a given direction.
    Beta,
    /// Rapidity of a boost along a given direction.
    Rapidity,
    /// Angle of a rotation about a given axis, in `units.angle`.
    Angle,
}

impl Over {
    const CHOICES: [(&str, Over); 3] = [
        ("beta", Over::Beta),
        ("rapidity", Over::Rapidity),
        ("angle", Over::Angle),
    ];

    /// The name of the quantity in a step.
    pub fn name(self) -> &'static str {
        Over::CHOICES[self as usize].0
    }
}

/// How a picture of a sweep divides its axis of values.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Division {
    /// Evenly.
    Linear,
    /// By powers of ten, of absolute values.
    Logarithmic,
}

/// A sweep understood: every one of its questions can be asked.
#[derive(Debug)]
pub struct Sweep {
    /// The quantity that runs.
    pub over: Over,
    /// Its values, from first to last.
    pub values: Vec<f64>,
    /// How a picture divides its axis of values.
    pub division: Division,
    /// The question at the first value.
    pub first: Question,
    tree: Node<'static>,
    gap: Gap,
}

impl Sweep {
    /// Reads a sweep of at most `most` points.
    ///
    /// # Errors
    /// Every fault found in it.
    pub fn read(
        node: Node<'static>,
        deployment: &Deployment,
        most: usize,
    ) -> Result<Sweep, Vec<Fault>> {
        let mut faults = Faults::default();
        let sweep = read(node, deployment, most, &mut faults);
        match sweep {
            Some(sweep) if faults.0.is_empty() => Ok(sweep),
            _ => Err(faults.0),
        }
    }

    /// All that the answer depends on, in one text.
    pub fn canonical(&self) -> String {
        let Sweep {
            over,
            values,
            division,
            first,
            ..
        } = self;
        let (count, last) = (values.len(), values.last());
        format!(
            "{over:?} {last:?} {count} {division:?} {:?} {first:?}",
            self.gap
        )
    }
}

fn read(
    node: Node<'static>,
    deployment: &Deployment,
    most: usize,
    faults: &mut Faults,
) -> Option<Sweep> {
    let Node::Object(members) = node else {
        return faults.members(&node, &Place::ROOT, &KNOWN).and(None);
    };
    let own = |member: &(Cow<str>, Node)| KNOWN.contains(&member.0.as_ref());
    let (own, rest): (Vec<_>, Vec<_>) = members.into_iter().partition(own);
    let own = Node::Object(own);
    let own = faults.members(&own, &Place::ROOT, &KNOWN)?;
    let over = faults
        .needed(own, &Place::ROOT, "over")
        .and_then(|node| faults.choice(node, &Place::ROOT.field("over"), &Over::CHOICES));
    let ends = ["start", "stop"].map(|name| {
        let node = faults.needed(own, &Place::ROOT, name)?;
        faults.number(node, &Place::ROOT.field(name))
    });
    let points = points(own, most, faults);
    let division = match own.get("scale") {
        Some(node) => {
            let choices = [("linear", Division::Linear), ("log", Division::Logarithmic)];
            faults.choice(node, &Place::ROOT.field("scale"), &choices)
        }
        None => Some(Division::Linear),
    };
    for (name, _) in rest
        .iter()
        .filter(|(name, _)| NOT_SWEPT.contains(&name.as_ref()))
    {
        let detail = format!("{name:?} has no place in a sweep; ask /v1/transform for it");
        faults.note(&Place::ROOT.field(name), Code::UnknownField, detail);
    }
    let mut tree = Node::Object(rest);
    let gap = Gap::find(&tree, over?, faults)?;
    let [start, stop] = ends;
    let (start, stop) = (start?, stop?);
    if start == stop {
        let detail = format!("the range begins and ends at {start}; give another stop");
        faults.note(&Place::ROOT.field("stop"), Code::EmptyRange, detail);
        return None;
    }
    let first = ask(&mut tree, &gap, start, "start", deployment, faults);
    ask(&mut tree, &gap, stop, "stop", deployment, faults);
    Some(Sweep {
        over: over?,
        values: values(start, stop, points?),
        division: division?,
        first: first?,
        tree,
        gap,
    })
}

fn points(own: Members, most: usize, faults: &mut Faults) -> Option<usize> {
    let place = Place::ROOT.field("points");
    let points = match own.get("points") {
        Some(node) => faults.whole(node, &place)?,
        None => POINTS.min(most as u64),
    };
    match usize::try_from(points) {
        Ok(count) if (2..=most).contains(&count) => Some(count),
        _ => {
            let detail = format!("{points} points; this service takes from 2 to {most}");
            faults.note(&place, Code::PointsOutOfRange, detail);
            None
        }
    }
}

/// Evenly spaced values from start to stop, both included and none beyond.
fn values(start: f64, stop: f64, points: usize) -> Vec<f64> {
    let (low, high) = (start.min(stop), start.max(stop));
    let last = points - 1;
    let value = |i: usize| match i {
        0 => start,
        _ if i == last => stop,
        _ => {
            let t = i as f64 / last as f64;
            ((1.0 - t) * start + t * stop).clamp(low, high)
        }
    };
    (0..points).map(value).collect()
}

/// The question at one end of the range. What the value does there is blamed on that end; what is
/// wrong at both ends is said once.
fn ask(
    tree: &mut Node<'static>,
    gap: &Gap,
    value: f64,
    end: &str,
    deployment: &Deployment,
    faults: &mut Faults,
) -> Option<Question> {
    gap.fill(tree, value);
    match Question::read(tree, deployment) {
        Ok(question) => Some(question),
        Err(found) => {
            for mut fault in found {
                let at = fault.path.as_ref();
                let of_value = match fault.code {
                    Code::FasterThanLight => at.is_some_and(|path| gap.is_at(path)),
                    Code::PrecisionExhausted => true,
                    _ => false,
                };
                if of_value {
                    fault.path = Some(Place::ROOT.field(end).path());
                }
                if fault.code == Code::UnknownField && fault.path.as_ref().is_some_and(at_top) {
                    fault.detail += ", and for a sweep ";
                    fault.detail += &KNOWN.join(", ");
                }
                if !faults.0.contains(&fault) {
                    faults.0.push(fault);
                }
            }
            None
        }
    }
}

fn at_top(path: &Path) -> bool {
    path.0.len() == 1
}
