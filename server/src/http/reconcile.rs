//! `reconcile`: one balance of readings that are sent, of which nothing is stored.

use std::collections::BTreeMap;
use std::sync::Arc;

use axum::Json;
use axum::extract::State;
use axum::http::StatusCode;
use axum::response::{IntoResponse, Response};
use meterwright_engine::Reading;
use meterwright_engine::fault::suggestion;
use serde::{Deserialize, Serialize};
use utoipa::ToSchema;
use utoipa_axum::router::OpenApiRouter;
use utoipa_axum::routes;

use super::problem::Problem;
use super::request::Body;
use crate::ready::ReadyPlant;
use crate::report::document::BalanceDocument;
use crate::work::{FALSE_ALARM_RATE, Work};

/// The route of this file.
pub(super) fn routes() -> OpenApiRouter<Arc<Work>> {
    OpenApiRouter::new().routes(routes!(reconcile))
}

/// What is to be balanced.
#[derive(Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
struct Request {
    /// The plant file's text.
    plant: String,
    /// Readings by tag, in the tags' units; null or left out: no good reading.
    readings: BTreeMap<String, Option<f64>>,
    /// Standard uncertainties by tag, in the tags' units, where others than the plant file states are wanted.
    #[serde(default)]
    sigmas: BTreeMap<String, f64>,
    /// Share of error-free balances in which anything is found.
    #[serde(default = "usual_rate")]
    false_alarm_rate: f64,
}

fn usual_rate() -> f64 {
    FALSE_ALARM_RATE
}

/// One balance of readings without a time.
#[derive(Serialize, ToSchema)]
struct Balanced<'b> {
    /// Name of the plant; `plant` as in the result of a log.
    plant: &'b str,
    /// Hash of the plant file.
    revision: &'b str,
    #[serde(flatten)]
    balance: BalanceDocument<'b>,
}

/// Balances readings and stores nothing.
#[utoipa::path(post, path = "/reconcile", request_body = Request,
    responses((status = 200, body = Balanced), (status = 400, body = Problem), (status = 422, body = Problem)))]
async fn reconcile(State(work): State<Arc<Work>>, Body(request): Body<Request>) -> Result<Response, Problem> {
    if !(request.false_alarm_rate > 0.0 && request.false_alarm_rate < 1.0) {
        return Err(unprocessable("`false_alarm_rate` must lie above 0 and below 1, such as 0.05"));
    }
    let ready = work.plants.ready(&request.plant).await.map_err(Problem::plant_file)?;
    let readings = readings(&ready, &request)?;
    let answered = tokio::task::spawn_blocking(move || {
        let balance = ready.balance(&readings, request.false_alarm_rate);
        let labels = ready.labels();
        let balance = BalanceDocument::untimed(&labels, &balance, true);
        let (plant, revision) = (&ready.plant.name.value, &ready.plant.revision);
        Json(Balanced { plant, revision, balance }).into_response()
    });
    answered.await.map_err(|_| {
        Problem::new(
            StatusCode::INTERNAL_SERVER_ERROR,
            "these readings make the program fail; please report them with the plant file",
        )
    })
}

fn unprocessable(detail: impl Into<String>) -> Problem {
    Problem::new(StatusCode::UNPROCESSABLE_ENTITY, detail)
}

/// One reading for each tag of the plant, in its order.
fn readings(ready: &ReadyPlant, request: &Request) -> Result<Vec<Option<Reading>>, Problem> {
    let tags = ready.compiled.tags();
    let names = || tags.iter().map(|tag| tag.name.as_str());
    for name in request.readings.keys().chain(request.sigmas.keys()) {
        if !names().any(|tag| tag == name) {
            let hint = suggestion(name, names());
            return Err(unprocessable(format!("the plant file has no tag `{name}`{hint}")));
        }
    }
    if let Some((name, sigma)) = request.sigmas.iter().find(|(_, sigma)| **sigma <= 0.0) {
        return Err(unprocessable(format!("the sigma of `{name}` is {sigma}: write a number above zero")));
    }
    let reading = |tag: &meterwright_engine::Label| {
        let value = request.readings.get(&tag.name).copied().flatten()?;
        Some(Reading { sigma: request.sigmas.get(&tag.name).copied(), ..Reading::single(value) })
    };
    Ok(tags.iter().map(reading).collect())
}
