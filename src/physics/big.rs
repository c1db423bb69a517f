//! Floating point of any precision, for the cases in which 106 bits are not enough.
//!
//! A thin layer over `dashu_float`, which gives arithmetic and elementary functions of any
//! precision. It adds what this crate needs: zero without a precision of its own, and a
//! conversion to doubles that rounds once, also below the smallest normal double.

use std::cmp::Ordering;
use std::ops::{Add, Div, Mul, Neg, Sub};

use dashu_float::{FBig, Repr, round::mode::HalfEven};
use dashu_int::{IBig, ops::BitTest};

use super::double_double::Dd;
use super::real::{Factor, Real};

type Float = FBig<HalfEven, 2>;

/// A binary floating-point number of a chosen number of bits and an unbounded exponent.
#[derive(Clone, Debug)]
pub struct Big {
    value: Float,
    bits: usize,
}

impl Big {
    fn wrap(value: Float, bits: usize) -> Big {
        Big {
            value: value.with_precision(bits).value(),
            bits,
        }
    }
}

impl PartialEq for Big {
    fn eq(&self, other: &Big) -> bool {
        self.value == other.value
    }
}

impl PartialOrd for Big {
    fn partial_cmp(&self, other: &Big) -> Option<Ordering> {
        self.value.partial_cmp(&other.value)
    }
}

impl Add for Big {
    type Output = Big;
    fn add(self, b: Big) -> Big {
        Big {
            value: self.value + b.value,
            bits: self.bits,
        }
    }
}

impl Sub for Big {
    type Output = Big;
    fn sub(self, b: Big) -> Big {
        Big {
            value: self.value - b.value,
            bits: self.bits,
        }
    }
}

impl Mul for Big {
    type Output = Big;
    fn mul(self, b: Big) -> Big {
        Big {
            value: self.value * b.value,
            bits: self.bits,
        }
    }
}

impl Div for Big {
    type Output = Big;
    fn div(self, b: Big) -> Big {
        Big {
            value: self.value / b.value,
            bits: self.bits,
        }
    }
}

impl Neg for Big {
    type Output = Big;
    fn neg(self) -> Big {
        Big {
            value: -self.value,
            bits: self.bits,
        }
    }
}

impl Factor<Big> for Big {
    type Product = Big;
    fn product(&self, by: &Big) -> Big {
        self.clone() * by.clone()
    }
}

impl Real for Big {
    /// The number of bits.
    type Context = usize;

    fn new(value: f64, bits: usize) -> Big {
        // A double of any size is an integer times a power of two.
        let raw = value.to_bits();
        let field = ((raw >> 52) & 0x7ff) as i64;
        let fraction = raw & ((1 << 52) - 1);
        let (significand, exponent) = if field == 0 {
            (fraction, -1074)
        } else {
            (fraction | 1 << 52, field - 1075)
        };
        let significand = IBig::from(significand);
        let significand = if value < 0.0 {
            -significand
        } else {
            significand
        };
        Big::wrap(Float::from_parts(significand, exponent as isize), bits)
    }
    fn integer(value: u128, bits: usize) -> Big {
        Big::wrap(Float::from_parts(IBig::from(value), 0), bits)
    }
    fn pi(bits: usize) -> Big {
        Big {
            value: Float::pi(bits),
            bits,
        }
    }
    fn to_f64(&self) -> f64 {
        let Some(exponent) = self.exponent() else {
            return 0.0;
        };
        let sign = if self.is_negative() { -1.0 } else { 1.0 };
        if exponent > 1023 {
            return sign * f64::INFINITY;
        }
        // The unit in the last of 53 places, or that of the subnormal doubles; a number below
        // half of the smallest double has none of its places.
        let lowest = (exponent - 52).max(-1074);
        let integer = rounded(self.value.repr(), lowest);
        // Exact: the integer has no more places than a double of that size.
        sign * libm::scalbn(integer, lowest as i32)
    }
    fn to_dd(&self) -> Dd {
        let hi = self.to_f64();
        let lo = (self.clone() - Big::new(hi, self.bits)).to_f64();
        Dd::of(hi, lo)
    }
    fn context(&self) -> usize {
        self.bits
    }
    fn scale2(&self, n: i32) -> Big {
        let (significand, exponent) = self.value.repr().clone().into_parts();
        Big::wrap(
            Float::from_parts(significand, exponent + n as isize),
            self.bits,
        )
    }
    fn exponent(&self) -> Option<i64> {
        let repr = self.value.repr();
        let length = repr.significand().bit_len() as i64;
        (length > 0).then(|| repr.exponent() as i64 + length - 1)
    }
    fn sqrt(&self) -> Big {
        if self.is_zero() {
            return self.clone();
        }
        Big {
            value: self.value.sqrt(),
            bits: self.bits,
        }
    }
    fn sin_cos(&self) -> (Big, Big) {
        if self.is_zero() {
            return (self.clone(), self.of(1.0));
        }
        // A large angle needs as many more bits of π as it has before the point.
        let bits = self.bits + self.exponent().unwrap_or(0).max(0) as usize;
        let angle = self.value.clone().with_precision(bits).value();
        (
            Big::wrap(angle.sin(), self.bits),
            Big::wrap(angle.cos(), self.bits),
        )
    }
    fn sinh(&self) -> Big {
        if self.is_zero() {
            return self.clone();
        }
        Big::wrap(self.value.sinh(), self.bits)
    }
    fn is_zero(&self) -> bool {
        self.value.repr().significand().is_zero()
    }
    fn is_negative(&self) -> bool {
        !self.is_zero() && self.value.repr().significand() < &IBig::ZERO
    }
}

/// |x| / 2^lowest, rounded to a whole number (ties to even) of at most 53 bits.
fn rounded(repr: &Repr<2>, lowest: i64) -> f64 {
    let (significand, exponent) = repr.clone().into_parts();
    let magnitude = if significand < IBig::ZERO {
        -significand
    } else {
        significand
    };
    let drop = lowest - exponent as i64;
    let integer = if drop <= 0 {
        magnitude << (-drop) as usize
    } else {
        let drop = drop as usize;
        let floor = magnitude.clone() >> drop;
        let rest = magnitude - (floor.clone() << drop);
        let half = IBig::from(1) << (drop - 1);
        let up = rest > half || (rest == half && floor.bit(0));
        if up { floor + IBig::from(1) } else { floor }
    };
    // 53 bits and one carry at most: the conversion is exact.
    u64::try_from(integer).map_or(f64::INFINITY, |n| n as f64)
}
