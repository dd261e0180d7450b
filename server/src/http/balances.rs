//! `steady-periods`, `balances`, `findings` and `indicators`.

use std::sync::Arc;

use axum::Json;
use axum::extract::{Path, State};
use jiff::Timestamp;
use serde::{Deserialize, Serialize};
use utoipa::{IntoParams, ToSchema};
use utoipa_axum::router::OpenApiRouter;
use utoipa_axum::routes;

use super::plants::entry;
use super::problem::Problem;
use super::request::{Parameters, limit, time};
use crate::record::{PeriodReading, Record};
use crate::report::document::{BalanceDocument, ErrorKind, FindingDocument, IndicatorDocument};
use crate::store::{BalanceSummary, Query, StoredBalance, StoredFinding, StoredPeriod};
use crate::work::Work;

/// The routes of this file.
pub(super) fn routes() -> OpenApiRouter<Arc<Work>> {
    OpenApiRouter::new()
        .routes(routes!(steady_periods))
        .routes(routes!(balances))
        .routes(routes!(balance))
        .routes(routes!(findings))
        .routes(routes!(indicators))
}

#[derive(Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
struct Wanted {
    /// Of this plant.
    plant: Option<String>,
    /// Of this log.
    log: Option<String>,
    /// That begin at this time or later.
    #[param(format = DateTime)]
    from: Option<String>,
    /// That begin before this time.
    #[param(format = DateTime)]
    to: Option<String>,
    /// At most so many.
    #[param(minimum = 1, maximum = 10_000)]
    limit: Option<u32>,
    /// The ones after those that an earlier answer's `next` speaks of.
    after: Option<String>,
}

/// Stretches of logs.
#[derive(Serialize, ToSchema)]
struct SteadyPeriods {
    /// In order of time.
    steady_periods: Vec<SteadyPeriod>,
}

/// A stretch of a log that is balanced, or can't be.
#[derive(Serialize, ToSchema)]
struct SteadyPeriod {
    #[schema(value_type = String, format = DateTime)]
    from: Timestamp,
    #[schema(value_type = String, format = DateTime)]
    to: Timestamp,
    log: String,
    /// Its balance, once there is one.
    balance: Option<String>,
    /// Why it can't be balanced.
    rejected: Option<String>,
}

/// Balances without their values.
#[derive(Serialize, ToSchema)]
struct Balances {
    /// In order of time.
    balances: Vec<Summary>,
    /// What to ask for with `after` to get the following ones; null where these are the last.
    next: Option<String>,
}

/// A balance without its values.
#[derive(Serialize, ToSchema)]
struct Summary {
    id: String,
    log: String,
    /// Number of the plant file's revision.
    revision: u32,
    #[schema(value_type = String, format = DateTime)]
    from: Timestamp,
    #[schema(value_type = String, format = DateTime)]
    to: Timestamp,
    converged: bool,
    /// Null where it did not converge.
    global_test_passes: Option<bool>,
    /// What its findings suspect.
    findings: Vec<String>,
    /// Whether a later log's balance of the same time counts instead.
    superseded: bool,
}

/// A stored balance with everything that is kept of it.
#[derive(Serialize, ToSchema)]
struct Whole<'b> {
    id: String,
    plant: String,
    plant_name: String,
    revision: RevisionName,
    log: String,
    /// The log whose balances count instead.
    superseded_by: Option<String>,
    program_version: String,
    settings: Settings,
    #[serde(flatten)]
    balance: BalanceDocument<'b>,
    /// What the samples of each tag said over the period.
    readings: Vec<TagReading<'b>>,
    /// What the balance says of each error before any is believed.
    evidence: Vec<Evidence<'b>>,
}

/// Which plant file a balance was made with.
#[derive(Serialize, ToSchema)]
struct RevisionName {
    number: u32,
    hash: String,
}

/// What a balance was made with besides.
#[derive(Serialize, ToSchema)]
struct Settings {
    /// What makes a period: `steady`, `row` or `whole`.
    periods: &'static str,
    /// Share of error-free balances in which anything is found.
    false_alarm_rate: f64,
}

/// What the samples of a tag said, in its unit.
#[derive(Serialize, ToSchema)]
struct TagReading<'b> {
    tag: &'b str,
    #[serde(flatten)]
    reading: PeriodReading,
}

/// Score and information of an error: with its size b, half the sum of squares changes by `-score b + information b^2 / 2`.
#[derive(Serialize, ToSchema)]
struct Evidence<'b> {
    hypothesis: &'b str,
    kind: ErrorKind,
    /// Unit of b.
    unit: &'b str,
    score: f64,
    information: f64,
}

/// Findings of many balances.
#[derive(Serialize, ToSchema)]
struct Findings {
    /// The newest first.
    findings: Vec<Found>,
}

/// A finding and the balance that it is of.
#[derive(Serialize, ToSchema)]
struct Found {
    balance: String,
    #[schema(value_type = String, format = DateTime)]
    from: Timestamp,
    #[schema(value_type = String, format = DateTime)]
    to: Timestamp,
    #[serde(flatten)]
    finding: FindingDocument<'static>,
}

/// Indicators of the latest balance.
#[derive(Serialize, ToSchema)]
struct Indicators {
    /// In the order of the plant file, then the ready-made ones.
    indicators: Vec<Latest>,
}

/// An indicator in the latest balance.
#[derive(Serialize, ToSchema)]
struct Latest {
    balance: String,
    #[schema(value_type = String, format = DateTime)]
    from: Timestamp,
    #[schema(value_type = String, format = DateTime)]
    to: Timestamp,
    #[serde(flatten)]
    indicator: IndicatorDocument<'static>,
}

#[derive(Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
struct OfPlant {
    /// The plant.
    plant: String,
}

/// What of a plant or a log is wanted; one of the two must be named, and be there.
async fn query(work: &Work, wanted: Wanted, usual: u32) -> Result<Query, Problem> {
    match (&wanted.plant, &wanted.log) {
        (None, None) => return Err(Problem::bad("say of which plant or log: `plant=ID` or `log=ID`")),
        (Some(plant), _) => drop(entry(work, plant).await?),
        (None, Some(_)) => {}
    }
    if let Some(log) = &wanted.log
        && work.store.log(log).await?.is_none()
    {
        return Err(Problem::not_found("log", log));
    }
    let after = match wanted.after.as_deref().map(|after| after.split_once('_')) {
        None => None,
        Some(Some((time, id))) if time.parse::<Timestamp>().is_ok() => {
            time.parse().ok().map(|time: Timestamp| (time, id.to_owned()))
        }
        Some(_) => return Err(Problem::bad("`after` must be what an earlier answer says as `next`")),
    };
    Ok(Query {
        plant: wanted.plant,
        log: wanted.log,
        from: time("from", wanted.from.as_deref())?,
        to: time("to", wanted.to.as_deref())?,
        after,
        limit: limit(wanted.limit, usual, 10_000)?,
    })
}

impl From<StoredPeriod> for SteadyPeriod {
    fn from(period: StoredPeriod) -> Self {
        let StoredPeriod { from, to, log, balance, rejected } = period;
        Self { from, to, log, balance, rejected }
    }
}

impl From<BalanceSummary> for Summary {
    fn from(balance: BalanceSummary) -> Self {
        Self {
            id: balance.id,
            log: balance.log,
            revision: balance.revision,
            from: balance.from,
            to: balance.to,
            converged: balance.converged,
            global_test_passes: balance.test_passes,
            findings: balance.findings,
            superseded: balance.superseded_by.is_some(),
        }
    }
}

/// The stretches of a log, or of all logs of a plant.
#[utoipa::path(get, path = "/steady-periods", params(Wanted),
    responses((status = 200, body = SteadyPeriods), (status = 400, body = Problem), (status = 404, body = Problem)))]
async fn steady_periods(
    State(work): State<Arc<Work>>,
    Parameters(wanted): Parameters<Wanted>,
) -> Result<Json<SteadyPeriods>, Problem> {
    let query = query(&work, wanted, 10_000).await?;
    let periods = work.store.periods(&query).await?;
    Ok(Json(SteadyPeriods { steady_periods: periods.into_iter().map(SteadyPeriod::from).collect() }))
}

/// Balances without their values.
#[utoipa::path(get, path = "/balances", params(Wanted),
    responses((status = 200, body = Balances), (status = 400, body = Problem), (status = 404, body = Problem)))]
async fn balances(
    State(work): State<Arc<Work>>,
    Parameters(wanted): Parameters<Wanted>,
) -> Result<Json<Balances>, Problem> {
    let query = query(&work, wanted, 200).await?;
    let balances = work.store.balances(&query).await?;
    let is_full = balances.len() == query.limit as usize;
    let next = balances.last().filter(|_| is_full).map(|last| format!("{}_{}", last.from, last.id));
    Ok(Json(Balances { balances: balances.into_iter().map(Summary::from).collect(), next }))
}

/// One balance with everything that is kept of it.
#[utoipa::path(get, path = "/balances/{balance}", params(("balance" = String, Path)),
    responses((status = 200, body = Whole), (status = 404, body = Problem)))]
async fn balance(
    State(work): State<Arc<Work>>,
    Path(id): Path<String>,
) -> Result<axum::response::Response, Problem> {
    use axum::response::IntoResponse;
    let stored = work.store.balance(&id).await?.ok_or_else(|| Problem::not_found("balance", &id))?;
    let plant = entry(&work, &stored.plant).await?;
    let log = work.store.log(&stored.summary.log).await?;
    let revisions = work.store.revisions(&stored.plant).await?;
    let revision = revisions.into_iter().find(|revision| revision.number == stored.summary.revision);
    let record = Record::unpack(&stored.record, &stored.layout).map_err(crate::store::StoreError::from)?;
    let StoredBalance { ref summary, ref layout, .. } = stored;
    let tags = layout.tags.iter().zip(record.readings);
    let evidence = record.evidence.iter().map(|told| {
        let error = &layout.hypotheses[usize::from(told.hypothesis)];
        Evidence {
            hypothesis: &error.name,
            kind: error.kind,
            unit: &error.unit,
            score: told.score,
            information: told.information,
        }
    });
    let whole = Whole {
        id: summary.id.clone(),
        plant: plant.id,
        plant_name: plant.name,
        revision: RevisionName {
            number: summary.revision,
            hash: revision.map(|revision| revision.hash).unwrap_or_default(),
        },
        log: summary.log.clone(),
        superseded_by: summary.superseded_by.clone(),
        program_version: stored.program_version.clone(),
        settings: Settings {
            periods: log.map_or("", |log| log.periods.name()),
            false_alarm_rate: stored.false_alarm_rate,
        },
        balance: record.balance,
        readings: tags.map(|(tag, reading)| TagReading { tag: &tag.name, reading }).collect(),
        evidence: evidence.collect(),
    };
    Ok(Json(whole).into_response())
}

/// Findings of a plant's balances that count.
#[utoipa::path(get, path = "/findings", params(Wanted),
    responses((status = 200, body = Findings), (status = 400, body = Problem), (status = 404, body = Problem)))]
async fn findings(
    State(work): State<Arc<Work>>,
    Parameters(wanted): Parameters<Wanted>,
) -> Result<Json<Findings>, Problem> {
    if wanted.plant.is_none() {
        return Err(Problem::bad("say of which plant: `plant=ID`"));
    }
    let query = query(&work, wanted, 200).await?;
    let found = |found: StoredFinding| Found {
        balance: found.balance,
        from: found.from,
        to: found.to,
        finding: found.finding,
    };
    Ok(Json(Findings { findings: work.store.findings(&query).await?.into_iter().map(found).collect() }))
}

/// The indicators of a plant's latest balance.
#[utoipa::path(get, path = "/indicators", params(OfPlant),
    responses((status = 200, body = Indicators), (status = 404, body = Problem)))]
async fn indicators(
    State(work): State<Arc<Work>>,
    Parameters(OfPlant { plant }): Parameters<OfPlant>,
) -> Result<Json<Indicators>, Problem> {
    entry(&work, &plant).await?;
    let Some(last) = work.store.last_balance(&plant).await? else {
        return Ok(Json(Indicators { indicators: Vec::new() }));
    };
    let record = Record::unpack(&last.record, &last.layout).map_err(crate::store::StoreError::from)?;
    let latest = |indicator: IndicatorDocument<'_>| Latest {
        balance: last.summary.id.clone(),
        from: last.summary.from,
        to: last.summary.to,
        indicator: IndicatorDocument {
            indicator: indicator.indicator.into_owned().into(),
            unit: indicator.unit.into_owned().into(),
            ..indicator
        },
    };
    Ok(Json(Indicators { indicators: record.balance.indicators.into_iter().map(latest).collect() }))
}
