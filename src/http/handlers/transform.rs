//! One reading restated: `POST` with the question as JSON, `GET` with the same question as a URL.

use axum::{
    extract::{RawQuery, Request, State},
    http::HeaderMap,
    response::Response,
};

use super::{json, svg};
use crate::{
    answer::{Answer, ENGINE, Plan},
    chain,
    document::{Code, Fault, Node, Path, Segment, from_query},
    http::{
        AppState,
        accept::{JSON, SVG, negotiate},
        body::json_body,
        cache::{IMMUTABLE, cached, etag},
        monte_carlo::add_trials,
        problem::{CommonProblems, Problem, ProblemDocument, Source},
        schema::{self, Query, ReadingQuery, SingleQuery, UncertaintyQuery, WayQuery},
    },
    physics::Impossible,
    picture,
    question::Question,
};

/// Questions that are longer, bytes, are left to the pool: a chain of a thousand steps takes up to
/// two tenths of a second, for which other requests shall not wait.
const LONG: usize = 2 * 1024;

/// Restate one reading in another frame.
///
/// The way to the target frame is exactly one of `steps`, `velocity`, `boost`, `rotation`, and
/// `from` with `to`.
/// Everything wrong with a question is answered at once.
#[utoipa::path(
    post, path = "/v1/transform", tag = "fields", operation_id = "transform",
    request_body(
        content = schema::Question, content_type = "application/json",
        description = "The reading, the way to the target frame, and what the answer should hold",
        examples(
            ("motional_field" = (
                summary = "An orbiting probe: what field is seen at rest with the ground",
                value = json!(schema::examples::orbiting_probe()))),
            ("turned_axes" = (
                summary = "Axes turned by 30 degrees, then a boost along the new x axis",
                value = json!(schema::examples::turned_axes()))),
            ("uncertain_reading" = (
                summary = "The same with uncertainties of the reading, the attitude and the velocity",
                value = json!(schema::examples::uncertain_reading()))),
            ("trials" = (
                summary = "A velocity too uncertain for first order, judged by trials",
                value = json!(schema::examples::trials()))),
            ("fast_beam" = (
                summary = "The field of a pickup, in the frame of a proton beam",
                value = json!(schema::examples::fast_beam()))),
        ),
    ),
    responses(
        (status = 200, description = "The same field in the target frame", body = Answer,
            content_type = "application/json",
            examples(
                ("motional_field" = (value = json!(schema::examples::answer_to(schema::examples::orbiting_probe())))),
                ("turned_axes" = (value = json!(schema::examples::answer_to(schema::examples::turned_axes())))),
                ("uncertain_reading" = (value = json!(schema::examples::answer_to(schema::examples::uncertain_reading())))),
                ("trials" = (value = json!(schema::examples::answer_to(schema::examples::trials())))),
                ("fast_beam" = (value = json!(schema::examples::answer_to(schema::examples::fast_beam())))),
            )),
        (status = 400, description = "The question cannot be understood", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 406, description = "No acceptable representation", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 408, description = "The body did not arrive in time", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 413, description = "The body is too large", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 415, description = "The body is not JSON", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 422, description = "The question has no answer: a speed past c, no rotation, an overflow", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn transform(
    State(state): State<AppState>,
    request: Request,
) -> Result<Response, Problem> {
    negotiate(request.headers(), &[JSON])?;
    let body = json_body(request, state.config.max_body).await?;
    let refuse = |faults| Problem::from_faults(faults, Source::Body);
    let answered = if body.len() > LONG {
        let shared = state.clone();
        state.pool.run(move || at_once(&shared, &body)).await
    } else {
        at_once(&state, &body)
    };
    let question = match answered.map_err(refuse)? {
        Ok(response) => return Ok(response),
        Err(question) => question,
    };
    let answer = Box::pin(answer_with_trials(&state, *question)).await;
    answer.map(|answer| json(&answer)).map_err(refuse)
}

/// The answer, or a question that asks for trials. Apart, because what lives in a future is moved
/// with it from layer to layer.
fn at_once(state: &AppState, body: &[u8]) -> Result<Result<Response, Box<Question>>, Vec<Fault>> {
    let node = Node::from_json(body).map_err(|fault| vec![fault])?;
    let question = Question::read(&node, &state.deployment)?;
    if question.monte_carlo.is_some() {
        return Ok(Err(Box::new(question)));
    }
    answer(&question).map(|answer| Ok(json(&answer)))
}

/// Restate one reading in another frame, by URL.
///
/// The same question as by `POST`: a parameter is a path into the JSON question joined by dots,
/// vectors are comma lists, `steps` is JSON text, and a literal `+` is written `%2B`.
#[utoipa::path(
    get, path = "/v1/transform", tag = "fields", operation_id = "transform_by_url",
    params(ReadingQuery, Query, UncertaintyQuery, WayQuery, SingleQuery),
    responses(
        (status = 200, description = "The same field in the target frame, as JSON or as a picture",
            content(
                (Answer = "application/json"),
                (String = "image/svg+xml"),
            ),
            headers(
                ("ETag" = String, description = "Tag of the question, this version and the catalogue"),
                ("Cache-Control" = String, description = "How long the answer may be kept"),
            )),
        (status = 304, description = "The answer is the one the client holds"),
        (status = 400, description = "The question cannot be understood", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 406, description = "No acceptable representation", body = ProblemDocument, content_type = "application/problem+json"),
        (status = 422, description = "The question has no answer", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn transform_by_url(
    State(state): State<AppState>,
    headers: HeaderMap,
    RawQuery(query): RawQuery,
) -> Result<Response, Problem> {
    let representation = negotiate(&headers, &[JSON, SVG])?;
    let refuse = |faults| Problem::from_faults(faults, Source::Query);
    let query = query.unwrap_or_default();
    let node = from_query(&query).map_err(refuse)?;
    let mut question = Question::read(&node, &state.deployment).map_err(refuse)?;
    if representation == SVG {
        // A picture does not show them.
        question.monte_carlo = None;
    }
    // The question as understood, whatever the order and spelling of its parameters.
    let canonical = format!("{question:?}");
    let tag = etag(&[
        canonical.as_bytes(),
        representation.as_bytes(),
        ENGINE.as_bytes(),
    ]);
    cached(&headers, tag, IMMUTABLE, async {
        if question.monte_carlo.is_some() {
            let answer = answer_with_trials(&state, question).await;
            return answer.map(|answer| json(&answer)).map_err(refuse);
        }
        let work = move || -> Result<_, Vec<Fault>> {
            let answer = answer(&question)?;
            Ok(match representation {
                SVG => svg(picture::reading(&question, &answer)),
                _ => json(&answer),
            })
        };
        let answered = if query.len() > LONG {
            state.pool.run(work).await
        } else {
            work()
        };
        answered.map_err(refuse)
    })
    .await
}

fn answer(question: &Question) -> Result<Answer, Vec<Fault>> {
    Answer::to(question).map_err(|impossible| vec![unanswerable(&impossible)])
}

/// Apart, and boxed, because what most questions do not need would make every answer's future larger.
async fn answer_with_trials(state: &AppState, question: Question) -> Result<Answer, Vec<Fault>> {
    let planning = state.pool.run(move || -> Result<_, Vec<Fault>> {
        let mut answer = answer(&question)?;
        Ok((Plan::new(&question, &mut answer), answer))
    });
    let (plan, mut answer) = planning.await?;
    if let Some(plan) = plan {
        add_trials(state, plan, &mut answer).await;
    }
    Ok(answer)
}

/// An answer that no double holds is mended where its unit is chosen; one that rests on too weak
/// an assumption, where that is made.
fn unanswerable(impossible: &Impossible) -> Fault {
    let code: Code = chain::code(impossible);
    let name = match code {
        Code::FieldInPlane => "assume",
        _ => "answer_units",
    };
    let place = Path(vec![Segment::Field(name.into())]);
    Fault::at(&place, code, impossible.to_string())
}
