//! The OpenAPI 3.1 document, made from the descriptions beside the handlers.

use serde_json::Value;
use utoipa::{
    OpenApi,
    openapi::{
        RefOr,
        security::{Http, HttpAuthScheme, SecurityRequirement, SecurityScheme},
    },
};

use super::{router, schema::examples};

/// What stands in the document outside the paths.
#[derive(OpenApi)]
#[openapi(
    info(
        title = "Lodeframe",
        description = include_str!("description.md"),
        license(name = "MIT", identifier = "MIT"),
    ),
    security(()),
    servers((url = "/", description = "The service that this document came from")),
    tags(
        (name = "fields", description = "Fields restated in another frame"),
        (name = "frames", description = "Named frames and the transformations between them"),
        (name = "tables", description = "Units and constants"),
        (name = "service", description = "The page, the reference and the state of the service"),
        (name = "problems", description = "What each problem means and how to mend it"),
    ),
)]
struct Head;

/// The document without its paths.
pub(super) fn head() -> utoipa::openapi::OpenApi {
    Head::openapi()
}

/// Says of every path that it may ask for a token, and what it answers without one.
pub(super) fn say_guarded(document: &mut utoipa::openapi::OpenApi) {
    let mut bearer = Http::new(HttpAuthScheme::Bearer);
    bearer.description = Some(
        "Needed where the service was started with --tokens; elsewhere no token is read."
            .to_owned(),
    );
    document
        .components
        .get_or_insert_default()
        .add_security_scheme("bearer", SecurityScheme::Http(bearer));
    let items = document.paths.paths.values_mut();
    for operation in items
        .flat_map(|item| [&mut item.get, &mut item.post])
        .flatten()
    {
        operation.security = Some(vec![
            SecurityRequirement::default(),
            SecurityRequirement::new("bearer", [] as [&str; 0]),
        ]);
        let responses = &mut operation.responses.responses;
        // A problem like any other.
        let Some(RefOr::T(problem)) = responses.get("500") else {
            unreachable!("every operation has the common problems");
        };
        let mut unauthorized = problem.clone();
        unauthorized.description =
            "The service asks for a token, and the request carries none that it knows".to_owned();
        responses.insert("401".to_owned(), RefOr::T(unauthorized));
    }
}

/// The whole document as indented JSON with a newline at its end, as served and as committed.
pub fn text() -> String {
    let (_, document) = router::routes().split_for_parts();
    let mut document = serde_json::to_value(&document).expect("the document has a JSON form");
    let schemas = &mut document["components"]["schemas"];
    for (name, example) in answer_examples() {
        schemas[name]["example"] = example;
    }
    let mut text = serde_json::to_string_pretty(&document).expect("a JSON value has a text");
    text.push('\n');
    text
}

/// Examples of the parts of an answer, cut from true answers.
fn answer_examples() -> Vec<(&'static str, Value)> {
    let answer = |question| {
        serde_json::to_value(examples::answer_to(question)).expect("an answer has a JSON form")
    };
    let full = answer(examples::turned_axes());
    let plane_wave = answer(examples::plane_wave());
    let swept = serde_json::to_value(examples::swept()).expect("an answer has a JSON form");
    let uncertain = &answer(examples::uncertain_reading())["uncertainty"];
    let trials = &answer(examples::trials())["monte_carlo"];
    vec![
        ("AnswerUnits", full["units"].clone()),
        ("Invariants", full["invariants"].clone()),
        ("NetTransformation", full["net"].clone()),
        ("Quaternion", full["net"]["rotation"].clone()),
        ("Tensor", full["tensor"].clone()),
        ("Energy", full["energy"].clone()),
        ("FoundFrame", full["parallel_frame"].clone()),
        ("UncertaintyOfAnswer", uncertain.clone()),
        ("Coverage", uncertain["coverage"].clone()),
        ("Ellipsoid", uncertain["coverage"]["e"].clone()),
        ("Magnitudes", uncertain["magnitudes"].clone()),
        ("Measure", uncertain["magnitudes"]["e"].clone()),
        ("UncertainInvariants", uncertain["invariants"].clone()),
        (
            "UncertainParallelFrame",
            uncertain["parallel_frame"].clone(),
        ),
        ("SecondOrder", uncertain["second_order"].clone()),
        ("Budget", uncertain["budget"].clone()),
        ("Share", uncertain["budget"]["e"][0][0].clone()),
        ("MonteCarloOfAnswer", trials.clone()),
        ("ComponentsOfTrials", trials["estimate"].clone()),
        ("IntervalsOfTrials", trials["intervals"].clone()),
        ("ValidationOfTrials", trials["validation"].clone()),
        (
            "ComparisonOfIntervals",
            trials["validation"]["e"][0].clone(),
        ),
        ("NoFrame", plane_wave["parallel_frame"].clone()),
        ("Notice", plane_wave["notices"][0].clone()),
        ("Columns", swept["e"].clone()),
        ("UncertainColumns", swept["uncertainty"].clone()),
        ("Swept", swept),
        ("Provenance", full["provenance"].clone()),
        ("Answer", full),
    ]
}
