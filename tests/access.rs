//! Bearer tokens (RFC 6750) and the paths that ask for them.

use axum::{
    Router,
    body::Body,
    http::{Request, StatusCode},
};
use lodeframe::{
    AppState, app,
    config::{Config, Tokens},
};

use crate::support::{Answer, get, send};

/// A service that knows one token, and the token.
fn guarded() -> (Router, String) {
    let (secret, line) = Tokens::make("logger-3").expect("a name");
    let config = Config {
        tokens: Some(Tokens::parse(&line).expect("a line as printed")),
        cors_origins: vec!["https://lab.example".to_owned()],
        ..Config::default()
    };
    (app(AppState::new(config, None)), secret)
}

async fn ask(app: &Router, path: &str, headers: &[(&str, &str)]) -> Answer {
    let mut request = Request::get(path);
    for (name, value) in headers {
        request = request.header(*name, *value);
    }
    send(app.clone(), request.body(Body::empty()).expect("a request")).await
}

const QUESTION: &str = "/v1/transform?e=1,2,3&b=4,5,6&velocity=7,8,9";

#[tokio::test]
async fn a_known_token_is_answered_and_nothing_shared_keeps_the_answer() {
    let (app, secret) = guarded();
    for scheme in ["Bearer", "bearer", "BEARER"] {
        let answer = ask(
            &app,
            QUESTION,
            &[("authorization", &format!("{scheme} {secret}"))],
        )
        .await;
        assert_eq!(answer.status, StatusCode::OK, "{scheme}");
        // RFC 9111 §5.2.2.7.
        assert_eq!(answer.header("cache-control"), "private, max-age=86400");
    }
    let free = get(QUESTION, &[]).await;
    assert_eq!(free.header("cache-control"), "public, max-age=86400");
}

#[tokio::test]
async fn without_a_known_token_the_answer_is_a_challenge() {
    let (app, secret) = guarded();
    // RFC 6750 §3: the error is named only when a token was sent.
    let none = r#"Bearer realm="lodeframe""#;
    let wrong = r#"Bearer realm="lodeframe", error="invalid_token""#;
    let cut = &secret[1..];
    for (authorization, challenge) in [
        (None, none),
        (Some("Basic bG9nZ2VyOnN3b3JkZmlzaA==".to_owned()), none),
        (Some(secret.clone()), none),
        (Some("Bearer".to_owned()), none),
        (Some(format!("Bearer {cut}")), wrong),
        (Some(format!("Bearer {secret}0")), wrong),
        (Some(format!("Bearer {}", secret.to_uppercase())), wrong),
    ] {
        let header = authorization
            .as_deref()
            .map(|value| ("authorization", value));
        let answer = ask(&app, QUESTION, header.as_slice()).await;
        assert_eq!(answer.status, StatusCode::UNAUTHORIZED, "{authorization:?}");
        assert_eq!(
            answer.header("www-authenticate"),
            challenge,
            "{authorization:?}"
        );
        answer.problem("unauthorized");
        assert!(!answer.text().contains(cut));
    }
    let good = format!("Bearer {secret}");
    let twice = [("authorization", &*good), ("authorization", &*good)];
    assert_eq!(
        ask(&app, QUESTION, &twice).await.status,
        StatusCode::UNAUTHORIZED
    );
}

#[tokio::test]
async fn exactly_the_paths_of_one_deployment_ask_for_a_token() {
    let (app, _) = guarded();
    let document = get("/openapi.json", &[]).await.json();
    let paths = document["paths"].as_object().expect("paths");
    let mut asked = 0;
    for (path, item) in paths {
        for (method, operation) in item.as_object().expect("operations") {
            let path = path.replace("{name}", "x").replace("{file}", "style.css");
            let request = Request::builder()
                .method(&*method.to_uppercase())
                .uri(&path);
            let answer = send(app.clone(), request.body(Body::empty()).expect("a request")).await;
            let guarded = answer.status == StatusCode::UNAUTHORIZED;
            assert_eq!(
                operation["responses"].get("401").is_some(),
                guarded,
                "{method} {path} is described otherwise than it answers"
            );
            let deployment =
                path.starts_with("/v1/") && !matches!(&*path, "/v1/units" | "/v1/constants");
            assert_eq!(guarded, deployment || path == "/metrics", "{method} {path}");
            asked += i32::from(guarded);
        }
    }
    assert!(asked >= 6, "{asked}");
}

#[tokio::test]
async fn a_browser_may_ask_before_it_sends_a_token() {
    let (app, _) = guarded();
    let preflight = Request::options("/v1/transform")
        .header("origin", "https://lab.example")
        .header("access-control-request-method", "GET")
        .header("access-control-request-headers", "authorization");
    let answer = send(
        app.clone(),
        preflight.body(Body::empty()).expect("a request"),
    )
    .await;
    assert_eq!(answer.status, StatusCode::OK);
    // The Fetch standard §4.8: `*` does not stand for Authorization, which must be named.
    let allowed = answer.header("access-control-allow-headers");
    assert!(allowed.contains("authorization"), "{allowed}");
    let refused = ask(&app, QUESTION, &[("origin", "https://lab.example")]).await;
    assert_eq!(refused.status, StatusCode::UNAUTHORIZED);
    assert_eq!(
        refused.header("access-control-allow-origin"),
        "https://lab.example"
    );
}

#[test]
fn a_token_is_long_random_and_stored_hashed() {
    let (secret, line) = Tokens::make("a.b_c-9").expect("a name");
    let (other, _) = Tokens::make("a.b_c-9").expect("a name");
    assert_ne!(secret, other);
    assert_eq!(secret.len(), 64, "256 bits in hex");
    assert!(!line.contains(&secret));
    let tokens = Tokens::parse(&format!("# ours\n\n  {line}  \r\n")).expect("a line as printed");
    assert_eq!(tokens.holder(secret.as_bytes()).as_deref(), Some("a.b_c-9"));
    assert_eq!(tokens.holder(other.as_bytes()), None);
    assert_eq!(tokens.holder(b""), None);
    assert_eq!(format!("{tokens:?}"), r#"["a.b_c-9"]"#);
}

#[test]
fn the_hash_is_that_of_the_standard() {
    // FIPS 180-4, the example for the message "abc" (NIST, Example Values, SHA-256).
    let line = "abc sha256:ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
    let tokens = Tokens::parse(line).expect("a line");
    assert_eq!(tokens.holder(b"abc").as_deref(), Some("abc"));
}

#[test]
fn every_fault_of_a_file_of_tokens_is_named_without_quoting_it() {
    let (secret, line) = Tokens::make("one").expect("a name");
    let text = format!(
        "{line}\n{secret}\ntwo sha256:abcd\nthree md5:{secret}\n{line}\nno/name sha256:{secret}\n"
    );
    let faults = Tokens::parse(&text).map(|_| ()).expect_err("faults");
    let places: Vec<_> = faults.iter().map(|fault| &fault[..6]).collect();
    assert_eq!(places, ["line 2", "line 3", "line 4", "line 5", "line 6"]);
    assert!(faults[3].contains("names one again"), "{faults:?}");
    assert!(!faults.concat().contains(&secret[..8]), "{faults:?}");
    assert!(Tokens::parse("# none\n").is_err());
    for name in ["", "a b", "naïve", "line\nbreak", &"x".repeat(65)] {
        assert!(Tokens::make(name).is_err(), "{name:?}");
    }
}
