//! The problem as the caller sees it: which variable stands in which equation, and which variables are measured.

use thiserror::Error;

/// Where the coefficients of the linearised equations `C dx = -c` stand, row by row (compressed sparse rows).
///
/// The coefficients themselves are handed over separately, in the order of this pattern, because they change with
/// every linearisation and the pattern does not.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Pattern {
    columns: usize,
    row_start: Vec<u32>,
    column: Vec<u32>,
}

impl Pattern {
    /// Builds a pattern of `columns` variables from the start of each row in `column` (one more than there are rows)
    /// and the variable of each coefficient. Variables may stand in any order within a row, each at most once.
    ///
    /// # Errors
    /// [`PatternError`] when the starts don't ascend from zero to the number of coefficients, or when a variable
    /// doesn't exist or stands twice in one row.
    pub fn new(columns: usize, row_start: Vec<u32>, column: Vec<u32>) -> Result<Self, PatternError> {
        let ascending = row_start.windows(2).all(|pair| pair[0] <= pair[1]);
        let ends = (row_start.first().copied(), row_start.last().map(|last| *last as usize));
        if !ascending || ends != (Some(0), Some(column.len())) {
            return Err(PatternError::RowStart);
        }
        let mut last_row = vec![usize::MAX; columns];
        let pattern = Self { columns, row_start, column };
        for row in 0..pattern.rows() {
            for &column in pattern.row(row) {
                match last_row.get_mut(column as usize) {
                    None => return Err(PatternError::UnknownColumn { row, column }),
                    Some(last) if *last == row => return Err(PatternError::RepeatedColumn { row, column }),
                    Some(last) => *last = row,
                }
            }
        }
        Ok(pattern)
    }

    /// The number of equations.
    pub fn rows(&self) -> usize {
        self.row_start.len() - 1
    }

    /// The number of variables.
    pub fn columns(&self) -> usize {
        self.columns
    }

    /// The number of coefficients.
    pub fn len(&self) -> usize {
        self.column.len()
    }

    /// Whether there is no coefficient at all.
    pub fn is_empty(&self) -> bool {
        self.column.is_empty()
    }

    /// The variables of one equation, in the order of its coefficients.
    ///
    /// # Panics
    /// When the row doesn't exist.
    pub fn row(&self, row: usize) -> &[u32] {
        &self.column[self.range(row)]
    }

    /// Where the coefficients of one equation stand in the array of values.
    ///
    /// # Panics
    /// When the row doesn't exist.
    pub fn range(&self, row: usize) -> std::ops::Range<usize> {
        self.row_start[row] as usize..self.row_start[row + 1] as usize
    }
}

/// How one variable takes part.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Column {
    /// Unmeasured: only the equations say something about it.
    Free,
    /// Measured: `weight` is the inverse of the variance of its reading in the caller's scale, positive and finite.
    Weighted(f64),
    /// Known exactly: out of the system.
    Fixed,
}

/// Why arrays don't describe a pattern.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum PatternError {
    /// The row starts don't ascend from zero to the number of coefficients.
    #[error("the row starts don't ascend from zero to the number of coefficients")]
    RowStart,
    /// A coefficient names a variable that doesn't exist.
    #[error("row {row} names column {column}, which doesn't exist")]
    UnknownColumn {
        /// The equation.
        row: usize,
        /// The variable.
        column: u32,
    },
    /// A variable stands twice in one equation.
    #[error("row {row} names column {column} twice")]
    RepeatedColumn {
        /// The equation.
        row: usize,
        /// The variable.
        column: u32,
    },
}
