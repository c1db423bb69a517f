//! What every parser must hold, whatever bytes it is given: it comes to an end, panics nowhere,
//! explains what it refuses, and what it answers is finite.
//!
//! The fuzzers call these functions with bytes they make up, `tests/corpus.rs` with those kept.

use std::{
    fs,
    path::{Path, PathBuf},
    sync::{Arc, OnceLock},
};

use lodeframe::{
    answer::Answer,
    document::{Fault, Node, from_query},
    frames,
    question::{Deployment, Question},
    series::{Counts, Format, Intake, Job, Limits, Outlet, Series},
};

/// A question as JSON.
pub(crate) fn question(data: &[u8]) {
    match Node::from_json(data) {
        Ok(node) => asked(&node),
        Err(fault) => explained(&[fault]),
    }
}

/// A question as the query of a URL.
pub(crate) fn query(data: &[u8]) {
    let Ok(text) = str::from_utf8(data) else {
        return;
    };
    match from_query(text) {
        Ok(node) => asked(&node),
        Err(faults) => explained(&faults),
    }
}

/// Two files, a catalogue of frames and the track `track.csv`, with a line `===` between them.
pub(crate) fn catalogue(data: &[u8]) {
    let cut = data.windows(5).position(|window| window == b"\n===\n");
    let (toml, track) = cut.map_or((data, &b""[..]), |cut| (&data[..cut + 1], &data[cut + 5..]));
    let folder = folder();
    fs::write(folder.join("frames.toml"), toml).expect("a file");
    fs::write(folder.join("track.csv"), track).expect("a file");
    match frames::load(&folder.join("frames.toml")) {
        Ok(catalogue) => assert!(!catalogue.to_string().is_empty()),
        Err(faults) => {
            assert!(!faults.is_empty() && faults.iter().all(|fault| !fault.to_string().is_empty()))
        }
    }
}

/// A series in CSV: the query in the first line, then the rows.
pub(crate) fn csv(data: &[u8]) {
    series(data, Format::Csv);
}

/// A series in NDJSON: the query in the first line, then the rows.
pub(crate) fn ndjson(data: &[u8]) {
    series(data, Format::Ndjson);
}

/// A series in Arrow: the query in the first line, then the stream.
pub(crate) fn arrow(data: &[u8]) {
    series(data, Format::Arrow);
}

fn asked(node: &Node) {
    let question = match Question::read(node, deployment()) {
        Ok(question) => question,
        Err(faults) => return explained(&faults),
    };
    let Ok(answer) = Answer::to(&question) else {
        return;
    };
    let numbers = answer.e.iter().chain(&answer.b).flatten();
    assert!(
        numbers
            .chain(&answer.net.beta)
            .all(|number| number.is_finite())
    );
    serde_json::to_vec(&answer).expect("an answer has a JSON form");
}

fn explained(faults: &[Fault]) {
    assert!(!faults.is_empty());
    for fault in faults {
        assert!(
            !fault.detail.is_empty() && fault.detail.chars().count() < 1100,
            "{}",
            fault.detail.len()
        );
    }
}

/// The same rows whole and in pieces, to every format.
fn series(data: &[u8], input: Format) {
    let cut = data
        .iter()
        .position(|byte| *byte == b'\n')
        .unwrap_or(data.len());
    let (query, rows) = (&data[..cut], data.get(cut + 1..).unwrap_or_default());
    let Ok(Ok(node)) = str::from_utf8(query).map(from_query) else {
        return;
    };
    if let Err(faults) = Series::read(node.clone(), deployment()) {
        return explained(&faults);
    }
    for output in [Format::Csv, Format::Ndjson, Format::Arrow] {
        let answer = |piece| restated(&node, [input, output], rows, piece);
        let (whole, in_pieces) = (answer(usize::MAX), answer(7));
        assert_eq!(
            whole, in_pieces,
            "the answer depends on how the rows arrive"
        );
        // CSV hands other columns on byte for byte, whatever their encoding.
        if output == Format::Ndjson || (input == Format::Csv && str::from_utf8(rows).is_ok()) {
            str::from_utf8(&whole.0).expect("text in, text out");
        }
    }
}

/// The answer to rows that come in pieces, and what ended it before its end.
fn restated(
    node: &Node<'static>,
    [input, output]: [Format; 2],
    rows: &[u8],
    piece: usize,
) -> (Vec<u8>, [u64; 3], Option<String>) {
    let series = Series::read(node.clone(), deployment()).expect("read before");
    let mut outlet = Outlet::new(&series, output);
    let limits = Limits {
        row: 4096,
        batch: 1 << 20,
    };
    let mut intake = Intake::new(Arc::new(series), input, output, limits);
    let mut answer = Vec::new();
    let mut all = || {
        let mut accept = |job: Job| {
            answer.extend(outlet.accept(job.run()).concat());
            !outlet.stopped()
        };
        for piece in rows.chunks(piece.min(rows.len().max(1))) {
            intake.push(piece);
            while let Some(job) = intake.job(1)? {
                if !accept(job) {
                    return Ok(());
                }
            }
        }
        while let Some(job) = intake.last()? {
            if !accept(job) {
                return Ok(());
            }
        }
        Ok(())
    };
    let refusal: Result<(), lodeframe::series::Refusal> = all();
    let refusal = refusal.err().map(|refusal| {
        explained(&refusal.faults);
        refusal.faults[0].detail.clone()
    });
    answer.extend(outlet.end().concat());
    if output == Format::Arrow {
        // Rows are gathered into batches as they come.
        answer.clear();
    }
    let Counts {
        read,
        answered,
        refused,
    } = outlet.counts();
    (answer, [read, answered, refused], refusal)
}

fn deployment() -> &'static Deployment {
    static DEPLOYMENT: OnceLock<Deployment> = OnceLock::new();
    DEPLOYMENT.get_or_init(|| {
        let top = Path::new(env!("CARGO_MANIFEST_DIR"));
        let demo = Path::new("deploy/demo/frames.toml");
        let file = [top.join(demo), top.join("../..").join(demo)]
            .into_iter()
            .find(|file| file.exists());
        let catalogue = frames::load(&file.expect("the demonstration's catalogue"));
        Deployment {
            steps: 100,
            trials: 100_000,
            frames: Some(Arc::new(
                catalogue.unwrap_or_else(|faults| panic!("{}", faults[0])),
            )),
        }
    })
}

fn folder() -> &'static Path {
    static FOLDER: OnceLock<PathBuf> = OnceLock::new();
    FOLDER.get_or_init(|| {
        let folder = std::env::temp_dir().join(format!("lodeframe-fuzz-{}", std::process::id()));
        fs::create_dir_all(&folder).expect("a folder");
        folder
    })
}
