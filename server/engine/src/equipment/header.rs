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

#[cfg(test)]
mod tests {
    use crate::equipment::rig::Rig;

    /// The mean of the inlets' enthalpies, weighted by their flows, leaves at both outlets.
    #[test]
    fn outlets_share_the_state_of_the_mix() {
        let mut rig = Rig::new("header", &["inlet.a", "inlet.b", "outlet.a", "outlet.b"]).build();
        rig.flow("inlet.a", 6.0, 20.0, 300.0);
        rig.flow("inlet.b", 2.0, 20.0, 400.0);
        rig.flow("outlet.a", 5.0, 19.5, 320.0);
        rig.flow("outlet.b", 3.0, 19.5, 320.0);
        for row in ["mass balance", "pressure of outlet.b", "enthalpy of outlet.b"] {
            assert_eq!(rig.residual(row), 0.0, "{row}");
        }
        assert_eq!(rig.system.rows.iter().filter(|row| row.name().starts_with("machine")).count(), 4);
        let [one, other] = ["inlet.a", "inlet.b"].map(|port| rig.get(&format!("{port}.enthalpy")));
        for port in ["outlet.a", "outlet.b"] {
            rig.set(&format!("{port}.enthalpy"), 0.75 * one + 0.25 * other);
        }
        assert!(rig.residual("energy balance").abs() < 1e-7);
    }
}
