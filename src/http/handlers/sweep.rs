//! A range: one question asked over many speeds or angles.

use axum::{
    extract::{RawQuery, State},
    http::HeaderMap,
    response::Response,
};

use super::{csv, json, svg};
use crate::{
    answer::ENGINE,
    document::from_query,
    http::{
        AppState,
        accept::{CSV, JSON, SVG, negotiate},
        cache::{IMMUTABLE, cached, etag},
        problem::{CommonProblems, Problem, ProblemDocument, Source},
        schema::{Query, RangeQuery, ReadingQuery, UncertaintyQuery, examples},
    },
    picture,
    sweep::{Sweep, Swept},
};

/// Restate one reading over a range of speeds or angles.
///
/// The parameters are those of a question by URL, without `include`, and those of the range. The
/// way leaves out the quantity that runs in exactly one step: `boost.direction` without a speed
/// for `beta` and `rapidity`, `rotation.axis` without an angle for `angle`; likewise one of
/// `steps`, so that a turn can run before a boost of fixed speed.
#[utoipa::path(
    get, path = "/v1/sweep", tag = "fields", operation_id = "sweep",
    params(RangeQuery, ReadingQuery, Query, UncertaintyQuery),
    responses(
        (status = 200, description = "E' and B' against the quantity that runs",
            headers(
                ("ETag" = String, description = "Tag of the question, this version and the catalogue"),
                ("Cache-Control" = String, description = "How long the answer may be kept"),
            ),
            content(
                (Swept = "application/json", example = json!(examples::swept())),
                (String = "text/csv", example = json!(examples::swept().csv())),
                (String = "image/svg+xml"),
            )),
        (status = 304, description = "The answer is the one the client holds"),
        (status = 400, description = "The question cannot be understood", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 406, description = "No acceptable representation", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 422, description = "The question has no answer", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn sweep(
    State(state): State<AppState>,
    headers: HeaderMap,
    RawQuery(query): RawQuery,
) -> Result<Response, Problem> {
    let representation = negotiate(&headers, &[JSON, CSV, SVG])?;
    let refuse = |faults| Problem::from_faults(faults, Source::Query);
    let node = from_query(&query.unwrap_or_default()).map_err(refuse)?;
    let most = state.config.max_points;
    let sweep = Sweep::read(node, &state.deployment, most).map_err(refuse)?;
    let canonical = sweep.canonical();
    let tag = etag(&[
        canonical.as_bytes(),
        representation.as_bytes(),
        ENGINE.as_bytes(),
    ]);
    cached(&headers, tag, IMMUTABLE, async {
        // Thousands of points take milliseconds, for which other requests shall not wait.
        let shared = state.clone();
        let answering = state.pool.run(move || {
            let swept = sweep.answer(&shared.deployment)?;
            Ok(match representation {
                CSV => csv(swept.csv()),
                SVG => svg(picture::sweep(&swept, sweep.division)),
                _ => json(&swept),
            })
        });
        answering.await.map_err(refuse)
    })
    .await
}
