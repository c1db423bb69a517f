//! Problem documents (RFC 9457) and their explanations.

use axum::{
    body::Body,
    http::{Request, StatusCode},
    response::IntoResponse,
};
use lodeframe::document::{Code, Faults};
use serde_json::json;

use crate::support::{get, send, service};

#[tokio::test]
async fn an_unknown_path_is_a_problem() {
    let answer = get("/v0/nothing?e=1", &[]).await;
    assert_eq!(answer.status, StatusCode::NOT_FOUND);
    let problem = answer.problem("not_found");
    assert_eq!(problem["errors"], json!([]));
}

#[tokio::test]
async fn a_wrong_method_is_a_problem_that_keeps_allow() {
    let request = Request::delete("/problems").body(Body::empty());
    let answer = send(service(), request.expect("a request")).await;
    assert_eq!(answer.status, StatusCode::METHOD_NOT_ALLOWED);
    answer.problem("method_not_allowed");
    assert_eq!(answer.header("allow"), "GET,HEAD");
}

#[tokio::test]
async fn long_addresses_and_headers_are_problems() {
    let long = "x".repeat(9_000);
    let answer = get(&format!("/health/live?{long}"), &[]).await;
    assert_eq!(answer.status, StatusCode::URI_TOO_LONG);
    answer.problem("uri_too_long");

    let answer = get("/health/live", &[("x-one", &long), ("x-two", &long)]).await;
    assert_eq!(answer.status, StatusCode::REQUEST_HEADER_FIELDS_TOO_LARGE);
    answer.problem("headers_too_large");
}

async fn asked(body: String) -> serde_json::Value {
    let request = Request::post("/v1/transform").header("content-type", "application/json");
    let request = request.body(Body::from(body)).expect("a request");
    send(service(), request).await.json()
}

#[tokio::test]
async fn no_boost_is_too_large_to_be_refused() {
    let boosts = [
        "710", "-710.4", "711", "1e4", "1e18", "1e19", "5.8e30", "1.7e308",
    ]
    .map(|rapidity| format!("\"rapidity\":{rapidity}"));
    let boosts = boosts
        .into_iter()
        .chain(["8e307", "1e308", "1.7e308"].map(|gamma| format!("\"gamma\":{gamma}")));
    for boost in boosts {
        let problem = asked(format!(
            "{{\"b\":[0,0,1],\"e\":[0,0,1],\"boost\":{{\"direction\":[1,0,0],{boost}}}}}"
        ))
        .await;
        assert_eq!(problem["status"], 422, "{boost}: {problem}");
    }
}

#[tokio::test]
async fn many_faults_are_listed_up_to_a_number() {
    let names = |count| {
        (0..count)
            .map(|i| format!("\"n{i}\":1"))
            .collect::<Vec<_>>()
            .join(",")
    };
    let few = asked(format!("{{{}}}", names(20))).await;
    assert_eq!(
        few["errors"].as_array().map(Vec::len),
        Some(20 + 2),
        "and no reading, no way"
    );
    let many = asked(format!("{{{}}}", names(1000))).await;
    assert_eq!(many["errors"].as_array().map(Vec::len), Some(Faults::MOST));
    let detail = many["detail"].as_str().expect("a text");
    assert!(detail.starts_with("100 faults or more"), "{detail}");
}

#[tokio::test]
async fn a_fault_shows_the_ends_of_what_is_too_long_to_read() {
    let long = "ä".repeat(100_000);
    let problem = asked(format!(
        "{{\"e\":[1,2,3],\"velocity\":[0,0,1],\"x{long}y\":1,\"units\":{{\"b\":\"x{long}y\"}}}}"
    ))
    .await;
    let errors = problem["errors"].as_array().expect("a list");
    assert_eq!(errors.len(), 2, "{problem}");
    for error in errors {
        let detail = error["detail"].as_str().expect("a text");
        assert!(
            detail.starts_with("\"xä") && detail.contains("ä ... "),
            "{detail}"
        );
        assert!(detail.chars().count() < 1100);
    }
    // A name that long points to the object that holds it.
    assert_eq!(errors[0]["pointer"], "");
    assert_eq!(errors[1]["pointer"], "/units/b");
}

#[tokio::test]
async fn every_code_is_explained() {
    let list = get("/problems", &[]).await.json();
    assert_eq!(list.as_array().map(Vec::len), Some(Code::ALL.len()));
    for code in Code::ALL {
        let one = get(&format!("/problems/{code}"), &[]).await;
        assert_eq!(one.status, StatusCode::OK);
        let one = one.json();
        assert_eq!(one["type"], format!("/problems/{code}"));
        assert_eq!(one["status"], code.status());
        assert_eq!(one["mend"], code.mend());
        assert!(list.as_array().is_some_and(|list| list.contains(&one)));
    }
}

#[tokio::test]
async fn an_unknown_code_is_a_problem() {
    get("/problems/nonsense", &[]).await.problem("unknown_code");
    // Not UTF-8 once decoded.
    get("/problems/%FF", &[]).await.problem("unknown_code");
}

#[tokio::test]
async fn a_browser_gets_a_page() {
    // What a current browser sends for a link.
    let browser = "text/html,application/xhtml+xml,application/xml;q=0.9,*/*;q=0.8";
    let page = get("/problems/unauthorized", &[("accept", browser)]).await;
    assert_eq!(page.header("content-type"), "text/html; charset=utf-8");
    assert_eq!(page.header("vary"), "accept");
    assert!(page.text().contains("Authorization: Bearer &lt;token&gt;"));
    let other = get("/problems/unauthorized", &[("accept", "*/*")]).await;
    assert_eq!(other.header("content-type"), "application/json");
}

#[tokio::test]
async fn a_type_that_cannot_be_made_is_a_problem() {
    let answer = get("/problems", &[("accept", "image/png, text/html;q=0")]).await;
    assert_eq!(answer.status, StatusCode::NOT_ACCEPTABLE);
    let problem = answer.problem("not_acceptable");
    let detail = problem["detail"].as_str().expect("a text");
    assert!(detail.contains("application/json, text/html"), "{detail}");
}

mod faults {
    use super::*;
    use crate::support::Answer;
    use axum::{Router, routing::get};
    use lodeframe::{
        AppState,
        config::Config,
        document::{Fault, Path},
        http::{
            middleware::Observe,
            problem::{Problem, Source},
        },
    };

    /// The answer to a question with these faults.
    async fn answer(faults: Vec<Fault>, source: Source) -> Answer {
        let handler = async move || Problem::from_faults(faults.clone(), source).into_response();
        let observe = Observe(AppState::new(Config::default(), None));
        let app = Router::new().route("/", get(handler)).layer(observe);
        send(
            app,
            Request::get("/").body(Body::empty()).expect("a request"),
        )
        .await
    }

    #[tokio::test]
    async fn one_fault_gives_its_own_problem() {
        let place = Path::default().field("steps").index(0).field("a/b~c");
        let fault = Fault::at(&place, Code::NoDirection, "The axis is zero.");
        let given = answer(vec![fault.clone()], Source::Body).await;
        assert_eq!(given.status, StatusCode::UNPROCESSABLE_ENTITY);
        let problem = given.problem("no_direction");
        assert_eq!(problem["detail"], "The axis is zero.");
        // RFC 6901 §3: ~ is written ~0 and / is written ~1.
        let part = json!({"code": "no_direction", "detail": "The axis is zero.", "pointer": "/steps/0/a~1b~0c"});
        assert_eq!(problem["errors"], json!([part]));

        let problem = answer(vec![fault], Source::Query)
            .await
            .problem("no_direction");
        assert_eq!(problem["errors"][0]["parameter"], "steps.0.a/b~c");
        assert!(problem["errors"][0].get("pointer").is_none());
    }

    #[tokio::test]
    async fn a_fault_of_understanding_decides_among_several() {
        let at = |name, code| {
            Fault::at(
                &Path::default().field(name),
                code,
                format!("{name} is wrong."),
            )
        };
        let faults = vec![
            at("velocity", Code::FasterThanLight),
            at("e", Code::WrongLength),
            at("x", Code::UnknownField),
        ];
        let given = answer(faults, Source::Body).await;
        assert_eq!(given.status, StatusCode::BAD_REQUEST);
        let problem = given.problem("wrong_length");
        assert_eq!(
            problem["detail"],
            "3 faults, all listed in errors. e is wrong."
        );
        let pointers: Vec<_> = problem["errors"]
            .as_array()
            .into_iter()
            .flatten()
            .map(|part| part["pointer"].clone())
            .collect();
        assert_eq!(pointers, ["/velocity", "/e", "/x"]);
    }

    #[tokio::test]
    async fn a_fault_of_the_whole_body_points_at_the_whole() {
        let fault = Fault::whole(Code::Syntax, "Not JSON.");
        let problem = answer(vec![fault], Source::Body).await.problem("syntax");
        assert_eq!(problem["errors"][0]["pointer"], "");
    }
}
