//! Properties of the fluids of a power plant: pure functions with exact derivatives, no allocation, no I/O.
//!
//! SI units throughout: Pa, K, J/kg, J/(kg K), m3/kg.

pub mod liquid;
pub mod property;
pub mod scalar;
pub mod water;

pub use property::{Partial, PartialByEnthalpy, PartialByEntropy, Properties};
pub use scalar::{Dual, Scalar};
