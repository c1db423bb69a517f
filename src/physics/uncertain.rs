//! What is uncertain about the inputs of a transformation: the steps of the way, the reading and
//! the calibration of its sensor. All of them are independent of each other.

use super::covariance::Covariance;
use super::scale::Scale;

/// The errors of a step as written, before it is taken backwards.
#[derive(Clone, Debug, PartialEq)]
pub enum Uncertain {
    /// Of a velocity or β, in the unit of the motion.
    Velocity(Covariance<3>),
    /// Of a point of a turning rigid body.
    Turning {
        /// Of ω, in its unit.
        angular_velocity: Covariance<3>,
        /// Of r, in its unit.
        position: Covariance<3>,
    },
    /// Of a direction and the speed beside it.
    Directed {
        /// Standard uncertainty of β, γ, rapidity or kinetic energy, in its unit.
        value: f64,
        /// Standard uncertainty of the angle of the direction about each of two axes
        /// perpendicular to it, in the unit of `radians`.
        direction: f64,
        /// What turns that angle into radians.
        radians: Scale,
    },
    /// Of a turn: small angles about the next axes. The true next axes are the stated ones turned
    /// further by them.
    Axes {
        /// Of the three angles, in the unit of `radians`.
        angles: Covariance<3>,
        /// What turns them into radians.
        radians: Scale,
    },
}

/// The errors of a reading.
#[derive(Clone, Debug, PartialEq)]
pub struct UncertainReading {
    /// Of ex ey ez bx by bz as read: in units of the reading, or in raw numbers of a sensor.
    pub field: Covariance<6>,
    /// Of the calibration of E and of B.
    pub calibration: [Option<UncertainCalibration>; 2],
}

/// Standard uncertainties of the calibration of a sensor.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct UncertainCalibration {
    /// Of the elements of the matrix.
    pub matrix: [[f64; 3]; 3],
    /// Of the offset, in raw numbers.
    pub offset: [f64; 3],
}
