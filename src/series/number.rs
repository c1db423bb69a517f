//! Numbers as text, both ways without loss.

/// Where the texts of numbers stand until they are all printed. A copy made just after printing
/// would wait for the bytes to be stored.
pub(super) struct Texts<const N: usize>([zmij::Buffer; N]);

impl<const N: usize> Texts<N> {
    pub(super) fn new() -> Texts<N> {
        Texts(std::array::from_fn(|_| zmij::Buffer::new()))
    }

    /// Each number in the shortest form that reads back to the same double, as in JSON; nothing
    /// for NaN.
    #[inline]
    pub(super) fn of(&mut self, values: [f64; N]) -> [&[u8]; N] {
        let mut values = values.into_iter();
        self.0.each_mut().map(|buffer| match values.next() {
            Some(value) if !value.is_nan() => buffer.format_finite(value).as_bytes(),
            _ => &[],
        })
    }
}

/// Appends the text of a number.
#[inline]
pub(super) fn push(out: &mut Vec<u8>, text: &[u8]) {
    // Most have 16 to 24 bytes: two copies of a fixed size, which overlap, cost less than one of
    // any size.
    if let (Some(first), Some(last)) = (text.first_chunk::<16>(), text.last_chunk::<16>()) {
        let end = out.len() + text.len();
        out.extend_from_slice(first);
        out.truncate(end - last.len());
        out.extend_from_slice(last);
    } else {
        out.extend_from_slice(text);
    }
}

/// Reads a JSON number at the start of a text, correctly rounded; with its length. `None` for
/// whatever is no such number, or past the largest double.
#[inline]
pub(super) fn json(text: &[u8]) -> Option<(f64, usize)> {
    // The reader below knows more notations than JSON has: no leading plus or zero, no bare point.
    let mut at = usize::from(*text.first()? == b'-');
    let whole = digits(text.get(at..)?);
    if whole == 0 || (whole > 1 && text[at] == b'0') {
        return None;
    }
    at += whole;
    if text.get(at) == Some(&b'.') && !text.get(at + 1).is_some_and(u8::is_ascii_digit) {
        return None;
    }
    let (value, length) = fast_float2::parse_partial::<f64, _>(text).ok()?;
    value.is_finite().then_some((value, length))
}

/// How many digits a text begins with.
#[inline]
fn digits(text: &[u8]) -> usize {
    // Eight at a time, since a branch for each is guessed wrong once a number.
    let mut count = 0;
    while let Some(eight) = text[count..].first_chunk::<8>() {
        let value = u64::from_le_bytes(*eight) ^ 0x3030_3030_3030_3030;
        // The first byte past nine sets its highest bit; what it carries concerns later ones.
        let others = (value.wrapping_add(0x7676_7676_7676_7676) | value) & 0x8080_8080_8080_8080;
        if others != 0 {
            return count + others.trailing_zeros() as usize / 8;
        }
        count += 8;
    }
    let rest = text[count..].iter();
    count + rest.take_while(|byte| byte.is_ascii_digit()).count()
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
