//! A turn that goes on at a constant rate.

use super::double_double::Dd;
use super::error::Impossible;
use super::quaternion::Quaternion;
use super::real::{Real, exponent_spread, norm2, vector};
use super::rotation::{about_axis, half_of_quarters};
use super::scale::Scale;

/// A turn by phase + |ω|·elapsed about ω.
#[derive(Clone, Debug, PartialEq)]
pub struct Spin {
    /// ω, in the unit of `rate`.
    pub angular_velocity: [f64; 3],
    /// What turns ω into rad/s.
    pub rate: Scale,
    /// The angle at the start, in the unit of `radians`.
    pub phase: f64,
    /// What turns the phase into radians.
    pub radians: Scale,
    /// Seconds since the start.
    pub elapsed: Dd,
}

/// Up to this many quarter turns two doubles keep the digits that count.
const MANY_QUARTERS: f64 = 1e12;

impl Spin {
    /// Refuses what has no axis.
    ///
    /// # Errors
    /// ω vanishes.
    pub fn check(&self) -> Result<(), Impossible> {
        if self.angular_velocity == [0.0; 3] {
            return Err(Impossible::NoDirection {
                what: "angular_velocity",
            });
        }
        Ok(())
    }

    /// Whether two doubles hold everything in [`quaternion`](Self::quaternion).
    pub fn fits_dd(&self) -> bool {
        let sane = |x: &f64| *x == 0.0 || (1e-60..1e60).contains(&x.abs());
        self.angular_velocity.iter().all(sane) && self.slack() < MANY_QUARTERS
    }

    /// About how many bits below one its smallest number lies.
    pub(super) fn depth(&self) -> i64 {
        exponent_spread(self.angular_velocity)
    }

    /// By how much the error of the turn exceeds that of the arithmetic: whole quarter turns are
    /// counted off after they were multiplied up.
    pub fn slack(&self) -> f64 {
        self.quarters::<Dd>(()).hi.abs().max(1.0)
    }

    /// The angle in quarter turns.
    fn quarters<R: Real>(&self, context: R::Context) -> R {
        let quarter = Scale::pi(1, 2);
        let omega = norm2(&vector::<R>(self.angular_velocity, context)).sqrt();
        let elapsed = R::new(self.elapsed.hi, context) + R::new(self.elapsed.lo, context);
        let turned = omega * self.rate.over(quarter).value(context) * elapsed;
        let phase = R::new(self.phase, context) * self.radians.over(quarter).value(context);
        turned + phase
    }

    /// The turn as a quaternion, of a spin that passed [`check`](Self::check).
    pub fn quaternion<R: Real>(&self, context: R::Context) -> Quaternion<R> {
        let quarters = self.quarters::<R>(context);
        let whole = quarters.to_f64().round();
        let rest = (quarters - R::new(whole, context)) * R::pi(context).scale2(-1);
        let half = half_of_quarters(rest, (whole % 4.0) as i32);
        about_axis(self.angular_velocity, half, context)
    }
}
