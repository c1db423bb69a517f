//! The OpenAPI 3.1 document, made from the descriptions beside the handlers.

use serde_json::Value;
use utoipa::OpenApi;

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
    vec![
        ("AnswerUnits", full["units"].clone()),
        ("Invariants", full["invariants"].clone()),
        ("NetTransformation", full["net"].clone()),
        ("Quaternion", full["net"]["rotation"].clone()),
        ("Tensor", full["tensor"].clone()),
        ("Energy", full["energy"].clone()),
        ("FoundFrame", full["parallel_frame"].clone()),
        ("NoFrame", plane_wave["parallel_frame"].clone()),
        ("Notice", plane_wave["notices"][0].clone()),
        ("Provenance", full["provenance"].clone()),
        ("Answer", full),
    ]
}
