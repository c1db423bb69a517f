//! The OpenAPI document: as committed, and as true as a test can tell without a client.

use std::{collections::BTreeSet, fs, path::Path};

use serde_json::Value;

use crate::support::get;

const METHODS: [&str; 5] = ["get", "post", "put", "patch", "delete"];

/// Every operation with its path.
fn operations(document: &Value) -> impl Iterator<Item = (&String, &Value)> {
    let paths = document["paths"].as_object().into_iter().flatten();
    paths.flat_map(|(path, item)| {
        METHODS
            .iter()
            .filter_map(move |method| Some((path, item.get(method)?)))
    })
}

#[tokio::test]
async fn the_committed_document_is_the_one_served() {
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("openapi/openapi.json");
    let committed = fs::read_to_string(file).expect("openapi/openapi.json");
    let served = get("/openapi.json", &[]).await;
    assert_eq!(served.header("content-type"), "application/json");
    assert!(
        committed == served.text(),
        "openapi/openapi.json is old; write it anew: cargo run -- openapi > openapi/openapi.json"
    );
}

#[tokio::test]
async fn the_document_says_what_every_document_should() {
    let document = get("/openapi.json", &[]).await.json();
    assert_eq!(document["openapi"], "3.1.0");
    assert_eq!(document["info"]["license"]["identifier"], "MIT");
    let about = document["info"]["description"]
        .as_str()
        .expect("a description");
    assert!(about.contains("not a safety clearance"));
    let tags = document["tags"].as_array().expect("tags");
    let tags: BTreeSet<_> = tags.iter().filter_map(|tag| tag["name"].as_str()).collect();

    let mut ids = BTreeSet::new();
    for (path, operation) in operations(&document) {
        let id = operation["operationId"].as_str().expect("an operation id");
        assert!(ids.insert(id), "{id} stands twice");
        assert!(operation["summary"].is_string(), "{path} has no summary");
        let tag = operation["tags"][0].as_str().expect("a tag");
        assert!(tags.contains(tag), "{path} has an unknown tag");
        let answers = operation["responses"].as_object().expect("answers");
        assert!(answers.contains_key("200"), "{path}");
        for (status, answer) in answers
            .iter()
            .filter(|(status, _)| *status >= &"400".to_owned())
        {
            let kinds: Vec<_> = answer["content"]
                .as_object()
                .into_iter()
                .flatten()
                .collect();
            assert_eq!(kinds.len(), 1, "{path} {status}");
            assert_eq!(kinds[0].0, "application/problem+json", "{path} {status}");
        }
        assert!(
            answers.keys().any(|status| status.starts_with('4')),
            "{path} has no 4xx"
        );
    }
    assert!(!ids.is_empty());
}

/// The path with the example of every parameter that has one.
fn example_of(path: &str, operation: &Value) -> String {
    let mut url = path.to_owned();
    let mut query = Vec::new();
    for parameter in operation["parameters"].as_array().into_iter().flatten() {
        let name = parameter["name"].as_str().expect("a name");
        match (&parameter["in"], parameter["example"].as_str()) {
            (place, Some(example)) if place == "path" => {
                url = url.replace(&format!("{{{name}}}"), example);
            }
            (_, Some(example)) => query.push(format!("{name}={example}")),
            (_, None) => assert_ne!(parameter["required"], true, "{path}: {name}"),
        }
    }
    if query.is_empty() {
        url
    } else {
        format!("{url}?{}", query.join("&"))
    }
}

#[tokio::test]
async fn every_get_answers_as_described() {
    let document = get("/openapi.json", &[]).await.json();
    let described = document["paths"].as_object().expect("paths");
    for (path, item) in described.iter().filter(|(_, item)| item["get"].is_object()) {
        let url = example_of(path, &item["get"]);
        let answer = get(&url, &[]).await;
        assert_eq!(answer.status, 200, "{url}");
        let kind = answer
            .header("content-type")
            .split(';')
            .next()
            .unwrap_or_default();
        let content = &item["get"]["responses"]["200"]["content"];
        assert!(content.get(kind).is_some(), "{url} answered {kind}");
    }
}

#[tokio::test]
async fn every_schema_is_described_with_an_example() {
    let document = get("/openapi.json", &[]).await.json();
    let schemas = document["components"]["schemas"]
        .as_object()
        .expect("schemas");
    for (name, schema) in schemas {
        assert!(
            schema["description"].is_string(),
            "{name} has no description"
        );
        for (field, about) in schema["properties"].as_object().into_iter().flatten() {
            // What may be null is described inside its alternatives.
            let inner = &about["oneOf"][0]["description"];
            assert!(
                about["description"].is_string() || inner.is_string(),
                "{name}.{field} has no description"
            );
        }
    }
    assert!(schemas["Problem"]["example"]["errors"].is_array());
}
