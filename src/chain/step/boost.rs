//! The step `boost`: to a frame that moves, its axes kept parallel.

use crate::chain::{code, uncertainty};
use crate::document::{Code, Faults, Members, Node, Place};
use crate::physics::Impossible;
use crate::physics::boost::Motion;
use crate::physics::constants::PARTICLES;
use crate::physics::covariance::Covariance;
use crate::physics::lorentz::{Change, Step};
use crate::physics::scale::Scale;
use crate::physics::uncertain::Errors;
use crate::units::{Quantity, Units};

const FORMS: [&str; 4] = ["velocity", "direction", "beta", "angular_velocity"];
/// The speeds that go with a direction; `beta` is then a number.
const SPEEDS: [&str; 4] = ["beta", "gamma", "rapidity", "kinetic_energy"];
const KNOWN: [&str; 11] = [
    "velocity",
    "beta",
    "direction",
    "gamma",
    "rapidity",
    "kinetic_energy",
    "particle",
    "angular_velocity",
    "position",
    "inverse",
    "uncertainty",
];

/// Reads the body of the step.
pub fn read(node: &Node, place: &Place, units: &Units, faults: &mut Faults) -> Option<Step> {
    let members = faults.members(node, place, &KNOWN)?;
    let motion = form(members, place, units, faults).and_then(|motion| {
        let checked = motion.check();
        if let Err(impossible) = &checked {
            let place = place.field(blamed(members, impossible));
            faults.note(&place, code(impossible), impossible.to_string());
        }
        checked.ok().map(|()| Change::Boost(motion))
    });
    super::finish(motion, members, errors, place, units, faults)
}

/// The member that an impossible motion is the fault of.
fn blamed(members: Members, impossible: &Impossible) -> &'static str {
    let given = |names: &[&'static str]| {
        names
            .iter()
            .copied()
            .find(|name| members.get(name).is_some())
    };
    match impossible {
        Impossible::BelowRest {
            what: "rest_energy",
            ..
        } => "particle",
        Impossible::BelowRest { .. } => given(&SPEEDS).unwrap_or("direction"),
        Impossible::FasterThanLight { .. } => {
            given(&["velocity", "beta", "angular_velocity"]).unwrap_or("velocity")
        }
        _ => given(&FORMS).unwrap_or("velocity"),
    }
}

/// Reads what is uncertain about a boost: of a vector its components, of a direction with a speed
/// both, of a point of a turning body its angular velocity and its position.
pub fn errors(
    boost: Members,
    node: &Node,
    place: &Place,
    units: &Units,
    faults: &mut Faults,
) -> Option<Errors> {
    if boost.get("direction").is_some() {
        let members = faults.members(node, place, &["value", "direction"])?;
        let mut sigma = |name| match members.get(name) {
            Some(node) => uncertainty::number(node, &place.field(name), faults),
            None => Some(0.0),
        };
        let (value, direction) = (sigma("value"), sigma("direction"));
        return Some(Errors::Directed {
            value: value?,
            direction: direction?,
            radians: units.si(Quantity::Angle),
        });
    }
    if boost.get("angular_velocity").is_some() {
        let members = faults.members(node, place, &["angular_velocity", "position"])?;
        let mut vector = |name| match members.get(name) {
            Some(node) => uncertainty::vector(node, &place.field(name), faults),
            None => Covariance::of_standard([0.0; 3]).ok(),
        };
        let (angular_velocity, position) = (vector("angular_velocity"), vector("position"));
        return Some(Errors::Turning {
            angular_velocity: angular_velocity?,
            position: position?,
        });
    }
    uncertainty::vector(node, place, faults).map(Errors::Velocity)
}

/// Reads a velocity that stands alone, as `velocity` does in a question.
pub fn velocity(node: &Node, place: &Place, units: &Units, faults: &mut Faults) -> Option<Step> {
    let value = faults.vector(node, place)?;
    let motion = Motion::Velocity {
        value,
        beta: velocity_scale(units),
    };
    if let Err(impossible) = motion.check() {
        faults.note(place, code(&impossible), impossible.to_string());
        return None;
    }
    Some(Step::exact(Change::Boost(motion)))
}

fn velocity_scale(units: &Units) -> Scale {
    Motion::to_beta(units.si(Quantity::Velocity))
}

fn form(members: Members, place: &Place, units: &Units, faults: &mut Faults) -> Option<Motion> {
    let directed = members.get("direction").is_some();
    let forms: Vec<&str> = FORMS
        .into_iter()
        .filter(|form| !(directed && *form == "beta"))
        .collect();
    let (form, node) = faults.exactly_one(members, place, &forms)?;
    belongs(members, place, "direction", form, &SPEEDS[1..], faults);
    belongs(
        members,
        place,
        "angular_velocity",
        form,
        &["position"],
        faults,
    );
    belongs(
        members,
        place,
        "kinetic_energy",
        speed_given(members),
        &["particle"],
        faults,
    );
    let at = place.field(form);
    match form {
        "velocity" => Some(Motion::Velocity {
            value: faults.vector(node, &at)?,
            beta: velocity_scale(units),
        }),
        "beta" => Some(Motion::Velocity {
            value: faults.vector(node, &at)?,
            beta: Scale::ONE,
        }),
        "angular_velocity" => {
            let angular_velocity = faults.vector(node, &at);
            let position = faults
                .needed(members, place, "position")
                .and_then(|node| faults.vector(node, &place.field("position")));
            let product = units
                .si(Quantity::AngularVelocity)
                .times(units.si(Quantity::Length));
            Some(Motion::Turning {
                angular_velocity: angular_velocity?,
                position: position?,
                beta: Motion::to_beta(product),
            })
        }
        _ => {
            let direction = faults.vector(node, &at);
            let (speed, node) = faults.exactly_one(members, place, &SPEEDS)?;
            let value = faults.number(node, &place.field(speed));
            match speed {
                "beta" => Some(Motion::Speed {
                    direction: direction?,
                    beta: value?,
                }),
                "gamma" => Some(Motion::Gamma {
                    direction: direction?,
                    gamma: value?,
                }),
                "rapidity" => Some(Motion::Rapidity {
                    direction: direction?,
                    rapidity: value?,
                }),
                _ => {
                    let (rest, ratio) = particle(members, place, units, faults)?;
                    let (direction, energy) = (direction?, value?);
                    Some(Motion::KineticEnergy {
                        direction,
                        energy,
                        rest,
                        ratio,
                    })
                }
            }
        }
    }
}

fn speed_given<'m>(members: Members<'m, '_>) -> &'m str {
    if members.get("kinetic_energy").is_some() {
        "kinetic_energy"
    } else {
        ""
    }
}

/// Refuses members that go with another form than the one given.
fn belongs(
    members: Members,
    place: &Place,
    owner: &str,
    form: &str,
    owned: &[&str],
    faults: &mut Faults,
) {
    for name in owned
        .iter()
        .filter(|name| form != owner && members.get(name).is_some())
    {
        let detail = format!("{name:?} goes with {owner:?}, which is not given");
        faults.note(&place.field(name), Code::ConflictingFields, detail);
    }
}

/// The rest energy of the particle and the scale from energy over rest energy to γ−1.
fn particle(
    members: Members,
    place: &Place,
    units: &Units,
    faults: &mut Faults,
) -> Option<(f64, Scale)> {
    let node = faults.needed(members, place, "particle")?;
    let place = place.field("particle");
    if let Node::Object(_) = node.plain() {
        let own = faults.members(node, &place, &["rest_energy"])?;
        let node = faults.needed(own, &place, "rest_energy")?;
        return Some((
            faults.number(node, &place.field("rest_energy"))?,
            Scale::ONE,
        ));
    }
    let choices: Vec<(&str, Scale)> = PARTICLES
        .iter()
        .map(|particle| (particle.name, particle.rest_energy))
        .collect();
    let rest_energy = faults.choice(node, &place, &choices)?;
    let volt = crate::units::find(Quantity::Energy, "eV")?.si;
    Some((1.0, units.si(Quantity::Energy).over(volt).over(rest_energy)))
}
