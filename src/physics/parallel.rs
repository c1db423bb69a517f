//! The frame in which E and B are parallel, or only one of them is left.
//!
//! It moves along E×B with rapidity η = ½ arsinh(2|E×cB|/I), I = |(E+icB)²|; there E' and cB'
//! are the real and imaginary part of √((E+icB)²) (Landau and Lifshitz, The Classical Theory of
//! Fields, §25). This form keeps all digits down to fields that are almost null.

use super::constants::C;
use super::double_double::Dd;
use super::invariants::{Invariants, Kind};
use super::real::{Real, Vec3, cross, norm2};

/// The boost to the frame of parallel fields.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ParallelFrame {
    /// Velocity in m/s as seen in the frame of the field.
    pub velocity: [f64; 3],
    /// Speed over c.
    pub speed: f64,
    /// Unit vector along E×B; zero when nothing moves.
    pub direction: [f64; 3],
    /// γ.
    pub gamma: f64,
    /// Rapidity.
    pub rapidity: f64,
    /// E in that frame, in V/m (not negative).
    pub e_parallel: f64,
    /// B in that frame, in T, with the sign of E·B.
    pub b_parallel: f64,
}

/// The frame, for E in V/m and B in T with these invariants, which are better known from the
/// question than from a field at high γ; `None` when the field is null.
pub fn parallel_frame(
    e: &Vec3<Dd>,
    b: &Vec3<Dd>,
    invariants: &Invariants,
) -> Option<ParallelFrame> {
    if invariants.kind == Kind::Null {
        return None;
    }
    let ([difference, product], n) = invariants.scaled;
    let invariant = libm::hypot(difference, 2.0 * product);
    let e = e.map(|x| x.scale2(-n));
    let cb = b.map(|x| x.times(C).scale2(-n));
    let across = cross(&e, &cb);
    let size = norm2(&across).sqrt();
    let sum = norm2(&e) + norm2(&cb);
    let (speed, direction, gamma, rapidity) = if size.is_zero() || invariant == 0.0 {
        (0.0, [0.0; 3], 1.0, 0.0)
    } else {
        let both = sum + Dd::from_f64(invariant);
        let twice = size.times(2.0);
        (
            (twice / both).to_f64(),
            across.map(|x| (x / size).to_f64() + 0.0),
            (both / Dd::from_f64(2.0 * invariant)).sqrt().to_f64(),
            0.5 * libm::asinh((twice / Dd::from_f64(invariant)).to_f64()),
        )
    };
    // The larger part first; the other from their product, so that no digit cancels.
    let larger = (0.5 * (invariant + difference.abs())).sqrt();
    let smaller = if larger == 0.0 {
        0.0
    } else {
        product.abs() / larger
    };
    let (e, cb) = if difference < 0.0 {
        (smaller, larger)
    } else {
        (larger, smaller)
    };
    let cb = if product < 0.0 { -cb } else { cb };
    Some(ParallelFrame {
        velocity: direction.map(|x| x * speed * C + 0.0),
        speed,
        direction,
        gamma,
        rapidity,
        e_parallel: libm::scalbn(e, n),
        b_parallel: libm::scalbn(cb / C, n) + 0.0,
    })
}
