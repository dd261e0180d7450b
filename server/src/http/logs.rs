//! `logs` and `events`.

use std::convert::Infallible;
use std::sync::Arc;
use std::time::Duration;

use axum::Json;
use axum::body::Body;
use axum::extract::{FromRequest, Multipart, Path, Request, State};
use axum::http::{StatusCode, header};
use axum::response::sse::{Event, KeepAlive, Sse};
use axum::response::{IntoResponse, Response};
use futures_util::{Stream, StreamExt};
use jiff::Timestamp;
use serde::{Deserialize, Serialize};
use tokio_stream::wrappers::BroadcastStream;
use utoipa::{IntoParams, ToSchema};
use utoipa_axum::router::OpenApiRouter;
use utoipa_axum::routes;

use super::plants::entry;
use super::problem::{Fault, Problem};
use super::request::Parameters;
use crate::found::PeriodChoice;
use crate::store::{LogEntry, LogState};
use crate::work::{CancelError, LogProgress, Phase, UploadError, Work};

/// Routes whose requests may take as long as they take.
pub(super) fn long_routes() -> OpenApiRouter<Arc<Work>> {
    OpenApiRouter::new().routes(routes!(upload)).routes(routes!(events))
}

/// The other routes of this file.
pub(super) fn routes() -> OpenApiRouter<Arc<Work>> {
    OpenApiRouter::new().routes(routes!(logs)).routes(routes!(log)).routes(routes!(begin_again, cancel))
}

/// All logs of a plant.
#[derive(Serialize, ToSchema)]
struct Logs {
    /// The newest first.
    logs: Vec<Log>,
}

/// One log and how far the work on it has come.
#[derive(Serialize, ToSchema)]
struct Log {
    id: String,
    plant: String,
    /// Name of the file.
    name: String,
    /// Bytes.
    size: i64,
    sha256: String,
    /// What makes a period: `steady`, `row` or `whole`.
    periods: &'static str,
    #[schema(value_type = String, format = DateTime)]
    uploaded_at: Timestamp,
    /// `waiting`, `working`, `done`, `failed` or `cancelled`.
    state: &'static str,
    /// `reading` or `balancing` while it is being worked on.
    phase: Option<&'static str>,
    /// Periods, once they are found.
    period_count: Option<i64>,
    /// Stretches that can't be balanced.
    rejected_count: Option<i64>,
    /// Balances that are stored.
    balance_count: i64,
    #[schema(value_type = Option<String>, format = DateTime)]
    from: Option<Timestamp>,
    #[schema(value_type = Option<String>, format = DateTime)]
    to: Option<Timestamp>,
    /// What its user should know.
    notes: Vec<String>,
    /// What is wrong in the file.
    faults: Vec<Fault>,
    /// Why the work ended as it did.
    reason: Option<String>,
}

#[derive(Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
struct OfPlant {
    /// The plant.
    plant: String,
}

#[derive(Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
struct Upload {
    /// The plant; may stand in the form instead.
    plant: Option<String>,
    /// Name of the file; a form has it already.
    name: Option<String>,
    /// What makes a period: `steady` (the default), `row` or `whole`.
    periods: Option<String>,
}

/// A log as a form sends it. The file comes last.
#[derive(ToSchema)]
#[expect(dead_code, reason = "it describes a form, whose fields are read one by one")]
struct UploadForm {
    /// The plant.
    plant: String,
    /// What makes a period: `steady` (the default), `row` or `whole`.
    periods: Option<String>,
    /// The log.
    #[schema(format = Binary, content_media_type = "application/octet-stream")]
    file: String,
}

impl Log {
    fn new(progress: LogProgress) -> Self {
        let LogProgress { log, phase } = progress;
        Self {
            id: log.id,
            plant: log.plant,
            name: log.name,
            size: log.size,
            sha256: log.sha256,
            periods: log.periods.name(),
            uploaded_at: log.uploaded_at,
            state: log.state.name(),
            phase: phase.filter(|_| log.state == LogState::Working).map(|phase| match phase {
                Phase::Reading => "reading",
                Phase::Balancing => "balancing",
            }),
            period_count: log.period_count,
            rejected_count: log.rejected_count,
            balance_count: log.balance_count,
            from: log.begins_at,
            to: log.ends_at,
            notes: log.said.notes,
            faults: log.said.faults.iter().map(Fault::from).collect(),
            reason: log.said.reason,
        }
    }
}

impl From<UploadError> for Problem {
    fn from(error: UploadError) -> Self {
        let told = error.to_string();
        match error {
            UploadError::Store(error) => error.into(),
            UploadError::Broken(_) => Self::bad(format!("{told}; send it again")),
            UploadError::Empty => Self::new(StatusCode::UNPROCESSABLE_ENTITY, told),
            UploadError::Unwritable(error) => {
                tracing::error!(%error, "a log can't be written: {error}");
                Self::new(
                    StatusCode::INSUFFICIENT_STORAGE,
                    "the log can't be written to the service's disk; nothing was changed. Look at the service's log",
                )
            }
        }
    }
}

/// A log of the store.
async fn found(work: &Work, id: &str) -> Result<LogEntry, Problem> {
    work.store.log(id).await?.ok_or_else(|| Problem::not_found("log", id))
}

/// The logs of a plant.
#[utoipa::path(get, path = "/logs", params(OfPlant),
    responses((status = 200, body = Logs), (status = 404, body = Problem)))]
async fn logs(
    State(work): State<Arc<Work>>,
    Parameters(OfPlant { plant }): Parameters<OfPlant>,
) -> Result<Json<Logs>, Problem> {
    entry(&work, &plant).await?;
    let logs = work.store.logs(&plant).await?;
    Ok(Json(Logs { logs: logs.into_iter().map(|log| Log::new(work.progress(log))).collect() }))
}

/// One log.
#[utoipa::path(get, path = "/logs/{log}", params(("log" = String, Path)),
    responses((status = 200, body = Log), (status = 404, body = Problem)))]
async fn log(State(work): State<Arc<Work>>, Path(id): Path<String>) -> Result<Json<Log>, Problem> {
    let log = found(&work, &id).await?;
    Ok(Json(Log::new(work.progress(log))))
}

/// Takes a log; it is read and balanced after the answer. The same bytes again are the log that is there already.
#[utoipa::path(post, path = "/logs", params(Upload),
    request_body(content((String = "application/octet-stream"), (UploadForm = "multipart/form-data"))),
    responses((status = 200, body = Log), (status = 202, body = Log), (status = 400, body = Problem),
        (status = 404, body = Problem), (status = 422, body = Problem)))]
async fn upload(
    State(work): State<Arc<Work>>,
    Parameters(upload): Parameters<Upload>,
    request: Request,
) -> Result<Response, Problem> {
    let kind = request.headers().get(header::CONTENT_TYPE).and_then(|kind| kind.to_str().ok());
    let (is_new, log) = if kind.is_some_and(|kind| kind.starts_with("multipart/form-data")) {
        of_form(&work, upload, request).await?
    } else {
        let body = Body::into_data_stream(request.into_body());
        let plant = upload.plant.ok_or_else(|| Problem::bad("say of which plant the log is: `plant=ID`"))?;
        entry(&work, &plant).await?;
        let name = upload.name.unwrap_or_else(|| "log".to_owned());
        work.receive(plant, name, periods(upload.periods.as_deref())?, body).await?
    };
    let status = if is_new { StatusCode::ACCEPTED } else { StatusCode::OK };
    let location = [(header::LOCATION, format!("/api/v1/logs/{}", log.id))];
    Ok((status, location, Json(Log::new(work.progress(log)))).into_response())
}

/// Takes a log out of a form, whose file is its last field.
async fn of_form(work: &Work, upload: Upload, request: Request) -> Result<(bool, LogEntry), Problem> {
    let wrong = |error: axum::extract::multipart::MultipartError| Problem::bad(error.body_text());
    let form = Multipart::from_request(request, &()).await;
    let mut form = form.map_err(|rejection| Problem::bad(rejection.body_text()))?;
    let (mut plant, mut chosen) = (upload.plant, upload.periods);
    while let Some(field) = form.next_field().await.map_err(wrong)? {
        match field.name() {
            Some("plant") => plant = Some(field.text().await.map_err(wrong)?),
            Some("periods") => chosen = Some(field.text().await.map_err(wrong)?),
            Some("file") => {
                let plant =
                    plant.ok_or_else(|| Problem::bad("the form's field `plant` must come before `file`"))?;
                entry(work, &plant).await?;
                let name = upload.name.or_else(|| field.file_name().map(str::to_owned));
                let name = name.unwrap_or_else(|| "log".to_owned());
                return Ok(work.receive(plant, name, periods(chosen.as_deref())?, field).await?);
            }
            other => {
                let other = other.unwrap_or_default();
                return Err(Problem::bad(format!(
                    "the form has a field `{other}`; there are plant, periods and file"
                )));
            }
        }
    }
    Err(Problem::bad("the form has no field `file`"))
}

fn periods(name: Option<&str>) -> Result<PeriodChoice, Problem> {
    let Some(name) = name else { return Ok(PeriodChoice::Steady) };
    PeriodChoice::named(name)
        .ok_or_else(|| Problem::bad(format!("`periods` is `{name}`: write steady, row or whole")))
}

/// Lets a log that failed or was cancelled be worked on again.
#[utoipa::path(post, path = "/logs/{log}/work", params(("log" = String, Path)),
    responses((status = 202, body = Log), (status = 404, body = Problem), (status = 409, body = Problem)))]
async fn begin_again(State(work): State<Arc<Work>>, Path(id): Path<String>) -> Result<Response, Problem> {
    let before = found(&work, &id).await?;
    if !work.begin_again(&id).await? {
        let told =
            format!("the log is {}: only one that failed or was cancelled begins again", before.state.name());
        return Err(Problem::new(StatusCode::CONFLICT, told));
    }
    let log = found(&work, &id).await?;
    Ok((StatusCode::ACCEPTED, Json(Log::new(work.progress(log)))).into_response())
}

/// Cancels the work on a log. What is balanced stays.
#[utoipa::path(delete, path = "/logs/{log}/work", params(("log" = String, Path)),
    responses((status = 200, body = Log), (status = 404, body = Problem), (status = 409, body = Problem)))]
async fn cancel(State(work): State<Arc<Work>>, Path(id): Path<String>) -> Result<Json<Log>, Problem> {
    let log = found(&work, &id).await?;
    match work.cancel(&log).await {
        Ok(()) => {}
        Err(CancelError::Store(error)) => return Err(error.into()),
        Err(error) => {
            return Err(Problem::new(StatusCode::CONFLICT, format!("{error}: there is nothing to cancel")));
        }
    }
    let log = found(&work, &id).await?;
    Ok(Json(Log::new(work.progress(log))))
}

/// What happens to the logs of a plant, as server-sent events: `log` with the log as data whenever it changes.
#[utoipa::path(get, path = "/events", params(OfPlant),
    responses((status = 200, body = Log, content_type = "text/event-stream"), (status = 404, body = Problem)))]
async fn events(
    State(work): State<Arc<Work>>,
    Parameters(OfPlant { plant }): Parameters<OfPlant>,
) -> Result<Sse<impl Stream<Item = Result<Event, Infallible>>>, Problem> {
    entry(&work, &plant).await?;
    let changes = BroadcastStream::new(work.events()).filter_map(move |change| {
        // A listener that was too slow misses what was said meanwhile; the next change tells how the log stands.
        let change = change.ok().filter(|change| change.log.plant == plant);
        let event = change.map(|change| Event::default().event("log").json_data(Log::new(change)));
        std::future::ready(event.and_then(Result::ok).map(Ok))
    });
    let mut stopping = work.stopping();
    let stopped = async move {
        // It ends when the service stops, and if the service is gone.
        let _ = stopping.wait_for(|stops| *stops).await;
    };
    let keep_alive = KeepAlive::new().interval(Duration::from_secs(15));
    Ok(Sse::new(changes.take_until(Box::pin(stopped))).keep_alive(keep_alive))
}
