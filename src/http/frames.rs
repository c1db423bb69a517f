//! The catalogue of frames as it is sent.

use serde::Serialize;
use utoipa::ToSchema;

use super::schema;
use crate::{
    answer::{NetTransformation, Notice, Provenance},
    frames::{Catalogue, Channel, Frame, Link, Time},
    units::Quantity,
};

/// The catalogue of frames.
#[derive(Serialize, ToSchema)]
#[schema(example = json!(examples::list()))]
pub(in crate::http) struct FrameList {
    /// What the catalogue is.
    pub(in crate::http) about: Option<String>,
    /// What times in seconds are counted from; null when times are written as RFC 3339.
    pub(in crate::http) epoch: Option<String>,
    /// Units of the catalogue; readings of sensors are calibrated to its units of E and B.
    pub(in crate::http) units: schema::Units,
    /// Every frame, in the order of the file.
    pub(in crate::http) frames: Vec<FrameRow>,
    /// What the answer was made with; `frames` is the hash of the catalogue.
    pub(in crate::http) provenance: Provenance,
}

/// A named frame.
#[derive(Serialize, ToSchema)]
#[schema(example = json!(examples::boom()))]
pub(in crate::http) struct FrameRow {
    /// Its name.
    pub(in crate::http) name: String,
    /// What it is.
    pub(in crate::http) about: Option<String>,
    /// The frame that it is described from; null for the root.
    pub(in crate::http) parent: Option<String>,
    /// Frames described from this one.
    pub(in crate::http) children: Vec<String>,
    /// How it moves as seen from its parent: `fixed` (the same at all times), `turning` or `track`.
    #[schema(example = "track")]
    pub(in crate::http) motion: String,
    /// The times at which that motion is known; null when it is at all times.
    pub(in crate::http) valid: Option<Interval>,
    /// Whether times outside are answered, with a notice.
    pub(in crate::http) extrapolate: bool,
    /// What it reads, for a sensor.
    pub(in crate::http) sensor: Option<SensorRow>,
}

/// From one time to another.
#[derive(Serialize, ToSchema)]
#[schema(example = json!(examples::interval()))]
pub(in crate::http) struct Interval {
    /// The first.
    pub(in crate::http) from: schema::Time,
    /// The last.
    pub(in crate::http) to: schema::Time,
}

/// What a sensor reads.
#[derive(Serialize, ToSchema)]
#[schema(example = json!(examples::sensor()))]
pub(in crate::http) struct SensorRow {
    /// Its reading of E; null when its E is the field itself.
    pub(in crate::http) e: Option<ChannelRow>,
    /// Its reading of B.
    pub(in crate::http) b: Option<ChannelRow>,
}

/// How raw numbers become a field: matrix · (raw − offset).
#[derive(Serialize, ToSchema)]
#[schema(example = json!(examples::channel()))]
pub(in crate::http) struct ChannelRow {
    /// Which of x, y, z it measures.
    pub(in crate::http) axes: Vec<String>,
    /// The matrix, from raw numbers to the unit of the catalogue.
    pub(in crate::http) matrix: [[f64; 3]; 3],
    /// The offset, in raw numbers.
    pub(in crate::http) offset: [f64; 3],
}

/// The transformation between two frames.
#[derive(Serialize, ToSchema)]
#[schema(example = json!(examples::transformation()))]
pub(in crate::http) struct Transformation {
    /// The frame where it begins.
    pub(in crate::http) from: String,
    /// The frame where it ends.
    pub(in crate::http) to: String,
    /// The time it is for; null where it is the same at all times and none was given.
    pub(in crate::http) time: Option<schema::Time>,
    /// The whole way as one boost and the turn after it; velocities in m/s.
    pub(in crate::http) net: NetTransformation,
    /// Λ of the whole way, v' = Λv for v = (ct, x, y, z).
    pub(in crate::http) matrix: [[f64; 4]; 4],
    /// Remarks that a careful colleague would make.
    pub(in crate::http) notices: Vec<Notice>,
    /// What the answer was made with.
    pub(in crate::http) provenance: Provenance,
}

/// A time in the notation of the catalogue.
pub(in crate::http) fn shown(time: Time, catalogue: &Catalogue) -> schema::Time {
    match catalogue.epoch {
        Some(_) => schema::Time::Seconds(time.seconds()),
        None => schema::Time::Calendar(time.display(catalogue.clock)),
    }
}

/// A frame, by its place in the catalogue.
pub(in crate::http) fn row(catalogue: &Catalogue, i: usize) -> FrameRow {
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

/// The units of the catalogue.
pub(in crate::http) fn units(catalogue: &Catalogue) -> schema::Units {
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

/// Parts of the demonstration, for the OpenAPI document.
mod examples {
    use serde_json::{Value, json};

    pub(super) fn channel() -> Value {
        json!({
            "axes": ["x", "y"],
            "matrix": [[500.0, -1.5, 0.0], [2.0, 495.0, 0.0], [0.0, 0.0, 1.0]],
            "offset": [0.0021, -0.0013, 0.0],
        })
    }

    pub(super) fn sensor() -> Value {
        json!({"e": channel(), "b": null})
    }

    pub(super) fn interval() -> Value {
        json!({"from": 60.0, "to": 360.0})
    }

    pub(super) fn boom() -> Value {
        json!({
            "name": "boom",
            "about": "Double probes on two booms",
            "parent": "spinning",
            "children": [],
            "motion": "fixed",
            "valid": null,
            "extrapolate": false,
            "sensor": sensor(),
        })
    }

    pub(super) fn list() -> Value {
        json!({
            "about": "Invented sounding-rocket payload that spins and coasts",
            "epoch": "2031-03-02T05:10:00Z",
            "units": {"e": "mV/m", "b": "nT", "velocity": "m/s", "angle": "deg"},
            "frames": [boom()],
            "provenance": provenance(),
        })
    }

    pub(super) fn transformation() -> Value {
        json!({
            "from": "spinning",
            "to": "payload",
            "time": 120.5,
            "net": {
                "velocity": [0.0, 0.0, 0.0],
                "beta": [0.0, 0.0, 0.0],
                "gamma": 1.0,
                "rapidity": 0.0,
                "rotation": {"w": 0.6, "x": 0.0, "y": 0.0, "z": -0.8},
            },
            "matrix": [
                [1.0, 0.0, 0.0, 0.0],
                [0.0, -0.28, -0.96, 0.0],
                [0.0, 0.96, -0.28, 0.0],
                [0.0, 0.0, 0.0, 1.0],
            ],
            "notices": [],
            "provenance": provenance(),
        })
    }

    fn provenance() -> Value {
        json!({
            "engine": "lodeframe 0.1.0",
            "constants": "CODATA 2022",
            "frames": "sha256:0f343b0931126a20f133d67c2b018a3b5e3b7d5f6b8e1c7ea9a5a6f9f6c0a2d4",
        })
    }
}
