//! Whether the law of propagation is good enough, judged by trials (JCGM 101:2008, 8).

/// Coverage factor of 95 % for one quantity that is normally distributed.
pub const COVERAGE_FACTOR: f64 = 1.959_963_984_540_054;

/// The comparison of the two intervals of a quantity.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Validation {
    /// Numerical tolerance of the standard uncertainty to two significant digits.
    pub tolerance: f64,
    /// How far the lower ends are apart.
    pub d_low: f64,
    /// How far the upper ends are apart.
    pub d_high: f64,
    /// Whether both are within the tolerance.
    pub validated: bool,
    /// Whether another set of as many trials would hardly decide otherwise: what decides is
    /// further from the tolerance than twice the numerical uncertainty of the end.
    pub settled: bool,
}

impl Validation {
    /// Compares the interval y ± kₚu of the law of propagation, y being zero, with the
    /// probabilistically symmetric one of the trials. Both kinds of interval are allowed (8.1 b);
    /// the ends of the shortest move about three times as much with the number of trials.
    pub fn new(u: f64, interval: [f64; 2], numerical_uncertainty: [f64; 2]) -> Validation {
        let tolerance = tolerance(u);
        let distances = [-1.0, 1.0].map(|sign| sign * COVERAGE_FACTOR * u);
        let apart: [f64; 2] = std::array::from_fn(|i| (distances[i] - interval[i]).abs());
        let excess: [f64; 2] = std::array::from_fn(|i| apart[i] - tolerance);
        let noise = numerical_uncertainty.map(|s| 2.0 * s);
        let surely_in = (0..2).all(|i| excess[i] <= -noise[i]);
        let surely_out = (0..2).any(|i| excess[i] > noise[i]);
        Validation {
            tolerance,
            d_low: apart[0],
            d_high: apart[1],
            validated: apart.iter().all(|d| *d <= tolerance),
            settled: surely_in || surely_out,
        }
    }
}

/// δ = ½·10ˡ for a standard uncertainty c·10ˡ, c of two digits (JCGM 101:2008, 7.9.2); zero for
/// zero.
pub fn tolerance(u: f64) -> f64 {
    // Rounding to two digits and powers of ten are what printing and reading numbers do right.
    let text = format!("{u:.1e}");
    let exponent = text
        .split_once('e')
        .and_then(|(_, e)| e.parse::<i32>().ok());
    match exponent {
        Some(exponent) if u > 0.0 => format!("5e{}", exponent - 2).parse().unwrap_or(0.0),
        _ => 0.0,
    }
}
