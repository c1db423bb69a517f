//! The way between two frames, prepared once and asked for any number of times.

use std::sync::Arc;

use super::catalogue::{Frame, Link};
use super::sensor::Sensor;
use super::time::{Clock, Time};
use super::track::Track;
use crate::chain;
use crate::document::{Code, Fault, Notice};
use crate::physics::Impossible;
use crate::physics::lorentz::{Change, Step};
use crate::physics::resolved::Resolved;

/// The way from one frame to another; what does not change is already resolved.
#[derive(Debug)]
pub struct Walk {
    frames: Arc<[Frame]>,
    clock: Clock,
    from: usize,
    to: usize,
    legs: Vec<Leg>,
}

/// A part of a way.
#[derive(Debug)]
enum Leg {
    /// Steps that never change.
    Fixed(Arc<Resolved>),
    /// A frame that moves, passed from its parent or (`back`) towards it.
    Moving { frame: usize, back: bool },
}

/// The way at one time.
#[derive(Clone, Debug)]
pub struct Passage {
    /// The whole way, resolved.
    pub way: Arc<Resolved>,
    /// What is to be said about it.
    pub notices: Vec<Notice>,
}

impl Walk {
    pub(super) fn new(
        frames: Arc<[Frame]>,
        clock: Clock,
        from: usize,
        to: usize,
        up: &[usize],
        down: &[usize],
    ) -> Result<Walk, Impossible> {
        let mut legs = Vec::new();
        let mut fixed: Vec<Step> = Vec::new();
        let passed = up
            .iter()
            .map(|i| (*i, true))
            .chain(down.iter().map(|i| (*i, false)));
        for (frame, back) in passed {
            match &frames[frame].link {
                Link::Steps(steps) if back => fixed.extend(chain::inverse(steps.clone())),
                Link::Steps(steps) => fixed.extend(steps.iter().cloned()),
                Link::Track(_) | Link::Turning(_) => {
                    if !fixed.is_empty() {
                        legs.push(Leg::Fixed(Arc::new(Resolved::new(std::mem::take(
                            &mut fixed,
                        ))?)));
                    }
                    legs.push(Leg::Moving { frame, back });
                }
            }
        }
        if !fixed.is_empty() || legs.is_empty() {
            legs.push(Leg::Fixed(Arc::new(Resolved::new(fixed)?)));
        }
        Ok(Walk {
            frames,
            clock,
            from,
            to,
            legs,
        })
    }

    /// The frame where it begins.
    pub fn from(&self) -> &Frame {
        &self.frames[self.from]
    }

    /// The frame where it ends.
    pub fn to(&self) -> &Frame {
        &self.frames[self.to]
    }

    /// What the frame where it begins reads, if that is a sensor.
    pub fn sensor(&self) -> Option<&Sensor> {
        self.from().sensor.as_ref()
    }

    /// Whether it is the same at all times.
    pub fn is_fixed(&self) -> bool {
        self.legs.iter().all(|leg| matches!(leg, Leg::Fixed(_)))
    }

    /// Whether it may pass a track at a time outside it.
    pub fn extrapolates(&self) -> bool {
        self.legs.iter().any(|leg| match leg {
            Leg::Fixed(_) => false,
            Leg::Moving { frame, .. } => self.frames[*frame].extrapolates(),
        })
    }

    /// How times are written.
    pub fn clock(&self) -> Clock {
        self.clock
    }

    /// The way at a time, which a way that never changes does not need.
    ///
    /// # Errors
    /// As for [`Walker::at`].
    pub fn at(self: &Arc<Walk>, time: Option<Time>) -> Result<Passage, Fault> {
        Walker::new(self.clone()).at(time)
    }
}

/// A walk taken at one time after another: it remembers where in the tracks it was.
#[derive(Clone, Debug)]
pub struct Walker {
    walk: Arc<Walk>,
    /// One for each leg.
    hints: Vec<usize>,
}

impl Walker {
    /// At the start of every track.
    pub fn new(walk: Arc<Walk>) -> Walker {
        let hints = vec![0; walk.legs.len()];
        Walker { walk, hints }
    }

    /// The way it takes.
    pub fn walk(&self) -> &Arc<Walk> {
        &self.walk
    }

    /// The way at a time. Times in order cost no search.
    ///
    /// # Errors
    /// `time_needed` without a time on a way that changes, `time_outside_track`, or a motion that
    /// no frame can have (where a track is extrapolated, or γ multiplies up).
    pub fn at(&mut self, time: Option<Time>) -> Result<Passage, Fault> {
        if let [Leg::Fixed(way)] = &self.walk.legs[..] {
            return Ok(Passage {
                way: way.clone(),
                notices: Vec::new(),
            });
        }
        let Some(time) = time else {
            return Err(self.time_needed());
        };
        let mut notices = Vec::new();
        let mut parts: Vec<Arc<Resolved>> = Vec::with_capacity(self.walk.legs.len());
        for (leg, hint) in self.walk.legs.iter().zip(&mut self.hints) {
            parts.push(match leg {
                Leg::Fixed(part) => part.clone(),
                Leg::Moving { frame, back } => {
                    let steps = steps_at(&self.walk, *frame, time, hint, &mut notices)?;
                    let steps = if *back { chain::inverse(steps) } else { steps };
                    Arc::new(Resolved::new(steps).map_err(refuse)?)
                }
            });
        }
        let way = match &parts[..] {
            [part] => part.clone(),
            parts => Arc::new(Resolved::join(parts.iter().map(Arc::as_ref)).map_err(refuse)?),
        };
        Ok(Passage { way, notices })
    }

    fn time_needed(&self) -> Fault {
        let moving = self.walk.legs.iter().filter_map(|leg| match leg {
            Leg::Moving { frame, .. } => Some(format!("{:?}", self.walk.frames[*frame].name)),
            Leg::Fixed(_) => None,
        });
        let detail = format!(
            "the way from {:?} to {:?} changes with time ({} moves); give \"time\", {}",
            self.walk.from().name,
            self.walk.to().name,
            moving.collect::<Vec<_>>().join(", "),
            match self.walk.clock {
                Clock::Calendar => "such as 2031-03-02T05:10:00.25Z",
                Clock::Seconds => "in seconds from the epoch of the catalogue",
            }
        );
        Fault::whole(Code::TimeNeeded, detail)
    }
}

fn refuse(impossible: Impossible) -> Fault {
    Fault::whole(chain::code(&impossible), impossible.to_string())
}

/// The steps from the parent of a moving frame to it.
fn steps_at(
    walk: &Walk,
    frame: usize,
    time: Time,
    hint: &mut usize,
    notices: &mut Vec<Notice>,
) -> Result<Vec<Step>, Fault> {
    let frame = &walk.frames[frame];
    match &frame.link {
        Link::Steps(steps) => Ok(steps.clone()),
        Link::Turning(turning) => Ok(turning.steps(time, &|| frame.pointer("turning"))),
        Link::Track(track) => {
            let sample = track.sample(time, hint);
            let steps = track.steps(&sample, &|| frame.pointer("track"));
            if sample.beyond != 0.0 {
                outside(track, &frame.name, time, sample.beyond, notices)?;
            }
            // An extrapolated speed may pass c, and next to c an interpolated one by rounding.
            for step in &steps {
                if let Change::Boost(motion) = &step.change {
                    motion.check().map_err(refuse)?;
                }
            }
            Ok(steps)
        }
    }
}

/// Refuses a time outside a track, or says that it was extrapolated.
fn outside(
    track: &Track,
    name: &str,
    time: Time,
    beyond: f64,
    notices: &mut Vec<Notice>,
) -> Result<(), Fault> {
    let [first, last] = track.valid().map(|time| time.display(track.clock));
    let (far, end) = if beyond < 0.0 {
        (-beyond, "before the first")
    } else {
        (beyond, "after the last")
    };
    if !track.extrapolate {
        let detail = format!(
            "the motion of {name:?} is known from {first} to {last}; {} is {far} s {end} of these",
            time.display(track.clock)
        );
        return Err(Fault::whole(Code::TimeOutsideTrack, detail));
    }
    notices.push(Notice {
        code: "extrapolated_time",
        detail: format!(
            "the time is {far} s {end} row of the track of {name:?} ({first} to {last}); its motion \
             was extrapolated"
        ),
    });
    Ok(())
}
