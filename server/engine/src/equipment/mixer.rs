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
