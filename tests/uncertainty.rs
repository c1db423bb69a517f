//! Laws that the propagation of uncertainty obeys, on random readings and ways.

use std::sync::Arc;

use lodeframe::physics::boost::Motion;
use lodeframe::physics::constants::C;
use lodeframe::physics::covariance::Covariance;
use lodeframe::physics::field::{FieldUnits, Measured};
use lodeframe::physics::lorentz::{Change, Step};
use lodeframe::physics::propagation::Inputs;
use lodeframe::physics::resolved::Resolved;
use lodeframe::physics::rotation::Turn;
use lodeframe::physics::scale::Scale;
use lodeframe::physics::uncertain::{Errors, UncertainReading, UncertainStep};
use lodeframe::physics::uncertainty::{InUnits, Uncertainty};
use proptest::prelude::*;

fn vector(size: f64) -> impl Strategy<Value = [f64; 3]> {
    [-size..size, -size..size, -size..size]
}

/// E and cB of like size, with a covariance of rank four at least.
fn reading() -> impl Strategy<Value = (Measured, UncertainReading)> {
    let factors = proptest::array::uniform6(proptest::array::uniform4(-10.0..10.0f64));
    (vector(1e3), vector(1e3 / C), factors).prop_map(|(e, b, factors)| {
        let unit = |i: usize| if i < 3 { 1.0 } else { 1.0 / C };
        let element = |i: usize, j: usize| {
            let product: f64 = (0..4).map(|k| factors[i][k] * factors[j][k]).sum();
            product * unit(i) * unit(j)
        };
        let matrix = std::array::from_fn(|i| std::array::from_fn(|j| element(i, j)));
        (Measured::new(e, b, FieldUnits::SI), known_to(matrix))
    })
}

fn known_to(matrix: [[f64; 6]; 6]) -> UncertainReading {
    UncertainReading {
        field: Covariance::of_matrix(matrix).expect("positive semi-definite"),
        calibration: [None; 2],
    }
}

fn step() -> impl Strategy<Value = Step> {
    let sigma = || proptest::option::of([0.0..1e-2f64, 0.0..1e-2, 0.0..1e-2]);
    let three = |sigma| Covariance::of_standard(sigma).expect("positive");
    let boost = (vector(0.5), sigma()).prop_map(move |(value, sigma)| {
        let beta = Scale::ONE;
        let change = Change::Boost(Motion::Velocity { value, beta });
        (change, sigma.map(|sigma| Errors::Velocity(three(sigma))))
    });
    let turn = (-3.0..3.0f64, sigma()).prop_map(move |(angle, sigma)| {
        let radians = Scale::ONE;
        let axis = [1.0, 2.0, -2.0];
        let change = Change::Rotate(Turn::AxisAngle {
            axis,
            angle,
            radians,
        });
        let axes = |sigma| Errors::Axes {
            angles: three(sigma),
            radians,
        };
        (change, sigma.map(axes))
    });
    (prop_oneof![boost, turn], any::<bool>()).prop_map(|((change, errors), inverse)| Step {
        change,
        inverse,
        uncertainty: errors.map(|errors| {
            let source = String::new();
            Arc::new(UncertainStep { errors, source })
        }),
    })
}

fn way() -> impl Strategy<Value = Vec<Step>> {
    proptest::collection::vec(step(), 1..5)
}

fn resolved(steps: Vec<Step>) -> Resolved {
    Resolved::new(steps).expect("slow steps resolve")
}

fn exact(steps: Vec<Step>) -> Vec<Step> {
    let certain = |step: Step| Step {
        uncertainty: None,
        ..step
    };
    steps.into_iter().map(certain).collect()
}

fn found(way: &Resolved, field: &Measured, reading: Option<&UncertainReading>) -> Uncertainty {
    let inputs = Inputs {
        way,
        field,
        reading,
    };
    inputs.propagate(InUnits(FieldUnits::SI))
}

fn restated(way: &Resolved, field: &Measured) -> Measured {
    let applied = way.apply(field, FieldUnits::SI).expect("no overflow");
    Measured::new(applied.e, applied.b, FieldUnits::SI)
}

/// The largest difference of two covariance matrices, of E and cB, over the largest variance.
fn departure(a: &[[f64; 6]; 6], b: &[[f64; 6]; 6]) -> f64 {
    let unit = |i: usize| if i < 3 { 1.0 } else { C };
    let each = |of: &dyn Fn(usize, usize) -> f64| {
        let elements = (0..36).map(|n| of(n / 6, n % 6) * unit(n / 6) * unit(n % 6));
        elements.fold(0.0f64, |most, x| most.max(x.abs()))
    };
    each(&|i, j| a[i][j] - b[i][j]) / each(&|i, j| b[i][j])
}

/// By how much a way can stretch the square of a field, there and back.
fn stretch(way: &Resolved) -> f64 {
    (2.0 * way.matrix()[(0, 0)]).powi(4)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(64))]

    /// What is known after a way is all that counts for the next one: steps are independent.
    #[test]
    fn two_ways_in_a_row_are_one(first in way(), second in way(), (field, reading) in reading()) {
        let (there, on) = (resolved(first.clone()), resolved(second.clone()));
        let halfway = known_to(found(&there, &field, Some(&reading)).covariance);
        let in_two = found(&on, &restated(&there, &field), Some(&halfway));
        let in_one = found(&resolved([first, second].concat()), &field, Some(&reading));
        let off = departure(&in_two.covariance, &in_one.covariance);
        prop_assert!(off < 1e-14 * stretch(&there) * stretch(&on), "{off:e}");
    }

    /// A way that is known exactly loses nothing.
    #[test]
    fn there_and_back_is_where_it_was(steps in way(), (field, reading) in reading()) {
        let steps = exact(steps);
        let there = resolved(steps.clone());
        let back = resolved(lodeframe::chain::inverse(steps));
        let halfway = known_to(found(&there, &field, Some(&reading)).covariance);
        let again = found(&back, &restated(&there, &field), Some(&halfway));
        let at_first = found(&resolved(Vec::new()), &field, Some(&reading));
        let off = departure(&again.covariance, &at_first.covariance);
        prop_assert!(off < 1e-14 * stretch(&there), "{off:e}");
    }

    /// Every frame agrees on the invariants and on how well they are known, whatever the errors of
    /// the way: the answer's own covariance says the same when the way is exact.
    #[test]
    fn uncertainties_of_invariants_are_kept(steps in way(), (field, reading) in reading()) {
        let (as_given, certain) = (resolved(steps.clone()), resolved(exact(steps)));
        let at_first = found(&as_given, &field, Some(&reading)).invariants;
        let after = known_to(found(&certain, &field, Some(&reading)).covariance);
        let answer = restated(&certain, &field);
        let kept = found(&resolved(Vec::new()), &answer, Some(&after)).invariants;
        for (kept, first) in kept.into_iter().zip(at_first) {
            let size = 1e-14 * stretch(&certain) * 1e3 * 30.0;
            prop_assert!((kept - first).abs() <= size + 1e-12 * first, "{kept} {first}");
        }
    }

    /// Parts add up, and so do the shares of every component.
    #[test]
    fn shares_add_up_to_one(steps in way(), (field, reading) in reading()) {
        let answer = found(&resolved(steps), &field, Some(&reading));
        for i in 0..6 {
            let sum: f64 = answer.shares.iter().map(|(_, share)| share[i]).sum();
            prop_assert!((sum - 1.0).abs() < 1e-12, "{sum}");
        }
    }

    /// The half axes enclose what the covariance says: trace and determinant are those of the block.
    #[test]
    fn half_axes_have_the_trace_of_the_covariance(steps in way(), (field, reading) in reading()) {
        let answer = found(&resolved(steps), &field, Some(&reading));
        for (which, ellipsoid) in answer.coverage.iter().enumerate() {
            let k2 = lodeframe::physics::coverage::FACTOR.powi(2);
            let trace: f64 = (0..3).map(|i| answer.covariance[3 * which + i][3 * which + i]).sum();
            let axes: f64 = ellipsoid.half_axes.iter().map(|x| x * x / k2).sum();
            prop_assert!((axes / trace - 1.0).abs() < 1e-13);
        }
    }
}

/// Only a reading is uncertain: the way is linear, and the verdict knows.
#[test]
fn an_exact_way_is_linear_however_large_the_errors() {
    let field = Measured::new([1.0, 2.0, 3.0], [0.0, 0.0, 1e-8], FieldUnits::SI);
    let reading = UncertainReading {
        field: Covariance::of_standard([1e3; 6]).expect("positive"),
        calibration: [None; 2],
    };
    let motion = Motion::Gamma {
        direction: [1.0, 2.0, 3.0],
        gamma: 50.0,
    };
    let way = resolved(vec![Step::exact(Change::Boost(motion))]);
    let linearity = found(&way, &field, Some(&reading)).linearity;
    assert!(linearity.holds);
    assert_eq!(linearity.second_order, 0.0);
}

/// Nothing but a velocity along x is uncertain: in other directions first order says that E is
/// exact, and second order does not.
#[test]
fn a_flat_ellipsoid_is_not_linear() {
    let field = Measured::new([1.0, 2.0, 3.0], [0.0, 0.0, 1e-6], FieldUnits::SI);
    let motion = Motion::Velocity {
        value: [0.3, 0.2, 0.1],
        beta: Scale::ONE,
    };
    let errors = Errors::Velocity(Covariance::of_standard([1e-3, 0.0, 0.0]).expect("positive"));
    let source = String::new();
    let step = Step {
        uncertainty: Some(Arc::new(UncertainStep { errors, source })),
        ..Step::exact(Change::Boost(motion))
    };
    let linearity = found(&resolved(vec![step]), &field, None).linearity;
    assert!(
        !linearity.holds && linearity.second_order > 1e6,
        "{linearity:?}"
    );
}
