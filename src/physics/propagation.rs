//! The law of propagation of uncertainty (JCGM 102:2011, 6.2.1.3): C' = Σ Jₖ Cₖ Jₖᵀ over the
//! independent sources, with sensitivity matrices Jₖ in closed form.
//!
//! A reading acts through the transformation itself, which is linear. An error of a step is a
//! small Lorentz transformation, carried to the target frame by what is left of the way; there it
//! acts on the answer ([`generator`](super::generator)).

mod algebra;
mod reading;

pub use algebra::Matrix6;

use algebra::{add_to, combine, half, sandwich, six};

use super::big::Big;
use super::double_double::Dd;
use super::field::{Field, FieldUnits, Kernel, Measured};
use super::generator::{Block, Generator, blocks};
use super::lorentz::Net;
use super::real::Real;
use super::resolved::Resolved;
use super::scale::Scale;
use super::uncertain::UncertainReading;

/// What an answer's uncertainty comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Source {
    /// E as read.
    E,
    /// B as read.
    B,
    /// The covariance of E and B as read, which may also be negative.
    EWithB,
    /// The calibration of the sensor of E.
    CalibrationE,
    /// The calibration of the sensor of B.
    CalibrationB,
    /// A step, by its place in the way as it is taken.
    Step(usize),
}

/// What is uncertain, and about which answer.
#[derive(Clone, Copy, Debug)]
pub struct Inputs<'a> {
    /// The way, with the errors of its steps.
    pub way: &'a Resolved,
    /// The reading; zeros stand for missing components.
    pub field: &'a Measured,
    /// The errors of the reading.
    pub reading: Option<&'a UncertainReading>,
}

/// The covariances that the sources add to the answer, in the arithmetic R.
#[derive(Clone, Debug)]
pub struct Propagated<R> {
    /// One for each source, in V²/m².
    pub parts: Vec<(Source, Matrix6<R>)>,
    /// That of the field of the question, once reduced.
    pub question: Matrix6<R>,
    /// The field of the question.
    pub field: Field<R>,
    /// The field in the target frame.
    pub answer: Field<R>,
    /// Errors of the steps as seen in the target frame.
    pub errors: Vec<Carried<R>>,
    /// Independent errors of the reading as seen there, of one standard deviation each.
    pub read: Vec<Field<R>>,
    /// log2 of the size of what was summed, in V/m.
    size: i64,
}

/// Independent errors of one step, of one standard deviation each.
#[derive(Clone, Debug)]
pub struct Carried<R> {
    /// The place of the step in the way.
    pub step: usize,
    /// As seen in the target frame.
    pub generators: Vec<Generator<R>>,
    /// As seen at the step itself.
    pub local: Vec<Generator<R>>,
    /// By how much each makes the generators of the step grow.
    pub growth: Vec<R>,
    /// Standard uncertainty of its direction in rad.
    pub direction: f64,
}

/// Bits that a covariance keeps at least beside √(Cᵢᵢ Cⱼⱼ): 2⁻⁴⁴ is below 1e-13.
const KEPT_BITS: i64 = 44;
/// Bits of two doubles, some of them spent on the way.
const DD_BITS: i64 = 98;
/// Bits tried where two doubles do not suffice.
const BITS: usize = 256;
/// Bits that prove that a standard uncertainty vanishes, for numbers of like size.
const BITS_OF_ZERO: usize = 640;
/// Components of E and cB in one unit.
const ONE_UNIT: FieldUnits = FieldUnits {
    e: Scale::ratio(super::constants::SPEED_OF_LIGHT, 1),
    b: Scale::ONE,
};

/// What to do with a propagation, whatever its arithmetic.
pub trait Use {
    /// What comes of it.
    type Output;
    /// Uses it.
    fn with<R: Real>(self, propagated: &Propagated<R>) -> Self::Output;
}

impl Inputs<'_> {
    /// Whether anything is uncertain.
    pub fn any(&self) -> bool {
        self.reading.is_some() || self.way.is_uncertain()
    }

    /// Propagates, in an arithmetic that keeps 1e-12 √(Cᵢᵢ Cⱼⱼ) of each element.
    pub fn propagate<U: Use>(&self, user: U) -> U::Output {
        if self.fits_dd() {
            let spent = libm::log2(self.way.slack()) as i64;
            let found = self.propagate_in::<Dd>(self.way.net(), ());
            if found.is_kept(DD_BITS - spent) {
                return user.with(&found);
            }
        }
        let found = self.propagate_big(BITS);
        if found.is_kept(self.kept_bits(BITS)) {
            return user.with(&found);
        }
        // What is zero to the last of these bits is zero: a way may multiply up what cancels then.
        let bits = BITS_OF_ZERO + 4 * self.way.growth() as usize;
        let mut found = self.propagate_big(bits);
        found.clean(self.kept_bits(bits));
        user.with(&found)
    }

    fn propagate_big(&self, bits: usize) -> Propagated<Big> {
        let context = self.way.context(bits);
        self.propagate_in(&self.way.big(context), context)
    }

    /// How many bits are left where the way has taken its own.
    fn kept_bits(&self, bits: usize) -> i64 {
        (bits + self.way.net_bits()) as i64
    }

    fn fits_dd(&self) -> bool {
        let number = |x: f64| x == 0.0 || (1e-40..1e40).contains(&x.abs());
        let field = self.field;
        let calibration = self
            .reading
            .iter()
            .flat_map(|r| r.calibration.iter().flatten());
        let uncertain = calibration.flat_map(|c| c.matrix.as_flattened().iter().chain(&c.offset));
        let mut errors = self
            .way
            .steps()
            .filter_map(|step| step.uncertainty.as_ref());
        self.way.composes_in_dd()
            && field.e.into_iter().chain(field.b).all(number)
            && field.reduction.numbers().all(number)
            && uncertain.copied().all(number)
            && self
                .reading
                .is_none_or(|reading| reading.field.sizes().into_iter().all(number))
            && errors.all(|uncertain| uncertain.errors.sizes().into_iter().all(number))
    }

    fn propagate_in<R: Real>(&self, net: &Net<R>, context: R::Context) -> Propagated<R> {
        let kernel = Kernel::new(net, ONE_UNIT, context);
        let volts = self.field.units.volts_per_metre::<R>(context);
        let field = self.field.field(0, &volts, context);
        let (e, cb) = kernel.apply(&field.e, &field.cb);
        let answer = Field { e, cb };
        let gamma = |net: &Net<R>| {
            let boost = net.boost.as_ref();
            boost.and_then(|b| b.gamma.exponent()).unwrap_or(0) + 2
        };
        let field_size = self
            .field
            .exponent(&self.field.units.volts_per_metre(()))
            .map_or(0, i64::from)
            + gamma(net)
            + 2;
        let mut found = Propagated {
            parts: Vec::new(),
            question: std::array::from_fn(|_| std::array::from_fn(|_| R::new(0.0, context))),
            field,
            answer,
            errors: Vec::new(),
            read: Vec::new(),
            size: i64::MIN / 2,
        };
        if let Some(reading) = self.reading {
            for block in self.reading_blocks(reading, &volts, context) {
                found.size = found.size.max(block.size() + gamma(net));
                add_to(&mut found.question, &block.covariance());
                let carried = block.seen_after(&kernel);
                found.read.extend(carried.deviations());
                found.parts.extend(carried.parts());
            }
        }
        let steps: Vec<_> = self.way.steps().collect();
        let mut rest = Net {
            boost: None,
            turn: None,
            direction_as_given: true,
        };
        for (i, step) in steps.iter().enumerate().rev() {
            let from_here = || Net::of([*step], context).then(&rest);
            let Some(uncertain) = &step.uncertainty else {
                if self.way.is_uncertain() {
                    rest = from_here();
                }
                continue;
            };
            let behind = from_here();
            // An error of a step taken backwards stands where it begins.
            let carrier = if step.inverse { &behind } else { &rest };
            let kernel = Kernel::new(carrier, ONE_UNIT, context);
            let mut part: Option<Matrix6<R>> = None;
            let mut all = Carried {
                step: i,
                generators: Vec::new(),
                local: Vec::new(),
                growth: Vec::new(),
                direction: 0.0,
            };
            for block in blocks::<R>(step, &uncertain.errors, context) {
                let seen: Vec<_> = block
                    .generators
                    .iter()
                    .map(|generator| generator.seen_after(&kernel))
                    .collect();
                let columns: Vec<[R; 6]> = seen
                    .iter()
                    .map(|generator| six(generator.act(&found.answer)))
                    .collect();
                let own = sandwich(&columns, &block.covariance);
                match &mut part {
                    Some(sum) => add_to(sum, &own),
                    None => part = Some(own),
                }
                let size = block_size(&block) + gamma(carrier) + field_size;
                found.size = found.size.max(size);
                all.collect(&block, &seen);
            }
            found.parts.extend(part.map(|part| (Source::Step(i), part)));
            found.errors.push(all);
            rest = behind;
        }
        found.parts.reverse();
        found
    }
}

/// log2 of the largest error of a step, or a little more.
fn block_size<R: Real>(block: &Block<R>) -> i64 {
    let sizes = block.generators.iter().enumerate().filter_map(|(i, g)| {
        let own = g
            .turn
            .iter()
            .chain(&g.boost)
            .filter_map(R::exponent)
            .max()?;
        Some(own + half(block.covariance[i][i].exponent()?))
    });
    sizes.max().map_or(i64::MIN / 2, |size| size + 4)
}

impl<R: Real> Carried<R> {
    fn collect(&mut self, block: &Block<R>, seen: &[Generator<R>]) {
        let root = &block.root;
        self.direction = self.direction.max(block.direction);
        let deviation = |generators: &[Generator<R>], k| Generator {
            turn: combine(generators, |g| &g.turn, root, k),
            boost: combine(generators, |g| &g.boost, root, k),
        };
        for k in 0..seen.len() {
            self.generators.push(deviation(seen, k));
            self.local.push(deviation(&block.generators, k));
            let growth: f64 = block
                .growth
                .iter()
                .zip(root)
                .map(|(x, row)| x * row[k])
                .sum();
            self.growth.push(seen[0].turn[0].of(growth));
        }
    }
}

impl<R: Real> Propagated<R> {
    /// The covariance of the answer, in V²/m².
    pub fn total(&self) -> Matrix6<R> {
        let zero = self.field.e[0].of(0.0);
        let mut sum = std::array::from_fn(|_| std::array::from_fn(|_| zero.clone()));
        for (_, part) in &self.parts {
            add_to(&mut sum, part);
        }
        sum
    }

    /// Whether numbers of so many bits keep enough of every standard uncertainty.
    fn is_kept(&self, bits: i64) -> bool {
        let total = self.total();
        (0..6).all(|i| {
            total[i][i].exponent().is_none_or(|variance| {
                !total[i][i].is_negative() && half(variance) - self.size >= KEPT_BITS - bits
            })
        })
    }

    /// Sets to zero what vanishes to the last of so many bits, or nearly so.
    fn clean(&mut self, bits: i64) {
        let total = self.total();
        for i in 0..6 {
            let vanishes = total[i][i]
                .exponent()
                .is_some_and(|variance| half(variance) - self.size < KEPT_BITS - bits);
            if vanishes || total[i][i].is_negative() {
                let zero = total[i][i].of(0.0);
                for (_, part) in &mut self.parts {
                    part[i] = std::array::from_fn(|_| zero.clone());
                    for row in part.iter_mut() {
                        row[i] = zero.clone();
                    }
                }
            }
        }
    }
}
