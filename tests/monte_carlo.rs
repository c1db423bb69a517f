//! The Monte Carlo method: draws, statistics, and trials against the same errors applied by hand.

mod draws;
mod statistics;
mod trials;
