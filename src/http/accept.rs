//! Which representation a client would like, and how it may be coded (RFC 9110 §12.5.1, §12.5.3).

use axum::http::{
    HeaderMap,
    header::{ACCEPT, ACCEPT_ENCODING},
};

use super::problem::Problem;
use crate::document::Code;

/// JSON, the default everywhere.
pub const JSON: &str = "application/json";
/// Columns as text (RFC 4180).
pub const CSV: &str = "text/csv";
/// Rows, a JSON object a line.
pub const NDJSON: &str = "application/x-ndjson";
/// Rows, in batches of columns.
pub const ARROW: &str = "application/vnd.apache.arrow.stream";
/// A picture.
pub const SVG: &str = "image/svg+xml";
/// A page for people.
pub const HTML: &str = "text/html";

/// Chooses among `offers`, media types without parameters in our order of preference.
///
/// The highest quality wins, among equals the first offer. Without an `Accept` header that is the
/// first of all. Parameters other than `q` are not looked at.
///
/// # Errors
/// `not_acceptable` when the client rules out every offer.
pub fn negotiate(headers: &HeaderMap, offers: &[&'static str]) -> Result<&'static str, Problem> {
    if !headers.contains_key(ACCEPT) {
        return Ok(offers[0]);
    }
    let ranges: Vec<Range> = headers
        .get_all(ACCEPT)
        .iter()
        .filter_map(|value| value.to_str().ok())
        .flat_map(|value| value.split(','))
        .filter_map(Range::parse)
        .collect();
    let mut best = (0, None);
    for offer in offers {
        // The most specific range that matches an offer gives its quality.
        let quality = ranges
            .iter()
            .filter_map(|range| Some((range.specificity(offer)?, range.quality)))
            .max_by_key(|(specificity, _)| *specificity)
            .map_or(0, |(_, quality)| quality);
        if quality > best.0 {
            best = (quality, Some(*offer));
        }
    }
    best.1.ok_or_else(|| {
        Problem::new(
            Code::NotAcceptable,
            format!(
                "The Accept header rules out what this path can answer: {}.",
                offers.join(", ")
            ),
        )
    })
}

/// Chooses among `offers`, content codings in our order of preference, the last of them
/// `identity`.
///
/// The highest quality wins, among equals the first offer. A client that does not say otherwise
/// takes `identity`, but rather than that whatever it names.
///
/// # Errors
/// `not_acceptable` when the client rules out every offer.
pub fn negotiate_coding(
    headers: &HeaderMap,
    offers: &[&'static str],
) -> Result<&'static str, Problem> {
    let values = headers.get_all(ACCEPT_ENCODING).iter();
    let named: Vec<(&str, u16)> = values
        .filter_map(|value| value.to_str().ok())
        .flat_map(|value| value.split(','))
        .filter_map(|coding| {
            let mut parts = coding.split(';').map(str::trim);
            let name = parts.next()?;
            Some((name.strip_prefix("x-").unwrap_or(name), quality(parts)?))
        })
        .collect();
    let quality = |offer: &str| {
        let of = |name: &str| {
            let mut named = named.iter();
            named.find(|(own, _)| own.eq_ignore_ascii_case(name))
        };
        match of(offer).or_else(|| of("*")) {
            Some((_, quality)) => *quality,
            None => u16::from(offer == "identity"),
        }
    };
    let mut best = (0, None);
    for offer in offers {
        if quality(offer) > best.0 {
            best = (quality(offer), Some(*offer));
        }
    }
    best.1.ok_or_else(|| {
        let detail = format!(
            "The Accept-Encoding header rules out what this path can answer: {}.",
            offers.join(", ")
        );
        Problem::new(Code::NotAcceptable, detail)
    })
}

/// The quality among parameters, in thousandths, the finest that the grammar allows; `None` when
/// it is no number.
fn quality<'a>(parameters: impl Iterator<Item = &'a str>) -> Option<u16> {
    let mut quality = 1000;
    for part in parameters {
        if let Some((name, value)) = part.split_once('=')
            && name.trim().eq_ignore_ascii_case("q")
        {
            let q: f64 = value.trim().parse().ok()?;
            quality = (q.clamp(0.0, 1.0) * 1000.0).round() as u16;
        }
    }
    Some(quality)
}

/// One media range of an `Accept` header.
struct Range<'a> {
    kind: &'a str,
    subtype: &'a str,
    /// In thousandths.
    quality: u16,
}

impl<'a> Range<'a> {
    fn parse(text: &'a str) -> Option<Range<'a>> {
        let mut parts = text.split(';').map(str::trim);
        let (kind, subtype) = parts.next()?.split_once('/')?;
        Some(Range {
            kind,
            subtype,
            quality: quality(parts)?,
        })
    }

    /// How closely the range names the offer; `None` when it does not match.
    fn specificity(&self, offer: &str) -> Option<u8> {
        let (kind, subtype) = offer.split_once('/')?;
        match (self.kind, self.subtype) {
            ("*", "*") => Some(0),
            (k, "*") if k.eq_ignore_ascii_case(kind) => Some(1),
            (k, s) if k.eq_ignore_ascii_case(kind) && s.eq_ignore_ascii_case(subtype) => Some(2),
            _ => None,
        }
    }
}
