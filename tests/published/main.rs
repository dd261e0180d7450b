//! The engine held against problems published elsewhere, each with its source beside it.

#![allow(
    clippy::unwrap_used,
    clippy::expect_used,
    clippy::panic,
    reason = "a test may stop at the first surprise"
)]
#![allow(clippy::format_push_string, reason = "plant files are put together once, where the words matter")]

mod check;
mod covariance;
mod false_alarms;
#[path = "../bench/gross_errors/mod.rs"]
#[allow(dead_code, reason = "the benchmark shows more figures than the tests assert")]
mod gross_errors;
mod heat_meter;
mod indicators;
mod methods;
mod networks;
mod nonlinear;
mod oracles;
mod plants;
mod search;
#[path = "../support/mod.rs"]
mod support;
