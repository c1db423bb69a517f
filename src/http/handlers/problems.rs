//! What each problem means and how to mend it.

use std::fmt::Write;

use axum::{
    extract::{Path, rejection::PathRejection},
    http::{HeaderMap, HeaderValue, header::VARY},
    response::Response,
};
use serde::Serialize;
use utoipa::ToSchema;

use super::{html, json};
use crate::{
    document::Code,
    http::{
        accept::{HTML, JSON, negotiate},
        problem::{CommonProblems, Problem, ProblemDocument},
    },
};

/// What a problem means and how to mend it.
#[derive(Serialize, ToSchema)]
#[schema(example = json!({
    "type": "/problems/no_direction",
    "code": "no_direction",
    "status": 422,
    "title": "A direction of length zero",
    "about": "A direction, an axis or a quaternion whose components all vanish points nowhere.",
    "mend": "Give a vector of any other length; it need not be normalised.",
}))]
pub(crate) struct Explanation {
    /// The `type` of problem documents of this kind.
    #[serde(rename = "type")]
    kind: String,
    /// The stable name.
    code: &'static str,
    /// The HTTP status of an answer with this problem alone.
    status: u16,
    /// A short summary.
    title: &'static str,
    /// What it means.
    about: &'static str,
    /// How to mend the request.
    mend: &'static str,
}

impl From<Code> for Explanation {
    fn from(code: Code) -> Explanation {
        Explanation {
            kind: format!("/problems/{code}"),
            code: code.name(),
            status: code.status(),
            title: code.title(),
            about: code.about(),
            mend: code.mend(),
        }
    }
}

/// All problems.
#[utoipa::path(
    get, path = "/problems", tag = "problems", operation_id = "list_problems",
    responses(
        (status = 200, description = "Every problem the service can report", content(
            (Vec<Explanation> = "application/json"), (String = "text/html"),
        )),
        (status = 406, description = "Neither JSON nor HTML is acceptable", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn list_problems(headers: HeaderMap) -> Result<Response, Problem> {
    answer(&headers, Code::ALL, |codes| {
        json(
            &codes
                .iter()
                .map(|code| Explanation::from(*code))
                .collect::<Vec<_>>(),
        )
    })
}

/// What one problem means.
#[utoipa::path(
    get, path = "/problems/{code}", tag = "problems", operation_id = "explain_problem",
    params(("code" = String, Path, description = "The code, the last part of a problem's type", example = "no_direction")),
    responses(
        (status = 200, description = "What it means and how to mend it", content(
            (Explanation = "application/json"), (String = "text/html"),
        )),
        (status = 404, description = "There is no such problem", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 406, description = "Neither JSON nor HTML is acceptable", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn explain_problem(
    code: Result<Path<String>, PathRejection>,
    headers: HeaderMap,
) -> Result<Response, Problem> {
    // A path that is no text is no code either.
    let code = code.ok().and_then(|Path(code)| Code::by_name(&code));
    let code = code.ok_or_else(|| {
        Problem::new(
            Code::UnknownCode,
            "No problem has this code; GET /problems lists all of them.",
        )
    })?;
    answer(&headers, &[code], |_| json(&Explanation::from(code)))
}

fn answer(
    headers: &HeaderMap,
    codes: &[Code],
    as_json: impl FnOnce(&[Code]) -> Response,
) -> Result<Response, Problem> {
    let mut response = match negotiate(headers, &[JSON, HTML])? {
        HTML => html(page(codes)),
        _ => as_json(codes),
    };
    response
        .headers_mut()
        .insert(VARY, HeaderValue::from_static("accept"));
    Ok(response)
}

/// The codes as a page for people.
fn page(codes: &[Code]) -> String {
    let mut body = String::new();
    for code in codes {
        let (title, about, mend) = (
            escape(code.title()),
            escape(code.about()),
            escape(code.mend()),
        );
        let status = code.status();
        // Writing into a String cannot fail.
        let _ = writeln!(
            body,
            "<section id=\"{code}\"><h2>{title}</h2>\
             <p><a href=\"/problems/{code}\"><code>{code}</code></a>, status {status}</p>\
             <p>{about}</p><p><strong>How to mend it:</strong> {mend}</p></section>"
        );
    }
    include_str!("../../page/problems.html").replace("{{problems}}", &body)
}

fn escape(text: &str) -> String {
    text.replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
}
