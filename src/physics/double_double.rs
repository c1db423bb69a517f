//! Double-double arithmetic: an unevaluated sum of two doubles, about 106 bits.
//!
//! Algorithms: Dekker 1971 (product), Knuth TAOCP 2 §4.2.2 (sum), the accurate and the quick sum,
//! product and quotient analysed by Joldes, Muller and Popescu, ACM TOMS 44 (2017) 15, and one step
//! of Newton's for the root: relative errors of at most a few units of 2⁻¹⁰⁴, for the quick sum
//! relative to its terms. Every operation on doubles is correctly rounded, so that every machine
//! gives the same bits.

use std::fmt::Debug;
use std::marker::PhantomData;
use std::ops::{Add, Div, Mul, Neg, Sub};

use super::real::{Factor, Real};

/// hi + lo with |lo| ≤ ½ ulp(hi), computed by instructions of the kind `A`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DoubleDouble<A> {
    /// The nearest double.
    pub hi: f64,
    /// What it leaves out.
    pub lo: f64,
    by: PhantomData<A>,
}

/// Double-double by the instructions that every processor has.
pub type Dd = DoubleDouble<Portable>;

/// The few operations on doubles that processors do in different ways; the bits are the same.
pub trait Arithmetic: Copy + Debug + PartialEq {
    /// p + e = a b exactly, p the nearest double, for products whose last bit is a normal double.
    fn two_prod(a: f64, b: f64) -> (f64, f64);
    /// n with 2ⁿ ≤ |x| < 2ⁿ⁺¹, for x other than zero.
    fn exponent(x: f64) -> i32;
    /// x·2ⁿ.
    fn scale2(x: f64, n: i32) -> f64;
}

/// Instructions that every processor has.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Portable;

impl Arithmetic for Portable {
    /// Dekker's product: a fused multiply-add would be a slow library call on generic x86-64.
    #[inline(always)]
    fn two_prod(a: f64, b: f64) -> (f64, f64) {
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
    #[inline(always)]
    fn exponent(x: f64) -> i32 {
        libm::ilogb(x)
    }
    #[inline(always)]
    fn scale2(x: f64, n: i32) -> f64 {
        libm::scalbn(x, n)
    }
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

/// Divisors of the terms of the series of sine and sinh: 2·3, 4·5 and so on.
pub(super) const SIN_DIVISORS: [f64; 15] = divisors(1);
/// Divisors of the terms of the series of cosine: 1·2, 3·4 and so on.
pub(super) const COS_DIVISORS: [f64; 15] = divisors(-1);

const fn divisors(beside: i32) -> [f64; 15] {
    let mut divisors = [0.0; 15];
    let mut k = 1;
    while k < 16 {
        divisors[k as usize - 1] = (2 * k * (2 * k + beside)) as f64;
        k += 1;
    }
    divisors
}

/// π/2 in three doubles.
const HALF_PI: [f64; 3] = [
    std::f64::consts::FRAC_PI_2,
    6.123_233_995_736_766e-17,
    -1.497_384_904_859_17e-33,
];

impl<A: Arithmetic> DoubleDouble<A> {
    /// π.
    pub const PI: Self = Self::of(std::f64::consts::PI, 1.224_646_799_147_353_2e-16);

    /// hi + lo, of which hi is the nearest double.
    #[inline(always)]
    pub const fn of(hi: f64, lo: f64) -> Self {
        DoubleDouble {
            hi,
            lo,
            by: PhantomData,
        }
    }

    /// The same number, to be worked on by other instructions.
    #[inline(always)]
    pub const fn by<B>(self) -> DoubleDouble<B> {
        DoubleDouble {
            hi: self.hi,
            lo: self.lo,
            by: PhantomData,
        }
    }

    /// The double itself.
    #[inline(always)]
    pub const fn from_f64(hi: f64) -> Self {
        Self::of(hi, 0.0)
    }

    /// Times 1 or −1.
    #[inline(always)]
    pub(super) fn signed(self, sign: f64) -> Self {
        Self::of(self.hi * sign, self.lo * sign)
    }

    /// Times a double.
    #[inline(always)]
    pub fn times(self, b: f64) -> Self {
        let (p, e) = A::two_prod(self.hi, b);
        let (hi, lo) = fast_two_sum(p, e + self.lo * b);
        Self::of(hi, lo)
    }

    #[inline(always)]
    fn plus(self, b: f64) -> Self {
        let (s, e) = two_sum(self.hi, b);
        let (hi, lo) = fast_two_sum(s, e + self.lo);
        Self::of(hi, lo)
    }

    /// 1 + x/(first)·(1 + x/(next)·(..)), the nested form of a power series whose terms grow
    /// by x over the divisors given, innermost last.
    fn nested(self, divisors: impl DoubleEndedIterator<Item = f64>) -> Self {
        let one = Self::from_f64(1.0);
        divisors
            .rev()
            .fold(one, |sum, divisor| self.nest(sum, divisor))
    }

    /// 1 + x/divisor·sum: one term of such a series.
    #[inline(always)]
    pub(super) fn nest(self, sum: Self, divisor: f64) -> Self {
        (self * sum / Self::from_f64(divisor)).plus(1.0)
    }

    /// sin x (`sign` −1) or sinh x (`sign` 1) for |x| ≤ 1, by Taylor's series.
    fn odd_series(self, sign: f64) -> Self {
        self * (self * self).times(sign).nested(SIN_DIVISORS.into_iter())
    }

    /// cos x for |x| ≤ 1, by Taylor's series.
    fn cos_series(self) -> Self {
        (self * self).times(-1.0).nested(COS_DIVISORS.into_iter())
    }

    /// exp x, by exp(x) = 2ᵏ exp(r) with |r| ≤ ½ ln 2.
    fn exp(self) -> Self {
        const LN_2: [f64; 3] = [
            std::f64::consts::LN_2,
            2.319_046_813_846_299_6e-17,
            5.707_708_438_416_212e-34,
        ];
        let k = (self.hi / LN_2[0]).round();
        let rest = self.less_multiple(k, LN_2);
        rest.nested((1..28).map(f64::from)).scale2(k as i32)
    }

    /// An angle in rad as a rest below an eighth of a turn and whole quarter turns.
    #[inline(always)]
    pub(super) fn less_quarters(self) -> (Self, f64) {
        let k = (self.hi / HALF_PI[0]).round();
        (self.less_multiple(k, HALF_PI), k)
    }

    /// Sine and cosine of an angle, from those of what is left of it after whole quarter turns.
    #[inline(always)]
    pub(super) fn advance(sin: Self, cos: Self, quarters: f64) -> (Self, Self) {
        let k = quarters - 4.0 * (quarters * 0.25).floor();
        let odd = k == 1.0 || k == 3.0;
        let (sin, cos) = if odd { (cos, -sin) } else { (sin, cos) };
        if k >= 2.0 { (-sin, -cos) } else { (sin, cos) }
    }

    /// self − k·unit, the unit held in three doubles (Cody and Waite).
    #[inline(always)]
    fn less_multiple(self, k: f64, unit: [f64; 3]) -> Self {
        unit.into_iter().fold(self, |rest, part| {
            let (p, e) = A::two_prod(k, part);
            rest - Self::of(p, e)
        })
    }
}

impl<A: Arithmetic> Add for DoubleDouble<A> {
    type Output = Self;
    #[inline(always)]
    fn add(self, b: Self) -> Self {
        let (s, e) = two_sum(self.hi, b.hi);
        let (t, f) = two_sum(self.lo, b.lo);
        let (s, e) = fast_two_sum(s, e + t);
        let (hi, lo) = fast_two_sum(s, e + f);
        Self::of(hi, lo)
    }
}

impl<A: Arithmetic> Neg for DoubleDouble<A> {
    type Output = Self;
    #[inline(always)]
    fn neg(self) -> Self {
        Self::of(-self.hi, -self.lo)
    }
}

impl<A: Arithmetic> Sub for DoubleDouble<A> {
    type Output = Self;
    #[inline(always)]
    fn sub(self, b: Self) -> Self {
        self + -b
    }
}

impl<A: Arithmetic> Mul for DoubleDouble<A> {
    type Output = Self;
    #[inline(always)]
    fn mul(self, b: Self) -> Self {
        let product = self.product(&b);
        let (hi, lo) = fast_two_sum(product.hi, product.lo);
        Self::of(hi, lo)
    }
}

impl<A: Arithmetic> Factor<Self> for DoubleDouble<A> {
    type Product = Self;
    /// A product whose `hi` is not yet the nearest double.
    #[inline(always)]
    fn product(&self, b: &Self) -> Self {
        let (p, e) = A::two_prod(self.hi, b.hi);
        Self::of(p, e + (self.hi * b.lo + self.lo * b.hi))
    }
}

impl<A: Arithmetic> Div for DoubleDouble<A> {
    type Output = Self;
    #[inline(always)]
    fn div(self, b: Self) -> Self {
        // Two quotient digits of 53 bits each; what the first leaves of the leading doubles is exact.
        let q = self.hi / b.hi;
        let (p, e) = A::two_prod(q, b.hi);
        let rest = ((self.hi - p) - e) + (self.lo - q * b.lo);
        let (hi, lo) = fast_two_sum(q, rest / b.hi);
        Self::of(hi, lo)
    }
}

impl<A: Arithmetic> Real for DoubleDouble<A> {
    type Context = ();

    #[inline(always)]
    fn new(value: f64, (): ()) -> Self {
        Self::from_f64(value)
    }
    fn integer(value: u128, (): ()) -> Self {
        // Conversions of 128 bits are slow library calls.
        if value < 1 << 53 {
            return Self::from_f64(value as u64 as f64);
        }
        // The conversion rounds to nearest; what it leaves out is below 2¹²⁸⁻⁵³ and is kept.
        let hi = value as f64;
        let rest = value.wrapping_sub(hi as u128) as i128;
        let (hi, lo) = fast_two_sum(hi, rest as f64);
        Self::of(hi, lo)
    }
    fn ratio(num: u128, den: u128, (): ()) -> Self {
        const EXACT: u128 = 1 << 53;
        if num < EXACT && den < EXACT {
            // What a quotient digit leaves of two doubles is itself a double: no rounding here.
            let (num, den) = (num as u64 as f64, den as u64 as f64);
            let less = |rest: f64, digit: f64| {
                let (p, e) = A::two_prod(digit, den);
                (rest - p) - e
            };
            let q1 = num / den;
            let rest = less(num, q1);
            let q2 = rest / den;
            let q3 = less(rest, q2) / den;
            let (hi, lo) = fast_two_sum(q1, q2);
            return Self::of(hi, lo).plus(q3);
        }
        Self::integer(num, ()) / Self::integer(den, ())
    }
    #[inline(always)]
    fn sum(self, b: Self) -> Self {
        let (s, e) = two_sum(self.hi, b.hi);
        let (hi, lo) = fast_two_sum(s, e + (self.lo + b.lo));
        Self::of(hi, lo)
    }
    #[inline(always)]
    fn sum3(self, b: Self, c: Self) -> Self {
        let (s, e) = two_sum(self.hi, b.hi);
        let (s, f) = two_sum(s, c.hi);
        let (hi, lo) = fast_two_sum(s, (e + f) + ((self.lo + b.lo) + c.lo));
        Self::of(hi, lo)
    }
    fn pi((): ()) -> Self {
        Self::PI
    }
    #[inline(always)]
    fn to_f64(&self) -> f64 {
        self.hi
    }
    fn to_dd(&self) -> Dd {
        self.by()
    }
    fn context(&self) {}
    fn scale2(&self, n: i32) -> Self {
        Self::of(A::scale2(self.hi, n), A::scale2(self.lo, n))
    }
    fn exponent(&self) -> Option<i64> {
        (self.hi != 0.0).then(|| i64::from(A::exponent(self.hi)))
    }
    #[inline(always)]
    fn sqrt(&self) -> Self {
        // One Newton step from the root of the leading double; what that leaves of it is exact.
        let s = self.hi.sqrt();
        let (p, e) = A::two_prod(s, s);
        let step = (((self.hi - p) - e) + self.lo) / (2.0 * s);
        let (hi, lo) = fast_two_sum(s, if s == 0.0 { 0.0 } else { step });
        Self::of(hi, lo)
    }
    fn sin_cos(&self) -> (Self, Self) {
        let (rest, quarters) = self.less_quarters();
        Self::advance(rest.odd_series(-1.0), rest.cos_series(), quarters)
    }
    fn sinh(&self) -> Self {
        if self.hi.abs() < 1.0 {
            return self.odd_series(1.0);
        }
        let exp = self.exp();
        (exp - Self::from_f64(1.0) / exp).times(0.5)
    }
    fn is_zero(&self) -> bool {
        self.hi == 0.0
    }
    fn is_negative(&self) -> bool {
        self.hi < 0.0
    }
}
