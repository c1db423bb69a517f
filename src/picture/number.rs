//! Numbers as people read them: few digits, or as many as the uncertainty supports.

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

/// A value that may be missing, to six digits or to the second digit of its standard uncertainty.
pub(super) fn component(value: Option<f64>, uncertainty: Option<f64>) -> String {
    let Some(value) = value else {
        return "missing".into();
    };
    let size = |x: f64| libm::floor(libm::log10(x.abs()));
    let digits = match uncertainty {
        Some(u) if u > 0.0 && value != 0.0 => (size(value) - size(u) + 2.0).min(6.0),
        _ => 6.0,
    };
    match digits >= 1.0 {
        true => short(value, digits as usize),
        false => "0".into(),
    }
}
