//! Laws that every transformation of a field obeys, on random readings and ways.

use lodeframe::physics::boost::Motion;
use lodeframe::physics::constants::C;
use lodeframe::physics::field::{FieldUnits, Measured};
use lodeframe::physics::invariants::Invariants;
use lodeframe::physics::lorentz::{Change, Step};
use lodeframe::physics::resolved::Resolved;
use lodeframe::physics::rotation::Turn;
use lodeframe::physics::scale::Scale;
use lodeframe::physics::tensor::{FieldTensor, Signature};
use nalgebra::Matrix4;
use proptest::prelude::*;

fn vector(size: f64) -> impl Strategy<Value = [f64; 3]> {
    [-size..size, -size..size, -size..size]
}

fn reading() -> impl Strategy<Value = Measured> {
    // E and cB of like size, so that both parts of each formula count.
    (vector(1e3), vector(1e3 / C)).prop_map(|(e, b)| Measured::new(e, b, FieldUnits::SI))
}

fn boost(value: [f64; 3]) -> Step {
    let motion = Motion::Velocity {
        value,
        beta: Scale::ONE,
    };
    Step::exact(Change::Boost(motion))
}

fn rotation(axis: [f64; 3], angle: f64) -> Step {
    let turn = Turn::AxisAngle {
        axis,
        angle,
        radians: Scale::ONE,
    };
    Step::exact(Change::Rotate(turn))
}

fn step() -> impl Strategy<Value = Step> {
    prop_oneof![
        vector(0.55).prop_map(boost),
        (vector(1.0), -10.0..10.0f64)
            .prop_filter("an axis has a length", |(axis, _)| length(*axis) > 1e-3)
            .prop_map(|(axis, angle)| rotation(axis, angle)),
    ]
}

fn way() -> impl Strategy<Value = Vec<Step>> {
    proptest::collection::vec(step(), 1..6)
}

fn resolved(steps: Vec<Step>) -> Resolved {
    Resolved::new(steps).expect("slow steps resolve")
}

fn go(way: &Resolved, reading: &Measured) -> Measured {
    let applied = way.apply(reading, reading.units).expect("no overflow");
    Measured::new(applied.e, applied.b, reading.units)
}

fn length(v: [f64; 3]) -> f64 {
    v[0].hypot(v[1]).hypot(v[2])
}

/// The largest of |ΔE| and c|ΔB|.
fn distance(a: &Measured, b: &Measured) -> f64 {
    let gap = |a: [f64; 3], b: [f64; 3]| length(std::array::from_fn(|i| a[i] - b[i]));
    gap(a.e, b.e).max(C * gap(a.b, b.b))
}

fn size(a: &Measured) -> f64 {
    length(a.e) + C * length(a.b)
}

/// γ(1+β) of the net boost: by how much it can stretch an error.
fn stretch(way: &Resolved) -> f64 {
    2.0 * way.matrix()[(0, 0)]
}

fn metric() -> Matrix4<f64> {
    Matrix4::from_diagonal(&[1.0, -1.0, -1.0, -1.0].into())
}

proptest! {
    #[test]
    fn a_way_and_its_inverse_cancel(steps in way(), reading in reading()) {
        let there = resolved(steps.clone());
        let back = resolved(lodeframe::chain::inverse(steps));
        let found = go(&back, &go(&there, &reading));
        // One rounding of the field in between, stretched on the way back.
        let bound = 2.0 * f64::EPSILON * stretch(&there).powi(2) * size(&reading);
        prop_assert!(distance(&found, &reading) <= bound);
    }

    #[test]
    fn two_ways_in_a_row_are_one(first in way(), second in way(), reading in reading()) {
        let stretched = stretch(&resolved(first.clone())) * stretch(&resolved(second.clone()));
        let halfway = go(&resolved(first.clone()), &reading);
        let in_two = go(&resolved(second.clone()), &halfway);
        let in_one = go(&resolved([first, second].concat()), &reading);
        prop_assert!(distance(&in_two, &in_one) <= 2.0 * f64::EPSILON * stretched * size(&reading));
    }

    #[test]
    fn invariants_are_kept(steps in way(), reading in reading()) {
        let answer = go(&resolved(steps), &reading);
        let found = Invariants::of(&reading, &answer);
        // Each component is rounded to 2^-53 of the vector it belongs to.
        prop_assert!(found.residual <= 2.0 * f64::EPSILON, "{}", found.residual);
    }

    #[test]
    fn the_tensor_route_agrees(steps in way(), reading in reading()) {
        let way = resolved(steps);
        let direct = go(&way, &reading);
        let tensor = FieldTensor::new(reading.e.map(|x| x / C), reading.b, Signature::MostlyMinus);
        let (e, b) = tensor.transformed(&way.matrix()).electric_and_magnetic();
        let by_tensor = Measured::new(e, b, FieldUnits::SI);
        let bound = 32.0 * f64::EPSILON * stretch(&way).powi(2) * size(&reading);
        prop_assert!(distance(&direct, &by_tensor) <= bound);
    }

    #[test]
    fn the_matrix_preserves_the_metric(steps in way()) {
        let lambda = resolved(steps).matrix();
        let off = lambda.transpose() * metric() * lambda - metric();
        let bound = 16.0 * f64::EPSILON * lambda[(0, 0)].powi(2);
        prop_assert!(off.amax() <= bound, "{off}");
        prop_assert!(lambda[(0, 0)] >= 1.0, "time keeps its direction");
    }

    #[test]
    fn standing_still_changes_no_bit(reading in reading()) {
        prop_assert_eq!(go(&resolved(vec![boost([0.0; 3])]), &reading), reading);
        prop_assert_eq!(go(&resolved(vec![rotation([0.0, 0.0, 1.0], 0.0)]), &reading), reading);
        prop_assert_eq!(go(&resolved(Vec::new()), &reading), reading);
    }

    #[test]
    fn slow_motion_adds_the_motional_field(v in vector(1e3), reading in reading()) {
        // To first order in v/c: E' = E + v×B, B' = B − v×E/c².
        let answer = go(&resolved(vec![boost(v.map(|x| x / C))]), &reading);
        let cross = |a: [f64; 3], b: [f64; 3]| {
            [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
        };
        let (vb, ve) = (cross(v, reading.b), cross(v, reading.e));
        let first_order = Measured::new(
            std::array::from_fn(|i| reading.e[i] + vb[i]),
            std::array::from_fn(|i| reading.b[i] - ve[i] / C / C),
            FieldUnits::SI,
        );
        let second = (length(v) / C).powi(2) + 4.0 * f64::EPSILON;
        prop_assert!(distance(&answer, &first_order) <= second * size(&reading));
    }

    #[test]
    fn a_turn_of_axes_leaves_lengths_and_angles(
        axis in vector(1.0), angle in -10.0..10.0f64, reading in reading()
    ) {
        prop_assume!(length(axis) > 1e-3);
        let turned = go(&resolved(vec![rotation(axis, angle)]), &reading);
        let dot = |f: &Measured| (0..3).map(|i| f.e[i] * f.b[i]).sum::<f64>();
        let near = |a: f64, b: f64, scale: f64| (a - b).abs() <= 4.0 * f64::EPSILON * scale;
        prop_assert!(near(length(turned.e), length(reading.e), length(reading.e)));
        prop_assert!(near(length(turned.b), length(reading.b), length(reading.b)));
        prop_assert!(near(dot(&turned), dot(&reading), length(reading.e) * length(reading.b)));
    }

    #[test]
    fn the_dual_of_the_dual_is_the_negative(e in vector(1.0), b in vector(1.0)) {
        for signature in [Signature::MostlyMinus, Signature::MostlyPlus] {
            let tensor = FieldTensor::new(e, b, signature);
            prop_assert_eq!(tensor.dual().dual().contravariant, -tensor.contravariant);
            prop_assert_eq!(tensor.contravariant.transpose(), -tensor.contravariant);
            prop_assert_eq!(tensor.fields(), (e, b));
        }
    }

    #[test]
    fn the_tensor_maps_a_velocity_to_the_force_on_a_charge(
        e in vector(1e3), b in vector(1e-5), beta in vector(0.5)
    ) {
        // dp^μ/dτ = q F^{μν} U_ν: spatial part γ q (E + v×B), time part γ q E·v/c (Jackson,
        // Classical Electrodynamics, 3rd ed., eq. 11.144), per unit charge.
        let gamma = 1.0 / (1.0 - length(beta).powi(2)).sqrt();
        let tensor = FieldTensor::new(e.map(|x| x / C), b, Signature::MostlyMinus);
        let u_down = nalgebra::Vector4::new(1.0, -beta[0], -beta[1], -beta[2]) * gamma * C;
        let force = tensor.contravariant * u_down;
        let v = beta.map(|x| x * C);
        let bound = 64.0 * f64::EPSILON * gamma * (length(e) + C * length(b));
        let power = gamma * (e[0] * beta[0] + e[1] * beta[1] + e[2] * beta[2]);
        prop_assert!((force[0] - power).abs() <= bound);
        for i in 0..3 {
            let (j, k) = ((i + 1) % 3, (i + 2) % 3);
            let lorentz = gamma * (e[i] + v[j] * b[k] - v[k] * b[j]);
            prop_assert!((force[i + 1] - lorentz).abs() <= bound);
        }
    }

    #[test]
    fn both_routes_to_the_covariant_tensor_agree(e in vector(1.0), b in vector(1.0)) {
        for signature in [Signature::MostlyMinus, Signature::MostlyPlus] {
            let tensor = FieldTensor::new(e, b, signature);
            let lowered = metric() * tensor.contravariant * metric();
            prop_assert_eq!(tensor.covariant(), lowered);
        }
    }
}
