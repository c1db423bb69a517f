//! What a query asks of a series: the way, units, and how rows are treated.

use std::borrow::Cow;
use std::sync::Arc;

use crate::document::{Code, Fault, Faults, Members, Node, Place};
use crate::frames::{Clock, Frame, Sensor, Walker};
use crate::physics::block::Setting;
use crate::physics::field::FieldUnits;
use crate::physics::resolved::Resolved;
use crate::question::{
    Deployment, Question, uncertainty as question_uncertainty, way as question_way,
};
use crate::transform::Reading;

use super::Format;
use super::uncertainty;
use super::way::{self, Taken, Template, Way};

/// The names that the query of a series has beside those of a question.
const KNOWN: [&str; 3] = ["keep", "on_error", "end"];

/// Parts of a question that have no place in a series, and why.
const NOT_HERE: [(&str, &str); 5] = [
    ("e", "is read from the rows"),
    ("b", "is read from the rows"),
    (
        "include",
        "has no place in a series; ask /v1/transform for it",
    ),
    (
        "signature",
        "has no place in a series; ask /v1/transform for it",
    ),
    (
        "monte_carlo",
        "has no place in a series; ask /v1/transform for it",
    ),
];

/// A series understood: what is done with each row.
#[derive(Debug)]
pub struct Series {
    pub(super) way: Way,
    /// What is the same in every reading; its components are missing.
    pub(super) blank: Reading,
    /// The sensor that the rows come from.
    pub(super) sensor: Sensor,
    /// Units of the answer.
    pub(super) target: FieldUnits,
    /// How times are written, where the way needs them.
    pub(super) clock: Clock,
    /// Other columns that go along between formats.
    pub(super) keep: Vec<String>,
    /// Whether the first bad row ends the series.
    pub(super) stop: bool,
    /// Whether NDJSON ends with the counts.
    pub(super) end: bool,
    /// What a row with a way of its own is asked with.
    pub(super) question: Node<'static>,
    pub(super) deployment: Deployment,
    /// Whether the query states an uncertainty of its way, so that every answer has one.
    pub(super) uncertain: bool,
}

impl Series {
    /// Reads the query of a series.
    ///
    /// # Errors
    /// Every fault found in it.
    pub fn read(node: Node<'static>, deployment: &Deployment) -> Result<Series, Vec<Fault>> {
        let mut faults = Faults::default();
        let series = read(node, deployment, &mut faults);
        match series {
            Some(series) if faults.0.is_empty() => Ok(series),
            _ => Err(faults.0),
        }
    }

    /// Whether the way of every row needs both E and B.
    pub(super) fn needs_both(&self) -> bool {
        self.blank.e_dot_b_zero.is_some()
            || match &self.way {
                Way::Fixed(way) => way.net().boost.is_some(),
                Way::Rows(template) => template.moves(),
                Way::Walk(_) => true,
                Way::Own { .. } => false,
            }
    }

    /// Goes along the tracks of a way that changes with time.
    pub(super) fn walker(&self) -> Option<Walker> {
        match &self.way {
            Way::Walk(walk) => Some(Walker::new(walk.clone())),
            _ => None,
        }
    }

    /// Whether answers to rows of a format may come with notices.
    pub(super) fn notices(&self, input: Format) -> bool {
        self.blank.e_dot_b_zero.is_some()
            || match &self.way {
                Way::Walk(walk) => walk.extrapolates(),
                // Only a row of NDJSON names frames.
                Way::Own { .. } if input == Format::Ndjson => {
                    let catalogue = self.deployment.frames.as_ref();
                    catalogue.is_some_and(|known| known.frames().iter().any(Frame::extrapolates))
                }
                _ => false,
            }
    }

    /// What is the same in every block.
    pub(super) fn setting(&self) -> Setting {
        Setting {
            units: self.blank.units,
            to: self.target,
            calibration: self.blank.calibration,
        }
    }

    /// Whether rows hold numbers that the way takes.
    pub(super) fn takes(&self, what: Taken) -> bool {
        matches!(&self.way, Way::Rows(template) if template.takes(what))
    }

    /// Whether the way depends on the time of the row.
    pub(super) fn takes_time(&self) -> bool {
        matches!(self.way, Way::Walk(_))
    }
}

fn read(node: Node<'static>, deployment: &Deployment, faults: &mut Faults) -> Option<Series> {
    let Node::Object(members) = node else {
        return faults.members(&node, &Place::ROOT, &KNOWN).and(None);
    };
    let own = |member: &(Cow<str>, Node)| KNOWN.contains(&member.0.as_ref());
    let (own, mut asked): (Vec<_>, Vec<_>) = members.into_iter().partition(own);
    let own = Node::Object(own);
    let own = faults.members(&own, &Place::ROOT, &KNOWN)?;
    let keep = keep(own, faults);
    let stop = word(
        own,
        "on_error",
        &[("continue", false), ("stop", true)],
        faults,
    );
    let end = word(own, "end", &[("on", true), ("off", false)], faults);
    for (name, why) in NOT_HERE {
        if asked.iter().any(|(given, _)| given == name) {
            let detail = format!("{name:?} {why}");
            faults.note(&Place::ROOT.field(name), Code::UnknownField, detail);
        }
    }
    asked.retain(|(name, _)| NOT_HERE.iter().all(|(not, _)| name != not));
    let errors = asked.iter().find(|(name, _)| name == "uncertainty");
    uncertainty::of_query(errors.map(|(_, node)| node), faults);
    let mut question = asked.clone();
    question.retain(|(name, _)| name != "uncertainty");
    let question = Node::Object(question);
    let gaps = gaps(&mut asked);
    asked.extend(["e", "b"].map(|name| (Cow::Borrowed(name), Node::Null)));
    let mut found = None;
    let read = Question::read_along(
        &Node::Object(asked),
        deployment,
        |members, units, faults| {
            let (way, as_read) = read_way(members, gaps, units, deployment, faults)?;
            found = Some((way, as_read.sensor.map(|(sensor, _)| sensor)));
            Some(as_read)
        },
    );
    let read = read
        .map_err(|mut more| {
            for fault in &mut more {
                also_known(fault);
            }
            faults.0.extend(more);
        })
        .ok()?;
    let (way, sensor) = found?;
    let catalogue = deployment.frames.as_ref();
    let named = asked_for(&question, "from");
    let uncertain = match &way {
        Way::Fixed(way) => !named && way.is_uncertain(),
        Way::Rows(template) => template.is_uncertain(),
        Way::Walk(_) | Way::Own { .. } => false,
    };
    Some(Series {
        way,
        uncertain,
        sensor: sensor.unwrap_or_default(),
        target: read.target_units(),
        blank: read.reading,
        clock: catalogue.map_or(Clock::Seconds, |catalogue| catalogue.clock),
        keep: keep?,
        stop: stop?,
        end: end?,
        question,
        deployment: deployment.clone(),
    })
}

/// Whether a question has a member.
fn asked_for(question: &Node, name: &str) -> bool {
    let Node::Object(members) = question else {
        return false;
    };
    members
        .iter()
        .any(|(own, node)| own == name && !node.is_null())
}

/// Replaces every `"row"` of the way; the gaps of its steps, if it has steps.
fn gaps(asked: &mut [(Cow<'static, str>, Node<'static>)]) -> Vec<Option<Taken>> {
    let mut ways = asked.iter_mut().filter(|(name, node)| {
        !node.is_null() && question_way::WAYS.contains(&name.as_ref()) && name != "from"
    });
    match (ways.next(), ways.next()) {
        (Some((name, node)), None) => way::gaps(node, name),
        _ => Vec::new(),
    }
}

/// Reads the way; beside it, what a question calls one: for the sensor that it begins at.
fn read_way(
    members: Members,
    gaps: Vec<Option<Taken>>,
    units: &crate::units::Units,
    deployment: &Deployment,
    faults: &mut Faults,
) -> Option<(Way, question_way::Way)> {
    let named = members.get("from").is_some();
    let given = question_way::WAYS
        .iter()
        .any(|name| members.get(name).is_some());
    if !given
        && !["to", "time"]
            .iter()
            .any(|name| members.get(name).is_some())
    {
        question_uncertainty::of_other_ways(members, "", faults);
        let inverse = question_way::inverse(members, faults)?;
        if inverse {
            let detail = "\"inverse\" turns the way of the query around, and there is none";
            faults.note(
                &Place::ROOT.field("inverse"),
                Code::ConflictingFields,
                detail,
            );
        }
        let (boost, turn) = (Template::boost(units), Template::turn());
        return Some((Way::Own { boost, turn }, still()));
    }
    if named && members.get("time").is_none() && way::form(members, &question_way::WAYS).is_some() {
        let inverse = question_way::inverse(members, faults);
        let walk = question_way::walk(members, inverse, deployment, faults)?;
        if !walk.is_fixed() {
            question_uncertainty::of_other_ways(members, "from", faults);
            let sensor = walk.sensor().filter(|_| inverse == Some(false));
            let units = deployment.frames.as_ref()?.units;
            let sensed = question_way::Way {
                sensor: sensor.map(|sensor| (*sensor, units)),
                ..still()
            };
            return Some((Way::Walk(walk), sensed));
        }
    }
    if gaps.iter().all(Option::is_none) {
        let way = question_way::read(members, units, deployment, faults)?;
        return Some((Way::Fixed(way.resolved.clone()), way));
    }
    let steps = question_way::steps(members, units, deployment, faults)?;
    let mut gaps = gaps;
    if question_way::inverse(members, faults)? {
        gaps.reverse();
    }
    let template = Template::new(gaps.into_iter().zip(steps).collect());
    Some((Way::Rows(template), still()))
}

/// A way that goes nowhere, from no sensor.
fn still() -> question_way::Way {
    let resolved = Resolved::new(Vec::new()).expect("no step is always possible");
    question_way::Way {
        resolved: Arc::new(resolved),
        sensor: None,
        notices: Vec::new(),
    }
}

fn keep(own: Members, faults: &mut Faults) -> Option<Vec<String>> {
    let Some(node) = own.get("keep") else {
        return Some(Vec::new());
    };
    let place = Place::ROOT.field("keep");
    let mut names: Vec<String> = Vec::new();
    for (i, item) in faults.list(node, &place)?.iter().enumerate() {
        let place = place.index(i);
        let name = faults.text(item, &place)?.to_owned();
        if names.contains(&name) {
            faults.note(
                &place,
                Code::RepeatedField,
                format!("{name:?} is named twice"),
            );
        }
        names.push(name);
    }
    Some(names)
}

fn word(own: Members, name: &str, choices: &[(&str, bool)], faults: &mut Faults) -> Option<bool> {
    match own.get(name) {
        Some(node) => {
            // In a URL `on` and `off` are words like others.
            faults.choice(node, &Place::ROOT.field(name), choices)
        }
        None => Some(choices[0].1),
    }
}

/// A question names what it knows; a series knows a little more.
fn also_known(fault: &mut Fault) {
    let at_top = fault.path.as_ref().is_some_and(|path| path.0.len() == 1);
    if fault.code == Code::UnknownField && at_top {
        fault.detail += ", and for a series ";
        fault.detail += &KNOWN.join(", ");
    }
}
