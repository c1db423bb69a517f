//! A series in process, for `tests/bench/series`, which makes the rows and prints the table:
//!
//! `cargo bench --bench series -- IN OUT THREADS QUERY FILE [ANSWER]` answers a file of rows and
//! prints how many and in how many seconds. Without ANSWER the rows are read from memory and the
//! answer is thrown away. `-- kernel ROWS` solves so many rows that are columns already.

use std::env;
use std::fs::{self, File};
use std::hint::black_box;
use std::io;
use std::time::Instant;

use lodeframe::document::from_query;
use lodeframe::physics::block::{Columns, Readings, Setting};
use lodeframe::physics::boost::Motion;
use lodeframe::physics::field::FieldUnits;
use lodeframe::physics::rows::{Motions, RowChange, RowStep, Rows};
use lodeframe::physics::scale::Scale;
use lodeframe::question::Deployment;
use lodeframe::series::{Counts, Format, Limits, Series, run};

const LIMITS: Limits = Limits {
    row: 64 * 1024,
    batch: 64 << 20,
};
const DEPLOYMENT: Deployment = Deployment {
    steps: 10,
    trials: 0,
    frames: None,
};

fn format(name: &str) -> Format {
    match name {
        "ndjson" => Format::Ndjson,
        "csv" => Format::Csv,
        "arrow" => Format::Arrow,
        other => panic!("no format is called {other}"),
    }
}

fn series(query: &str) -> Series {
    let node = from_query(query).expect("a query");
    Series::read(node, &DEPLOYMENT).expect("a series")
}

/// Seconds for rows with a velocity of their own, in blocks of the size of a job.
fn kernel(rows: usize) -> f64 {
    const BLOCK: usize = 1000;
    let column = |i: usize, size: f64| -> Vec<f64> {
        let step = (i as f64 + 2.0).sqrt();
        let number = |n: usize| size * (2.0 * (n as f64 * step).fract() - 1.0);
        (0..BLOCK).map(number).collect()
    };
    let columns = |from: usize, size| [0, 1, 2].map(|i| column(from + i, size));
    let (e, b, velocity) = (columns(1, 1e3), columns(4, 5e-5), columns(7, 1e8));
    let views = |columns: &'static [Vec<f64>; 3]| columns.each_ref().map(|column| &column[..]);
    let [e, b, velocity] = [e, b, velocity].map(|columns| views(Box::leak(Box::new(columns))));
    let motions = Motions {
        velocity,
        ..Motions::default()
    };
    let setting = Setting {
        units: FieldUnits::SI,
        to: FieldUnits::SI,
        calibration: [None; 2],
    };
    let own = RowStep {
        change: RowChange::Velocity {
            beta: Motion::to_beta(Scale::ONE),
        },
        inverse: false,
        uncertainty: None,
    };
    let way = Rows::new(vec![own], setting);
    let mut answers = Columns::default();
    let begin = Instant::now();
    for _ in 0..rows / BLOCK {
        let refused = way.solve(black_box(Readings { e, b }), motions, &mut answers);
        assert!(refused.is_empty());
    }
    begin.elapsed().as_secs_f64()
}

fn main() {
    let arguments: Vec<String> = env::args().skip(1).filter(|x| x != "--bench").collect();
    if let [word, rows] = &arguments[..]
        && word == "kernel"
    {
        println!("{rows} {}", kernel(rows.parse().expect("a number of rows")));
        return;
    }
    let [input, output, threads, query, file, answer @ ..] = &arguments[..] else {
        println!("give IN OUT THREADS QUERY FILE [ANSWER]; tests/bench/series does");
        return;
    };
    let formats = [format(input), format(output)];
    let threads = threads.parse().expect("a number of threads");
    let series = series(query);
    let (counts, seconds): (Counts, f64) = if let [answer] = answer {
        let begin = Instant::now();
        let (rows, answer) = (File::open(file), File::create(answer));
        let (rows, answer) = (rows.expect("rows"), answer.expect("a place"));
        let counts = run(series, formats, LIMITS, threads, rows, answer);
        (counts.expect("answers"), begin.elapsed().as_secs_f64())
    } else {
        let rows = fs::read(file).expect("rows");
        let begin = Instant::now();
        let counts = run(series, formats, LIMITS, threads, &rows[..], io::sink());
        (counts.expect("answers"), begin.elapsed().as_secs_f64())
    };
    assert_eq!(counts.refused, 0, "every row has an answer");
    println!("{} {seconds}", counts.answered);
}
