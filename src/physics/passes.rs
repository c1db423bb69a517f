//! The ways of many rows, composed step by step: each step is one pass over all of them.
//!
//! What a pass does to a row is what [`Net::of`](super::lorentz::Net::of) does to a single
//! reading; a row that needs more digits than two doubles have is given up.

use super::boost::SMALL_W;
use super::double_double::{Arithmetic, COS_DIVISORS, Dd, DoubleDouble, SIN_DIVISORS};
use super::field::Kernel;
use super::fields::Fields;
use super::given::Given;
use super::lanes::{Boosts, LANES, Lanes, Numbers, Turns, lanes, tame};
use super::lorentz::{Change, before_turn, normalised};
use super::pure_boost::{Boost, one_less_beta2};
use super::quaternion::Quaternion;
use super::real::{Real, Vec3, vector};
use super::restated::{Answers, Units};
use super::rotation::{ROUNDING_LIMIT, Turn, advance_half, split_quarters, unit_axis};
use super::rows::{Motions, RowChange, RowStep};
use super::scale::Scale;

/// A step, made ready.
#[derive(Clone, Debug)]
pub(super) enum Pass {
    /// The same boost for every row.
    Boost(Boost<Dd>),
    /// By the velocity of the row.
    Velocity { beta: Dd, inverse: bool },
    /// The same turn for every row, with what [`Turn::slack`] says of it.
    Turn(Quaternion<Dd>, f64),
    /// By the quaternion of the row.
    Quaternion { inverse: bool },
    /// By the angle of the row.
    Angle {
        axis: Vec3<Dd>,
        length: Dd,
        radians: Scale,
        inverse: bool,
    },
}

/// The passes of a way that two doubles hold; `None` when they do not, or when more than one
/// step moves.
pub(super) fn passes(steps: &[RowStep]) -> Option<Vec<Pass>> {
    let moves = |step: &&RowStep| match &step.change {
        RowChange::Fixed(change) => change.moves(),
        RowChange::Velocity { .. } => true,
        RowChange::Quaternion | RowChange::Angle { .. } => false,
    };
    if steps.iter().filter(moves).count() > 1 {
        return None;
    }
    steps.iter().map(Pass::of).collect()
}

impl Pass {
    fn of(step: &RowStep) -> Option<Pass> {
        let inverse = step.inverse;
        let pass = match &step.change {
            RowChange::Fixed(change) if !change.fits_dd() => return None,
            RowChange::Fixed(Change::Boost(motion)) => {
                let boost = motion.boost::<Dd>(());
                Pass::Boost(if inverse { boost.inverse() } else { boost })
            }
            RowChange::Fixed(Change::Rotate(turn)) => {
                let quaternion = turn.quaternion::<Dd>(());
                let quaternion = if inverse {
                    quaternion.conjugate()
                } else {
                    quaternion
                };
                Pass::Turn(quaternion, turn.slack())
            }
            RowChange::Velocity { beta } => Pass::Velocity {
                beta: beta.value(()),
                inverse,
            },
            RowChange::Quaternion => Pass::Quaternion { inverse },
            RowChange::Angle { axis, radians } => {
                let (axis, length) = unit_axis::<Dd>(*axis, ());
                Pass::Angle {
                    axis,
                    length,
                    radians: *radians,
                    inverse,
                }
            }
        };
        pass.is_tame().then_some(pass)
    }

    fn is_tame(&self) -> bool {
        let all = |numbers: &[Dd]| numbers.iter().all(|x| tame(x.hi));
        match self {
            Pass::Boost(boost) => all(&boost.direction) && all(&[boost.stretch, boost.gamma]),
            Pass::Turn(turn, _) => tame(turn.w.hi) && all(&turn.v),
            Pass::Angle { axis, .. } => all(axis),
            Pass::Velocity { beta, .. } => tame(beta.hi),
            Pass::Quaternion { .. } => true,
        }
    }
}

/// The net transformation of each row.
#[derive(Clone, Debug)]
pub(super) struct Nets {
    boosts: Boosts,
    turns: Turns,
    next: Turns,
    moving: bool,
    turned: bool,
    /// The largest slack of a turn, and whether a turn came before the boost.
    slack: f64,
    composed: bool,
    /// Whether the directions of the boosts are doubles.
    as_given: bool,
}

impl Nets {
    pub(super) const NONE: Nets = Nets {
        boosts: Boosts::ZERO,
        turns: Turns::ZERO,
        next: Turns::ZERO,
        moving: false,
        turned: false,
        slack: 1.0,
        composed: false,
        as_given: false,
    };

    /// Begins again: nothing moves and nothing turns.
    #[inline(always)]
    pub(super) fn clear(&mut self) {
        (self.moving, self.turned) = (false, false);
        (self.slack, self.composed) = (1.0, false);
    }

    /// Takes a step in every row from `start` on.
    #[inline(always)]
    pub(super) fn take<A: Arithmetic>(
        &mut self,
        pass: &Pass,
        motions: &Motions,
        start: usize,
        fields: &mut Fields,
    ) {
        match pass {
            Pass::Boost(boost) => {
                let boost = Boost {
                    direction: boost.direction.map(Dd::by::<A>),
                    stretch: boost.stretch.by(),
                    gamma: boost.gamma.by(),
                };
                for i in 0..LANES {
                    self.boosts.set(i, boost.clone());
                }
                self.then_boosts::<A>(boost.direction.iter().all(|d| d.lo == 0.0));
            }
            Pass::Velocity { beta, inverse } => {
                let [mut x, mut y, mut z] = [[0.0; LANES]; 3];
                let velocity = [
                    lanes(motions.velocity[0], start, &mut x),
                    lanes(motions.velocity[1], start, &mut y),
                    lanes(motions.velocity[2], start, &mut z),
                ];
                by_velocity(velocity, beta.by::<A>(), *inverse, &mut self.boosts, fields);
                self.then_boosts::<A>(true);
            }
            Pass::Turn(turn, slack) => {
                let turn = Quaternion {
                    w: turn.w.by::<A>(),
                    v: turn.v.map(Dd::by),
                };
                for i in 0..LANES {
                    self.next.set(i, turn.clone());
                }
                self.slack = self.slack.max(*slack);
                self.then_turns::<A>();
            }
            Pass::Quaternion { inverse } => {
                let [mut w, mut x, mut y, mut z] = [[0.0; LANES]; 4];
                let quaternion = [
                    lanes(motions.quaternion[0], start, &mut w),
                    lanes(motions.quaternion[1], start, &mut x),
                    lanes(motions.quaternion[2], start, &mut y),
                    lanes(motions.quaternion[3], start, &mut z),
                ];
                by_quaternion::<A>(quaternion, *inverse, &mut self.next, fields);
                self.then_turns::<A>();
            }
            Pass::Angle {
                axis,
                length,
                radians,
                inverse,
            } => {
                let mut spare = [0.0; LANES];
                let angle = lanes(motions.angle, start, &mut spare);
                let axis = (axis.map(Dd::by::<A>), length.by());
                by_angle(angle, axis, *radians, *inverse, &mut self.next, fields);
                self.then_turns::<A>();
            }
        }
    }

    #[inline(always)]
    fn then_boosts<A: Arithmetic>(&mut self, as_given: bool) {
        self.moving = true;
        self.as_given = as_given && !self.turned;
        if !self.turned {
            return;
        }
        self.composed = true;
        for i in 0..LANES {
            let boost = before_turn(self.boosts.get::<A>(i), &self.turns.get(i));
            self.boosts.set(i, boost);
        }
    }

    #[inline(always)]
    fn then_turns<A: Arithmetic>(&mut self) {
        if self.turned {
            for i in 0..LANES {
                let turn = self.turns.get::<A>(i).times(&self.next.get(i));
                self.turns.set(i, normalised(turn));
            }
        } else {
            for i in 0..LANES {
                self.turns.set(i, normalised(self.next.get::<A>(i)));
            }
        }
        self.turned = true;
    }

    /// Restates the fields of all rows.
    #[inline(always)]
    pub(super) fn answer<A: Arithmetic>(
        &self,
        fields: &Fields,
        units: Units<A>,
        answers: &mut Answers,
    ) {
        let factor = if self.composed { 2.0 * self.slack } else { 0.0 };
        let motion = self.moving.then_some(
            #[inline(always)]
            |i| {
                let boost = self.boosts.get::<A>(i);
                let motion = Kernel::motion(&boost, &units.ratios);
                (motion, factor * boost.gamma.hi)
            },
        );
        let matrix = self.turned.then_some(
            #[inline(always)]
            |i| exact_where_still(self.turns.get::<A>(i)).matrix(),
        );
        answers.fill(fields, units, self.as_given, motion, matrix);
    }
}

/// A turn that turns nothing multiplies by one, as it does in [`Kernel::new`]: the ratio of its
/// length to itself would not.
#[inline(always)]
fn exact_where_still<A: Arithmetic>(
    turn: Quaternion<DoubleDouble<A>>,
) -> Quaternion<DoubleDouble<A>> {
    let [x, y, z] = &turn.v;
    let still = (x.hi == 0.0) & (y.hi == 0.0) & (z.hi == 0.0);
    let (hi, lo) = (turn.w.hi, turn.w.lo);
    Quaternion {
        w: DoubleDouble::of(if still { 1.0 } else { hi }, if still { 0.0 } else { lo }),
        ..turn
    }
}

#[inline(always)]
fn by_velocity<A: Arithmetic>(
    [x, y, z]: [&Lanes; 3],
    beta: DoubleDouble<A>,
    inverse: bool,
    boosts: &mut Boosts,
    fields: &mut Fields,
) {
    let sign = if inverse { -1.0 } else { 1.0 };
    let velocity = |i: usize| [x[i], y[i], z[i]].map(Given::<A>::new);
    // In short loops, of which a processor looks several rounds ahead: each result waits for
    // the one before.
    let (mut left, mut root) = (Numbers::ZERO, Numbers::ZERO);
    for i in 0..LANES {
        left.set(i, one_less_beta2(&velocity(i), beta));
        let slow = left.hi[i] > SMALL_W;
        fields.give_up_unless(i, tame(x[i]) & tame(y[i]) & tame(z[i]) & slow);
    }
    for i in 0..LANES {
        root.set(i, left.get::<A>(i).sqrt());
    }
    for i in 0..LANES {
        let boost = Boost::by_root(velocity(i), root.get(i), beta);
        boosts.set(
            i,
            Boost {
                stretch: boost.stretch.signed(sign),
                ..boost
            },
        );
    }
}

#[inline(always)]
fn by_quaternion<A: Arithmetic>(
    [w, x, y, z]: [&Lanes; 4],
    inverse: bool,
    turns: &mut Turns,
    fields: &mut Fields,
) {
    // Surely a rotation, whatever the rounding of the measure.
    const LIMIT: f64 = 0.999 * ROUNDING_LIMIT;
    let sign = if inverse { -1.0 } else { 1.0 };
    for i in 0..LANES {
        let turn = Quaternion {
            w: DoubleDouble::<A>::from_f64(w[i]),
            v: vector([sign * x[i], sign * y[i], sign * z[i]], ()),
        };
        let departure = (turn.norm2() - DoubleDouble::from_f64(1.0)).hi.abs();
        let all_tame = tame(w[i]) & tame(x[i]) & tame(y[i]) & tame(z[i]);
        fields.give_up_unless(i, all_tame & (departure <= LIMIT));
        turns.set(i, turn);
    }
}

#[inline(always)]
fn by_angle<A: Arithmetic>(
    angle: &Lanes,
    (axis, length): (Vec3<DoubleDouble<A>>, DoubleDouble<A>),
    radians: Scale,
    inverse: bool,
    turns: &mut Turns,
    fields: &mut Fields,
) {
    let (mut rest, mut quarters) = ([0.0; LANES], [0.0; LANES]);
    for i in 0..LANES {
        let fits = Turn::angle_fits_dd(angle[i], radians) && tame(angle[i]);
        fields.give_up_unless(i, fits);
        let (left, whole) = split_quarters(if fits { angle[i] } else { 0.0 }, radians);
        (rest[i], quarters[i]) = (left, f64::from(whole.rem_euclid(4)));
    }
    let unit = radians.value::<Dd>(()).by::<A>();
    let (mut half, mut square, mut whole) = (Numbers::ZERO, Numbers::ZERO, [0.0; LANES]);
    for i in 0..LANES {
        let angle = DoubleDouble::<A>::from_f64(rest[i]) * unit;
        let (left, k) = angle.scale2(-1).less_quarters();
        half.set(i, left);
        square.set(i, (left * left).times(-1.0));
        whole[i] = k;
    }
    // The series of sine and cosine, term by term.
    let (mut sin, mut cos) = (Numbers::ONE, Numbers::ONE);
    for (sin_divisor, cos_divisor) in SIN_DIVISORS.into_iter().zip(COS_DIVISORS).rev() {
        for i in 0..LANES {
            let square = square.get::<A>(i);
            sin.set(i, square.nest(sin.get(i), sin_divisor));
            cos.set(i, square.nest(cos.get(i), cos_divisor));
        }
    }
    let sign = if inverse { -1.0 } else { 1.0 };
    for i in 0..LANES {
        let sin = half.get::<A>(i) * sin.get(i);
        let (sin, cos) = DoubleDouble::advance(sin, cos.get(i), whole[i]);
        let (w, s) = advance_half(cos, sin, quarters[i]);
        let [x, y, z] = axis;
        turns.set(
            i,
            Quaternion {
                w: w * length,
                v: [
                    (x * s).signed(sign),
                    (y * s).signed(sign),
                    (z * s).signed(sign),
                ],
            },
        );
    }
}
