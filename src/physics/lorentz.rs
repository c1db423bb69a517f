//! The net Lorentz transformation of a chain of boosts and rotations, split as
//! Λ = rotation · boost: first the boost as seen in the source axes, then the turn.
//!
//! Chains are composed as complex quaternions acting on E + icB (a boost is a rotation by an
//! imaginary angle: Silberstein, Phil. Mag. 23 (1912) 790). The quaternion keeps the digits of
//! small and large speeds side by side, which a 4×4 matrix does not.

use std::sync::Arc;

use nalgebra::Matrix4;

use super::boost::Motion;
use super::double_double::Dd;
use super::pure_boost::Boost;
use super::quaternion::Quaternion;
use super::real::Real;
use super::rotation::Turn;
use super::uncertain::UncertainStep;

/// One step of a way, from the current frame to the next.
#[derive(Clone, Debug, PartialEq)]
pub struct Step {
    /// What changes.
    pub change: Change,
    /// Whether the step is taken backwards.
    pub inverse: bool,
    /// Its errors; `None` when it is exact.
    pub uncertainty: Option<Arc<UncertainStep>>,
}

impl Step {
    /// A change that is known exactly.
    pub fn exact(change: Change) -> Step {
        Step {
            change,
            inverse: false,
            uncertainty: None,
        }
    }

    /// The step taken the other way.
    pub fn undone(self) -> Step {
        Step {
            inverse: !self.inverse,
            ..self
        }
    }
}

/// What a step changes: the state of motion or the axes.
#[derive(Clone, Debug, PartialEq)]
pub enum Change {
    /// To a frame that moves, axes parallel.
    Boost(Motion),
    /// To axes that are turned.
    Rotate(Turn),
}

impl Change {
    /// Whether it changes the state of motion.
    pub fn moves(&self) -> bool {
        matches!(self, Change::Boost(_))
    }

    /// Whether two doubles hold the step to full precision.
    pub fn fits_dd(&self) -> bool {
        match self {
            Change::Boost(motion) => motion.fits_dd(),
            Change::Rotate(turn) => turn.fits_dd(),
        }
    }

    /// log2 of γ(1+β), by which the step can multiply a field, or a little more.
    pub fn growth(&self) -> f64 {
        match self {
            Change::Boost(motion) => motion.growth(),
            Change::Rotate(_) => 0.0,
        }
    }

    /// About how many bits below one the smallest number of the step lies.
    pub fn depth(&self) -> i64 {
        match self {
            Change::Boost(motion) => motion.depth(),
            Change::Rotate(turn) => turn.depth(),
        }
    }
}

/// A net transformation in the arithmetic R.
#[derive(Clone, Debug)]
pub struct Net<R> {
    /// The boost as seen in the source axes; `None` when no step moves.
    pub boost: Option<Boost<R>>,
    /// The turn after it; `None` when no axes turn.
    pub turn: Option<Quaternion<R>>,
    /// Whether the direction of the boost is still the one given, to the last bit.
    pub direction_as_given: bool,
}

impl Net<Dd> {
    /// The transformation that changes nothing.
    pub const IDENTITY: Net<Dd> = Net {
        boost: None,
        turn: None,
        direction_as_given: true,
    };
}

impl<R: Real> Net<R> {
    /// Composes steps that passed their checks.
    pub fn of<'s>(steps: impl IntoIterator<Item = &'s Step>, context: R::Context) -> Net<R> {
        let mut net = Net {
            boost: None,
            turn: None,
            direction_as_given: true,
        };
        for step in steps {
            net = match &step.change {
                Change::Boost(motion) => {
                    let boost = motion.boost(context);
                    net.then_boost(if step.inverse { boost.inverse() } else { boost })
                }
                Change::Rotate(turn) => {
                    let turn = turn.quaternion(context);
                    net.then_turn(if step.inverse { turn.conjugate() } else { turn })
                }
            };
        }
        net
    }

    /// This transformation, then another.
    pub fn then(self, next: &Net<R>) -> Net<R> {
        if self.boost.is_none() && self.turn.is_none() {
            return next.clone();
        }
        let moved = match &next.boost {
            Some(boost) => self.then_boost(boost.clone()),
            None => self,
        };
        match &next.turn {
            Some(turn) => moved.then_turn(turn.clone()),
            None => moved,
        }
    }

    fn then_turn(self, turn: Quaternion<R>) -> Net<R> {
        // The new turn is about axes already turned: it stands on the right.
        let turn = match &self.turn {
            Some(before) => before.times(&turn),
            None => turn,
        };
        Net {
            turn: Some(normalised(turn)),
            ..self
        }
    }

    fn then_boost(self, boost: Boost<R>) -> Net<R> {
        if self.boost.is_none() && self.turn.is_none() {
            return Net {
                boost: Some(boost),
                ..self
            };
        }
        if let (None, Some(turn)) = (&self.boost, &self.turn) {
            return Net {
                boost: Some(before_turn(boost, turn)),
                direction_as_given: false,
                ..self
            };
        }
        let first = self.boost.as_ref().map(Spinor::of_boost);
        let turn = self.turn.map(Spinor::of_turn);
        let second = Spinor::of_boost(&boost);
        let second = match turn {
            Some(turn) => second.after(&turn),
            None => second,
        };
        let all = match first {
            Some(first) => second.after(&first),
            None => second,
        };
        let (boost, turn) = all.split();
        Net {
            boost: Some(boost),
            turn: Some(normalised(turn)),
            direction_as_given: false,
        }
    }

    /// The transformation back, to be used where this one ends.
    pub fn inverse(self) -> Net<R> {
        let boost = self.boost.map(Boost::inverse);
        let turn = self.turn.map(|turn| turn.conjugate());
        let back = Net {
            boost: None,
            turn,
            direction_as_given: true,
        };
        match boost {
            Some(boost) => back.then_boost(boost),
            None => back,
        }
    }

    /// The same to the precision of two doubles.
    pub fn to_dd(&self) -> Net<Dd> {
        Net {
            boost: self.boost.as_ref().map(Boost::to_dd),
            turn: self.turn.as_ref().map(Quaternion::to_dd),
            direction_as_given: self.direction_as_given,
        }
    }

    /// Λ with v' = Λ v for v = (ct, x, y, z), rounded to doubles.
    pub fn matrix(&self, context: R::Context) -> Matrix4<f64> {
        let one = R::new(1.0, context);
        let zero = R::new(0.0, context);
        let mut rows: [[R; 4]; 4] = std::array::from_fn(|i| {
            std::array::from_fn(|j| if i == j { one.clone() } else { zero.clone() })
        });
        if let Some(boost) = &self.boost {
            let gamma_beta = boost.gamma_beta();
            let (k, d) = (boost.curvature(), &boost.direction);
            rows[0][0] = boost.gamma.clone();
            for i in 0..3 {
                rows[0][i + 1] = -gamma_beta[i].clone();
                rows[i + 1][0] = -gamma_beta[i].clone();
                for j in 0..3 {
                    let element = k.clone() * d[i].clone() * d[j].clone();
                    rows[i + 1][j + 1] = rows[i + 1][j + 1].clone() + element;
                }
            }
        }
        if let Some(turn) = &self.turn {
            let m = turn.matrix();
            let before = rows.clone();
            for i in 0..3 {
                for j in 0..4 {
                    let term = |k: usize| m[i][k].clone() * before[k + 1][j].clone();
                    rows[i + 1][j] = term(0) + term(1) + term(2);
                }
            }
        }
        Matrix4::from_fn(|i, j| rows[i][j].to_f64() + 0.0)
    }
}

/// A boost that follows a turn, as seen on the axes before it: the same along a direction turned
/// back.
#[inline(always)]
pub(super) fn before_turn<R: Real>(boost: Boost<R>, turn: &Quaternion<R>) -> Boost<R> {
    Boost {
        direction: turn.carry(&boost.direction),
        stretch: boost.stretch / turn.norm2(),
        ..boost
    }
}

/// Scales a quaternion by a power of two so that long chains stay in range.
#[inline(always)]
pub(super) fn normalised<R: Real>(q: Quaternion<R>) -> Quaternion<R> {
    let n = q.norm2().exponent().map_or(0, |e| -(e / 2)) as i32;
    if n == 0 {
        q
    } else {
        Quaternion {
            w: q.w.scale2(n),
            v: q.v.map(|x| x.scale2(n)),
        }
    }
}

/// A complex quaternion re + i·im and its norm q q̃, a positive real number here: it acts as
/// F' = q F q̃ / norm on F = E + icB.
struct Spinor<R> {
    re: Quaternion<R>,
    im: Quaternion<R>,
    norm: R,
}

impl<R: Real> Spinor<R> {
    /// (γ+1) − iγβ, of norm (γ+1)² − γ²β² = 2(γ+1).
    fn of_boost(boost: &Boost<R>) -> Spinor<R> {
        let zero = boost.gamma.of(0.0);
        let sum = boost.gamma.clone() + boost.gamma.of(1.0);
        let zeros = [zero.clone(), zero.clone(), zero.clone()];
        Spinor {
            re: Quaternion {
                w: sum.clone(),
                v: zeros,
            },
            im: Quaternion {
                w: zero,
                v: boost.gamma_beta().map(|x| -x),
            },
            norm: sum.scale2(1),
        }
    }

    /// The conjugate of the turn: components turn the other way than the axes.
    fn of_turn(turn: Quaternion<R>) -> Spinor<R> {
        let norm = turn.norm2();
        let zero = norm.of(0.0);
        let zeros = [zero.clone(), zero.clone(), zero.clone()];
        Spinor {
            re: turn.conjugate(),
            im: Quaternion { w: zero, v: zeros },
            norm,
        }
    }

    /// This one after `first`.
    fn after(&self, first: &Spinor<R>) -> Spinor<R> {
        let combine = |a: Quaternion<R>, b: Quaternion<R>, minus: bool| {
            let join = |x: R, y: R| if minus { x - y } else { x + y };
            let [a0, a1, a2] = a.v;
            let [b0, b1, b2] = b.v;
            Quaternion {
                w: join(a.w, b.w),
                v: [join(a0, b0), join(a1, b1), join(a2, b2)],
            }
        };
        Spinor {
            re: combine(self.re.times(&first.re), self.im.times(&first.im), true),
            im: combine(self.re.times(&first.im), self.im.times(&first.re), false),
            norm: self.norm.clone() * first.norm.clone(),
        }
    }

    /// The boost, and the turn after it. With q = √norm·r·(cosh η/2 − i n sinh η/2), the turn
    /// is the conjugate of Re q, and conj(Re q)·Im q = −norm·n·cosh(η/2) sinh(η/2).
    fn split(&self) -> (Boost<R>, Quaternion<R>) {
        let direction = self.re.conjugate().times(&self.im).v.map(|x| -x);
        let gamma_less_one = (self.im.norm2() / self.norm.clone()).scale2(1);
        let gamma = gamma_less_one.clone() + gamma_less_one.of(1.0);
        let stretch = gamma.of(2.0) / self.norm.clone();
        // The length of the direction is free: keep it near one.
        let n = direction.iter().filter_map(R::exponent).max().unwrap_or(0) as i32;
        let direction = direction.map(|x| x.scale2(-n));
        let stretch = stretch.scale2(n);
        (
            Boost {
                direction,
                stretch,
                gamma,
            },
            self.re.conjugate(),
        )
    }
}
