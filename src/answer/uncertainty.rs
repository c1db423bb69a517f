//! The uncertainty of an answer as it is sent. Names are those of the GUM.

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

/// The uncertainty of the answer by the law of propagation (JCGM 102:2011, 6.2), from the
/// uncertainties of the reading, of each step and of the calibration of a sensor. What is given no
/// uncertainty is taken as exact. A number that depends on something missing, or that no double
/// holds, is null.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(as = UncertaintyOfAnswer)]
pub struct Uncertainty {
    /// Standard uncertainties of the components of E', in `units.e`.
    #[schema(min_items = 3, max_items = 3)]
    pub e: [Option<f64>; 3],
    /// Standard uncertainties of the components of B', in `units.b`.
    #[schema(min_items = 3, max_items = 3)]
    pub b: [Option<f64>; 3],
    /// Covariance matrix of ex ey ez bx by bz, in products of `units.e` and `units.b`.
    pub covariance: [[Option<f64>; 6]; 6],
    /// Correlation coefficients: 1 on the diagonal, 0 beside a component without uncertainty.
    pub correlation: [[Option<f64>; 6]; 6],
    /// Regions that hold the true E' and B' with the coverage probability.
    pub coverage: Coverage,
    /// What a person may want in one number: lengths and angle.
    pub magnitudes: Magnitudes,
    /// Standard uncertainties of the invariants; null when a component is missing.
    pub invariants: Option<UncertainInvariants>,
    /// That of the frame of parallel fields, when it was asked for and has one.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub parallel_frame: Option<UncertainParallelFrame>,
    /// Whether first order is enough: all numbers of `second_order` are below its `limit`. Where it is
    /// not, the numbers here are rough, and Monte Carlo is needed.
    pub linear: bool,
    /// What decides `linear`.
    pub second_order: SecondOrder,
    /// Where the variance of each component comes from, when asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub budget: Option<Budget>,
}

/// Coverage regions, to first order and for Gaussian errors: ellipsoids about E' and B'.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Coverage {
    /// Coverage probability.
    #[schema(example = 0.95)]
    pub probability: f64,
    /// Coverage factor k for three dimensions; half axes are k times standard uncertainties.
    #[schema(example = 2.79548348291511)]
    pub factor: f64,
    /// That of E', in `units.e`.
    pub e: Option<Ellipsoid>,
    /// That of B', in `units.b`.
    pub b: Option<Ellipsoid>,
}

/// An ellipsoid about the estimate.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Ellipsoid {
    /// Half axes, the largest first.
    #[schema(min_items = 3, max_items = 3)]
    pub half_axes: [f64; 3],
    /// The unit vector along each half axis, on the axes of the target frame.
    pub directions: [[f64; 3]; 3],
}

/// Lengths of E' and B' and the angle between them.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Magnitudes {
    /// |E'| in `units.e`; null where it vanishes.
    pub e: Option<Measure>,
    /// |B'| in `units.b`; null where it vanishes.
    pub b: Option<Measure>,
    /// The angle between E' and B' in the angle unit of the question; null where they are parallel or one vanishes.
    pub angle: Option<Measure>,
}

/// An estimate and its standard uncertainty.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Measure {
    /// Estimate.
    pub value: f64,
    /// Standard uncertainty.
    pub uncertainty: f64,
}

/// Standard uncertainties of the invariants.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct UncertainInvariants {
    /// Of E² − c²B², in V²/m².
    pub e2_minus_c2b2: Option<f64>,
    /// Of E·cB, in V²/m².
    pub e_dot_cb: Option<f64>,
}

/// Standard uncertainty of the frame of parallel fields.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct UncertainParallelFrame {
    /// Of its speed over c.
    pub beta: f64,
}

/// How large the second order is that the law of propagation leaves out.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct SecondOrder {
    /// Root mean square of the second-order term of E' or B', the larger, measured in standard uncertainties along each axis of the ellipsoid; null where an ellipsoid is flat and the second order is not.
    pub ratio: Option<f64>,
    /// The largest error of the velocity of a step, over c and as seen in its own frame (γ²σ along the motion, γσ across).
    pub velocity: Option<f64>,
    /// The largest error of a turn of the axes or of a direction, in rad.
    pub turn: Option<f64>,
    /// Below this each of them must be.
    #[schema(example = 0.1)]
    pub limit: f64,
}

/// Shares of the variance of each component, the largest first.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Budget {
    /// Of ex, ey and ez.
    #[schema(min_items = 3, max_items = 3)]
    pub e: [Vec<Share>; 3],
    /// Of bx, by and bz.
    #[schema(min_items = 3, max_items = 3)]
    pub b: [Vec<Share>; 3],
}

/// What one source adds to a variance.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Share {
    /// Where the source stands, as a JSON Pointer: `/e` and `/b` are the reading, `/uncertainty/covariance` what its E and B share, `/steps/1/boost` a step, `/frames/NAME/..` a frame or sensor of the catalogue.
    #[schema(example = "/steps/1/boost")]
    pub source: String,
    /// Its part of the variance; all parts add up to 1, those below 1e-12 left out. What E and B share may be negative.
    #[schema(example = 0.8)]
    pub share: f64,
}
