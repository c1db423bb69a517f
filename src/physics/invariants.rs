//! The two Lorentz invariants of a field, E²−c²B² and E·cB, and what they say about it.

use super::big::Big;
use super::double_double::Dd;
use super::field::{Field, Measured};
use super::real::{Real, dot, norm2};

/// What kind of field it is, in every frame alike.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// E² > c²B².
    Electric,
    /// E² < c²B².
    Magnetic,
    /// Both invariants vanish: a plane wave's field.
    Null,
    /// E² = c²B², but E·B does not vanish.
    Balanced,
    /// No field.
    Zero,
}

impl Kind {
    /// The word used in answers.
    pub fn name(self) -> &'static str {
        match self {
            Kind::Electric => "electric",
            Kind::Magnetic => "magnetic",
            Kind::Null => "null",
            Kind::Balanced => "balanced",
            Kind::Zero => "zero",
        }
    }
}

/// The invariants of a question and how well its answer keeps them.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Invariants {
    /// E² − c²B² in V²/m²; `None` when no double holds it.
    pub e2_minus_c2b2: Option<f64>,
    /// E·cB in V²/m²; `None` when no double holds it.
    pub e_dot_cb: Option<f64>,
    /// What kind of field it is.
    pub kind: Kind,
    /// The two divided by 4ⁿ, n being the second member: in range whatever the field.
    pub scaled: ([f64; 2], i32),
    /// The larger change of the two from question to answer, over the larger E² + c²B².
    pub residual: f64,
}

/// |I| at or below this part of E²+c²B² counts as vanished.
const VANISHED: f64 = 1.0 / (1u64 << 50) as f64;
/// Below this part of E²+c²B² two doubles no longer hold an invariant to all digits.
const KEPT: f64 = 1.0 / (1u64 << 40) as f64;
/// Bits used then; what is left after 500 of them is the rounding of unit factors.
const BITS: usize = 640;

/// E² − c²B², E·cB and E² + c²B², in the square of the unit of the field.
pub fn of_field<R: Real>(field: &Field<R>) -> [R; 3] {
    let (e2, cb2) = (norm2(&field.e), norm2(&field.cb));
    [e2.clone() - cb2.clone(), dot(&field.e, &field.cb), e2 + cb2]
}

impl Invariants {
    /// Of a question; the answer is the same field in another frame.
    pub fn of(question: &Measured, answer: &Measured) -> Invariants {
        let volts = question.units.volts_per_metre::<Dd>(());
        let volts = if answer.units == question.units {
            [volts; 2]
        } else {
            [volts, answer.units.volts_per_metre(())]
        };
        let exponents = [question.exponent(&volts[0]), answer.exponent(&volts[1])];
        let n = exponents[0].max(exponents[1]).unwrap_or(0);
        // Squares of numbers of everyday size need no scaling.
        let n = if n.abs() < 100 { 0 } else { n };
        if let Some(found) = in_dd(question, answer, &volts, n) {
            return found;
        }
        let [q, a] = [question, answer].map(|field| {
            let volts = field.units.volts_per_metre(BITS);
            of_field(&field.field::<Big>(n, &volts, BITS))
        });
        let floor = q[2].scale2(-500);
        let clean = |x: &Big| {
            if (x.abs() - floor.clone()).is_negative() {
                x.of(0.0)
            } else {
                x.clone()
            }
        };
        let cleaned = [clean(&q[0]), clean(&q[1]), q[2].clone()];
        finish(&cleaned, residual(&q, &a), n)
    }
}

fn in_dd(
    question: &Measured,
    answer: &Measured,
    volts: &[[Dd; 2]; 2],
    n: i32,
) -> Option<Invariants> {
    let q = question.field(n, &volts[0], ());
    let a = answer.field(n, &volts[1], ());
    let held = |x: &Dd| x.hi == 0.0 || x.hi.abs() > 1e-60;
    if ![&q.e, &q.cb, &a.e, &a.cb].into_iter().flatten().all(held) {
        return None;
    }
    let [difference, product, sum] = of_field(&q);
    // Exactly zero is exact only if nothing was summed.
    let product_size: f64 = (0..3).map(|i| (q.e[i].hi * q.cb[i].hi).abs()).sum();
    if difference.hi.abs() < KEPT * sum.hi || product.hi.abs() < KEPT * product_size {
        return None;
    }
    let q = [difference, product, sum];
    Some(finish(&q, residual(&q, &of_field(&a)), n))
}

fn residual<R: Real>(q: &[R; 3], a: &[R; 3]) -> f64 {
    let change = |i: usize| (a[i].clone() - q[i].clone()).abs();
    let larger = |x: R, y: R| {
        if (x.clone() - y.clone()).is_negative() {
            y
        } else {
            x
        }
    };
    let sum = larger(q[2].clone(), a[2].clone());
    if sum.is_zero() {
        0.0
    } else {
        (larger(change(0), change(1)) / sum).to_f64()
    }
}

fn finish<R: Real>(q: &[R; 3], residual: f64, n: i32) -> Invariants {
    let [difference, product, sum] = q.clone().map(|x| x.to_f64());
    let vanished = |x: f64| x.abs() <= VANISHED * sum;
    let kind = if sum == 0.0 {
        Kind::Zero
    } else if !vanished(difference) {
        if difference > 0.0 {
            Kind::Electric
        } else {
            Kind::Magnetic
        }
    } else if vanished(product) {
        Kind::Null
    } else {
        Kind::Balanced
    };
    let value = |x: &R| {
        let x = if n == 0 {
            x.to_f64()
        } else {
            x.scale2(2 * n).to_f64()
        } + 0.0;
        x.is_finite().then_some(x)
    };
    let scaled = ([difference, product], n);
    Invariants {
        e2_minus_c2b2: value(&q[0]),
        e_dot_cb: value(&q[1]),
        kind,
        scaled,
        residual,
    }
}
