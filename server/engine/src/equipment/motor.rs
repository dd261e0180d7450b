//! Motor: turns electric power into shaft power.
//!
//! No ports. Quantities: `electric_power` (at the terminals), `power` (shaft, made), `efficiency` (exactly one unless
//! given). Equation: `power = efficiency * electric_power`.

use super::{Kind, Knowledge, Machine, Port, QuantityRule, ShaftRole, System, VariableRole};
use crate::equation::Product;
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Motor;

impl Kind for Motor {
    fn name(&self) -> &'static str {
        "motor"
    }

    fn about(&self) -> &'static str {
        "turns electric power into shaft power"
    }

    fn ports(&self) -> &'static [Port] {
        &[]
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[
            QuantityRule::new("electric_power", Dimension::POWER, "electric power taken, at the terminals"),
            QuantityRule::new("power", Dimension::POWER, "shaft power made"),
            QuantityRule::new(
                "efficiency",
                Dimension::RATIO,
                "shaft power over electric power, 100 % unless given",
            ),
        ];
        QUANTITIES
    }

    fn shaft_role(&self) -> ShaftRole {
        ShaftRole::Makes
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        convert(machine, system, "electric_power", "power");
    }
}

/// `made = efficiency * taken`.
pub(super) fn convert(machine: &Machine, system: &mut System, taken: &str, made: &str) {
    let variables =
        vec![system.power(machine, made), efficiency(machine, system), system.power(machine, taken)];
    system.law(machine, "conversion of power", variables, Product);
}

/// The efficiency of a machine that loses nothing unless given.
pub(super) fn efficiency(machine: &Machine, system: &mut System) -> u32 {
    system.quantity(machine, "efficiency", Dimension::RATIO, VariableRole::Ratio, Knowledge::Exact(1.0))
}

#[cfg(test)]
mod tests {
    use super::Knowledge;
    use crate::equipment::rig::{Rig, near};

    #[test]
    fn a_motor_loses_on_the_way_to_the_shaft_and_a_generator_on_the_way_to_the_terminals() {
        for (kind, taken, made) in
            [("motor", "electric_power", "power"), ("generator", "power", "electric_power")]
        {
            let mut rig = Rig::new(kind, &[]).build();
            rig.set(&format!("machine.{taken}"), 10e6);
            let made = format!("machine.{made}");
            near(rig.solve("conversion of power", &made), 10e6, 1e-12);
            rig.set("machine.efficiency", 0.96);
            near(rig.solve("conversion of power", &made), 9.6e6, 1e-12);
        }
    }

    #[test]
    fn a_gearbox_passes_everything_on_unless_given() {
        let rig = Rig::new("gearbox", &[]).build();
        let efficiency = rig.system.find("machine.efficiency").unwrap();
        assert_eq!(rig.system.variables[efficiency as usize].knowledge, Knowledge::Exact(1.0));
        assert!(rig.system.rows.is_empty());
    }
}
