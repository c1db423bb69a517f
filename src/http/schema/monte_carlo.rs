//! Trials asked for (JCGM 101:2008; JCGM 102:2011, 7).

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

/// How many trials to make, from which draws. Something in the question must be uncertain.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
#[schema(as = MonteCarloOfQuestion, example = json!({"trials": 100_000, "seed": 1}))]
#[serde(deny_unknown_fields)]
pub struct MonteCarlo {
    /// How many: from 10000 to as many as the service was started for (`--max-trials`, 1000000 by default); 100000 when left out.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(minimum = 10_000)]
    pub trials: Option<u64>,
    /// What the draws start from, a whole number; 0 when left out. The same seed gives the same draws on every machine.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub seed: Option<u64>,
}
