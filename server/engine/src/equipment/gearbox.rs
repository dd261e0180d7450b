//! Gearbox: passes shaft power on.
//!
//! No ports. Quantities: `efficiency` (exactly one unless given): of what is made on its shaft it takes
//! `1 - efficiency`. Equations: none of its own; the shaft's balance takes that share of what is made.

use super::{Kind, Machine, Port, QuantityRule, ShaftRole, System, motor};
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Gearbox;

impl Kind for Gearbox {
    fn name(&self) -> &'static str {
        "gearbox"
    }

    fn about(&self) -> &'static str {
        "passes shaft power on at another speed"
    }

    fn ports(&self) -> &'static [Port] {
        &[]
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[QuantityRule::new(
            "efficiency",
            Dimension::RATIO,
            "share of the shaft's power that it passes on, 100 % unless given",
        )];
        QUANTITIES
    }

    fn shaft_role(&self) -> ShaftRole {
        ShaftRole::Passes
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        motor::efficiency(machine, system);
    }
}
