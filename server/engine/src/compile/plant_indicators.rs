//! Ready-made indicators of the whole plant.

use meterwright_thermo::Scalar;

use crate::equation::{Equation, EquationError, Held};
use crate::equipment::{Machine, System, VariableRole};
use crate::quantity::Dimension;

/// Heat that boilers give to water and steam over the electric power of all generators; common practice, no source. Nothing
/// without a boiler or without a generator.
pub(super) fn turbine_heat_rate(name: &str, machines: &[&Machine], system: &mut System) -> Option<u32> {
    let (mut heats, mut powers) = (Vec::new(), Vec::new());
    for machine in machines {
        match machine.kind.name() {
            "boiler" => heats.extend(system.find(&format!("{}.duty", machine.name))),
            "generator" => powers.extend(system.find(&format!("{}.electric_power", machine.name))),
            _ => {}
        }
    }
    if heats.is_empty() || powers.is_empty() {
        return None;
    }
    let law = SumOverSum { above: heats.len() };
    let of = [heats, powers].concat();
    Some(system.define_named(name, Dimension::RATIO, VariableRole::Other, &of, law))
}

/// `x0 * (sum of the rest) = sum of the first of the others`.
struct SumOverSum {
    above: usize,
}

impl Equation for SumOverSum {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let sum = |part: &[S]| part.iter().fold(S::constant(0.0), |sum, value| sum + *value);
        let (above, below) = x[1..].split_at(self.above);
        Ok(x[0] * sum(below) - sum(above))
    }
}
