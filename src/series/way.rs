//! The way of a series: its fixed parts resolved once, and what it takes from each row.

use std::sync::Arc;

use crate::document::{Members, Node};
use crate::frames::Walk;
use crate::physics::block::Setting;
use crate::physics::boost::Motion;
use crate::physics::lorentz::{Change, Step};
use crate::physics::resolved::Resolved;
use crate::physics::rotation::Turn;
use crate::physics::rows::{RowChange, RowStep, Rows};
use crate::units::{Quantity, Units};

/// How rows get to the target frame.
#[derive(Debug)]
pub(super) enum Way {
    /// All in the same way.
    Fixed(Arc<Resolved>),
    /// By steps of which some take their numbers from the row.
    Rows(Template),
    /// By named frames that move, at the time of the row.
    Walk(Arc<Walk>),
    /// Each row brings its own: most often one of these two.
    Own {
        /// A velocity.
        boost: Template,
        /// An attitude.
        turn: Template,
    },
}

/// A number, or numbers, that a step takes from the row.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Taken {
    /// The velocity of a boost.
    Velocity,
    /// The quaternion of a rotation.
    Quaternion,
    /// The angle of a rotation about a fixed axis.
    Angle,
}

/// Steps with gaps that each row fills.
#[derive(Debug)]
pub(super) struct Template {
    steps: Vec<RowStep>,
}

/// The motion that a row brings; NaN where it is missing.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct RowMotion {
    pub(super) velocity: [f64; 3],
    pub(super) quaternion: [f64; 4],
    pub(super) angle: f64,
}

impl RowMotion {
    /// No motion is known.
    pub(super) const NONE: RowMotion = RowMotion {
        velocity: [f64::NAN; 3],
        quaternion: [f64::NAN; 4],
        angle: f64::NAN,
    };
}

impl Way {
    /// The ways of rows that take numbers from them: one, or a boost and a turn.
    pub(super) fn rows(&self, setting: Setting) -> Vec<Rows> {
        match self {
            Way::Rows(template) => vec![template.rows(setting)],
            Way::Own { boost, turn } => vec![boost.rows(setting), turn.rows(setting)],
            Way::Fixed(_) | Way::Walk(_) => Vec::new(),
        }
    }
}

impl Template {
    /// Steps, each with what it takes from the row.
    pub(super) fn new(steps: Vec<(Option<Taken>, Step)>) -> Template {
        let steps = steps.into_iter().map(|(taken, step)| {
            let inverse = step.inverse;
            let change = match (taken, step.change) {
                (Some(_), Change::Boost(Motion::Velocity { beta, .. })) => {
                    RowChange::Velocity { beta }
                }
                (Some(_), Change::Rotate(Turn::Quaternion(_))) => RowChange::Quaternion,
                (Some(_), Change::Rotate(Turn::AxisAngle { axis, radians, .. })) => {
                    RowChange::Angle { axis, radians }
                }
                (_, change) => RowChange::Fixed(change),
            };
            RowStep {
                change,
                inverse,
                uncertainty: step.uncertainty,
            }
        });
        Template {
            steps: steps.collect(),
        }
    }

    /// One boost by the velocity of the row.
    pub(super) fn boost(units: &Units) -> Template {
        let beta = Motion::to_beta(units.si(Quantity::Velocity));
        Template::of(RowChange::Velocity { beta })
    }

    /// One turn by the attitude of the row.
    pub(super) fn turn() -> Template {
        Template::of(RowChange::Quaternion)
    }

    fn of(change: RowChange) -> Template {
        let inverse = false;
        Template {
            steps: vec![RowStep {
                change,
                inverse,
                uncertainty: None,
            }],
        }
    }

    /// Whether some step takes this from the row.
    pub(super) fn takes(&self, what: Taken) -> bool {
        self.steps.iter().any(|step| match step.change {
            RowChange::Fixed(_) => false,
            RowChange::Velocity { .. } => what == Taken::Velocity,
            RowChange::Quaternion => what == Taken::Quaternion,
            RowChange::Angle { .. } => what == Taken::Angle,
        })
    }

    /// Whether any step has errors of its own.
    pub(super) fn is_uncertain(&self) -> bool {
        self.steps.iter().any(|step| step.uncertainty.is_some())
    }

    /// Whether any step moves.
    pub(super) fn moves(&self) -> bool {
        self.steps.iter().any(|step| match &step.change {
            RowChange::Fixed(change) => change.moves(),
            change => matches!(change, RowChange::Velocity { .. }),
        })
    }

    /// Ready for blocks of rows.
    pub(super) fn rows(&self, setting: Setting) -> Rows {
        Rows::new(self.steps.clone(), setting)
    }
}

/// Finds every `"row"` in a way as written, puts a number that any step can have in its place, and
/// says what the steps take: one for each step, in the order written.
pub(super) fn gaps(way: &mut Node<'static>, form: &str) -> Vec<Option<Taken>> {
    match form {
        "velocity" => vec![gap(way, Taken::Velocity)],
        "boost" => vec![member(way, "velocity").and_then(|node| gap(node, Taken::Velocity))],
        "rotation" => vec![rotation_gap(way)],
        _ => {
            let Node::List(steps) = plain(way) else {
                return Vec::new();
            };
            let each = steps.iter_mut().map(|step| {
                if let Some(boost) = member(step, "boost") {
                    return member(boost, "velocity").and_then(|node| gap(node, Taken::Velocity));
                }
                member(step, "rotate").and_then(rotation_gap)
            });
            each.collect()
        }
    }
}

fn rotation_gap(rotation: &mut Node<'static>) -> Option<Taken> {
    let quaternion = member(rotation, "quaternion").and_then(|node| gap(node, Taken::Quaternion));
    quaternion.or_else(|| member(rotation, "angle").and_then(|node| gap(node, Taken::Angle)))
}

/// Fills the node if it says `"row"`.
fn gap(node: &mut Node<'static>, taken: Taken) -> Option<Taken> {
    let says_row = match &*node {
        Node::Text(text) | Node::Loose(text, _) => text == "row",
        _ => false,
    };
    if !says_row {
        return None;
    }
    *node = match taken {
        Taken::Velocity => Node::List(vec![Node::Number(0.0); 3]),
        Taken::Angle => Node::Number(0.0),
        Taken::Quaternion => Node::Object(
            [("w", 1.0), ("x", 0.0), ("y", 0.0), ("z", 0.0)]
                .map(|(name, value)| (name.into(), Node::Number(value)))
                .to_vec(),
        ),
    };
    Some(taken)
}

fn plain<'n>(node: &'n mut Node<'static>) -> &'n mut Node<'static> {
    match node {
        Node::Loose(_, parsed) => parsed,
        node => node,
    }
}

fn member<'n>(node: &'n mut Node<'static>, name: &str) -> Option<&'n mut Node<'static>> {
    let Node::Object(members) = plain(node) else {
        return None;
    };
    let found = members.iter_mut().find(|(own, _)| own == name);
    found.map(|(_, node)| node)
}

/// The form in which the way of a question is given, if there is exactly one.
pub(super) fn form(members: Members, forms: &[&'static str]) -> Option<&'static str> {
    let mut given = forms.iter().filter(|name| members.get(name).is_some());
    given.next().copied().filter(|_| given.next().is_none())
}
