//! Round numbers along a scale.

/// The smallest round number that is not below a positive value.
pub(super) fn round_up(value: f64) -> f64 {
    let power = power_of_ten(libm::floor(libm::log10(value)));
    let steps = [1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0];
    let found = steps.into_iter().map(|step| step * power);
    let mut found = found.filter(|round| *round >= value);
    found.next().unwrap_or(value)
}

/// About `count` round numbers from `low` to `high`, where low < high.
pub(super) fn linear(low: f64, high: f64, count: usize) -> Vec<f64> {
    let rough = (high / count as f64) - (low / count as f64);
    let power = power_of_ten(libm::floor(libm::log10(rough)));
    let step = [1.0, 2.0, 5.0, 10.0]
        .into_iter()
        .map(|step| step * power)
        .find(|step| *step >= rough)
        .unwrap_or(rough);
    let first = libm::ceil(low / step);
    let count = (libm::floor(high / step) - first).clamp(0.0, 100.0) as usize;
    (0..=count).map(|i| (first + i as f64) * step).collect()
}

/// Whole powers of ten from 10^low to 10^high, thinned to about `count`.
pub(super) fn powers(low: f64, high: f64, count: usize) -> Vec<f64> {
    let (first, last) = (libm::ceil(low) as i64, libm::floor(high) as i64);
    let every = ((last - first) / count as i64 + 1).max(1) as usize;
    (first..=last).step_by(every).map(|n| n as f64).collect()
}

/// 10ⁿ, kept within the normal doubles.
fn power_of_ten(n: f64) -> f64 {
    libm::pow(10.0, n.clamp(-307.0, 308.0))
}
