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
