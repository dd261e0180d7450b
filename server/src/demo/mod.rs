//! An invented plant with its history: what `meterwright demo` shows.
//!
//! The plant is a 150 MW reheat unit, water side only, with 66 instruments (`plant.toml`). [`unit`] predicts its state from a
//! load, the weather and the condition of its parts; [`instruments`] read that state with errors as the plant file states them;
//! here is what happens to it:
//!
//! - **Nine months by the hour** ([`history_log`]), February to October 2026: load follows day and week, cooling water the
//!   season. The high-pressure section wears by 1.2 points of efficiency. The element of FT-4703, the flow from the deaerator,
//!   fouls and reads up to 3.5 % too high at the end; it is cleaned on the first of November.
//! - **Three shifts by the minute** ([`shift_logs`]) of the second of November, with moves between loads. All day FT-4601, the
//!   condensate flow, reads 12 t/h too low. In the morning TT-4003A, a main steam thermocouple, drifts by up to -12 K; it is
//!   changed at 14:00. From the morning until 22:00 a boiler tube loses 8 t/h.
//!
//! Each instrument has one calibration error for good, drawn with half its stated standard uncertainty, and noise as its
//! repeatability says. All of it is drawn from fixed seeds: the same logs on every machine. [`truth`] says what was put in.

mod instruments;
mod machines;
mod scenario;
mod snapshot;
#[cfg(test)]
mod tests;
mod truth;
mod unit;

pub use scenario::{Month, ShiftLog, history_log, months, shift_logs};
pub use truth::{Truth, truth};

/// The plant file.
pub const PLANT: &str = include_str!("plant.toml");
