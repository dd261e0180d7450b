//! Gross errors simulated in published networks, shared by the benchmark and the tests.

pub(crate) mod figures;
pub(crate) mod network;
pub(crate) mod trials;
