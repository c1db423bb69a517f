//! Which representation a client would like (RFC 9110 §12.5.1).

use axum::http::{HeaderMap, header::ACCEPT};

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

/// One media range of an `Accept` header.
struct Range<'a> {
    kind: &'a str,
    subtype: &'a str,
    /// In thousandths, the finest that the grammar allows.
    quality: u16,
}

impl<'a> Range<'a> {
    fn parse(text: &'a str) -> Option<Range<'a>> {
        let mut parts = text.split(';').map(str::trim);
        let (kind, subtype) = parts.next()?.split_once('/')?;
        let mut quality = 1000;
        for part in parts {
            if let Some((name, value)) = part.split_once('=')
                && name.trim().eq_ignore_ascii_case("q")
            {
                let q: f64 = value.trim().parse().ok()?;
                quality = (q.clamp(0.0, 1.0) * 1000.0).round() as u16;
            }
        }
        Some(Range {
            kind,
            subtype,
            quality,
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
