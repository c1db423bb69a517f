//! Many readings at once against one at a time: `cargo bench --bench block`.

use std::hint::black_box;
use std::sync::Arc;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use lodeframe::physics::block::{Block, Columns, Readings, Setting};
use lodeframe::physics::boost::Motion;
use lodeframe::physics::field::{FieldUnits, Measured};
use lodeframe::physics::lorentz::{Change, Step};
use lodeframe::physics::resolved::Resolved;
use lodeframe::physics::rotation::Turn;
use lodeframe::physics::rows::{Motions, RowChange, RowStep, Rows};
use lodeframe::physics::scale::Scale;

const ROWS: usize = 10_000;
const UNITS: FieldUnits = FieldUnits {
    e: Scale::ratio(1, 1000),
    b: Scale::ratio(1, 1_000_000_000),
};
const SETTING: Setting = Setting {
    units: UNITS,
    to: UNITS,
    calibration: [None; 2],
};

/// Numbers between −1 and 1 without a pattern that a processor could learn (Weyl's sequence).
fn column(seed: usize, size: f64) -> Vec<f64> {
    let step = (seed as f64 + 2.0).sqrt();
    (0..ROWS)
        .map(|i| size * (2.0 * (i as f64 * step).fract() - 1.0))
        .collect()
}

fn columns<const N: usize>(seed: usize, size: f64) -> [Vec<f64>; N] {
    std::array::from_fn(|i| column(seed + i, size))
}

fn views<const N: usize>(columns: &[Vec<f64>; N]) -> [&[f64]; N] {
    columns.each_ref().map(|column| &column[..])
}

fn blocks(c: &mut Criterion) {
    let (e, b) = (columns(1, 2.0), columns(4, 45_000.0));
    let velocity = columns(7, 8.0);
    let mut quaternion: [Vec<f64>; 4] = columns(11, 1.0);
    for i in 0..ROWS {
        let length = quaternion.iter().map(|q| q[i] * q[i]).sum::<f64>().sqrt();
        quaternion.iter_mut().for_each(|q| q[i] /= length);
    }
    let angle = column(16, 360.0);
    let readings = Readings {
        e: views(&e),
        b: views(&b),
    };
    let motions = Motions {
        velocity: views(&velocity),
        quaternion: views(&quaternion),
        angle: &angle,
    };
    let beta = Motion::to_beta(Scale::ratio(1000, 1));
    let degrees = Scale::pi(1, 180);
    let boost = Change::Boost(Motion::Velocity {
        value: [7.6, 0.1, -0.2],
        beta,
    });
    let turn = Change::Rotate(Turn::AxisAngle {
        axis: [0.1, 0.2, 1.0],
        angle: 30.0,
        radians: degrees,
    });
    let step = Step::exact;
    let row = |change| RowStep {
        change,
        inverse: false,
        uncertainty: None,
    };
    let mut group = c.benchmark_group("rows");
    group.throughput(Throughput::Elements(ROWS as u64));
    let mut answers = Columns::default();

    let fixed = [
        ("one boost", vec![step(boost.clone())]),
        ("one turn", vec![step(turn.clone())]),
        (
            "a turn and a boost",
            vec![step(turn.clone()), step(boost.clone())],
        ),
    ];
    for (name, steps) in fixed {
        let way = Arc::new(Resolved::new(steps).expect("slow"));
        let block = Block::new(way.clone(), SETTING);
        group.bench_function(name, |b| {
            b.iter(|| block.solve(black_box(readings), &mut answers));
        });
        let portable = block.portable();
        group.bench_function(format!("{name}, portable"), |b| {
            b.iter(|| portable.solve(black_box(readings), &mut answers));
        });
        group.bench_function(format!("{name}, one at a time"), |b| {
            b.iter(|| {
                for i in 0..ROWS {
                    let [e, b] = [readings.e, readings.b].map(|v| v.map(|column| column[i]));
                    black_box(way.apply(&Measured::new(e, b, UNITS), UNITS)).expect("in range");
                }
            });
        });
    }

    let velocity = || row(RowChange::Velocity { beta });
    let quaternion = || row(RowChange::Quaternion);
    let spin = || {
        row(RowChange::Angle {
            axis: [0.0, 0.0, 1.0],
            radians: degrees,
        })
    };
    let own = [
        ("a velocity a row", vec![velocity()]),
        ("a quaternion a row", vec![quaternion()]),
        ("an angle a row", vec![spin()]),
        (
            "a quaternion and a velocity a row",
            vec![quaternion(), velocity()],
        ),
        (
            "an angle a row, one boost",
            vec![spin(), step(boost).into()],
        ),
        (
            "two velocities a row, one at a time",
            vec![velocity(), velocity()],
        ),
    ];
    for (name, steps) in own {
        let rows = Rows::new(steps, SETTING);
        group.bench_function(name, |b| {
            b.iter(|| rows.solve(black_box(readings), motions, &mut answers));
        });
    }
}

criterion_group!(benches, blocks);
criterion_main!(benches);
