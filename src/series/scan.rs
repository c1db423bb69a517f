//! A fast reader of NDJSON rows in their usual form. It understands plain members and numbers, and
//! gives up on whatever else it meets (escapes, nested values of others, every mistake), which the
//! general reader then takes up. It never answers where that one would refuse.

use super::number;

/// A place in the text of a row, from and to; empty when there is none.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Span {
    pub(super) from: u32,
    pub(super) to: u32,
}

impl Span {
    /// Whether there is no such place.
    pub(super) fn is_none(self) -> bool {
        self.to == 0
    }

    /// What stands there.
    pub(super) fn of(self, text: &[u8]) -> &[u8] {
        &text[self.from as usize..self.to as usize]
    }
}

/// What a row says; NaN for a number that is null or left out.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Scanned {
    pub(super) e: Span,
    pub(super) b: Span,
    pub(super) field: [f64; 6],
    pub(super) time: Span,
    pub(super) velocity: Option<[f64; 3]>,
    pub(super) quaternion: Option<[f64; 4]>,
    pub(super) angle: Option<f64>,
}

/// Names of other members that were looked at before and may pass through.
#[derive(Clone, Debug, Default)]
pub(super) struct Passed(Vec<Box<[u8]>>);

/// So many names of others are remembered; rows with more are read by the general reader.
const REMEMBERED: usize = 32;

impl Passed {
    fn has(&self, name: &[u8]) -> bool {
        self.0.iter().any(|known| **known == *name)
    }

    /// Remembers a name that may pass through.
    pub(super) fn add(&mut self, name: &str) {
        if self.0.len() < REMEMBERED && !self.has(name.as_bytes()) {
            self.0.push(name.as_bytes().into());
        }
    }
}

/// Reads a row, which is the whole of `text`; `None` when it is not of the usual form.
pub(super) fn row(text: &[u8], passed: &Passed) -> Option<Scanned> {
    let mut row = Scanned {
        e: Span::default(),
        b: Span::default(),
        field: [f64::NAN; 6],
        time: Span::default(),
        velocity: None,
        quaternion: None,
        angle: None,
    };
    let mut at = Cursor { text, at: 0 };
    at.token(b'{')?;
    loop {
        let name = at.name()?;
        let from = at.at;
        match name {
            b"e" if row.e.is_none() => {
                at.vector(&mut row.field, 0)?;
                row.e = at.since(from);
            }
            b"b" if row.b.is_none() => {
                at.vector(&mut row.field, 3)?;
                row.b = at.since(from);
            }
            b"time" if row.time.is_none() => {
                at.skip()?;
                row.time = at.since(from);
            }
            b"velocity" if row.velocity.is_none() => {
                let mut value = [0.0; 3];
                at.vector(&mut value, 0)?;
                row.velocity = Some(value).filter(|v| v.iter().all(|x| !x.is_nan()));
                row.velocity?;
            }
            b"rotation" if row.quaternion.is_none() => row.quaternion = Some(at.quaternion()?),
            b"angle" if row.angle.is_none() => row.angle = Some(at.number()?),
            other if passed.has(other) => at.skip()?,
            _ => return None,
        }
        match at.next()? {
            b',' => {}
            b'}' => break,
            _ => return None,
        }
    }
    (at.peek().is_none()).then_some(row)
}

struct Cursor<'t> {
    text: &'t [u8],
    at: usize,
}

impl<'t> Cursor<'t> {
    /// The next byte that is not white space, if any.
    #[inline]
    fn peek(&mut self) -> Option<u8> {
        loop {
            let byte = *self.text.get(self.at)?;
            if !matches!(byte, b' ' | b'\t' | b'\r' | b'\n') {
                return Some(byte);
            }
            self.at += 1;
        }
    }

    #[inline]
    fn next(&mut self) -> Option<u8> {
        let byte = self.peek()?;
        self.at += 1;
        Some(byte)
    }

    #[inline]
    fn token(&mut self, wanted: u8) -> Option<()> {
        (self.next()? == wanted).then_some(())
    }

    fn since(&self, from: usize) -> Span {
        Span {
            from: from as u32,
            to: self.at as u32,
        }
    }

    /// A name without escapes and the colon after it, up to its value.
    #[inline]
    fn name(&mut self) -> Option<&'t [u8]> {
        let name = self.plain_text()?;
        self.token(b':')?;
        self.peek()?;
        Some(name)
    }

    /// A text of visible ASCII without escapes.
    #[inline]
    fn plain_text(&mut self) -> Option<&'t [u8]> {
        self.token(b'"')?;
        let rest = &self.text[self.at..];
        let length = rest.iter().position(|byte| *byte == b'"')?;
        let text = &rest[..length];
        let plain = |byte: &u8| matches!(byte, b' '..=b'~') && *byte != b'\\';
        self.at += length + 1;
        text.iter().all(plain).then_some(text)
    }

    #[inline]
    fn number(&mut self) -> Option<f64> {
        self.peek()?;
        let (value, length) = number::json(&self.text[self.at..])?;
        self.at += length;
        Some(value)
    }

    fn word(&mut self, word: &[u8]) -> Option<()> {
        let found = self.text[self.at..].starts_with(word);
        self.at += word.len();
        found.then_some(())
    }

    /// Three numbers or nulls, put at a place in `values`.
    #[inline]
    fn vector<const N: usize>(&mut self, values: &mut [f64; N], first: usize) -> Option<()> {
        self.token(b'[')?;
        for (i, value) in values[first..first + 3].iter_mut().enumerate() {
            if i > 0 {
                self.token(b',')?;
            }
            *value = if self.peek()? == b'n' {
                self.word(b"null")?;
                f64::NAN
            } else {
                self.number()?
            };
        }
        self.token(b']')
    }

    /// `{"quaternion": {"w": .., "x": .., "y": .., "z": ..}}`, members in any order.
    fn quaternion(&mut self) -> Option<[f64; 4]> {
        self.token(b'{')?;
        if self.name()? != b"quaternion" {
            return None;
        }
        self.token(b'{')?;
        let mut values = [f64::NAN; 4];
        for i in 0..4 {
            if i > 0 {
                self.token(b',')?;
            }
            let [letter @ b'w'..=b'z'] = self.name()? else {
                return None;
            };
            // In the order w x y z, which is that of the alphabet.
            values[usize::from(letter - b'w')] = self.number()?;
        }
        self.token(b'}')?;
        self.token(b'}')?;
        values.iter().all(|x| !x.is_nan()).then_some(values)
    }

    /// Passes over a plain value.
    fn skip(&mut self) -> Option<()> {
        match self.peek()? {
            b'"' => self.plain_text().map(|_| ()),
            b'n' => self.word(b"null"),
            b't' => self.word(b"true"),
            b'f' => self.word(b"false"),
            _ => self.number().map(|_| ()),
        }
    }
}
