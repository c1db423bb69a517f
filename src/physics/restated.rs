//! The fields of rows side by side: as they come in, and restated by two doubles where those
//! suffice.

use super::block::{Readings, Setting};
use super::double_double::{Arithmetic, DoubleDouble, Portable};
use super::field::Kernel;
use super::lanes::{LANES, Lanes, Numbers, fill, get3, set3, tame};
use super::precise::KEPT;
use super::real::{Real, Vec3};

/// The field of each row, zeros standing for what is missing.
#[derive(Clone, Debug)]
pub(super) struct Fields {
    e: [Numbers; 3],
    b: [Numbers; 3],
    /// At least |E| and |B| with all that was summed for them; infinite where they are not tame.
    sizes: [Lanes; 2],
    /// Not a number where a component is missing.
    gaps: Lanes,
}

impl Fields {
    pub(super) const ZERO: Fields = Fields {
        e: [Numbers::ZERO; 3],
        b: [Numbers::ZERO; 3],
        sizes: [[0.0; LANES]; 2],
        gaps: [0.0; LANES],
    };

    /// Takes the readings from `start` on, as many as there are.
    #[inline(always)]
    pub(super) fn load<A: Arithmetic>(
        &mut self,
        readings: &Readings,
        start: usize,
        setting: &Setting,
    ) {
        self.gaps = [0.0; LANES];
        let parts = [(readings.e, &mut self.e), (readings.b, &mut self.b)];
        for (which, (columns, numbers)) in parts.into_iter().enumerate() {
            let size = &mut self.sizes[which];
            for (column, numbers) in columns.iter().zip(numbers.iter_mut()) {
                fill(&mut numbers.hi, column, start);
                numbers.lo = [0.0; LANES];
            }
            let [x, y, z] = numbers;
            for (i, size) in size.iter_mut().enumerate() {
                let mut sum = 0.0;
                let mut all_tame = true;
                for hi in [&mut x.hi, &mut y.hi, &mut z.hi] {
                    let value = if hi[i].is_nan() { 0.0 } else { hi[i] };
                    self.gaps[i] += hi[i];
                    hi[i] = value;
                    sum += value.abs();
                    all_tame &= tame(value);
                }
                *size = if all_tame { sum } else { f64::INFINITY };
            }
            if let Some(calibration) = setting.calibration[which] {
                for (i, size) in size.iter_mut().enumerate() {
                    let raw = [numbers[0].hi[i], numbers[1].hi[i], numbers[2].hi[i]];
                    let [x, y, z] = calibration.magnitude(raw);
                    let sum = x + y + z;
                    *size = if size.is_finite() { sum } else { f64::INFINITY };
                    set3(numbers, i, calibration.apply::<DoubleDouble<A>>(raw, ()));
                }
            }
        }
    }

    /// Whether a component of a row is missing.
    pub(super) fn is_incomplete(&self, i: usize) -> bool {
        self.gaps[i].is_nan()
    }

    /// Leaves the row to the arithmetic of more digits.
    #[inline(always)]
    pub(super) fn give_up_unless(&mut self, i: usize, fits: bool) {
        for size in &mut self.sizes {
            size[i] = if fits { size[i] } else { f64::INFINITY };
        }
    }
}

/// d, k, p and q of a [`Kernel`].
pub(super) type Motion<A> = (
    Vec3<DoubleDouble<A>>,
    DoubleDouble<A>,
    DoubleDouble<A>,
    DoubleDouble<A>,
);

/// The motion of a row with what [`Resolved::chained`](super::resolved::Resolved::chained) says
/// of it, and its matrix.
type Parts<A> = (Option<(Motion<A>, f64)>, Option<[Vec3<DoubleDouble<A>>; 3]>);

/// What the units of a series come to.
#[derive(Clone, Copy, Debug)]
pub(super) struct Units<A> {
    /// How many units of E one unit of cB is, and the other way round.
    pub(super) ratios: [DoubleDouble<A>; 2],
    /// What restates E' and B' in the unit of the answer.
    pub(super) factors: [DoubleDouble<A>; 2],
    /// Whether sums go into the fields already.
    pub(super) calibrated: bool,
}

impl Units<Portable> {
    pub(super) fn of(setting: &Setting) -> Self {
        let Setting {
            units,
            to,
            calibration,
        } = setting;
        Units {
            ratios: units.ratios(()),
            factors: [units.e.over(to.e).value(()), units.b.over(to.b).value(())],
            calibrated: calibration.iter().any(Option::is_some),
        }
    }

    /// For other instructions.
    #[inline(always)]
    pub(super) fn by<A>(self) -> Units<A> {
        Units {
            ratios: self.ratios.map(DoubleDouble::by),
            factors: self.factors.map(DoubleDouble::by),
            calibrated: self.calibrated,
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
    /// `motion` and `matrix` give for each row the parts of its [`Kernel`] that count.
    #[inline(always)]
    pub(super) fn fill<A: Arithmetic>(
        &mut self,
        fields: &Fields,
        units: Units<A>,
        motion: Option<impl Fn(usize) -> (Motion<A>, f64)>,
        matrix: Option<impl Fn(usize) -> [Vec3<DoubleDouble<A>>; 3]>,
    ) {
        // One loop for each shape: a choice within a loop would cost its vector instructions.
        match (motion, matrix) {
            (None, None) => self.each(
                fields,
                units,
                #[inline(always)]
                |_| (None, None),
            ),
            (Some(motion), None) => self.each(
                fields,
                units,
                #[inline(always)]
                |i| (Some(motion(i)), None),
            ),
            (None, Some(matrix)) => self.each(
                fields,
                units,
                #[inline(always)]
                |i| (None, Some(matrix(i))),
            ),
            (Some(motion), Some(matrix)) => {
                self.each(
                    fields,
                    units,
                    #[inline(always)]
                    |i| (Some(motion(i)), Some(matrix(i))),
                );
            }
        }
    }

    /// The size of what is summed is taken from above, by |a×b|₁ ≤ |a|₁|b|₁, and that of the
    /// result from below, so that a row answered here is one for which two doubles suffice alone.
    #[inline(always)]
    fn each<A: Arithmetic>(
        &mut self,
        fields: &Fields,
        units: Units<A>,
        parts: impl Fn(usize) -> Parts<A>,
    ) {
        // Local, so that the compiler sees that nothing else is written to.
        let (mut e_answer, mut b_answer) = ([[0.0; LANES]; 3], [[0.0; LANES]; 3]);
        // For the roundings in the sizes themselves.
        const KEPT_SURELY: f64 = KEPT * 1.001;
        let ratio = units.ratios[0].hi;
        for i in 0..LANES {
            let (motion, matrix) = parts(i);
            let (motion, chained) = motion.unzip();
            let kernel = Kernel {
                motion,
                matrix,
                cb_over_e: ratio,
            };
            let (e, b) = kernel.apply(&get3(&fields.e, i), &get3(&fields.b, i));
            let [e_size, b_size] = [fields.sizes[0][i], fields.sizes[1][i]];
            let summed = match (&kernel.motion, chained) {
                (Some((d, k, p, q)), Some(chained)) => {
                    let length = d[0].hi.abs() + d[1].hi.abs() + d[2].hi.abs();
                    let own = 1.0 + k.hi * length * length;
                    let e_sum = own * e_size + p.hi.abs() * length * b_size;
                    let b_sum = own * b_size + q.hi.abs() * length * e_size;
                    [
                        larger(e_sum, chained * (e_size + ratio * b_size)),
                        larger(b_sum, chained * (b_size + e_size / ratio)),
                    ]
                }
                // Nothing, or not a number where a size is infinite.
                _ if !units.calibrated => [0.0 * e_size, 0.0 * b_size],
                _ => [e_size, b_size],
            };
            put(
                &mut e_answer,
                i,
                e,
                units.factors[0],
                KEPT_SURELY * summed[0],
            );
            put(
                &mut b_answer,
                i,
                b,
                units.factors[1],
                KEPT_SURELY * summed[1],
            );
        }
        (self.e, self.b) = (e_answer, b_answer);
    }

    /// Whether two doubles did not suffice for a row.
    pub(super) fn lacks(&self, i: usize) -> bool {
        self.e[0][i].is_nan() || self.b[0][i].is_nan()
    }
}

/// The vector rounded in the unit of the answer, if it is no smaller than `least`.
#[inline(always)]
fn put<A: Arithmetic>(
    lanes: &mut [Lanes; 3],
    i: usize,
    vector: Vec3<DoubleDouble<A>>,
    factor: DoubleDouble<A>,
    least: f64,
) {
    let [x, y, z] = &vector;
    let largest = larger(larger(x.hi.abs(), y.hi.abs()), z.hi.abs());
    let x = (vector[0] * factor).to_f64() + 0.0;
    let y = (vector[1] * factor).to_f64() + 0.0;
    let z = (vector[2] * factor).to_f64() + 0.0;
    let finite = x.abs() <= f64::MAX && y.abs() <= f64::MAX && z.abs() <= f64::MAX;
    let kept = largest >= least && finite;
    lanes[0][i] = if kept { x } else { f64::NAN };
    lanes[1][i] = if kept { y } else { f64::NAN };
    lanes[2][i] = if kept { z } else { f64::NAN };
}

/// The larger one; unlike `f64::max` one instruction. Not a number if the first is none.
#[inline(always)]
fn larger(a: f64, b: f64) -> f64 {
    if a < b { b } else { a }
}
