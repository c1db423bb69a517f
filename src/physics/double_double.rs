//! Double-double arithmetic: an unevaluated sum of two doubles, about 106 bits.
//!
//! Algorithms: Dekker 1971 (product), Knuth TAOCP 2 §4.2.2 (sum), and the accurate sum,
//! product, quotient and root analysed by Joldes, Muller and Popescu, ACM TOMS 44 (2017) 15:
//! relative errors of at most a few units of 2⁻¹⁰⁴. Only +, −, × and ÷ of doubles are used,
//! so that every machine gives the same bits.

use std::ops::{Add, Div, Mul, Neg, Sub};

use super::real::Real;

/// hi + lo with |lo| ≤ ½ ulp(hi).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Dd {
    /// The nearest double.
    pub hi: f64,
    /// What it leaves out.
    pub lo: f64,
}

/// s + e = a + b exactly, s the nearest double (Knuth).
#[inline(always)]
pub(crate) fn two_sum(a: f64, b: f64) -> (f64, f64) {
    let s = a + b;
    let t = s - a;
    (s, (a - (s - t)) + (b - t))
}

/// The same where |a| ≥ |b| or a = 0 (Dekker).
#[inline(always)]
fn fast_two_sum(a: f64, b: f64) -> (f64, f64) {
    let s = a + b;
    (s, b - (s - a))
}

/// p + e = a b exactly, p the nearest double (Dekker; a fused multiply-add would be a slow
/// library call on generic x86-64, and gives the same bits).
#[inline(always)]
pub(crate) fn two_prod(a: f64, b: f64) -> (f64, f64) {
    const SPLITTER: f64 = 134_217_729.0; // 2²⁷ + 1
    let split = |x: f64| {
        let t = SPLITTER * x;
        let hi = t - (t - x);
        (hi, x - hi)
    };
    let p = a * b;
    let ((ah, al), (bh, bl)) = (split(a), split(b));
    (p, ((ah * bh - p) + ah * bl + al * bh) + al * bl)
}

impl Dd {
    /// π.
    pub const PI: Dd = Dd {
        hi: std::f64::consts::PI,
        lo: 1.224_646_799_147_353_2e-16,
    };

    /// The double itself.
    #[inline(always)]
    pub const fn from_f64(hi: f64) -> Dd {
        Dd { hi, lo: 0.0 }
    }

    /// Times a double.
    #[inline(always)]
    pub fn times(self, b: f64) -> Dd {
        let (p, e) = two_prod(self.hi, b);
        let (hi, lo) = fast_two_sum(p, e + self.lo * b);
        Dd { hi, lo }
    }

    fn plus(self, b: f64) -> Dd {
        let (s, e) = two_sum(self.hi, b);
        let (hi, lo) = fast_two_sum(s, e + self.lo);
        Dd { hi, lo }
    }

    /// 1 + x/(first)·(1 + x/(next)·(..)), the nested form of a power series whose terms grow
    /// by x over the divisors given, innermost last.
    fn nested(self, divisors: impl DoubleEndedIterator<Item = f64>) -> Dd {
        divisors.rev().fold(Dd::from_f64(1.0), |sum, divisor| {
            (self * sum / Dd::from_f64(divisor)).plus(1.0)
        })
    }

    /// sin x (`sign` −1) or sinh x (`sign` 1) for |x| ≤ 1, by Taylor's series.
    fn odd_series(self, sign: f64) -> Dd {
        self * (self * self)
            .times(sign)
            .nested((1..16).map(|k| f64::from(2 * k * (2 * k + 1))))
    }

    /// cos x for |x| ≤ 1, by Taylor's series.
    fn cos_series(self) -> Dd {
        (self * self)
            .times(-1.0)
            .nested((1..16).map(|k| f64::from(2 * k * (2 * k - 1))))
    }

    /// exp x, by exp(x) = 2ᵏ exp(r) with |r| ≤ ½ ln 2.
    fn exp(self) -> Dd {
        const LN_2: [f64; 3] = [
            std::f64::consts::LN_2,
            2.319_046_813_846_299_6e-17,
            5.707_708_438_416_212e-34,
        ];
        let k = (self.hi / LN_2[0]).round();
        let rest = self.less_multiple(k, LN_2);
        rest.nested((1..28).map(f64::from)).scale2(k as i32)
    }

    /// self − k·unit, the unit held in three doubles (Cody and Waite).
    fn less_multiple(self, k: f64, unit: [f64; 3]) -> Dd {
        unit.into_iter().fold(self, |rest, part| {
            let (p, e) = two_prod(k, part);
            rest - Dd { hi: p, lo: e }
        })
    }
}

impl Add for Dd {
    type Output = Dd;
    #[inline(always)]
    fn add(self, b: Dd) -> Dd {
        let (s, e) = two_sum(self.hi, b.hi);
        let (t, f) = two_sum(self.lo, b.lo);
        let (s, e) = fast_two_sum(s, e + t);
        let (hi, lo) = fast_two_sum(s, e + f);
        Dd { hi, lo }
    }
}

impl Neg for Dd {
    type Output = Dd;
    #[inline(always)]
    fn neg(self) -> Dd {
        Dd {
            hi: -self.hi,
            lo: -self.lo,
        }
    }
}

impl Sub for Dd {
    type Output = Dd;
    #[inline(always)]
    fn sub(self, b: Dd) -> Dd {
        self + -b
    }
}

impl Mul for Dd {
    type Output = Dd;
    #[inline(always)]
    fn mul(self, b: Dd) -> Dd {
        let (p, e) = two_prod(self.hi, b.hi);
        let cross = self.hi * b.lo + self.lo * b.hi;
        let (hi, lo) = fast_two_sum(p, e + (cross + self.lo * b.lo));
        Dd { hi, lo }
    }
}

impl Div for Dd {
    type Output = Dd;
    #[inline(always)]
    fn div(self, b: Dd) -> Dd {
        // Three quotient digits of 53 bits each, the last one for the rounding.
        let q1 = self.hi / b.hi;
        let rest = self - b.times(q1);
        let q2 = rest.hi / b.hi;
        let rest = rest - b.times(q2);
        let q3 = rest.hi / b.hi;
        let (hi, lo) = fast_two_sum(q1, q2);
        Dd { hi, lo }.plus(q3)
    }
}

impl Real for Dd {
    type Context = ();

    #[inline(always)]
    fn new(value: f64, (): ()) -> Dd {
        Dd::from_f64(value)
    }
    fn integer(value: u128, (): ()) -> Dd {
        // Conversions of 128 bits are slow library calls.
        if value < 1 << 53 {
            return Dd::from_f64(value as u64 as f64);
        }
        // The conversion rounds to nearest; what it leaves out is below 2¹²⁸⁻⁵³ and is kept.
        let hi = value as f64;
        let rest = value.wrapping_sub(hi as u128) as i128;
        let (hi, lo) = fast_two_sum(hi, rest as f64);
        Dd { hi, lo }
    }
    fn ratio(num: u128, den: u128, (): ()) -> Dd {
        const EXACT: u128 = 1 << 53;
        if num < EXACT && den < EXACT {
            // What a quotient digit leaves of two doubles is itself a double: no rounding here.
            let (num, den) = (num as u64 as f64, den as u64 as f64);
            let less = |rest: f64, digit: f64| {
                let (p, e) = two_prod(digit, den);
                (rest - p) - e
            };
            let q1 = num / den;
            let rest = less(num, q1);
            let q2 = rest / den;
            let q3 = less(rest, q2) / den;
            let (hi, lo) = fast_two_sum(q1, q2);
            return Dd { hi, lo }.plus(q3);
        }
        Dd::integer(num, ()) / Dd::integer(den, ())
    }
    fn pi((): ()) -> Dd {
        Dd::PI
    }
    #[inline(always)]
    fn to_f64(&self) -> f64 {
        self.hi + self.lo
    }
    fn to_dd(&self) -> Dd {
        *self
    }
    fn context(&self) {}
    fn scale2(&self, n: i32) -> Dd {
        Dd {
            hi: libm::scalbn(self.hi, n),
            lo: libm::scalbn(self.lo, n),
        }
    }
    fn exponent(&self) -> Option<i64> {
        (self.hi != 0.0).then(|| i64::from(libm::ilogb(self.hi)))
    }
    #[inline(always)]
    fn sqrt(&self) -> Dd {
        if self.hi == 0.0 {
            return Dd::from_f64(0.0);
        }
        // One Newton step in double-double from the double root, and a second for the last bit.
        let s = self.hi.sqrt();
        let (p, e) = two_prod(s, s);
        let root = Dd::from_f64(s).plus((*self - Dd { hi: p, lo: e }).hi / (2.0 * s));
        root.plus((*self - root * root).hi / (2.0 * s))
    }
    fn sin_cos(&self) -> (Dd, Dd) {
        const HALF_PI: [f64; 3] = [
            std::f64::consts::FRAC_PI_2,
            6.123_233_995_736_766e-17,
            -1.497_384_904_859_17e-33,
        ];
        let k = (self.hi / HALF_PI[0]).round();
        let rest = self.less_multiple(k, HALF_PI);
        let (sin, cos) = (rest.odd_series(-1.0), rest.cos_series());
        match (k as i64).rem_euclid(4) {
            0 => (sin, cos),
            1 => (cos, -sin),
            2 => (-sin, -cos),
            _ => (-cos, sin),
        }
    }
    fn sinh(&self) -> Dd {
        if self.hi.abs() < 1.0 {
            return self.odd_series(1.0);
        }
        let exp = self.exp();
        (exp - Dd::from_f64(1.0) / exp).times(0.5)
    }
    fn is_zero(&self) -> bool {
        self.hi == 0.0
    }
    fn is_negative(&self) -> bool {
        self.hi < 0.0
    }
}
