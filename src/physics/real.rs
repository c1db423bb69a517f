//! The arithmetic that the formulas are written in, whatever the number of digits.
//!
//! Every formula of this crate stands once, generic over [`Real`]. Two types implement it:
//! [`Dd`](super::Dd), two doubles (106 bits, fast), and [`Big`](super::Big), as many bits as
//! asked for. [`precise`](super::precise) chooses between them.

use std::ops::{Add, Div, Mul, Neg, Sub};

/// A real number of some fixed precision.
pub trait Real:
    Clone
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Div<Output = Self>
    + Neg<Output = Self>
    + Factor<Self, Product = Self>
{
    /// What is needed to make a number from nothing: the precision.
    type Context: Copy;

    /// The double itself, exactly.
    fn new(value: f64, context: Self::Context) -> Self;
    /// An integer, to full precision.
    fn integer(value: u128, context: Self::Context) -> Self;
    /// A ratio of integers, to full precision.
    fn ratio(num: u128, den: u128, context: Self::Context) -> Self {
        let num = Self::integer(num, context);
        if den == 1 {
            return num;
        }
        num / Self::integer(den, context)
    }
    /// π to full precision.
    fn pi(context: Self::Context) -> Self;
    /// The nearest double (ties to even); infinite past the largest one.
    fn to_f64(&self) -> f64;
    /// The number to the precision of two doubles, for values well inside their range.
    fn to_dd(&self) -> super::Dd;
    /// The precision this number has.
    fn context(&self) -> Self::Context;
    /// Times 2ⁿ, exactly.
    fn scale2(&self, n: i32) -> Self;
    /// n with 2ⁿ ≤ |x| < 2ⁿ⁺¹; `None` for zero.
    fn exponent(&self) -> Option<i64>;
    /// Square root; zero for zero. The argument is not negative.
    fn sqrt(&self) -> Self;
    /// Sine and cosine of an angle in radians.
    fn sin_cos(&self) -> (Self, Self);
    /// Hyperbolic sine.
    fn sinh(&self) -> Self;
    /// Whether it is exactly zero.
    fn is_zero(&self) -> bool;
    /// Whether it is below zero.
    fn is_negative(&self) -> bool;

    /// The absolute value.
    fn abs(&self) -> Self {
        if self.is_negative() {
            -self.clone()
        } else {
            self.clone()
        }
    }
    /// The sum, its error measured by the terms. `+` is as exact where they cancel, and slower.
    #[inline(always)]
    fn sum(self, other: Self) -> Self {
        self + other
    }
    /// The sum of three, its error measured by the terms.
    #[inline(always)]
    fn sum3(self, second: Self, third: Self) -> Self {
        self.sum(second).sum(third)
    }
    /// The square.
    fn square(&self) -> Self {
        self.clone() * self.clone()
    }
    /// A small whole number of the same precision.
    fn of(&self, value: f64) -> Self {
        Self::new(value, self.context())
    }
}

/// A vector of three components on Cartesian axes.
pub type Vec3<R> = [R; 3];

/// What is multiplied by a `B`, the product to be summed with others.
pub trait Factor<B>: Clone {
    /// What the product is.
    type Product: Real;
    /// The product, as good as `*` in a sum; nothing else may be done with it.
    fn product(&self, by: &B) -> Self::Product;
}

/// a × b, its error measured by the terms, like that of all sums here.
#[inline(always)]
pub fn cross<A: Factor<B>, B>(a: &Vec3<A>, b: &Vec3<B>) -> Vec3<A::Product> {
    [
        minor(&a[1], &b[2], &a[2], &b[1]),
        minor(&a[2], &b[0], &a[0], &b[2]),
        minor(&a[0], &b[1], &a[1], &b[0]),
    ]
}

/// a b − c d.
#[inline(always)]
fn minor<A: Factor<B>, B>(a: &A, b: &B, c: &A, d: &B) -> A::Product {
    a.product(b).sum(-c.product(d))
}

/// a · b.
#[inline(always)]
pub fn dot<A: Factor<B>, B>(a: &Vec3<A>, b: &Vec3<B>) -> A::Product {
    let third = a[2].product(&b[2]);
    a[0].product(&b[0]).sum3(a[1].product(&b[1]), third)
}

/// |a|².
#[inline(always)]
pub fn norm2<A: Factor<A>>(a: &Vec3<A>) -> A::Product {
    dot(a, a)
}

/// s a.
#[inline(always)]
pub fn scale<R: Real>(s: &R, [x, y, z]: &Vec3<R>) -> Vec3<R> {
    [
        s.clone() * x.clone(),
        s.clone() * y.clone(),
        s.clone() * z.clone(),
    ]
}

/// a + b.
#[inline(always)]
pub fn add<R: Real>([a, b, c]: &Vec3<R>, [x, y, z]: &Vec3<R>) -> Vec3<R> {
    [
        a.clone().sum(x.clone()),
        b.clone().sum(y.clone()),
        c.clone().sum(z.clone()),
    ]
}

/// a − b.
#[inline(always)]
pub fn sub<R: Real>([a, b, c]: &Vec3<R>, [x, y, z]: &Vec3<R>) -> Vec3<R> {
    [
        a.clone().sum(-x.clone()),
        b.clone().sum(-y.clone()),
        c.clone().sum(-z.clone()),
    ]
}

/// Three doubles as a vector.
#[inline(always)]
pub fn vector<R: Real>([x, y, z]: [f64; 3], context: R::Context) -> Vec3<R> {
    [R::new(x, context), R::new(y, context), R::new(z, context)]
}

/// The nearest doubles.
#[inline(always)]
pub fn round<R: Real>([x, y, z]: &Vec3<R>) -> [f64; 3] {
    [x.to_f64(), y.to_f64(), z.to_f64()]
}

/// How many powers of two lie between the largest and the smallest of these numbers, zeros aside.
pub fn exponent_spread<const N: usize>(numbers: [f64; N]) -> i64 {
    let exponents = numbers.into_iter().filter(|x| *x != 0.0).map(libm::ilogb);
    let largest = exponents.clone().max().unwrap_or(0);
    i64::from(largest) - i64::from(exponents.min().unwrap_or(0))
}
