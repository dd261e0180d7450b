//! What the corrections say: the global test, the measurement test and what they could have seen.

mod limits;
mod statistics;

pub(crate) use limits::{Limits, sidak};
pub(crate) use statistics::{Judged, Residual, global_test, judge, unsuspected};
