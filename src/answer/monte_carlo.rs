//! What trials say of an answer, as it is sent. Names are those of the GUM.

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

/// The answer by trials (propagation of distributions: JCGM 101:2008; JCGM 102:2011, 7): errors
/// are drawn from normal distributions with the given uncertainties, and the reading with them is
/// restated exactly. The same question and seed give the same numbers on every machine. A number
/// that depends on something missing, or that no double holds, is null; all are when fewer than
/// 2000 draws were possible.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(as = MonteCarloOfAnswer)]
pub struct MonteCarlo {
    /// How many draws were made.
    #[schema(example = 100_000)]
    pub trials: u64,
    /// What they started from.
    #[schema(example = 0)]
    pub seed: u64,
    /// How many of them no frame can do: a speed at or past that of light, or a Lorentz factor below one. All else here is of the others.
    #[schema(example = 0)]
    pub refused: u64,
    /// Averages of the trials.
    pub estimate: Components,
    /// Standard deviations of the trials.
    pub standard_uncertainty: Components,
    /// Covariance matrix of ex ey ez bx by bz, in products of `units.e` and `units.b`.
    pub covariance: [[Option<f64>; 6]; 6],
    /// The shortest coverage intervals.
    pub intervals: Intervals,
    /// How good the law of propagation is, by JCGM 101:2008, 8.
    pub validation: Validation,
}

/// A number for each component.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(as = ComponentsOfTrials)]
pub struct Components {
    /// Of E', in `units.e`.
    #[schema(min_items = 3, max_items = 3)]
    pub e: [Option<f64>; 3],
    /// Of B', in `units.b`.
    #[schema(min_items = 3, max_items = 3)]
    pub b: [Option<f64>; 3],
}

/// Of all intervals that hold that part of the trials, the shortest, for each component by itself.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(as = IntervalsOfTrials)]
pub struct Intervals {
    /// Coverage probability.
    #[schema(example = 0.95)]
    pub probability: f64,
    /// Lower and upper end for the components of E', in `units.e`.
    #[schema(min_items = 3, max_items = 3)]
    pub e: [Option<[f64; 2]>; 3],
    /// Lower and upper end for the components of B', in `units.b`.
    #[schema(min_items = 3, max_items = 3)]
    pub b: [Option<[f64; 2]>; 3],
}

/// Compares the 95 % intervals y ± 1.96 u of `uncertainty` with the probabilistically symmetric
/// ones of the trials, whose ends depend less on the number of trials than those of the shortest.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(as = ValidationOfTrials)]
pub struct Validation {
    /// Whether all components are validated; null when one of them is missing.
    pub validated: Option<bool>,
    /// How many digits of the standard uncertainty count.
    #[schema(example = 2)]
    pub significant_digits: u8,
    /// For the components of E'.
    #[schema(min_items = 3, max_items = 3)]
    pub e: [Option<Comparison>; 3],
    /// For the components of B'.
    #[schema(min_items = 3, max_items = 3)]
    pub b: [Option<Comparison>; 3],
}

/// The comparison of two intervals, in the unit of the component.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[schema(as = ComparisonOfIntervals)]
pub struct Comparison {
    /// δ: half a unit of the last digit that counts.
    #[schema(example = 0.005)]
    pub tolerance: f64,
    /// How far the lower ends are apart.
    pub d_low: f64,
    /// How far the upper ends are apart.
    pub d_high: f64,
    /// Whether both are at most the tolerance.
    pub validated: bool,
    /// Whether that would hardly be otherwise with other draws: what decides is further from the tolerance than twice the standard deviation of the end over repetitions.
    pub settled: bool,
}
