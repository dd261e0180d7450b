//! Mixer: several streams become one. The plainest kind, and the one to copy.
//!
//! Ports: `inlet.*`, `outlet`. Equations: mass and energy. Pressures are not tied: what throttles an inlet is not
//! the mixer's business.

use super::{Flow, Kind, Machine, Port, System};

/// See the module.
pub(super) struct Mixer;

impl Kind for Mixer {
    fn name(&self) -> &'static str {
        "mixer"
    }

    fn about(&self) -> &'static str {
        "joins any number of streams into one"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[Port::many("inlet", Flow::In), Port::one("outlet", Flow::Out)];
        PORTS
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance(machine, 0, &[]);
    }
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};

    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python.

    /// 50 kg/s with 2950 kJ/kg and 10 kg/s at 10 bar and 250 degC.
    #[test]
    fn the_mix_has_the_mean_enthalpy() {
        let mut rig = Rig::new("mixer", &["inlet.a", "inlet.b", "outlet"]).build();
        rig.flow("inlet.a", 50.0, 12.0, 270.0);
        rig.set("inlet.a.enthalpy", 2.95e6);
        rig.flow("inlet.b", 10.0, 10.0, 250.0);
        rig.flow("outlet", 60.0, 10.0, 525.7072786787 - 273.15);
        assert_eq!(rig.residual("mass balance"), 0.0);
        near(rig.solve("energy balance", "outlet.enthalpy"), 2.948870360872e6, 1e-9);
    }
}
