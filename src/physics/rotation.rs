//! Rotations: the turn that carries the current axes onto the next ones (right-hand rule).
//!
//! The turn R is kept as a quaternion of any length, so that nothing is normalised by a square
//! root: components become R⁻¹v, and R is a ratio of polynomials in the quaternion.

use super::double_double::Dd;
use super::error::Impossible;
use super::quaternion::Quaternion;
use super::real::{Real, Vec3, cross, dot, exponent_spread, norm2, vector};
use super::scale::Scale;
use super::spin::Spin;

/// The turn of the axes, in the form it was given.
#[derive(Clone, Debug, PartialEq)]
pub enum Turn {
    /// A turn about an axis.
    AxisAngle {
        /// Any length.
        axis: [f64; 3],
        /// In the unit of `radians`.
        angle: f64,
        /// What turns the angle into radians.
        radians: Scale,
    },
    /// A quaternion w, x, y, z (Hamilton's, Rv = q v q*).
    Quaternion([f64; 4]),
    /// M = R⁻¹: row i is the next axis i on the current axes.
    Matrix([[f64; 3]; 3]),
    /// Three turns in a row about coordinate axes.
    Euler {
        /// 0, 1, 2 for x, y, z.
        axes: [usize; 3],
        /// In the unit of `radians`.
        angles: [f64; 3],
        /// What turns the angles into radians.
        radians: Scale,
        /// About the axes as turned so far, or about those at the start.
        moving: bool,
    },
    /// A turn that has gone on at a constant rate.
    Spinning(Spin),
}

/// Largest departure of |q|² and MMᵀ from one that is taken as rounding and mended.
pub const ROUNDING_LIMIT: f64 = 2e-6;

impl Turn {
    /// How far a quaternion or matrix is from a rotation: ||q|²−1| or the largest element of
    /// |MMᵀ−1|. Zero for the other forms.
    ///
    /// # Errors
    /// The departure is past [`ROUNDING_LIMIT`], the matrix mirrors, or the axis has no length.
    pub fn check(&self) -> Result<f64, Impossible> {
        let within = |what, departure: f64| {
            // The comparison is false for NaN, which an overflow may have left.
            if departure <= ROUNDING_LIMIT {
                return Ok(departure);
            }
            Err(Impossible::NotARotation {
                what,
                departure,
                limit: ROUNDING_LIMIT,
            })
        };
        match self {
            Turn::AxisAngle { axis, .. } if *axis == [0.0; 3] => {
                Err(Impossible::NoDirection { what: "axis" })
            }
            Turn::Spinning(spin) => spin.check().map(|()| 0.0),
            Turn::AxisAngle { .. } | Turn::Euler { .. } => Ok(0.0),
            Turn::Quaternion(q) => {
                if *q == [0.0; 4] {
                    return Err(Impossible::NoDirection { what: "quaternion" });
                }
                let norm2 = q.iter().fold(Dd::from_f64(0.0), |sum, &x| {
                    sum + Dd::from_f64(x) * Dd::from_f64(x)
                });
                within(
                    "||q|^2 - 1|",
                    finite((norm2 - Dd::from_f64(1.0)).to_f64().abs()),
                )
            }
            Turn::Matrix(m) => {
                let rows = m.map(|row| vector::<Dd>(row, ()));
                let mut departure = 0.0f64;
                for i in 0..3 {
                    for j in 0..3 {
                        let unit = Dd::from_f64(if i == j { 1.0 } else { 0.0 });
                        let off = finite((dot(&rows[i], &rows[j]) - unit).to_f64().abs());
                        departure = departure.max(off);
                    }
                }
                within("the largest element of |M Mt - 1|", departure)?;
                let determinant = dot(&rows[0], &cross(&rows[1], &rows[2])).to_f64();
                if determinant < 0.0 {
                    return Err(Impossible::Mirror { determinant });
                }
                Ok(departure)
            }
        }
    }

    /// Whether two doubles hold the turn by an angle.
    pub(super) fn angle_fits_dd(angle: f64, radians: Scale) -> bool {
        angle == 0.0 || (1e-60..1e5).contains(&angle.abs()) || radians.pi == 1 && angle.abs() > 1.0
    }

    /// Whether two doubles hold everything in [`quaternion`](Self::quaternion).
    pub fn fits_dd(&self) -> bool {
        match self {
            Turn::AxisAngle { angle, radians, .. } => Turn::angle_fits_dd(*angle, *radians),
            Turn::Euler {
                angles, radians, ..
            } => angles.iter().all(|a| Turn::angle_fits_dd(*a, *radians)),
            Turn::Spinning(spin) => spin.fits_dd(),
            Turn::Quaternion(_) | Turn::Matrix(_) => true,
        }
    }

    /// About how many bits below one the smallest number of the turn lies.
    pub fn depth(&self) -> i64 {
        match self {
            Turn::AxisAngle {
                axis,
                angle,
                radians,
            } => exponent_spread(*axis) + exponent_spread([1.0, angle * radians.to_f64()]),
            Turn::Quaternion(q) => exponent_spread(*q),
            Turn::Matrix([a, b, c]) => [a, b, c]
                .map(|row| exponent_spread(*row))
                .into_iter()
                .max()
                .unwrap_or(0),
            Turn::Euler {
                angles, radians, ..
            } => {
                let [a, b, c] = angles.map(|angle| angle * radians.to_f64());
                exponent_spread([1.0, a, b, c])
            }
            Turn::Spinning(spin) => spin.depth(),
        }
    }

    /// By how much the error of [`quaternion`](Self::quaternion) exceeds that of its arithmetic.
    pub fn slack(&self) -> f64 {
        match self {
            Turn::Spinning(spin) => spin.slack(),
            _ => 1.0,
        }
    }

    /// The turn as a quaternion, of a form that passed [`check`](Self::check).
    pub fn quaternion<R: Real>(&self, context: R::Context) -> Quaternion<R> {
        match self {
            Turn::AxisAngle {
                axis,
                angle,
                radians,
            } => about_axis(*axis, half_angle::<R>(*angle, *radians, context), context),
            Turn::Spinning(spin) => spin.quaternion(context),
            Turn::Quaternion([w, x, y, z]) => Quaternion {
                w: R::new(*w, context),
                v: vector([*x, *y, *z], context),
            },
            Turn::Matrix(m) => Quaternion::from_matrix(&m.map(|row| vector(row, context))),
            Turn::Euler {
                axes,
                angles,
                radians,
                moving,
            } => {
                let mut parts: Vec<Quaternion<R>> = (0..3)
                    .map(|i| {
                        let (w, s) = half_angle::<R>(angles[i], *radians, context);
                        let mut v = vector::<R>([0.0; 3], context);
                        v[axes[i]] = s;
                        Quaternion { w, v }
                    })
                    .collect();
                if !moving {
                    parts.reverse();
                }
                parts[0].times(&parts[1]).times(&parts[2])
            }
        }
    }
}

fn finite(x: f64) -> f64 {
    if x.is_finite() { x } else { f64::MAX }
}

/// The turn about an axis of any length, from cosine and sine of half its angle.
pub(super) fn about_axis<R: Real>(
    axis: [f64; 3],
    (w, s): (R, R),
    context: R::Context,
) -> Quaternion<R> {
    let (axis, length) = unit_axis::<R>(axis, context);
    Quaternion {
        w: w * length,
        v: axis.map(|x| x * s.clone()),
    }
}

/// An axis brought near length one, and its length.
pub(super) fn unit_axis<R: Real>(axis: [f64; 3], context: R::Context) -> (Vec3<R>, R) {
    let axis = vector::<R>(super::boost::unit_exponent(axis), context);
    let length = norm2(&axis).sqrt();
    (axis, length)
}

/// Cosine and sine of half an angle, up to a common factor.
fn half_angle<R: Real>(angle: f64, radians: Scale, context: R::Context) -> (R, R) {
    let (rest, quarters) = split_quarters(angle, radians);
    half_of_quarters(R::new(rest, context) * radians.value(context), quarters)
}

/// An angle as a rest and some quarter turns, split off in the unit itself where that is exact
/// (degrees, revolutions): 90 deg is then a turn without error.
pub(super) fn split_quarters(angle: f64, radians: Scale) -> (f64, i32) {
    if radians.pi == 1 {
        libm::remquo(angle, radians.den as f64 / (2.0 * radians.num as f64))
    } else {
        (angle, 0)
    }
}

/// Cosine and sine of half of an angle and some quarter turns, up to a common factor.
pub(super) fn half_of_quarters<R: Real>(angle: R, quarters: i32) -> (R, R) {
    let (sin, cos) = angle.scale2(-1).sin_cos();
    advance_half(cos, sin, f64::from(quarters.rem_euclid(4)))
}

/// Cosine and sine of half an angle after 0 to 3 quarter turns more, up to a common factor.
#[inline(always)]
pub(super) fn advance_half<R: Real>(cos: R, sin: R, quarters: f64) -> (R, R) {
    let odd = quarters == 1.0 || quarters == 3.0;
    let (cos, sin) = if odd {
        (cos.clone() - sin.clone(), cos + sin)
    } else {
        (cos, sin)
    };
    if quarters >= 2.0 {
        (-sin, cos)
    } else {
        (cos, sin)
    }
}
