//! The shape of a question, for the OpenAPI document. Questions are read by hand from a tree,
//! so that every fault is found at once; a test keeps that reader and these types equal.

pub mod examples;
mod query;

pub use query::{Query, RangeQuery, ReadingQuery, SeriesQuery, WayQuery};

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

/// A reading, the way to the target frame, and what the answer should hold.
///
/// Exactly one of `steps`, `velocity`, `boost`, `rotation` and `from` (with `to`) names the way,
/// and at least one of `e` and `b` is given. Unknown and repeated names are refused. A null or left-out number is
/// missing, never zero.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
#[schema(as = Question, example = json!(examples::orbiting_probe()))]
#[serde(deny_unknown_fields)]
pub struct Question {
    /// Electric field in `units.e`, on the axes of the reading; components may be null.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(min_items = 3, max_items = 3)]
    pub e: Option<[Option<f64>; 3]>,
    /// Magnetic flux density in `units.b`, on the axes of the reading; components may be null.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(min_items = 3, max_items = 3)]
    pub b: Option<[Option<f64>; 3]>,
    /// Units of the question, SI where left out.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub units: Option<Units>,
    /// Units of the answer, those of the question where left out.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub answer_units: Option<AnswerUnits>,
    /// The way as a chain: each step leads from the current frame to the next one.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub steps: Option<Vec<Step>>,
    /// The way as one boost, by the velocity of the target frame as seen in the frame of the reading, in `units.velocity`.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(min_items = 3, max_items = 3)]
    pub velocity: Option<[f64; 3]>,
    /// The way as one boost, in any of its forms.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub boost: Option<Boost>,
    /// The way as one rotation.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub rotation: Option<Rotate>,
    /// The way by names of the catalogue (`GET /v1/frames`): the frame of the reading. From a sensor, `e` and `b` are its raw numbers.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub from: Option<String>,
    /// The target frame, with `from`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub to: Option<String>,
    /// When the reading was taken, where the way from `from` to `to` changes with time: RFC 3339, or seconds from the epoch of the catalogue.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub time: Option<Time>,
    /// Take the whole way backwards.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub inverse: Option<bool>,
    /// What may be assumed about what was not measured.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub assume: Option<Assume>,
    /// Further parts of the answer.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub include: Option<Vec<Part>>,
    /// Convention of the tensor; `mostly_minus` where left out.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub signature: Option<Signature>,
}

/// A time in the notation of the catalogue.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(untagged)]
pub enum Time {
    /// RFC 3339, with any number of digits after the seconds.
    #[schema(example = "2031-03-02T05:10:00.25Z")]
    Calendar(String),
    /// Seconds from the epoch of the catalogue.
    Seconds(f64),
}

/// What may be assumed about what was not measured.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"e_dot_b_zero": {"min_angle": 15.0}}))]
#[serde(deny_unknown_fields)]
pub struct Assume {
    /// E·B = 0 gives one missing component of E, the common practice with two-axis probes.
    pub e_dot_b_zero: EDotBZero,
}

/// How far E·B = 0 may be trusted.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"min_angle": 15.0}))]
#[serde(deny_unknown_fields)]
pub struct EDotBZero {
    /// The least angle of B to the plane of the measured components, in `units.angle`; 15 degrees when left out.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(exclusive_minimum = 0)]
    pub min_angle: Option<f64>,
}

/// A part of the answer given on request.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "snake_case")]
pub enum Part {
    /// The field tensor, covariant and contravariant, and its dual.
    Tensor,
    /// The net Lorentz matrix.
    Matrix,
    /// Energy density, Poynting vector and Maxwell stress.
    Energy,
    /// The frame in which E and B are parallel.
    ParallelFrame,
}

/// Which of time and space counts negative in the metric.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "snake_case")]
pub enum Signature {
    /// (+ − − −)
    MostlyMinus,
    /// (− + + +)
    MostlyPlus,
}

/// Units by quantity: UCUM codes, case-sensitive (`GET /v1/units` lists them).
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"e": "mV/m", "b": "nT", "velocity": "km/s", "angle": "deg"}))]
#[serde(deny_unknown_fields)]
pub struct Units {
    /// Electric field: V/m, mV/m, uV/m, kV/m, MV/m, V/cm or statV/cm.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub e: Option<String>,
    /// Magnetic flux density: T, mT, uT, nT, pT or G.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub b: Option<String>,
    /// Velocity: m/s, km/s or `[kn_i]`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub velocity: Option<String>,
    /// Angle: rad or deg.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub angle: Option<String>,
    /// Angular velocity: rad/s, deg/s, circ/s or circ/min.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub angular_velocity: Option<String>,
    /// Energy: J, eV, keV, MeV or GeV.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub energy: Option<String>,
    /// Length: m, km, cm or mm.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub length: Option<String>,
    /// Time: s.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub time: Option<String>,
}

/// Units of an answer.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
#[schema(as = UnitsOfAnswer, example = json!({"e": "kV/m", "b": "G"}))]
#[serde(deny_unknown_fields)]
pub struct AnswerUnits {
    /// Unit of E', a code of `units.e`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub e: Option<String>,
    /// Unit of B', a code of `units.b`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub b: Option<String>,
}

/// A step from the current frame to the next one: an object with exactly one member.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "snake_case", deny_unknown_fields)]
pub enum Step {
    /// To a frame that moves, its axes kept parallel.
    Boost(Boost),
    /// To axes that are turned.
    Rotate(Rotate),
}

/// A boost, by exactly one of `velocity`; `beta`; `direction` with one of `beta`, `gamma`,
/// `rapidity`, or `kinetic_energy` and `particle`; `angular_velocity` with `position`.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"velocity": [7600.0, 0.0, 0.0]}))]
#[serde(deny_unknown_fields)]
pub struct Boost {
    /// Velocity of the next frame as seen in the current one, on the current axes, in `units.velocity`.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(min_items = 3, max_items = 3)]
    pub velocity: Option<[f64; 3]>,
    /// The same over c; beside `direction` a single number, negative against it.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub beta: Option<Beta>,
    /// Direction of motion, of any length but zero.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(min_items = 3, max_items = 3)]
    pub direction: Option<[f64; 3]>,
    /// Lorentz factor, at least 1.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(minimum = 1)]
    pub gamma: Option<f64>,
    /// Rapidity artanh β; negative means against `direction`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub rapidity: Option<f64>,
    /// Kinetic energy of a particle at rest in the next frame, in `units.energy`.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(minimum = 0)]
    pub kinetic_energy: Option<f64>,
    /// The particle: a name, or its rest energy in `units.energy`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub particle: Option<Particle>,
    /// Angular velocity of a rigid body, in `units.angular_velocity`; the next frame moves with one of its points.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(min_items = 3, max_items = 3)]
    pub angular_velocity: Option<[f64; 3]>,
    /// From a point on the axis to that point, in `units.length`.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(min_items = 3, max_items = 3)]
    pub position: Option<[f64; 3]>,
    /// Undo this step: for a motion reported from the other side.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub inverse: Option<bool>,
}

/// A velocity over c: a vector, or its size beside a direction.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(untagged)]
pub enum Beta {
    /// On the current axes.
    Vector([f64; 3]),
    /// Along `direction`.
    Size(f64),
}

/// A particle by name or by rest energy.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(untagged)]
pub enum Particle {
    /// One of the particles whose rest energy is known (CODATA 2022).
    Named(ParticleName),
    /// Any other, by its rest energy.
    Other(OtherParticle),
}

/// A particle whose rest energy is known.
#[derive(Clone, Copy, Debug, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "snake_case")]
#[allow(missing_docs, reason = "the names say it")]
pub enum ParticleName {
    Electron,
    Muon,
    Proton,
    Deuteron,
    Alpha,
}

/// A particle by its rest energy.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"rest_energy": 938.27208943}))]
#[serde(deny_unknown_fields)]
pub struct OtherParticle {
    /// Rest energy in `units.energy`, above 0.
    pub rest_energy: f64,
}

/// A rotation: the turn that carries the current axes onto the next ones (right-hand rule), by
/// exactly one of `axis` with `angle`, `quaternion`, `matrix` and `euler`.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"axis": [0.0, 0.0, 1.0], "angle": 0.5}))]
#[serde(deny_unknown_fields)]
pub struct Rotate {
    /// Axis of the turn, of any length but zero.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(min_items = 3, max_items = 3)]
    pub axis: Option<[f64; 3]>,
    /// Angle of the turn in `units.angle`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub angle: Option<f64>,
    /// The turn as a quaternion (Hamilton's; Rv = q v q*), of length 1 to about six decimals.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub quaternion: Option<Quaternion>,
    /// M = R⁻¹, which multiplies components: row i is the next axis i on the current axes.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub matrix: Option<[[f64; 3]; 3]>,
    /// Three turns about coordinate axes.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub euler: Option<Euler>,
    /// Undo this step: for an attitude reported from the other side, such as body to ground.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub inverse: Option<bool>,
}

/// A quaternion w + xi + yj + zk.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(as = AttitudeQuaternion, example = json!({"w": 1.0, "x": 0.0, "y": 0.0, "z": 0.0}))]
#[serde(deny_unknown_fields)]
pub struct Quaternion {
    /// Cosine of half the angle.
    pub w: f64,
    /// Sine of half the angle times the axis, x component.
    pub x: f64,
    /// The same, y component.
    pub y: f64,
    /// The same, z component.
    pub z: f64,
}

/// Three turns in a row.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"axes": "zyx", "angles": [0.1, 0.2, 0.3], "about": "moving"}))]
#[serde(deny_unknown_fields)]
pub struct Euler {
    /// Three letters of x, y and z, none twice in a row.
    #[schema(pattern = "^[xyz]{3}$")]
    pub axes: String,
    /// One angle for each axis, in `units.angle`.
    #[schema(min_items = 3, max_items = 3)]
    pub angles: [f64; 3],
    /// `moving`: each turn is about an axis already turned; `fixed`: about the axes at the start.
    pub about: About,
}

/// What the axes of a turn belong to.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "snake_case")]
pub enum About {
    /// The axes as turned so far.
    Moving,
    /// The axes at the start.
    Fixed,
}
