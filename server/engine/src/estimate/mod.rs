//! Non-linear weighted least squares under equations: the numeric half of the engine.
//!
//! It knows variables, rows, observations and what is exact; not tags, not plants. In files named after the nouns of
//! the mathematics: `problem`, `evaluation`, `scaling`, `start`,
//! `cold`, `solve`, `structure`, `step`, `bounds`, `linearisation`, `direction`.

mod bounds;
mod cache;
mod cold;
mod direction;
mod evaluation;
mod failure;
mod linearisation;
mod phases;
#[cfg(test)]
pub(crate) mod probe;
mod problem;
mod scaling;
mod solve;
mod start;
mod step;
mod structure;

pub(crate) use cold::onto_equations;
pub use cold::solve_cold;
pub(crate) use direction::{Direction, Response};
pub use failure::Failure;
pub use linearisation::{Linearisation, Variances};
pub use problem::{Observation, Problem, Situation};
pub use scaling::Anchor;
pub use solve::{Solution, solve, solve_from};
pub(crate) use start::cold_start;
pub(crate) use structure::linearised;
