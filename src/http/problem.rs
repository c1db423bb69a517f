//! Problem documents (RFC 9457).

use axum::{
    body::Body,
    http::{
        HeaderValue, StatusCode,
        header::{CACHE_CONTROL, CONTENT_LENGTH, CONTENT_TYPE, RETRY_AFTER},
    },
    response::{IntoResponse, Response},
};
use serde::Serialize;
use utoipa::{IntoResponses, ToSchema};
use uuid::Uuid;

use crate::document::{Code, Fault, Faults, Path};

/// The media type of a problem document.
pub const PROBLEM_JSON: &str = "application/problem+json";

/// How a question was sent, which decides how the places of its faults are named.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Source {
    /// As a JSON body: faults have a `pointer`.
    Body,
    /// In the URL: faults have a `parameter`.
    Query,
    /// As a table of rows: faults have a `column`.
    Table,
}

/// What went wrong with a request, before it has its request id.
///
/// A handler returns it; the middleware writes the document, since only it knows the id.
#[derive(Clone, Debug)]
pub struct Problem {
    code: Code,
    status: StatusCode,
    detail: String,
    errors: Vec<ProblemPart>,
}

impl Problem {
    /// A problem of the request as a whole.
    pub fn new(code: Code, detail: impl Into<String>) -> Problem {
        Problem {
            code,
            status: StatusCode::from_u16(code.status()).expect("the table holds HTTP statuses"),
            detail: detail.into(),
            errors: Vec::new(),
        }
    }

    /// The problem that stands for all faults of a question.
    ///
    /// It is one of understanding (400) if any fault is, since what follows from a misunderstood
    /// question means little; its type is that of the first fault which decides so.
    ///
    /// # Panics
    /// When there is no fault.
    pub fn from_faults(faults: Vec<Fault>, source: Source) -> Problem {
        let first = faults
            .iter()
            .find(|fault| fault.code.status() == 400)
            .or(faults.first())
            .expect("a question without a fault is no problem");
        let detail = match faults.len() {
            1 => first.detail.clone(),
            count if count >= Faults::MOST => format!(
                "{count} faults or more; the first of them are listed in errors. {}",
                first.detail
            ),
            count => format!("{count} faults, all listed in errors. {}", first.detail),
        };
        let problem = Problem::new(first.code, detail);
        let errors = faults
            .into_iter()
            .map(|fault| ProblemPart::new(fault, source));
        Problem {
            errors: errors.collect(),
            ..problem
        }
    }

    /// The problem behind an answer that the router or a library made without naming one.
    pub fn from_status(status: StatusCode) -> Problem {
        let (code, detail) = match status {
            StatusCode::NOT_FOUND => (
                Code::NotFound,
                "There is nothing at this path; GET /openapi.json lists every path.",
            ),
            StatusCode::METHOD_NOT_ALLOWED => (
                Code::MethodNotAllowed,
                "This path does not answer this method; the Allow header lists those it answers.",
            ),
            StatusCode::BAD_REQUEST => (Code::Syntax, "The request is not well-formed."),
            _ => (Code::Internal, "The service failed while it answered."),
        };
        Problem::new(code, detail)
    }

    /// Which problem it is.
    pub fn code(&self) -> Code {
        self.code
    }

    /// Writes the document into `response`, keeping its other headers.
    pub(super) fn write(self, id: Uuid, response: &mut Response) {
        let document = ProblemDocument {
            kind: format!("/problems/{}", self.code),
            title: self.code.title().to_owned(),
            status: self.status.as_u16(),
            detail: self.detail,
            instance: id.urn().to_string(),
            errors: self.errors,
        };
        let text = serde_json::to_vec(&document).expect("texts and numbers have a JSON form");
        *response.status_mut() = self.status;
        *response.body_mut() = Body::from(text);
        let headers = response.headers_mut();
        headers.remove(CONTENT_LENGTH);
        headers.insert(CONTENT_TYPE, HeaderValue::from_static(PROBLEM_JSON));
        headers.insert(CACHE_CONTROL, HeaderValue::from_static("no-store"));
        if matches!(self.status.as_u16(), 429 | 503) {
            headers.insert(RETRY_AFTER, HeaderValue::from_static("1"));
        }
    }
}

impl IntoResponse for Problem {
    /// The status alone, with the problem beside it for the middleware to write.
    fn into_response(self) -> Response {
        let mut response = self.status.into_response();
        response.extensions_mut().insert(self);
        response
    }
}

/// What went wrong with a request and how to mend it (RFC 9457, application/problem+json).
#[derive(Debug, Serialize, ToSchema)]
#[schema(as = Problem, example = json!({
    "type": "/problems/wrong_length",
    "title": "A list of the wrong length",
    "status": 400,
    "detail": "2 faults, all listed in errors. expected three numbers [x, y, z], got 2 of them",
    "instance": "urn:uuid:7d3c1a52-0f6b-4f0e-9a55-5b6e1c0f2d11",
    "errors": [
        {"code": "wrong_length", "detail": "expected three numbers [x, y, z], got 2 of them", "pointer": "/e"},
        {"code": "faster_than_light", "detail": "the speed is 1.0006922855944562 c; a frame moves slower than c = 299792458 m/s. Check the value and its unit; very close to c give a direction with gamma, rapidity or kinetic_energy", "pointer": "/velocity"},
    ],
}))]
pub struct ProblemDocument {
    /// The kind of problem, as a path of this service that explains it.
    #[serde(rename = "type")]
    #[schema(format = "uri-reference", pattern = "^/problems/[a-z_]+$")]
    kind: String,
    /// A short summary that is the same for all problems of this type.
    title: String,
    /// The HTTP status of the answer.
    #[schema(minimum = 400, maximum = 599)]
    status: u16,
    /// What was wrong and what would be right.
    detail: String,
    /// The request id, the same as in the x-request-id header and in the log of the service.
    #[schema(format = "uri", pattern = "^urn:uuid:[0-9a-f-]{36}$")]
    instance: String,
    /// Every fault found in the question at once; empty when the problem is of another kind.
    errors: Vec<ProblemPart>,
}

/// One fault of a question, and where it stands: at most one of pointer, parameter and column.
#[derive(Clone, Debug, Serialize, ToSchema)]
#[schema(example = json!({
    "code": "wrong_length",
    "detail": "expected three numbers [x, y, z], got 2 of them",
    "pointer": "/e",
}))]
pub struct ProblemPart {
    /// The code of the fault, explained at /problems/{code}.
    #[schema(pattern = "^[a-z_]+$")]
    code: &'static str,
    /// What was wrong and what would be right.
    detail: String,
    /// The place in the body, as a JSON Pointer (RFC 6901); empty for the body as a whole.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(nullable = false)]
    pointer: Option<String>,
    /// The parameter of the URL.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(nullable = false)]
    parameter: Option<String>,
    /// The column of a table of rows.
    #[serde(skip_serializing_if = "Option::is_none")]
    #[schema(nullable = false)]
    column: Option<String>,
}

impl ProblemPart {
    fn new(fault: Fault, source: Source) -> ProblemPart {
        let path = fault.path;
        let (pointer, parameter, column) = match source {
            Source::Body => (Some(path.unwrap_or_default().pointer()), None, None),
            Source::Query => (None, path.as_ref().map(Path::parameter), None),
            Source::Table => (None, None, path.as_ref().map(Path::parameter)),
        };
        ProblemPart {
            code: fault.code.name(),
            detail: fault.detail,
            pointer,
            parameter,
            column,
        }
    }
}

/// The problems that any operation can answer with.
#[derive(IntoResponses)]
#[allow(dead_code, reason = "describes answers for the OpenAPI document")]
pub enum CommonProblems {
    /// The path and query are longer than the service reads.
    #[response(status = 414, content_type = "application/problem+json")]
    UriTooLong(ProblemDocument),
    /// The headers are larger than the service reads.
    #[response(status = 431, content_type = "application/problem+json")]
    HeadersTooLarge(ProblemDocument),
    /// The service failed; the question was not the cause.
    #[response(status = 500, content_type = "application/problem+json")]
    Internal(ProblemDocument),
    /// The service has as much work as it takes on at once; Retry-After says how long to wait.
    #[response(status = 503, content_type = "application/problem+json")]
    Overloaded(ProblemDocument),
}
