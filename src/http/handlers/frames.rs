//! The catalogue of named frames, and the transformations between them.

use axum::{
    extract::{Path, RawQuery, State},
    http::HeaderMap,
    response::Response,
};
use serde::Serialize;
use utoipa::ToSchema;

use super::json;
use crate::{
    answer::{ENGINE, NetTransformation, Notice, Provenance, net, rows},
    document::{Code, Fault, Faults, Place, from_query},
    frames::{Catalogue, Channel, Frame, Link, Time},
    http::{
        AppState,
        accept::{JSON, negotiate},
        cache::{cached, etag},
        problem::{CommonProblems, Problem, ProblemDocument, Source},
        schema,
    },
    physics::scale::Scale,
    units::Quantity,
};

/// How long an answer may be kept: it changes only when the service is started anew.
const CACHE: &str = "public, max-age=60";

/// The catalogue of frames.
#[derive(Serialize, ToSchema)]
pub(crate) struct FrameList {
    /// What the catalogue is.
    about: Option<String>,
    /// What times in seconds are counted from; null when times are written as RFC 3339.
    epoch: Option<String>,
    /// Units of the catalogue; readings of sensors are calibrated to its units of E and B.
    units: schema::Units,
    /// Every frame, in the order of the file.
    frames: Vec<FrameRow>,
    /// What the answer was made with; `frames` is the hash of the catalogue.
    provenance: Provenance,
}

/// A named frame.
#[derive(Serialize, ToSchema)]
pub(crate) struct FrameRow {
    /// Its name.
    name: String,
    /// What it is.
    about: Option<String>,
    /// The frame that it is described from; null for the root.
    parent: Option<String>,
    /// Frames described from this one.
    children: Vec<String>,
    /// How it moves as seen from its parent: `fixed` (the same at all times), `turning` or `track`.
    #[schema(example = "track")]
    motion: String,
    /// The times at which that motion is known; null when it is at all times.
    valid: Option<Interval>,
    /// Whether times outside are answered, with a notice.
    extrapolate: bool,
    /// What it reads, for a sensor.
    sensor: Option<SensorRow>,
}

/// From one time to another.
#[derive(Serialize, ToSchema)]
pub(crate) struct Interval {
    /// The first.
    from: schema::Time,
    /// The last.
    to: schema::Time,
}

/// What a sensor reads.
#[derive(Serialize, ToSchema)]
pub(crate) struct SensorRow {
    /// Its reading of E; null when its E is the field itself.
    e: Option<ChannelRow>,
    /// Its reading of B.
    b: Option<ChannelRow>,
}

/// How raw numbers become a field: matrix · (raw − offset).
#[derive(Serialize, ToSchema)]
pub(crate) struct ChannelRow {
    /// Which of x, y, z it measures.
    axes: Vec<String>,
    /// The matrix, from raw numbers to the unit of the catalogue.
    matrix: [[f64; 3]; 3],
    /// The offset, in raw numbers.
    offset: [f64; 3],
}

/// The transformation between two frames.
#[derive(Serialize, ToSchema)]
pub(crate) struct Transformation {
    /// The frame where it begins.
    from: String,
    /// The frame where it ends.
    to: String,
    /// The time it is for; null where it is the same at all times and none was given.
    time: Option<schema::Time>,
    /// The whole way as one boost and the turn after it; velocities in m/s.
    net: NetTransformation,
    /// Λ of the whole way, v' = Λv for v = (ct, x, y, z).
    matrix: [[f64; 4]; 4],
    /// Remarks that a careful colleague would make.
    notices: Vec<Notice>,
    /// What the answer was made with.
    provenance: Provenance,
}

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
    cached(&headers, tag, CACHE, || {
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
    cached(&headers, tag, CACHE, || Ok(json(&row(catalogue, frame))))
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
    cached(&headers, tag, CACHE, || {
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

fn shown(time: Time, catalogue: &Catalogue) -> schema::Time {
    match catalogue.epoch {
        Some(_) => schema::Time::Seconds(time.seconds()),
        None => schema::Time::Calendar(time.display(catalogue.clock)),
    }
}

fn row(catalogue: &Catalogue, i: usize) -> FrameRow {
    let frame: &Frame = &catalogue.frames()[i];
    let name = |i: usize| catalogue.frames()[i].name.clone();
    let (motion, valid, extrapolate) = match &frame.link {
        Link::Steps(_) => ("fixed", None, false),
        Link::Turning(_) => ("turning", None, false),
        Link::Track(track) => {
            let [from, to] = track.valid().map(|time| shown(time, catalogue));
            ("track", Some(Interval { from, to }), track.extrapolate)
        }
    };
    FrameRow {
        name: frame.name.clone(),
        about: frame.about.clone(),
        parent: frame.parent.map(name),
        children: catalogue.children(Some(i)).map(name).collect(),
        motion: motion.into(),
        valid,
        extrapolate,
        sensor: frame.sensor.map(|sensor| SensorRow {
            e: sensor.e.map(channel),
            b: sensor.b.map(channel),
        }),
    }
}

fn channel(channel: Channel) -> ChannelRow {
    let names = ["x", "y", "z"].into_iter().zip(channel.axes);
    ChannelRow {
        axes: names
            .filter(|(_, has)| *has)
            .map(|(name, _)| name.to_owned())
            .collect(),
        matrix: channel.calibration.matrix,
        offset: channel.calibration.offset,
    }
}

fn units(catalogue: &Catalogue) -> schema::Units {
    let code = |quantity| Some(catalogue.units.get(quantity).code.to_owned());
    schema::Units {
        e: code(Quantity::E),
        b: code(Quantity::B),
        velocity: code(Quantity::Velocity),
        angle: code(Quantity::Angle),
        angular_velocity: code(Quantity::AngularVelocity),
        energy: code(Quantity::Energy),
        length: code(Quantity::Length),
        time: code(Quantity::Time),
    }
}
