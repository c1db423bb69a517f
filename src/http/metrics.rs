//! What the service counts, in OpenMetrics terms.

use std::{
    fmt,
    hash::{Hash, Hasher},
    time::Duration,
};

use axum::{
    extract::{MatchedPath, Request},
    http::StatusCode,
};
use prometheus_client::{
    encoding::{EncodeLabelSet, EncodeLabelValue, LabelValueEncoder, text},
    metrics::{counter::Counter, family::Family, gauge::Gauge, histogram::Histogram, info::Info},
    registry::{Registry, Unit},
};

use crate::{document::Code, series::Counts};

/// Upper bounds of the duration buckets, s: from a single reading to the request timeout.
const BOUNDS: [f64; 14] = [
    25e-6, 50e-6, 100e-6, 250e-6, 500e-6, 1e-3, 2.5e-3, 5e-3, 10e-3, 50e-3, 250e-3, 1.0, 5.0, 30.0,
];

/// All counters of the service.
pub struct Metrics {
    registry: Registry,
    durations: Family<Answered, Histogram, fn() -> Histogram>,
    problems: Family<Reported, Counter>,
    rows: Family<Row, Counter>,
    in_flight: Gauge,
    /// Connections held open.
    pub connections: Gauge,
    /// Connections turned away because too many were open.
    pub connections_shed: Counter,
    /// Requests turned away because too many were running.
    pub shed: Counter,
    /// Monte Carlo trials made.
    pub trials: Counter,
    /// Requests that ended because a handler, or the task of a series, panicked.
    pub panics: Counter,
}

/// The labels of a duration.
#[derive(Clone, Debug, PartialEq, Eq, Hash, EncodeLabelSet)]
struct Answered {
    route: Route,
    class: Class,
}

/// The label of a problem.
#[derive(Clone, Debug, PartialEq, Eq, Hash, EncodeLabelSet)]
struct Reported {
    code: Code,
}

impl EncodeLabelValue for Code {
    fn encode(&self, encoder: &mut LabelValueEncoder) -> Result<(), fmt::Error> {
        self.name().encode(encoder)
    }
}

/// How a row of a series was answered.
#[derive(Clone, Debug, PartialEq, Eq, Hash, EncodeLabelSet)]
struct Row {
    outcome: &'static str,
}

/// The template of a route, such as `/problems/{code}`, never the path itself.
#[derive(Clone, Debug)]
pub struct Route(Option<MatchedPath>);

impl Route {
    /// The route that a request was sent to.
    pub fn of(request: &Request) -> Route {
        Route(request.extensions().get().cloned())
    }

    /// The template, or `unmatched`.
    pub fn as_str(&self) -> &str {
        self.0.as_ref().map_or("unmatched", MatchedPath::as_str)
    }
}

impl PartialEq for Route {
    fn eq(&self, other: &Route) -> bool {
        self.as_str() == other.as_str()
    }
}

impl Eq for Route {}

impl Hash for Route {
    fn hash<H: Hasher>(&self, state: &mut H) {
        self.as_str().hash(state);
    }
}

impl EncodeLabelValue for Route {
    fn encode(&self, encoder: &mut LabelValueEncoder) -> Result<(), fmt::Error> {
        self.as_str().encode(encoder)
    }
}

/// The first digit of a status.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
struct Class(u16);

impl EncodeLabelValue for Class {
    fn encode(&self, encoder: &mut LabelValueEncoder) -> Result<(), fmt::Error> {
        format!("{}xx", self.0).encode(encoder)
    }
}

impl Metrics {
    /// All counters at zero.
    pub fn new() -> Metrics {
        let mut registry = Registry::with_prefix("lodeframe");
        let durations: Family<_, _, fn() -> Histogram> =
            Family::new_with_constructor(|| Histogram::new(BOUNDS));
        registry.register_with_unit(
            "request_duration",
            "Time from the head of a request to the head of its answer, by route and status class",
            Unit::Seconds,
            durations.clone(),
        );
        let problems = Family::default();
        registry.register(
            "problems",
            "Answers that were a problem, by its code: every limit has one",
            problems.clone(),
        );
        let rows = Family::default();
        registry.register(
            "rows",
            "Rows of series that ended, by how they were answered",
            rows.clone(),
        );
        let connections = Gauge::default();
        registry.register("connections", "Connections held open", connections.clone());
        let connections_shed = Counter::default();
        registry.register(
            "connections_shed",
            "Connections turned away because too many were open",
            connections_shed.clone(),
        );
        let in_flight = Gauge::default();
        registry.register(
            "requests_in_flight",
            "Requests being answered",
            in_flight.clone(),
        );
        let trials = Counter::default();
        registry.register("trials", "Monte Carlo trials made", trials.clone());
        let shed = Counter::default();
        registry.register(
            "requests_shed",
            "Requests turned away because too many were running",
            shed.clone(),
        );
        let panics = Counter::default();
        registry.register(
            "panics",
            "Requests answered with 500, or series cut, because of a fault in the service",
            panics.clone(),
        );
        let build = Info::new([("version", env!("CARGO_PKG_VERSION"))]);
        registry.register("build", "The running release", build);
        Metrics {
            registry,
            durations,
            problems,
            rows,
            in_flight,
            connections,
            connections_shed,
            trials,
            shed,
            panics,
        }
    }

    /// Counts a request in, and says how many are running with it.
    pub fn enter(&self) -> i64 {
        self.in_flight.inc() + 1
    }

    /// Counts a request out.
    pub fn leave(&self) {
        self.in_flight.dec();
    }

    /// Counts the rows of a series.
    pub fn rows(&self, counts: Counts) {
        for (outcome, rows) in [("answered", counts.answered), ("refused", counts.refused)] {
            self.rows.get_or_create(&Row { outcome }).inc_by(rows);
        }
    }

    /// Records how long an answer took.
    pub fn answered(&self, route: Route, status: StatusCode, time: Duration) {
        let class = Class(status.as_u16() / 100);
        self.durations
            .get_or_create(&Answered { route, class })
            .observe(time.as_secs_f64());
    }

    /// Counts an answer that is a problem.
    pub fn problem(&self, code: Code) {
        self.problems.get_or_create(&Reported { code }).inc();
    }

    /// All counters as OpenMetrics text.
    pub fn text(&self) -> String {
        let mut out = String::new();
        text::encode(&mut out, &self.registry).expect("a String takes any text");
        out
    }
}

impl Default for Metrics {
    fn default() -> Metrics {
        Metrics::new()
    }
}
