//! The Monte Carlo method: draws, statistics, and trials against the same errors applied by hand.

mod draws;
mod service;
mod statistics;
mod trials;
