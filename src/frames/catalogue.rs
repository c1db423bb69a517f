//! The catalogue as loaded: frames, their tree, and the ways between them.

use std::collections::HashMap;
use std::sync::{Arc, RwLock};

use super::sensor::Sensor;
use super::time::{Clock, Time};
use super::track::Track;
use super::tree;
use super::turning::Turning;
use super::walk::Walk;
use crate::chain;
use crate::document::{Code, Fault, Path};
use crate::physics::lorentz::Step;
use crate::units::Units;

/// The named frames of a service; never changes once loaded.
#[derive(Debug)]
pub struct Catalogue {
    /// What it is, in words.
    pub about: Option<String>,
    /// What seconds are counted from; `None` when times are written as RFC 3339.
    pub epoch: Option<String>,
    /// How times are written.
    pub clock: Clock,
    /// The units of the file; calibrated readings of sensors are in its units of E and B.
    pub units: Units,
    /// `sha256:` and the hash over the file followed by its tracks, in the order they are named.
    pub hash: Arc<str>,
    frames: Arc<[Frame]>,
    by_name: HashMap<String, usize>,
    parents: tree::Parents,
    walks: RwLock<HashMap<(usize, usize), Arc<Walk>>>,
}

/// A frame.
#[derive(Clone, Debug)]
pub struct Frame {
    /// Its name.
    pub name: String,
    /// What it is, in words.
    pub about: Option<String>,
    /// Its parent, by place among the frames; `None` for the root.
    pub parent: Option<usize>,
    /// What leads from the parent to it.
    pub link: Link,
    /// What it reads, if it is a sensor.
    pub sensor: Option<Sensor>,
}

impl Frame {
    /// Where something of it stands in the catalogue, as a JSON Pointer.
    pub fn pointer(&self, member: &str) -> String {
        let frames = Path::default().field("frames");
        frames.field(&self.name).field(member).pointer()
    }
}

/// What leads from a parent to a frame.
#[derive(Clone, Debug)]
pub enum Link {
    /// Steps that never change.
    Steps(Vec<Step>),
    /// A steady turn.
    Turning(Turning),
    /// A track.
    Track(Track),
}

impl Frame {
    /// Whether its motion is told also for times outside its track.
    pub fn extrapolates(&self) -> bool {
        matches!(&self.link, Link::Track(track) if track.extrapolate)
    }
}

/// So many prepared ways are kept; past that they are prepared anew.
const WALKS: usize = 4096;

impl Catalogue {
    pub(super) fn new(
        about: Option<String>,
        epoch: Option<String>,
        clock: Clock,
        units: Units,
        frames: Vec<Frame>,
        hash: String,
    ) -> Catalogue {
        let named = |(i, frame): (usize, &Frame)| (frame.name.clone(), i);
        Catalogue {
            about,
            epoch,
            clock,
            units,
            hash: hash.into(),
            by_name: frames.iter().enumerate().map(named).collect(),
            parents: frames.iter().map(|frame| frame.parent).collect(),
            frames: frames.into(),
            walks: RwLock::default(),
        }
    }

    /// All frames, in the order of the file.
    pub fn frames(&self) -> &[Frame] {
        &self.frames
    }

    /// A frame by its name.
    ///
    /// # Errors
    /// `unknown_frame`, with names that come close.
    pub fn find(&self, name: &str) -> Result<usize, Fault> {
        self.by_name.get(name).copied().ok_or_else(|| {
            let lower = name.to_lowercase();
            let close = |own: &&Frame| {
                let own = own.name.to_lowercase();
                own.contains(&lower) || lower.contains(&own)
            };
            let close: Vec<&str> = self
                .frames
                .iter()
                .filter(close)
                .map(|f| f.name.as_str())
                .collect();
            let known = if close.is_empty() || name.is_empty() {
                let first: Vec<&str> = self
                    .frames
                    .iter()
                    .take(8)
                    .map(|f| f.name.as_str())
                    .collect();
                format!("the catalogue has {}", listed(&first, self.frames.len()))
            } else {
                format!(
                    "did you mean {}",
                    listed(&close[..close.len().min(8)], close.len())
                )
            };
            let detail = format!("{name:?} is not among the frames of this service; {known}");
            Fault::whole(Code::UnknownFrame, detail)
        })
    }

    /// The way from one frame to another, its constant parts resolved; kept for the next question.
    ///
    /// # Errors
    /// The steps multiply up beyond the precision kept.
    pub fn walk(&self, from: usize, to: usize) -> Result<Arc<Walk>, Fault> {
        let kept = |walks: &HashMap<_, Arc<Walk>>| walks.get(&(from, to)).cloned();
        // A poisoned lock would mean a panic while a map was read or filled; its content is whole.
        if let Some(walk) = kept(
            &self
                .walks
                .read()
                .unwrap_or_else(|poison| poison.into_inner()),
        ) {
            return Ok(walk);
        }
        let (up, down) = tree::way(&self.parents, from, to);
        let walk = Walk::new(self.frames.clone(), self.clock, from, to, &up, &down)
            .map_err(|impossible| Fault::whole(chain::code(&impossible), impossible.to_string()))?;
        let walk = Arc::new(walk);
        let mut walks = self
            .walks
            .write()
            .unwrap_or_else(|poison| poison.into_inner());
        if walks.len() >= WALKS {
            walks.clear();
        }
        walks.insert((from, to), walk.clone());
        Ok(walk)
    }

    /// The times at which a frame's own motion is known; `None` when it is known at all times.
    pub fn valid(&self, frame: usize) -> Option<[Time; 2]> {
        match &self.frames[frame].link {
            Link::Track(track) if !track.extrapolate => Some(track.valid()),
            _ => None,
        }
    }

    /// The children of a frame, in the order of the file; those of `None` are the root.
    pub fn children(&self, frame: Option<usize>) -> impl Iterator<Item = usize> {
        let parents = self.parents.iter().enumerate();
        parents
            .filter(move |(_, parent)| **parent == frame)
            .map(|(i, _)| i)
    }
}

fn listed(names: &[&str], all: usize) -> String {
    let mut text = names.join(", ");
    if all > names.len() {
        text += &format!(" and {} more", all - names.len());
    }
    text
}
