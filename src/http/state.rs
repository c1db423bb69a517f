//! What all requests share.

use std::sync::{Arc, LazyLock};

use bytes::Bytes;
use tokio::sync::{Semaphore, watch};

use super::{metrics::Metrics, openapi};
use crate::{config::Config, frames::Catalogue, pool::Pool, question::Deployment};

/// What all requests share; a clone is one more handle to the same.
#[derive(Clone)]
pub struct AppState(Arc<Shared>);

/// The parts of [`AppState`].
pub struct Shared {
    /// The settings the service was started with.
    pub config: Config,
    /// What questions may ask for.
    pub deployment: Deployment,
    /// Threads for heavy work.
    pub pool: Pool,
    /// Turns of questions that ask for trials: as many at once as there are threads for them.
    pub trial_runs: Semaphore,
    /// What is counted.
    pub metrics: Metrics,
    /// The OpenAPI document, as served; made when first asked for, since its examples are true answers.
    pub openapi: LazyLock<Bytes>,
    /// Turns true when series that still run must come to their end.
    pub ending: watch::Sender<bool>,
}

impl AppState {
    /// Prepares everything that is made once and never changes.
    pub fn new(config: Config, frames: Option<Catalogue>) -> AppState {
        let pool = Pool::of_all_cores();
        AppState(Arc::new(Shared {
            deployment: Deployment {
                steps: config.max_steps,
                trials: config.max_trials,
                frames: frames.map(Arc::new),
            },
            config,
            trial_runs: Semaphore::new(pool.threads()),
            pool,
            metrics: Metrics::new(),
            openapi: LazyLock::new(|| openapi::text().into()),
            ending: watch::Sender::new(false),
        }))
    }
}

impl std::ops::Deref for AppState {
    type Target = Shared;

    fn deref(&self) -> &Shared {
        &self.0
    }
}
