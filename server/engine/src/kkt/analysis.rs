//! Everything about a linearised problem that doesn't change with the numbers of a period.

use thiserror::Error;

use super::ordering::{Entry, Graph, Pivot, Role};
use super::pattern::{Column, Pattern};
use super::postorder::postordered;
use super::rank::{NullVector, Rank};
use super::scaling::Scaling;
use super::tape::{Kind, Tape};

/// The place of what doesn't take part.
pub(super) const ABSENT: u32 = u32::MAX;

/// What is known once the variables that are measured and the equations are known: which directions are unobservable,
/// which equations are dependent, and along which pivots and places the matrix
///
/// ```text
/// K = [ W + D,  C' ]
///     [ C,     -E  ]
/// ```
///
/// is factored. Columns that are fixed or held, and rows that are dropped, are out of `K`.
#[derive(Clone, Debug)]
pub struct Analysis {
    pub(super) columns: usize,
    pub(super) rows: usize,
    pub(super) coefficients: usize,
    pub(super) tape: Tape,
    /// The place in the order of elimination of each column and row, [`ABSENT`] for those that are out.
    pub(super) column_position: Vec<u32>,
    pub(super) row_position: Vec<u32>,
    /// Per coefficient that takes part: where it comes from and where it goes in the factor.
    pub(super) entries: Vec<CoefficientPlace>,
    /// Per position, where its diagonal stands in the factor.
    pub(super) diagonal: Vec<u32>,
    null_vectors: Vec<NullVector>,
    held: Vec<u32>,
    dropped_rows: Vec<u32>,
    degrees_of_freedom: usize,
    rank: usize,
}

/// One coefficient of the equations that takes part.
#[derive(Clone, Copy, Debug)]
pub(super) struct CoefficientPlace {
    pub(super) source: u32,
    pub(super) storage: u32,
    pub(super) column: u32,
    pub(super) row: u32,
}

/// Why a problem can't be analysed.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum AnalysisError {
    /// An array doesn't have the length that the pattern asks for.
    #[error("{what} has {found} elements where the pattern asks for {expected}")]
    Length {
        /// Which array.
        what: &'static str,
        /// Its length.
        found: usize,
        /// The length asked for.
        expected: usize,
    },
    /// A coefficient is infinite or not a number.
    #[error("a coefficient of row {row} in column {column} isn't finite")]
    Coefficient {
        /// The equation.
        row: usize,
        /// The variable.
        column: usize,
    },
    /// A weight isn't positive and finite.
    #[error("the weight of column {column} isn't positive and finite")]
    Weight {
        /// The variable.
        column: usize,
    },
}

impl Analysis {
    /// Analyses exact equations: those that follow from others are dropped.
    ///
    /// # Errors
    /// [`AnalysisError`] when lengths disagree or numbers aren't finite.
    pub fn new(pattern: &Pattern, values: &[f64], columns: &[Column]) -> Result<Self, AnalysisError> {
        Self::build(pattern, values, columns, false)
    }

    /// Analyses equations that will all be softened (`E > 0`): those that follow from others stay, because their
    /// slacks tell which of them contradict.
    ///
    /// # Errors
    /// [`AnalysisError`] when lengths disagree or numbers aren't finite.
    pub fn softened(pattern: &Pattern, values: &[f64], columns: &[Column]) -> Result<Self, AnalysisError> {
        Self::build(pattern, values, columns, true)
    }

    fn build(
        pattern: &Pattern,
        values: &[f64],
        columns: &[Column],
        softened: bool,
    ) -> Result<Self, AnalysisError> {
        check(pattern, values, columns)?;
        let scaling = Scaling::new(pattern, values, columns);
        let rank = Rank::new(pattern, values, columns, &scaling);
        let nodes = Nodes::new(columns, pattern.rows(), &rank, softened);
        let pivots = nodes.graph(pattern, values, columns, &scaling, &rank).eliminate_all();
        let pivots = postordered(pivots, nodes.count);
        let mut position = vec![ABSENT; nodes.count];
        let order = pivots.iter().flat_map(|pivot| std::iter::once(pivot.first).chain(pivot.second));
        for (place, node) in (0u32..).zip(order) {
            position[node as usize] = place;
        }
        let tape = Tape::new(&pivots, &position, |pivot| nodes.kind(pivot, &scaling));
        let place = |node: &u32| if *node == ABSENT { ABSENT } else { position[*node as usize] };
        let column_position: Vec<u32> = nodes.of_column.iter().map(place).collect();
        let row_position: Vec<u32> = nodes.of_row.iter().map(place).collect();
        let entries = entries(pattern, &tape, &column_position, &row_position);
        let diagonal =
            (0..nodes.count as u32).filter_map(|at| tape.locate(at, at)).map(|at| at as u32).collect();
        let kept = pattern.rows() - rank.dropped_rows.len();
        let active = column_position.iter().filter(|position| **position != ABSENT).count();
        let weighted = columns.iter().filter(|column| matches!(column, Column::Weighted(_))).count();
        Ok(Self {
            columns: columns.len(),
            rows: pattern.rows(),
            coefficients: pattern.len(),
            tape,
            column_position,
            row_position,
            entries,
            diagonal,
            held: rank.null_vectors.iter().map(|vector| vector.column).collect(),
            null_vectors: rank.null_vectors,
            dropped_rows: rank.dropped_rows,
            degrees_of_freedom: (weighted + kept).saturating_sub(active),
            rank: kept,
        })
    }

    /// The free columns that the equations don't determine: taken out of the system, held at their values.
    pub fn held(&self) -> &[u32] {
        &self.held
    }

    /// The unobservable direction that belongs to each held column.
    pub fn null_vectors(&self) -> &[NullVector] {
        &self.null_vectors
    }

    /// The equations that follow from others, ascending. With [`Analysis::new`] they are out of the system.
    pub fn dropped_rows(&self) -> &[u32] {
        &self.dropped_rows
    }

    /// The number of independent equations.
    pub fn rank(&self) -> usize {
        self.rank
    }

    /// Weighted columns minus determined columns plus independent equations: the number of ways in which readings
    /// can contradict one another.
    pub fn degrees_of_freedom(&self) -> usize {
        self.degrees_of_freedom
    }

    /// How many numbers the factor stores, and how many updates a factorisation makes.
    pub fn size(&self) -> (usize, usize) {
        (self.tape.stored, self.tape.destination.len())
    }
}

fn check(pattern: &Pattern, values: &[f64], columns: &[Column]) -> Result<(), AnalysisError> {
    for (what, found, expected) in
        [("values", values.len(), pattern.len()), ("columns", columns.len(), pattern.columns())]
    {
        if found != expected {
            return Err(AnalysisError::Length { what, found, expected });
        }
    }
    for row in 0..pattern.rows() {
        let mut entries = pattern.row(row).iter().zip(&values[pattern.range(row)]);
        if let Some((&column, _)) = entries.find(|(_, value)| !value.is_finite()) {
            return Err(AnalysisError::Coefficient { row, column: column as usize });
        }
    }
    let bad = columns.iter().position(
        |column| matches!(column, Column::Weighted(weight) if !(*weight > 0.0 && weight.is_finite())),
    );
    bad.map_or(Ok(()), |column| Err(AnalysisError::Weight { column }))
}

fn entries(
    pattern: &Pattern,
    tape: &Tape,
    column_position: &[u32],
    row_position: &[u32],
) -> Vec<CoefficientPlace> {
    let mut entries = Vec::with_capacity(pattern.len());
    for (row, &row_place) in row_position.iter().enumerate().filter(|(_, place)| **place != ABSENT) {
        for (source, &column) in pattern.range(row).zip(pattern.row(row)) {
            let column = column_position[column as usize];
            let storage = if column == ABSENT { None } else { tape.locate(column, row_place) };
            let place = storage.map(|storage| CoefficientPlace {
                source: source as u32,
                storage: storage as u32,
                column,
                row: row_place,
            });
            entries.extend(place);
        }
    }
    entries
}

/// The columns and rows that take part, numbered together: columns first.
struct Nodes {
    count: usize,
    of_column: Vec<u32>,
    of_row: Vec<u32>,
    column_or_row: Vec<usize>,
    first_row: usize,
}

impl Nodes {
    fn new(columns: &[Column], rows: usize, rank: &Rank, softened: bool) -> Self {
        let mut column_or_row = Vec::new();
        let mut number = |out: bool, index: usize| {
            if out {
                return ABSENT;
            }
            column_or_row.push(index);
            column_or_row.len() as u32 - 1
        };
        let out = |index: usize| match columns[index] {
            Column::Fixed => true,
            Column::Free => !rank.basis[index],
            Column::Weighted(_) => false,
        };
        let of_column: Vec<u32> = (0..columns.len()).map(|column| number(out(column), column)).collect();
        let dropped = |row: usize| !softened && rank.dropped_rows.binary_search(&(row as u32)).is_ok();
        let of_row = (0..rows).map(|row| number(dropped(row), row)).collect();
        let first_row = of_column.iter().filter(|node| **node != ABSENT).count();
        Self { count: column_or_row.len(), of_column, of_row, column_or_row, first_row }
    }

    fn is_row(&self, node: u32) -> bool {
        node as usize >= self.first_row
    }

    /// The scaled matrix of the trial factorisation. Softened equations that follow from others are given the unit
    /// softening there.
    fn graph(
        &self,
        pattern: &Pattern,
        values: &[f64],
        columns: &[Column],
        scaling: &Scaling,
        rank: &Rank,
    ) -> Graph {
        let mut adjacency = vec![Vec::new(); self.count];
        let mut diagonal = vec![0.0; self.count];
        let mut role = vec![Role::Single; self.count];
        for (&node, (column, scale)) in self.of_column.iter().zip(columns.iter().zip(&scaling.column)) {
            if let Column::Weighted(weight) = column
                && node != ABSENT
            {
                diagonal[node as usize] = weight * scale * scale;
            }
        }
        for (&node, _) in
            self.of_column.iter().zip(&rank.basis).filter(|(node, in_it)| **node != ABSENT && **in_it)
        {
            role[node as usize] = Role::Lead;
        }
        for (row, &row_node) in self.of_row.iter().enumerate().filter(|(_, node)| **node != ABSENT) {
            if rank.dropped_rows.binary_search(&(row as u32)).is_ok() {
                diagonal[row_node as usize] = -1.0;
            } else {
                role[row_node as usize] = Role::Partner;
            }
            for (&column, value) in pattern.row(row).iter().zip(&values[pattern.range(row)]) {
                let node = self.of_column[column as usize];
                if node != ABSENT {
                    let value = value * scaling.row[row] * scaling.column[column as usize];
                    adjacency[row_node as usize].push(Entry { node, value });
                    adjacency[node as usize].push(Entry { node: row_node, value });
                }
            }
            adjacency[row_node as usize].sort_unstable_by_key(|entry| entry.node);
        }
        Graph::new(adjacency, diagonal, role)
    }

    /// The kind of a pivot, with the floor of a pair's determinant turned back into the caller's scale.
    fn kind(&self, pivot: &Pivot, scaling: &Scaling) -> Kind {
        let index = self.column_or_row[pivot.first as usize];
        match pivot.second {
            None if self.is_row(pivot.first) => Kind::Equation,
            None => Kind::Variable,
            Some(row) => {
                let scale = scaling.column[index] * scaling.row[self.column_or_row[row as usize]];
                Kind::Pair(pivot.floor / (scale * scale))
            }
        }
    }
}
