//! Diffuser: turns kinetic energy into pressure.
//!
//! Ports: `inlet`, `outlet`, both streams with a stated area. Quantities: `efficiency`. Equations: mass and energy
//! with its kinetic terms. Pressures and temperatures are static ones.

use super::isentropic::Compression;
use super::{Kind, Machine, Port, QuantityRule, System, VariableRole, nozzle};
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Diffuser;

impl Kind for Diffuser {
    fn name(&self) -> &'static str {
        "diffuser"
    }

    fn about(&self) -> &'static str {
        "slows a stream down, which raises its pressure"
    }

    fn ports(&self) -> &'static [Port] {
        nozzle::PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[QuantityRule::new(
            "efficiency",
            Dimension::RATIO,
            "isentropic enthalpy rise to the reached pressure over the actual rise",
        )];
        QUANTITIES
    }

    fn faults(&self, machine: &Machine, system: &System) -> Vec<String> {
        nozzle::missing_areas(machine, system)
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance(machine, 0, &[]);
    }

    fn derive(&self, machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
        if quantity != "efficiency" {
            return None;
        }
        let (law, of) = Compression::between(machine.stream("inlet")?, machine.stream("outlet")?, system);
        Some(system.define(machine, quantity, Dimension::RATIO, VariableRole::Ratio, &of, law))
    }
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    /// Steam of 5 bar and 200 degC slows down from 300 to 60 m/s and reaches 5.8 bar.
    #[test]
    fn velocity_becomes_pressure() {
        let mut rig =
            Rig::new("diffuser", &["inlet", "outlet"]).area("inlet", 0.1).area("outlet", 0.1).build();
        rig.flow("inlet", 1.0, 5.0, 200.0);
        rig.flow("outlet", 1.0, 5.8, 495.11628977587213 - 273.15);
        rig.set("inlet.velocity", 300.0);
        rig.set("outlet.velocity", 60.0);
        assert!(rig.residual("energy balance").abs() < 0.01);
        near(rig.quantity("efficiency"), 0.742964716231, 1e-6);
    }
}
