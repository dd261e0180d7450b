//! Meterwright's engine: a plant file and readings in, one balance with its uncertainties out.
//!
//! Pure: no I/O, no clock, no async, no global state. Floors, from the ground: [`quantity`] and [`fault`]; [`plant`].

pub mod equation;
pub mod equipment;
pub mod fault;
pub mod plant;
pub mod quantity;

pub use fault::{Fault, Position};
