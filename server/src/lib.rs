//! Meterwright's service: everything that touches the world. The balance itself lives in `meterwright-engine`.
//!
//! Floors, from the ground: [`log`] reads files of samples; [`period`] makes of them one reading a tag and period, and
//! [`steady`] finds the periods that can be balanced; [`report`] puts balances into words; [`command`] is the command
//! line.

mod average;
pub mod command;
pub mod demo;
pub mod found;
mod hash;
pub mod http;
pub mod log;
mod parallel;
pub mod period;
pub mod ready;
pub mod record;
pub mod report;
mod series;
pub mod steady;
pub mod store;
pub mod trend;
pub mod work;
