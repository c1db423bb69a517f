//! The fields of rows side by side, restated by two doubles where those suffice.

use super::block::Setting;
use super::double_double::{Arithmetic, DoubleDouble, Portable};
use super::field::Kernel;
use super::fields::Fields;
use super::given::Given;
use super::lanes::{LANES, Lanes, get3};
use super::precise::KEPT;
use super::real::{Factor, Real, Vec3};

/// d, k, p and q of a [`Kernel`].
pub(super) type Motion<A, D = DoubleDouble<A>> =
    (Vec3<D>, DoubleDouble<A>, DoubleDouble<A>, DoubleDouble<A>);

/// M of a [`Kernel`].
type Matrix<A> = [Vec3<DoubleDouble<A>>; 3];

/// What the units of a series come to.
#[derive(Clone, Copy, Debug)]
pub(super) struct Units<A> {
    /// How many units of E one unit of cB is, and the other way round.
    pub(super) ratios: [DoubleDouble<A>; 2],
    /// What restates E' and B' in the unit of the answer.
    factors: [DoubleDouble<A>; 2],
    /// Whether sums go into the fields already.
    calibrated: bool,
    /// Whether there is nothing to calibrate and no other unit to restate the answer in.
    plain: bool,
}

impl Units<Portable> {
    pub(super) fn of(setting: &Setting) -> Self {
        let Setting {
            units,
            to,
            calibration,
        } = setting;
        let calibrated = calibration.iter().any(Option::is_some);
        Units {
            ratios: units.ratios(()),
            factors: [units.e.over(to.e).value(()), units.b.over(to.b).value(())],
            calibrated,
            plain: !calibrated && units == to,
        }
    }

    /// For other instructions.
    #[inline(always)]
    pub(super) fn by<A>(self) -> Units<A> {
        Units {
            ratios: self.ratios.map(DoubleDouble::by),
            factors: self.factors.map(DoubleDouble::by),
            calibrated: self.calibrated,
            plain: self.plain,
        }
    }
}

/// E' and B' of each row in the unit of the answer; NaN where two doubles do not suffice.
#[derive(Clone, Debug)]
pub(super) struct Answers {
    pub(super) e: [Lanes; 3],
    pub(super) b: [Lanes; 3],
}

impl Answers {
    pub(super) const NONE: Answers = Answers {
        e: [[f64::NAN; LANES]; 3],
        b: [[f64::NAN; LANES]; 3],
    };

    /// Answers every row.
    ///
    /// `motion` and `matrix` give for each row the parts of its [`Kernel`] that count, the motion
    /// with what [`Resolved::chained`](super::resolved::Resolved::chained) says of it; `as_given`
    /// is whether the directions of the motions are doubles.
    #[inline(always)]
    pub(super) fn fill<A: Arithmetic>(
        &mut self,
        fields: &Fields,
        units: Units<A>,
        as_given: bool,
        motion: Option<impl Fn(usize) -> (Motion<A>, f64)>,
        matrix: Option<impl Fn(usize) -> Matrix<A>>,
    ) {
        // One loop for each shape: a choice within a loop would cost its vector instructions.
        match motion {
            Some(motion) if as_given && units.plain => self.turn(
                (fields, units),
                None,
                #[inline(always)]
                |i| [&fields.e, &fields.b].map(|v| v.each_ref().map(|x| Given::<A>::new(x.hi[i]))),
                #[inline(always)]
                |i| {
                    let ((d, k, p, q), _) = motion(i);
                    Some(((d.map(|d| Given::<A>::new(d.hi)), k, p, q), None))
                },
                matrix,
            ),
            Some(motion) => self.turn(
                (fields, units),
                Some(units.factors),
                #[inline(always)]
                |i| [get3(&fields.e, i), get3(&fields.b, i)],
                #[inline(always)]
                |i| {
                    let (motion, chained) = motion(i);
                    Some((motion, Some(chained)))
                },
                matrix,
            ),
            None => self.turn(
                (fields, units),
                Some(units.factors),
                #[inline(always)]
                |i| [get3(&fields.e, i), get3(&fields.b, i)],
                #[inline(always)]
                |_| None::<(Motion<A>, Option<f64>)>,
                matrix,
            ),
        }
    }

    #[inline(always)]
    fn turn<A, F, D>(
        &mut self,
        (fields, units): (&Fields, Units<A>),
        factors: Option<[DoubleDouble<A>; 2]>,
        field: impl Fn(usize) -> [Vec3<F>; 2],
        motion: impl Fn(usize) -> Option<(Motion<A, D>, Option<f64>)>,
        matrix: Option<impl Fn(usize) -> Matrix<A>>,
    ) where
        A: Arithmetic,
        F: Clone + Into<DoubleDouble<A>>,
        D: Factor<F, Product = DoubleDouble<A>> + Into<DoubleDouble<A>>,
        DoubleDouble<A>: Factor<D, Product = DoubleDouble<A>>,
    {
        match matrix {
            Some(matrix) => self.each(
                (fields, units),
                factors,
                field,
                motion,
                #[inline(always)]
                |i| Some(matrix(i)),
            ),
            None => self.each(
                (fields, units),
                factors,
                field,
                motion,
                #[inline(always)]
                |_| None,
            ),
        }
    }

    /// The size of what is summed is taken from above, by |a×b|₁ ≤ |a|₁|b|₁, and that of the
    /// result from below, so that a row answered here is one for which two doubles suffice alone.
    #[inline(always)]
    fn each<A, F, D>(
        &mut self,
        (fields, units): (&Fields, Units<A>),
        factors: Option<[DoubleDouble<A>; 2]>,
        field: impl Fn(usize) -> [Vec3<F>; 2],
        motion: impl Fn(usize) -> Option<(Motion<A, D>, Option<f64>)>,
        matrix: impl Fn(usize) -> Option<Matrix<A>>,
    ) where
        A: Arithmetic,
        F: Clone + Into<DoubleDouble<A>>,
        D: Factor<F, Product = DoubleDouble<A>> + Into<DoubleDouble<A>>,
        DoubleDouble<A>: Factor<D, Product = DoubleDouble<A>>,
    {
        let Answers {
            e: e_answer,
            b: b_answer,
        } = self;
        // For the roundings in the sizes themselves.
        const KEPT_SURELY: f64 = KEPT * 1.001;
        let ratio = units.ratios[0].hi;
        for i in 0..LANES {
            let (motion, chained) = motion(i).unzip();
            let kernel = Kernel {
                motion,
                matrix: matrix(i),
                cb_over_e: ratio,
            };
            let [e, b] = field(i);
            let (e, b) = kernel.apply(&e, &b);
            let [e_size, b_size] = [fields.sizes[0][i], fields.sizes[1][i]];
            let summed = match (&kernel.motion, chained) {
                (Some((d, k, p, q)), Some(chained)) => {
                    let [x, y, z] = d.each_ref().map(|d| d.clone().into().hi.abs());
                    let length = x + y + z;
                    let own = 1.0 + k.hi * length * length;
                    let e_sum = own * e_size + p.hi.abs() * length * b_size;
                    let b_sum = own * b_size + q.hi.abs() * length * e_size;
                    match chained {
                        None => [e_sum, b_sum],
                        Some(chained) => [
                            larger(e_sum, chained * (e_size + ratio * b_size)),
                            larger(b_sum, chained * (b_size + e_size / ratio)),
                        ],
                    }
                }
                // Nothing, or not a number where a size is infinite.
                _ if !units.calibrated => [0.0 * e_size, 0.0 * b_size],
                _ => [e_size, b_size],
            };
            let [e_factor, b_factor] = factors.map_or([None; 2], |factors| factors.map(Some));
            put(e_answer, i, e, e_factor, KEPT_SURELY * summed[0]);
            put(b_answer, i, b, b_factor, KEPT_SURELY * summed[1]);
        }
    }

    /// Whether two doubles did not suffice for a row.
    pub(super) fn lacks(&self, i: usize) -> bool {
        self.e[0][i].is_nan() || self.b[0][i].is_nan()
    }
}

/// The vector rounded, in the unit of the answer, if it is no smaller than `least`.
#[inline(always)]
fn put<A: Arithmetic>(
    lanes: &mut [Lanes; 3],
    i: usize,
    vector: Vec3<DoubleDouble<A>>,
    factor: Option<DoubleDouble<A>>,
    least: f64,
) {
    let size = largest(vector.map(|x| x.hi));
    let [x, y, z] = vector.map(|x| factor.map_or(x, |factor| x * factor).to_f64() + 0.0);
    let finite = factor.map_or(size, |_| largest([x, y, z])) <= f64::MAX;
    let kept = size >= least && finite;
    lanes[0][i] = if kept { x } else { f64::NAN };
    lanes[1][i] = if kept { y } else { f64::NAN };
    lanes[2][i] = if kept { z } else { f64::NAN };
}

/// The largest absolute value. It may pass over what is not a number: rows that can lead to such
/// have an infinite size, of which no answer keeps enough.
#[inline(always)]
fn largest([x, y, z]: [f64; 3]) -> f64 {
    larger(larger(x.abs(), y.abs()), z.abs())
}

/// The larger one; unlike `f64::max` one instruction.
#[inline(always)]
fn larger(a: f64, b: f64) -> f64 {
    if a < b { b } else { a }
}
