//! The promise on digits: each returned vector is within 1.01·2⁻⁵³ of its own exact length.
//!
//! Two doubles carry 2⁻¹⁰⁴ of whatever was summed, so they keep the promise while the result is
//! not smaller than 2⁻⁴⁰ of that. Where it is, or where an exponent leaves their range, the way
//! and the reading are computed again with as many bits as it takes.

use super::big::Big;
use super::double_double::{Arithmetic, Dd, DoubleDouble};
use super::error::Impossible;
use super::field::{FieldUnits, Kernel, Measured};
use super::lanes::{Work, dispatch};
use super::real::{Real, Vec3, exponent_spread, round};
use super::resolved::Resolved;
use super::scale::Scale;

/// Result over what was summed, below which two doubles no longer suffice.
pub(super) const KEPT: f64 = 1.0 / (1u64 << 40) as f64;
/// The numbers of bits tried in turn.
const LEVELS: [usize; 4] = [256, 640, 1536, 4608];
/// Bits below the size of what was summed that a result at least keeps.
const GUARD: i64 = 120;

/// A transformed field.
#[derive(Clone, Debug)]
pub struct Applied {
    /// E' in the unit of the answer.
    pub e: [f64; 3],
    /// B' in the unit of the answer.
    pub b: [f64; 3],
    /// E' and B' in the units of the reading, to the precision of two doubles.
    pub precise: (Vec3<Dd>, Vec3<Dd>),
    /// For E' and B': log2 of the size of what was summed over that of the result (at least 0);
    /// infinite where terms cancel exactly.
    pub cancelled_bits: [f64; 2],
}

impl Resolved {
    /// The field in the target frame, in the units `to`.
    ///
    /// # Errors
    /// A component is larger than the largest double.
    pub fn apply(&self, field: &Measured, to: FieldUnits) -> Result<Applied, Impossible> {
        let fast = (self.fits_dd() && in_range(field)).then(|| {
            let kernel = Kernel::new(self.net(), field.units, ());
            let mut restated = field.vectors::<Dd>(());
            let work = Restate {
                kernel: &kernel,
                field: &mut restated,
            };
            dispatch(work, false);
            (
                restated,
                sizes(&kernel, field),
                self.chain_sizes(&kernel, field),
            )
        });
        let part = |which: usize, unit: Scale, target: Scale| {
            let Some((results, sizes, chain_sizes)) = &fast else {
                return self.apply_big(field, which, unit, target);
            };
            let (result, size) = (&results[which], sizes[which]);
            let (rounded, precise, _) = if kept(result, size.max(chain_sizes[which])) {
                (finish(result, unit, target, ()), *result, 0.0)
            } else {
                self.apply_big(field, which, unit, target)
            };
            let lost = size / length(&precise);
            let lost = if lost > 1.0 { libm::log2(lost) } else { 0.0 };
            (rounded, precise, lost)
        };
        let (e, precise_e, lost_e) = part(0, field.units.e, to.e);
        let (b, precise_b, lost_b) = part(1, field.units.b, to.b);
        for (what, vector) in [("a component of e", e), ("a component of b", b)] {
            if vector.iter().any(|x| !x.is_finite()) {
                return Err(Impossible::Overflow { what });
            }
        }
        let (precise, cancelled_bits) = ((precise_e, precise_b), [lost_e, lost_b]);
        Ok(Applied {
            e,
            b,
            precise,
            cancelled_bits,
        })
    }

    /// By how much what is summed in composing the net transformation may exceed the field; zero
    /// when nothing is.
    pub(super) fn chained(&self) -> f64 {
        match &self.net().boost {
            Some(boost) if !self.net().direction_as_given => 2.0 * boost.gamma.hi * self.slack(),
            _ => 0.0,
        }
    }

    /// For chains, a bound of the size of what is summed that counts in the composition of the
    /// net transformation: no product of its rounded direction vanishes exactly.
    fn chain_sizes(&self, kernel: &Kernel<Dd>, field: &Measured) -> [f64; 2] {
        let factor = self.chained();
        if factor == 0.0 {
            return [0.0; 2];
        }
        let [e, b] = field
            .magnitudes()
            .map(|x| libm::hypot(libm::hypot(x[0], x[1]), x[2]));
        [
            factor * (e + kernel.cb_over_e * b),
            factor * (b + e / kernel.cb_over_e),
        ]
    }

    /// E' (`which` 0) or B' (1) in as many bits as it takes; zero when it is zero to the last.
    fn apply_big(
        &self,
        field: &Measured,
        which: usize,
        unit: Scale,
        target: Scale,
    ) -> ([f64; 3], Vec3<Dd>, f64) {
        let exponent = |v: &Vec3<Big>| v.iter().filter_map(Big::exponent).max();
        let mut vanishes_by_itself = false;
        for bits in LEVELS {
            let context = self.context(bits);
            let net = self.big(context);
            let kernel = Kernel::new(&net, field.units, context);
            let [e, b] = field.vectors::<Big>(context);
            let (e2, b2) = kernel.apply(&e, &b);
            let result = if which == 0 { e2 } else { b2 };
            // |E| + c|B| times 2γ bounds every term of the sum.
            let ratio = field
                .units
                .cb_over_e()
                .value::<Big>(context)
                .exponent()
                .unwrap_or(0);
            let sizes = field.magnitudes().map(largest_exponent);
            let (own, other, ratio) = if which == 0 {
                (sizes[0], sizes[1], ratio)
            } else {
                (sizes[1], sizes[0], -ratio)
            };
            let gamma = net
                .boost
                .as_ref()
                .and_then(|boost| boost.gamma.exponent())
                .unwrap_or(0);
            let moved = other.filter(|_| net.boost.is_some()).map(|x| x + ratio);
            let Some(size) = own.max(moved).map(|size| size + gamma + 3) else {
                vanishes_by_itself = true;
                break;
            };
            if let Some(reached) = exponent(&result)
                && size - reached <= (bits + self.net_bits()) as i64 - GUARD
            {
                let rounded = finish(&result, unit, target, context);
                let precise = result.each_ref().map(Big::to_dd);
                return (rounded, precise, ((size - reached) as f64 - 3.0).max(0.0));
            }
            if bits >= self.bits_of_zero(field) {
                break;
            }
        }
        let zero = [Dd::from_f64(0.0); 3];
        (
            [0.0; 3],
            zero,
            if vanishes_by_itself {
                0.0
            } else {
                f64::INFINITY
            },
        )
    }

    /// How many bits prove that a sum of products of these doubles vanishes: enough for all of
    /// their digits side by side, three small numbers of the way multiplied together included.
    fn bits_of_zero(&self, field: &Measured) -> usize {
        if !field.reduction.is_none() {
            return LEVELS[2];
        }
        let spread = [field.e, field.b].map(exponent_spread).into_iter().max();
        let depth = self.steps().map(|step| step.change.depth()).max();
        let needed = 400 + 2 * spread.unwrap_or(0) + 3 * depth.unwrap_or(0);
        LEVELS
            .into_iter()
            .find(|bits| *bits as i64 >= needed)
            .unwrap_or(LEVELS[3])
    }
}

/// The field in place of that of the reading, by the best instructions there are.
struct Restate<'a> {
    kernel: &'a Kernel<Dd>,
    field: &'a mut [Vec3<Dd>; 2],
}

impl Work for Restate<'_> {
    #[inline(always)]
    fn run<A: Arithmetic>(self) {
        let kernel = self.kernel.by::<A>();
        let [e, b] = self.field.map(|vector| vector.map(Dd::by));
        let (e, b) = kernel.apply(&e, &b);
        *self.field = [e, b].map(|vector| vector.map(DoubleDouble::by));
    }
}

/// Whether products of these numbers stay well inside the range of two doubles.
fn in_range(field: &Measured) -> bool {
    let sane = |x: f64| x == 0.0 || (1e-60..1e60).contains(&x.abs());
    let mut read = field.e.into_iter().chain(field.b);
    read.all(sane) && field.reduction.numbers().all(sane)
}

fn largest_exponent(v: [f64; 3]) -> Option<i64> {
    let largest = v.into_iter().fold(0.0f64, f64::max).min(f64::MAX);
    (largest > 0.0).then(|| i64::from(libm::ilogb(largest)))
}

fn length(v: &Vec3<Dd>) -> f64 {
    libm::hypot(libm::hypot(v[0].hi, v[1].hi), v[2].hi)
}

fn kept(result: &Vec3<Dd>, size: f64) -> bool {
    length(result) >= KEPT * size
}

/// The vector in the unit of the answer, rounded once.
fn finish<R: Real>(vector: &Vec3<R>, unit: Scale, target: Scale, context: R::Context) -> [f64; 3] {
    let rounded = if unit == target {
        round(vector)
    } else {
        let factor = unit.over(target).value::<R>(context);
        round(&vector.each_ref().map(|x| x.clone() * factor.clone()))
    };
    // Adding zero turns −0 into 0.
    rounded.map(|x| x + 0.0)
}

/// The size of what is summed for E' and B', in the units of the reading.
fn sizes(kernel: &Kernel<Dd>, field: &Measured) -> [f64; 2] {
    let own = field.magnitudes();
    let Some((d, k, p, q)) = &kernel.motion else {
        return if field.reduction.is_none() {
            [0.0; 2]
        } else {
            own.map(|x| libm::hypot(libm::hypot(x[0], x[1]), x[2]))
        };
    };
    let d = round(d);
    let exact = field.vectors::<Dd>(());
    let [xe, xb]: [[f64; 3]; 2] = std::array::from_fn(|which| {
        let (exact, x) = (&exact[which], own[which]);
        std::array::from_fn(|i| {
            let (j, k) = ((i + 1) % 3, (i + 2) % 3);
            // A component that vanishes exactly has no size, whatever its terms.
            let vanishes = d[j] * exact[k].hi == d[k] * exact[j].hi
                && (exact[k].times(d[j]) - exact[j].times(d[k])).is_zero();
            if vanishes {
                0.0
            } else {
                d[j].abs() * x[k] + d[k].abs() * x[j]
            }
        })
    });
    let size = |own: &[f64; 3], x: &[f64; 3], other: &[f64; 3], factor: f64| {
        let component = |i: usize| {
            let (j, l) = ((i + 1) % 3, (i + 2) % 3);
            let across = k.hi * (x[j] * d[l].abs() + x[l] * d[j].abs());
            own[i] + across + factor.abs() * other[i]
        };
        component(0) + component(1) + component(2)
    };
    [size(&own[0], &xe, &xb, p.hi), size(&own[1], &xb, &xe, q.hi)]
}
