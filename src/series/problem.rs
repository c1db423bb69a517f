//! What is wrong with one row, as it stands in the answer.

use serde_json::{Value, json};

use crate::document::{Fault, Path, Segment};

/// The fault that names the problem: the first of understanding, else the first.
fn first(faults: &[Fault]) -> &Fault {
    let misunderstood = faults.iter().find(|fault| fault.code.status() == 400);
    misunderstood.unwrap_or(&faults[0])
}

/// The problem as JSON, with the members of a problem document (RFC 9457) that a row can have.
pub(super) fn as_json(faults: &[Fault]) -> Value {
    let first = first(faults);
    let errors = faults.iter().map(|fault| {
        let mut error = json!({"code": fault.code.name(), "detail": fault.detail});
        if let Some(path) = &fault.path {
            error["pointer"] = path.pointer().into();
        }
        error
    });
    json!({
        "type": format!("/problems/{}", first.code),
        "title": first.code.title(),
        "status": first.code.status(),
        "detail": first.detail,
        "errors": errors.collect::<Vec<_>>(),
    })
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
