//! A turn that goes on at a constant rate.

use super::double_double::Dd;
use super::error::Impossible;
use super::quaternion::Quaternion;
use super::real::{Real, dot, exponent_spread, norm2, round, vector};
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

    /// How small angles about the turned axes, in rad, follow from errors of ω and of the phase:
    /// a row for each angle, a column for each component of ω in its unit, and one for the phase.
    ///
    /// With n = ω/|ω| and the whole angle θ they are n δθ + sin θ δn − (1 − cos θ) n×δn, the right
    /// Jacobian of the rotation vector (Chirikjian, Stochastic Models, Information Theory, and Lie
    /// Groups 2, 2012, §10.3).
    pub fn angle_sensitivities(&self) -> [[f64; 4]; 3] {
        let turn = self.quaternion::<Dd>(());
        let omega = vector::<Dd>(self.angular_velocity, ());
        let length = norm2(&omega).sqrt();
        let n = round(&omega.map(|x| x / length));
        let along = dot(&turn.v, &omega) / length;
        let two = Dd::from_f64(2.0);
        let sin = (two * turn.w * along / turn.norm2()).to_f64();
        let versine = (two * norm2(&turn.v) / turn.norm2()).to_f64();
        let length = length.to_f64();
        let turned = (self.rate.value::<Dd>(()) * self.elapsed).to_f64();
        let across = |i: usize, j: usize| -> f64 {
            // (n×e_j)_i
            match (3 + i - j) % 3 {
                0 => 0.0,
                1 => n[(j + 2) % 3],
                _ => -n[(j + 1) % 3],
            }
        };
        let per_omega = |i: usize, j: usize| {
            let own = if i == j { 1.0 } else { 0.0 };
            let tilt = sin * (own - n[i] * n[j]) - versine * across(i, j);
            n[i] * n[j] * turned + tilt / length
        };
        let radians = self.radians.to_f64();
        std::array::from_fn(|i| {
            std::array::from_fn(|j| {
                if j < 3 {
                    per_omega(i, j)
                } else {
                    n[i] * radians
                }
            })
        })
    }
}
