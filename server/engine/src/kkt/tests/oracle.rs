//! Dense reference computations: ranks by singular values, inverses in doubled precision.

use nalgebra::DMatrix;

use super::plant::Plant;
use crate::kkt::{Analysis, Column, Pattern};

/// A number as the unevaluated sum of two (T. J. Dekker, "A floating-point technique for extending the available
/// precision", Numerische Mathematik 18, 1971): about 31 digits.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Double {
    pub(super) high: f64,
    low: f64,
}

impl Double {
    pub(super) fn new(value: f64) -> Self {
        Self { high: value, low: 0.0 }
    }

    fn normalised(a: f64, b: f64) -> Self {
        let high = a + b;
        Self { high, low: b - (high - a) }
    }

    /// `self - a * b`.
    fn less(self, a: Self, b: Self) -> Self {
        let product = a.times(b);
        let sum = self.high - product.high;
        let part = sum - self.high;
        let rounding = (self.high - (sum - part)) + (-product.high - part);
        Self::normalised(sum, rounding + self.low - product.low)
    }

    fn times(self, other: Self) -> Self {
        let product = self.high * other.high;
        let rounding = self.high.mul_add(other.high, -product);
        Self::normalised(product, rounding + self.high * other.low + self.low * other.high)
    }

    fn over(self, other: Self) -> Self {
        let first = self.high / other.high;
        let rest = self.less(Self::new(first), other);
        let second = rest.high / other.high;
        let last = rest.less(Self::new(second), other).high / other.high;
        let sum = Self::normalised(first, second);
        Self::normalised(sum.high, sum.low + last)
    }
}

/// The inverse of a dense matrix in doubled precision, by Gauss-Jordan elimination with complete pivoting on the
/// matrix after its rows and columns were brought near one.
pub(super) fn inverse(matrix: &DMatrix<f64>) -> DMatrix<f64> {
    let size = matrix.nrows();
    let mut scale = vec![1.0; size];
    for _ in 0..5 {
        let largest = |i: usize| {
            (0..size).map(|j| (matrix[(i, j)] * scale[i] * scale[j]).abs()).fold(0.0_f64, f64::max)
        };
        let factors: Vec<f64> = (0..size).map(|i| (-0.5 * largest(i).log2()).round().exp2()).collect();
        scale.iter_mut().zip(factors).for_each(|(scale, factor)| *scale *= factor);
    }
    let mut work: Vec<Vec<Double>> = (0..size)
        .map(|i| (0..size).map(|j| Double::new(matrix[(i, j)] * scale[i] * scale[j])).collect())
        .collect();
    let mut open: Vec<usize> = (0..size).collect();
    // Exchanging in place: the pivot's row and column change roles, so that the array ends as the inverse of the
    // matrix with rows and columns paired by the pivots.
    let mut pivot_of_row = vec![0; size];
    let mut open_columns = open.clone();
    while !open.is_empty() {
        let candidates = open.iter().flat_map(|&i| open_columns.iter().map(move |&j| (i, j)));
        let (i, j) = candidates
            .max_by(|a, b| work[a.0][a.1].high.abs().total_cmp(&work[b.0][b.1].high.abs()))
            .unwrap();
        open.retain(|row| *row != i);
        open_columns.retain(|column| *column != j);
        pivot_of_row[i] = j;
        let pivot = work[i][j];
        let row: Vec<Double> = work[i]
            .iter()
            .enumerate()
            .map(|(k, value)| if k == j { Double::new(1.0).over(pivot) } else { value.over(pivot) })
            .collect();
        for (other, values) in work.iter_mut().enumerate() {
            if other != i {
                let multiplier = values[j];
                if multiplier.high == 0.0 {
                    continue;
                }
                values[j] = Double::new(0.0);
                for (value, from) in values.iter_mut().zip(&row) {
                    *value = value.less(multiplier, *from);
                }
            }
        }
        work[i] = row;
    }
    // `work[i][k]` belongs to the variable that row `i` was exchanged for and to the row that column `k` was.
    let mut row_of_column = vec![0; size];
    pivot_of_row.iter().enumerate().for_each(|(row, &column)| row_of_column[column] = row);
    DMatrix::from_fn(size, size, |a, b| work[row_of_column[a]][pivot_of_row[b]].high * scale[a] * scale[b])
}

/// A problem in the form that the analysis takes.
pub(super) struct Problem {
    pub(super) pattern: Pattern,
    pub(super) values: Vec<f64>,
    pub(super) columns: Vec<Column>,
}

impl Problem {
    pub(super) fn new(plant: &Plant) -> Self {
        let mut row_start = vec![0];
        let (mut column, mut values) = (Vec::new(), Vec::new());
        for row in &plant.rows {
            column.extend(row.iter().map(|entry| entry.0));
            values.extend(row.iter().map(|entry| entry.1));
            row_start.push(column.len() as u32);
        }
        let pattern = Pattern::new(plant.weights.len(), row_start, column).unwrap();
        let columns = plant.weights.iter().map(|weight| weight.map_or(Column::Free, Column::Weighted));
        Self { pattern, values, columns: columns.collect() }
    }

    pub(super) fn analyse(&self) -> Analysis {
        Analysis::new(&self.pattern, &self.values, &self.columns).unwrap()
    }

    pub(super) fn weights(&self) -> Vec<f64> {
        let weight = |column: &Column| if let Column::Weighted(weight) = column { *weight } else { 0.0 };
        self.columns.iter().map(weight).collect()
    }

    /// The coefficients as a dense matrix, all columns.
    pub(super) fn dense(&self) -> DMatrix<f64> {
        let mut dense = DMatrix::zeros(self.pattern.rows(), self.pattern.columns());
        for row in 0..self.pattern.rows() {
            for (&column, value) in self.pattern.row(row).iter().zip(&self.values[self.pattern.range(row)]) {
                dense[(row, column as usize)] = *value;
            }
        }
        dense
    }

    /// The rank of some columns, by singular values.
    pub(super) fn rank_of(&self, chosen: impl Fn(Column) -> bool) -> usize {
        let chosen: Vec<usize> =
            (0..self.columns.len()).filter(|column| chosen(self.columns[*column])).collect();
        let dense = self.dense().select_columns(&chosen);
        if dense.is_empty() {
            return 0;
        }
        let singular = dense.singular_values();
        singular.iter().filter(|value| **value > 1e-9 * singular.max()).count()
    }

    /// The inverse of the KKT matrix of what takes part, in full numbering (columns, then rows), zero elsewhere.
    pub(super) fn kkt_inverse(
        &self,
        analysis: &Analysis,
        weights: &[f64],
        damping: &[f64],
        softening: &[f64],
        all_rows: bool,
    ) -> DMatrix<f64> {
        let columns = self.columns.len();
        let kept_column = |column: &usize| {
            self.columns[*column] != Column::Fixed && !analysis.held().contains(&(*column as u32))
        };
        let kept_row = |row: &usize| all_rows || !analysis.dropped_rows().contains(&(*row as u32));
        let mut kept: Vec<usize> = (0..columns).filter(kept_column).collect();
        kept.extend((0..self.pattern.rows()).filter(kept_row).map(|row| columns + row));
        let dense = self.dense();
        let matrix = DMatrix::from_fn(kept.len(), kept.len(), |i, j| match (kept[i], kept[j]) {
            (a, b) if a == b && a < columns => weights[a] + damping.get(a).copied().unwrap_or(0.0),
            (a, b) if a == b => -softening.get(a - columns).copied().unwrap_or(0.0),
            (a, b) if a >= columns && b < columns => dense[(a - columns, b)],
            (a, b) if a < columns && b >= columns => dense[(b - columns, a)],
            _ => 0.0,
        });
        let small = inverse(&matrix);
        let mut full = DMatrix::zeros(columns + self.pattern.rows(), columns + self.pattern.rows());
        for (i, a) in kept.iter().enumerate() {
            for (j, b) in kept.iter().enumerate() {
                full[(*a, *b)] = small[(i, j)];
            }
        }
        full
    }
}
