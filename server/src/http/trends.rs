//! `trends`.

use std::sync::Arc;

use axum::Json;
use axum::extract::{Path, State};
use serde::{Deserialize, Serialize};
use utoipa::{IntoParams, ToSchema};
use utoipa_axum::router::OpenApiRouter;
use utoipa_axum::routes;

use super::plants::entry;
use super::problem::Problem;
use super::request::{Parameters, time};
use crate::store::{Series, SeriesKind, TrendData};
use crate::trend::{LEVEL, Shown, ShownPoint, breaks, slope};
use crate::work::Work;

/// The routes of this file.
pub(super) fn routes() -> OpenApiRouter<Arc<Work>> {
    OpenApiRouter::new().routes(routes!(all_series)).routes(routes!(trend))
}

#[derive(Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
struct OfPlant {
    /// The plant.
    plant: String,
}

#[derive(Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
struct Stretch {
    /// The plant.
    plant: String,
    /// Balances that begin at this time or later.
    #[param(format = DateTime)]
    from: Option<String>,
    /// Balances that begin before this time.
    #[param(format = DateTime)]
    to: Option<String>,
}

/// What trends can be shown of.
#[derive(Serialize, ToSchema)]
struct AllSeries {
    /// Indicators, tags and then quantities.
    series: Vec<SeriesName>,
}

/// Something that a trend can be shown of.
#[derive(Serialize, ToSchema)]
struct SeriesName {
    series: String,
    kind: SeriesKindName,
    unit: String,
    /// What it is, in words; tags only.
    description: String,
}

/// What a trend is of.
#[derive(Clone, Copy, Serialize, ToSchema)]
#[serde(rename_all = "lowercase")]
enum SeriesKindName {
    Indicator,
    Tag,
    Quantity,
}

/// A series over all balances that count, by columns.
#[derive(Serialize, ToSchema)]
struct Trend {
    series: String,
    kind: SeriesKindName,
    unit: String,
    /// Beginnings of the periods, ms since 1970.
    from: Vec<i64>,
    /// Ends of the periods.
    to: Vec<i64>,
    /// Balanced values; null where one can't be known.
    value: Vec<Option<f64>>,
    /// Their standard uncertainties.
    sigma: Vec<Option<f64>>,
    /// The part of it that is drawn anew each period: what comparisons over time go by.
    repeat_sigma: Vec<Option<f64>>,
    /// Readings; of tags only.
    #[serde(skip_serializing_if = "Option::is_none")]
    measured: Option<Vec<Option<f64>>>,
    /// Where the line must not be drawn through.
    breaks: Vec<Break>,
    slope: Option<Slope>,
    /// Why there is no slope.
    slope_reason: Option<String>,
}

/// A change of what stands behind the values.
#[derive(Serialize, ToSchema)]
struct Break {
    /// Beginning of the first balance after it, ms since 1970.
    at: i64,
    /// What changes.
    causes: Vec<String>,
}

/// The slope over the stretch of time shown.
#[derive(Serialize, ToSchema)]
struct Slope {
    per_month: f64,
    /// Lower end of the confidence interval.
    low: f64,
    /// Upper end.
    high: f64,
    /// Confidence of the interval.
    level: f64,
    /// Unit of the change; per month.
    unit: String,
    /// Points that it is made of.
    points: usize,
    /// How it is made.
    method: String,
}

impl SeriesKindName {
    fn of(kind: SeriesKind) -> Self {
        match kind {
            SeriesKind::Indicator => Self::Indicator,
            SeriesKind::Tag => Self::Tag,
            SeriesKind::Quantity => Self::Quantity,
        }
    }
}

/// What trends can be shown of.
#[utoipa::path(get, path = "/trends", params(OfPlant),
    responses((status = 200, body = AllSeries), (status = 404, body = Problem)))]
async fn all_series(
    State(work): State<Arc<Work>>,
    Parameters(OfPlant { plant }): Parameters<OfPlant>,
) -> Result<Json<AllSeries>, Problem> {
    entry(&work, &plant).await?;
    let name = |series: Series| SeriesName {
        series: series.name,
        kind: SeriesKindName::of(series.kind),
        unit: series.unit,
        description: series.description,
    };
    Ok(Json(AllSeries { series: work.store.series(&plant).await?.into_iter().map(name).collect() }))
}

/// One series over time.
#[utoipa::path(get, path = "/trends/{series}", params(("series" = String, Path), Stretch),
    responses((status = 200, body = Trend), (status = 400, body = Problem), (status = 404, body = Problem)))]
async fn trend(
    State(work): State<Arc<Work>>,
    Path(name): Path<String>,
    Parameters(stretch): Parameters<Stretch>,
) -> Result<Json<Trend>, Problem> {
    let plant = entry(&work, &stretch.plant).await?.id;
    let (from, to) = (time("from", stretch.from.as_deref())?, time("to", stretch.to.as_deref())?);
    let series = work.store.series(&plant).await?.into_iter().find(|series| series.name == name);
    let series = series.ok_or_else(|| Problem::not_found("series", &name))?;
    let data = work.store.trend(&plant, &series.name, &series.measure, from, to).await?;
    let trend = tokio::task::spawn_blocking(move || Trend::new(series, data)).await;
    trend.map(Json).map_err(|_| {
        Problem::new(
            axum::http::StatusCode::INTERNAL_SERVER_ERROR,
            "the trend can't be worked out; please report it",
        )
    })
}

impl Trend {
    fn new(series: Series, data: TrendData) -> Self {
        let shown = Shown::new(&series.unit);
        let points: Vec<ShownPoint> = data.points.iter().map(|point| shown.point(*point)).collect();
        let column = |of: fn(&ShownPoint) -> Option<f64>| points.iter().map(of).collect::<Vec<_>>();
        let value = column(|point| point.value);
        let numbers: Vec<f64> = value.iter().map(|value| value.unwrap_or(f64::NAN)).collect();
        let found = slope(&data.from, &numbers);
        let breaks = breaks(&data).into_iter().map(|change| Break { at: change.at, causes: change.causes });
        Self {
            kind: SeriesKindName::of(series.kind),
            breaks: breaks.collect(),
            sigma: column(|point| point.sigma),
            repeat_sigma: column(|point| point.repeat_sigma),
            measured: (series.kind == SeriesKind::Tag).then(|| column(|point| point.measured)),
            slope_reason: found.err().map(|reason| reason.to_string()),
            slope: found.ok().map(|slope| Slope {
                per_month: slope.per_month,
                low: slope.low,
                high: slope.high,
                level: LEVEL,
                unit: shown.difference(),
                points: slope.points,
                method: method(slope.is_daily),
            }),
            value,
            series: series.name,
            unit: series.unit,
            from: data.from,
            to: data.to,
        }
    }
}

fn method(is_daily: bool) -> String {
    let of = if is_daily { "daily medians" } else { "balanced values" };
    format!("Theil-Sen slope of {of} with Sen's 95 % interval, widened where values follow one another")
}
