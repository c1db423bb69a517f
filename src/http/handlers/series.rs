//! Many readings: rows in, the same rows restated out, while they still arrive.

use axum::{
    extract::{Request, State},
    http::{HeaderMap, HeaderValue, header},
    response::{IntoResponse, Response},
};

use crate::{
    document::{Code, from_query},
    http::{
        AppState,
        accept::{ARROW, CSV, NDJSON, negotiate},
        problem::{CommonProblems, Problem, ProblemDocument, Source},
        schema::{Batches, Query, SeriesQuery, WayQuery, examples},
        stream::{self, Coding},
    },
    series::{Format, Series},
};

/// The formats of rows, by media type.
const FORMATS: [(&str, Format); 3] = [
    (NDJSON, Format::Ndjson),
    (CSV, Format::Csv),
    (ARROW, Format::Arrow),
];

/// Restate a stream or an archive of readings.
///
/// The body is a stream of rows, the answer a stream of the same rows in the same order, sent
/// while the body still arrives; both may be endless. The way and units stand in the query, as for
/// one reading; a way that says `row` takes a velocity, a quaternion or an angle from each row,
/// and without a way each row brings its own.
///
/// NDJSON rows are objects with `e`, `b` and, as needed, `velocity`, `rotation`, `angle`, `time`,
/// `uncertainty`, written as in one reading. Tables, as text or as an Arrow stream, have the
/// columns `ex ey ez bx by bz` and, as needed, `vx vy vz`, `qw qx qy qz`, `angle`, `time` and
/// standard uncertainties `u_ex` to `u_bz`, which are replaced by those of the answer. Whatever else
/// a row holds passes through. Where the query states an uncertainty of its way, every answer has
/// those columns. Where it lets something be assumed, or a track on the way may be extrapolated,
/// `notices` holds the codes of the notices that a single reading would have: a list in NDJSON, else
/// a column of codes with spaces between them. A bad row is answered in its place with a `problem`,
/// the last column, and the next row is read.
///
/// The answer is whole if it ended properly: a chunked body with its last chunk, NDJSON with its
/// line `end`. After any failure the connection is cut. The counts of rows follow a table as
/// trailers when the client sends `TE: trailers`. Read while you send: the server stops reading
/// when much of its answer waits. The body may be compressed (`Content-Encoding: gzip` or `zstd`), and
/// so is the answer for a client that takes it (`Accept-Encoding`).
#[utoipa::path(
    post, path = "/v1/series", tag = "fields", operation_id = "series",
    params(SeriesQuery, WayQuery, Query),
    request_body(
        description = "Rows, each with a reading",
        content(
            (String = "application/x-ndjson", example = json!(examples::rows(Format::Ndjson))),
            (String = "text/csv", example = json!(examples::rows(Format::Csv))),
            (inline(Batches) = "application/vnd.apache.arrow.stream"),
        ),
    ),
    responses(
        (status = 200, description = "The same rows in the target frame",
            content(
                (String = "application/x-ndjson", example = json!(examples::rows_answered(Format::Ndjson))),
                (String = "text/csv", example = json!(examples::rows_answered(Format::Csv))),
                (inline(Batches) = "application/vnd.apache.arrow.stream"),
            )),
        (status = 400, description = "The query, the header or the first rows cannot be understood", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 406, description = "No acceptable representation", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 408, description = "No row came in time", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 413, description = "A row is too long", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 415, description = "The body is in no format of rows", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 422, description = "The way is impossible", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn series(
    State(state): State<AppState>,
    request: Request,
) -> Result<Response, Problem> {
    let headers = request.headers();
    let (own, input) = format(headers)?;
    let codings = [Coding::of(headers)?, Coding::accepted(headers)?];
    let offers = FORMATS.map(|(name, _)| name);
    let others = offers.into_iter().filter(|offer| *offer != own);
    let offers: Vec<&'static str> = [own].into_iter().chain(others).collect();
    let chosen = negotiate(headers, &offers)?;
    let output = FORMATS.into_iter().find(|(name, _)| *name == chosen);
    let output = output.map_or(input, |(_, format)| format);
    let trailers = output != Format::Ndjson && takes_trailers(headers);
    let refuse = |faults| Problem::from_faults(faults, Source::Query);
    let node = from_query(request.uri().query().unwrap_or_default()).map_err(refuse)?;
    let series = Series::read(node, &state.deployment).map_err(refuse)?;
    let formats = [input, output];
    let body = stream::answer(
        state,
        series,
        formats,
        trailers,
        codings,
        request.into_body(),
    )
    .await?;
    let mut response = body.into_response();
    let headers = response.headers_mut();
    let kind = match output {
        Format::Ndjson => HeaderValue::from_static(NDJSON),
        Format::Csv => HeaderValue::from_static("text/csv; charset=utf-8; header=present"),
        Format::Arrow => HeaderValue::from_static(ARROW),
    };
    headers.insert(header::CONTENT_TYPE, kind);
    headers.insert(header::CACHE_CONTROL, HeaderValue::from_static("no-store"));
    let vary = HeaderValue::from_static("accept, accept-encoding");
    headers.insert(header::VARY, vary);
    if let Some(name) = codings[1].name() {
        let name = HeaderValue::from_static(name);
        headers.insert(header::CONTENT_ENCODING, name);
    }
    if trailers {
        let names = stream::TRAILERS.join(", ");
        let names = HeaderValue::from_str(&names).expect("names of headers");
        headers.insert(header::TRAILER, names);
    }
    Ok(response)
}

/// The format of the rows, by the `Content-Type`.
fn format(headers: &HeaderMap) -> Result<(&'static str, Format), Problem> {
    let unsupported = |detail: String| Problem::new(Code::UnsupportedMediaType, detail);
    let known = FORMATS.map(|(name, _)| name).join(", ");
    let Some(kind) = headers.get(header::CONTENT_TYPE) else {
        return Err(unsupported(format!(
            "The request has no Content-Type; a series is read as one of {known}."
        )));
    };
    let kind = kind.to_str().unwrap_or_default().to_ascii_lowercase();
    let mut parts = kind.split(';').map(str::trim);
    let essence = parts.next().unwrap_or_default();
    let Some(format) = FORMATS.into_iter().find(|(name, _)| *name == essence) else {
        return Err(unsupported(format!(
            "The Content-Type is {essence:?}; a series is read as one of {known}."
        )));
    };
    for part in parts {
        let (name, value) = part.split_once('=').unwrap_or((part, ""));
        let value = value.trim_matches('"');
        if name == "charset" && !matches!(value, "utf-8" | "utf8" | "us-ascii") {
            let detail = format!("The charset of the body is {value:?}; rows are read as UTF-8.");
            return Err(unsupported(detail));
        }
        if name == "header" && value == "absent" {
            let detail =
                "The table says it has no header row; it needs one, which names the columns.";
            return Err(unsupported(detail.to_owned()));
        }
    }
    Ok(format)
}

/// Whether the client reads trailers (RFC 9110 §10.1.4).
fn takes_trailers(headers: &HeaderMap) -> bool {
    let values = headers.get_all(header::TE).iter();
    let words = values.filter_map(|value| value.to_str().ok());
    let mut words = words.flat_map(|value| value.split(','));
    words.any(|word| word.trim().eq_ignore_ascii_case("trailers"))
}
