//! `plants` and `plants/{plant}/revisions`.

use std::sync::Arc;

use axum::Json;
use axum::extract::{Path, State};
use axum::http::{StatusCode, header};
use axum::response::{IntoResponse, Response};
use jiff::Timestamp;
use serde::{Deserialize, Serialize};
use utoipa::{IntoParams, ToSchema};
use utoipa_axum::router::OpenApiRouter;
use utoipa_axum::routes;

use super::problem::Problem;
use super::request::{Parameters, PlantText, time};
use crate::store::{PlantEntry, PlantSaved, Revision, RevisionSaved};
use crate::work::Work;

/// The routes of this file.
pub(super) fn routes() -> OpenApiRouter<Arc<Work>> {
    OpenApiRouter::new()
        .routes(routes!(plants, create))
        .routes(routes!(plant))
        .routes(routes!(revisions, add_revision))
        .routes(routes!(revision))
}

/// All plants.
#[derive(Serialize, ToSchema)]
struct Plants {
    /// By name.
    plants: Vec<Plant>,
}

/// One plant and how much there is of it.
#[derive(Serialize, ToSchema)]
struct Plant {
    id: String,
    name: String,
    /// IANA name of the zone in which its logs' local times are read.
    time_zone: String,
    #[schema(value_type = String, format = DateTime)]
    created_at: Timestamp,
    /// The last revision of its plant file.
    revision: RevisionHead,
    log_count: i64,
    /// Balances that count: those of a later log over the same time supersede earlier ones.
    balance_count: i64,
    #[schema(value_type = Option<String>, format = DateTime)]
    first_balance: Option<Timestamp>,
    #[schema(value_type = Option<String>, format = DateTime)]
    last_balance: Option<Timestamp>,
}

/// A revision without its text.
#[derive(Serialize, ToSchema)]
struct RevisionHead {
    /// From 1.
    number: u32,
    /// SHA-256 of the text.
    hash: String,
    /// From when on it describes the plant; null: from ever on.
    #[schema(value_type = Option<String>, format = DateTime)]
    valid_from: Option<Timestamp>,
    #[schema(value_type = String, format = DateTime)]
    created_at: Timestamp,
}

/// All revisions of a plant file.
#[derive(Serialize, ToSchema)]
struct Revisions {
    /// By number.
    revisions: Vec<RevisionHead>,
}

/// A revision with its text.
#[derive(Serialize, ToSchema)]
struct WholeRevision {
    #[serde(flatten)]
    head: RevisionHead,
    /// The plant file.
    text: String,
}

#[derive(Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
struct Validity {
    /// From when on the revision describes the plant; left out: from now on.
    #[param(format = DateTime)]
    valid_from: Option<String>,
}

impl From<&Revision> for RevisionHead {
    fn from(revision: &Revision) -> Self {
        Self {
            number: revision.number,
            hash: revision.hash.clone(),
            valid_from: revision.valid_from,
            created_at: revision.created_at,
        }
    }
}

/// A plant as it is shown.
async fn shown(work: &Work, entry: PlantEntry) -> Plant {
    // A stored plant file was compiled before it was stored; one that only an older version read still has a name.
    let ready = work.plants.ready(&entry.revision.text).await;
    Plant {
        time_zone: ready.map_or_else(|_| "UTC".to_owned(), |ready| ready.plant.time_zone.value.clone()),
        revision: RevisionHead::from(&entry.revision),
        id: entry.id,
        name: entry.name,
        created_at: entry.created_at,
        log_count: entry.log_count,
        balance_count: entry.balance_count,
        first_balance: entry.first_balance,
        last_balance: entry.last_balance,
    }
}

/// A plant of the store.
pub(super) async fn entry(work: &Work, id: &str) -> Result<PlantEntry, Problem> {
    work.store.plant(id).await?.ok_or_else(|| Problem::not_found("plant", id))
}

/// All plants.
#[utoipa::path(get, path = "/plants", responses((status = 200, body = Plants)))]
async fn plants(State(work): State<Arc<Work>>) -> Result<Json<Plants>, Problem> {
    let mut plants = Vec::new();
    for entry in work.store.plants().await? {
        plants.push(shown(&work, entry).await);
    }
    Ok(Json(Plants { plants }))
}

/// One plant.
#[utoipa::path(get, path = "/plants/{plant}", params(("plant" = String, Path)),
    responses((status = 200, body = Plant), (status = 404, body = Problem)))]
async fn plant(State(work): State<Arc<Work>>, Path(id): Path<String>) -> Result<Json<Plant>, Problem> {
    let entry = entry(&work, &id).await?;
    Ok(Json(shown(&work, entry).await))
}

/// Stores a new plant.
#[utoipa::path(post, path = "/plants", request_body(content = String, content_type = "application/toml"),
    responses((status = 201, body = Plant), (status = 400, body = Problem), (status = 409, body = Problem), (status = 422, body = Problem)))]
async fn create(State(work): State<Arc<Work>>, PlantText(text): PlantText) -> Result<Response, Problem> {
    let ready = work.plants.ready(&text).await.map_err(Problem::plant_file)?;
    let (name, hash) = (&ready.plant.name.value, &ready.plant.revision);
    match work.store.create_plant(name, hash, &text, Timestamp::now()).await? {
        PlantSaved::New(id) => {
            let entry = entry(&work, &id).await?;
            let location = [(header::LOCATION, format!("/api/v1/plants/{id}"))];
            Ok((StatusCode::CREATED, location, Json(shown(&work, entry).await)).into_response())
        }
        PlantSaved::NameTaken(existing) => Err(Problem::conflict(
            format!("there is a plant `{name}` already: add a revision to it, or give this one another name"),
            existing,
        )),
    }
}

/// All revisions of a plant file.
#[utoipa::path(get, path = "/plants/{plant}/revisions", params(("plant" = String, Path)),
    responses((status = 200, body = Revisions), (status = 404, body = Problem)))]
async fn revisions(
    State(work): State<Arc<Work>>,
    Path(id): Path<String>,
) -> Result<Json<Revisions>, Problem> {
    entry(&work, &id).await?;
    let revisions = work.store.revisions(&id).await?;
    Ok(Json(Revisions { revisions: revisions.iter().map(RevisionHead::from).collect() }))
}

/// One revision with its text.
#[utoipa::path(get, path = "/plants/{plant}/revisions/{number}",
    params(("plant" = String, Path), ("number" = u32, Path)),
    responses((status = 200, body = WholeRevision), (status = 404, body = Problem)))]
async fn revision(
    State(work): State<Arc<Work>>,
    Path((id, number)): Path<(String, String)>,
) -> Result<Json<WholeRevision>, Problem> {
    entry(&work, &id).await?;
    let revisions = work.store.revisions(&id).await?;
    let wanted = revisions.into_iter().find(|revision| revision.number.to_string() == number);
    let revision = wanted.ok_or_else(|| Problem::not_found("revision", &number))?;
    Ok(Json(WholeRevision { head: RevisionHead::from(&revision), text: revision.text }))
}

/// Stores a revision of a plant file. The last one again changes nothing and answers 200.
#[utoipa::path(post, path = "/plants/{plant}/revisions", params(("plant" = String, Path), Validity),
    request_body(content = String, content_type = "application/toml"),
    responses((status = 200, body = Plant), (status = 201, body = Plant), (status = 400, body = Problem), (status = 404, body = Problem),
        (status = 409, body = Problem), (status = 422, body = Problem)))]
async fn add_revision(
    State(work): State<Arc<Work>>,
    Path(id): Path<String>,
    Parameters(validity): Parameters<Validity>,
    PlantText(text): PlantText,
) -> Result<Response, Problem> {
    let valid_from = time("valid_from", validity.valid_from.as_deref())?;
    let ready = work.plants.ready(&text).await.map_err(Problem::plant_file)?;
    let (name, hash) = (&ready.plant.name.value, &ready.plant.revision);
    let saved = work.store.add_revision(&id, name, hash, &text, valid_from, Timestamp::now()).await?;
    let status = match saved {
        RevisionSaved::New(_) => StatusCode::CREATED,
        RevisionSaved::Same(_) => StatusCode::OK,
        RevisionSaved::NoPlant => return Err(Problem::not_found("plant", &id)),
        RevisionSaved::NameTaken(existing) => {
            return Err(Problem::conflict(format!("another plant has the name `{name}`"), existing));
        }
    };
    let entry = entry(&work, &id).await?;
    Ok((status, Json(shown(&work, entry).await)).into_response())
}
