//! Doubles as they were given: their products are exact, or cost less than those of two doubles.

use std::marker::PhantomData;

use super::double_double::{Arithmetic, DoubleDouble};
use super::real::Factor;

/// A double without anything left out, to be worked on by instructions of the kind `A`. Its
/// products have the bits of those of [`DoubleDouble::from_f64`].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Given<A> {
    /// The double.
    pub value: f64,
    by: PhantomData<A>,
}

impl<A> Given<A> {
    /// The double itself.
    #[inline(always)]
    pub const fn new(value: f64) -> Self {
        let by = PhantomData;
        Given { value, by }
    }
}

impl<A: Arithmetic> From<Given<A>> for DoubleDouble<A> {
    #[inline(always)]
    fn from(given: Given<A>) -> Self {
        Self::from_f64(given.value)
    }
}

impl<A: Arithmetic> Factor<Given<A>> for Given<A> {
    type Product = DoubleDouble<A>;
    #[inline(always)]
    fn product(&self, by: &Given<A>) -> DoubleDouble<A> {
        let (p, e) = A::two_prod(self.value, by.value);
        DoubleDouble::of(p, e)
    }
}

impl<A: Arithmetic> Factor<Given<A>> for DoubleDouble<A> {
    type Product = DoubleDouble<A>;
    #[inline(always)]
    fn product(&self, by: &Given<A>) -> DoubleDouble<A> {
        let (p, e) = A::two_prod(self.hi, by.value);
        DoubleDouble::of(p, e + self.lo * by.value)
    }
}
