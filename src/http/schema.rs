//! The shape of a question, for the OpenAPI document. Questions are read by hand from a tree,
//! so that every fault is found at once; a test keeps that reader and these types equal.

pub mod examples;
mod monte_carlo;
mod query;
mod rotate;
mod rows;
mod step;
mod uncertainty;
mod units;

pub use monte_carlo::MonteCarlo;
pub use query::{
    Query, RangeQuery, ReadingQuery, SeriesQuery, SingleQuery, UncertaintyQuery, WayQuery,
};
pub use rotate::Rotate;
pub use rows::Batches;
pub use step::{Boost, Step};
pub use uncertainty::Uncertainty;
pub use units::{AnswerUnits, Units};

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
    /// What is uncertain about the reading, and about a way given by a shorthand.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub uncertainty: Option<Uncertainty>,
    /// Trials beside the law of propagation.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub monte_carlo: Option<MonteCarlo>,
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
    /// What the uncertainty of each component comes from.
    Budget,
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
