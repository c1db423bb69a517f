//! Rows side by side: arrays of numbers, and the instructions that work on several at once.
//!
//! The formulas are those of single readings; a loop over the lanes of these arrays, without
//! branches, is what the compiler turns into vector instructions.

use pulp::{Arch, Simd, WithSimd};

use super::double_double::{Arithmetic, DoubleDouble, Portable};
use super::pure_boost::Boost;
use super::quaternion::Quaternion;
use super::real::Vec3;

/// How many rows are worked on together: what they need stays in the nearest cache.
pub(super) const LANES: usize = 64;

/// One double for each row.
pub(super) type Lanes = [f64; LANES];

/// Instructions with a fused multiply-add. For doubles well inside their range.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Fused;

impl Arithmetic for Fused {
    #[inline(always)]
    fn two_prod(a: f64, b: f64) -> (f64, f64) {
        let p = a * b;
        (p, a.mul_add(b, -p))
    }
    #[inline(always)]
    fn exponent(x: f64) -> i32 {
        (x.to_bits() >> 52 & 0x7ff) as i32 - 1023
    }
    #[inline(always)]
    fn scale2(x: f64, n: i32) -> f64 {
        x * f64::from_bits(((1023 + n) as u64) << 52)
    }
}

/// Work on lanes, for instructions of any kind.
pub(super) trait Work {
    /// Does it. Everything it calls is to be inlined, or it misses the instructions.
    fn run<A: Arithmetic>(self);
}

/// Does the work by the best instructions of this processor, or by those that all have.
pub(super) fn dispatch(work: impl Work, portable: bool) {
    struct ByVectors<W>(W);
    impl<W: Work> WithSimd for ByVectors<W> {
        type Output = ();
        #[inline(always)]
        fn with_simd<S: Simd>(self, _: S) {
            self.0.run::<Fused>();
        }
    }
    match Arch::new() {
        Arch::Scalar => work.run::<Portable>(),
        _ if portable => work.run::<Portable>(),
        arch => arch.dispatch(ByVectors(work)),
    }
}

/// Whether products of such numbers stay so far inside the range of doubles that every kind of
/// instruction splits them exactly.
#[inline(always)]
pub(super) fn tame(x: f64) -> bool {
    let size = x.abs();
    size == 0.0 || (1e-40..=1e40).contains(&size)
}

/// One double-double for each row.
#[derive(Clone, Debug)]
pub(super) struct Numbers {
    pub(super) hi: Lanes,
    pub(super) lo: Lanes,
}

impl Numbers {
    pub(super) const ZERO: Numbers = Numbers {
        hi: [0.0; LANES],
        lo: [0.0; LANES],
    };

    pub(super) const ONE: Numbers = Numbers {
        hi: [1.0; LANES],
        lo: [0.0; LANES],
    };

    #[inline(always)]
    pub(super) fn get<A: Arithmetic>(&self, i: usize) -> DoubleDouble<A> {
        DoubleDouble::of(self.hi[i], self.lo[i])
    }

    #[inline(always)]
    pub(super) fn set<A: Arithmetic>(&mut self, i: usize, x: DoubleDouble<A>) {
        self.hi[i] = x.hi;
        self.lo[i] = x.lo;
    }
}

#[inline(always)]
pub(super) fn get3<A: Arithmetic>(numbers: &[Numbers; 3], i: usize) -> Vec3<DoubleDouble<A>> {
    [numbers[0].get(i), numbers[1].get(i), numbers[2].get(i)]
}

#[inline(always)]
pub(super) fn set3<A: Arithmetic>(
    numbers: &mut [Numbers; 3],
    i: usize,
    [x, y, z]: Vec3<DoubleDouble<A>>,
) {
    numbers[0].set(i, x);
    numbers[1].set(i, y);
    numbers[2].set(i, z);
}

/// The boost of each row.
#[derive(Clone, Debug)]
pub(super) struct Boosts {
    direction: [Numbers; 3],
    stretch: Numbers,
    gamma: Numbers,
}

impl Boosts {
    pub(super) const ZERO: Boosts = Boosts {
        direction: [Numbers::ZERO; 3],
        stretch: Numbers::ZERO,
        gamma: Numbers::ZERO,
    };

    #[inline(always)]
    pub(super) fn get<A: Arithmetic>(&self, i: usize) -> Boost<DoubleDouble<A>> {
        Boost {
            direction: get3(&self.direction, i),
            stretch: self.stretch.get(i),
            gamma: self.gamma.get(i),
        }
    }

    #[inline(always)]
    pub(super) fn set<A: Arithmetic>(&mut self, i: usize, boost: Boost<DoubleDouble<A>>) {
        set3(&mut self.direction, i, boost.direction);
        self.stretch.set(i, boost.stretch);
        self.gamma.set(i, boost.gamma);
    }
}

/// The turn of each row.
#[derive(Clone, Debug)]
pub(super) struct Turns {
    w: Numbers,
    v: [Numbers; 3],
}

impl Turns {
    pub(super) const ZERO: Turns = Turns {
        w: Numbers::ZERO,
        v: [Numbers::ZERO; 3],
    };

    #[inline(always)]
    pub(super) fn get<A: Arithmetic>(&self, i: usize) -> Quaternion<DoubleDouble<A>> {
        Quaternion {
            w: self.w.get(i),
            v: get3(&self.v, i),
        }
    }

    #[inline(always)]
    pub(super) fn set<A: Arithmetic>(&mut self, i: usize, turn: Quaternion<DoubleDouble<A>>) {
        self.w.set(i, turn.w);
        set3(&mut self.v, i, turn.v);
    }
}

/// The numbers of a column from `start` on; where it ends before the lanes do, in `spare` with
/// zeros after them.
#[inline(always)]
pub(super) fn lanes<'l>(column: &'l [f64], start: usize, spare: &'l mut Lanes) -> &'l Lanes {
    let rest = &column[start..];
    rest.first_chunk().unwrap_or_else(|| {
        spare[..rest.len()].copy_from_slice(rest);
        spare[rest.len()..].fill(0.0);
        spare
    })
}
