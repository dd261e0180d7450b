//! Solves with a factor, their true residual and one step of refinement.
//!
//! Vectors come and go in the caller's full numbering, one for the columns and one for the rows. What is out of the
//! system (fixed and held columns, dropped rows) has no say on the right side and is zero in the solution.

use meterwright_thermo::Scalar;

use super::analysis::{ABSENT, Analysis};
use super::factor::{Factor, FactorError, check_length};
use super::tape::Kind;

/// How well a solution satisfies the true, unfactored system.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Residual {
    /// The largest magnitude of `rhs - K x` over all equations of the system.
    pub largest: f64,
    /// The componentwise backward error: the largest of `|rhs - K x|_i / (|K| |x| + |rhs|)_i` (W. Oettli and W. Prager,
    /// "Compatibility of approximate solution of linear equations with given error bounds", Numerische Mathematik 6,
    /// 1964), with the floor of Arioli, Demmel and Duff (SIAM J. Matrix Anal. Appl. 10, 1989) under denominators that
    /// are rounding themselves.
    pub backward_error: f64,
}

/// A pair of vectors in the caller's numbering: one number a column and one a row.
#[derive(Clone, Debug, PartialEq)]
pub struct Vectors<S> {
    /// By column: `W (y - x)` on the right side, `dx` in the solution.
    pub columns: Vec<S>,
    /// By row: `-c` on the right side, the multipliers in the solution.
    pub rows: Vec<S>,
}

impl<S: Scalar> Vectors<S> {
    /// Zeros of the size of an analysed problem.
    pub fn zeros(analysis: &Analysis) -> Self {
        let zero = S::constant(0.0);
        Self { columns: vec![zero; analysis.columns], rows: vec![zero; analysis.rows] }
    }
}

impl<S: Scalar> Factor<S> {
    /// Solves `K solution = rhs`.
    ///
    /// # Errors
    /// [`FactorError::Unfactored`] without a factor, [`FactorError::Length`] when a length is wrong.
    pub fn solve(&mut self, rhs: &Vectors<S>, solution: &mut Vectors<S>) -> Result<(), FactorError> {
        self.check_ready()?;
        check_vectors(&self.analysis, rhs)?;
        check_vectors(&self.analysis, solution)?;
        gather(&self.analysis, rhs, &mut self.work);
        self.substitute();
        scatter(&self.analysis, &self.work, solution, |_, new| new);
        Ok(())
    }

    /// Improves a solution by one step of iterative refinement on the true residual; tells the residual that it had.
    ///
    /// # Errors
    /// [`FactorError::Unfactored`] without a factor, [`FactorError::Length`] when a length is wrong.
    pub fn refine(&mut self, rhs: &Vectors<S>, solution: &mut Vectors<S>) -> Result<Residual, FactorError> {
        let residual = self.residual(rhs, solution)?;
        self.substitute();
        scatter(&self.analysis, &self.work, solution, |old, new| old + new);
        Ok(residual)
    }

    /// The true residual of a solution; it stays behind in the workspace for the refinement.
    ///
    /// # Errors
    /// [`FactorError::Unfactored`] without a factor, [`FactorError::Length`] when a length is wrong.
    pub fn residual(&mut self, rhs: &Vectors<S>, solution: &Vectors<S>) -> Result<Residual, FactorError> {
        self.check_ready()?;
        check_vectors(&self.analysis, rhs)?;
        check_vectors(&self.analysis, solution)?;
        gather(&self.analysis, rhs, &mut self.work);
        gather(&self.analysis, solution, &mut self.correction);
        let (residual, x, bound) = (&mut self.work, &self.correction, &mut self.bound);
        bound.clear();
        bound.extend(residual.iter().map(|side| [side.value().abs(), 0.0]));
        let mut weigh = |at: usize, factor: f64, x: f64| {
            bound[at][0] += (factor * x).abs();
            bound[at][1] += factor.abs();
        };
        for (at, diagonal) in self.diagonal.iter().enumerate() {
            residual[at] -= *diagonal * x[at];
            weigh(at, diagonal.value(), x[at].value());
        }
        for (place, value) in self.analysis.entries.iter().zip(&self.coefficients) {
            let (column, row) = (place.column as usize, place.row as usize);
            residual[column] -= x[row] * *value;
            residual[row] -= x[column] * *value;
            weigh(column, *value, x[row].value());
            weigh(row, *value, x[column].value());
        }
        let largest_x = x.iter().fold(0.0_f64, |most, x| most.max(x.value().abs()));
        let mut worst = Residual { largest: 0.0, backward_error: 0.0 };
        for (residual, &[terms, norm]) in residual.iter().zip(&*bound) {
            let size = residual.value().abs();
            let rounding = 1e3 * f64::EPSILON * norm * largest_x;
            let denominator = if terms > rounding { terms } else { terms + norm * largest_x };
            let error = if size == 0.0 { 0.0 } else { size / denominator };
            // Written so that a residual that isn't a number is not overlooked.
            worst.largest = if size <= worst.largest { worst.largest } else { size };
            worst.backward_error = if error <= worst.backward_error { worst.backward_error } else { error };
        }
        Ok(worst)
    }

    /// Forward substitution, inverse pivots and backward substitution in the workspace.
    fn substitute(&mut self) {
        let tape = &self.analysis.tape;
        let mut storage = &self.storage[..];
        let mut fronts = &tape.front[..];
        let work = &mut self.work[..];
        for step in &tape.steps {
            let (block, rest) = storage.split_at(step.stored());
            let (front, later) = fronts.split_at(step.front as usize);
            let at = step.position as usize;
            match step.kind {
                Kind::Variable | Kind::Equation => {
                    let x = work[at];
                    for (&target, multiplier) in front.iter().zip(&block[1..]) {
                        work[target as usize] -= *multiplier * x;
                    }
                    work[at] = x * block[0];
                }
                Kind::Pair(_) => {
                    let (x, y) = (work[at], work[at + 1]);
                    for (&target, [left, right]) in front.iter().zip(block[3..].as_chunks::<2>().0) {
                        work[target as usize] -= *left * x + *right * y;
                    }
                    work[at] = block[0] * x + block[1] * y;
                    work[at + 1] = block[1] * x + block[2] * y;
                }
            }
            storage = rest;
            fronts = later;
        }
        let mut storage = &self.storage[..];
        let mut fronts = &tape.front[..];
        for step in tape.steps.iter().rev() {
            let (rest, block) = storage.split_at(storage.len() - step.stored());
            let (earlier, front) = fronts.split_at(fronts.len() - step.front as usize);
            let at = step.position as usize;
            match step.kind {
                Kind::Variable | Kind::Equation => {
                    let mut x = work[at];
                    for (&source, multiplier) in front.iter().zip(&block[1..]) {
                        x -= *multiplier * work[source as usize];
                    }
                    work[at] = x;
                }
                Kind::Pair(_) => {
                    let (mut x, mut y) = (work[at], work[at + 1]);
                    for (&source, [left, right]) in front.iter().zip(block[3..].as_chunks::<2>().0) {
                        let known = work[source as usize];
                        x -= *left * known;
                        y -= *right * known;
                    }
                    work[at] = x;
                    work[at + 1] = y;
                }
            }
            storage = rest;
            fronts = earlier;
        }
    }
}

fn check_vectors<S>(analysis: &Analysis, vectors: &Vectors<S>) -> Result<(), FactorError> {
    check_length("columns", vectors.columns.len(), analysis.columns)?;
    check_length("rows", vectors.rows.len(), analysis.rows)
}

/// Brings what takes part into the order of elimination.
fn gather<S: Scalar>(analysis: &Analysis, from: &Vectors<S>, to: &mut Vec<S>) {
    to.resize(analysis.diagonal.len(), S::constant(0.0));
    for (positions, values) in
        [(&analysis.column_position, &from.columns), (&analysis.row_position, &from.rows)]
    {
        for (&position, value) in positions.iter().zip(values) {
            if position != ABSENT {
                to[position as usize] = *value;
            }
        }
    }
}

/// Brings the order of elimination back into the caller's; what is out of the system becomes zero.
fn scatter<S: Scalar>(analysis: &Analysis, from: &[S], to: &mut Vectors<S>, merge: impl Fn(S, S) -> S) {
    for (positions, values) in
        [(&analysis.column_position, &mut to.columns), (&analysis.row_position, &mut to.rows)]
    {
        for (&position, value) in positions.iter().zip(values) {
            *value = match position {
                ABSENT => S::constant(0.0),
                _ => merge(*value, from[position as usize]),
            };
        }
    }
}
