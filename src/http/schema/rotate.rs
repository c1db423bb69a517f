//! The step `rotate`.

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

use super::uncertainty::OfVector;

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
    /// The uncertainty of the turn as written, before `inverse`: of small angles about the next axes, in `units.angle`. The true next axes are the stated ones turned further by them.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub uncertainty: Option<OfVector>,
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
