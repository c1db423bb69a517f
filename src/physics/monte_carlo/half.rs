//! Sines of half an angle or rapidity, in series where that is small, as it nearly always is.

use super::lanes::{Lanes, dot};

/// Up to this square the series has all its digits.
const SMALL: f64 = 0.01;

/// sinh(x)/x of x², and sin(x)/x of −x², for |x²| ≤ [`SMALL`].
#[inline(always)]
fn series(square: Lanes) -> Lanes {
    let term = |sum: Lanes, divisor: f64| sum * square * (1.0 / divisor) + 1.0;
    [110.0, 72.0, 42.0, 20.0, 6.0]
        .into_iter()
        .fold(Lanes::all(1.0), term)
}

/// Whether all of the squares are small.
#[inline(always)]
fn small(square: Lanes) -> bool {
    square.0.iter().all(|x| *x <= SMALL)
}

/// Half of a turn of the axes by the angles θ about them: the vector of length sin(|θ|/2) along
/// θ, and cos(|θ|/2).
#[inline(always)]
pub(super) fn turn(angles: &[Lanes; 3]) -> ([Lanes; 3], Lanes) {
    let half = angles.map(|x| x * 0.5);
    let square = dot(&half, &half);
    if small(square) {
        let ratio = series(-square);
        let sines = half.map(|x| x * ratio);
        return (sines, (Lanes::all(1.0) - square * ratio * ratio).sqrt());
    }
    let size = square.sqrt();
    let ratio = size.map(|x| if x == 0.0 { 1.0 } else { libm::sin(x) / x });
    (half.map(|x| x * ratio), size.map(libm::cos))
}

/// sinh(η/2).
#[inline(always)]
pub(super) fn rapidity(whole: Lanes) -> Lanes {
    let half = whole * 0.5;
    let square = half * half;
    if small(square) {
        half * series(square)
    } else {
        half.map(libm::sinh)
    }
}
