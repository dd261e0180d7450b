//! Equilibration of the coefficients, so that "small" means the same in every equation and for every variable.
//!
//! Finds positive `r` and `s` so that the largest magnitude in every row and column of `diag(r) C diag(s)` is near one,
//! by repeated division by the square roots of the largest magnitudes (Ruiz, "A scaling algorithm to equilibrate both
//! rows and columns norms in matrices", RAL-TR-2001-034). What is [`NEGLIGIBLE`] in the caller's own scale is not
//! blown up: the enthalpy of a stream that doesn't flow stays the zero column it is.

use super::pattern::{Column, Pattern};

/// A pivot, row or column below this size counts as zero in a scaled problem. Unmeasured blocks of real plants show their
/// smallest true singular value near 1e-6 and rounding near 1e-16; what seldom lies between, a pressure that only the
/// compressibility of a liquid tells of, no reading can determine.
pub(super) const NEGLIGIBLE: f64 = 1e-8;

const SWEEPS: usize = 6;

/// The factors of rows and columns. Fixed variables have the factor one and no influence.
pub(super) struct Scaling {
    pub(super) row: Vec<f64>,
    pub(super) column: Vec<f64>,
}

impl Scaling {
    pub(super) fn new(pattern: &Pattern, values: &[f64], columns: &[Column]) -> Self {
        let mut scaling = Self { row: vec![1.0; pattern.rows()], column: vec![1.0; pattern.columns()] };
        let (by_row, _) = scaling.largest(pattern, values, columns);
        for (factor, size) in scaling.row.iter_mut().zip(&by_row) {
            *factor = reciprocal(*size);
        }
        let (_, by_column) = scaling.largest(pattern, values, columns);
        let live_row: Vec<bool> = by_row.iter().map(|size| *size > NEGLIGIBLE).collect();
        let live_column: Vec<bool> = by_column.iter().map(|size| *size > NEGLIGIBLE).collect();
        for _ in 0..SWEEPS {
            let (by_row, by_column) = scaling.largest(pattern, values, columns);
            for ((factor, size), live) in scaling.row.iter_mut().zip(by_row).zip(&live_row) {
                *factor *= if *live { reciprocal(size.sqrt()) } else { 1.0 };
            }
            for ((factor, size), live) in scaling.column.iter_mut().zip(by_column).zip(&live_column) {
                *factor *= if *live { reciprocal(size.sqrt()) } else { 1.0 };
            }
        }
        scaling
    }

    /// The largest scaled magnitude of each row and each column.
    fn largest(&self, pattern: &Pattern, values: &[f64], columns: &[Column]) -> (Vec<f64>, Vec<f64>) {
        let mut by_row = vec![0.0_f64; self.row.len()];
        let mut by_column = vec![0.0_f64; self.column.len()];
        for (row, largest) in by_row.iter_mut().enumerate() {
            for (&column, value) in pattern.row(row).iter().zip(&values[pattern.range(row)]) {
                let column = column as usize;
                if columns[column] != Column::Fixed {
                    let size = (value * self.row[row] * self.column[column]).abs();
                    *largest = largest.max(size);
                    by_column[column] = by_column[column].max(size);
                }
            }
        }
        (by_row, by_column)
    }
}

/// One over a size; one for what is negligible.
fn reciprocal(size: f64) -> f64 {
    if size > NEGLIGIBLE { 1.0 / size } else { 1.0 }
}
