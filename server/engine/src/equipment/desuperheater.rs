//! Desuperheater: cools steam by sprayed water.
//!
//! Ports: `inlet`, `spray`, `outlet`. Equations: mass and energy. Pressures are not tied: what throttles the spray is
//! not the desuperheater's business.

use super::{Flow, Guess, Kind, Machine, Port, System};
use crate::plant::PhaseHint;

/// See the module.
pub(super) struct Desuperheater;

impl Kind for Desuperheater {
    fn name(&self) -> &'static str {
        "desuperheater"
    }

    fn about(&self) -> &'static str {
        "cools steam by water sprayed into it"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[
            Port::one("inlet", Flow::In).likely(PhaseHint::Vapour),
            Port::one("spray", Flow::In).likely(PhaseHint::Liquid),
            Port::one("outlet", Flow::Out).likely(PhaseHint::Vapour),
        ];
        PORTS
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance(machine, 0, &[]);
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.level_pressures_at(machine, &["inlet", "outlet"]);
        if guess.desperate {
            guess.even_out(machine);
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    /// From 500 to 400 degC at 40 bar with water of 150 degC.
    #[test]
    fn the_spray_follows_from_the_temperatures() {
        let mut rig = Rig::new("desuperheater", &["inlet", "spray", "outlet"]).build();
        rig.flow("inlet", 10.0, 40.0, 500.0);
        rig.flow("spray", 0.8902300937438, 60.0, 150.0);
        rig.flow("outlet", 10.8902300937438, 39.0, 400.0);
        assert!(rig.residual("mass balance").abs() < 1e-12);
        near(rig.solve("energy balance", "spray.mass_flow"), 0.8902300937, 1e-8);
    }
}
