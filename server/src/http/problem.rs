//! Errors as people and programs read them: problem details (RFC 9457).

use axum::Json;
use axum::extract::rejection::{JsonRejection, QueryRejection};
use axum::http::{HeaderValue, StatusCode, header};
use axum::response::{IntoResponse, Response};
use serde::Serialize;
use utoipa::ToSchema;

use crate::ready::TextFault;
use crate::store::{LogFaultLine, StoreError};

/// Why a request was not done, and what to do.
#[derive(Clone, Debug, Serialize, ToSchema)]
pub(super) struct Problem {
    /// What kind of problem; `about:blank` where the status says it all.
    #[serde(rename = "type")]
    kind: &'static str,
    /// The status in words.
    title: &'static str,
    /// The HTTP status.
    status: u16,
    /// What happened and what to do.
    detail: String,
    /// Where a text that was sent is wrong, all at once.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    faults: Vec<Fault>,
    /// Id of what is there already.
    #[serde(skip_serializing_if = "Option::is_none")]
    existing: Option<String>,
}

/// One fault of a text.
#[derive(Clone, Debug, Serialize, ToSchema)]
pub(super) struct Fault {
    /// Line, from 1.
    line: u64,
    /// Column, from 1.
    column: u64,
    /// What is wrong and what to do.
    message: String,
}

impl From<&LogFaultLine> for Fault {
    fn from(fault: &LogFaultLine) -> Self {
        Self { line: fault.line, column: fault.column, message: fault.message.clone() }
    }
}

impl Problem {
    /// A problem of a status.
    pub(super) fn new(status: StatusCode, detail: impl Into<String>) -> Self {
        Self {
            kind: "about:blank",
            title: status.canonical_reason().unwrap_or("Error"),
            status: status.as_u16(),
            detail: detail.into(),
            faults: Vec::new(),
            existing: None,
        }
    }

    /// There is no such thing.
    pub(super) fn not_found(what: &str, id: &str) -> Self {
        Self::new(StatusCode::NOT_FOUND, format!("there is no {what} `{id}`"))
    }

    /// A request that can't be understood.
    pub(super) fn bad(detail: impl Into<String>) -> Self {
        Self::new(StatusCode::BAD_REQUEST, detail)
    }

    /// Something of that name is there already.
    pub(super) fn conflict(detail: impl Into<String>, existing: String) -> Self {
        Self { existing: Some(existing), ..Self::new(StatusCode::CONFLICT, detail) }
    }

    /// A plant file with faults.
    pub(super) fn plant_file(faults: Vec<TextFault>) -> Self {
        let fault = |fault: TextFault| Fault {
            line: fault.line as u64,
            column: fault.column as u64,
            message: fault.message,
        };
        let count = match faults.len() {
            1 => "one fault".to_owned(),
            count => format!("{count} faults"),
        };
        Self {
            kind: "urn:meterwright:problem:plant-file",
            title: "The plant file has faults",
            faults: faults.into_iter().map(fault).collect(),
            ..Self::new(
                StatusCode::UNPROCESSABLE_ENTITY,
                format!("the plant file has {count}: mend and send it again"),
            )
        }
    }
}

impl IntoResponse for Problem {
    fn into_response(self) -> Response {
        let status = StatusCode::from_u16(self.status).unwrap_or(StatusCode::INTERNAL_SERVER_ERROR);
        let mut response = (status, Json(self)).into_response();
        let kind = HeaderValue::from_static("application/problem+json");
        response.headers_mut().insert(header::CONTENT_TYPE, kind);
        response
    }
}

impl From<StoreError> for Problem {
    fn from(error: StoreError) -> Self {
        // What the database says is for whoever runs the service.
        tracing::error!(%error, "a request failed: {error}");
        Self::new(
            StatusCode::INTERNAL_SERVER_ERROR,
            "the store failed; nothing was changed. Look at the service's log, and try again",
        )
    }
}

impl From<QueryRejection> for Problem {
    fn from(rejection: QueryRejection) -> Self {
        Self::bad(rejection.body_text())
    }
}

impl From<JsonRejection> for Problem {
    fn from(rejection: JsonRejection) -> Self {
        Self::new(rejection.status(), rejection.body_text())
    }
}
