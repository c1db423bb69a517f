//! Lodeframe restates measured electric and magnetic fields in the frame where they are needed.

pub mod document;
