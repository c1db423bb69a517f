//! Units of a question and of its answer.

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

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
