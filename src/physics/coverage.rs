//! Coverage ellipsoids (JCGM 102:2011, 6.5.2) of a vector of three components.

use super::eigen;
use super::real::Real;

/// The coverage probability of the ellipsoids.
pub const PROBABILITY: f64 = 0.95;
/// The coverage factor for it in three dimensions: its square is the 0.95 quantile of χ² with
/// three degrees of freedom (JCGM 102:2011, table 1, gives 2.80).
pub const FACTOR: f64 = 2.795_483_482_915_11;

/// An ellipsoid about an estimate that holds the vector with the coverage probability, to first
/// order and for Gaussian errors.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ellipsoid {
    /// Half axes in the unit of the vector, largest first.
    pub half_axes: [f64; 3],
    /// The unit vector along each.
    pub directions: [[f64; 3]; 3],
}

impl Ellipsoid {
    /// For a covariance matrix of three components.
    pub fn of<R: Real>(covariance: &[[R; 3]; 3]) -> Ellipsoid {
        let found = eigen::symmetric(covariance);
        let half_axes = found.values.map(|variance| {
            if variance.is_negative() {
                0.0
            } else {
                FACTOR * variance.sqrt().to_f64()
            }
        });
        let directions = found.vectors.map(|vector| {
            let vector = vector.map(|x| x.to_f64());
            // Of the two unit vectors, the one whose first large component is positive.
            let first = vector.iter().find(|x| x.abs() > 1e-9);
            let sign = if first.is_some_and(|x| *x < 0.0) {
                -1.0
            } else {
                1.0
            };
            vector.map(|x| x * sign + 0.0)
        });
        Ellipsoid {
            half_axes,
            directions,
        }
    }
}
