//! Meterwright's service: everything that touches the world. The balance itself lives in `meterwright-engine`.
//!
//! Floors, from the ground: [`log`] reads files of samples.

pub mod log;
