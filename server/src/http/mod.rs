//! The service over HTTP: one file a resource with its wire types. Nothing below knows of HTTP or JSON.

mod balances;
mod guard;
mod logs;
mod page;
mod plants;
mod problem;
mod reconcile;
mod request;
mod status;
mod trends;

use std::any::Any;
use std::io;
use std::sync::Arc;
use std::time::Duration;

use axum::extract::DefaultBodyLimit;
use axum::http::{HeaderName, HeaderValue, Request, StatusCode, header};
use axum::response::{IntoResponse, Response};
use axum::routing::get;
use axum::{Json, Router, middleware};
use tokio::net::TcpListener;
use tower_http::catch_panic::CatchPanicLayer;
use tower_http::compression::CompressionLayer;
use tower_http::request_id::{MakeRequestUuid, PropagateRequestIdLayer, RequestId, SetRequestIdLayer};
use tower_http::set_header::SetResponseHeaderLayer;
use tower_http::timeout::TimeoutLayer;
use tower_http::trace::TraceLayer;
use tracing::{Span, info_span};
use utoipa::OpenApi;
use utoipa_axum::router::OpenApiRouter;

use crate::work::Work;
use problem::Problem;
use request::no_such_method;

pub use guard::Reach;

/// The largest log.
const LARGEST_LOG: usize = 4 << 30;
/// The largest of all other bodies: a plant file and its readings.
const LARGEST_BODY: usize = 16 << 20;
/// What doesn't take long by nature takes no longer than this.
const PATIENCE: Duration = Duration::from_mins(1);

/// What the page may do: nothing but what comes from this service.
const CONTENT_POLICY: &str = "default-src 'self'; base-uri 'none'; form-action 'self'; frame-ancestors 'none'; \
     object-src 'none'";

/// What the service is, beside its paths.
#[derive(OpenApi)]
#[openapi(info(
    title = "Meterwright",
    description = "Plants, logs of their meters, and balances in which mass and energy close. Advice to engineers, not a \
                   protection, custody-transfer or safety system."
))]
struct Description;

/// All paths of the service and their description.
fn described() -> (Router<Arc<Work>>, utoipa::openapi::OpenApi) {
    let short = OpenApiRouter::new()
        .merge(plants::routes())
        .merge(logs::routes())
        .merge(balances::routes())
        .merge(trends::routes())
        .merge(reconcile::routes())
        .merge(status::routes())
        .layer(DefaultBodyLimit::max(LARGEST_BODY))
        .layer(TimeoutLayer::with_status_code(StatusCode::GATEWAY_TIMEOUT, PATIENCE));
    let long = logs::long_routes().layer(DefaultBodyLimit::max(LARGEST_LOG));
    OpenApiRouter::with_openapi(Description::openapi()).nest("/api/v1", short.merge(long)).split_for_parts()
}

/// The service as a router.
pub fn router(work: Arc<Work>, reach: Reach) -> Router {
    let (paths, description) = described();
    let security = |name: HeaderName, value: &'static str| {
        SetResponseHeaderLayer::overriding(name, HeaderValue::from_static(value))
    };
    paths
        .route("/api/v1/openapi.json", get(async move || Json(description)))
        .method_not_allowed_fallback(no_such_method)
        .fallback(page::file)
        .layer(middleware::from_fn_with_state(reach, guard::guard))
        .layer(CatchPanicLayer::custom(panicked))
        .layer(CompressionLayer::new())
        .layer(security(header::CONTENT_SECURITY_POLICY, CONTENT_POLICY))
        .layer(security(header::X_CONTENT_TYPE_OPTIONS, "nosniff"))
        .layer(security(header::REFERRER_POLICY, "no-referrer"))
        .layer(PropagateRequestIdLayer::x_request_id())
        .layer(TraceLayer::new_for_http().make_span_with(span))
        .layer(SetRequestIdLayer::x_request_id(MakeRequestUuid))
        .with_state(work)
}

/// What a request's lines in the log have in common: its id, which its answer carries too.
fn span<B>(request: &Request<B>) -> Span {
    let id = request.extensions().get::<RequestId>().and_then(|id| id.header_value().to_str().ok());
    let (method, path) = (request.method(), request.uri().path());
    info_span!("request", id = id.unwrap_or_default(), %method, path)
}

fn panicked(_: Box<dyn Any + Send>) -> Response {
    let told = "this request makes the program fail; please report it";
    Problem::new(StatusCode::INTERNAL_SERVER_ERROR, told).into_response()
}

/// Answers requests on a listener until `shutdown` is done, and then those that are under way.
///
/// # Errors
/// The listener fails.
pub async fn serve(
    listener: TcpListener,
    work: Arc<Work>,
    reach: Reach,
    shutdown: impl Future<Output = ()> + Send + 'static,
) -> io::Result<()> {
    axum::serve(listener, router(work, reach)).with_graceful_shutdown(shutdown).await
}
