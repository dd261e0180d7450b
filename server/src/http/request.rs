//! What requests have in common: parameters, times, limits.

use axum::body::Bytes;
use axum::extract::{FromRequest, FromRequestParts, Query, Request};
use axum::http::request::Parts;
use axum::http::{Method, StatusCode, Uri};
use jiff::Timestamp;
use serde::de::DeserializeOwned;

use super::problem::Problem;

/// Parameters of a request's query; what can't be understood is a problem.
pub(super) struct Parameters<T>(pub(super) T);

impl<T: DeserializeOwned, S: Sync> FromRequestParts<S> for Parameters<T> {
    type Rejection = Problem;

    async fn from_request_parts(parts: &mut Parts, _: &S) -> Result<Self, Problem> {
        Ok(Self(Query::try_from_uri(&parts.uri)?.0))
    }
}

/// A body that is JSON.
pub(super) struct Body<T>(pub(super) T);

impl<T: DeserializeOwned, S: Send + Sync> FromRequest<S> for Body<T> {
    type Rejection = Problem;

    async fn from_request(request: Request, state: &S) -> Result<Self, Problem> {
        Ok(Self(axum::Json::from_request(request, state).await?.0))
    }
}

/// A body that is a plant file.
pub(super) struct PlantText(pub(super) String);

impl<S: Send + Sync> FromRequest<S> for PlantText {
    type Rejection = Problem;

    async fn from_request(request: Request, state: &S) -> Result<Self, Problem> {
        let bytes = Bytes::from_request(request, state).await;
        let bytes = bytes.map_err(|rejection| Problem::new(rejection.status(), rejection.body_text()))?;
        let text = String::from_utf8(bytes.into());
        text.map(Self)
            .map_err(|_| Problem::bad("the plant file is no UTF-8 text; save it in the encoding UTF-8"))
    }
}

/// A time of a query.
pub(super) fn time(name: &str, text: Option<&str>) -> Result<Option<Timestamp>, Problem> {
    let Some(text) = text.filter(|text| !text.is_empty()) else { return Ok(None) };
    // An unescaped plus sign comes as a space.
    let time = text.replace(' ', "+").parse();
    time.map(Some).map_err(|_| {
        Problem::bad(format!(
            "`{name}` is `{text}`: write a time as RFC 3339 does, such as 2026-03-01T06:00:00Z"
        ))
    })
}

/// How many things a list may have.
pub(super) fn limit(limit: Option<u32>, usual: u32, most: u32) -> Result<u32, Problem> {
    match limit {
        Some(limit) if !(1..=most).contains(&limit) => {
            Err(Problem::bad(format!("`limit` is {limit}: write a number from 1 to {most}")))
        }
        limit => Ok(limit.unwrap_or(usual)),
    }
}

/// A path that leads nowhere.
pub(super) async fn no_such_path(uri: Uri) -> Problem {
    Problem::new(StatusCode::NOT_FOUND, format!("there is nothing at {}", uri.path()))
}

/// A method that a path doesn't have.
pub(super) async fn no_such_method(method: Method, uri: Uri) -> Problem {
    Problem::new(StatusCode::METHOD_NOT_ALLOWED, format!("{} doesn't answer to {method}", uri.path()))
}
