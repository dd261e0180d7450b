//! Small laws that many kinds share.

use meterwright_thermo::Scalar;

use super::{Equation, EquationError, Held, Linear, Shape};

/// `x0 = x1 - x2`.
pub struct Difference;

impl Equation for Difference {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        Ok(x[0] - (x[1] - x[2]))
    }

    fn shape(&self) -> Shape {
        Shape::Linear(Linear::new(vec![1.0, -1.0, 1.0]))
    }
}

/// `x0 = x1 * x2`.
pub struct Product;

impl Equation for Product {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        Ok(x[0] - x[1] * x[2])
    }
}

/// `x0 = x1 / x2`, written without a division so that it has a value everywhere.
pub struct Quotient;

impl Equation for Quotient {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        Ok(x[0] * x[2] - x[1])
    }
}
