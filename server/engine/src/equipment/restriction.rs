//! What throttles without doing work: shared by `valve` and `pipe`.

use meterwright_thermo::Scalar;

use super::{Flow, Machine, Port, QuantityRule, System, VariableRole};
use crate::equation::{Equation, EquationError, Held, StreamFluid};
use crate::quantity::Dimension;

pub(super) const PORTS: &[Port] = &[Port::one("inlet", Flow::In), Port::one("outlet", Flow::Out)];

pub(super) const QUANTITIES: &[QuantityRule] = &[
    QuantityRule::new("pressure_drop", Dimension::PRESSURE, "inlet pressure less outlet pressure"),
    QuantityRule::new(
        "loss_coefficient",
        Dimension::RATIO,
        "pressure drop over the dynamic pressure in the inlet's area, which must be stated",
    ),
];

/// Mass and energy.
pub(super) fn build(machine: &Machine, system: &mut System) {
    system.mass_balances(machine);
    system.energy_balance(machine, 0, &[]);
}

/// Pressure drop and loss coefficient.
pub(super) fn derive(machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
    let (inlet, outlet) = (machine.stream("inlet")?, machine.stream("outlet")?);
    match quantity {
        "pressure_drop" => {
            let (p_in, p_out) = (system.pressure(inlet), system.pressure(outlet));
            Some(system.define_difference(machine, quantity, Dimension::PRESSURE, p_in, p_out))
        }
        "loss_coefficient" => {
            let area = system.streams[inlet].area?;
            let law = LossCoefficient { fluid: system.streams[inlet].fluid, area };
            let [p, t, h] = system.state(inlet);
            let of = [p, t, h, system.mass_flow(inlet), system.pressure(outlet)];
            Some(system.define(machine, quantity, Dimension::RATIO, VariableRole::Other, &of, law))
        }
        _ => None,
    }
}

/// Loss coefficient `zeta` of a fitting: `p1 - p2 = zeta rho1 w1^2 / 2` over (zeta, p1, T1, h1, m, p2), where
/// `rho1 w1^2 = m^2 v1 / area^2` (Idelchik, Handbook of Hydraulic Resistance, chapter 1; from memory).
struct LossCoefficient {
    fluid: StreamFluid,
    area: f64,
}

impl Equation for LossCoefficient {
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        let flux = x[4] / self.area;
        let dynamic_pressure = flux * flux * self.fluid.volume(held, x[1], x[2], x[3])? * 0.5;
        Ok(x[0] * dynamic_pressure - (x[1] - x[5]))
    }
}

#[cfg(test)]
mod tests {
    use crate::equipment::rig::{Rig, near};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    #[test]
    fn steam_is_throttled_at_constant_enthalpy() {
        let mut rig = Rig::new("valve", &["inlet", "outlet"]).area("inlet", 0.02).build();
        rig.flow("inlet", 8.0, 20.0, 300.0);
        rig.flow("outlet", 8.0, 5.0, 553.622375777 - 273.15);
        // Kinetic energy at the inlet counts as its area is stated.
        rig.set("inlet.velocity", 0.0);
        assert!(rig.residual("energy balance").abs() < 8.0 * 0.01);
        near(rig.quantity("pressure_drop"), 15e5, 1e-12);
        near(rig.quantity("loss_coefficient"), 149.400988183, 1e-8);
    }

    #[test]
    fn without_an_area_there_is_no_loss_coefficient() {
        let mut rig = Rig::new("pipe", &["inlet", "outlet"]).build();
        assert!(rig.machine.kind.derive(&rig.machine, "loss_coefficient", &mut rig.system).is_none());
    }

    #[test]
    fn a_guess_throttles_at_constant_enthalpy() {
        let rig = Rig::new("valve", &["inlet", "outlet"]).build();
        let (_, celsius) = rig.guessed(&[("inlet", 20.0, 300.0), ("outlet", 5.0, f64::NAN)], "outlet");
        near(celsius, 553.622375777 - 273.15, 1e-8);
        let (_, celsius) = rig.guessed(&[("outlet", 5.0, 280.472375777), ("inlet", 20.0, f64::NAN)], "inlet");
        near(celsius, 300.0, 1e-8);
    }
}
