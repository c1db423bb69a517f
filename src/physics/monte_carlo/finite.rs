//! A Lorentz transformation of any size, held as what it changes.
//!
//! As a complex quaternion w + U it takes F = E + icB to F + (2/N)(w U×F + U×(U×F)) with
//! N = w² + U·U. Close to the identity U is small and nothing cancels, so that errors of one part
//! in 10¹⁵ of a velocity still show all their digits in the field they change.

use super::lanes::{Lanes, WIDTH, add, cross, scale, vector};

/// E and cB, or errors of them, in each of several trials.
pub(super) type Fields = [[Lanes; 3]; 2];

/// The transformation in each of several trials.
pub(super) struct Finite {
    /// Re U: minus the turn of the axes, by sines of half the angle.
    pub turn: [Lanes; 3],
    /// Im U: minus the boost, by hyperbolic sines of half the rapidity.
    pub boost: [Lanes; 3],
    /// w.
    pub scalar: Lanes,
    /// 2/N.
    pub twice_inverse: Lanes,
    /// Where the draw is possible at all; what stands in the other lanes means nothing.
    pub possible: [bool; WIDTH],
}

impl Finite {
    /// What is added to the errors of a field: (D−1)(F + δ), F the field without errors.
    #[inline(always)]
    pub(super) fn change(&self, field: &[[f64; 3]; 2], errors: &Fields) -> Fields {
        let [e, cb] = *field;
        let whole = [add(&vector(e), &errors[0]), add(&vector(cb), &errors[1])];
        let once = self.across(&whole);
        let twice = self.across(&once);
        let part = |once: &[Lanes; 3], twice: &[Lanes; 3]| {
            scale(self.twice_inverse, &add(&scale(self.scalar, once), twice))
        };
        [part(&once[0], &twice[0]), part(&once[1], &twice[1])]
    }

    /// U × F.
    #[inline(always)]
    fn across(&self, [e, cb]: &Fields) -> Fields {
        let minus = self.boost.map(|x| -x);
        [
            add(&cross(&self.turn, e), &cross(&minus, cb)),
            add(&cross(&self.turn, cb), &cross(&self.boost, e)),
        ]
    }
}
