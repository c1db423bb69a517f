//! What physics refuses.

use thiserror::Error;

/// A question that has no answer, whatever the notation it was asked in.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum Impossible {
    /// |v| ≥ c.
    #[error(
        "the speed is {times_c} c; a frame moves slower than c = 299792458 m/s. Check the value \
         and its unit; very close to c give a direction with gamma, rapidity or kinetic_energy"
    )]
    FasterThanLight {
        /// The speed in units of c, rounded.
        times_c: f64,
    },
    /// A direction, axis or quaternion of length zero.
    #[error("{what} has length zero and points nowhere; give any vector of another length")]
    NoDirection {
        /// What was given.
        what: &'static str,
    },
    /// γ < 1 or a negative energy.
    #[error("{what} is {value}, but must be {bound}")]
    BelowRest {
        /// Name of the quantity.
        what: &'static str,
        /// Its value.
        value: f64,
        /// What is allowed.
        bound: &'static str,
    },
    /// A quaternion or matrix too far from a rotation.
    #[error(
        "{what} is {departure:e}, but a rotation stays below {limit:e} (the rounding of six \
         decimals); give more digits, or check the order of the elements"
    )]
    NotARotation {
        /// The measure that is off.
        what: &'static str,
        /// Its size.
        departure: f64,
        /// The largest size accepted.
        limit: f64,
    },
    /// det M < 0.
    #[error(
        "the matrix has determinant {determinant}: it mirrors the axes, and no rotation does; \
         check the sign of one row"
    )]
    Mirror {
        /// The determinant.
        determinant: f64,
    },
    /// An answer past the largest double.
    #[error(
        "{what} is larger than the largest double (1.8e308) in the unit asked for; choose a larger answer unit"
    )]
    Overflow {
        /// What overflows.
        what: &'static str,
    },
    /// An infinity where a number is needed.
    #[error("a number of the row is infinite; give a finite one, or none")]
    Infinite,
    /// A net γ past the largest double.
    #[error(
        "the net boost has gamma 2^{bits}, and no double holds more than 2^1024; leave out steps \
         that speed up further"
    )]
    GammaOverflow {
        /// log2 of the net γ.
        bits: i64,
    },
    /// A way whose speeds need more bits than are kept.
    #[error(
        "the steps multiply up to a factor of 2^{growth:.0} in the field, and the service keeps \
         2^{limit:.0}; leave out steps that undo each other"
    )]
    PrecisionExhausted {
        /// log2 of the product of γ(1+β) over all steps.
        growth: f64,
        /// The largest accepted.
        limit: f64,
    },
    /// A γ or energy of a frame at rest, uncertain.
    #[error(
        "{what} of a frame at rest is uncertain, but there the speed does not follow a small change \
         of it to first order; give the uncertainty of a velocity, of beta or of the rapidity"
    )]
    UncertainAtRest {
        /// Name of the quantity.
        what: &'static str,
    },
    /// B too close to the plane of the measured components of E.
    #[error(
        "B is {degrees:.2} degrees from the plane of the measured components of E, and min_angle \
         is {limit} degrees: there E.B = 0 says too little about the missing one"
    )]
    FieldInPlane {
        /// Angle of B to the plane in degrees; zero without B.
        degrees: f64,
        /// The least angle allowed.
        limit: f64,
    },
}
