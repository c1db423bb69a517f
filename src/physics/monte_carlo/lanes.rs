//! The same number of several trials side by side, so that one instruction serves more than one.

use std::ops::{Add, Div, Mul, Neg, Sub};

/// Trials side by side.
pub(super) const WIDTH: usize = 4;

/// One number of each of [`WIDTH`] trials.
#[derive(Clone, Copy, Debug)]
pub(super) struct Lanes(pub [f64; WIDTH]);

impl Lanes {
    /// The same number in every trial.
    #[inline(always)]
    pub(super) fn all(x: f64) -> Lanes {
        Lanes([x; WIDTH])
    }

    /// A function of each.
    #[inline(always)]
    pub(super) fn map(mut self, mut f: impl FnMut(f64) -> f64) -> Lanes {
        for x in &mut self.0 {
            *x = f(*x);
        }
        self
    }

    /// Square root.
    #[inline(always)]
    pub(super) fn sqrt(self) -> Lanes {
        self.map(f64::sqrt)
    }
}

macro_rules! operator {
    ($trait:ident, $method:ident) => {
        impl $trait for Lanes {
            type Output = Lanes;
            #[inline(always)]
            fn $method(self, other: Lanes) -> Lanes {
                let mut result = self.0;
                for i in 0..WIDTH {
                    result[i] = result[i].$method(other.0[i]);
                }
                Lanes(result)
            }
        }
        impl $trait<f64> for Lanes {
            type Output = Lanes;
            #[inline(always)]
            fn $method(self, other: f64) -> Lanes {
                self.$method(Lanes::all(other))
            }
        }
    };
}
operator!(Add, add);
operator!(Sub, sub);
operator!(Mul, mul);
operator!(Div, div);

impl Neg for Lanes {
    type Output = Lanes;
    #[inline(always)]
    fn neg(self) -> Lanes {
        self.map(|x| -x)
    }
}

/// a × b.
#[inline(always)]
pub(super) fn cross(a: &[Lanes; 3], b: &[Lanes; 3]) -> [Lanes; 3] {
    [
        a[1] * b[2] - a[2] * b[1],
        a[2] * b[0] - a[0] * b[2],
        a[0] * b[1] - a[1] * b[0],
    ]
}

/// a · b.
#[inline(always)]
pub(super) fn dot(a: &[Lanes; 3], b: &[Lanes; 3]) -> Lanes {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

/// a + b.
#[inline(always)]
pub(super) fn add(a: &[Lanes; 3], b: &[Lanes; 3]) -> [Lanes; 3] {
    [a[0] + b[0], a[1] + b[1], a[2] + b[2]]
}

/// s a.
#[inline(always)]
pub(super) fn scale(s: Lanes, a: &[Lanes; 3]) -> [Lanes; 3] {
    [s * a[0], s * a[1], s * a[2]]
}

/// The same vector in every trial.
#[inline(always)]
pub(super) fn vector(v: [f64; 3]) -> [Lanes; 3] {
    [Lanes::all(v[0]), Lanes::all(v[1]), Lanes::all(v[2])]
}

/// Σ_k m_ik x_k. With loops, since closures in an array's functions are not always inlined.
#[inline(always)]
pub(super) fn product<const N: usize, const M: usize>(
    m: &[[f64; M]; N],
    x: &[Lanes; M],
) -> [Lanes; N] {
    let mut sums = [Lanes::all(0.0); N];
    for (sum, row) in sums.iter_mut().zip(m) {
        for (x, element) in x.iter().zip(row) {
            *sum = *sum + *x * *element;
        }
    }
    sums
}
