//! Times of a catalogue, against RFC 3339 and POSIX.

use lodeframe::frames::{Clock, Time};
use lodeframe::physics::real::Real;

fn time(text: &str) -> Time {
    Time::from_rfc3339(text).unwrap_or_else(|why| panic!("{text}: {why}"))
}

/// The examples of RFC 3339 §5.8 (from memory) that name the same instant, and POSIX seconds of
/// well-known ones.
#[test]
fn calendar_times_are_read_as_the_standard_says() {
    assert_eq!(
        time("1996-12-19T16:39:57-08:00"),
        time("1996-12-20T00:39:57Z")
    );
    assert_eq!(
        time("1937-01-01T12:00:27.87+00:20"),
        time("1937-01-01T11:40:27.87Z")
    );
    assert_eq!(
        time("1985-04-12t23:20:50.52z"),
        time("1985-04-12T23:20:50.5200-00:00")
    );
    for (text, seconds) in [
        ("1970-01-01T00:00:00Z", 0.0),
        ("2000-01-01T00:00:00Z", 946_684_800.0),
        ("2001-09-09T01:46:40Z", 1e9),
        ("2038-01-19T03:14:08Z", 2_147_483_648.0),
        ("1969-12-31T23:59:59.25Z", -0.75),
        ("0000-03-01T00:00:00Z", -62_162_035_200.0),
        ("9999-12-31T23:59:59Z", 253_402_300_799.0),
    ] {
        assert_eq!(time(text).seconds(), seconds, "{text}");
    }
}

#[test]
fn what_is_no_time_is_refused() {
    for text in [
        "",
        "2031-03-02",
        "2031-03-02T05:10:00",
        "2031-03-02T05:10Z",
        "2031-03-02 05:10:00Z",
        "2031-3-02T05:10:00Z",
        "2031-03-02T05:10:00.Z",
        "2031-03-02T05:10:00,5Z",
        "2031-03-02T05:10:00+0200",
        "2031-03-02T05:10:00+02",
        "2031-03-02T05:10:00+24:00",
        "2031-03-02T05:10:00 02:00",
        "2031-03-02T05:10:00Z ",
        "2031-02-29T05:10:00Z",
        "2031-13-02T05:10:00Z",
        "2031-03-02T24:00:00Z",
        "2031-03-02T05:60:00Z",
        "2016-12-31T23:59:60Z",
        "２０31-03-02T05:10:00Z",
        "+2031-03-02T05:10:00Z",
    ] {
        assert!(Time::from_rfc3339(text).is_err(), "{text:?}");
    }
}

#[test]
fn no_digit_of_a_fraction_is_lost() {
    let from = time("2031-03-02T05:10:00.1Z");
    for (text, expected) in [
        ("2031-03-02T05:10:00.100000000000000000000000000001Z", 1e-30),
        ("2031-03-02T05:10:00.1000000000000000000001Z", 1e-22),
        ("2031-03-02T05:10:01Z", 0.9),
        ("2031-03-02T05:09:59.9Z", -0.2),
        (
            "2031-03-02T05:10:00.10000000000000000000000000000000000000000000000001Z",
            0.0,
        ),
    ] {
        let apart = time(text).since(from).to_f64();
        assert!((apart - expected).abs() <= 1e-31, "{text}: {apart}");
        assert_eq!(time(text) < from, expected < 0.0, "{text}");
    }
    let seconds = |x: f64| Time::from_seconds(x).expect("in range");
    // The difference of two doubles is kept exactly: 1e9 + 2^-20 less 1e-9.
    let apart = seconds(1e9 + 2f64.powi(-20)).since(seconds(1e-9));
    assert_eq!((apart.hi, apart.lo), (1e9 + 2f64.powi(-20), -1e-9));
    assert!(seconds(-1e-300) < seconds(0.0) && seconds(-0.0) == seconds(0.0));
    assert!(Time::from_seconds(1e16).is_none() && Time::from_seconds(f64::NAN).is_none());
}

#[test]
fn times_are_shown_as_they_are_written() {
    for text in [
        "2031-03-02T05:10:00Z",
        "1969-12-31T23:59:59.25Z",
        "2031-03-02T05:10:00.000001Z",
    ] {
        assert_eq!(time(text).display(Clock::Calendar), text);
    }
    let shown = |x: f64| {
        Time::from_seconds(x)
            .expect("in range")
            .display(Clock::Seconds)
    };
    assert_eq!(
        [shown(0.1), shown(-3.0), shown(1e9 + 0.5)],
        ["0.1", "-3", "1000000000.5"]
    );
}
