//! Deaerator: boils gases out of feedwater by mixing it with steam.
//!
//! Ports: `inlet.*`, `outlet`, `vent`. Quantities: `subcooling` of the outlet, exactly 0 K unless given. Equations: mass
//! and energy; `T of outlet = T_sat(p of outlet) - subcooling`.

use super::{Flow, Guess, Kind, Knowledge, Machine, Port, QuantityRule, System, VariableRole};
use crate::equation::SaturationOf;
use crate::plant::{FluidKind, PhaseHint};
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Deaerator;

impl Kind for Deaerator {
    fn name(&self) -> &'static str {
        "deaerator"
    }

    fn about(&self) -> &'static str {
        "mixes feedwater with steam to saturated liquid"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[
            Port::many("inlet", Flow::In),
            Port::one("outlet", Flow::Out).likely(PhaseHint::Liquid),
            Port::one("vent", Flow::Out).optional().likely(PhaseHint::Vapour),
        ];
        PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[SUBCOOLING];
        QUANTITIES
    }

    fn faults(&self, machine: &Machine, system: &System) -> Vec<String> {
        not_water(machine, system)
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        if let Some(outlet) = machine.stream("outlet") {
            subcooling(machine, outlet, system);
        }
        system.energy_balance(machine, 0, &[]);
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.level_pressures_at(machine, &["outlet", "vent"]);
        for port in ["outlet", "vent"] {
            if let Some(stream) = machine.stream(port) {
                guess.at_saturation(stream);
            }
        }
        if guess.desperate {
            guess.even_out(machine);
        }
    }
}

pub(super) const SUBCOOLING: QuantityRule = QuantityRule::new(
    "subcooling",
    Dimension::TEMPERATURE,
    "saturation temperature less temperature of the water that leaves, 0 K unless given",
);

/// `T_sat(p) - T = subcooling` of liquid that leaves saturated unless given otherwise.
pub(super) fn subcooling(machine: &Machine, stream: usize, system: &mut System) {
    force_phase(stream, PhaseHint::Liquid, system);
    let of = [system.pressure(stream), system.temperature(stream)];
    let (dimension, role) = (Dimension::TEMPERATURE, VariableRole::Other);
    let id = system.define(machine, "subcooling", dimension, role, &of, SaturationOf);
    system.variables[id as usize].knowledge = Knowledge::Exact(0.0);
}

/// The phase of a stream that its equipment decides, unless the plant file states one.
pub(super) fn force_phase(stream: usize, phase: PhaseHint, system: &mut System) {
    let stated = &mut system.streams[stream].phase;
    *stated = stated.or(Some(phase));
}

/// A fault for each stream of a vessel for boiling water that carries something else.
pub(super) fn not_water(machine: &Machine, system: &System) -> Vec<String> {
    let streams = machine.connections.iter().map(|connection| &system.streams[connection.stream]);
    streams
        .filter(|stream| stream.fluid.fluid != FluidKind::Water)
        .map(|stream| {
            let (name, kind, stream) = (&machine.name, machine.kind.name(), &stream.name);
            format!("`{name}` (a {kind}) takes water and steam only, but `{stream}` carries another fluid")
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::{Knowledge, PhaseHint};
    use crate::equation::Held;
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    #[test]
    fn steam_heats_the_condensate_to_saturation() {
        let mut rig = Rig::new("deaerator", &["inlet.condensate", "inlet.steam", "outlet"]).build();
        rig.flow("inlet.condensate", 100.0, 6.0, 120.0);
        rig.flow("inlet.steam", 5.6145068034, 5.0, 300.0);
        rig.boiling("outlet", 105.6145068034, 5.0);
        assert!(rig.residual("energy balance").abs() < 100.0);
        near(rig.solve("energy balance", "inlet.steam.mass_flow"), 5.6145068034, 1e-6);
    }

    #[test]
    fn the_outlet_is_saturated_unless_given() {
        let mut rig = Rig::new("deaerator", &["inlet.a", "outlet"]).build();
        rig.boiling("outlet", 100.0, 5.0);
        let subcooling = rig.system.find("machine.subcooling").unwrap();
        assert_eq!(rig.system.variables[subcooling as usize].knowledge, Knowledge::Exact(0.0));
        assert_eq!(rig.system.streams[rig.stream("outlet")].phase, Some(PhaseHint::Liquid));
        let row = &rig.system.rows[rig.system.variables[subcooling as usize].defined_by.unwrap()];
        let residual = |p: f64, t: f64| row.value(&[0.0, p, t], Held(&rig.forms)).unwrap();
        assert!(residual(5e5, 424.9862438769).abs() < 1e-8);
        near(residual(5e5, 420.0), 4.9862438769, 1e-8);
    }

    #[test]
    fn a_stated_phase_stays() {
        let mut rig = Rig::new("deaerator", &["inlet.a", "outlet"]);
        rig.system.streams[1].phase = Some(PhaseHint::Mixture);
        assert_eq!(rig.build().system.streams[1].phase, Some(PhaseHint::Mixture));
    }

    #[test]
    fn a_guess_saturates_the_outlet_from_either_reading() {
        let rig = Rig::new("deaerator", &["inlet.a", "outlet"]).build();
        let (_, celsius) = rig.guessed(&[("outlet", 5.0, f64::NAN)], "outlet");
        near(celsius, 424.9862438769 - 273.15, 1e-9);
        let (bar, _) = rig.guessed(&[("outlet", f64::NAN, 424.9862438769 - 273.15)], "outlet");
        near(bar, 5.0, 1e-8);
    }
}
