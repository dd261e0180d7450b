//! What kind of quantity a formula gives.

use super::function::{Function, Rule};
use super::{Formula, FormulaError, Operation};
use crate::quantity::Dimension;

impl Formula {
    /// Dimension of the result for inputs of these dimensions, in the order of [`Formula::references`].
    ///
    /// # Errors
    /// [`FormulaError`] at the part whose dimensions don't fit, with both named.
    pub fn dimension(&self, inputs: &[Dimension]) -> Result<Dimension, FormulaError> {
        let mut stack = Vec::new();
        for step in &self.steps {
            let count = step.operation.operands();
            let operands = stack.split_off(stack.len().saturating_sub(count));
            let result = match (step.operation, operands.as_slice()) {
                (Operation::Constant { dimension, .. }, _) => Ok(dimension),
                (Operation::Input(index), _) => {
                    inputs.get(index).copied().ok_or_else(|| "this quantity has no dimension".to_owned())
                }
                (Operation::Negate, [a]) => Ok(*a),
                (Operation::Add, [a, b]) => same(*a, *b, "can't be added to"),
                (Operation::Subtract, [a, b]) => same(*b, *a, "can't be subtracted from"),
                (Operation::Multiply, [a, b]) => Ok(a.times(*b)),
                (Operation::Divide, [a, b]) => Ok(a.over(*b)),
                (Operation::Power(exponent), [a]) => a
                    .power(exponent)
                    .ok_or_else(|| format!("{} can't be raised to the power {exponent}", a.name())),
                (Operation::Call(function), arguments) => call(function, arguments),
                _ => Err("the formula is incomplete".to_owned()),
            };
            stack.push(result.map_err(|message| step.error(message))?);
        }
        Ok(stack.pop().unwrap_or(Dimension::RATIO))
    }
}

/// The common dimension; where one is a bare number, it probably lacks its unit.
fn same(a: Dimension, b: Dimension, cannot: &str) -> Result<Dimension, String> {
    if a == b {
        return Ok(a);
    }
    let bare = a.is_dimensionless() || b.is_dimensionless();
    let hint = if bare { "; a number with a unit is written in single quotes, such as '5 t/h'" } else { "" };
    Err(format!("{} {cannot} {}{hint}", a.name(), b.name()))
}

fn call(function: &Function, arguments: &[Dimension]) -> Result<Dimension, String> {
    let name = function.name;
    match (&function.rule, arguments) {
        (Rule::Same(_), [a]) => Ok(*a),
        (Rule::Same(_), [a, b]) => same(*a, *b, "can't be compared with"),
        (Rule::Root, [a]) => a.sqrt().ok_or_else(|| format!("{} has no square root", a.name())),
        (Rule::Number, [a]) if a.is_dimensionless() => Ok(*a),
        (Rule::Number, [a]) => Err(format!("`{name}` takes a number without a unit, not {}", a.name())),
        (Rule::Fixed(wanted, result), given) => {
            for (position, (wanted, given)) in wanted.iter().zip(given).enumerate() {
                if wanted != given {
                    let position = if position == 0 { "first" } else { "second" };
                    return Err(format!(
                        "the {position} argument of `{name}` must be {}, not {}",
                        wanted.name(),
                        given.name()
                    ));
                }
            }
            Ok(*result)
        }
        _ => Err("the formula is incomplete".to_owned()),
    }
}
