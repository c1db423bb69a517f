//! A series in process, for `tests/bench/series`, which makes the rows and prints the table:
//!
//! `cargo bench --bench series -- IN OUT THREADS QUERY FILE [ANSWER]` answers a file of rows and
//! prints how many and in how many seconds. Without ANSWER the rows are read from memory and the
//! answer is thrown away.

use std::env;
use std::fs::{self, File};
use std::io;
use std::time::Instant;

use lodeframe::document::from_query;
use lodeframe::question::Deployment;
use lodeframe::series::{Counts, Format, Limits, Series, run};

const LIMITS: Limits = Limits {
    row: 64 * 1024,
    batch: 64 << 20,
};
const DEPLOYMENT: Deployment = Deployment {
    steps: 10,
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

fn main() {
    let arguments: Vec<String> = env::args().skip(1).filter(|x| x != "--bench").collect();
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
