//! Lodeframe restates measured electric and magnetic fields in the frame where they are needed.

pub mod answer;
pub mod chain;
pub mod document;
pub mod physics;
pub mod question;
pub mod transform;
pub mod units;
