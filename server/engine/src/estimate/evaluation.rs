//! Residuals and Jacobian of all rows at a point.

use crate::equation::{EquationError, Form, Held, RowRole};

use super::problem::Problem;

/// Residuals, derivatives and sizes of all rows at one point; reusable.
#[derive(Clone, Debug, Default)]
pub struct Evaluation {
    /// Residual of each row.
    pub(crate) residual: Vec<f64>,
    /// Derivatives, in the order of the problem's pattern.
    pub(crate) jacobian: Vec<f64>,
    /// Size of the largest term of each row, as `max |dc/dx * x|`.
    pub(crate) size: Vec<f64>,
    /// Definitions that have no value here; their variable can't be known.
    pub(crate) undefined: Vec<u32>,
    local: Vec<f64>,
    gradient: Vec<f64>,
}

/// A law that has no value at a point.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct NoValue {
    pub(crate) row: usize,
    pub(crate) error: EquationError,
}

impl Evaluation {
    /// Evaluates all rows.
    pub(crate) fn at(&mut self, problem: &Problem, x: &[f64], forms: &[Form]) -> Result<(), NoValue> {
        let rows = problem.rows.len();
        self.residual.resize(rows, 0.0);
        self.size.resize(rows, 0.0);
        self.jacobian.clear();
        self.jacobian.resize(problem.pattern.len(), 0.0);
        self.undefined.clear();
        let mut places = problem.places.as_slice();
        for (number, row) in problem.rows.iter().enumerate() {
            let variables = row.variables();
            self.local.clear();
            self.local.extend(variables.iter().map(|variable| x[*variable as usize]));
            self.gradient.clear();
            self.gradient.resize(variables.len(), 0.0);
            let (here, rest) = places.split_at(variables.len());
            places = rest;
            let value = row.linearise(&self.local, Held(forms), &mut self.gradient);
            let finite =
                |value: f64| value.is_finite() && self.gradient.iter().all(|slope| slope.is_finite());
            match value {
                Ok(value) if finite(value) => self.residual[number] = value,
                _ if row.role() == RowRole::Definition => {
                    self.undefined.push(number as u32);
                    self.residual[number] = 0.0;
                    self.gradient.fill(0.0);
                    self.gradient[0] = 1.0;
                }
                Ok(_) => {
                    return Err(NoValue {
                        row: number,
                        error: EquationError::Undefined("it has no finite value"),
                    });
                }
                Err(error) => return Err(NoValue { row: number, error }),
            }
            let mut size = 0.0_f64;
            for ((place, slope), local) in here.iter().zip(&self.gradient).zip(&self.local) {
                self.jacobian[*place as usize] += slope;
                size = size.max((slope * local).abs());
            }
            self.size[number] = size;
        }
        Ok(())
    }

    /// Largest residual of a row relative to its largest term, over all rows, and that row.
    pub(crate) fn worst(&self) -> (f64, usize) {
        let mut worst = (0.0, 0);
        for (row, (residual, size)) in self.residual.iter().zip(&self.size).enumerate() {
            let relative = if *residual == 0.0 { 0.0 } else { residual.abs() / size.max(f64::MIN_POSITIVE) };
            if relative > worst.0 {
                worst = (relative, row);
            }
        }
        worst
    }
}
