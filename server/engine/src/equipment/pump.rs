//! Pump: raises the pressure of a liquid.
//!
//! Ports: `inlet`, `outlet`, `extraction.*` (from an intermediate stage). Quantities: `power` (shaft, taken),
//! `efficiency`, `pressure_rise`, `pressure_ratio`. Equations: mass and energy.

use super::isentropic::Compression;
use super::{Flow, Guess, Kind, Machine, Port, QuantityRule, ShaftRole, System, VariableRole};
use crate::equation::Quotient;
use crate::plant::PhaseHint;
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Pump;

impl Kind for Pump {
    fn name(&self) -> &'static str {
        "pump"
    }

    fn about(&self) -> &'static str {
        "raises the pressure of a liquid"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[
            Port::one("inlet", Flow::In).likely(PhaseHint::Liquid),
            Port::one("outlet", Flow::Out).likely(PhaseHint::Liquid),
            Port::many("extraction", Flow::Out).optional().likely(PhaseHint::Liquid),
        ];
        PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[
            QuantityRule::new("power", Dimension::POWER, "shaft power taken"),
            QuantityRule::new(
                "efficiency",
                Dimension::RATIO,
                "isentropic enthalpy rise to the outlet pressure over the actual rise",
            ),
            QuantityRule::new("pressure_rise", Dimension::PRESSURE, "outlet pressure less inlet pressure"),
            QuantityRule::new("pressure_ratio", Dimension::RATIO, "outlet pressure over inlet pressure"),
        ];
        QUANTITIES
    }

    fn shaft_role(&self) -> ShaftRole {
        ShaftRole::Takes
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance(machine, 0, &[("power", 1.0)]);
    }

    fn derive(&self, machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
        let (inlet, outlet) = (machine.stream("inlet")?, machine.stream("outlet")?);
        match quantity {
            "power" => Some(system.power(machine, quantity)),
            "efficiency" => {
                let (law, of) = Compression::between(inlet, outlet, system);
                Some(system.define(machine, quantity, Dimension::RATIO, VariableRole::Ratio, &of, law))
            }
            "pressure_rise" => {
                let (p_out, p_in) = (system.pressure(outlet), system.pressure(inlet));
                Some(system.define_difference(machine, quantity, Dimension::PRESSURE, p_out, p_in))
            }
            "pressure_ratio" => {
                let of = [system.pressure(outlet), system.pressure(inlet)];
                Some(system.define(machine, quantity, Dimension::RATIO, VariableRole::Other, &of, Quotient))
            }
            _ => None,
        }
    }

    fn indicators(&self, _machine: &Machine) -> Vec<String> {
        ["efficiency"].map(String::from).to_vec()
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.even_out_temperatures(machine);
        if guess.desperate {
            guess.even_out_pressures(machine);
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    #[test]
    fn a_feed_pump_takes_the_power_that_its_water_gains() {
        let mut rig = Rig::new("pump", &["inlet", "outlet"]).build();
        rig.flow("inlet", 100.0, 7.0, 160.0);
        rig.flow("outlet", 100.0, 180.0, 163.0);
        near(rig.solve("energy balance", "machine.power"), 2.3163031725e6, 1e-8);
        near(rig.quantity("efficiency"), 0.81933999637, 1e-7);
        near(rig.quantity("pressure_rise"), 173e5, 1e-12);
        near(rig.quantity("pressure_ratio"), 180.0 / 7.0, 1e-12);
    }

    #[test]
    fn an_extraction_takes_its_share() {
        let mut rig = Rig::new("pump", &["inlet", "outlet", "extraction.spray"]).build();
        rig.flow("inlet", 100.0, 7.0, 160.0);
        rig.flow("outlet", 90.0, 180.0, 163.0);
        rig.flow("extraction.spray", 10.0, 180.0, 163.0);
        assert_eq!(rig.residual("mass balance"), 0.0);
        near(rig.solve("energy balance", "machine.power"), 2.3163031725e6, 1e-8);
    }
}
