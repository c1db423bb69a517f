//! The way of a series: its fixed parts resolved once, and what it takes from each row.

use std::sync::Arc;

use crate::chain;
use crate::document::{Fault, Members, Node, Path};
use crate::frames::Walk;
use crate::physics::boost::Motion;
use crate::physics::lorentz::{Change, Step};
use crate::physics::resolved::Resolved;
use crate::physics::rotation::Turn;
use crate::units::{Quantity, Units};

/// How rows get to the target frame.
#[derive(Debug)]
pub(super) enum Way {
    /// All in the same way.
    Fixed(Arc<Resolved>),
    /// By steps of which some take their numbers from the row.
    Template(Template),
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

/// Steps with gaps that each row fills.
#[derive(Debug)]
pub(super) struct Template {
    /// Composed one after the other as a single reading would compose the steps, bit for bit.
    pieces: Vec<Piece>,
}

#[derive(Debug)]
enum Piece {
    Fixed(Resolved),
    Row(Taken, Step),
}

impl Taken {
    /// Where rows hold it, in NDJSON.
    pub(super) fn path(self) -> Path {
        match self {
            Taken::Velocity => Path::default().field("velocity"),
            Taken::Quaternion => Path::default().field("rotation").field("quaternion"),
            Taken::Angle => Path::default().field("angle"),
        }
    }
}

impl Template {
    /// Steps, each with what it takes from the row.
    ///
    /// # Errors
    /// What is impossible in the fixed steps.
    pub(super) fn new(steps: Vec<(Option<Taken>, Step)>) -> Result<Template, Fault> {
        let resolved = |steps| Resolved::new(steps).map_err(|error| refuse(&error));
        let mut pieces = Vec::new();
        let mut head = Vec::new();
        for (taken, step) in steps {
            match taken {
                Some(taken) => {
                    if !head.is_empty() {
                        pieces.push(Piece::Fixed(resolved(std::mem::take(&mut head))?));
                    }
                    pieces.push(Piece::Row(taken, step));
                }
                // After the first gap each step stays apart: composed before, they would round
                // otherwise than in a single reading.
                None if pieces.is_empty() => head.push(step),
                None => pieces.push(Piece::Fixed(resolved(vec![step])?)),
            }
        }
        Ok(Template { pieces })
    }

    /// One boost by the velocity of the row.
    pub(super) fn boost(units: &Units) -> Template {
        Template::of(
            Taken::Velocity,
            Change::Boost(Motion::Velocity {
                value: [0.0; 3],
                beta: Motion::to_beta(units.si(Quantity::Velocity)),
            }),
        )
    }

    /// One turn by the attitude of the row.
    pub(super) fn turn() -> Template {
        Template::of(
            Taken::Quaternion,
            Change::Rotate(Turn::Quaternion([1.0, 0.0, 0.0, 0.0])),
        )
    }

    fn of(taken: Taken, change: Change) -> Template {
        let step = Step {
            uncertainty: None,
            change,
            inverse: false,
        };
        Template {
            pieces: vec![Piece::Row(taken, step)],
        }
    }

    /// Whether some step takes this from the row.
    pub(super) fn takes(&self, what: Taken) -> bool {
        let mut pieces = self.pieces.iter();
        pieces.any(|piece| matches!(piece, Piece::Row(taken, _) if *taken == what))
    }

    /// Whether any step moves.
    pub(super) fn moves(&self) -> bool {
        self.pieces.iter().any(|piece| match piece {
            Piece::Fixed(part) => part.net().boost.is_some(),
            Piece::Row(_, step) => step.change.moves(),
        })
    }

    /// The way of a row; `None` when it lacks a number.
    ///
    /// # Errors
    /// A motion that no frame can have.
    pub(super) fn resolve(&self, row: &RowMotion) -> Result<Option<Resolved>, Fault> {
        let mut own = Vec::with_capacity(self.pieces.len());
        for piece in &self.pieces {
            if let Piece::Row(taken, step) = piece {
                let Some(step) = filled(*taken, step, row)? else {
                    return Ok(None);
                };
                own.push(Resolved::new(vec![step]).map_err(|error| refuse(&error))?);
            }
        }
        if self.pieces.len() == 1 {
            return Ok(own.pop());
        }
        let mut filled = own.iter();
        let parts: Vec<&Resolved> = self
            .pieces
            .iter()
            .filter_map(|piece| match piece {
                Piece::Fixed(part) => Some(part),
                Piece::Row(..) => filled.next(),
            })
            .collect();
        let way = Resolved::join(parts).map_err(|error| refuse(&error))?;
        Ok(Some(way))
    }
}

/// The step with the numbers of the row.
fn filled(taken: Taken, step: &Step, row: &RowMotion) -> Result<Option<Step>, Fault> {
    let mut step = step.clone();
    let checked = match (&mut step.change, taken) {
        (Change::Boost(motion), Taken::Velocity) => {
            if row.velocity.iter().any(|x| x.is_nan()) {
                return Ok(None);
            }
            if let Motion::Velocity { value, .. } = motion {
                *value = row.velocity;
            }
            motion.check()
        }
        (Change::Rotate(turn), _) => {
            match turn {
                Turn::Quaternion(q) if row.quaternion.iter().all(|x| !x.is_nan()) => {
                    *q = row.quaternion;
                }
                Turn::AxisAngle { angle, .. } if !row.angle.is_nan() => *angle = row.angle,
                _ => return Ok(None),
            }
            turn.check().map(|_| ())
        }
        _ => Ok(()),
    };
    match checked {
        Ok(()) => Ok(Some(step)),
        Err(error) => Err(Fault::at(
            &taken.path(),
            chain::code(&error),
            error.to_string(),
        )),
    }
}

/// What is impossible, as a fault of the way as a whole.
pub(super) fn refuse(error: &crate::physics::Impossible) -> Fault {
    Fault::whole(chain::code(error), error.to_string())
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
