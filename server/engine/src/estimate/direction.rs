//! How a solution answers to errors that it doesn't know of: the seam that a search for errors stands on.

use crate::kkt::{FactorError, Vectors};

use super::linearisation::Linearisation;
use super::problem::Problem;

/// Something that may be wrong by an unknown amount.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Direction {
    /// An observation: its value is its truth plus the amount.
    Observation {
        /// The variable it is of.
        variable: u32,
        /// Inverse of its variance.
        weight: f64,
        /// Value minus solution.
        deviation: f64,
    },
    /// An exact variable: the truth is its value plus the amount.
    Exact(u32),
}

/// What a solution says of one direction.
pub(crate) struct Response {
    /// Decrease of half the sum of squares by the amount, to first order.
    pub(crate) score: f64,
    /// How each variable moves with the amount, scaled.
    columns: Vec<f64>,
    rows: Vec<f64>,
    /// Where the amount stands on the right side of the linearised system: scaled columns and rows.
    pushed_columns: Vec<(u32, f64)>,
    pushed_rows: Vec<(u32, f64)>,
    own: f64,
}

impl Response {
    /// The information of two directions together: the second derivative of half the sum of squares.
    pub(crate) fn information(&self, other: &Self, same: bool) -> f64 {
        let columns: f64 =
            self.pushed_columns.iter().map(|(at, push)| push * other.columns[*at as usize]).sum();
        let rows: f64 = self.pushed_rows.iter().map(|(at, push)| push * other.rows[*at as usize]).sum();
        if same { self.own - columns - rows } else { -columns - rows }
    }
}

impl Linearisation {
    /// The answer to one direction; nothing where the equations forbid it, as a closed circuit forbids a loss.
    ///
    /// # Errors
    /// [`FactorError`] if there is no factor.
    pub(crate) fn response(
        &mut self,
        problem: &Problem,
        direction: Direction,
    ) -> Result<Option<Response>, FactorError> {
        let (analysis, scale) = (&self.structure.analysis, &self.structure.scaling.column);
        let mut push = Vectors::zeros(analysis);
        let (mut pushed_columns, mut pushed_rows) = (Vec::new(), Vec::new());
        let own = match direction {
            Direction::Observation { variable, weight, .. } => {
                let pushed = -weight * scale[variable as usize];
                push.columns[variable as usize] = pushed;
                pushed_columns.push((variable, pushed));
                weight
            }
            Direction::Exact(variable) => {
                for (row, pushed) in self.pushed_rows(problem, variable) {
                    push.rows[row as usize] = pushed;
                    pushed_rows.push((row, pushed));
                }
                0.0
            }
        };
        let score = self.score(problem, direction);
        let mut answer = Vectors::zeros(analysis);
        let factor = self.real.get_or_insert_with(|| self.factor.real());
        factor.solve(&push, &mut answer)?;
        if !self.closes(problem, &push, &answer) {
            return Ok(None);
        }
        let Vectors { columns, rows } = answer;
        Ok(Some(Response { score, columns, rows, pushed_columns, pushed_rows, own }))
    }

    /// By how much half the sum of squares would fall with the amount of a direction, to first order.
    pub(crate) fn score(&self, problem: &Problem, direction: Direction) -> f64 {
        match direction {
            Direction::Observation { weight, deviation, .. } => weight * deviation,
            Direction::Exact(variable) => self
                .pushed_rows(problem, variable)
                .map(|(row, pushed)| self.multipliers[row as usize] * pushed)
                .sum(),
        }
    }

    /// Where an exact variable's amount stands on the right side of the rows, scaled.
    fn pushed_rows<'a>(
        &'a self,
        problem: &'a Problem,
        variable: u32,
    ) -> impl Iterator<Item = (u32, f64)> + 'a {
        let scale = self.structure.scaling.column[variable as usize];
        problem.column(variable).iter().map(move |(row, place)| (*row, -self.values[*place as usize] / scale))
    }

    /// Whether the equations that follow from others still do.
    fn closes(&self, problem: &Problem, push: &Vectors<f64>, answer: &Vectors<f64>) -> bool {
        self.structure.analysis.dropped_rows().iter().all(|row| {
            let row = *row as usize;
            let places = problem.pattern.range(row);
            let terms = self.values[places].iter().zip(problem.pattern.row(row));
            let (mut sum, mut largest) = (-push.rows[row], push.rows[row].abs());
            for (value, column) in terms {
                let term = value * answer.columns[*column as usize];
                sum += term;
                largest = largest.max(term.abs());
            }
            sum.abs() <= 1e-6 * largest
        })
    }

    /// How every variable moves with the amount of a direction, SI.
    pub(crate) fn moved<'a>(&'a self, response: &'a Response) -> impl Iterator<Item = f64> + 'a {
        response.columns.iter().zip(&self.structure.scaling.column).map(|(value, scale)| value * scale)
    }
}
