//! Whether first order is enough: the second-order terms beside the first-order covariance.
//!
//! The true field is Π(1 − Zₖ + ½Zₖ² ..)(F' + δF'), Zₖ being the errors of step k as seen in the
//! target frame and δF' those of the reading. With independent errors gₐ of variance one, the
//! second order is Q = Σ gₐ g_b V_ab, and r² = E[Qᵀ C⁻¹ Q] measures it in the metric of the
//! coverage ellipsoid of C: r = 0.1 is a second-order term of a tenth of a standard uncertainty.

use std::cmp::Ordering;

use super::eigen;
use super::field::Field;
use super::generator::Generator;
use super::propagation::{Matrix6, Propagated};
use super::real::{Real, Vec3, add, dot, scale};

/// How far first order holds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Linearity {
    /// Whether everything is below [`LIMIT`].
    pub holds: bool,
    /// The larger r of E and of B; infinite where an ellipsoid is flat and second order is not.
    pub second_order: f64,
    /// The largest standard uncertainty of the velocity of a step over c, as seen in its own
    /// frame (the root of the trace of its covariance).
    pub boost: f64,
    /// The largest standard uncertainty of a turn of axes or of a direction in rad (likewise).
    pub turn: f64,
}

/// First order holds while the second-order term and the errors of every step are below this.
pub const LIMIT: f64 = 0.1;

impl Linearity {
    /// Of errors propagated to a covariance.
    pub fn of<R: Real>(propagated: &Propagated<R>, total: &Matrix6<R>) -> Linearity {
        let zero = propagated.answer.e[0].of(0.0);
        let spread = |of: fn(&Generator<R>) -> &Vec3<R>| {
            let each = propagated.errors.iter().map(|errors| {
                let squares = errors.local.iter().flat_map(of).map(R::square);
                squares.fold(zero.clone(), |sum, x| sum + x).sqrt().to_f64()
            });
            each.fold(0.0, f64::max)
        };
        let boost = spread(|g| &g.boost);
        let directions = propagated.errors.iter().map(|errors| errors.direction);
        let turn = directions.fold(spread(|g| &g.turn), f64::max);
        let terms = terms(propagated);
        let [e, b] = [0, 3].map(|offset| second_order(&terms, total, offset));
        // NaN, which an overflow may have left, is the larger.
        let second_order = if e >= b { e } else { b };
        Linearity {
            holds: second_order < LIMIT && boost < LIMIT && turn < LIMIT,
            second_order,
            boost,
            turn,
        }
    }
}

/// The second order of a pair of errors.
struct Term<R> {
    field: Field<R>,
    /// Whether both are the same error.
    square: bool,
}

/// An error of one standard deviation.
struct Error<R> {
    step: usize,
    generator: Generator<R>,
    growth: R,
    /// Its first order.
    first: Field<R>,
}

/// With more errors than these, their sum is taken instead, as if all were of one step.
const MOST: usize = 48;

fn errors<R: Real>(propagated: &Propagated<R>) -> Vec<Error<R>> {
    let answer = &propagated.answer;
    let zero = answer.e[0].of(0.0);
    let moves = |g: &Generator<R>| g.turn.iter().chain(&g.boost).any(|x| !x.is_zero());
    let error = |step, generator: &Generator<R>, growth: &R| Error {
        step,
        generator: generator.clone(),
        growth: growth.clone(),
        first: generator.act(answer),
    };
    let count: usize = propagated.errors.iter().map(|e| e.generators.len()).sum();
    if count <= MOST {
        let each = propagated.errors.iter().flat_map(|carried| {
            let each = carried.generators.iter().zip(&carried.growth);
            each.map(|(generator, growth)| error(carried.step, generator, growth))
        });
        return each.filter(|error| moves(&error.generator)).collect();
    }
    let mut sum: Matrix6<R> = std::array::from_fn(|_| std::array::from_fn(|_| zero.clone()));
    for generator in propagated.errors.iter().flat_map(|e| &e.generators) {
        let part = |i: usize| {
            if i < 3 {
                &generator.turn[i]
            } else {
                &generator.boost[i - 3]
            }
        };
        for (i, row) in sum.iter_mut().enumerate() {
            for (j, element) in row.iter_mut().enumerate() {
                *element = element.clone() + part(i).clone() * part(j).clone();
            }
        }
    }
    let found = eigen::symmetric(&sum);
    let axes = found.values.iter().zip(&found.vectors);
    axes.filter(|(variance, _)| !variance.is_negative() && !variance.is_zero())
        .map(|(variance, vector)| {
            let size = variance.sqrt();
            let part = |offset: usize| -> Vec3<R> {
                std::array::from_fn(|i| vector[offset + i].clone() * size.clone())
            };
            let generator = Generator {
                turn: part(0),
                boost: part(3),
            };
            error(0, &generator, &zero)
        })
        .collect()
}

fn terms<R: Real>(propagated: &Propagated<R>) -> Vec<Term<R>> {
    let errors = errors(propagated);
    let half = propagated.answer.e[0].of(0.5);
    let one = half.of(1.0);
    let sum = |a: &Field<R>, s: &R, b: &Field<R>, t: &R| Field {
        e: add(&scale(s, &a.e), &scale(t, &b.e)),
        cb: add(&scale(s, &a.cb), &scale(t, &b.cb)),
    };
    let mut terms = Vec::new();
    let mut note = |field, square| terms.push(Term { field, square });
    for (i, a) in errors.iter().enumerate() {
        let own = a.generator.act(&a.first);
        note(sum(&own, &half, &a.first, &a.growth), true);
        for b in &errors[i + 1..] {
            let (ab, ba) = (a.generator.act(&b.first), b.generator.act(&a.first));
            // The error of an earlier step acts first.
            let both = match a.step.cmp(&b.step) {
                Ordering::Greater => ab,
                Ordering::Less => ba,
                Ordering::Equal => {
                    let grown = sum(&a.first, &b.growth, &b.first, &a.growth);
                    sum(&sum(&ab, &half, &ba, &half), &one, &grown, &one)
                }
            };
            note(both, false);
        }
        for read in &propagated.read {
            note(a.generator.act(read), false);
        }
    }
    terms
}

/// r of E (`offset` 0) or B (3).
fn second_order<R: Real>(terms: &[Term<R>], total: &Matrix6<R>, offset: usize) -> f64 {
    let block: [[R; 3]; 3] =
        std::array::from_fn(|i| std::array::from_fn(|j| total[offset + i][offset + j].clone()));
    let found = eigen::symmetric(&block);
    let zero = total[0][0].of(0.0);
    let mut sum = 0.0;
    for (axis, variance) in found.vectors.iter().zip(&found.values) {
        let (mut mean, mut spread) = (zero.clone(), zero.clone());
        for term in terms {
            let field = if offset == 0 {
                &term.field.e
            } else {
                &term.field.cb
            };
            let along = dot(axis, field);
            let square = along.square();
            if term.square {
                mean = mean + along;
                spread = spread + square.scale2(1);
            } else {
                spread = spread + square;
            }
        }
        let square = mean.square() + spread;
        if square.is_zero() {
            continue;
        }
        if variance.is_zero() || variance.is_negative() {
            return f64::INFINITY;
        }
        sum += (square / variance.clone()).to_f64();
    }
    sum.sqrt()
}
