//! Boosts: a change to a frame that moves, its axes kept parallel (standard boost).
//!
//! With d the direction as given, of any length, and s = γβ/|d|:
//! E' = E + k (d×E)×d + s c d×B and cB' = cB + k (d×cB)×d − s d×E, k = s²/(γ+1)
//! (Jackson, Classical Electrodynamics, 3rd ed., eq. 11.149, rearranged so that the components
//! along d are never touched and no difference of nearly equal numbers is taken).

use super::big::Big;
use super::constants::SPEED_OF_LIGHT;
use super::double_double::Dd;
use super::error::Impossible;
use super::pure_boost::{Boost, one_less_beta2};
use super::real::{Real, Vec3, exponent_spread, norm2, round, vector};
use super::scale::Scale;

/// The motion of the next frame as seen in the current one, in the form it was given.
#[derive(Clone, Debug, PartialEq)]
pub enum Motion {
    /// A velocity, or β when the scale is one.
    Velocity {
        /// Components in the unit of `beta`.
        value: [f64; 3],
        /// What turns the components into v/c.
        beta: Scale,
    },
    /// The velocity ω×r of a point of a turning rigid body.
    Turning {
        /// ω, on the current axes.
        angular_velocity: [f64; 3],
        /// r, from a point of the axis, on the current axes.
        position: [f64; 3],
        /// What turns the product of the two into v/c.
        beta: Scale,
    },
    /// A direction and the speed β.
    Speed {
        /// Any length.
        direction: [f64; 3],
        /// |β| < 1; a negative one means the opposite direction.
        beta: f64,
    },
    /// A direction and the Lorentz factor γ.
    Gamma {
        /// Any length.
        direction: [f64; 3],
        /// γ ≥ 1.
        gamma: f64,
    },
    /// A direction and the rapidity artanh β.
    Rapidity {
        /// Any length.
        direction: [f64; 3],
        /// A negative one means the opposite direction.
        rapidity: f64,
    },
    /// A direction and the kinetic energy of a particle at rest in the next frame.
    KineticEnergy {
        /// Any length.
        direction: [f64; 3],
        /// In the unit of `ratio`.
        energy: f64,
        /// Rest energy, in the unit of `ratio`.
        rest: f64,
        /// What turns energy/rest into γ−1.
        ratio: Scale,
    },
}

/// Bits that hold any sum of squares of doubles exactly.
const EXACT_BITS: usize = 4608;
/// Bits that tell γ of a speed next to c from another by more than enough.
const GROWTH_BITS: usize = 256;
/// Below this 1−β² is taken from more digits than two doubles have.
pub(super) const SMALL_W: f64 = 0.0625;

impl Motion {
    /// Refuses what no frame can do.
    ///
    /// # Errors
    /// |v| ≥ c (judged exactly), γ < 1, a negative energy, a direction of length zero.
    pub fn check(&self) -> Result<(), Impossible> {
        let below = |what, value, bound| Err(Impossible::BelowRest { what, value, bound });
        match *self {
            Motion::Velocity { .. } | Motion::Turning { .. } => {
                if self.velocity_fits_dd() && self.is_clearly_slower() {
                    return Ok(());
                }
                let w = if self.velocity_fits_dd() {
                    one_less_beta2(&self.velocity::<Dd>(()), self.beta().value(())).to_f64()
                } else {
                    0.0
                };
                if w > SMALL_W {
                    return Ok(());
                }
                let velocity = self.velocity::<Big>(EXACT_BITS);
                // β² < 1 as v² num² < den² (π aside), so that nothing is rounded.
                let beta = self.beta();
                let num = Scale { den: 1, ..beta }.value::<Big>(EXACT_BITS);
                let den = Scale::ratio(beta.den, 1).value::<Big>(EXACT_BITS);
                let speed = norm2(&velocity) * num.square();
                if (den.square() - speed.clone()).is_negative() || speed == den.square() {
                    let times_c = (speed.sqrt() / den).to_f64();
                    return Err(Impossible::FasterThanLight { times_c });
                }
                Ok(())
            }
            Motion::Speed { direction, beta } => {
                if beta.abs() >= 1.0 {
                    let times_c = beta.abs();
                    return Err(Impossible::FasterThanLight { times_c });
                }
                points_somewhere(direction)
            }
            Motion::Gamma { direction, gamma } => {
                if gamma < 1.0 {
                    return below("gamma", gamma, "at least 1");
                }
                points_somewhere(direction)
            }
            Motion::Rapidity { direction, .. } => points_somewhere(direction),
            Motion::KineticEnergy {
                direction,
                energy,
                rest,
                ..
            } => {
                if energy < 0.0 {
                    return below("kinetic_energy", energy, "at least 0");
                }
                if rest <= 0.0 {
                    return below("rest_energy", rest, "above 0");
                }
                points_somewhere(direction)
            }
        }
    }

    /// The boost in the arithmetic R, of a motion that passed [`check`](Self::check).
    pub fn boost<R: Real>(&self, context: R::Context) -> Boost<R> {
        let one = R::new(1.0, context);
        let direction = |d: [f64; 3]| {
            let direction: Vec3<R> = vector(unit_exponent(d), context);
            let length = norm2(&direction).sqrt();
            (direction, length)
        };
        match *self {
            Motion::Velocity { .. } | Motion::Turning { .. } => {
                Boost::by_velocity(self.velocity::<R>(context), self.beta().value(context))
            }
            Motion::Speed { direction: d, beta } => {
                let (direction, length) = direction(d);
                let beta = R::new(beta, context);
                let root = ((one.clone() - beta.clone()) * (one.clone() + beta.clone())).sqrt();
                Boost {
                    direction,
                    stretch: beta / (root.clone() * length),
                    gamma: one / root,
                }
            }
            Motion::Gamma {
                direction: d,
                gamma,
            } => {
                let (direction, length) = direction(d);
                let gamma = R::new(gamma, context);
                let less_one = gamma.clone() - one;
                Boost::along(direction, length, gamma, less_one)
            }
            Motion::KineticEnergy {
                direction: d,
                energy,
                rest,
                ratio,
            } => {
                let (direction, length) = direction(d);
                let less_one =
                    R::new(energy, context) * ratio.value(context) / R::new(rest, context);
                Boost::along(direction, length, less_one.clone() + one, less_one)
            }
            Motion::Rapidity {
                direction: d,
                rapidity,
            } => {
                let (direction, length) = direction(d);
                let rapidity = R::new(rapidity, context);
                let half = rapidity.scale2(-1).sinh();
                Boost {
                    direction,
                    stretch: rapidity.sinh() / length,
                    gamma: half.square().scale2(1) + one,
                }
            }
        }
    }

    /// Whether two doubles hold everything in [`boost`](Self::boost) to full precision.
    pub fn fits_dd(&self) -> bool {
        match *self {
            Motion::Velocity { .. } | Motion::Turning { .. } => {
                self.velocity_fits_dd()
                    && (self.is_clearly_slower()
                        || one_less_beta2(&self.velocity::<Dd>(()), self.beta().value(())).hi
                            > SMALL_W)
            }
            Motion::Speed { beta, .. } => beta == 0.0 || beta.abs() > 1e-60,
            Motion::Gamma { gamma, .. } => gamma < 1e60,
            Motion::Rapidity { rapidity, .. } => {
                rapidity == 0.0 || (1e-60..100.0).contains(&rapidity.abs())
            }
            Motion::KineticEnergy { energy, rest, .. } => {
                let sane = |x: f64| (1e-60..1e60).contains(&x);
                sane(rest) && (energy == 0.0 || sane(energy) && sane(energy / rest))
            }
        }
    }

    /// log2 of γ(1+β), or a little more.
    pub fn growth(&self) -> f64 {
        let of_gamma = |less_one: f64| less_one + 1.0 + (less_one * (less_one + 2.0)).sqrt();
        match self {
            // Not by way of γ, which a number of any size may not hold.
            Motion::Rapidity { rapidity, .. } => rapidity.abs() * std::f64::consts::LOG2_E,
            _ if !self.fits_dd() => {
                self.boost::<Big>(GROWTH_BITS).gamma.exponent().unwrap_or(0) as f64 + 2.0
            }
            Motion::Velocity { .. } | Motion::Turning { .. } => {
                let v = round(&self.velocity::<Dd>(()));
                let beta = libm::hypot(libm::hypot(v[0], v[1]), v[2]) * self.beta().to_f64();
                0.5 * libm::log2((1.0 + beta) / (1.0 - beta))
            }
            Motion::Speed { beta, .. } => 0.5 * libm::log2((1.0 + beta.abs()) / (1.0 - beta.abs())),
            Motion::Gamma { gamma, .. } => libm::log2(of_gamma(gamma - 1.0)),
            Motion::KineticEnergy {
                energy,
                rest,
                ratio,
                ..
            } => libm::log2(of_gamma(energy / rest * ratio.to_f64())),
        }
    }

    /// About how many bits below one the smallest component of β, or of the direction and
    /// γ − 1, lies.
    pub fn depth(&self) -> i64 {
        let below_one = |x: f64| {
            if x == 0.0 {
                0
            } else {
                i64::from(-libm::ilogb(x)).max(0)
            }
        };
        let smallest = |v: &[f64; 3]| v.iter().map(|x| below_one(*x)).max().unwrap_or(0);
        match self {
            Motion::Velocity { value, beta } => smallest(value) + below_one(beta.to_f64()),
            Motion::Turning {
                angular_velocity,
                position,
                beta,
            } => smallest(angular_velocity) + smallest(position) + below_one(beta.to_f64()),
            Motion::Speed { direction, beta } => exponent_spread(*direction) + below_one(*beta),
            Motion::Gamma { direction, gamma } => {
                exponent_spread(*direction) + below_one(gamma - 1.0)
            }
            Motion::Rapidity {
                direction,
                rapidity,
            } => exponent_spread(*direction) + below_one(*rapidity),
            Motion::KineticEnergy {
                direction,
                energy,
                rest,
                ..
            } => exponent_spread(*direction) + exponent_spread([*energy, *rest]),
        }
    }

    fn velocity_fits_dd(&self) -> bool {
        let sane = |x: &f64| *x == 0.0 || (1e-60..1e60).contains(&x.abs());
        match self {
            Motion::Velocity { value, .. } => value.iter().all(sane),
            Motion::Turning {
                angular_velocity,
                position,
                ..
            } => angular_velocity.iter().chain(position).all(sane),
            _ => true,
        }
    }

    /// Whether β is so far below one that plain doubles can tell 1−β² to be above [`SMALL_W`].
    fn is_clearly_slower(&self) -> bool {
        let [x, y, z] = match *self {
            Motion::Velocity { value, .. } => value,
            Motion::Turning {
                angular_velocity: [a, b, c],
                position: [x, y, z],
                ..
            } => [b * z - c * y, c * x - a * z, a * y - b * x],
            _ => return false,
        };
        (x * x + y * y + z * z).sqrt() * self.beta().to_f64() < 0.9
    }

    /// The velocity in its own unit.
    fn velocity<R: Real>(&self, context: R::Context) -> Vec3<R> {
        match self {
            Motion::Velocity { value, .. } => vector(*value, context),
            Motion::Turning {
                angular_velocity,
                position,
                ..
            } => {
                let omega: Vec3<R> = vector(*angular_velocity, context);
                let r: Vec3<R> = vector(*position, context);
                // Not by `cross`: what is left where the two are nearly parallel counts in full.
                std::array::from_fn(|i| {
                    let (j, k) = ((i + 1) % 3, (i + 2) % 3);
                    omega[j].clone() * r[k].clone() - omega[k].clone() * r[j].clone()
                })
            }
            _ => vector([0.0; 3], context),
        }
    }

    pub(super) fn beta(&self) -> Scale {
        match self {
            Motion::Velocity { beta, .. } | Motion::Turning { beta, .. } => *beta,
            _ => Scale::ONE,
        }
    }

    /// The scale to v/c of a velocity whose unit has this scale to m/s.
    pub fn to_beta(velocity: Scale) -> Scale {
        velocity.over(Scale::ratio(SPEED_OF_LIGHT, 1))
    }
}

fn points_somewhere(direction: [f64; 3]) -> Result<(), Impossible> {
    if direction == [0.0; 3] {
        return Err(Impossible::NoDirection { what: "direction" });
    }
    Ok(())
}

/// The same direction, its largest component brought between 1 and 2 by a power of two.
pub(crate) fn unit_exponent(d: [f64; 3]) -> [f64; 3] {
    let largest = d.iter().fold(0.0f64, |m, x| m.max(x.abs()));
    if largest == 0.0 {
        return d;
    }
    // In two halves: the power may be past the range of doubles.
    let n = -libm::ilogb(largest);
    d.map(|x| libm::scalbn(libm::scalbn(x, n / 2), n - n / 2))
}
