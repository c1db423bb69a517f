//! Every parser, asked again with each input that the fuzzers found worth keeping, and with inputs
//! made from those: a short smoke, the same in every run.

use std::{
    fs,
    panic::{AssertUnwindSafe, catch_unwind},
    path::Path,
};

#[path = "fuzz/mutant.rs"]
mod mutant;
#[path = "fuzz/targets.rs"]
mod targets;

use mutant::Mutants;

/// Asks with each input kept for a target, and with so many made from each.
fn each(target: &str, mutants: usize, check: fn(&[u8])) {
    let fuzz = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/fuzz");
    let folder = fs::read_dir(fuzz.join("corpus").join(target)).expect("a folder of inputs");
    let mut kept: Vec<_> = folder
        .map(|entry| entry.expect("an entry").path())
        .collect();
    kept.sort();
    assert!(!kept.is_empty(), "no input for {target}");
    let kept: Vec<Vec<u8>> = kept
        .iter()
        .map(|path| fs::read(path).expect("a file"))
        .collect();
    for input in &kept {
        check(input);
    }
    let words = fs::read_to_string(fuzz.join("names.dict")).expect("a dictionary");
    let mut made = Mutants::new(&kept, &words);
    for _ in 0..mutants {
        for which in 0..kept.len() {
            let input = made.of(which);
            if catch_unwind(AssertUnwindSafe(|| check(&input))).is_err() {
                panic!("{target} fails; keep this input: {}", input.escape_ascii());
            }
        }
    }
}

#[test]
fn questions() {
    each("question", 200, targets::question);
}

#[test]
fn queries() {
    each("query", 200, targets::query);
}

#[test]
fn catalogues() {
    each("catalogue", 40, targets::catalogue);
}

#[test]
fn rows_of_csv() {
    each("csv", 60, targets::csv);
}

#[test]
fn rows_of_ndjson() {
    each("ndjson", 40, targets::ndjson);
}

#[test]
fn batches_of_arrow() {
    each("arrow", 60, targets::arrow);
}
