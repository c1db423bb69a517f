//! A frame that turns at a constant rate.

use std::sync::Arc;

use super::time::Time;
use crate::physics::boost::Motion;
use crate::physics::covariance::Covariance;
use crate::physics::lorentz::{Change, Step};
use crate::physics::rotation::Turn;
use crate::physics::scale::Scale;
use crate::physics::spin::Spin;
use crate::physics::uncertain::{Errors, UncertainStep};
use crate::physics::{Dd, Impossible, Real};

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
    /// Its errors; `None` when it is exact.
    pub uncertainty: Option<Box<UncertainTurning>>,
}

/// The errors of a steady turn.
#[derive(Clone, Debug, PartialEq)]
pub struct UncertainTurning {
    /// Of ω, in its unit.
    pub angular_velocity: Covariance<3>,
    /// Standard uncertainty of the phase, in its unit.
    pub phase: f64,
    /// Of the position, in its unit.
    pub position: Covariance<3>,
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
    /// velocity stands on the turned axes. `source` is what a budget calls their errors.
    pub fn steps(&self, time: Time, source: &dyn Fn() -> String) -> Vec<Step> {
        let uncertain = |errors| {
            let source = source();
            Arc::new(UncertainStep { errors, source })
        };
        let mut turn = Step::exact(Change::Rotate(self.turn(time)));
        turn.uncertainty = self.angle_errors(time).map(uncertain);
        let mut steps = vec![turn];
        if let Some(motion) = self.motion() {
            let mut boost = Step::exact(Change::Boost(motion));
            boost.uncertainty = self.uncertainty.as_ref().map(|errors| {
                uncertain(Errors::Turning {
                    angular_velocity: errors.angular_velocity.clone(),
                    position: errors.position.clone(),
                })
            });
            steps.push(boost);
        }
        steps
    }

    /// The errors of the angle and of the axis as small angles about the turned axes. What they
    /// share with those of the velocity of a point is left out: steps are independent.
    fn angle_errors(&self, time: Time) -> Option<Errors> {
        let errors = self.uncertainty.as_ref()?;
        let by = self.spin(time).angle_sensitivities();
        let omega = errors.angular_velocity.matrix::<Dd>(());
        let phase = Dd::from_f64(errors.phase) * Dd::from_f64(errors.phase);
        let element = |i: usize, j: usize| {
            let term =
                |k: usize, l: usize, x: Dd| Dd::from_f64(by[i][k]) * x * Dd::from_f64(by[j][l]);
            let pairs = (0..9).map(|n| term(n / 3, n % 3, omega[n / 3][n % 3]));
            pairs.fold(term(3, 3, phase), |sum, x| sum + x).to_f64()
        };
        let matrix = std::array::from_fn(|i| std::array::from_fn(|j| element(i.min(j), i.max(j))));
        Some(Errors::Axes {
            angles: Covariance::of_matrix(matrix).ok()?,
            radians: Scale::ONE,
        })
    }

    fn turn(&self, time: Time) -> Turn {
        Turn::Spinning(self.spin(time))
    }

    fn spin(&self, time: Time) -> Spin {
        Spin {
            angular_velocity: self.angular_velocity,
            rate: self.rate,
            phase: self.phase,
            radians: self.radians,
            elapsed: time.since(self.epoch),
        }
    }

    fn motion(&self) -> Option<Motion> {
        self.position.map(|position| Motion::Turning {
            angular_velocity: self.angular_velocity,
            position,
            beta: self.beta,
        })
    }
}
