//! Splitter: one stream becomes several of the same state.
//!
//! Ports: `inlet`, `outlet.*`. Equations: mass and energy; every outlet has the inlet's pressure, and all outlets
//! share one enthalpy, which the energy balance ties to the inlet. With `closes = ["mass"]` it is a plain node.

use super::{Flow, Kind, Machine, Port, System, header};

/// See the module.
pub(super) struct Splitter;

impl Kind for Splitter {
    fn name(&self) -> &'static str {
        "splitter"
    }

    fn about(&self) -> &'static str {
        "divides one stream into any number of the same state"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[Port::one("inlet", Flow::In), Port::many("outlet", Flow::Out)];
        PORTS
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance(machine, 0, &[]);
        header::share_enthalpy(machine, system);
        if let Some(inlet) = machine.stream("inlet").filter(|_| machine.closes_energy) {
            for outlet in machine.streams("outlet") {
                let (p_in, p_out) = (system.pressure(inlet), system.pressure(outlet.stream));
                system.equal(machine, &format!("pressure of {}", outlet.name()), p_out, p_in);
            }
        }
    }
}
