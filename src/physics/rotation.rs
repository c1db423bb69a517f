//! Rotations: the turn that carries the current axes onto the next ones (right-hand rule).
//!
//! The turn R is kept as a quaternion of any length, so that nothing is normalised by a square
//! root: components become R⁻¹v, and R is a ratio of polynomials in the quaternion.

use super::double_double::Dd;
use super::error::Impossible;
use super::real::{Real, Vec3, dot, exponent_spread, norm2, vector};
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

/// w + xi + yj + zk, of any length but zero.
#[derive(Clone, Debug)]
pub struct Quaternion<R> {
    /// Real part.
    pub w: R,
    /// Vector part.
    pub v: Vec3<R>,
}

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
                let determinant = dot(&rows[0], &super::real::cross(&rows[1], &rows[2])).to_f64();
                if determinant < 0.0 {
                    return Err(Impossible::Mirror { determinant });
                }
                Ok(departure)
            }
        }
    }

    /// Whether two doubles hold everything in [`quaternion`](Self::quaternion).
    pub fn fits_dd(&self) -> bool {
        let small = |angle: f64, radians: Scale| {
            angle == 0.0
                || (1e-60..1e5).contains(&angle.abs())
                || radians.pi == 1 && angle.abs() > 1.0
        };
        match self {
            Turn::AxisAngle { angle, radians, .. } => small(*angle, *radians),
            Turn::Euler {
                angles, radians, ..
            } => angles.iter().all(|a| small(*a, *radians)),
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
    let axis = vector::<R>(super::boost::unit_exponent(axis), context);
    let length = norm2(&axis).sqrt();
    Quaternion {
        w: w * length,
        v: axis.map(|x| x * s.clone()),
    }
}

/// Cosine and sine of half an angle, up to a common factor. Quarter turns are split off in the
/// unit itself where that is exact (degrees, revolutions): 90 deg is then a turn without error.
fn half_angle<R: Real>(angle: f64, radians: Scale, context: R::Context) -> (R, R) {
    let (rest, quarters) = if radians.pi == 1 {
        libm::remquo(angle, radians.den as f64 / (2.0 * radians.num as f64))
    } else {
        (angle, 0)
    };
    half_of_quarters(R::new(rest, context) * radians.value(context), quarters)
}

/// Cosine and sine of half of an angle and some quarter turns, up to a common factor.
pub(super) fn half_of_quarters<R: Real>(angle: R, quarters: i32) -> (R, R) {
    let (sin, cos) = angle.scale2(-1).sin_cos();
    match quarters.rem_euclid(4) {
        0 => (cos, sin),
        1 => (cos.clone() - sin.clone(), cos + sin),
        2 => (-sin, cos),
        _ => (-(cos.clone() + sin.clone()), cos - sin),
    }
}

impl<R: Real> Quaternion<R> {
    /// The Hamilton product: the turn `other`, then this one, both about fixed axes.
    pub fn times(&self, other: &Quaternion<R>) -> Quaternion<R> {
        let w = self.w.clone() * other.w.clone() - dot(&self.v, &other.v);
        let cross = super::real::cross(&self.v, &other.v);
        let v = std::array::from_fn(|i| {
            self.w.clone() * other.v[i].clone()
                + other.w.clone() * self.v[i].clone()
                + cross[i].clone()
        });
        Quaternion { w, v }
    }

    /// The turn back.
    pub fn conjugate(&self) -> Quaternion<R> {
        Quaternion {
            w: self.w.clone(),
            v: self.v.clone().map(|x| -x),
        }
    }

    /// |q|².
    pub fn norm2(&self) -> R {
        self.w.square() + norm2(&self.v)
    }

    /// |q|² R v: the vector carried along by the turn, and stretched.
    pub fn carry(&self, v: &Vec3<R>) -> Vec3<R> {
        let across = super::real::cross(&self.v, v);
        let along = dot(&self.v, v).scale2(1);
        let own = self.w.square() - norm2(&self.v);
        let twice = self.w.scale2(1);
        std::array::from_fn(|i| {
            own.clone() * v[i].clone()
                + along.clone() * self.v[i].clone()
                + twice.clone() * across[i].clone()
        })
    }

    /// Whether it turns nothing.
    pub fn is_identity(&self) -> bool {
        self.v.iter().all(R::is_zero)
    }

    /// M = R⁻¹, which multiplies components.
    pub fn matrix(&self) -> [Vec3<R>; 3] {
        let (w2, norm2) = (self.w.square(), self.norm2());
        let squares = self.v.clone().map(|x| x.square());
        std::array::from_fn(|i| {
            std::array::from_fn(|j| {
                let element = if i == j {
                    let (a, b) = ((i + 1) % 3, (i + 2) % 3);
                    w2.clone() + squares[i].clone() - squares[a].clone() - squares[b].clone()
                } else {
                    let k = 3 - i - j;
                    let outer = self.v[i].clone() * self.v[j].clone();
                    let inner = self.w.clone() * self.v[k].clone();
                    // R⁻¹ has the sign of w turned against R.
                    let cyclic = (i + 1) % 3 == j;
                    (if cyclic { outer + inner } else { outer - inner }).scale2(1)
                };
                element / norm2.clone()
            })
        })
    }

    /// The unit quaternion with w ≥ 0, rounded to doubles: w, x, y, z.
    pub fn rounded(&self) -> [f64; 4] {
        let length = self.norm2().sqrt();
        let length = if self.w.is_negative() {
            -length
        } else {
            length
        };
        let part = |x: &R| (x.clone() / length.clone()).to_f64() + 0.0;
        [
            part(&self.w),
            part(&self.v[0]),
            part(&self.v[1]),
            part(&self.v[2]),
        ]
    }

    /// The same to the precision of two doubles.
    pub fn to_dd(&self) -> Quaternion<Dd> {
        Quaternion {
            w: self.w.to_dd(),
            v: std::array::from_fn(|i| self.v[i].to_dd()),
        }
    }

    /// From M = R⁻¹, taken to the nearest rotation (its polar factor).
    fn from_matrix(m: &[Vec3<R>; 3]) -> Quaternion<R> {
        let m = polar_factor(m);
        let trace = m[0][0].clone() + m[1][1].clone() + m[2][2].clone();
        let one = trace.of(1.0);
        // 4w² and 4x².. from the diagonal; the largest of the four is well away from zero.
        let four_w2 = one.clone() + trace.clone();
        let four_v2: Vec3<R> =
            std::array::from_fn(|i| one.clone() + m[i][i].clone().scale2(1) - trace.clone());
        let sizes = [
            four_w2.to_f64(),
            four_v2[0].to_f64(),
            four_v2[1].to_f64(),
            four_v2[2].to_f64(),
        ];
        let largest = (0..4)
            .max_by(|&a, &b| sizes[a].total_cmp(&sizes[b]))
            .unwrap_or(0);
        let odd = |i: usize| {
            let (j, k) = ((i + 1) % 3, (i + 2) % 3);
            m[j][k].clone() - m[k][j].clone()
        };
        if largest == 0 {
            return Quaternion {
                w: four_w2,
                v: [odd(0), odd(1), odd(2)],
            };
        }
        let i = largest - 1;
        let v = std::array::from_fn(|j| {
            if j == i {
                four_v2[i].clone()
            } else {
                m[i][j].clone() + m[j][i].clone()
            }
        });
        Quaternion { w: odd(i), v }
    }
}

/// The orthogonal factor of a matrix that is nearly orthogonal, by Newton's iteration
/// X ← (X + X⁻ᵀ)/2 (Higham, Functions of Matrices, ch. 8), which squares the error each time.
fn polar_factor<R: Real>(m: &[Vec3<R>; 3]) -> [Vec3<R>; 3] {
    let mut x = m.clone();
    // 2e-6 squared ten times over is past any precision kept; two doubles need three.
    for _ in 0..12 {
        let cofactors: [Vec3<R>; 3] =
            std::array::from_fn(|i| super::real::cross(&x[(i + 1) % 3], &x[(i + 2) % 3]));
        let determinant = dot(&x[0], &cofactors[0]);
        let next: [Vec3<R>; 3] = std::array::from_fn(|i| {
            std::array::from_fn(|j| {
                (x[i][j].clone() + cofactors[i][j].clone() / determinant.clone()).scale2(-1)
            })
        });
        let still =
            (0..9).all(|n| (next[n / 3][n % 3].clone() - x[n / 3][n % 3].clone()).is_zero());
        x = next;
        if still {
            break;
        }
    }
    x
}
