//! Shafts: what is made on one is taken or lost on it.

use std::collections::HashMap;

use meterwright_thermo::Scalar;

use super::quantities::Naming;
use crate::equation::{Equation, EquationError, Held, Row, RowRole};
use crate::equipment::{Knowledge, Machine, ShaftRole, VariableRole};
use crate::fault::Fault;
use crate::plant::Plant;
use crate::quantity::Dimension;

/// `made * (1 - sum of (1 - gearbox efficiency)) - taken - loss = 0` over (made.., taken.., loss, efficiency..).
struct ShaftBalance {
    makes: usize,
    takes: usize,
}

impl Equation for ShaftBalance {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let sum = |part: &[S]| part.iter().fold(S::constant(0.0), |sum, value| sum + *value);
        let made = sum(&x[..self.makes]);
        let taken = sum(&x[self.makes..=self.makes + self.takes]);
        let gearboxes = &x[self.makes + self.takes + 1..];
        let passed = gearboxes.iter().fold(S::constant(1.0), |passed, efficiency| passed - 1.0 + *efficiency);
        Ok(made * passed - taken)
    }
}

/// Writes the row of every shaft.
pub(super) fn build(plant: &Plant, naming: &mut Naming<'_>, faults: &mut Vec<Fault>) {
    let mut taken_by: HashMap<&str, &str> = HashMap::new();
    for shaft in &plant.shafts {
        let (mut makes, mut takes, mut passes) = (Vec::new(), Vec::new(), Vec::new());
        for member in &shaft.members {
            let Some(machine) = naming.machine(&member.value) else { continue };
            if let Some(other) = taken_by.insert(&member.value, &shaft.name.value) {
                let message = format!("`{}` already stands on shaft `{other}`", member.value);
                faults.push(Fault { span: member.span, message });
                continue;
            }
            match machine.kind.shaft_role() {
                ShaftRole::Makes => makes.push(naming.system().power(machine, "power")),
                ShaftRole::Takes => takes.push(naming.system().power(machine, "power")),
                ShaftRole::Passes => passes.push(efficiency(naming, machine)),
                ShaftRole::None => {
                    let message = format!(
                        "a {} has no shaft: `{}` can't stand on one",
                        machine.kind.name(),
                        member.value
                    );
                    faults.push(Fault { span: member.span, message });
                }
            }
        }
        let equation = ShaftBalance { makes: makes.len(), takes: takes.len() };
        let name = &shaft.name.value;
        let loss = naming.system().variable(
            &format!("{name}.loss"),
            Dimension::POWER,
            VariableRole::Power,
            Knowledge::Exact(0.0),
        );
        let variables = [makes, takes, vec![loss], passes].concat();
        let row = Row::new(format!("{name}: shaft balance"), RowRole::Law, variables, equation);
        naming.system().rows.push(row);
    }
}

fn efficiency(naming: &mut Naming<'_>, gearbox: &Machine) -> u32 {
    let exact = Knowledge::Exact(1.0);
    naming.system().quantity(gearbox, "efficiency", Dimension::RATIO, VariableRole::Ratio, exact)
}
