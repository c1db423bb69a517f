//! The catalogue of named frames: a tree of frames that stand, turn or follow a track, with
//! sensors as leaves.
//!
//! `load` reads the file whole and names every fault; a [`Walk`] is the way between two frames,
//! resolved where it does not change; a [`Walker`] takes it at one time after another.

mod catalogue;
mod fault;
mod frame;
mod interpolate;
mod load;
mod sensor;
mod show;
mod table;
mod time;
mod track;
mod tree;
mod turning;
mod walk;

pub use catalogue::{Catalogue, Frame, Link};
pub use fault::{LoadFault, Reason};
pub use load::load;
pub use sensor::{Channel, Sensor};
pub use time::{Clock, Time};
pub use track::{Row, Sample, Track};
pub use turning::Turning;
pub use walk::{Passage, Walk, Walker};
