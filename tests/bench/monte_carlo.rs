//! Trials a second on one thread, for a boost and a turn with twelve Gaussian inputs, with all
//! that becomes of them: mean, covariance and intervals.
//!
//! `cargo bench --bench monte_carlo`; needs Linux for the time on a processor.

use std::sync::Arc;

use lodeframe::physics::Scale;
use lodeframe::physics::boost::Motion;
use lodeframe::physics::covariance::Covariance;
use lodeframe::physics::field::{FieldUnits, Measured};
use lodeframe::physics::lorentz::{Change, Step};
use lodeframe::physics::monte_carlo::summary::{Summary, tails};
use lodeframe::physics::monte_carlo::trials::{Block, Trials};
use lodeframe::physics::resolved::Resolved;
use lodeframe::physics::rotation::Turn;
use lodeframe::physics::uncertain::{Errors, UncertainReading, UncertainStep};

mod stopwatch;
use stopwatch::Stopwatch;

const TRIALS: usize = 1_000_000;
const ROUNDS: usize = 5;

fn main() {
    let units = FieldUnits {
        e: Scale::ratio(1, 1000),
        b: Scale::ratio(1, 1_000_000_000),
    };
    let field = Measured::new([12.5, 340.0, -3.75], [1200.0, -450.0, 44700.0], units);
    let uncertain = UncertainReading {
        field: Covariance::of_standard([0.1, 0.1, 0.1, 5.0, 5.0, 5.0]).expect("positive"),
        calibration: [None; 2],
    };
    let standard = [3e-4, 3e-4, 3e-4, 5e-9, 5e-9, 5e-9];
    for (name, steps) in [
        ("boost, then turn", [boost(), turn()]),
        ("turn, then boost", [turn(), boost()]),
    ] {
        let way = Resolved::new(steps.to_vec()).expect("possible");
        for _ in 0..ROUNDS {
            let drawing = Stopwatch::start();
            let trials =
                Trials::new(&way, &field, Some(&uncertain), standard, TRIALS, 1).expect("in range");
            let blocks: Vec<Block> = (0..trials.blocks()).map(|n| trials.block(n)).collect();
            let [_, drawn] = drawing.seconds();
            let tails = std::array::from_fn(|component| tails(&blocks, component));
            let summary = Summary::new(&blocks, tails, [1.0; 6]);
            let [wall, all] = drawing.seconds();
            assert_eq!(summary.counted, TRIALS as u64);
            let each = |seconds: f64| seconds * 1e9 / TRIALS as f64;
            println!(
                "{name}: {:.2} million trials a second of processor ({:.2} on the clock); {:.0} ns \
                 each, {:.0} ns of them for intervals",
                1e3 / each(all),
                1e3 / each(wall),
                each(all),
                each(all - drawn),
            );
        }
    }
}

fn uncertain(errors: Errors) -> Option<Arc<UncertainStep>> {
    let source = String::new();
    Some(Arc::new(UncertainStep { errors, source }))
}

fn boost() -> Step {
    let errors = Covariance::of_standard([0.01, 0.02, 0.03]).expect("positive");
    Step {
        change: Change::Boost(Motion::Velocity {
            value: [7.6, 1.0, -0.5],
            beta: Motion::to_beta(Scale::ratio(1000, 1)),
        }),
        inverse: true,
        uncertainty: uncertain(Errors::Velocity(errors)),
    }
}

fn turn() -> Step {
    let degrees = Scale::pi(1, 180);
    let angles = Covariance::of_standard([0.01, 0.02, 0.03]).expect("positive");
    Step {
        change: Change::Rotate(Turn::AxisAngle {
            axis: [0.0, 0.0, 1.0],
            angle: 30.0,
            radians: degrees,
        }),
        inverse: false,
        uncertainty: uncertain(Errors::Axes {
            angles,
            radians: degrees,
        }),
    }
}
