//! Propagation of distributions by a Monte Carlo method (JCGM 101:2008; JCGM 102:2011, 7): draws
//! of everything uncertain, each restated exactly, and what their answers say.

mod change;
mod finite;
mod half;
pub mod interval;
mod lanes;
pub mod moments;
pub mod normal;
mod reading;
mod stage;
pub mod summary;
pub mod trials;
pub mod validation;
