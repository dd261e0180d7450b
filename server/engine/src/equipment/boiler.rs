//! Boiler: the water side. Where its heat comes from is not asked; the heat it receives is free.
//!
//! Ports: `feedwater`, `steam`, `blowdown`, `spray.*` (into the steam circuit); `reheat_inlet`, `reheat_outlet`,
//! `reheat_spray.*`. Quantities: `duty` (heat received), `drum_pressure`, `drum_pressure_drop`. Equations: mass of the
//! steam circuit and of the reheat circuit, one energy balance over both; the blowdown leaves as saturated liquid at
//! `drum_pressure`, which lies `drum_pressure_drop` (free) above the steam's pressure.

use super::deaerator::not_water;
use super::drum::saturated_liquid;
use super::{Flow, Guess, Kind, Knowledge, Machine, Port, QuantityRule, System, VariableRole};
use crate::plant::PhaseHint;
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Boiler;

impl Kind for Boiler {
    fn name(&self) -> &'static str {
        "boiler"
    }

    fn about(&self) -> &'static str {
        "makes steam from feedwater, and reheats steam"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[
            Port::one("feedwater", Flow::In).likely(PhaseHint::Liquid),
            Port::one("steam", Flow::Out).likely(PhaseHint::Vapour),
            Port::one("blowdown", Flow::Out).optional().likely(PhaseHint::Liquid),
            Port::many("spray", Flow::In).optional().likely(PhaseHint::Liquid),
            Port::one("reheat_inlet", Flow::In).optional().on_side(1).likely(PhaseHint::Vapour),
            Port::one("reheat_outlet", Flow::Out).optional().on_side(1).likely(PhaseHint::Vapour),
            Port::many("reheat_spray", Flow::In).optional().on_side(1).likely(PhaseHint::Liquid),
        ];
        PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[
            QuantityRule::new("duty", Dimension::POWER, "heat received, lost heat included"),
            QuantityRule::new("drum_pressure", Dimension::PRESSURE, "pressure the blowdown is taken at"),
            QuantityRule::new("drum_pressure_drop", Dimension::PRESSURE, "drum pressure less steam pressure"),
        ];
        QUANTITIES
    }

    fn faults(&self, machine: &Machine, system: &System) -> Vec<String> {
        let mut faults = not_water(machine, system);
        let connected = |port| machine.streams(port).next().is_some();
        for (port, other) in [
            ("reheat_inlet", "reheat_outlet"),
            ("reheat_outlet", "reheat_inlet"),
            ("reheat_spray", "reheat_outlet"),
        ] {
            if connected(port) && !connected(other) {
                let name = &machine.name;
                faults.push(format!("`{name}` (a boiler) has a stream at `{port}` but none at `{other}`"));
            }
        }
        faults
    }

    fn sides(&self) -> &'static [&'static str] {
        &["steam circuit", "reheat circuit"]
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance_over(machine, "energy balance", &[0, 1], &[("duty", 1.0)]);
        let Some(blowdown) = machine.stream("blowdown") else { return };
        let (p, p_drum) = (system.pressure(blowdown), drum_pressure(machine, system));
        system.equal(machine, "pressure of blowdown", p, p_drum);
        saturated_liquid(machine, blowdown, system);
    }

    fn derive(&self, machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
        match quantity {
            "duty" => Some(system.power(machine, quantity)),
            "drum_pressure" => Some(drum_pressure(machine, system)),
            "drum_pressure_drop" => {
                let p_steam = system.pressure(machine.stream("steam")?);
                let p_drum = drum_pressure(machine, system);
                Some(system.define_difference(machine, quantity, Dimension::PRESSURE, p_drum, p_steam))
            }
            _ => None,
        }
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.level_pressures_at(machine, &["steam", "blowdown"]);
        guess.level_pressures_at(machine, &["feedwater", "steam"]);
        guess.level_pressures_at(machine, &["reheat_inlet", "reheat_outlet"]);
        if let Some(blowdown) = machine.stream("blowdown") {
            guess.at_saturation(blowdown);
        }
        if guess.desperate {
            guess.even_out(machine);
        }
    }
}

fn drum_pressure(machine: &Machine, system: &mut System) -> u32 {
    let (dimension, role) = (Dimension::PRESSURE, VariableRole::Pressure);
    system.quantity(machine, "drum_pressure", dimension, role, Knowledge::Free)
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    fn reheat_boiler() -> Rig {
        let mut rig = Rig::new(
            "boiler",
            &[
                "feedwater",
                "steam",
                "blowdown",
                "spray.main",
                "reheat_inlet",
                "reheat_outlet",
                "reheat_spray.main",
            ],
        )
        .build();
        rig.flow("feedwater", 115.0, 180.0, 210.0);
        rig.flow("spray.main", 5.0, 60.0, 150.0);
        rig.flow("steam", 118.0, 140.0, 540.0);
        rig.boiling("blowdown", 2.0, 150.0);
        rig.flow("reheat_inlet", 100.0, 35.0, 340.0);
        rig.flow("reheat_spray.main", 3.0, 60.0, 150.0);
        rig.flow("reheat_outlet", 103.0, 32.0, 540.0);
        rig
    }

    #[test]
    fn the_duty_goes_to_both_circuits() {
        let mut rig = reheat_boiler();
        assert_eq!(rig.residual("steam circuit mass balance"), 0.0);
        assert_eq!(rig.residual("reheat circuit mass balance"), 0.0);
        near(rig.solve("energy balance", "machine.duty"), 356.53917965e6, 1e-9);
        rig.set("machine.heat_loss", 1e6);
        near(rig.solve("energy balance", "machine.duty"), 357.53917965e6, 1e-9);
    }

    #[test]
    fn the_blowdown_leaves_as_saturated_liquid_at_drum_pressure() {
        let mut rig = reheat_boiler();
        near(rig.solve("pressure of blowdown", "machine.drum_pressure"), 150e5, 1e-12);
        near(rig.quantity("drum_pressure_drop"), 10e5, 1e-9);
        near(rig.solve("saturation of blowdown", "blowdown.temperature"), 615.307871249, 1e-9);
    }

    #[test]
    fn half_a_reheater_is_a_fault() {
        let rig = Rig::new("boiler", &["feedwater", "steam", "reheat_inlet"]);
        let faults = rig.machine.kind.faults(&rig.machine, &rig.system);
        assert_eq!(
            faults,
            ["`machine` (a boiler) has a stream at `reheat_inlet` but none at `reheat_outlet`"]
        );
    }
}
