//! Every path of the service.

use axum::{Router, http::HeaderName, middleware::from_fn_with_state};
use tower_http::cors::{AllowHeaders, AllowOrigin, Any, CorsLayer};
use utoipa_axum::{router::OpenApiRouter, routes};

use super::{AppState, guard::guard, handlers, middleware::Observe, openapi};

/// The whole service as one router, ready to be served.
pub fn app(state: AppState) -> Router {
    let (mut router, _) = guarded().split_for_parts();
    if state.config.tokens.is_some() {
        router = router.route_layer(from_fn_with_state(state.clone(), guard));
    }
    let (open, _) = open().split_for_parts();
    let mut router = open.merge(router);
    let origins = &state.config.cors_origins;
    if !origins.is_empty() {
        router = router.layer(cors(origins));
    }
    router.layer(Observe(state.clone())).with_state(state)
}

/// Every path with its handler and its description.
pub fn routes() -> OpenApiRouter<AppState> {
    open().merge(guarded())
}

/// The paths that are the same for everyone and every deployment, and those that say it is alive.
fn open() -> OpenApiRouter<AppState> {
    OpenApiRouter::with_openapi(openapi::head())
        .routes(routes!(handlers::units::units))
        .routes(routes!(handlers::constants::constants))
        .routes(routes!(handlers::page::page))
        .routes(routes!(handlers::page::page_asset))
        .routes(routes!(handlers::openapi::openapi))
        .routes(routes!(handlers::reference::reference))
        .routes(routes!(handlers::reference::reference_asset))
        .routes(routes!(handlers::problems::list_problems))
        .routes(routes!(handlers::problems::explain_problem))
        .routes(routes!(handlers::health::live))
        .routes(routes!(handlers::health::ready))
}

/// The paths that ask for a token where there are tokens.
fn guarded() -> OpenApiRouter<AppState> {
    let mut router = OpenApiRouter::new()
        .routes(routes!(
            handlers::transform::transform,
            handlers::transform::transform_by_url
        ))
        .routes(routes!(handlers::sweep::sweep))
        .routes(routes!(handlers::series::series))
        .routes(routes!(handlers::frames::list_frames))
        .routes(routes!(handlers::frames::show_frame))
        .routes(routes!(handlers::frames::transformation))
        .routes(routes!(handlers::metrics::metrics));
    openapi::say_guarded(router.get_openapi_mut());
    router
}

/// Lets pages of the named origins ask, without cookies.
fn cors(origins: &[String]) -> CorsLayer {
    let origins = origins
        .iter()
        .map(|origin| origin.parse().expect("checked with the settings"));
    CorsLayer::new()
        .allow_origin(AllowOrigin::list(origins))
        .allow_methods(Any)
        // Not Any: the `*` of the Fetch standard leaves Authorization out.
        .allow_headers(AllowHeaders::mirror_request())
        .expose_headers([
            axum::http::header::ETAG,
            HeaderName::from_static("x-request-id"),
        ])
}
