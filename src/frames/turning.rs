//! A frame that turns at a constant rate.

use super::time::Time;
use crate::physics::Impossible;
use crate::physics::boost::Motion;
use crate::physics::lorentz::{Change, Step};
use crate::physics::rotation::Turn;
use crate::physics::scale::Scale;
use crate::physics::spin::Spin;

/// A steady turn about ω: by phase + |ω|(t − epoch). A point of the turning body moves with ω×r.
#[derive(Clone, Debug, PartialEq)]
pub struct Turning {
    /// ω, on the axes of the parent; the axes of the frame share its direction.
    pub angular_velocity: [f64; 3],
    /// What turns ω into rad/s.
    pub rate: Scale,
    /// When the axes have turned by `phase`.
    pub epoch: Time,
    /// The angle at the epoch.
    pub phase: f64,
    /// What turns the phase into radians.
    pub radians: Scale,
    /// From a point on the axis to the origin of the frame, on the frame's own axes.
    pub position: Option<[f64; 3]>,
    /// What turns ω×r into v/c.
    pub beta: Scale,
}

impl Turning {
    /// Refuses what no frame can do.
    ///
    /// # Errors
    /// ω vanishes, or the point moves at the speed of light or faster.
    pub fn check(&self) -> Result<(), Impossible> {
        self.turn(self.epoch).check()?;
        self.motion().map_or(Ok(()), |motion| motion.check())
    }

    /// The steps from the parent to the frame: the turn, then the boost of the point, whose
    /// velocity stands on the turned axes.
    pub fn steps(&self, time: Time) -> Vec<Step> {
        let turn = Change::Rotate(self.turn(time));
        let boost = self.motion().map(Change::Boost);
        std::iter::once(turn)
            .chain(boost)
            .map(Step::exact)
            .collect()
    }

    fn turn(&self, time: Time) -> Turn {
        Turn::Spinning(Spin {
            angular_velocity: self.angular_velocity,
            rate: self.rate,
            phase: self.phase,
            radians: self.radians,
            elapsed: time.since(self.epoch),
        })
    }

    fn motion(&self) -> Option<Motion> {
        self.position.map(|position| Motion::Turning {
            angular_velocity: self.angular_velocity,
            position,
            beta: self.beta,
        })
    }
}
