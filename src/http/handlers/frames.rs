//! The catalogue of named frames, and the transformations between them.

use axum::{
    extract::{Path, RawQuery, State},
    http::HeaderMap,
    response::Response,
};

use super::json;
use crate::{
    answer::{ENGINE, Notice, Provenance, net, rows},
    document::{Code, Fault, Faults, Place, from_query},
    frames::{Catalogue, Time},
    http::{
        AppState,
        accept::{JSON, negotiate},
        cache::{cached, etag},
        frames::{FrameList, FrameRow, Transformation, row, shown, units},
        problem::{CommonProblems, Problem, ProblemDocument, Source},
    },
    physics::scale::Scale,
};

/// How long an answer may be kept: it changes only when the service is started anew.
const CACHE: &str = "public, max-age=60";

/// Every frame of the catalogue.
#[utoipa::path(
    get, path = "/v1/frames", tag = "frames", operation_id = "list_frames",
    responses(
        (status = 200, description = "The catalogue; without one, an empty list", body = FrameList, content_type = "application/json"),
        (status = 304, description = "The answer is the one the client holds"),
        (status = 406, description = "No acceptable representation", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn list_frames(
    State(state): State<AppState>,
    headers: HeaderMap,
) -> Result<Response, Problem> {
    let representation = negotiate(&headers, &[JSON])?;
    let catalogue = state.deployment.frames.as_deref();
    let tag = etag(&[
        hash(catalogue),
        representation.as_bytes(),
        ENGINE.as_bytes(),
    ]);
    cached(&headers, tag, CACHE, async {
        let frames = catalogue.map_or(Vec::new(), |catalogue| {
            let all = 0..catalogue.frames().len();
            all.map(|i| row(catalogue, i)).collect()
        });
        Ok(json(&FrameList {
            about: catalogue.and_then(|catalogue| catalogue.about.clone()),
            epoch: catalogue.and_then(|catalogue| catalogue.epoch.clone()),
            units: catalogue.map(units).unwrap_or_default(),
            frames,
            provenance: Provenance::of(catalogue.map(|catalogue| &*catalogue.hash)),
        }))
    })
    .await
}

/// One frame: what it is, where it hangs and when its motion is known.
#[utoipa::path(
    get, path = "/v1/frames/{name}", tag = "frames", operation_id = "show_frame",
    params(("name" = String, Path, description = "Name of the frame", example = "boom")),
    responses(
        (status = 200, description = "The frame", body = FrameRow, content_type = "application/json"),
        (status = 304, description = "The answer is the one the client holds"),
        (status = 404, description = "There is no such frame", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 406, description = "No acceptable representation", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn show_frame(
    State(state): State<AppState>,
    headers: HeaderMap,
    Path(name): Path<String>,
) -> Result<Response, Problem> {
    let representation = negotiate(&headers, &[JSON])?;
    let (catalogue, frame) = find(&state, &name)?;
    let tag = etag(&[
        hash(Some(catalogue)),
        name.as_bytes(),
        representation.as_bytes(),
        ENGINE.as_bytes(),
    ]);
    cached(&headers, tag, CACHE, async {
        Ok(json(&row(catalogue, frame)))
    })
    .await
}

/// The transformation between two frames alone, without a reading.
///
/// It leads from `from` to `to`; the calibration of a sensor is not part of it.
#[utoipa::path(
    get, path = "/v1/frames/{from}/to/{to}", tag = "frames", operation_id = "transformation",
    params(
        ("from" = String, Path, description = "The frame where it begins", example = "boom"),
        ("to" = String, Path, description = "The frame where it ends", example = "ground"),
        ("time" = Option<String>, Query, description = "When, where it changes with time: RFC 3339 (a `+` is written %2B), or seconds from the epoch of the catalogue", example = "120.5"),
    ),
    responses(
        (status = 200, description = "The net transformation", body = Transformation, content_type = "application/json"),
        (status = 304, description = "The answer is the one the client holds"),
        (status = 400, description = "The parameters cannot be understood", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 404, description = "There is no such frame", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 406, description = "No acceptable representation", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 422, description = "The time is missing or outside a track", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn transformation(
    State(state): State<AppState>,
    headers: HeaderMap,
    Path((from, to)): Path<(String, String)>,
    RawQuery(query): RawQuery,
) -> Result<Response, Problem> {
    let representation = negotiate(&headers, &[JSON])?;
    let (catalogue, first) = find(&state, &from)?;
    let (_, last) = find(&state, &to)?;
    let refuse = |faults| Problem::from_faults(faults, Source::Query);
    let time = time(&query.unwrap_or_default(), catalogue).map_err(refuse)?;
    let place = |fault: Fault| {
        let path = Place::ROOT.field("time").path();
        refuse(vec![Fault::at(&path, fault.code, fault.detail)])
    };
    let walk = catalogue.walk(first, last).map_err(place)?;
    let tag = etag(&[
        hash(Some(catalogue)),
        from.as_bytes(),
        to.as_bytes(),
        format!("{time:?}").as_bytes(),
        representation.as_bytes(),
        ENGINE.as_bytes(),
    ]);
    cached(&headers, tag, CACHE, async {
        let passage = walk.at(time).map_err(place)?;
        Ok(json(&Transformation {
            from: from.clone(),
            to: to.clone(),
            time: time.map(|time| shown(time, catalogue)),
            net: net(&passage.way, Scale::ONE),
            matrix: rows(passage.way.matrix()),
            notices: passage.notices.iter().map(Notice::from).collect(),
            provenance: Provenance::of(Some(&catalogue.hash)),
        }))
    })
    .await
}

/// Reads the only parameter of a transformation.
fn time(query: &str, catalogue: &Catalogue) -> Result<Option<Time>, Vec<Fault>> {
    let node = from_query(query)?;
    let mut faults = Faults::default();
    let time = faults
        .members(&node, &Place::ROOT, &["time"])
        .and_then(|members| {
            let node = members.get("time")?;
            Time::read(
                node,
                &Place::ROOT.field("time"),
                catalogue.clock,
                &mut faults,
            )
        });
    if faults.0.is_empty() {
        Ok(time)
    } else {
        Err(faults.0)
    }
}

fn hash(catalogue: Option<&Catalogue>) -> &[u8] {
    catalogue.map_or(b"", |catalogue| catalogue.hash.as_bytes())
}

fn find<'s>(state: &'s AppState, name: &str) -> Result<(&'s Catalogue, usize), Problem> {
    let Some(catalogue) = state.deployment.frames.as_deref() else {
        let detail = "This service was started without a catalogue of frames (--frames FILE).";
        return Err(Problem::new(Code::NotFound, detail));
    };
    match catalogue.find(name) {
        Ok(frame) => Ok((catalogue, frame)),
        Err(fault) => Err(Problem::new(Code::NotFound, fault.detail)),
    }
}
