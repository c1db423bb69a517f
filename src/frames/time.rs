//! Times, without loss: a whole number of seconds and a fraction of two doubles.
//!
//! One catalogue writes its times as RFC 3339 throughout, or as seconds from its epoch
//! throughout. Seconds count as POSIX counts them: every day has 86,400.

use jiff::civil;

use crate::document::{Code, Faults, Node, Place};
use crate::physics::Dd;
use crate::physics::real::Real;

/// How a catalogue writes its times.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Clock {
    /// RFC 3339, such as 2031-03-02T05:10:00.25Z.
    Calendar,
    /// Seconds from the epoch of the catalogue.
    Seconds,
}

/// An instant: seconds since the epoch of the catalogue, or since 1970-01-01T00:00:00Z.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
pub struct Time {
    /// Whole seconds, rounded down.
    seconds: i64,
    /// The rest, from 0 to 1: its nearest double, and what that leaves out.
    fraction: [f64; 2],
}

impl Time {
    /// A number of seconds, exactly; `None` for more than 9e15 of them (285 million years).
    pub fn from_seconds(seconds: f64) -> Option<Time> {
        let whole = seconds.floor();
        let rest = Dd::from_f64(seconds) - Dd::from_f64(whole);
        (whole.abs() <= 9e15).then_some(Time {
            seconds: whole as i64,
            fraction: [rest.hi, rest.lo],
        })
    }

    /// A whole number of ticks since 1970-01-01T00:00:00Z, of which a power of ten, up to 10⁹,
    /// make a second.
    pub fn from_ticks(ticks: i64, per_second: i64) -> Time {
        let fraction = per_second + ticks.rem_euclid(per_second);
        // As the same time reads in decimal digits, behind the leading one.
        let digits = fraction.to_string();
        Time {
            seconds: ticks.div_euclid(per_second),
            fraction: decimal_fraction(&digits.as_bytes()[1..]),
        }
    }

    /// An RFC 3339 date and time; `Err` says what is wrong with it. The fraction of a second may
    /// have any number of digits and is kept to 2⁻¹⁰⁶ of itself.
    pub fn from_rfc3339(text: &str) -> Result<Time, &'static str> {
        let b = text.as_bytes();
        let number = |from: usize, to: usize| -> Result<i16, &'static str> {
            let digits = b.get(from..to).filter(|d| d.iter().all(u8::is_ascii_digit));
            let digits = digits.ok_or(SHAPE)?;
            Ok(digits.iter().fold(0, |n, d| 10 * n + i16::from(d - b'0')))
        };
        let sign = |at: usize, allowed: &[u8]| -> Result<u8, &'static str> {
            let found = b.get(at).filter(|found| allowed.contains(found));
            found.copied().ok_or(SHAPE)
        };
        for (at, allowed) in [(4, b"-"), (7, b"-"), (13, b":"), (16, b":")] {
            sign(at, allowed)?;
        }
        sign(10, b"Tt")?;
        let [month, day] = [number(5, 7)?, number(8, 10)?].map(|n| n as i8);
        let [hour, minute, second] =
            [number(11, 13)?, number(14, 16)?, number(17, 19)?].map(|n| n as i8);
        if second == 60 {
            return Err(
                "a leap second has no place among POSIX seconds; give the second before it or \
                 after it",
            );
        }
        let civil = civil::DateTime::new(number(0, 4)?, month, day, hour, minute, second, 0)
            .map_err(|_| "there is no such day or time of day")?;
        let mut at = 19;
        let mut digits: &[u8] = &[];
        if b.get(at) == Some(&b'.') {
            let rest = &b[at + 1..];
            digits = &rest[..rest.iter().take_while(|d| d.is_ascii_digit()).count()];
            if digits.is_empty() {
                return Err(SHAPE);
            }
            at += 1 + digits.len();
        }
        let ahead = match sign(at, b"Zz+-")? {
            b'Z' | b'z' => {
                at += 1;
                0
            }
            direction => {
                sign(at + 3, b":")?;
                let (hours, minutes) = (number(at + 1, at + 3)?, number(at + 4, at + 6)?);
                if hours > 23 || minutes > 59 {
                    return Err("an offset from UTC is between -23:59 and +23:59");
                }
                at += 6;
                let ahead = 60 * (60 * i64::from(hours) + i64::from(minutes));
                if direction == b'-' { -ahead } else { ahead }
            }
        };
        if at != b.len() {
            return Err(SHAPE);
        }
        // Between years 0 and 9999 of the proleptic Gregorian calendar nothing overflows.
        let since = civil.duration_since(EPOCH);
        Ok(Time {
            seconds: since.as_secs() - ahead,
            fraction: decimal_fraction(digits),
        })
    }

    /// Reads a time in the notation of a clock.
    pub fn read(node: &Node, place: &Place, clock: Clock, faults: &mut Faults) -> Option<Time> {
        match (clock, node.plain()) {
            (Clock::Seconds, Node::Text(text)) => {
                let detail = format!(
                    "{text:?} is not a number; this catalogue counts its times in seconds from \
                     its epoch"
                );
                faults.note(place, Code::WrongTime, detail);
                None
            }
            (Clock::Seconds, _) => {
                let seconds = faults.number(node, place)?;
                let time = Time::from_seconds(seconds);
                if time.is_none() {
                    let detail = format!("{seconds} s is past 9e15 s, the largest time kept");
                    faults.note(place, Code::WrongTime, detail);
                }
                time
            }
            (Clock::Calendar, Node::Number(number)) => {
                let detail = format!(
                    "{number} is a number; this catalogue writes its times as RFC 3339, such as \
                     2031-03-02T05:10:00.25Z, since it names no epoch to count seconds from"
                );
                faults.note(place, Code::WrongTime, detail);
                None
            }
            (Clock::Calendar, _) => {
                let text = faults.text(node, place)?;
                Time::from_rfc3339(text)
                    .map_err(|why| {
                        faults.note(place, Code::WrongTime, format!("{text:?}: {why}"));
                    })
                    .ok()
            }
        }
    }

    /// Seconds from another time to this one.
    pub fn since(self, other: Time) -> Dd {
        // Exact: whole seconds are below 2⁵³.
        let whole = Dd::from_f64((self.seconds - other.seconds) as f64);
        whole + (self.fraction() - other.fraction())
    }

    /// The nearest number of seconds since the epoch.
    pub fn seconds(self) -> f64 {
        (Dd::from_f64(self.seconds as f64) + self.fraction()).to_f64()
    }

    fn fraction(self) -> Dd {
        let [hi, lo] = self.fraction;
        Dd::of(hi, lo)
    }

    /// The time in the notation of a clock, to the nearest double of its fraction.
    pub fn display(self, clock: Clock) -> String {
        if clock == Clock::Seconds {
            return self.seconds().to_string();
        }
        let at = EPOCH.saturating_add(jiff::SignedDuration::from_secs(self.seconds));
        let fraction = self.fraction().to_f64().to_string();
        format!(
            "{at}{}Z",
            fraction
                .strip_prefix('0')
                .filter(|_| fraction != "0")
                .unwrap_or("")
        )
    }
}

/// Where calendar times are counted from.
const EPOCH: civil::DateTime = civil::date(1970, 1, 1).at(0, 0, 0, 0);

const SHAPE: &str = "a time looks like 2031-03-02T05:10:00Z or 2031-03-02T07:10:00.125+02:00 \
                     (RFC 3339)";

/// The value of decimal digits after the point.
fn decimal_fraction(digits: &[u8]) -> [f64; 2] {
    // One value, one spelling: 0.5 and 0.50 are the same instant.
    let zeros = digits.iter().rev().take_while(|d| **d == b'0').count();
    let digits = &digits[..digits.len() - zeros];
    // 36 digits are more than two doubles tell apart, and 10³⁶ fits 128 bits.
    let kept = &digits[..digits.len().min(36)];
    let integer = kept
        .iter()
        .fold(0u128, |n, d| 10 * n + u128::from(d - b'0'));
    let value = Dd::integer(integer, ()) / Dd::integer(10u128.pow(kept.len() as u32), ());
    [value.hi, value.lo]
}
