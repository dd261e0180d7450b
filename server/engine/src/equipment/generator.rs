//! Generator: turns shaft power into electric power.
//!
//! No ports. Quantities: `power` (shaft, taken), `electric_power` (at the terminals), `efficiency` (exactly one unless
//! given). Equation: `electric_power = efficiency * power`.

use super::{Kind, Machine, Port, QuantityRule, ShaftRole, System, motor};
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Generator;

impl Kind for Generator {
    fn name(&self) -> &'static str {
        "generator"
    }

    fn about(&self) -> &'static str {
        "turns shaft power into electric power"
    }

    fn ports(&self) -> &'static [Port] {
        &[]
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[
            QuantityRule::new("power", Dimension::POWER, "shaft power taken"),
            QuantityRule::new("electric_power", Dimension::POWER, "electric power made, at the terminals"),
            QuantityRule::new(
                "efficiency",
                Dimension::RATIO,
                "electric power over shaft power, 100 % unless given",
            ),
        ];
        QUANTITIES
    }

    fn shaft_role(&self) -> ShaftRole {
        ShaftRole::Takes
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        motor::convert(machine, system, "power", "electric_power");
    }
}
