//! What drawn errors of a step change: the step with errors is the step without them, then a
//! transformation D of small but finite size, D = L̃ L⁻¹.
//!
//! For two velocities with γβ = g and g̃, p = γ+1 and p̃, D has Re U = g̃×g, Im U = p̃g − pg̃ and
//! w = p̃p − g̃·g, up to a common factor: the product of their complex quaternions (see
//! [`lorentz`](crate::physics::lorentz)). Below they are rearranged so that no difference of
//! nearly equal numbers is taken.

use super::finite::Finite;
use super::half;
use super::lanes::{Lanes, WIDTH, add, cross, dot, product, scale, vector};

/// A step with errors, ready for draws.
#[derive(Clone, Debug)]
pub(super) enum Change {
    /// A velocity v/c.
    Velocity {
        /// The exact one.
        exact: Velocity,
        /// Turns draws into errors of v/c.
        root: [[f64; 3]; 3],
    },
    /// The velocity ω×r/c.
    Turning {
        /// The exact one.
        exact: Velocity,
        /// ω/c.
        angular_velocity: [f64; 3],
        /// r.
        position: [f64; 3],
        /// Turn draws into errors of ω/c and of r.
        roots: [[[f64; 3]; 3]; 2],
    },
    /// A direction and a speed.
    Directed {
        /// The exact ones.
        exact: Directed,
        /// Standard uncertainty of β, γ − 1 or the rapidity.
        value: f64,
        /// Standard uncertainty of the direction in rad about each of two axes.
        direction: f64,
    },
    /// Small turns of the axes; of a turn taken backwards they come before it, with minus signs.
    Axes {
        /// Turns draws into angles in rad.
        root: [[f64; 3]; 3],
    },
}

/// A velocity without errors.
#[derive(Clone, Copy, Debug)]
pub(super) struct Velocity {
    /// β.
    pub beta: [f64; 3],
    /// γ.
    pub gamma: f64,
}

/// A direction and a speed without errors.
#[derive(Clone, Copy, Debug)]
pub(super) struct Directed {
    /// Unit vector of the direction and two perpendicular to it and each other.
    pub axes: [[f64; 3]; 3],
    /// sinh and cosh of half the rapidity along the direction.
    pub half: [f64; 2],
    /// The quantity that has the error.
    pub speed: Speed,
}

/// The quantity that gives a speed.
#[derive(Clone, Copy, Debug)]
pub(super) enum Speed {
    /// β; γ beside it.
    Beta {
        /// β along the direction.
        beta: f64,
        /// γ.
        gamma: f64,
    },
    /// γ, or γ − 1 as a ratio of energies; −1 takes the speed backwards.
    Gamma {
        /// 1 or −1.
        sign: f64,
    },
    /// The rapidity.
    Rapidity,
}

impl Change {
    /// How many independent draws it takes.
    pub(super) fn draws(&self) -> usize {
        match self {
            Change::Turning { .. } => 6,
            _ => 3,
        }
    }

    /// The transformation that these draws give.
    #[inline(always)]
    pub(super) fn draw(&self, draws: &[Lanes]) -> Finite {
        let three = |first: usize| [draws[first], draws[first + 1], draws[first + 2]];
        match self {
            Change::Velocity { exact, root } => exact.change(&product(root, &three(0))),
            Change::Turning {
                exact,
                angular_velocity,
                position,
                roots,
            } => {
                let turning = product(&roots[0], &three(0));
                let moved = product(&roots[1], &three(3));
                let whole = add(&moved, &vector(*position));
                let by_turning = cross(&turning, &whole);
                let by_place = cross(&vector(*angular_velocity), &moved);
                exact.change(&add(&by_turning, &by_place))
            }
            Change::Directed {
                exact,
                value,
                direction,
            } => exact.change(
                draws[0] * *value,
                [draws[1] * *direction, draws[2] * *direction],
            ),
            Change::Axes { root } => {
                let (sines, cosine) = half::turn(&product(root, &three(0)));
                Finite {
                    turn: sines.map(|x| -x),
                    boost: vector([0.0; 3]),
                    scalar: cosine,
                    twice_inverse: Lanes::all(2.0),
                    possible: [true; WIDTH],
                }
            }
        }
    }
}

impl Velocity {
    /// D for an error δ of β, multiplied through by s = γ/γ̃: with x = γ²(2β·δ + δ²) and
    /// s = √(1−x), U = γ²δ×β − i(γ(γ+1)δ + γx/(1+s) β), w = 1 − γ²β·δ + γ + s(γ+1) and
    /// N = 4(γ+1)s(γ+s).
    #[inline(always)]
    fn change(&self, error: &[Lanes; 3]) -> Finite {
        let Velocity { beta, gamma } = *self;
        let (beta, gamma2) = (vector(beta), gamma * gamma);
        let along = dot(&beta, error) * gamma2;
        let x = along * 2.0 + dot(error, error) * gamma2;
        let possible = x.0.map(|x| x < 1.0);
        // Any value does in a lane that is not used.
        let x = x.map(|x| if x < 1.0 { x } else { 0.0 });
        let s = (Lanes::all(1.0) - x).sqrt();
        let own = x * gamma / (s + 1.0);
        let turn = scale(Lanes::all(gamma2), &cross(error, &beta));
        let minus = -(gamma * (gamma + 1.0));
        let boost = add(&scale(Lanes::all(minus), error), &scale(-own, &beta));
        Finite {
            turn,
            boost,
            scalar: s * (gamma + 1.0) - along + (gamma + 1.0),
            twice_inverse: Lanes::all(0.5 / (gamma + 1.0)) / (s * (s + gamma)),
            possible,
        }
    }
}

impl Directed {
    /// D with N = 1: for n, ñ and half rapidities of sinh s, s̃ and cosh c, c̃,
    /// U = s s̃ ñ×n − i(S n + c s̃(ñ−n)) and w = C + s s̃(1−ñ·n), with S = sinh of half the
    /// difference of the rapidities and C its cosh.
    #[inline(always)]
    fn change(&self, value: Lanes, angles: [Lanes; 2]) -> Finite {
        let [s, c] = self.half;
        let [n, across, other] = self.axes;
        let (n, across, other) = (vector(n), vector(across), vector(other));
        let (difference, possible) = self.difference(value);
        let cosh = (difference * difference + 1.0).sqrt();
        let drawn = cosh * s + difference * c;
        // Turned about `across` the direction goes towards −`other`.
        let zero = Lanes::all(0.0);
        let ([first, second, _], cosine) = half::turn(&[angles[0], angles[1], zero]);
        let tangent = add(&scale(second, &across), &scale(-first, &other));
        let size2 = first * first + second * second;
        let sideways = add(&scale(cosine * 2.0, &tangent), &scale(size2 * -2.0, &n));
        let turn = scale(drawn * s, &cross(&sideways, &n));
        let boost = add(&scale(-difference, &n), &scale(drawn * -c, &sideways));
        Finite {
            turn,
            boost,
            scalar: cosh + drawn * s * size2 * 2.0,
            twice_inverse: Lanes::all(2.0),
            possible,
        }
    }

    /// sinh of half the difference of the rapidities, and whether the speed exists.
    #[inline(always)]
    fn difference(&self, value: Lanes) -> (Lanes, [bool; WIDTH]) {
        match self.speed {
            Speed::Beta { beta, gamma } => {
                let x = (value + 2.0 * beta) * value * (gamma * gamma);
                let possible = std::array::from_fn(|i| x.0[i] < 1.0);
                let x = x.map(|x| if x < 1.0 { x } else { 0.0 });
                let sinh = value * (gamma * gamma) / (Lanes::all(1.0) - x).sqrt();
                let cosh = (sinh * sinh + 1.0).sqrt();
                (sinh / ((cosh + 1.0) * 2.0).sqrt(), possible)
            }
            Speed::Gamma { sign } => {
                let [s, c] = [self.half[0] * sign, self.half[1]];
                let square = value * 0.5 + s * s;
                let possible = square.0.map(|x| x >= 0.0);
                let drawn = square.map(|x| x.max(0.0)).sqrt();
                let sum = drawn * c + (drawn * drawn + 1.0).sqrt() * s;
                let ratio = value * (0.5 * sign) / sum;
                // At rest before and after, 0/0.
                let ratio = Lanes(std::array::from_fn(|i| {
                    if sum.0[i] == 0.0 { 0.0 } else { ratio.0[i] }
                }));
                (ratio, possible)
            }
            Speed::Rapidity => (half::rapidity(value), [true; WIDTH]),
        }
    }
}
