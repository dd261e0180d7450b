//! The value of a formula, with its derivatives where the scalar carries them.

use meterwright_thermo::Scalar;

use super::function::Function;
use super::{Formula, FormulaError, Operation};

impl Operation {
    /// How many values it takes from the stack.
    pub(super) fn operands(self) -> usize {
        match self {
            Self::Constant { .. } | Self::Input(_) => 0,
            Self::Negate | Self::Power(_) => 1,
            Self::Add | Self::Subtract | Self::Multiply | Self::Divide => 2,
            Self::Call(function) => function.arguments(),
        }
    }
}

impl Formula {
    /// Value in SI for inputs in SI, in the order of [`Formula::references`]. At a corner (`abs`, `min`, `max`) the
    /// derivative is that of one side.
    ///
    /// # Errors
    /// [`FormulaError`] at the part that has no finite value, such as a division by zero or a state that water can't
    /// have, or if there are fewer inputs than references.
    pub fn evaluate<S: Scalar>(&self, inputs: &[S]) -> Result<S, FormulaError> {
        let mut stack: Vec<S> = Vec::with_capacity(8);
        for step in &self.steps {
            // The second operand of one is never looked at.
            let second = if step.operation.operands() == 2 { stack.pop() } else { None };
            let first = if step.operation.operands() >= 1 { stack.pop() } else { None };
            let a = first.unwrap_or_else(|| S::constant(f64::NAN));
            let b = second.unwrap_or_else(|| S::constant(f64::NAN));
            let result = match step.operation {
                Operation::Constant { value, .. } => S::constant(value),
                Operation::Input(index) => {
                    *inputs.get(index).ok_or_else(|| step.error("this quantity has no value"))?
                }
                Operation::Negate => -a,
                Operation::Add => a + b,
                Operation::Subtract => a - b,
                Operation::Multiply => a * b,
                Operation::Divide => a / b,
                Operation::Power(exponent) => power(a, exponent),
                Operation::Call(function) => {
                    call(function, a, b).map_err(|error| step.error(error.to_string()))?
                }
            };
            if !result.value().is_finite() {
                return Err(step.error(cause(step.operation, a.value(), b.value())));
            }
            stack.push(result);
        }
        stack.pop().ok_or_else(|| FormulaError {
            start: 0,
            end: 0,
            message: "the formula is empty".to_owned(),
        })
    }
}

fn call<S: Scalar>(function: &Function, a: S, b: S) -> Result<S, meterwright_thermo::water::WaterError> {
    let tangent = (function.evaluate)(a.value(), b.value())?;
    let [by_first, by_second] = tangent.slopes;
    Ok(if function.arguments() == 1 {
        a.lift1(tangent.value, by_first)
    } else {
        S::lift2(a, b, tangent.value, by_first, by_second)
    })
}

/// Whole exponents take negative bases too.
fn power<S: Scalar>(base: S, exponent: f64) -> S {
    if exponent == 0.0 {
        S::constant(1.0)
    } else if exponent.fract() == 0.0 && exponent.abs() <= 1024.0 {
        base.powi(exponent as i32)
    } else {
        base.powf(exponent)
    }
}

/// Why an operation on finite numbers has no finite value.
fn cause(operation: Operation, a: f64, b: f64) -> String {
    match operation {
        Operation::Input(_) => "this quantity has no finite value".to_owned(),
        Operation::Divide if b == 0.0 => "division by zero".to_owned(),
        Operation::Power(exponent) if a <= 0.0 => format!("{a} can't be raised to the power {exponent}"),
        Operation::Call(function) if a <= 0.0 => format!("`{}` of {a} does not exist", function.name),
        _ => "the result is too large".to_owned(),
    }
}
