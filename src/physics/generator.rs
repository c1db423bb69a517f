//! Small Lorentz transformations: what a small error of a step does to a field.
//!
//! A turn of the axes by φ and a boost by w, both small, change a field by
//! δE = w×cB − φ×E and δcB = −w×E − φ×cB: with F = E + icB and z = φ + iw, δF = −z×F. Since a
//! Lorentz transformation is a complex rotation O of F, the same error seen after it is Oz: turn
//! and boost transform as E and cB do.

use super::boost::Motion;
use super::covariance::Covariance;
use super::field::{Field, Kernel};
use super::lorentz::{Change, Step};
use super::pure_boost::Boost;
use super::real::{Real, Vec3, add, cross, dot, norm2, scale, sub, vector};
use super::uncertain::Errors;

/// A small turn and a small boost.
#[derive(Clone, Debug)]
pub struct Generator<R> {
    /// φ, the turn of the axes, in rad.
    pub turn: Vec3<R>,
    /// w, the velocity over c.
    pub boost: Vec3<R>,
}

impl<R: Real> Generator<R> {
    /// The change of a field.
    pub fn act(&self, field: &Field<R>) -> Field<R> {
        let (turn, boost) = (&self.turn, &self.boost);
        Field {
            e: sub(&cross(boost, &field.cb), &cross(turn, &field.e)),
            cb: sub(&cross(&field.e, boost), &cross(turn, &field.cb)),
        }
    }

    /// The same error as seen after a transformation of fields in one unit.
    pub fn seen_after(&self, kernel: &Kernel<R>) -> Generator<R> {
        let (turn, boost) = kernel.apply(&self.turn, &self.boost);
        Generator { turn, boost }
    }

    fn back(self) -> Generator<R> {
        Generator {
            turn: self.turn.map(|x| -x),
            boost: self.boost.map(|x| -x),
        }
    }
}

/// Errors of a step that are independent of its other ones.
#[derive(Clone, Debug)]
pub struct Block<R> {
    /// What one unit of each does.
    pub generators: Vec<Generator<R>>,
    /// Their covariance matrix.
    pub covariance: Vec<Vec<R>>,
    /// L with L Lᵀ that matrix, rounded.
    pub root: Vec<Vec<f64>>,
    /// How the generators grow with the error itself: one unit of error a more, and those of the
    /// same step are larger by this part.
    pub growth: Vec<f64>,
    /// Standard uncertainty of a direction in rad, in all: it turns by more than its generators.
    pub direction: f64,
}

/// The errors of a step as seen where it ends as it is taken, or, for a step taken backwards,
/// where it begins.
pub fn blocks<R: Real>(step: &Step, errors: &Errors, context: R::Context) -> Vec<Block<R>> {
    let unit = |i: usize, length: &R| -> Vec3<R> {
        std::array::from_fn(|j| {
            if i == j {
                length.clone()
            } else {
                length.of(0.0)
            }
        })
    };
    let still = || vector::<R>([0.0; 3], context);
    let mut blocks = match (&step.change, errors) {
        (Change::Boost(motion), Errors::Velocity(covariance)) => {
            let (boost, beta) = (motion.boost::<R>(context), motion.beta().value(context));
            let generators = [0, 1, 2].map(|i| of_velocity(&boost, &unit(i, &beta)));
            vec![Block::new(generators, covariance, &boost)]
        }
        (
            Change::Boost(motion),
            Errors::Turning {
                angular_velocity,
                position,
            },
        ) => {
            let Motion::Turning {
                angular_velocity: omega,
                position: r,
                ..
            } = motion
            else {
                return Vec::new();
            };
            let (boost, beta) = (motion.boost::<R>(context), motion.beta().value(context));
            let (omega, r) = (vector::<R>(*omega, context), vector::<R>(*r, context));
            let by_omega = [0, 1, 2].map(|i| of_velocity(&boost, &cross(&unit(i, &beta), &r)));
            let by_r = [0, 1, 2].map(|i| of_velocity(&boost, &cross(&omega, &unit(i, &beta))));
            vec![
                Block::new(by_omega, angular_velocity, &boost),
                Block::new(by_r, position, &boost),
            ]
        }
        (
            Change::Boost(motion),
            Errors::Directed {
                value,
                direction,
                radians,
            },
        ) => {
            let boost = motion.boost::<R>(context);
            let radians = radians.value::<R>(context);
            let about = [0, 1, 2].map(|i| of_direction(&boost, &unit(i, &radians)));
            let along = scale(&per_value(motion, &boost), &boost.direction);
            let along = Generator {
                turn: still(),
                boost: along,
            };
            let about = Block::independent(about.into(), &[*direction; 3], vec![0.0; 3], context);
            vec![
                Block {
                    direction: direction * radians.to_f64() * std::f64::consts::SQRT_2,
                    ..about
                },
                Block::independent(vec![along], &[*value], vec![bend(motion)], context),
            ]
        }
        (Change::Rotate(_), Errors::Axes { angles, radians }) => {
            let radians = radians.value::<R>(context);
            let generators = [0, 1, 2].map(|i| Generator {
                turn: unit(i, &radians),
                boost: still(),
            });
            vec![Block {
                generators: generators.into(),
                covariance: angles.matrix(context).map(Vec::from).into(),
                root: angles.root().map(Vec::from).into(),
                growth: vec![0.0; 3],
                direction: 0.0,
            }]
        }
        // Errors of another kind of step than this one: none.
        _ => Vec::new(),
    };
    if step.inverse {
        for block in &mut blocks {
            let generators = std::mem::take(&mut block.generators);
            block.generators = generators.into_iter().map(Generator::back).collect();
        }
    }
    blocks
}

impl<R: Real> Block<R> {
    /// Of the components of a velocity, or of what it is linear in.
    fn new(generators: [Generator<R>; 3], covariance: &Covariance<3>, boost: &Boost<R>) -> Self {
        let context = boost.gamma.context();
        // The true velocity in the stated frame is w(1 + β·w + ..).
        let beta = boost.beta();
        let growth = generators.iter().map(|g| dot(&beta, &g.boost).to_f64());
        Block {
            growth: growth.collect(),
            generators: generators.into(),
            covariance: covariance.matrix(context).map(Vec::from).into(),
            root: covariance.root().map(Vec::from).into(),
            direction: 0.0,
        }
    }

    fn independent(
        generators: Vec<Generator<R>>,
        standard: &[f64],
        growth: Vec<f64>,
        context: R::Context,
    ) -> Self {
        let count = generators.len();
        let element = |i: usize, j: usize| if i == j { standard[i] } else { 0.0 };
        let row = |i| (0..count).map(move |j| element(i, j));
        Block {
            generators,
            covariance: (0..count)
                .map(|i| row(i).map(|x| R::new(x, context).square()).collect())
                .collect(),
            root: (0..count).map(|i| row(i).collect()).collect(),
            growth,
            direction: 0.0,
        }
    }
}

/// What an error δβ of the velocity does, as seen in the next frame: a boost by
/// γ(I + (γ−1)nnᵀ)δβ and a turn by γ²/(γ+1) β×δβ (Jackson, Classical Electrodynamics, 3rd ed.,
/// §11.8, the transformation behind the Thomas precession).
fn of_velocity<R: Real>(boost: &Boost<R>, error: &Vec3<R>) -> Generator<R> {
    let (gamma, d) = (&boost.gamma, &boost.direction);
    let along = boost.curvature() * dot(d, error);
    let turn = gamma.clone() * boost.stretch.clone() / (gamma.clone() + gamma.of(1.0));
    Generator {
        turn: scale(&turn, &cross(d, error)),
        boost: scale(gamma, &add(error, &scale(&along, d))),
    }
}

/// What small angles of the direction do: the velocity turns with them, δβ = δα×β.
fn of_direction<R: Real>(boost: &Boost<R>, angles: &Vec3<R>) -> Generator<R> {
    let d = &boost.direction;
    let across = cross(angles, d);
    Generator {
        turn: scale(&boost.curvature(), &cross(d, &across)),
        boost: scale(&boost.stretch, &across),
    }
}

/// The change of rapidity by one unit of the value beside a direction, over the length of the
/// direction: γ² for β, 1/(γβ) for γ and in units of rest energy.
fn per_value<R: Real>(motion: &Motion, boost: &Boost<R>) -> R {
    let gamma = boost.gamma.clone();
    let context = gamma.context();
    let length = norm2(&boost.direction).sqrt();
    // |γβ|: a γ or an energy has no sign.
    let gamma_beta = (boost.stretch.clone() * length.clone()).abs();
    let change = match *motion {
        Motion::Speed { .. } => gamma.square(),
        Motion::Gamma { .. } => gamma.of(1.0) / gamma_beta,
        Motion::KineticEnergy { rest, ratio, .. } => {
            ratio.value::<R>(context) / (R::new(rest, context) * gamma_beta)
        }
        _ => gamma.of(1.0),
    };
    change / length
}

/// The second derivative of the rapidity by the value, over the first and over two.
fn bend(motion: &Motion) -> f64 {
    match *motion {
        // η = artanh β: η' = γ², η'' = 2βγ⁴.
        Motion::Speed { beta, .. } => beta / ((1.0 - beta) * (1.0 + beta)),
        // η = arcosh γ: η'' = −γ/(γβ)³.
        Motion::Gamma { gamma, .. } => -0.5 * gamma / ((gamma - 1.0) * (gamma + 1.0)),
        Motion::KineticEnergy {
            energy,
            rest,
            ratio,
            ..
        } => {
            let per_energy = ratio.to_f64() / rest;
            let less_one = energy * per_energy;
            -0.5 * per_energy * (less_one + 1.0) / (less_one * (less_one + 2.0))
        }
        _ => 0.0,
    }
}
