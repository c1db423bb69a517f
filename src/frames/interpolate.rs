//! Between two samples: velocities change linearly, attitudes turn at a constant rate.
//!
//! What comes out are doubles; everything after them is exact for these doubles. Only the `libm`
//! crate's functions are used, so that every machine interpolates to the same bits.

/// a + u (b − a), component by component; a itself at u = 0.
pub(super) fn linear(a: [f64; 3], b: [f64; 3], u: f64) -> [f64; 3] {
    std::array::from_fn(|i| a[i] + u * (b[i] - a[i]))
}

/// The attitude at the part u of the shorter turn from a to b, which need not be of length one:
/// a sin((1−u)θ)/sin θ + b sin(uθ)/sin θ (spherical linear interpolation: Shoemake, SIGGRAPH
/// 1985), with 2θ the angle between them. At u = 0 it is a, as given.
pub(super) fn slerp(a: [f64; 4], b: [f64; 4], u: f64) -> [f64; 4] {
    if u == 0.0 {
        return a;
    }
    let (to_a, mut to_b) = (1.0 / norm(a), 1.0 / norm(b));
    if dot(a, b) < 0.0 {
        to_b = -to_b;
    }
    let (a, b) = (a.map(|x| x * to_a), b.map(|x| x * to_b));
    // From the chord and its complement: exact for small and for large angles.
    let chord = norm(std::array::from_fn(|i| b[i] - a[i]));
    let complement = norm(std::array::from_fn(|i| b[i] + a[i]));
    let theta = 2.0 * libm::atan2(chord, complement);
    let whole = libm::sin(theta);
    if whole == 0.0 {
        return a;
    }
    let (from_a, from_b) = (
        libm::sin((1.0 - u) * theta) / whole,
        libm::sin(u * theta) / whole,
    );
    std::array::from_fn(|i| from_a * a[i] + from_b * b[i])
}

/// |cos θ| between two attitudes, 2θ being the angle of the turn from one to the other.
pub(super) fn cosine(a: [f64; 4], b: [f64; 4]) -> f64 {
    dot(a, b).abs() / (norm(a) * norm(b))
}

fn dot(a: [f64; 4], b: [f64; 4]) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2] + a[3] * b[3]
}

fn norm(a: [f64; 4]) -> f64 {
    dot(a, a).sqrt()
}
