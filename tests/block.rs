//! Blocks of rows against single readings: the same bits, whatever the row and wherever it stands.

use std::sync::Arc;

use lodeframe::chain;
use lodeframe::physics::Impossible;
use lodeframe::physics::block::{Block, Columns, Readings, Setting};
use lodeframe::physics::boost::Motion;
use lodeframe::physics::constants::C;
use lodeframe::physics::field::FieldUnits;
use lodeframe::physics::lorentz::{Change, Step};
use lodeframe::physics::reduction::Calibration;
use lodeframe::physics::resolved::Resolved;
use lodeframe::physics::rotation::Turn;
use lodeframe::physics::rows::{Motions, RowChange, RowStep, Rows};
use lodeframe::physics::scale::Scale;
use lodeframe::transform::{Reading, transform};
use proptest::prelude::*;

/// One row: E, B, a velocity as v/c, a quaternion and an angle.
type Row = ([[f64; 3]; 2], [f64; 3], [f64; 4], f64);
/// An answer, or why there is none, with NaN for what is missing.
type Answer = Result<[[f64; 3]; 2], Impossible>;

const MILLI_NANO: FieldUnits = FieldUnits {
    e: Scale::ratio(1, 1000),
    b: Scale::ratio(1, 1_000_000_000),
};
const DEGREES: Scale = Scale::pi(1, 180);

/// What the single reading says.
fn alone(steps: Vec<Step>, [e, b]: [[f64; 3]; 2], setting: &Setting) -> Answer {
    let reading = Reading {
        e: e.map(|x| (!x.is_nan()).then_some(x)),
        b: b.map(|x| (!x.is_nan()).then_some(x)),
        units: setting.units,
        calibration: setting.calibration,
        e_dot_b_zero: None,
    };
    for step in &steps {
        match &step.change {
            Change::Boost(motion) => motion.check()?,
            Change::Rotate(turn) => turn.check().map(|_| ())?,
        }
    }
    let found = transform(&Resolved::new(steps)?, &reading, setting.to)?;
    Ok([found.e, found.b].map(|v| v.map(|x| x.unwrap_or(f64::NAN))))
}

/// Asks for all rows at once and compares each with its single reading.
fn check(steps: &[RowStep], rows: &[Row], setting: Setting) {
    let (fields, motion) = columns(rows);
    let readings = Readings {
        e: std::array::from_fn(|i| &fields[i][..]),
        b: std::array::from_fn(|i| &fields[3 + i][..]),
    };
    let motions = Motions {
        velocity: std::array::from_fn(|i| &motion[i][..]),
        quaternion: std::array::from_fn(|i| &motion[3 + i][..]),
        angle: &motion[7],
    };
    let expected: Vec<Answer> = rows
        .iter()
        .map(|row| single(steps, row, &setting))
        .collect();
    let of_rows = Rows::new(steps.to_vec(), setting);
    for way in [of_rows.clone(), of_rows.portable()] {
        let mut answers = Columns::default();
        let refused = way.solve(readings, motions, &mut answers);
        same(rows, &expected, &answers, &refused);
    }
    if let Some(fixed) = fixed(steps)
        && let Ok(way) = Resolved::new(fixed)
    {
        let of_block = Block::new(Arc::new(way), setting);
        for block in [of_block.clone(), of_block.portable()] {
            let mut answers = Columns::default();
            let refused = block.solve(readings, &mut answers);
            same(rows, &expected, &answers, &refused);
        }
    }
}

fn columns(rows: &[Row]) -> (Vec<Vec<f64>>, Vec<Vec<f64>>) {
    let fields = (0..6)
        .map(|i| rows.iter().map(|row| row.0.as_flattened()[i]).collect())
        .collect();
    let motion = (0..8).map(|i| rows.iter().map(|row| of_motion(row, i)).collect());
    (fields, motion.collect())
}

fn of_motion(row: &Row, i: usize) -> f64 {
    match i {
        0..3 => row.1[i],
        3..7 => row.2[i - 3],
        _ => row.3,
    }
}

fn single(steps: &[RowStep], row: &Row, setting: &Setting) -> Answer {
    let missing = |numbers: &[f64]| numbers.iter().any(|x| x.is_nan());
    let mut own = Vec::new();
    for step in steps {
        let change = match &step.change {
            RowChange::Fixed(change) => change.clone(),
            RowChange::Velocity { .. } if missing(&row.1) => return Ok([[f64::NAN; 3]; 2]),
            RowChange::Velocity { beta } => Change::Boost(Motion::Velocity {
                value: row.1,
                beta: *beta,
            }),
            RowChange::Quaternion if missing(&row.2) => return Ok([[f64::NAN; 3]; 2]),
            RowChange::Quaternion => Change::Rotate(Turn::Quaternion(row.2)),
            RowChange::Angle { .. } if row.3.is_nan() => return Ok([[f64::NAN; 3]; 2]),
            RowChange::Angle { axis, radians } => Change::Rotate(Turn::AxisAngle {
                axis: *axis,
                angle: row.3,
                radians: *radians,
            }),
        };
        own.push(Step {
            inverse: step.inverse,
            ..Step::exact(change)
        });
    }
    alone(own, row.0, setting)
}

fn fixed(steps: &[RowStep]) -> Option<Vec<Step>> {
    let each = steps.iter().map(|step| match &step.change {
        RowChange::Fixed(change) => Some(Step {
            inverse: step.inverse,
            ..Step::exact(change.clone())
        }),
        _ => None,
    });
    each.collect()
}

#[track_caller]
fn same(rows: &[Row], expected: &[Answer], answers: &Columns, refused: &[(usize, Impossible)]) {
    let mut refused = refused.iter();
    for (i, (row, expected)) in rows.iter().zip(expected).enumerate() {
        let numbers = match expected {
            Ok(numbers) => *numbers,
            Err(why) => {
                assert_eq!(refused.next(), Some(&(i, why.clone())), "{row:?}");
                [[f64::NAN; 3]; 2]
            }
        };
        let found = [&answers.e, &answers.b].map(|v| v.each_ref().map(|column| column[i]));
        for (found, expected) in found.as_flattened().iter().zip(numbers.as_flattened()) {
            let same = found.to_bits() == expected.to_bits() || found.is_nan() && expected.is_nan();
            assert!(same, "row {i}, {row:?}: {found:e} is not {expected:e}");
        }
    }
    assert_eq!(refused.next(), None, "refused in order, each once");
}

fn unit(v: [f64; 3]) -> [f64; 3] {
    let length = v[0].hypot(v[1]).hypot(v[2]).max(1e-3);
    v.map(|x| x / length)
}

fn vector() -> impl Strategy<Value = [f64; 3]> {
    [-1.0..1.0f64, -1.0..1.0f64, -1.0..1.0f64]
}

fn cross(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [
        a[1] * b[2] - a[2] * b[1],
        a[2] * b[0] - a[0] * b[2],
        a[0] * b[1] - a[1] * b[0],
    ]
}

/// Speeds from nothing to next to c, and past it.
fn beta() -> impl Strategy<Value = [f64; 3]> {
    let speed = prop_oneof![
        4 => 0.0..0.9f64,
        2 => (0..40i32).prop_map(|n| libm::scalbn(0.9, -n)),
        1 => (1..60i32).prop_map(|n| 1.0 - libm::scalbn(1.0, -n)),
        1 => Just(0.0),
    ];
    let along = prop_oneof![
        3 => vector().prop_map(unit),
        1 => (0..3usize).prop_map(|i| std::array::from_fn(|j| if i == j { 1.0 } else { 0.0 })),
    ];
    (speed, along).prop_map(|(speed, along)| along.map(|x| x * speed))
}

/// Readings of all kinds: of like size, one field ruling, motional fields that cancel, plane
/// waves, along the velocity, out of the range of two doubles, with gaps.
fn row() -> impl Strategy<Value = Row> {
    let quaternion = (vector(), -1.0..1.0f64).prop_map(|(v, w)| {
        let length = (v.iter().map(|x| x * x).sum::<f64>() + w * w)
            .sqrt()
            .max(1e-3);
        [w / length, v[0] / length, v[1] / length, v[2] / length]
    });
    let angle = prop_oneof![
        4 => -400.0..400.0f64,
        2 => (-8..8i32).prop_map(|n| f64::from(n) * 45.0),
        1 => (0..200i32).prop_map(|n| libm::scalbn(1.0, -n)),
        1 => 1e4..1e9f64,
    ];
    let kind = prop_oneof![
        10 => 0..1u8,
        1 => 1..14u8,
    ];
    (
        vector(),
        vector(),
        beta(),
        quaternion,
        angle,
        kind,
        -60..60i32,
    )
        .prop_map(|(e, b, beta, quaternion, angle, kind, n)| {
            let mut row = (
                [e.map(|x| x * 1e3), b.map(|x| x * 1e3 / C)],
                beta,
                quaternion,
                angle,
            );
            let [e, b] = &mut row.0;
            match kind {
                1 => *e = e.map(|x| libm::scalbn(x, n)),
                2 => *b = b.map(|x| libm::scalbn(x, n)),
                3 => *e = cross(beta, *b).map(|x| -x * C),
                4 => *b = cross(unit(beta), *e).map(|x| x / C),
                5 => *e = beta.map(|x| x * 1e3),
                6 => *e = [0.0; 3],
                7 => *b = [0.0; 3],
                8 => *e = e.map(|x| libm::scalbn(x, n * 17)),
                9 => *b = b.map(|x| libm::scalbn(x, n * 17)),
                10 => e[n.unsigned_abs() as usize % 3] = f64::NAN,
                11 => b[n.unsigned_abs() as usize % 3] = f64::NAN,
                12 => row.1[0] = if n < 0 { f64::NAN } else { 1.0 },
                13 => row.2[0] = if n < 0 { f64::NAN } else { 0.5 },
                _ => {}
            }
            row
        })
}

fn setting() -> impl Strategy<Value = Setting> {
    let units = || {
        prop_oneof![
            Just(FieldUnits::SI),
            Just(MILLI_NANO),
            Just(FieldUnits {
                e: Scale::ratio(299_792_458, 10_000),
                b: Scale::ratio(1, 10_000)
            }),
        ]
    };
    let calibration = || {
        let matrix = [vector(), vector(), vector()].prop_map(|m| {
            std::array::from_fn(|i| {
                std::array::from_fn(|j| m[i][j] * 0.01 + f64::from(u8::from(i == j)))
            })
        });
        let one = (matrix, vector()).prop_map(|(matrix, offset)| Calibration { matrix, offset });
        prop_oneof![4 => Just(None), 1 => one.prop_map(Some)]
    };
    (units(), units(), [calibration(), calibration()]).prop_map(|(units, to, calibration)| {
        Setting {
            units,
            to,
            calibration,
        }
    })
}

fn step() -> impl Strategy<Value = RowStep> {
    let boost = |value| {
        RowChange::Fixed(Change::Boost(Motion::Velocity {
            value,
            beta: Scale::ONE,
        }))
    };
    let slow = vector().prop_map(|v| v.map(|x| x * 0.5));
    let turn = |axis, angle| {
        RowChange::Fixed(Change::Rotate(Turn::AxisAngle {
            axis,
            angle,
            radians: DEGREES,
        }))
    };
    let change = prop_oneof![
        2 => slow.prop_map(boost),
        2 => (vector().prop_map(unit), -200.0..200.0f64).prop_map(move |(axis, angle)| turn(axis, angle)),
        1 => (1..20i32).prop_map(|n| RowChange::Fixed(Change::Boost(Motion::Gamma {
            direction: [1.0, 2.0, -0.5],
            gamma: libm::scalbn(1.5, n),
        }))),
        4 => Just(RowChange::Velocity { beta: Scale::ONE }),
        4 => Just(RowChange::Quaternion),
        4 => (vector().prop_map(unit), prop_oneof![Just(DEGREES), Just(Scale::ONE)])
            .prop_map(|(axis, radians)| RowChange::Angle { axis, radians }),
    ];
    (change, any::<bool>()).prop_map(|(change, inverse)| RowStep {
        change,
        inverse,
        uncertainty: None,
    })
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    #[test]
    fn a_row_has_the_bits_of_its_single_reading(
        steps in proptest::collection::vec(step(), 1..5),
        rows in proptest::collection::vec(row(), 1..150),
        setting in setting(),
    ) {
        check(&steps, &rows, setting);
    }

    #[test]
    fn so_has_one_on_a_way_of_one_step(
        step in step(), rows in proptest::collection::vec(row(), 1..150), setting in setting(),
    ) {
        check(&[step], &rows, setting);
    }
}

#[test]
fn a_whole_turn_changes_nothing() {
    // About one in a hundred of these, in the unit of the answer, stands halfway between doubles.
    let number = |i: usize| 1e3 * (2.0 * (i as f64 * 2f64.sqrt()).fract() - 1.0);
    let rows: Vec<Row> = (0..2000)
        .map(|i| {
            let field = [[number(i), number(i + 7), number(i + 13)], [1e-6; 3]];
            (
                field,
                [0.0; 3],
                [-0.9, 0.0, 0.0, 0.0],
                -360.0 * (i % 9) as f64,
            )
        })
        .collect();
    let setting = Setting {
        units: FieldUnits::SI,
        to: MILLI_NANO,
        calibration: [None; 2],
    };
    let about = |i: u32| RowChange::Angle {
        axis: [0.3, -1.7, f64::from(i).sqrt()],
        radians: DEGREES,
    };
    // How the length of the axis rounds differs from one to the next.
    for change in (1..20).map(about).chain([RowChange::Quaternion]) {
        let step = RowStep {
            change,
            inverse: false,
            uncertainty: None,
        };
        check(&[step], &rows, setting);
    }
}

#[test]
fn a_way_back_is_made_of_steps_undone() {
    let step = RowStep {
        uncertainty: None,
        change: RowChange::Velocity { beta: Scale::ONE },
        inverse: false,
    };
    let row = (
        [[1.0, 2.0, 3.0], [1e-9, -2e-9, 4e-9]],
        [0.1, 0.2, -0.3],
        [1.0, 0.0, 0.0, 0.0],
        0.0,
    );
    let setting = Setting {
        units: FieldUnits::SI,
        to: FieldUnits::SI,
        calibration: [None; 2],
    };
    let there = Step::exact(Change::Boost(Motion::Velocity {
        value: row.1,
        beta: Scale::ONE,
    }));
    let back = alone(chain::inverse(vec![there]), row.0, &setting);
    assert_eq!(single(&[step.clone().undone()], &row, &setting), back);
    check(&[step.undone()], &[row], setting);
}

#[test]
fn infinite_numbers_are_refused() {
    let row = (
        [[1.0, f64::INFINITY, 3.0], [0.0; 3]],
        [0.1, 0.0, f64::NEG_INFINITY],
        [1.0, 0.0, 0.0, 0.0],
        0.0,
    );
    let setting = Setting {
        units: FieldUnits::SI,
        to: FieldUnits::SI,
        calibration: [None; 2],
    };
    let mut answers = Columns::default();
    let column = |x: f64| [x];
    let fields = row
        .0
        .as_flattened()
        .iter()
        .map(|x| column(*x))
        .collect::<Vec<_>>();
    let readings = Readings {
        e: std::array::from_fn(|i| &fields[i][..]),
        b: std::array::from_fn(|i| &fields[3 + i][..]),
    };
    let way = Arc::new(Resolved::new(Vec::new()).expect("nothing to compose"));
    let refused = Block::new(way, setting).solve(readings, &mut answers);
    assert_eq!(refused, [(0, Impossible::Infinite)]);
    assert!(answers.e[0][0].is_nan() && answers.b[2][0].is_nan());
    let moving = RowStep {
        uncertainty: None,
        change: RowChange::Velocity { beta: Scale::ONE },
        inverse: false,
    };
    let velocity = row.1.map(column);
    let motions = Motions {
        velocity: velocity.each_ref().map(|x| &x[..]),
        ..Motions::default()
    };
    let zero = [0.0];
    let still = Readings {
        e: [&zero; 3],
        b: [&zero; 3],
    };
    let refused = Rows::new(vec![moving], setting).solve(still, motions, &mut answers);
    assert_eq!(refused, [(0, Impossible::Infinite)]);
}
