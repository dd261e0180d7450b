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

#[cfg(test)]
mod tests {
    use super::{Knowledge, PhaseHint};
    use crate::equation::Held;
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    fn rig() -> Rig {
        let mut rig = Rig::new("drum", &["inlet.risers", "steam", "water", "blowdown"]).build();
        rig.wet("inlet.risers", 50.0, 100.0, 0.2);
        rig.wet("steam", 10.0, 100.0, 1.0);
        rig.boiling("water", 39.0, 100.0);
        rig.boiling("blowdown", 1.0, 100.0);
        rig
    }

    #[test]
    fn a_mixture_parts_into_saturated_steam_and_water() {
        let mut rig = rig();
        for row in ["mass balance", "pressure of water", "pressure of blowdown"] {
            assert_eq!(rig.residual(row), 0.0, "{row}");
        }
        assert!(rig.residual("saturation of blowdown").abs() < 1e-9);
        assert!(rig.residual("energy balance").abs() < 50.0 * 1e-3);
        near(rig.quantity("subcooling"), 0.0, 0.0);
        near(rig.solve("energy balance", "steam.enthalpy"), 2.72547256644e6, 1e-8);
    }

    #[test]
    fn steam_is_dry_and_water_saturated_unless_given() {
        let mut rig = rig();
        assert_eq!(rig.system.streams[rig.stream("steam")].phase, Some(PhaseHint::Mixture));
        let quality = rig.machine.kind.derive(&rig.machine, "quality", &mut rig.system).unwrap();
        let variable = &rig.system.variables[quality as usize];
        assert_eq!((variable.name.as_str(), variable.knowledge), ("steam.quality", Knowledge::Exact(1.0)));
        let row = &rig.system.rows[variable.defined_by.unwrap()];
        assert!(row.value(&[1.0, 100e5, 2.725472566439e6], Held(&rig.forms)).unwrap().abs() < 0.01);
        let subcooling = rig.system.find("machine.subcooling").unwrap();
        let row = &rig.system.rows[rig.system.variables[subcooling as usize].defined_by.unwrap()];
        assert!(row.value(&[2.0, 100e5, 582.1494879985], Held(&rig.forms)).unwrap().abs() < 1e-8);
    }
}
