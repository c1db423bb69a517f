//! What happens to the errors of a field on their way, made ready step by step.

use super::change::{Change, Directed, Speed, Velocity};
use crate::physics::boost::Motion;
use crate::physics::double_double::Dd;
use crate::physics::error::Impossible;
use crate::physics::field::{FieldUnits, Kernel, Measured};
use crate::physics::lorentz::{Change as Stated, Net, Step};
use crate::physics::real::{Real, Vec3, cross, norm2, round, scale, vector};
use crate::physics::resolved::Resolved;
use crate::physics::uncertain::{Errors, UncertainReading};

/// One thing that happens to them.
#[derive(Clone, Debug)]
pub(super) enum Stage {
    /// Steps without errors: a matrix acting on the six errors of E and cB.
    Carry([[f64; 6]; 6]),
    /// A step with errors, and the field without errors that its change acts on.
    Draw(Change, [[f64; 3]; 2]),
}

/// A power of two near the field in V/m, or near its errors where it is zero.
pub(super) fn exponent(field: &Measured, uncertain: Option<&UncertainReading>) -> i32 {
    let volts = field.units.volts_per_metre(());
    let errors = || {
        let [e0, e1, e2, b0, b1, b2] = uncertain?.field.standard();
        Measured::new([e0, e1, e2], [b0, b1, b2], field.units).exponent(&volts)
    };
    field.exponent(&volts).or_else(errors).unwrap_or(0)
}

/// The stages of a way, E and cB of the field divided by 2ⁿ.
///
/// # Errors
/// A field between the steps is larger than the largest double.
pub(super) fn of(way: &Resolved, field: &Measured, n: i32) -> Result<Vec<Stage>, Impossible> {
    let mut making = Making {
        field,
        n,
        so_far: Resolved::new(Vec::new())?,
        pending: Vec::new(),
        stages: Vec::new(),
    };
    for step in way.steps() {
        let Some(uncertain) = &step.uncertainty else {
            making.pending.push(step.clone());
            continue;
        };
        // A turn with errors D taken backwards is first the turn D back, then the turn itself.
        let before = step.inverse && matches!(uncertain.errors, Errors::Axes { .. });
        if before {
            making.draw(change(step, &uncertain.errors))?;
            making.pending.push(step.clone());
        } else {
            making.pending.push(step.clone());
            making.draw(change(step, &uncertain.errors))?;
        }
    }
    making.carry()?;
    Ok(making.stages)
}

struct Making<'f> {
    field: &'f Measured,
    n: i32,
    /// The way so far, pending steps aside.
    so_far: Resolved,
    /// Steps since the last stage.
    pending: Vec<Step>,
    stages: Vec<Stage>,
}

impl Making<'_> {
    /// Makes a stage of what is pending.
    fn carry(&mut self) -> Result<(), Impossible> {
        if self.pending.is_empty() {
            return Ok(());
        }
        let part = Resolved::new(std::mem::take(&mut self.pending))?;
        self.stages.push(Stage::Carry(matrix(part.net())));
        self.so_far = Resolved::join([&self.so_far, &part])?;
        Ok(())
    }

    /// Adds a change that happens after all of that.
    fn draw(&mut self, change: Change) -> Result<(), Impossible> {
        self.carry()?;
        let (e, b) = self.so_far.apply(self.field, FieldUnits::SI)?.precise;
        let volts = self.field.units.volts_per_metre::<Dd>(());
        let part = |v: Vec3<Dd>, unit: Dd| round(&v.map(|x| (x * unit).scale2(-self.n)));
        let field = [part(e, volts[0]), part(b, volts[1])];
        self.stages.push(Stage::Draw(change, field));
        Ok(())
    }
}

/// How a net transformation acts on E and cB.
fn matrix(net: &Net<Dd>) -> [[f64; 6]; 6] {
    // Where the unit of B is that of E over c.
    let b = FieldUnits::SI.e.over(FieldUnits::SI.cb_over_e());
    let kernel = Kernel::new(
        net,
        FieldUnits {
            b,
            ..FieldUnits::SI
        },
        (),
    );
    let mut matrix = [[0.0; 6]; 6];
    for column in 0..6 {
        let mut unit = [0.0; 6];
        unit[column] = 1.0;
        let [e0, e1, e2, b0, b1, b2] = unit;
        let (e, b) = kernel.apply(&vector::<Dd>([e0, e1, e2], ()), &vector([b0, b1, b2], ()));
        for (row, x) in round(&e).into_iter().chain(round(&b)).enumerate() {
            matrix[row][column] = x;
        }
    }
    matrix
}

/// What the errors of a step change. A boost backwards is one of the opposite velocity.
fn change(step: &Step, uncertain: &Errors) -> Change {
    let sign = if step.inverse { -1.0 } else { 1.0 };
    let scaled = |root: &[[f64; 3]; 3], factor: f64| root.map(|row| row.map(|x| x * factor));
    match (uncertain, &step.change) {
        (Errors::Velocity(errors), Stated::Boost(motion)) => {
            let unit = match motion {
                Motion::Velocity { beta, .. } => beta.to_f64(),
                _ => 1.0,
            };
            Change::Velocity {
                exact: velocity(motion, sign),
                root: scaled(errors.root(), sign * unit),
            }
        }
        (
            Errors::Turning {
                angular_velocity: errors,
                position: errors_of_position,
            },
            Stated::Boost(
                motion @ Motion::Turning {
                    angular_velocity,
                    position,
                    beta,
                },
            ),
        ) => {
            let unit = sign * beta.to_f64();
            Change::Turning {
                exact: velocity(motion, sign),
                angular_velocity: angular_velocity.map(|x| x * unit),
                position: *position,
                roots: [scaled(errors.root(), unit), *errors_of_position.root()],
            }
        }
        (
            Errors::Directed {
                value,
                direction,
                radians,
            },
            Stated::Boost(motion),
        ) => directed(motion, sign, *value, direction * radians.to_f64()),
        (Errors::Axes { angles, radians }, _) => Change::Axes {
            root: scaled(angles.root(), sign * radians.to_f64()),
        },
        _ => unreachable!("errors are of the kind of their step"),
    }
}

fn velocity(motion: &Motion, sign: f64) -> Velocity {
    let boost = motion.boost::<Dd>(());
    Velocity {
        beta: round(&boost.beta()).map(|x| x * sign),
        gamma: boost.gamma.hi,
    }
}

fn directed(motion: &Motion, sign: f64, value: f64, direction: f64) -> Change {
    let boost = motion.boost::<Dd>(());
    let length = norm2(&boost.direction).sqrt();
    let n = boost.direction.map(|x| x / length);
    // The coordinate axis most across it gives two perpendicular ones.
    let least = (0..3).min_by(|&i, &j| n[i].hi.abs().total_cmp(&n[j].hi.abs()));
    let mut axis = [0.0; 3];
    axis[least.unwrap_or(0)] = 1.0;
    let other = cross(&n, &vector::<Dd>(axis, ()));
    let other = scale(&(Dd::from_f64(1.0) / norm2(&other).sqrt()), &other);
    let across = cross(&other, &n);
    // Of the speed along the direction; that of its error is the step's alone.
    let along = if boost.stretch.is_negative() {
        -sign
    } else {
        sign
    };
    let half = |twice: Dd| twice.scale2(-1).sqrt().hi;
    let gamma = boost.gamma.hi;
    let (speed, value) = match *motion {
        Motion::Speed { .. } => {
            let beta = boost.beta();
            let beta = norm2(&beta).sqrt().hi * along;
            (Speed::Beta { beta, gamma }, value * sign)
        }
        Motion::KineticEnergy { rest, ratio, .. } => {
            (Speed::Gamma { sign: along }, value * ratio.to_f64() / rest)
        }
        Motion::Gamma { .. } => (Speed::Gamma { sign: along }, value),
        _ => (Speed::Rapidity, value * sign),
    };
    Change::Directed {
        exact: Directed {
            axes: [n, across, other].map(|v| round(&v)),
            half: [
                half(boost.gamma_less_one()) * along,
                half(boost.gamma + Dd::from_f64(1.0)),
            ],
            speed,
        },
        value,
        direction,
    }
}
