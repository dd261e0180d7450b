//! Drum: parts boiling water from steam.
//!
//! Ports: `inlet.*`, `steam`, `water`, `blowdown`. Quantities: `quality` of the steam, exactly one unless given (it is
//! the steam stream's own), `subcooling` of the water, exactly 0 K unless given. Equations: mass and energy; water and
//! blowdown have the steam's pressure; the blowdown is saturated, the water has `T_sat(p) - subcooling`.

use super::deaerator::{self, SUBCOOLING, force_phase};
use super::{Flow, Guess, Kind, Knowledge, Machine, Port, QuantityRule, System};
use crate::equation::AtSaturation;
use crate::plant::PhaseHint;
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Drum;

impl Kind for Drum {
    fn name(&self) -> &'static str {
        "drum"
    }

    fn about(&self) -> &'static str {
        "parts boiling water into steam and saturated liquid"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[
            Port::many("inlet", Flow::In),
            Port::one("steam", Flow::Out).likely(PhaseHint::Mixture),
            Port::one("water", Flow::Out).optional().likely(PhaseHint::Liquid),
            Port::one("blowdown", Flow::Out).optional().likely(PhaseHint::Liquid),
        ];
        PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[
            QuantityRule::new("quality", Dimension::RATIO, "vapour in the steam, 100 % unless given"),
            SUBCOOLING,
        ];
        QUANTITIES
    }

    fn faults(&self, machine: &Machine, system: &System) -> Vec<String> {
        deaerator::not_water(machine, system)
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        let Some(steam) = machine.stream("steam") else { return };
        force_phase(steam, PhaseHint::Mixture, system);
        system.quality(steam, Knowledge::Exact(1.0));
        for port in ["water", "blowdown"] {
            let Some(stream) = machine.stream(port) else { continue };
            let (p_steam, p) = (system.pressure(steam), system.pressure(stream));
            system.equal(machine, &format!("pressure of {port}"), p, p_steam);
        }
        if let Some(water) = machine.stream("water") {
            deaerator::subcooling(machine, water, system);
        }
        if let Some(blowdown) = machine.stream("blowdown") {
            saturated_liquid(machine, blowdown, system);
        }
        system.energy_balance(machine, 0, &[]);
    }

    fn derive(&self, machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
        let steam = machine.stream("steam").filter(|_| quantity == "quality")?;
        system.quality(steam, Knowledge::Exact(1.0))
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.level_pressures_at(machine, &["steam", "water", "blowdown"]);
        for port in ["steam", "water", "blowdown"] {
            if let Some(stream) = machine.stream(port) {
                guess.at_saturation(stream);
            }
        }
        guess.even_out_pressures(machine);
        if guess.desperate {
            guess.even_out_temperatures(machine);
        }
    }
}

/// `T = T_sat(p)` of a liquid.
pub(super) fn saturated_liquid(machine: &Machine, stream: usize, system: &mut System) {
    force_phase(stream, PhaseHint::Liquid, system);
    let variables = vec![system.pressure(stream), system.temperature(stream)];
    system.law(machine, "saturation of blowdown", variables, AtSaturation);
}
