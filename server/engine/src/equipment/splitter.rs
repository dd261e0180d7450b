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

#[cfg(test)]
mod tests {
    use crate::equipment::rig::Rig;

    #[test]
    fn outlets_have_the_inlets_state() {
        let mut rig = Rig::new("splitter", &["inlet", "outlet.a", "outlet.b"]).build();
        rig.flow("inlet", 10.0, 20.0, 300.0);
        rig.flow("outlet.a", 7.0, 20.0, 300.0);
        rig.flow("outlet.b", 3.0, 20.0, 300.0);
        for row in [
            "mass balance",
            "energy balance",
            "pressure of outlet.a",
            "pressure of outlet.b",
            "enthalpy of outlet.b",
        ] {
            assert!(rig.residual(row).abs() < 1e-8, "{row}");
        }
        assert_eq!(rig.system.rows.iter().filter(|row| row.name().starts_with("machine")).count(), 5);
        rig.set("outlet.b.enthalpy", 3.0e6);
        assert!(rig.residual("enthalpy of outlet.b").abs() > 1e3);
    }
}
