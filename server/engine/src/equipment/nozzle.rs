//! Nozzle: turns pressure into kinetic energy.
//!
//! Ports: `inlet`, `outlet`, both streams with a stated area. Quantities: `efficiency`. Equations: mass and energy
//! with its kinetic terms. Pressures and temperatures are static ones.

use meterwright_thermo::Scalar;

use super::isentropic::isentropic_enthalpy;
use super::{Flow, Kind, Machine, Port, QuantityRule, System, VariableRole};
use crate::equation::{Equation, EquationError, Held, StreamFluid};
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Nozzle;

pub(super) const PORTS: &[Port] = &[Port::one("inlet", Flow::In), Port::one("outlet", Flow::Out)];

impl Kind for Nozzle {
    fn name(&self) -> &'static str {
        "nozzle"
    }

    fn about(&self) -> &'static str {
        "speeds a stream up, which costs pressure"
    }

    fn ports(&self) -> &'static [Port] {
        PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const QUANTITIES: &[QuantityRule] = &[QuantityRule::new(
            "efficiency",
            Dimension::RATIO,
            "rise of kinetic energy over the isentropic enthalpy drop to the outlet pressure",
        )];
        QUANTITIES
    }

    fn faults(&self, machine: &Machine, system: &System) -> Vec<String> {
        missing_areas(machine, system)
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance(machine, 0, &[]);
    }

    fn derive(&self, machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
        if quantity != "efficiency" {
            return None;
        }
        let (inlet, outlet) = (machine.stream("inlet")?, machine.stream("outlet")?);
        let (w1, w2) = (system.velocity(inlet)?, system.velocity(outlet)?);
        let [p1, t1, h1] = system.state(inlet);
        let of = [p1, t1, h1, w1, system.pressure(outlet), w2];
        let law = NozzleEfficiency(system.streams[inlet].fluid);
        Some(system.define(machine, quantity, Dimension::RATIO, VariableRole::Ratio, &of, law))
    }
}

/// A fault for each stream whose area is missing.
pub(super) fn missing_areas(machine: &Machine, system: &System) -> Vec<String> {
    let streams = machine.connections.iter().map(|connection| &system.streams[connection.stream]);
    streams
        .filter(|stream| stream.area.is_none())
        .map(|stream| {
            format!(
                "`{machine}` (a {kind}) needs the area of `{stream}`: add area = \"... m2\" to [streams.{stream}]",
                machine = machine.name,
                kind = machine.kind.name(),
                stream = stream.name,
            )
        })
        .collect()
}

/// Nozzle efficiency: the rise of kinetic energy over that of an isentropic expansion to the same pressure,
/// `efficiency (h1 - h(p2, s1)) = (w2^2 - w1^2) / 2` over (efficiency, p1, T1, h1, w1, p2, w2), static states
/// (Moran and Shapiro, Fundamentals of Engineering Thermodynamics, chapter 6, there with w1 neglected; from memory).
struct NozzleEfficiency(StreamFluid);

impl Equation for NozzleEfficiency {
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        let drop = x[3] - isentropic_enthalpy(self.0, &x[1..4], x[5], held)?;
        Ok(x[0] * drop - (x[6] * x[6] - x[4] * x[4]) * 0.5)
    }
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    /// Steam of 10 bar and 250 degC at 50 m/s expands to 6 bar with an efficiency of 0.95.
    #[test]
    fn pressure_becomes_velocity() {
        let (w1, w2) = (50.0, 464.245673047619);
        let areas = [0.23273893329992676 / w1, 0.3466742149629498 / w2];
        let rig = Rig::new("nozzle", &["inlet", "outlet"]);
        let mut rig = rig.area("inlet", areas[0]).area("outlet", areas[1]).build();
        rig.flow("inlet", 1.0, 10.0, 250.0);
        rig.flow("outlet", 1.0, 6.0, 466.82092911155723 - 273.15);
        // Areas that give the velocities at 1 kg/s, so that the velocities are tested on the way.
        assert!(rig.residual("energy balance").abs() < 1.0);
        near(rig.quantity("efficiency"), 0.95, 1e-6);
    }

    #[test]
    fn both_areas_must_be_stated() {
        let rig = Rig::new("nozzle", &["inlet", "outlet"]).area("inlet", 0.01);
        let expected =
            "`machine` (a nozzle) needs the area of `outlet`: add area = \"... m2\" to [streams.outlet]";
        assert_eq!(rig.machine.kind.faults(&rig.machine, &rig.system), [expected]);
        let mut rig = rig.build();
        assert!(rig.machine.kind.derive(&rig.machine, "efficiency", &mut rig.system).is_none());
    }
}
