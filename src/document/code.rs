//! Every problem the service can report: its code, status, title, meaning and mend.

use std::fmt;

/// One row per problem code; the table is served at `/problems/{code}`.
macro_rules! codes {
    ($($variant:ident $name:literal $status:literal $title:literal, $about:literal, $mend:literal;)*) => {
        /// What went wrong. The text form (`wrong_type`, ..) never changes between releases.
        #[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
        #[allow(missing_docs, reason = "each variant is described by the table below and by `about`")]
        pub enum Code { $($variant),* }

        impl Code {
            /// All codes, in the order of the table.
            pub const ALL: &'static [Code] = &[$(Code::$variant),*];

            /// The stable name used in `type` (`/problems/<name>`) and in `errors[].code`.
            pub fn name(self) -> &'static str { match self { $(Code::$variant => $name),* } }
            /// The HTTP status this problem has when it stands alone.
            pub fn status(self) -> u16 { match self { $(Code::$variant => $status),* } }
            /// A short summary that does not change from case to case.
            pub fn title(self) -> &'static str { match self { $(Code::$variant => $title),* } }
            /// What the problem means.
            pub fn about(self) -> &'static str { match self { $(Code::$variant => $about),* } }
            /// How to mend the request.
            pub fn mend(self) -> &'static str { match self { $(Code::$variant => $mend),* } }
        }
    };
}

codes! {
    Syntax "syntax" 400 "The text could not be read",
        "The body is not well-formed JSON in UTF-8, or a query parameter is not well-formed.",
        "Look at the place the detail names: a missing quote, a trailing comma, a % escape that is not two hex digits.";
    NumberOutOfRange "number_out_of_range" 400 "A number no double can hold",
        "A number in the question is larger than the largest double (about 1.8e308), or not a number at all.",
        "Choose a unit in which the value is smaller. NaN and Infinity are not accepted; leave a missing value null.";
    UnknownField "unknown_field" 400 "A name that is not part of the question",
        "A field or parameter is not one of those the question can have at that place. Unknown names are refused so that a slip of the pen never silently changes an answer.",
        "Compare with the names listed in the detail.";
    RepeatedField "repeated_field" 400 "A name given twice",
        "The same field or parameter stands twice at one place, so it is not clear which is meant.",
        "Leave only one of them.";
    WrongType "wrong_type" 400 "A value of the wrong type",
        "A number stands where a text is expected, a text where a list is expected, and so on.",
        "Write the value in the form the detail names.";
    WrongLength "wrong_length" 400 "A list of the wrong length",
        "A vector has three components, a matrix three rows of three.",
        "Give as many values as the detail names.";
    MissingField "missing_field" 400 "Something needed is missing",
        "The question cannot be understood without this field or parameter.",
        "Add the field that the detail names.";
    ConflictingFields "conflicting_fields" 400 "Fields that exclude each other",
        "Two fields say the same thing in different ways, and exactly one of them is expected.",
        "Keep the one that you mean.";
    UnknownUnit "unknown_unit" 400 "A unit that is not in the table",
        "Units are UCUM codes, case-sensitive. Each quantity has its own list.",
        "Choose a code from GET /v1/units.";
    UnknownChoice "unknown_choice" 400 "A word that is not one of the choices",
        "The field takes one of a few words.",
        "Choose one of the words listed in the detail.";
    FasterThanLight "faster_than_light" 422 "Not slower than light",
        "The speed of a frame is at or past c = 299792458 m/s, for which no transformation exists.",
        "Check the value and its unit. Very close to c use a direction with gamma, rapidity or kinetic_energy.";
    NoDirection "no_direction" 422 "A direction of length zero",
        "A direction, an axis or a quaternion whose components all vanish points nowhere.",
        "Give a vector of any other length; it need not be normalised.";
    BelowRest "below_rest" 422 "Less than nothing",
        "A gamma below 1, a negative kinetic energy or a rest energy that is not positive.",
        "gamma is at least 1, kinetic_energy at least 0, rest_energy above 0.";
    NotARotation "not_a_rotation" 422 "Not a rotation",
        "A quaternion is not of length 1, or a matrix is not orthogonal with determinant +1, by more than the rounding of six decimals.",
        "Give more digits; check that rows and columns are not mixed up and that no axis is mirrored.";
    AngleOutOfRange "angle_out_of_range" 422 "An angle out of its range",
        "The angle makes no sense where it stands.",
        "Give one in the range that the detail names, in units.angle (rad when left out).";
    NotSymmetric "not_symmetric" 422 "A covariance matrix that is not symmetric",
        "The covariance of two quantities is one number, which stands twice in the matrix, on both sides of its diagonal. The two differ.",
        "Check the elements that the detail names, and the order of components: ex ey ez bx by bz.";
    NotPositiveSemidefinite "not_positive_semidefinite" 422 "A covariance matrix that gives a negative variance",
        "No combination of quantities has a variance below zero, so the correlation matrix has no negative eigenvalue; the detail names the smallest one. Down to -1e-6 it is taken as rounding.",
        "Check signs and the order of components, that elements are in squares of the units, and that no covariance is larger than the product of its two standard uncertainties.";
    NegativeUncertainty "negative_uncertainty" 422 "A negative uncertainty",
        "A standard uncertainty is zero or positive.",
        "Give the standard deviation itself.";
    UncertainAtRest "uncertain_at_rest" 422 "An uncertain speed at rest",
        "At gamma = 1 or at no kinetic energy the speed does not follow a small change of gamma or energy to first order, so that no standard uncertainty of it can be propagated.",
        "Give the uncertainty of a velocity, of beta or of the rapidity.";
    WrongTime "wrong_time" 400 "Not a time of this catalogue",
        "A catalogue of frames writes its times as RFC 3339 throughout, or as seconds from its epoch throughout.",
        "GET /v1/frames says which. RFC 3339 looks like 2031-03-02T05:10:00.25Z; the fraction may have any number of digits.";
    UnknownFrame "unknown_frame" 422 "A frame that is not in the catalogue",
        "The name is not among the frames this service was started with.",
        "GET /v1/frames lists them.";
    TimeNeeded "time_needed" 422 "A way that changes with time",
        "A frame between the two named ones moves along a track or turns, so that the way is known only for a given time.",
        "Add time, in the notation of the catalogue.";
    TimeOutsideTrack "time_outside_track" 422 "A time outside the track",
        "The time is before the first or after the last row of a track on the way, and the frame does not allow its motion to be extrapolated.",
        "Ask for a time between those that the detail names.";
    AxisNotMeasured "axis_not_measured" 422 "A component that the sensor does not have",
        "The catalogue declares the sensor with one or two axes, and the reading has a value on another one.",
        "Leave that component null. assume.e_dot_b_zero can fill one missing component of E.";
    FieldInPlane "field_in_plane" 422 "B too close to the measured plane",
        "E·B = 0 gives the missing component of E from the two measured ones only where B stands well out of their plane: near it, a small error becomes a large one.",
        "Choose readings whose B is farther from the plane, or a smaller min_angle if the uncertainty may grow so much.";
    UnknownParent "unknown_parent" 422 "A parent that is not in the catalogue",
        "A frame of the catalogue names a parent that the file does not describe. The service does not start.",
        "Compare the spelling with the names of the frames.";
    FrameCycle "frame_cycle" 422 "Frames that hang from each other",
        "Following parents leads back to the same frame, so that nothing says where these frames are. The service does not start.",
        "Give one of the frames in the circle another parent.";
    SeveralRoots "several_roots" 422 "Trees that never meet",
        "More than one frame of the catalogue has no parent, so that no way leads from one tree to the other. The service does not start.",
        "Leave one frame without a parent and hang the others from it or from its children.";
    SensorNotLeaf "sensor_not_leaf" 422 "A frame hung from a sensor",
        "Sensors are leaves of the tree of frames. The service does not start.",
        "Hang the frame and the sensor from the same parent.";
    SingularMatrix "singular_matrix" 422 "A matrix without an inverse",
        "The matrix of a sensor maps different fields to the same numbers. The service does not start.",
        "Check for a row or column that is zero or a multiple of another.";
    UnsortedTimes "unsorted_times" 422 "Times out of order",
        "The rows of a track are not in the order of their times. The service does not start.",
        "Sort the rows.";
    RepeatedTime "repeated_time" 422 "A time given twice",
        "Two rows of a track have the same time. The service does not start.",
        "Leave out one of them.";
    GapTooLong "gap_too_long" 422 "A gap in a track",
        "Neighbouring rows of a track are farther apart than max_gap allows. The service does not start.",
        "Fill the gap, or allow a longer one.";
    AttitudeJump "attitude_jump" 422 "Attitudes too far apart",
        "Neighbouring attitudes of a track are more than 90 degrees apart, so that the way between them is a guess. The service does not start.",
        "Give more rows, or describe a steady spin by turning.";
    UnreadableFile "unreadable_file" 422 "A file that cannot be read",
        "The catalogue or a track it names is missing or cannot be read. The service does not start.",
        "Check the path, which is relative to the catalogue, and the right to read it.";
    UnknownCode "unknown_code" 404 "No such problem",
        "There is no problem with this code.",
        "GET /problems lists all of them.";
    TooManySteps "too_many_steps" 422 "A way of too many steps",
        "The way holds more steps than this service resolves for one question.",
        "Join neighbouring rotations, or ask in two parts.";
    PointsOutOfRange "points_out_of_range" 422 "Too few or too many points",
        "A sweep has at least two points and at most as many as this service draws at once.",
        "Choose points between the two numbers of the detail, or ask for the range in parts.";
    TrialsOutOfRange "trials_out_of_range" 422 "Too few or too many trials",
        "Fewer than 10,000 trials do not settle a 95 % coverage interval (JCGM 101:2008, 7.9.4), and a service makes at most as many as it was started for.",
        "Choose trials between the two numbers of the detail; 100,000 are made when it is left out.";
    NothingUncertain "nothing_uncertain" 422 "Trials of what is exact",
        "monte_carlo draws errors from the uncertainties of the reading and of the steps, and the question states none.",
        "Add uncertainty.e, uncertainty.b, or the uncertainty of a step; or leave monte_carlo out.";
    EmptyRange "empty_range" 422 "A range without extent",
        "A sweep begins and ends at the same value.",
        "Give a stop that differs from start; it may be smaller.";
    Overflow "overflow" 422 "An answer no double can hold",
        "A component of the answer is larger than the largest double.",
        "Choose an answer unit in which it is smaller (answer_units).";
    PrecisionExhausted "precision_exhausted" 422 "Beyond the precision kept",
        "The way passes through speeds so extreme that its net effect would take more digits than the service keeps, or ends at a gamma that no double holds.",
        "Shorten the way: leave out steps that undo each other.";
    Unauthorized "unauthorized" 401 "A token is needed",
        "This service answers only requests that carry one of its bearer tokens.",
        "Send the header Authorization: Bearer <token>.";
    NotFound "not_found" 404 "Nothing here",
        "There is nothing at this path.",
        "GET /openapi.json lists every path.";
    MethodNotAllowed "method_not_allowed" 405 "Not with this method",
        "The path exists but does not answer this method.",
        "Use one of the methods in the Allow header.";
    NotAcceptable "not_acceptable" 406 "No such representation",
        "None of the types in the Accept header can be produced here.",
        "Ask for one of the types the detail names, or leave Accept out.";
    RequestTimeout "request_timeout" 408 "The request took too long to arrive",
        "The service stopped waiting for the rest of the request.",
        "Send it again, without pauses.";
    BodyTooLarge "body_too_large" 413 "The body is too large",
        "The body is longer than the limit the detail names.",
        "Ask in smaller parts, or use the series for many readings.";
    RowTooLong "row_too_long" 413 "A row that is too long",
        "A row of a series is longer than the service holds at once. What came before it is answered; nothing after it.",
        "Check that rows end with a line (LF or CRLF), and leave out long texts; whoever runs the service can allow longer rows.";
    BatchTooLarge "batch_too_large" 413 "A batch that is too large",
        "A batch of rows of an Arrow stream is larger than the service holds at once.",
        "Write smaller batches; whoever runs the service can allow larger ones.";
    UriTooLong "uri_too_long" 414 "The address is too long",
        "The path and query are longer than the limit the detail names.",
        "Ask the same question as JSON by POST.";
    UnsupportedMediaType "unsupported_media_type" 415 "A body of the wrong type",
        "The Content-Type is not one this path reads.",
        "Send Content-Type: application/json.";
    TooManyRequests "too_many_requests" 429 "Too many requests",
        "This client asks more than the service allows it.",
        "Wait as long as Retry-After says.";
    HeadersTooLarge "headers_too_large" 431 "The headers are too large",
        "The header section is larger than the service reads.",
        "Send fewer or shorter headers.";
    Internal "internal" 500 "A fault of the service",
        "The service failed in a way its authors did not foresee. The question was not the cause.",
        "Report the instance id to whoever runs the service.";
    Stopping "stopping" 503 "The service stops",
        "The service was told to stop, and the time that it gives to what still runs is over.",
        "Send the rows that have no answer again: another replica, or the next start, answers them.";
    Overloaded "overloaded" 503 "Too busy",
        "The service has as much work as it takes on at once.",
        "Wait as long as Retry-After says and send the request again.";
}

impl Code {
    /// Finds a code by its name.
    pub fn by_name(name: &str) -> Option<Code> {
        Code::ALL.iter().copied().find(|code| code.name() == name)
    }
}

impl fmt::Display for Code {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}
