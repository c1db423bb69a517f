//! The OpenAPI 3.1 document, made from the descriptions beside the handlers.

use utoipa::OpenApi;

use super::router;

/// What stands in the document outside the paths.
#[derive(OpenApi)]
#[openapi(
    info(
        title = "Lodeframe",
        description = include_str!("description.md"),
        license(name = "MIT", identifier = "MIT"),
    ),
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
    let mut text = document
        .to_pretty_json()
        .expect("the document has a JSON form");
    text.push('\n');
    text
}
