//! What a question says of trials.

use crate::document::{Code, Faults, Members, Place};

/// Trials asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct MonteCarlo {
    /// How many.
    pub trials: usize,
    /// What the draws start from: the same question with the same seed has the same draws.
    pub seed: u64,
}

/// The fewest trials taken: with fewer the ends of a 95 % interval still move by a tenth of the
/// standard uncertainty (JCGM 101:2008, 7.9.4 b, begins with as many).
pub const FEWEST: usize = 10_000;
/// How many there are when the question does not say.
const TRIALS: u64 = 100_000;

/// Reads `monte_carlo`; `Some(None)` when it is not asked for.
pub(super) fn read(
    members: Members,
    most: usize,
    faults: &mut Faults,
) -> Option<Option<MonteCarlo>> {
    let Some(node) = members.get("monte_carlo") else {
        return Some(None);
    };
    let place = Place::ROOT.field("monte_carlo");
    let members = faults.members(node, &place, &["trials", "seed"])?;
    let mut whole = |name, default| match members.get(name) {
        Some(node) => faults.whole(node, &place.field(name)),
        None => Some(default),
    };
    let (trials, seed) = (whole("trials", TRIALS.min(most as u64)), whole("seed", 0));
    let trials = trials?;
    match usize::try_from(trials) {
        Ok(trials) if (FEWEST..=most).contains(&trials) => Some(Some(MonteCarlo {
            trials,
            seed: seed?,
        })),
        _ => {
            let detail = format!(
                "{trials} trials; this service takes from {FEWEST}, below which a 95 % interval \
                 is not settled, to {most}"
            );
            faults.note(&place.field("trials"), Code::TrialsOutOfRange, detail);
            None
        }
    }
}

/// Refuses trials of what is exact.
pub(super) fn nothing_uncertain(faults: &mut Faults) {
    let detail = "trials draw from what is uncertain, and nothing here is: add \"uncertainty\" to \
                  the question (for e, b, velocity or rotation) or to a step";
    faults.note(
        &Place::ROOT.field("monte_carlo"),
        Code::NothingUncertain,
        detail,
    );
}
