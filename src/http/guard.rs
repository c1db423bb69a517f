//! Bearer tokens asked for by the paths that tell or do something for one deployment (RFC 6750).

use std::sync::Arc;

use axum::{
    extract::{Request, State},
    http::{
        HeaderMap, HeaderValue,
        header::{AUTHORIZATION, CACHE_CONTROL, WWW_AUTHENTICATE},
    },
    middleware::Next,
    response::{IntoResponse, Response},
};

use super::{AppState, problem::Problem};
use crate::document::Code;

/// Who asked, as named in the file of tokens; stands in the answer for the log.
#[derive(Clone)]
pub(super) struct Holder(pub(super) Arc<str>);

/// Lets a request pass when it carries a token, and keeps its answer out of shared caches.
pub(super) async fn guard(State(state): State<AppState>, request: Request, next: Next) -> Response {
    let Some(tokens) = &state.config.tokens else {
        return next.run(request).await;
    };
    let presented = presented(request.headers());
    let Some(holder) = presented.and_then(|token| tokens.holder(token)) else {
        return refusal(presented.is_some());
    };
    let mut response = next.run(request).await;
    let headers = response.headers_mut();
    if let Some(rest) = headers
        .get(CACHE_CONTROL)
        .and_then(|value| value.as_bytes().strip_prefix(b"public"))
    {
        let private = [b"private", rest].concat();
        let private = HeaderValue::from_bytes(&private).expect("part of a header");
        headers.insert(CACHE_CONTROL, private);
    }
    response.extensions_mut().insert(Holder(holder));
    response
}

/// The token of a request that carries exactly one.
fn presented(headers: &HeaderMap) -> Option<&[u8]> {
    let mut values = headers.get_all(AUTHORIZATION).iter();
    let (value, None) = (values.next()?.as_bytes(), values.next()) else {
        return None;
    };
    let (scheme, token) = value.split_at_checked(6)?;
    let token = token.trim_ascii_start();
    (scheme.eq_ignore_ascii_case(b"bearer") && value.get(6) == Some(&b' ')).then_some(token)
}

fn refusal(wrong: bool) -> Response {
    let (detail, challenge) = if wrong {
        (
            "The token is not one that this service knows; ask whoever runs it for one.",
            r#"Bearer realm="lodeframe", error="invalid_token""#,
        )
    } else {
        (
            "The request carries no token; send one header Authorization: Bearer TOKEN. Whoever runs the service gives them out.",
            r#"Bearer realm="lodeframe""#,
        )
    };
    let mut response = Problem::new(Code::Unauthorized, detail).into_response();
    let challenge = HeaderValue::from_static(challenge);
    response.headers_mut().insert(WWW_AUTHENTICATE, challenge);
    response
}
