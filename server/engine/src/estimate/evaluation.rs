//! Residuals and Jacobian of all rows at a point.

use meterwright_thermo::Dual;

use crate::equation::{EquationError, Form, Held, Row, RowRole};

use super::problem::{Problem, Recipe};

/// Residuals and derivatives of all rows at one point; reusable.
#[derive(Clone, Debug, Default)]
pub(crate) struct Evaluation {
    /// Residual of each row.
    pub(crate) residual: Vec<f64>,
    /// Derivatives, in the order of the problem's pattern.
    pub(crate) jacobian: Vec<f64>,
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
        self.residual.clear();
        self.residual.resize(problem.rows.len(), 0.0);
        self.jacobian.clear();
        self.jacobian.resize(problem.pattern.len(), 0.0);
        self.undefined.clear();
        for (number, row) in problem.rows.iter().enumerate() {
            self.row(problem, number, row, x, forms)?;
        }
        Ok(())
    }

    /// Evaluates the laws alone, after an evaluation of all rows: linear ones keep their derivatives, and definitions,
    /// which determine nothing but their own variable, are left where they are.
    pub(crate) fn laws_at(&mut self, problem: &Problem, x: &[f64], forms: &[Form]) -> Result<(), NoValue> {
        for (number, recipe) in problem.recipes.iter().enumerate() {
            match recipe {
                Recipe::Linear(constant) => {
                    let terms = problem.locals(number).iter().zip(problem.coefficients(number));
                    self.residual[number] = terms.fold(*constant, |sum, (v, c)| sum + x[*v as usize] * c);
                }
                Recipe::Paired(pairs) => self.paired(problem, number, *pairs, x),
                Recipe::Property(fluid) => {
                    let [p, t, h] = std::array::from_fn(|at| {
                        Dual::<3>::variable(x[problem.locals(number)[at] as usize], at)
                    });
                    let residual = fluid
                        .property(Held(forms), p, t, h)
                        .map_err(|error| NoValue { row: number, error })?;
                    self.residual[number] = residual.re;
                    for (place, slope) in problem.places(number).iter().zip(residual.gradient) {
                        self.jacobian[*place as usize] = slope;
                    }
                }
                Recipe::Law => {
                    self.jacobian[problem.pattern.range(number)].fill(0.0);
                    self.row(problem, number, &problem.rows[number], x, forms)?;
                }
                Recipe::Definition => self.residual[number] = 0.0,
            }
        }
        Ok(())
    }

    /// Evaluates a sum of products of two and of single variables, whose derivatives are each other's partners.
    fn paired(&mut self, problem: &Problem, number: usize, pairs: usize, x: &[f64]) {
        let locals = problem.locals(number);
        let places = problem.places(number);
        let coefficients = problem.coefficients(number);
        let (paired, single) = locals.split_at(2 * pairs);
        let (mine, others) = places.split_at(2 * pairs);
        let (factors, slopes) = coefficients.split_at(2 * pairs);
        let mut sum = 0.0;
        for place in places {
            self.jacobian[*place as usize] = 0.0;
        }
        let (paired, mine, factors) =
            (paired.as_chunks::<2>().0, mine.as_chunks::<2>().0, factors.as_chunks::<2>().0);
        for (([a, b], places), [sign, offset]) in paired.iter().zip(mine).zip(factors) {
            let (a, b) = (sign * x[*a as usize], x[*b as usize] + offset);
            sum += a * b;
            self.jacobian[places[0] as usize] += sign * b;
            self.jacobian[places[1] as usize] += a;
        }
        for ((variable, place), slope) in single.iter().zip(others).zip(slopes) {
            sum += x[*variable as usize] * slope;
            self.jacobian[*place as usize] += slope;
        }
        self.residual[number] = sum;
    }

    /// Gives every definition's variable the value that its row says, after an evaluation of the laws. Definitions are
    /// linear in their variable and stand in an order in which each needs only earlier ones.
    pub(crate) fn define(&mut self, problem: &Problem, x: &mut [f64], forms: &[Form]) -> Result<(), NoValue> {
        self.undefined.clear();
        for (number, row) in
            problem.rows.iter().enumerate().filter(|(_, row)| row.role() == RowRole::Definition)
        {
            for _ in 0..2 {
                self.jacobian[problem.pattern.range(number)].fill(0.0);
                self.row(problem, number, row, x, forms)?;
                let step = self.residual[number] / self.jacobian[problem.places(number)[0] as usize];
                if step == 0.0 || !step.is_finite() {
                    break;
                }
                x[row.variables()[0] as usize] -= step;
            }
        }
        Ok(())
    }

    /// Evaluates one row, whose derivatives are zero before.
    fn row(
        &mut self,
        problem: &Problem,
        number: usize,
        row: &Row,
        x: &[f64],
        forms: &[Form],
    ) -> Result<(), NoValue> {
        let variables = problem.locals(number);
        self.local.clear();
        self.local.extend(variables.iter().map(|variable| x[*variable as usize]));
        self.gradient.resize(variables.len().max(self.gradient.len()), 0.0);
        let gradient = &mut self.gradient[..variables.len()];
        let value = row.linearise(&self.local, Held(forms), gradient);
        match value {
            Ok(value) if value.is_finite() && gradient.iter().all(|slope| slope.is_finite()) => {
                self.residual[number] = value;
            }
            _ if row.role() == RowRole::Definition => {
                self.undefined.push(number as u32);
                self.residual[number] = 0.0;
                gradient.fill(0.0);
                gradient[0] = 1.0;
            }
            Ok(_) => {
                return Err(NoValue {
                    row: number,
                    error: EquationError::Undefined("it has no finite value"),
                });
            }
            Err(error) => return Err(NoValue { row: number, error }),
        }
        for (place, slope) in problem.places(number).iter().zip(&*gradient) {
            self.jacobian[*place as usize] += slope;
        }
        Ok(())
    }

    /// Largest residual of a row relative to its largest term, taken as `max |dc/dx * x|`, over all rows, and that
    /// row.
    pub(crate) fn worst(&self, problem: &Problem, x: &[f64]) -> (f64, usize) {
        let mut worst = (0.0, 0);
        for (row, residual) in self.residual.iter().enumerate().filter(|(_, residual)| **residual != 0.0) {
            let slopes = self.jacobian[problem.pattern.range(row)].iter().zip(problem.pattern.row(row));
            let size = slopes.map(|(slope, column)| (slope * x[*column as usize]).abs()).fold(0.0, f64::max);
            let relative = residual.abs() / size.max(f64::MIN_POSITIVE);
            if relative > worst.0 {
                worst = (relative, row);
            }
        }
        worst
    }
}
