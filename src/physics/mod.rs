//! Fields and frames: numbers in, numbers out. Knows no text, no units by name, no network.

pub mod big;
pub mod block;
pub mod boost;
pub mod constants;
pub mod covariance;
pub mod double_double;
pub mod eigen;
pub mod energy;
pub mod error;
pub mod field;
pub mod invariants;
mod lanes;
pub mod lorentz;
pub mod missing;
pub mod monte_carlo;
pub mod parallel;
mod passes;
pub mod precise;
pub mod pure_boost;
pub mod quaternion;
pub mod real;
pub mod reduction;
pub mod resolved;
mod restated;
pub mod rotation;
pub mod rows;
pub mod scale;
pub mod spin;
pub mod tensor;
pub mod uncertain;

pub use big::Big;
pub use double_double::Dd;
pub use error::Impossible;
pub use real::Real;
pub use scale::Scale;
