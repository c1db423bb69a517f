//! Numbers as text, both ways without loss.

/// Appends a number in the shortest form that reads back to the same double, as in JSON.
#[inline]
pub(super) fn print(out: &mut Vec<u8>, value: f64) {
    out.extend_from_slice(zmij::Buffer::new().format_finite(value).as_bytes());
}

/// Reads a JSON number at the start of a text, correctly rounded; with its length. `None` for
/// whatever is no such number, or past the largest double.
#[inline]
pub(super) fn json(text: &[u8]) -> Option<(f64, usize)> {
    // The reader below knows more notations than JSON has: no leading plus or zero, no bare point.
    let mut at = usize::from(*text.first()? == b'-');
    let first = *text.get(at)?;
    if !first.is_ascii_digit() {
        return None;
    }
    at += 1;
    while text.get(at).is_some_and(u8::is_ascii_digit) {
        if first == b'0' {
            return None;
        }
        at += 1;
    }
    if text.get(at) == Some(&b'.') && !text.get(at + 1).is_some_and(u8::is_ascii_digit) {
        return None;
    }
    let (value, length) = fast_float2::parse_partial::<f64, _>(text).ok()?;
    value.is_finite().then_some((value, length))
}

/// Reads a number at the start of a field of a table, correctly rounded; with its length.
#[inline]
pub(super) fn field(text: &[u8]) -> Option<(f64, usize)> {
    if !matches!(text.first()?, b'0'..=b'9' | b'+' | b'-' | b'.') {
        return None;
    }
    let (value, length) = fast_float2::parse_partial::<f64, _>(text).ok()?;
    value.is_finite().then_some((value, length))
}
