//! What is uncertain about the inputs of a transformation: the steps of the way, the reading and
//! the calibration of its sensor. All of them are independent of each other.

use super::boost::Motion;
use super::covariance::Covariance;
use super::error::Impossible;
use super::lorentz::Change;
use super::scale::Scale;

/// A step that is not known exactly.
#[derive(Clone, Debug, PartialEq)]
pub struct UncertainStep {
    /// Its errors.
    pub errors: Errors,
    /// Where the step stands, as a JSON Pointer: what a budget calls it.
    pub source: String,
}

/// The errors of a step as written, before it is taken backwards.
#[derive(Clone, Debug, PartialEq)]
pub enum Errors {
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

impl Errors {
    /// Refuses what first order says nothing about.
    ///
    /// # Errors
    /// γ = 1 or no kinetic energy, uncertain: the speed is not a smooth function of either there.
    pub fn check(&self, change: &Change) -> Result<(), Impossible> {
        let (Errors::Directed { value, .. }, Change::Boost(motion)) = (self, change) else {
            return Ok(());
        };
        let what = match motion {
            Motion::Gamma { gamma: 1.0, .. } => "gamma",
            Motion::KineticEnergy { energy: 0.0, .. } => "kinetic_energy",
            _ => return Ok(()),
        };
        if *value == 0.0 {
            return Ok(());
        }
        Err(Impossible::UncertainAtRest { what })
    }

    /// Covariances of the errors that have one.
    pub fn covariances(&self) -> Vec<&Covariance<3>> {
        match self {
            Errors::Velocity(covariance)
            | Errors::Axes {
                angles: covariance, ..
            } => vec![covariance],
            Errors::Turning {
                angular_velocity,
                position,
            } => vec![angular_velocity, position],
            Errors::Directed { .. } => Vec::new(),
        }
    }

    /// The sizes of all errors, as [`Covariance::sizes`].
    pub(super) fn sizes(&self) -> Vec<f64> {
        if let Errors::Directed {
            value, direction, ..
        } = self
        {
            return vec![*value, *direction];
        }
        let each = self.covariances().into_iter();
        each.flat_map(|covariance| covariance.sizes()).collect()
    }
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
