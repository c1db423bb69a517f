//! What is uncertain about a question (JCGM 100:2008, 102:2011).

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

/// What is uncertain about the reading, and about a way given by a shorthand; the uncertainty of
/// any other step stands inside the step. What is left out is exact.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
#[schema(as = UncertaintyOfQuestion, example = json!({"e": [0.1, 0.1, 0.1], "b": [5.0, 5.0, 5.0]}))]
#[serde(deny_unknown_fields)]
pub struct Uncertainty {
    /// Of E as read, in `units.e`, or in raw numbers of a sensor. A component that is missing may be null.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub e: Option<OfReading>,
    /// Of B as read, in `units.b`, or in raw numbers of a sensor. A component that is missing may be null.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub b: Option<OfReading>,
    /// Instead of `e` and `b`: the covariance matrix of ex ey ez bx by bz as read, in products of their units.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub covariance: Option<[[f64; 6]; 6]>,
    /// Of a way given as `velocity`, in `units.velocity`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub velocity: Option<OfVector>,
    /// Of a way given as `boost`, as its own `uncertainty`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub boost: Option<OfBoost>,
    /// Of a way given as `rotation`, as its own `uncertainty`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub rotation: Option<OfVector>,
}

/// The uncertainty of E or B as read.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(untagged)]
pub enum OfReading {
    /// Standard uncertainties of the components.
    Standard([Option<f64>; 3]),
    /// With their covariances.
    Correlated(CovarianceOfVector),
}

/// The uncertainty of a vector.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(untagged)]
pub enum OfVector {
    /// Standard uncertainties of the components.
    Standard([f64; 3]),
    /// With their covariances.
    Correlated(CovarianceOfVector),
}

/// A covariance matrix: symmetric and positive semi-definite.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"covariance": [[0.04, 0.01, 0.0], [0.01, 0.09, 0.0], [0.0, 0.0, 0.01]]}))]
#[serde(deny_unknown_fields)]
pub struct CovarianceOfVector {
    /// In the square of the unit of the vector.
    pub covariance: [[f64; 3]; 3],
}

/// The uncertainty of a boost: of `velocity` and `beta` that of a vector, in the same unit.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(untagged)]
pub enum OfBoost {
    /// Of `velocity` or `beta`: standard uncertainties of the components.
    Standard([f64; 3]),
    /// Of `velocity` or `beta`: with their covariances.
    Correlated(CovarianceOfVector),
    /// Of `direction` and the speed beside it.
    Directed(OfDirectedBoost),
    /// Of `angular_velocity` and `position`.
    Turning(OfTurningBoost),
}

/// The uncertainty of a direction and the speed beside it.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"value": 0.5, "direction": 0.001}))]
#[serde(deny_unknown_fields)]
pub struct OfDirectedBoost {
    /// Standard uncertainty of `beta`, `gamma`, `rapidity` or `kinetic_energy`, in its unit.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(minimum = 0)]
    pub value: Option<f64>,
    /// Standard uncertainty of the direction about each of two axes perpendicular to it, in `units.angle`.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(minimum = 0)]
    pub direction: Option<f64>,
}

/// The uncertainty of a point of a turning body.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
#[schema(example = json!({"angular_velocity": [0.0, 0.0, 0.1], "position": [0.001, 0.001, 0.001]}))]
#[serde(deny_unknown_fields)]
pub struct OfTurningBoost {
    /// Of `angular_velocity`, in its unit.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub angular_velocity: Option<OfVector>,
    /// Of `position`, in its unit.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub position: Option<OfVector>,
}
