//! Heat exchanger: passes heat from one stream to another without mixing them.
//!
//! Ports: `hot_inlet`, `hot_outlet`, `cold_inlet`, `cold_outlet`. Quantities: `duty` (received by the cold side), `ua`,
//! `effectiveness`, `log_mean_difference`, `hot_pressure_drop`, `cold_pressure_drop`. Equations: mass and energy of
//! each side. Setting `arrangement`: the temperatures that face each other in `log_mean_difference`.

use super::exchanger::{self, HotSide};
use super::{Guess, Kind, Machine, Port, QuantityRule, SettingRule, System, Takes};

/// See the module.
pub(super) struct HeatExchanger;

impl Kind for HeatExchanger {
    fn name(&self) -> &'static str {
        "heat_exchanger"
    }

    fn about(&self) -> &'static str {
        "passes heat from a hot stream to a cold one without mixing them"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] =
            &[exchanger::HOT_INLET, exchanger::HOT_OUTLET, exchanger::COLD_INLET, exchanger::COLD_OUTLET];
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
        ];
        QUANTITIES
    }

    fn settings(&self) -> &'static [SettingRule] {
        const SETTINGS: &[SettingRule] = &[SettingRule {
            key: "arrangement",
            takes: Takes::Word(&["counterflow", "parallel"]),
            about: "how the two sides flow past each other; counterflow unless said",
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
        let hot = match machine.word("arrangement") {
            Some("parallel") => HotSide::Parallel,
            _ => HotSide::Counterflow,
        };
        exchanger::derive(machine, quantity, hot, system)
    }

    fn indicators(&self, _machine: &Machine) -> Vec<String> {
        ["ua"].map(String::from).to_vec()
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.even_out_pressures(machine);
        if guess.desperate {
            guess.even_out_temperatures(machine);
        }
    }
}
