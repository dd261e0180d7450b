//! Header: several streams meet and part again.
//!
//! Ports: `inlet.*`, `outlet.*`. Equations: mass and energy; the outlets share pressure and enthalpy. With
//! `closes = ["mass"]` it is a plain node.

use super::{Flow, Kind, Machine, Port, System};

/// See the module.
pub(super) struct Header;

impl Kind for Header {
    fn name(&self) -> &'static str {
        "header"
    }

    fn about(&self) -> &'static str {
        "joins any number of streams and divides them into any number of the same state"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[Port::many("inlet", Flow::In), Port::many("outlet", Flow::Out)];
        PORTS
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance(machine, 0, &[]);
        share_enthalpy(machine, system);
        let mut outlets = machine.streams("outlet").filter(|_| machine.closes_energy);
        let Some(first) = outlets.next() else { return };
        for other in outlets {
            let (p_first, p_other) = (system.pressure(first.stream), system.pressure(other.stream));
            system.equal(machine, &format!("pressure of {}", other.name()), p_other, p_first);
        }
    }
}

/// Every outlet has the enthalpy of the first, where energy is balanced.
pub(super) fn share_enthalpy(machine: &Machine, system: &mut System) {
    let mut outlets = machine.streams("outlet").filter(|_| machine.closes_energy);
    let Some(first) = outlets.next() else { return };
    for other in outlets {
        let (h_first, h_other) = (system.enthalpy(first.stream), system.enthalpy(other.stream));
        system.equal(machine, &format!("enthalpy of {}", other.name()), h_other, h_first);
    }
}
