//! Numbers as people read them: in few digits.

/// A number with this many significant digits, without trailing zeros.
pub(super) fn short(value: f64, digits: usize) -> String {
    if value == 0.0 {
        return "0".into();
    }
    let rounded: f64 = format!("{value:.*e}", digits - 1)
        .parse()
        .expect("a number is read back");
    if (1e-3..1e6).contains(&rounded.abs()) {
        return format!("{rounded}");
    }
    format!("{rounded:e}")
}

/// A component that may be missing.
pub(super) fn component(value: Option<f64>) -> String {
    value.map_or("missing".into(), |value| short(value, 6))
}

/// A vector as (x, y, z).
pub(super) fn vector(v: [Option<f64>; 3]) -> String {
    format!("({})", v.map(component).join(", "))
}
