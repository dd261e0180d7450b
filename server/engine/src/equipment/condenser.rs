//! Condenser: turns exhaust steam into condensate.
//!
//! Ports: `hot_inlet`, `hot_outlet`, `cold_inlet`, `cold_outlet`, `drain_inlet.*` (drains, make-up, bypass steam),
//! `vent`. Quantities: those of a heat exchanger, `terminal_difference`, and `cleanliness` where the setting
//! `design_ua` is stated. Equations: mass and energy of each side. In `log_mean_difference`, `effectiveness` and `ua`
//! the steam has its saturation temperature at the hot inlet's pressure throughout, as is common practice. The
//! condensate need not be saturated; its temperature is free.

use super::exchanger::{self, HotSide};
use super::{Flow, Guess, Kind, Machine, Port, QuantityRule, SettingRule, System, Takes, VariableRole};
use crate::equation::Linear;
use crate::plant::PhaseHint;
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Condenser;

/// Terminal difference of a condenser nobody knows anything about, K.
const TERMINAL_DIFFERENCE: f64 = 4.0;

impl Kind for Condenser {
    fn name(&self) -> &'static str {
        "condenser"
    }

    fn about(&self) -> &'static str {
        "condenses steam against a cold stream"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[
            exchanger::HOT_INLET.likely(PhaseHint::Mixture),
            exchanger::HOT_OUTLET.likely(PhaseHint::Liquid),
            exchanger::COLD_INLET,
            exchanger::COLD_OUTLET,
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
            QuantityRule::new("cleanliness", Dimension::RATIO, "ua over the setting design_ua"),
        ];
        QUANTITIES
    }

    fn settings(&self) -> &'static [SettingRule] {
        const SETTINGS: &[SettingRule] = &[SettingRule {
            key: "design_ua",
            takes: Takes::Amount(Dimension::THERMAL_CONDUCTANCE),
            about: "ua of the clean condenser at this load, for its cleanliness",
        }];
        SETTINGS
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
            "cleanliness" => {
                let design = machine.amount("design_ua")?;
                let of = [exchanger::derive(machine, "ua", HotSide::Condensing, system)?];
                let law = Linear::new(vec![design, -1.0]);
                Some(system.define(machine, quantity, Dimension::RATIO, VariableRole::Ratio, &of, law))
            }
            _ => exchanger::derive(machine, quantity, HotSide::Condensing, system),
        }
    }

    fn indicators(&self, _machine: &Machine) -> Vec<String> {
        ["ua", "terminal_difference", "cleanliness"].map(String::from).to_vec()
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.level_pressures_at(machine, &["hot_inlet", "hot_outlet", "vent"]);
        guess.level_pressures_at(machine, &["cold_inlet", "cold_outlet"]);
        let streams = ["hot_inlet", "hot_outlet", "cold_outlet"].map(|port| machine.stream(port));
        if let [Some(steam), Some(condensate), Some(cold)] = streams {
            guess.condense(steam, cold, TERMINAL_DIFFERENCE);
            guess.at_saturation(steam);
            guess.at_saturation(condensate);
        }
        if guess.desperate {
            guess.even_out(machine);
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};
    use crate::plant::SettingValue;
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    fn rig() -> Rig {
        let ports = ["hot_inlet", "hot_outlet", "cold_inlet", "cold_outlet", "drain_inlet.heaters"];
        let rig = Rig::new("condenser", &ports);
        let mut rig = rig.setting("design_ua", SettingValue::Text("12 MW/K".into())).build();
        rig.wet("hot_inlet", 60.0, 0.05, 0.92);
        rig.flow("drain_inlet.heaters", 5.0, 0.05, 30.0);
        rig.flow("hot_outlet", 65.0, 0.05, 32.0);
        rig.flow("cold_inlet", 3204.1755204, 3.0, 15.0);
        rig.flow("cold_outlet", 3204.1755204, 2.5, 25.0);
        rig
    }

    #[test]
    fn cooling_water_takes_what_steam_and_drains_give() {
        let mut rig = rig();
        assert_eq!(rig.residual("hot side mass balance"), 0.0);
        near(rig.solve("hot side energy balance", "machine.duty"), 133.92735408e6, 1e-9);
        near(rig.solve("cold side energy balance", "machine.duty"), 133.92735408e6, 1e-9);
    }

    /// Saturation at 0.05 bar: 306.02548952 K.
    #[test]
    fn the_steam_condenses_at_one_temperature() {
        let mut rig = rig();
        rig.set("machine.duty", 133.92735408e6);
        near(rig.quantity("terminal_difference"), 7.87548952376, 1e-9);
        near(rig.quantity("log_mean_difference"), 12.1999553709, 1e-9);
        near(rig.quantity("ua"), 10.9776921313e6, 1e-9);
        near(rig.quantity("effectiveness"), 0.55942523905, 1e-9);
        near(rig.quantity("cleanliness"), 10.9776921313 / 12.0, 1e-9);
    }

    #[test]
    fn without_a_design_there_is_no_cleanliness() {
        let ports = ["hot_inlet", "hot_outlet", "cold_inlet", "cold_outlet"];
        let mut rig = Rig::new("condenser", &ports).build();
        assert!(rig.machine.kind.derive(&rig.machine, "cleanliness", &mut rig.system).is_none());
    }

    /// Saturation at 29 degC, 4 K above the cooling water: 0.0401 bar.
    #[test]
    fn a_guess_finds_the_vacuum_from_the_cooling_water() {
        let known = [("cold_inlet", 3.0, 15.0), ("cold_outlet", f64::NAN, 25.0)];
        let (bar, celsius) = rig().guessed(&known, "hot_inlet");
        near(bar, 0.0400891693474, 1e-9);
        near(celsius, 29.0, 1e-8);
        near(rig().guessed(&known, "hot_outlet").1, 29.0, 1e-8);
        near(rig().guessed(&known, "cold_outlet").0, 3.0, 1e-12);
    }
}
