//! What a question says of the errors of its reading, and of a way given by a shorthand.

use crate::chain::{step, uncertainty};
use crate::document::{Code, Faults, Members, Node, Place};
use crate::physics::covariance::Covariance;
use crate::physics::lorentz::Step;
use crate::physics::uncertain::Errors;
use crate::units::Units;

const KNOWN: [&str; 6] = ["e", "b", "covariance", "velocity", "boost", "rotation"];
/// The ways whose errors may stand here, under the name of the way.
const SHORTHANDS: [&str; 3] = ["velocity", "boost", "rotation"];

/// The members of `uncertainty`; `None` when it is not given, or is no object.
fn members<'n, 'a>(question: Members<'n, 'a>) -> Option<Members<'n, 'a>> {
    let node = question.get("uncertainty")?;
    Faults::default().any_members(node, &Place::ROOT, "")
}

/// The covariance of the reading; `Some(None)` when it is exact.
pub(crate) fn of_reading(
    question: Members,
    [e, b]: [Option<[Option<f64>; 3]>; 2],
    faults: &mut Faults,
) -> Option<Option<Covariance<6>>> {
    let Some(node) = question.get("uncertainty") else {
        return Some(None);
    };
    let place = Place::ROOT.field("uncertainty");
    let members = faults.members(node, &place, &KNOWN)?;
    if let Some(node) = members.get("covariance") {
        for name in ["e", "b"] {
            if members.get(name).is_some() {
                let detail = format!("{name:?} and \"covariance\" say the same; keep one of them");
                faults.note(&place.field(name), Code::ConflictingFields, detail);
            }
        }
        return uncertainty::covariance(node, &place.field("covariance"), faults).map(Some);
    }
    let mut vector = |name, values| match members.get(name) {
        Some(node) => of_vector(node, &place.field(name), values, faults).map(Some),
        None => Some(None),
    };
    let (e, b) = (vector("e", e), vector("b", b));
    match (e?, b?) {
        (None, None) => Some(None),
        (e, b) => {
            let exact = || Covariance::of_standard([0.0; 3]).ok();
            let (e, b) = (e.or_else(exact)?, b.or_else(exact)?);
            Some(Some(Covariance::of_pair(&e, &b)))
        }
    }
}

/// The uncertainty of E or B, in which components that are missing may be missing too.
fn of_vector(
    node: &Node,
    place: &Place,
    values: Option<[Option<f64>; 3]>,
    faults: &mut Faults,
) -> Option<Covariance<3>> {
    let has_gap = matches!(node.plain(), Node::List(items) if items.iter().any(Node::is_null));
    if !has_gap {
        return uncertainty::vector(node, place, faults);
    }
    let standard = faults.partial_vector(node, place)?;
    for (i, value) in values.into_iter().flatten().enumerate() {
        if standard[i].is_none() && value.is_some() {
            let detail = "this component is given, but its standard uncertainty is missing; 0 \
                          says that it is exact";
            faults.note(&place.index(i), Code::MissingField, detail);
        }
    }
    let found = Covariance::of_standard(standard.map(Option::unwrap_or_default));
    found
        .map_err(|flaw| uncertainty::note(place, &flaw, faults))
        .ok()
}

/// The step of a way given as `form`, with the errors that stand beside it.
pub(super) fn of_step(
    question: Members,
    form: &str,
    step: Option<Step>,
    units: &Units,
    faults: &mut Faults,
) -> Option<Step> {
    let Some(node) = members(question).and_then(|members| members.get(form)) else {
        return step;
    };
    let place = Place::ROOT.field("uncertainty");
    let at = place.field(form);
    let own = match question.get(form).map(Node::plain) {
        Some(body @ Node::Object(_)) => faults.any_members(body, &at, ""),
        _ => None,
    };
    let errors = match (form, own) {
        ("boost", Some(own)) => step::boost::errors(own, node, &at, units, faults),
        ("rotation", Some(own)) => step::rotate::errors(own, node, &at, units, faults),
        _ => uncertainty::vector(node, &at, faults).map(Errors::Velocity),
    };
    if own.is_some_and(|own| own.get("uncertainty").is_some()) {
        let detail = format!("the uncertainty of {form:?} is given inside it and here");
        faults.note(&at, Code::ConflictingFields, detail);
        return None;
    }
    step::uncertain(step?, errors?, &Place::ROOT.field(form), &at, faults)
}

/// Refuses errors of a way that is not given so.
pub(crate) fn of_other_ways(question: Members, form: &str, faults: &mut Faults) {
    let Some(members) = members(question) else {
        return;
    };
    let place = Place::ROOT.field("uncertainty");
    for name in SHORTHANDS {
        if name != form && members.get(name).is_some() {
            let detail = format!(
                "it goes with a way given as {name:?}, which is not; the uncertainty of a step \
                 stands inside the step"
            );
            faults.note(&place.field(name), Code::ConflictingFields, detail);
        }
    }
}
