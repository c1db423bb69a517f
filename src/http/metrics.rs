//! What the service counts, in OpenMetrics terms.

use std::{sync::Arc, time::Duration};

use axum::http::StatusCode;
use prometheus_client::{
    encoding::{EncodeLabelSet, EncodeLabelValue, text},
    metrics::{counter::Counter, family::Family, gauge::Gauge, histogram::Histogram, info::Info},
    registry::{Registry, Unit},
};

/// Upper bounds of the duration buckets, s: from a single reading to the request timeout.
const BOUNDS: [f64; 14] = [
    25e-6, 50e-6, 100e-6, 250e-6, 500e-6, 1e-3, 2.5e-3, 5e-3, 10e-3, 50e-3, 250e-3, 1.0, 5.0, 30.0,
];

/// All counters of the service.
pub struct Metrics {
    registry: Registry,
    durations: Family<Answered, Histogram, fn() -> Histogram>,
    in_flight: Gauge,
    /// Requests turned away because too many were running.
    pub shed: Counter,
    /// Requests answered with 500 because a handler panicked.
    pub panics: Counter,
}

/// The labels of a duration.
#[derive(Clone, Debug, PartialEq, Eq, Hash, EncodeLabelSet)]
struct Answered {
    /// The route template, never the path itself.
    route: Arc<str>,
    class: Class,
}

/// The first digit of a status.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
struct Class(u16);

impl EncodeLabelValue for Class {
    fn encode(
        &self,
        encoder: &mut prometheus_client::encoding::LabelValueEncoder,
    ) -> Result<(), std::fmt::Error> {
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
        let in_flight = Gauge::default();
        registry.register(
            "requests_in_flight",
            "Requests being answered",
            in_flight.clone(),
        );
        let shed = Counter::default();
        registry.register(
            "requests_shed",
            "Requests turned away because too many were running",
            shed.clone(),
        );
        let panics = Counter::default();
        registry.register(
            "panics",
            "Requests answered with 500 because of a fault in the service",
            panics.clone(),
        );
        let build = Info::new([("version", env!("CARGO_PKG_VERSION"))]);
        registry.register("build", "The running release", build);
        Metrics {
            registry,
            durations,
            in_flight,
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

    /// Records how long an answer took.
    pub fn answered(&self, route: Arc<str>, status: StatusCode, time: Duration) {
        let class = Class(status.as_u16() / 100);
        self.durations
            .get_or_create(&Answered { route, class })
            .observe(time.as_secs_f64());
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
