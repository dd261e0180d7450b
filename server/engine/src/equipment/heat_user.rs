//! Heat user: takes heat out of a stream, such as district heating or process heat.
//!
//! Ports: `inlet`, `outlet`. Quantities: `duty` (heat given to the user). Equations: mass and energy.

use super::{Flow, Guess, Kind, Machine, Port, QuantityRule, System};
use crate::quantity::Dimension;

/// See the module.
pub(super) struct HeatUser;

impl Kind for HeatUser {
    fn name(&self) -> &'static str {
        "heat_user"
    }

    fn about(&self) -> &'static str {
        "takes heat out of a stream for a use outside the plant"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[Port::one("inlet", Flow::In), Port::one("outlet", Flow::Out)];
        PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] =
            &[QuantityRule::new("duty", Dimension::POWER, "heat given to the user")];
        QUANTITIES
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance(machine, 0, &[("duty", -1.0)]);
    }

    fn derive(&self, machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
        (quantity == "duty").then(|| system.power(machine, quantity))
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.even_out_pressures(machine);
        if guess.desperate {
            guess.even_out_temperatures(machine);
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    /// 10 kg/s of steam at 4 bar and 160 degC come back as water of 80 degC.
    #[test]
    fn the_user_gets_what_the_stream_loses() {
        let mut rig = Rig::new("heat_user", &["inlet", "outlet"]).build();
        rig.flow("inlet", 10.0, 4.0, 160.0);
        rig.flow("outlet", 10.0, 3.0, 80.0);
        near(rig.solve("energy balance", "machine.duty"), 24.4003894118e6, 1e-9);
    }
}
