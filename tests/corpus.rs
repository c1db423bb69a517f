//! Every parser, asked again with each input that the fuzzers found worth keeping.

use std::{fs, path::Path};

#[path = "fuzz/targets.rs"]
mod targets;

fn each(target: &str, check: fn(&[u8])) {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/fuzz/corpus")
        .join(target);
    let mut count = 0;
    for entry in fs::read_dir(&folder).expect("a folder of inputs") {
        check(&fs::read(entry.expect("an entry").path()).expect("a file"));
        count += 1;
    }
    assert!(count > 0, "no input in {}", folder.display());
}

#[test]
fn questions() {
    each("question", targets::question);
}

#[test]
fn queries() {
    each("query", targets::query);
}

#[test]
fn catalogues() {
    each("catalogue", targets::catalogue);
}

#[test]
fn rows_of_csv() {
    each("csv", targets::csv);
}

#[test]
fn rows_of_ndjson() {
    each("ndjson", targets::ndjson);
}

#[test]
fn batches_of_arrow() {
    each("arrow", targets::arrow);
}
