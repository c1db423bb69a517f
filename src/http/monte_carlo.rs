//! Trials on the threads for heavy work.

use std::sync::Arc;

use futures_util::{StreamExt, future::join_all, stream};

use super::AppState;
use crate::answer::{Answer, Plan};

/// Adds what the trials of a plan say to the answer. Dropped, it begins no further block.
pub(super) async fn add_trials(state: &AppState, plan: Plan, answer: &mut Answer) {
    // Each holds its values in memory until its intervals are known.
    let _turn = state.trial_runs.acquire().await.expect("never closed");
    let (plan, pool) = (Arc::new(plan), &state.pool);
    let blocks = (0..plan.blocks()).map(|number| {
        let (plan, made) = (plan.clone(), state.metrics.trials.clone());
        pool.run(move || {
            let block = plan.block(number);
            made.inc_by(block.trials());
            block
        })
    });
    // One more than run, so that none of the threads waits for the next.
    let blocks: Vec<_> = stream::iter(blocks)
        .buffered(pool.threads() + 1)
        .collect()
        .await;
    let blocks = Arc::new(blocks);
    let tails = (0..6).map(|component| {
        let (plan, blocks) = (plan.clone(), blocks.clone());
        pool.run(move || plan.tails(&blocks, component))
    });
    let tails = join_all(tails).await;
    let tails = tails.try_into().expect("six components");
    plan.conclude(&blocks, tails, answer);
}
