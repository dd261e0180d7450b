//! Valve: throttles without work.
//!
//! Ports: `inlet`, `outlet`. Quantities: `pressure_drop`, `loss_coefficient` (where the inlet's area is stated).
//! Equations: mass and energy; with `heat_loss` at its zero that is throttling at constant enthalpy. The pressure drop
//! is free.

use super::{Guess, Kind, Machine, Port, QuantityRule, System, restriction};

/// See the module.
pub(super) struct Valve;

impl Kind for Valve {
    fn name(&self) -> &'static str {
        "valve"
    }

    fn about(&self) -> &'static str {
        "throttles a stream at constant enthalpy"
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

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        if let (Some(inlet), Some(outlet)) = (machine.stream("inlet"), machine.stream("outlet")) {
            guess.level_enthalpies(inlet, outlet);
        }
        if guess.desperate {
            guess.even_out(machine);
        }
    }
}
