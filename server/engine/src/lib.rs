//! Meterwright's engine: a plant file and readings in, one balance with its uncertainties out.
//!
//! Pure: no I/O, no clock, no async, no global state. Floors, from the ground: [`quantity`], [`fault`] and [`kkt`];
//! [`plant`] and [`formula`]; [`equation`]; [`equipment`]; `compile` and [`estimate`]; `verdict` and `search`; `method`; and
//! the door, [`CompiledPlant`]. No floor knows one above it.

mod balance;
mod compile;
mod compiled_plant;
pub mod equation;
pub mod equipment;
pub mod estimate;
pub mod fault;
pub mod formula;
pub mod kkt;
mod method;
pub mod plant;
pub mod quantity;
mod search;
mod verdict;

pub use balance::{
    Alternative, Balance, Evidence, Finding, FindingKind, GlobalTest, Hypothesis, IndicatorBalance, Label,
    Outcome, Prior, QuantityBalance, QuantityClass, Reading, TagBalance, TagClass, Verdict,
};
pub use compiled_plant::{Assumption, Basis, Check, CompiledPlant, Meter};
pub use fault::{Fault, Position};
pub use method::{Level, METHODS, Method};
