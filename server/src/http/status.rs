//! `status`: how the service is.

use std::sync::{Arc, LazyLock};
use std::time::Instant;

use axum::Json;
use axum::extract::State;
use serde::Serialize;
use utoipa::ToSchema;
use utoipa_axum::router::OpenApiRouter;
use utoipa_axum::routes;

use super::problem::Problem;
use crate::work::Work;

/// When the router was made.
static BEGUN: LazyLock<Instant> = LazyLock::new(Instant::now);

/// The route of this file.
pub(super) fn routes() -> OpenApiRouter<Arc<Work>> {
    LazyLock::force(&BEGUN);
    OpenApiRouter::new().routes(routes!(status))
}

/// How the service is.
#[derive(Serialize, ToSchema)]
struct Status {
    program: &'static str,
    version: &'static str,
    uptime_seconds: u64,
    /// Logs that wait or are being worked on.
    logs_waiting: i64,
}

/// How the service is; an answer shows that its store answers.
#[utoipa::path(get, path = "/status", responses((status = 200, body = Status)))]
async fn status(State(work): State<Arc<Work>>) -> Result<Json<Status>, Problem> {
    Ok(Json(Status {
        program: env!("CARGO_PKG_NAME"),
        version: env!("CARGO_PKG_VERSION"),
        uptime_seconds: BEGUN.elapsed().as_secs(),
        logs_waiting: work.store.open_log_count().await?,
    }))
}
