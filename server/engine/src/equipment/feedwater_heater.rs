//! Feedwater heater: heats feedwater or condensate by condensing extraction steam.
//!
//! Ports: `hot_inlet`, `hot_outlet` (drain), `cold_inlet`, `cold_outlet`, `drain_inlet.*` (from heaters at higher
//! pressure), `vent`. Quantities: those of a heat exchanger, `terminal_difference`, `drain_approach`. Equations: mass
//! and energy of each side. In `log_mean_difference`, `effectiveness` and `ua` the steam has its saturation
//! temperature at the hot inlet's pressure throughout, as is common practice, whatever is desuperheated and subcooled.

use super::exchanger::{self, HotSide};
use super::{Flow, Guess, Kind, Machine, Port, QuantityRule, System};
use crate::plant::PhaseHint;
use crate::quantity::Dimension;

/// See the module.
pub(super) struct FeedwaterHeater;

/// Terminal difference of a heater nobody knows anything about, K.
const TERMINAL_DIFFERENCE: f64 = 3.0;

impl Kind for FeedwaterHeater {
    fn name(&self) -> &'static str {
        "feedwater_heater"
    }

    fn about(&self) -> &'static str {
        "heats feedwater or condensate by condensing steam"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[
            exchanger::HOT_INLET,
            exchanger::HOT_OUTLET.likely(PhaseHint::Liquid),
            exchanger::COLD_INLET.likely(PhaseHint::Liquid),
            exchanger::COLD_OUTLET.likely(PhaseHint::Liquid),
            Port::many("drain_inlet", Flow::In).optional().likely(PhaseHint::Liquid),
            Port::one("vent", Flow::Out).optional().likely(PhaseHint::Vapour),
        ];
        PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[
            exchanger::DUTY,
            exchanger::UA,
            exchanger::EFFECTIVENESS,
            exchanger::LOG_MEAN_DIFFERENCE,
            exchanger::HOT_PRESSURE_DROP,
            exchanger::COLD_PRESSURE_DROP,
            exchanger::TERMINAL_DIFFERENCE,
            QuantityRule::new(
                "drain_approach",
                Dimension::TEMPERATURE,
                "hot outlet temperature less cold inlet temperature",
            ),
        ];
        QUANTITIES
    }

    fn sides(&self) -> &'static [&'static str] {
        exchanger::SIDES
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        exchanger::build(machine, system);
    }

    fn derive(&self, machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
        match quantity {
            "terminal_difference" => exchanger::terminal_difference(machine, system),
            "drain_approach" => {
                let of = [machine.stream("hot_outlet")?, machine.stream("cold_inlet")?];
                Some(exchanger::temperature_difference(machine, quantity, of, system))
            }
            _ => exchanger::derive(machine, quantity, HotSide::Condensing, system),
        }
    }

    fn indicators(&self, _machine: &Machine) -> Vec<String> {
        ["ua", "terminal_difference", "drain_approach"].map(String::from).to_vec()
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.level_pressures_at(machine, &["hot_inlet", "hot_outlet", "vent"]);
        guess.level_pressures_at(machine, &["cold_inlet", "cold_outlet"]);
        if let (Some(steam), Some(cold)) = (machine.stream("hot_inlet"), machine.stream("cold_outlet")) {
            guess.condense(steam, cold, TERMINAL_DIFFERENCE);
        }
        if guess.desperate {
            if let Some(drain) = machine.stream("hot_outlet") {
                guess.at_saturation(drain);
            }
            guess.even_out(machine);
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    /// 100 kg/s from 185 to 210 degC by steam of 20 bar and 300 degC, with a drain of 10 kg/s from above.
    #[test]
    fn steam_and_drain_heat_the_feedwater() {
        let ports = ["hot_inlet", "hot_outlet", "cold_inlet", "cold_outlet", "drain_inlet.above"];
        let mut rig = Rig::new("feedwater_heater", &ports).build();
        rig.flow("hot_inlet", 4.61600642818, 20.0, 300.0);
        rig.flow("drain_inlet.above", 10.0, 20.0, 207.0);
        rig.flow("hot_outlet", 14.61600642818, 20.0, 190.0);
        rig.flow("cold_inlet", 100.0, 180.0, 185.0);
        rig.flow("cold_outlet", 100.0, 179.0, 210.0);
        near(rig.solve("cold side energy balance", "machine.duty"), 10.9930443554e6, 1e-9);
        near(rig.solve("hot side energy balance", "machine.duty"), 10.9930443554e6, 1e-9);
        near(rig.quantity("terminal_difference"), 2.3845353185, 1e-9);
        near(rig.quantity("drain_approach"), 5.0, 1e-12);
        // 27.38 K at the cold inlet, 2.38 K at the cold outlet.
        let mean = 25.0 / (27.3845353185_f64 / 2.3845353185).ln();
        near(rig.quantity("log_mean_difference"), mean, 1e-9);
    }
}
