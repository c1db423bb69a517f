//! A step and its kinds: the boost; the rotation has a file of its own.

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

use super::{Rotate, uncertainty::OfBoost};

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
    /// The uncertainty of the step as written, before `inverse`: of `velocity` or `beta` that of a vector; of a direction `value` and `direction`; of a turning body `angular_velocity` and `position`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub uncertainty: Option<OfBoost>,
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
