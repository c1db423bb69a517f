//! Quaternions of any length as turns, so that nothing is normalised by a square root: R is a
//! ratio of polynomials in the quaternion.

use super::double_double::Dd;
use super::real::{Real, Vec3, add, cross, dot, norm2, scale};

/// w + xi + yj + zk, of any length but zero.
#[derive(Clone, Debug)]
pub struct Quaternion<R> {
    /// Real part.
    pub w: R,
    /// Vector part.
    pub v: Vec3<R>,
}

impl<R: Real> Quaternion<R> {
    /// The Hamilton product: the turn `other`, then this one, both about fixed axes.
    #[inline(always)]
    pub fn times(&self, other: &Quaternion<R>) -> Quaternion<R> {
        let w = (self.w.clone() * other.w.clone()).sum(-dot(&self.v, &other.v));
        let sum = add(&scale(&self.w, &other.v), &scale(&other.w, &self.v));
        Quaternion {
            w,
            v: add(&sum, &cross(&self.v, &other.v)),
        }
    }

    /// The turn back.
    #[inline(always)]
    pub fn conjugate(&self) -> Quaternion<R> {
        Quaternion {
            w: self.w.clone(),
            v: [-self.v[0].clone(), -self.v[1].clone(), -self.v[2].clone()],
        }
    }

    /// |q|².
    #[inline(always)]
    pub fn norm2(&self) -> R {
        self.w.square().sum(norm2(&self.v))
    }

    /// |q|² R v: the vector carried along by the turn, and stretched.
    #[inline(always)]
    pub fn carry(&self, v: &Vec3<R>) -> Vec3<R> {
        let across = cross(&self.v, v);
        let along = dot(&self.v, v).scale2(1);
        let own = self.w.square().sum(-norm2(&self.v));
        let twice = self.w.scale2(1);
        let sum = add(&scale(&own, v), &scale(&along, &self.v));
        add(&sum, &scale(&twice, &across))
    }

    /// Whether it turns nothing.
    pub fn is_identity(&self) -> bool {
        self.v.iter().all(R::is_zero)
    }

    /// M = R⁻¹, which multiplies components.
    #[inline(always)]
    pub fn matrix(&self) -> [Vec3<R>; 3] {
        let (w2, norm2) = (self.w.square(), self.norm2());
        let [x, y, z] = &self.v;
        let [x2, y2, z2] = [x.square(), y.square(), z.square()];
        // w² + a² − b² − c² on the diagonal; beside it 2(outer ± inner), where R⁻¹ has the sign
        // of w turned against R.
        let own = |a: &R, b: &R, c: &R| {
            let (more, less) = (w2.clone().sum(a.clone()), b.clone().sum(c.clone()));
            more.sum(-less)
        };
        let (xy, wz) = (x.clone() * y.clone(), self.w.clone() * z.clone());
        let (yz, wx) = (y.clone() * z.clone(), self.w.clone() * x.clone());
        let (zx, wy) = (z.clone() * x.clone(), self.w.clone() * y.clone());
        let per_norm2 = norm2.of(1.0) / norm2;
        let over = |a: R| a * per_norm2.clone();
        let twice = |a: R| over(a.scale2(1));
        [
            [
                over(own(&x2, &y2, &z2)),
                twice(xy.clone().sum(wz.clone())),
                twice(zx.clone().sum(-wy.clone())),
            ],
            [
                twice(xy.sum(-wz)),
                over(own(&y2, &z2, &x2)),
                twice(yz.clone().sum(wx.clone())),
            ],
            [
                twice(zx.sum(wy)),
                twice(yz.sum(-wx)),
                over(own(&z2, &x2, &y2)),
            ],
        ]
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
    pub(super) fn from_matrix(m: &[Vec3<R>; 3]) -> Quaternion<R> {
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
            std::array::from_fn(|i| cross(&x[(i + 1) % 3], &x[(i + 2) % 3]));
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
