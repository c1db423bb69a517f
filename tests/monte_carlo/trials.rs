//! Single trials against the whole transformation done anew with the same errors, in two doubles.

use std::sync::Arc;

use lodeframe::physics::{
    Dd, Real, Scale,
    boost::Motion,
    covariance::Covariance,
    field::{FieldUnits, Measured},
    lorentz::{Change, Step},
    monte_carlo::trials::Trials,
    reduction::{Calibration, Reduction},
    resolved::Resolved,
    rotation::Turn,
    uncertain::{Errors, UncertainCalibration, UncertainReading, UncertainStep},
};

/// One unit for the errors of every quantity: a power of two, so that numbers of the form
/// x + unit·z are doubles and the same errors can be written into a question.
const UNIT: f64 = 1.0 / (1u64 << 40) as f64;
const RADIANS: Scale = Scale::ONE;
const DEGREES: Scale = Scale::pi(1, 180);

/// A step with errors, and the steps that are the same with the errors drawn.
struct Case {
    step: Step,
    drawn: Vec<Step>,
    draws: Vec<f64>,
}

fn step(change: Change, inverse: bool, uncertainty: Option<Errors>) -> Step {
    Step {
        change,
        inverse,
        uncertainty: uncertainty.map(|errors| {
            let source = String::new();
            Arc::new(UncertainStep { errors, source })
        }),
    }
}

fn three(sigma: f64) -> Covariance<3> {
    Covariance::of_standard([sigma; 3]).expect("positive")
}

/// A velocity in units of c, with errors of so many [`UNIT`]s.
fn velocity(beta: [f64; 3], unit: f64, z: [f64; 3], inverse: bool) -> Case {
    let motion = |value| {
        Change::Boost(Motion::Velocity {
            value,
            beta: Scale::ONE,
        })
    };
    let with_errors: [f64; 3] = std::array::from_fn(|i| beta[i] + unit * z[i]);
    let exactly = (0..3).all(|i| (with_errors[i] - beta[i]) / unit == z[i]);
    assert!(exactly, "no rounding in the question");
    Case {
        step: step(motion(beta), inverse, Some(Errors::Velocity(three(unit)))),
        drawn: vec![step(motion(with_errors), inverse, None)],
        draws: z.to_vec(),
    }
}

/// A turn, and a further turn by angles whose length is a double.
fn turned(angle: f64, unit: f64, z: [f64; 3], length: f64, inverse: bool) -> Case {
    assert_eq!(z.iter().map(|z| z * z).sum::<f64>(), length * length);
    let turn = |axis, angle, radians| {
        Change::Rotate(Turn::AxisAngle {
            axis,
            angle,
            radians,
        })
    };
    let stated = turn([1.0, -2.0, 0.5], angle, DEGREES);
    let errors = Errors::Axes {
        angles: three(unit),
        radians: RADIANS,
    };
    let further = turn(z, unit * length, RADIANS);
    let mut drawn = vec![
        step(stated.clone(), inverse, None),
        step(further, inverse, None),
    ];
    if inverse {
        drawn.reverse();
    }
    Case {
        step: step(stated, inverse, Some(errors)),
        drawn,
        draws: z.to_vec(),
    }
}

/// A speed along x, with an error of its own and the direction turned in the xy plane.
fn directed(
    motion: impl Fn([f64; 3], f64) -> Motion,
    value: f64,
    sigma: f64,
    z: [f64; 2],
    inverse: bool,
) -> Case {
    const TURN: f64 = 1.0 / 1024.0;
    let angle = TURN * z[1];
    // About the second of the axes across x, which is z.
    let direction = [libm::cos(angle), libm::sin(angle), 0.0];
    let uncertain = Errors::Directed {
        value: sigma,
        direction: TURN,
        radians: RADIANS,
    };
    let stated = Change::Boost(motion([1.0, 0.0, 0.0], value));
    let with_errors = Change::Boost(motion(direction, value + sigma * z[0]));
    Case {
        step: step(stated, inverse, Some(uncertain)),
        drawn: vec![step(with_errors, inverse, None)],
        draws: vec![z[0], 0.0, z[1]],
    }
}

fn turning() -> Case {
    let motion = |angular_velocity, position| {
        Change::Boost(Motion::Turning {
            angular_velocity,
            position,
            beta: Scale::ratio(1, 1000),
        })
    };
    let (omega, r) = ([1.0, -3.0, 100.0], [2.0, 0.5, -0.25]);
    let z: [f64; 6] = [3.0, 5.0, -7.0, 2.0, -1.0, 4.0];
    let unit = 1.0 / 1024.0;
    let moved = |v: [f64; 3], first: usize| std::array::from_fn(|i| v[i] + unit * z[first + i]);
    let uncertain = Errors::Turning {
        angular_velocity: three(unit),
        position: three(unit),
    };
    Case {
        step: step(motion(omega, r), false, Some(uncertain)),
        drawn: vec![step(motion(moved(omega, 0), moved(r, 3)), false, None)],
        draws: z.to_vec(),
    }
}

/// A step without errors.
fn exact(change: Change) -> Case {
    Case {
        drawn: vec![Step::exact(change.clone())],
        step: Step::exact(change),
        draws: Vec::new(),
    }
}

/// How far E' and B' in SI move when the errors are drawn, each to two doubles.
fn moved(cases: &[Case], field: &Measured, drawn_field: &Measured) -> [[f64; 3]; 2] {
    let answer = |steps: Vec<Step>, field: &Measured| {
        let way = Resolved::new(steps).expect("possible");
        let (e, b) = way.apply(field, FieldUnits::SI).expect("in range").precise;
        let tesla: Dd = field.units.b.value(());
        assert_eq!(field.units.e, Scale::ONE);
        (e, b.map(|x| x * tesla))
    };
    let stated = cases.iter().map(|case| case.step.clone()).collect();
    let drawn = cases.iter().flat_map(|case| case.drawn.clone()).collect();
    let (before, after) = (answer(stated, field), answer(drawn, drawn_field));
    let difference = |a: [Dd; 3], b: [Dd; 3]| std::array::from_fn(|i| (b[i] - a[i]).to_f64());
    [difference(before.0, after.0), difference(before.1, after.1)]
}

/// The trial with the drawn errors is within `within` of the whole question asked anew, relative
/// to how far the vector moves.
#[track_caller]
fn check(cases: &[Case], field: Measured, within: f64) {
    let z = [1.0, -2.0, 3.0, -1.0, 2.0, 5.0];
    let root = [UNIT; 6];
    let drawn_field = Measured {
        e: std::array::from_fn(|i| field.e[i] + UNIT * z[i]),
        b: std::array::from_fn(|i| field.b[i] + UNIT * z[3 + i]),
        ..field
    };
    let uncertain = UncertainReading {
        field: Covariance::of_standard(root).expect("positive"),
        calibration: [None; 2],
    };
    let draws: Vec<f64> = z
        .into_iter()
        .chain(cases.iter().flat_map(|case| case.draws.clone()))
        .collect();
    compare(cases, [&field, &drawn_field], &uncertain, &draws, within);
}

#[track_caller]
fn compare(
    cases: &[Case],
    [field, drawn_field]: [&Measured; 2],
    uncertain: &UncertainReading,
    draws: &[f64],
    within: f64,
) {
    let steps = cases.iter().map(|case| case.step.clone()).collect();
    let way = Resolved::new(steps).expect("possible");
    let trials = Trials::new(&way, field, Some(uncertain), [1.0; 6], 1, 0).expect("in range");
    assert_eq!(trials.draws(), draws.len());
    let [e0, e1, e2, b0, b1, b2] = trials.trial(draws).expect("possible");
    let expected = moved(cases, field, drawn_field);
    for (name, found, expected) in [
        ("E", [e0, e1, e2], expected[0]),
        ("B", [b0, b1, b2], expected[1]),
    ] {
        let length = |v: [f64; 3]| libm::hypot(libm::hypot(v[0], v[1]), v[2]);
        let off = length(std::array::from_fn(|i| found[i] - expected[i])) / length(expected);
        assert!(
            off <= within,
            "{name} moves by {found:?}, not {expected:?}: {off:e}"
        );
    }
}

/// E and B in V/m and units of 1/c T, numbers whose errors of a [`UNIT`] are doubles.
fn field(e: [f64; 3], cb: [f64; 3]) -> Measured {
    let b = Scale::ratio(1, 299_792_458);
    Measured::new(e, cb, FieldUnits { e: Scale::ONE, b })
}

fn ordinary() -> Measured {
    field([12.5, 340.0, -3.75], [100.0, -45.0, 447.0])
}

const Z: [f64; 3] = [3.0, -5.0, 2.0];

#[test]
fn velocities_slow_and_fast() {
    for inverse in [false, true] {
        check(&[velocity([0.0; 3], UNIT, Z, inverse)], ordinary(), 1e-15);
        check(
            &[velocity([0.25, -0.125, 0.5], UNIT, Z, inverse)],
            ordinary(),
            1e-14,
        );
        check(
            &[velocity([0.25, -0.125, 0.5], 1.0 / 64.0, Z, inverse)],
            ordinary(),
            1e-14,
        );
        // γ = 22 and 7000.
        check(
            &[velocity([0.0, 0.999, 0.0], UNIT, Z, inverse)],
            ordinary(),
            1e-13,
        );
        check(
            &[velocity([1.0 - 1e-8, 0.0, 0.0], UNIT / 1024.0, Z, inverse)],
            ordinary(),
            1e-11,
        );
    }
}

/// E' = E + v×B all but vanishes, and the errors are as small as its rounding.
#[test]
fn a_field_that_all_but_cancels() {
    let v = 1.0 / 32768.0;
    let unit = v * 2.0 * f64::EPSILON;
    let field = field([0.0, v * 1024.0 + UNIT, 0.0], [0.0, 0.0, 1024.0]);
    check(&[velocity([v, 0.0, 0.0], unit, Z, false)], field, 1e-15);
}

#[test]
fn turns_forwards_and_backwards() {
    for inverse in [false, true] {
        for unit in [UNIT, 1.0 / 1024.0, 0.25] {
            let z = [3.0, 4.0, 12.0];
            check(&[turned(30.0, unit, z, 13.0, inverse)], ordinary(), 1e-14);
        }
    }
}

#[test]
fn directions_with_a_speed() {
    let beta = |direction, beta| Motion::Speed { direction, beta };
    let gamma = |direction, gamma| Motion::Gamma { direction, gamma };
    let rapidity = |direction, rapidity| Motion::Rapidity {
        direction,
        rapidity,
    };
    let energy = |direction, energy| Motion::KineticEnergy {
        direction,
        energy,
        rest: 938.0,
        ratio: Scale::ONE,
    };
    let z = [3.0, -2.0];
    for inverse in [false, true] {
        check(
            &[directed(beta, 0.5, 1.0 / 64.0, z, inverse)],
            ordinary(),
            1e-13,
        );
        check(
            &[directed(beta, -0.5, 1.0 / 64.0, z, inverse)],
            ordinary(),
            1e-13,
        );
        check(
            &[directed(beta, 0.0, 1.0 / 64.0, z, inverse)],
            ordinary(),
            1e-13,
        );
        check(
            &[directed(beta, 0.015625, -0.0078125, z, inverse)],
            ordinary(),
            1e-13,
        );
        check(&[directed(gamma, 1.0, 0.5, z, inverse)], ordinary(), 1e-13);
        check(
            &[directed(gamma, 2000.0, 16.0, z, inverse)],
            ordinary(),
            1e-12,
        );
        check(
            &[directed(rapidity, -1.5, 0.125, z, inverse)],
            ordinary(),
            1e-13,
        );
        check(
            &[directed(rapidity, 8.0, 1.0 / 64.0, z, inverse)],
            ordinary(),
            1e-12,
        );
        check(
            &[directed(energy, 26000.0, 64.0, z, inverse)],
            ordinary(),
            1e-12,
        );
    }
}

#[test]
fn points_of_a_turning_body() {
    check(&[turning()], ordinary(), 1e-14);
}

#[test]
fn chains_of_all_of_them() {
    let certain = || {
        exact(Change::Boost(Motion::Gamma {
            direction: [0.0, 1.0, 1.0],
            gamma: 3.0,
        }))
    };
    for inverse in [false, true] {
        let chain = [
            turned(30.0, 1.0 / 1024.0, [3.0, 4.0, 12.0], 13.0, inverse),
            certain(),
            velocity([0.25, -0.125, 0.5], 1.0 / 256.0, Z, !inverse),
            certain(),
            certain(),
            turned(-75.0, 1.0 / 4096.0, [2.0, -1.0, 2.0], 3.0, !inverse),
            turning(),
            certain(),
        ];
        check(&chain, ordinary(), 1e-13);
    }
}

/// A sensor with an uncertain calibration, and the component of E that it lacks from E·B = 0.
#[test]
fn sensors_and_the_component_they_lack() {
    let unit = 1.0 / 1024.0;
    let calibration = Calibration {
        matrix: [[1.0, 0.0625, 0.0], [-0.125, 2.0, 0.25], [0.0, 0.0, 1.5]],
        offset: [0.5, -0.25, 0.125],
    };
    let uncertain = UncertainCalibration {
        matrix: [[unit; 3]; 3],
        offset: [unit; 3],
    };
    let mut field = ordinary();
    field.reduction = Reduction {
        e: Some(calibration),
        b: Some(calibration),
        filled: Some(2),
    };
    let z: Vec<f64> = (0..30).map(|i| f64::from(i * 7 % 11 - 5)).collect();
    let at = |x: f64, i: usize| x + unit * z[i];
    let drawn = |first: usize| Calibration {
        matrix: std::array::from_fn(|i| {
            std::array::from_fn(|j| at(calibration.matrix[i][j], first + 3 * i + j))
        }),
        offset: std::array::from_fn(|i| at(calibration.offset[i], first + 9 + i)),
    };
    let mut drawn_field = Measured {
        e: std::array::from_fn(|i| at(field.e[i], i)),
        b: std::array::from_fn(|i| at(field.b[i], 3 + i)),
        ..field
    };
    drawn_field.reduction.e = Some(drawn(6));
    drawn_field.reduction.b = Some(drawn(18));
    let cases = [velocity([0.25, -0.125, 0.5], 1.0 / 256.0, Z, true)];
    let draws: Vec<f64> = z.iter().chain(&Z).copied().collect();
    let uncertain = UncertainReading {
        field: Covariance::of_standard([unit; 6]).expect("positive"),
        calibration: [Some(uncertain); 2],
    };
    compare(&cases, [&field, &drawn_field], &uncertain, &draws, 1e-14);
}

/// A draw at c is refused, one just below it is not.
#[test]
fn no_draw_reaches_the_speed_of_light() {
    let case = velocity([0.5, 0.0, 0.0], 0.25, [1.0; 3], false);
    let way = Resolved::new(vec![case.step]).expect("possible");
    let trials = Trials::new(&way, &ordinary(), None, [1.0; 6], 1, 0).expect("in range");
    assert!(trials.trial(&[2.0, 0.0, 0.0]).is_none());
    assert!(trials.trial(&[0.0, 4.0, 0.0]).is_none());
    assert!(trials.trial(&[-6.0, 0.0, 0.0]).is_none());
    let below = trials.trial(&[2.0 - 1e-9, 0.0, 0.0]).expect("below c");
    assert!(below.iter().all(|x| x.is_finite()));
}
