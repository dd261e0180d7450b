//! A user's formula as a row.

use meterwright_thermo::Scalar;

use crate::equation::{Equation, EquationError, Held};
use crate::formula::Formula;

/// `x0 = formula(x1, x2, ...)`.
pub(super) struct FormulaRow(pub(super) Formula);

impl Equation for FormulaRow {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let value = self.0.evaluate(&x[1..]).map_err(|error| EquationError::Formula(error.to_string()))?;
        Ok(x[0] - value)
    }
}
