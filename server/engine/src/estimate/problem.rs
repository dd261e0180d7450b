//! The problem: variables and rows that never change, and the situation of one balance.
//!
//! Minimise `1/2 sum ((y - x)/sigma)^2` over the observations subject to `c(x) = 0` and bounds. Every observation and
//! every reported quantity is ONE variable, so that the weights are diagonal and the pattern is that of the rows.

use crate::equation::{Row, RowRole, Shape, StreamFluid};
use crate::equipment::{Knowledge, StreamData, System, VariableData, VariableRole};
use crate::kkt::{Pattern, PatternError};

use super::bounds::Bounded;
use super::cache::Cache;

/// What it takes to evaluate a row, beside its local variables and their coefficients.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Recipe {
    /// A sum with this constant.
    Linear(f64),
    /// So many products of two, each with its sign and offset for coefficients; then single variables.
    Paired(usize),
    /// A stream's property row.
    Property(StreamFluid),
    /// A law with derivatives of its own.
    Law,
    /// A definition.
    Definition,
}

/// Variables, rows and their pattern, with the analyses made of them so far. `Send + Sync`; solves take it by
/// reference.
pub struct Problem {
    pub(crate) variables: Vec<VariableData>,
    pub(crate) rows: Vec<Row>,
    pub(crate) streams: Vec<StreamData>,
    pub(crate) pattern: Pattern,
    /// The role of each variable.
    pub(crate) roles: Vec<VariableRole>,
    /// The variables that steps must mind.
    pub(crate) bounded: Vec<Bounded>,
    /// Whether each variable is only defined by a row, so that nothing else depends on it.
    pub(crate) only_defined: Vec<bool>,
    /// Where the entries of the rows' local variables stand in the pattern, whose rows are sorted by column.
    places: Vec<u32>,
    /// The rows in which each variable stands, and where in the pattern.
    column_entries: Vec<(u32, u32)>,
    /// Where each variable's entries begin.
    column_start: Vec<u32>,
    /// Where each row's places begin.
    place_start: Vec<u32>,
    /// The rows once more in three plain arrays, so that evaluating thousands of them doesn't hunt through memory: what
    /// kind each is, and beside `places` its local variables and, where it is linear, its coefficients.
    pub(crate) recipes: Vec<Recipe>,
    locals: Vec<u32>,
    coefficients: Vec<f64>,
    pub(crate) cache: Cache,
}

impl Problem {
    /// A problem over a system.
    ///
    /// # Errors
    /// [`PatternError`] if a row names a variable that isn't there.
    pub fn new(system: System) -> Result<Self, PatternError> {
        let mut row_start = vec![0_u32];
        let mut columns = Vec::new();
        let mut places = Vec::new();
        let mut place_start = vec![0_u32];
        for row in &system.rows {
            let base = columns.len();
            let mut sorted = row.variables().to_vec();
            sorted.sort_unstable();
            sorted.dedup();
            for variable in row.variables() {
                let place = sorted.partition_point(|other| other < variable);
                places.push((base + place) as u32);
            }
            place_start.push(places.len() as u32);
            columns.extend_from_slice(&sorted);
            row_start.push(columns.len() as u32);
        }
        let defining = |row: usize| system.rows[row].role() == RowRole::Definition;
        let only_defined =
            system.variables.iter().map(|variable| variable.defined_by.is_some_and(defining)).collect();
        let locals = system.rows.iter().flat_map(|row| row.variables().iter().copied()).collect();
        let coefficients = system.rows.iter().flat_map(coefficients).collect();
        let recipes = system.rows.iter().map(recipe).collect();
        let pattern = Pattern::new(system.variables.len(), row_start, columns)?;
        let (column_start, column_entries) = transposed(&pattern);
        Ok(Self {
            column_start,
            column_entries,
            roles: system.variables.iter().map(|variable| variable.role).collect(),
            bounded: Bounded::among(&system.variables),
            variables: system.variables,
            rows: system.rows,
            streams: system.streams,
            pattern,
            only_defined,
            places,
            place_start,
            recipes,
            locals,
            coefficients,
            cache: Cache::default(),
        })
    }

    /// Where the derivatives by a row's local variables stand in the pattern.
    pub(crate) fn places(&self, row: usize) -> &[u32] {
        &self.places[self.local_range(row)]
    }

    /// A row's local variables.
    pub(crate) fn locals(&self, row: usize) -> &[u32] {
        &self.locals[self.local_range(row)]
    }

    /// The coefficients of a row's local variables, as its recipe reads them.
    pub(crate) fn coefficients(&self, row: usize) -> &[f64] {
        &self.coefficients[self.local_range(row)]
    }

    /// The rows in which a variable stands, and where in the pattern.
    pub(crate) fn column(&self, variable: u32) -> &[(u32, u32)] {
        let ends = [variable, variable + 1].map(|at| self.column_start[at as usize] as usize);
        &self.column_entries[ends[0]..ends[1]]
    }

    fn local_range(&self, row: usize) -> std::ops::Range<usize> {
        self.place_start[row] as usize..self.place_start[row + 1] as usize
    }

    /// Number of variables.
    pub fn variables(&self) -> usize {
        self.variables.len()
    }

    /// Number of rows.
    pub fn rows(&self) -> usize {
        self.rows.len()
    }

    /// Number of the variable with this name.
    pub fn find(&self, name: &str) -> Option<u32> {
        self.variables.iter().position(|variable| variable.name == name).map(|id| id as u32)
    }

    /// A situation without observations: what is exact by its nature or by the plant file is exact.
    pub fn situation(&self) -> Situation {
        let exact = self.variables.iter().map(|variable| match variable.knowledge {
            Knowledge::Exact(value) => Some(value),
            Knowledge::Free => None,
        });
        Situation { exact: exact.collect(), observations: Vec::new() }
    }
}

/// The pattern by columns: where each one's entries begin, and the row and place of each entry.
fn transposed(pattern: &Pattern) -> (Vec<u32>, Vec<(u32, u32)>) {
    let mut start = vec![0_u32; pattern.columns() + 1];
    for row in 0..pattern.rows() {
        pattern.row(row).iter().for_each(|column| start[*column as usize + 1] += 1);
    }
    for column in 1..start.len() {
        start[column] += start[column - 1];
    }
    let mut next = start.clone();
    let mut entries = vec![(0, 0); pattern.len()];
    for row in 0..pattern.rows() {
        for (place, column) in pattern.range(row).zip(pattern.row(row)) {
            let slot = &mut next[*column as usize];
            entries[*slot as usize] = (row as u32, place as u32);
            *slot += 1;
        }
    }
    (start, entries)
}

fn recipe(row: &Row) -> Recipe {
    match (row.role(), row.shape()) {
        (RowRole::Definition, _) => Recipe::Definition,
        (RowRole::Law, Shape::Linear(linear)) => Recipe::Linear(linear.constant),
        (RowRole::Law, Shape::Paired(paired)) => Recipe::Paired(paired.pairs.len()),
        (RowRole::Law, Shape::Property(fluid)) => Recipe::Property(*fluid),
        (RowRole::Law, Shape::General) => Recipe::Law,
    }
}

fn coefficients(row: &Row) -> Vec<f64> {
    match row.shape() {
        Shape::Linear(linear) => linear.coefficients.clone(),
        Shape::Paired(paired) => [paired.pairs.as_flattened(), &paired.coefficients].concat(),
        Shape::Property(_) | Shape::General => vec![0.0; row.variables().len()],
    }
}

/// One observed value of a variable.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Observation {
    /// The variable.
    pub variable: u32,
    /// Its observed value, SI.
    pub value: f64,
    /// Standard uncertainty, positive.
    pub sigma: f64,
    /// The part of it that is drawn anew each period, where known.
    pub repeat: Option<f64>,
}

/// What one balance knows: which variables are exact, and what was observed. The masks and weights of a balance are
/// nothing else.
#[derive(Clone, Debug, Default)]
pub struct Situation {
    /// For each variable the value it is fixed at, or nothing where it is free.
    pub exact: Vec<Option<f64>>,
    /// Observations; several may be of one variable.
    pub observations: Vec<Observation>,
}

impl Situation {
    /// Sum of the weights `1/sigma^2` on each variable, and their weighted mean.
    pub(crate) fn weights(&self) -> (Vec<f64>, Vec<f64>) {
        let mut weight = vec![0.0; self.exact.len()];
        let mut mean = vec![0.0; self.exact.len()];
        for observation in &self.observations {
            let w = observation.sigma.powi(-2);
            weight[observation.variable as usize] += w;
            mean[observation.variable as usize] += w * observation.value;
        }
        for (mean, weight) in mean.iter_mut().zip(&weight) {
            if *weight > 0.0 {
                *mean /= weight;
            }
        }
        (weight, mean)
    }

    /// Half of what the search for a balance minimises: `1/2 sum ((y - x)/sigma)^2`.
    pub(crate) fn objective(&self, x: &[f64]) -> f64 {
        let term = |o: &Observation| ((o.value - x[o.variable as usize]) / o.sigma).powi(2);
        0.5 * self.observations.iter().map(term).sum::<f64>()
    }
}
