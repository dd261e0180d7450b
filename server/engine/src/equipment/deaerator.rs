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
