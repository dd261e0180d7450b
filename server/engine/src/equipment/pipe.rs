//! Pipe: carries a stream from one place to another.
//!
//! Ports: `inlet`, `outlet`. Quantities: `pressure_drop`, `loss_coefficient` (where the inlet's area is stated).
//! Equations: mass and energy. The pressure drop is free.

use super::{Kind, Machine, Port, QuantityRule, System, restriction};

/// See the module.
pub(super) struct Pipe;

impl Kind for Pipe {
    fn name(&self) -> &'static str {
        "pipe"
    }

    fn about(&self) -> &'static str {
        "carries a stream from one place to another, with a pressure drop and perhaps a heat loss"
    }

    fn ports(&self) -> &'static [Port] {
        restriction::PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        restriction::QUANTITIES
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        restriction::build(machine, system);
    }

    fn derive(&self, machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
        restriction::derive(machine, quantity, system)
    }
}
