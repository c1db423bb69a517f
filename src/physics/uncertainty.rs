//! What is said about the uncertainty of an answer, in its units: standard uncertainties,
//! covariance, coverage, what follows from E and B, and where it comes from.

use super::coverage::Ellipsoid;
use super::field::{Field, FieldUnits, Measured};
use super::linearity::Linearity;
use super::propagation::{Inputs, Matrix6, Propagated, Source, Use};
use super::real::{Real, Vec3, cross, dot, norm2, scale, sub};

/// The uncertainty of an answer. Numbers past the largest double are infinite.
#[derive(Clone, Debug, PartialEq)]
pub struct Uncertainty {
    /// Standard uncertainties of ex ey ez bx by bz, in the units of the answer.
    pub standard: [f64; 6],
    /// Their covariance matrix.
    pub covariance: [[f64; 6]; 6],
    /// Their correlation coefficients: 1 on the diagonal, 0 beside a component without uncertainty.
    pub correlation: [[f64; 6]; 6],
    /// Coverage ellipsoids of E and of B.
    pub coverage: [Ellipsoid; 2],
    /// |E| and |B| with their standard uncertainties; `None` where the length is zero.
    pub lengths: [Option<[f64; 2]>; 2],
    /// The angle between E and B in rad with its standard uncertainty; `None` where E and B are
    /// parallel or one of them vanishes.
    pub angle: Option<[f64; 2]>,
    /// Standard uncertainties of E²−c²B² and of E·cB, in V²/m².
    pub invariants: [f64; 2],
    /// Standard uncertainty of the speed over c of the frame of parallel fields; `None` where
    /// the fields are parallel already or null.
    pub parallel_speed: Option<f64>,
    /// How much of the variance of each component comes from each source, from 0 to 1; what E and
    /// B share may be negative. Zero of a component without uncertainty.
    pub shares: Vec<(Source, [f64; 6])>,
    /// Whether first order is enough.
    pub linearity: Linearity,
}

/// Draws up the uncertainty in the given units.
#[derive(Clone, Copy, Debug)]
pub struct InUnits(pub FieldUnits);

impl Use for InUnits {
    type Output = Uncertainty;

    fn with<R: Real>(self, propagated: &Propagated<R>) -> Uncertainty {
        let context = propagated.answer.e[0].context();
        let units = self
            .0
            .volts_per_metre::<R>(context)
            .map(|unit| unit.of(1.0) / unit);
        let total = propagated.total();
        let restated = |m: &Matrix6<R>| -> Matrix6<R> {
            std::array::from_fn(|i| {
                std::array::from_fn(|j| {
                    m[i][j].clone() * units[i / 3].clone() * units[j / 3].clone()
                })
            })
        };
        let own = restated(&total);
        let deviation: [R; 6] = std::array::from_fn(|i| root(&total[i][i]));
        let correlation = |i: usize, j: usize| {
            if i == j {
                1.0
            } else if deviation[i].is_zero() || deviation[j].is_zero() {
                0.0
            } else {
                let product = deviation[i].clone() * deviation[j].clone();
                (total[i][j].clone() / product).to_f64().clamp(-1.0, 1.0) + 0.0
            }
        };
        let share = |part: &Matrix6<R>, i: usize| {
            if total[i][i].is_zero() {
                0.0
            } else {
                (part[i][i].clone() / total[i][i].clone()).to_f64() + 0.0
            }
        };
        let block = |offset: usize| -> [[R; 3]; 3] {
            std::array::from_fn(|i| std::array::from_fn(|j| own[offset + i][offset + j].clone()))
        };
        let question = invariant_gradients(&propagated.field);
        let along = |m: &Matrix6<R>, gradient: &Field<R>| root(&variance(m, gradient));
        Uncertainty {
            standard: std::array::from_fn(|i| {
                (deviation[i].clone() * units[i / 3].clone()).to_f64()
            }),
            covariance: own
                .each_ref()
                .map(|row| row.each_ref().map(|x| x.to_f64() + 0.0)),
            correlation: std::array::from_fn(|i| std::array::from_fn(|j| correlation(i, j))),
            coverage: [0, 3].map(|offset| Ellipsoid::of(&block(offset))),
            lengths: [0, 1].map(|which| {
                let (length, gradient) = length(&propagated.answer, which)?;
                let unit = &units[which];
                Some([length, along(&total, &gradient)].map(|x| (x * unit.clone()).to_f64()))
            }),
            angle: angle(&propagated.answer)
                .map(|(angle, gradient)| [angle, along(&total, &gradient).to_f64()]),
            invariants: question.map(|g| along(&propagated.question, &g).to_f64()),
            parallel_speed: parallel_speed(propagated)
                .map(|gradient| along(&total, &gradient).to_f64()),
            shares: propagated
                .parts
                .iter()
                .map(|(source, part)| (*source, std::array::from_fn(|i| share(part, i))))
                .collect(),
            linearity: Linearity::of(propagated, &total),
        }
    }
}

/// The square root of a variance, which rounding may have left below zero.
fn root<R: Real>(variance: &R) -> R {
    if variance.is_negative() {
        variance.of(0.0)
    } else {
        variance.sqrt()
    }
}

/// gᵀ C g.
fn variance<R: Real>(covariance: &Matrix6<R>, gradient: &Field<R>) -> R {
    let part = |i: usize| {
        if i < 3 {
            &gradient.e[i]
        } else {
            &gradient.cb[i - 3]
        }
    };
    let mut sum = covariance[0][0].of(0.0);
    for (i, row) in covariance.iter().enumerate() {
        for (j, element) in row.iter().enumerate() {
            sum = sum + part(i).clone() * element.clone() * part(j).clone();
        }
    }
    sum
}

/// How E² − c²B² and E·cB change with E and cB.
fn invariant_gradients<R: Real>(field: &Field<R>) -> [Field<R>; 2] {
    let twice = |v: &Vec3<R>, sign: f64| scale(&v[0].of(2.0 * sign), v);
    let difference = Field {
        e: twice(&field.e, 1.0),
        cb: twice(&field.cb, -1.0),
    };
    let product = Field {
        e: field.cb.clone(),
        cb: field.e.clone(),
    };
    [difference, product]
}

/// |E| (`which` 0) or |cB| and how it changes; `None` when it is zero.
fn length<R: Real>(field: &Field<R>, which: usize) -> Option<(R, Field<R>)> {
    let vector = if which == 0 { &field.e } else { &field.cb };
    let length = norm2(vector).sqrt();
    if length.is_zero() {
        return None;
    }
    let unit = vector.clone().map(|x| x / length.clone());
    let zero = unit.clone().map(|x| x.of(0.0));
    let (e, cb) = if which == 0 {
        (unit, zero)
    } else {
        (zero, unit)
    };
    Some((length, Field { e, cb }))
}

/// The angle between E and B and how it changes: each turns it by what moves it in their plane.
fn angle<R: Real>(field: &Field<R>) -> Option<(f64, Field<R>)> {
    let Field { e, cb } = field;
    let normal = cross(e, cb);
    let size = norm2(&normal).sqrt();
    if size.is_zero() {
        return None;
    }
    let product = dot(e, cb);
    // Brought near one first, so that no double overflows.
    let n = size.exponent().max(product.exponent()).unwrap_or(0) as i32;
    let angle = libm::atan2(size.scale2(-n).to_f64(), product.scale2(-n).to_f64());
    let per = |v: &Vec3<R>| size.of(1.0) / (norm2(v) * size.clone());
    let gradient = Field {
        e: scale(&per(e), &cross(e, &normal)),
        cb: scale(&per(cb), &cross(&normal, cb)),
    };
    Some((angle, gradient))
}

/// How the speed β = 2S/(U+I) of the frame of parallel fields changes, with S = |E×cB|,
/// U = E²+c²B² and I² = U²−4S², an invariant: dβ = 2(U dS − S dU)/(I(U+I)).
fn parallel_speed<R: Real>(propagated: &Propagated<R>) -> Option<Field<R>> {
    let Field { e, cb } = &propagated.answer;
    let normal = cross(e, cb);
    let s = norm2(&normal).sqrt();
    let u = norm2(e) + norm2(cb);
    let [difference, product, _] = super::invariants::of_field(&propagated.field);
    let i = (difference.square() + product.square().scale2(2)).sqrt();
    if s.is_zero() || i.is_zero() {
        return None;
    }
    let unit = normal.map(|x| x / s.clone());
    let factor = i.of(2.0) / (i.clone() * (u.clone() + i));
    let gradient = |own: &Vec3<R>, of_s: Vec3<R>| {
        let both = sub(&scale(&u, &of_s), &scale(&s.scale2(1), own));
        scale(&factor, &both)
    };
    Some(Field {
        e: gradient(e, cross(cb, &unit)),
        cb: gradient(cb, cross(&unit, e)),
    })
}

/// Standard uncertainties of ex ey ez bx by bz alone, in the given units.
#[derive(Clone, Copy, Debug)]
pub struct Standard(pub FieldUnits);

impl Use for Standard {
    type Output = [f64; 6];

    fn with<R: Real>(self, propagated: &Propagated<R>) -> [f64; 6] {
        let context = propagated.answer.e[0].context();
        let units = self
            .0
            .volts_per_metre::<R>(context)
            .map(|unit| unit.of(1.0) / unit);
        let total = propagated.total();
        std::array::from_fn(|i| (root(&total[i][i]) * units[i / 3].clone()).to_f64())
    }
}

/// Which components of an answer have an uncertainty that depends on a missing component of the
/// reading: errors of the steps turn it into them.
pub fn depends_on_missing(inputs: &Inputs, missing: [[bool; 3]; 2]) -> [bool; 6] {
    let mut depends = [false; 6];
    for k in (0..6).filter(|k| missing[k / 3][k % 3]) {
        let mut unit = [[0.0; 3]; 2];
        unit[k / 3][k % 3] = 1.0;
        let field = Measured::new(unit[0], unit[1], inputs.field.units);
        let alone = Inputs {
            field: &field,
            reading: None,
            ..*inputs
        };
        if alone.any() {
            let by_steps = alone.propagate(Standard(FieldUnits::SI));
            depends = std::array::from_fn(|i| depends[i] || by_steps[i] != 0.0);
        }
    }
    depends
}
