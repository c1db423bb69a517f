//! Questions in the URL: each parameter is a path into the JSON question, joined by dots.

use utoipa::IntoParams;

/// The reading of a question by URL.
#[derive(IntoParams)]
#[into_params(parameter_in = Query)]
#[allow(dead_code, reason = "describes parameters for the OpenAPI document")]
pub struct ReadingQuery {
    /// Electric field: three numbers joined by commas; an empty one is missing.
    #[param(required = false, example = "0,1.2,0")]
    e: String,
    /// Magnetic flux density: three numbers joined by commas; an empty one is missing.
    #[param(required = false, example = "0,0,45000")]
    b: String,
}

/// The question as parameters, but for its reading and most of its way: each is a path into the
/// JSON question, joined by dots.
#[derive(IntoParams)]
#[into_params(parameter_in = Query)]
#[allow(dead_code, reason = "describes parameters for the OpenAPI document")]
pub struct Query {
    /// Unit of E; likewise `units.angle`, `units.angular_velocity`, `units.energy`, `units.length`.
    #[param(required = false, rename = "units.e", example = "mV/m")]
    units_e: String,
    /// Unit of B.
    #[param(required = false, rename = "units.b", example = "nT")]
    units_b: String,
    /// Unit of velocities.
    #[param(required = false, rename = "units.velocity", example = "km/s")]
    units_velocity: String,
    /// The way as a chain: JSON text.
    #[param(required = false)]
    steps: String,
    /// Fill a missing component of E from E·B = 0; the least angle of B to the measured plane.
    #[param(required = false, rename = "assume.e_dot_b_zero.min_angle")]
    assume_e_dot_b_zero_min_angle: String,
    /// Take the whole way backwards.
    #[param(required = false)]
    inverse: String,
    /// Unit of E' in the answer.
    #[param(required = false, rename = "answer_units.e")]
    answer_units_e: String,
    /// Unit of B' in the answer.
    #[param(required = false, rename = "answer_units.b")]
    answer_units_b: String,
}

/// How uncertain a reading is; in a series each row says it.
#[derive(IntoParams)]
#[into_params(parameter_in = Query)]
#[allow(dead_code, reason = "describes parameters for the OpenAPI document")]
pub struct UncertaintyQuery {
    /// Standard uncertainties of E as read; likewise `uncertainty.b`.
    #[param(required = false, rename = "uncertainty.e", example = "0.1,0.1,0.1")]
    uncertainty_e: String,
    /// Instead of those of E and B: their 6×6 covariance matrix, as JSON text.
    #[param(required = false, rename = "uncertainty.covariance")]
    uncertainty_covariance: String,
}

/// The way in its other forms, of one reading or of a series.
#[derive(IntoParams)]
#[into_params(parameter_in = Query)]
#[allow(dead_code, reason = "describes parameters for the OpenAPI document")]
pub struct WayQuery {
    /// The way as one rotation: its axis; likewise `rotation.matrix`, `rotation.quaternion.w` and so on.
    #[param(required = false, rename = "rotation.axis")]
    rotation_axis: String,
    /// The angle of that rotation; in a series also `row`, for the angle of each row.
    #[param(required = false, rename = "rotation.angle")]
    rotation_angle: String,
    /// The way as one boost: its direction; likewise `boost.beta`, `boost.rapidity` and so on.
    #[param(required = false, rename = "boost.direction")]
    boost_direction: String,
    /// The Lorentz factor of that boost.
    #[param(required = false, rename = "boost.gamma")]
    boost_gamma: String,
    /// Standard uncertainties of the way given as `velocity`; likewise `uncertainty.boost` and `uncertainty.rotation`. Those of a step stand inside it.
    #[param(required = false, rename = "uncertainty.velocity")]
    uncertainty_velocity: String,
    /// The way by names of the catalogue: the frame of the reading.
    #[param(required = false)]
    from: String,
    /// The target frame, with `from`.
    #[param(required = false)]
    to: String,
}

/// What only one reading by URL is asked.
#[derive(IntoParams)]
#[into_params(parameter_in = Query)]
#[allow(dead_code, reason = "describes parameters for the OpenAPI document")]
pub struct SingleQuery {
    /// The way as one boost: three numbers joined by commas.
    #[param(required = false, example = "7.6,0,0")]
    velocity: String,
    /// When the reading was taken: RFC 3339 (a `+` is written %2B), or seconds from the epoch of the catalogue.
    #[param(required = false)]
    time: String,
    /// Make trials beside the law of propagation: how many.
    #[param(required = false, rename = "monte_carlo.trials")]
    monte_carlo_trials: String,
    /// What their draws start from.
    #[param(required = false, rename = "monte_carlo.seed")]
    monte_carlo_seed: String,
    /// Further parts of the answer, joined by commas.
    #[param(required = false)]
    include: String,
    /// Convention of the tensor: mostly_minus or mostly_plus.
    #[param(required = false)]
    signature: String,
}

/// What only a series is asked: the motion of each row, and how rows are treated.
#[derive(IntoParams)]
#[into_params(parameter_in = Query)]
#[allow(dead_code, reason = "describes parameters for the OpenAPI document")]
pub struct SeriesQuery {
    /// The way as one boost: `row` for the velocity of each row, or three numbers joined by commas.
    #[param(required = false, example = "row")]
    velocity: String,
    /// The way as one rotation: `row` for the quaternion of each row; likewise `rotation.inverse`.
    #[param(required = false, rename = "rotation.quaternion")]
    rotation_quaternion: String,
    /// Other columns that go along as text when the answer is in another format, joined by commas.
    #[param(required = false)]
    keep: String,
    /// What a bad row does: `continue` (it is answered with a problem and the next one is read) or `stop`.
    #[param(required = false)]
    on_error: String,
    /// Whether NDJSON ends with a line of counts: `on` or `off`.
    #[param(required = false)]
    end: String,
}

/// The range of a sweep, and the step that leaves out the quantity that runs.
#[derive(IntoParams)]
#[into_params(parameter_in = Query)]
#[allow(dead_code, reason = "describes parameters for the OpenAPI document")]
pub struct RangeQuery {
    /// The quantity that runs: beta, rapidity or angle.
    #[param(example = "beta")]
    over: String,
    /// Its first value; angles are in `units.angle`.
    #[param(example = "0")]
    start: String,
    /// Its last value.
    #[param(example = "0.99")]
    stop: String,
    /// How many values, evenly spaced, both ends included; 200 when left out.
    #[param(required = false, example = "5")]
    points: String,
    /// How a picture divides its axis of values: linear, or log for absolute values by powers of ten.
    #[param(required = false)]
    scale: String,
    /// For beta and rapidity: the direction of the boost whose speed runs.
    #[param(required = false, rename = "boost.direction", example = "1,0,0")]
    boost_direction: String,
    /// For angle: the axis of the rotation whose angle runs.
    #[param(required = false, rename = "rotation.axis")]
    rotation_axis: String,
}
