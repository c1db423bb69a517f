//! What is wrong with one row, as it stands in the answer.

use serde::Serialize;

use crate::document::{Fault, Path, Segment};

/// The fault that names the problem: the first of understanding, else the first.
fn first(faults: &[Fault]) -> &Fault {
    let misunderstood = faults.iter().find(|fault| fault.code.status() == 400);
    misunderstood.unwrap_or(&faults[0])
}

/// A problem document (RFC 9457), as far as a row has one.
#[derive(Serialize)]
struct Problem<'f> {
    r#type: String,
    title: &'f str,
    status: u16,
    detail: &'f str,
    errors: Vec<Part<'f>>,
}

#[derive(Serialize)]
struct Part<'f> {
    code: &'f str,
    detail: &'f str,
    #[serde(skip_serializing_if = "Option::is_none")]
    pointer: Option<String>,
}

/// The problem as JSON.
pub(super) fn as_json(faults: &[Fault]) -> String {
    let first = first(faults);
    let errors = faults.iter().map(|fault| Part {
        code: fault.code.name(),
        detail: &fault.detail,
        pointer: fault.path.as_ref().map(Path::pointer),
    });
    let problem = Problem {
        r#type: format!("/problems/{}", first.code),
        title: first.code.title(),
        status: first.code.status(),
        detail: &first.detail,
        errors: errors.collect(),
    };
    serde_json::to_string(&problem).expect("texts and numbers have a JSON form")
}

/// The problem as one line of text: each fault by its code, its column and what is wrong.
pub(super) fn as_text(faults: &[Fault]) -> String {
    let each = faults.iter().map(|fault| match &fault.path {
        Some(path) => format!("{} ({}): {}", fault.code, column(path), fault.detail),
        None => format!("{}: {}", fault.code, fault.detail),
    });
    each.collect::<Vec<_>>().join("; ")
}

/// The column, or columns, that hold what stands at a place of an NDJSON row.
fn column(path: &Path) -> String {
    let parts: Vec<&str> = path
        .0
        .iter()
        .filter_map(|segment| match segment {
            Segment::Field(name) => Some(name.as_str()),
            Segment::Index(_) => None,
        })
        .collect();
    match parts[..] {
        ["velocity"] => "vx, vy, vz".into(),
        ["rotation", "quaternion"] => "qw, qx, qy, qz".into(),
        _ => path.parameter(),
    }
}
