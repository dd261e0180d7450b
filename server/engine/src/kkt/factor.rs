//! The numeric work of one linearisation: block LDL' along the tape, and solves with it.

use std::sync::Arc;

use meterwright_thermo::{Dual, Scalar};
use thiserror::Error;

use super::analysis::{ABSENT, Analysis};
use super::tape::Kind;

/// Why a matrix couldn't be factored or a system not be solved.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum FactorError {
    /// A pivot became too small, took the wrong sign or isn't finite: the pivots chosen by the analysis don't suit these
    /// numbers, and the problem must be analysed anew.
    #[error("the pivot of {pivot} is unusable with these numbers")]
    Pivot {
        /// Where it stands.
        pivot: PivotPlace,
    },
    /// An array doesn't have the length that the analysis asks for.
    #[error("{what} has {found} elements where the analysis asks for {expected}")]
    Length {
        /// Which array.
        what: &'static str,
        /// Its length.
        found: usize,
        /// The length asked for.
        expected: usize,
    },
    /// There is no factor: nothing was factored yet, or the last attempt failed.
    #[error("there is no factor to solve with")]
    Unfactored,
}

/// The column, the row, or the pair of both that a pivot belongs to, in the caller's numbering.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct PivotPlace {
    /// The variable.
    pub column: Option<u32>,
    /// The equation.
    pub row: Option<u32>,
}

impl std::fmt::Display for PivotPlace {
    fn fmt(&self, formatter: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match (self.column, self.row) {
            (Some(column), Some(row)) => write!(formatter, "column {column} with row {row}"),
            (Some(column), None) => write!(formatter, "column {column}"),
            (None, Some(row)) => write!(formatter, "row {row}"),
            (None, None) => write!(formatter, "nothing"),
        }
    }
}

/// The diagonal blocks of a matrix besides its coefficients.
#[derive(Clone, Copy, Debug)]
pub struct Diagonal<'a, S> {
    /// The weight of every column; those of free columns are zero, those of columns out of the system aren't read.
    pub weights: &'a [S],
    /// Damping of every column, not negative; empty for none.
    pub damping: &'a [f64],
    /// Softening of every row, not negative; empty for none.
    pub softening: &'a [f64],
}

impl<'a, S> Diagonal<'a, S> {
    /// Weights alone.
    pub fn new(weights: &'a [S]) -> Self {
        Self { weights, damping: &[], softening: &[] }
    }
}

/// A factor and the workspace for making it and solving with it, allocated when first needed and then kept.
#[derive(Clone, Debug)]
pub struct Factor<S> {
    pub(super) analysis: Arc<Analysis>,
    /// Inverse pivot blocks and multipliers, as the tape lays them out.
    pub(super) storage: Vec<S>,
    ready: bool,
    /// The matrix itself, for true residuals: its diagonal by position and the coefficients that take part.
    pub(super) diagonal: Vec<S>,
    pub(super) coefficients: Vec<f64>,
    pub(super) work: Vec<S>,
    pub(super) correction: Vec<S>,
    /// Per equation of the system, the sum of its terms' magnitudes and of its coefficients' for a residual.
    pub(super) bound: Vec<[f64; 2]>,
}

impl<S: Scalar> Factor<S> {
    /// A factor that follows an analysis, to be made by [`Factor::refactor`].
    pub fn new(analysis: Arc<Analysis>) -> Self {
        Self {
            storage: Vec::new(),
            ready: false,
            diagonal: Vec::new(),
            coefficients: Vec::new(),
            work: Vec::new(),
            correction: Vec::new(),
            bound: Vec::new(),
            analysis,
        }
    }

    /// The analysis that the factor follows.
    pub fn analysis(&self) -> &Arc<Analysis> {
        &self.analysis
    }

    /// Factors the matrix with these coefficients and this diagonal.
    ///
    /// # Errors
    /// [`FactorError::Pivot`] when the pivots of the analysis don't suit these numbers, [`FactorError::Length`] when a
    /// length is wrong.
    pub fn refactor(&mut self, values: &[f64], diagonal: &Diagonal<'_, S>) -> Result<(), FactorError> {
        self.ready = false;
        self.load(values, diagonal)?;
        self.eliminate()?;
        self.ready = true;
        Ok(())
    }

    /// Refuses when there is no factor.
    pub(super) fn check_ready(&self) -> Result<(), FactorError> {
        if self.ready { Ok(()) } else { Err(FactorError::Unfactored) }
    }

    /// Spreads the matrix over the storage.
    fn load(&mut self, values: &[f64], diagonal: &Diagonal<'_, S>) -> Result<(), FactorError> {
        let analysis = &*self.analysis;
        check_length("values", values.len(), analysis.coefficients)?;
        check_length("weights", diagonal.weights.len(), analysis.columns)?;
        if !diagonal.damping.is_empty() {
            check_length("damping", diagonal.damping.len(), analysis.columns)?;
        }
        if !diagonal.softening.is_empty() {
            check_length("softening", diagonal.softening.len(), analysis.rows)?;
        }
        self.storage.clear();
        self.storage.resize(analysis.tape.stored, S::constant(0.0));
        self.diagonal.resize(analysis.diagonal.len(), S::constant(0.0));
        self.coefficients.clear();
        self.coefficients.extend(analysis.entries.iter().map(|place| values[place.source as usize]));
        for (place, value) in analysis.entries.iter().zip(&self.coefficients) {
            self.storage[place.storage as usize] = S::constant(*value);
        }
        for (&position, weight) in analysis.column_position.iter().zip(diagonal.weights) {
            if position != ABSENT {
                self.diagonal[position as usize] = *weight;
            }
        }
        for (&position, damping) in analysis.column_position.iter().zip(diagonal.damping) {
            if position != ABSENT {
                self.diagonal[position as usize] += S::constant(*damping);
            }
        }
        for (row, &position) in analysis.row_position.iter().enumerate() {
            if position != ABSENT {
                let softening = diagonal.softening.get(row).copied().unwrap_or(0.0);
                self.diagonal[position as usize] = S::constant(-softening);
            }
        }
        for (&place, value) in analysis.diagonal.iter().zip(&self.diagonal) {
            self.storage[place as usize] = *value;
        }
        Ok(())
    }

    /// Walks the tape forwards.
    fn eliminate(&mut self) -> Result<(), FactorError> {
        let analysis = Arc::clone(&self.analysis);
        let mut tape = &analysis.tape.destination[..];
        let mut storage = &mut self.storage[..];
        for step in &analysis.tape.steps {
            let (block, tail) = storage.split_at_mut(step.stored());
            let (destinations, rest) = tape.split_at(step.updates());
            let own = &self.diagonal[step.position as usize..];
            let usable = match step.kind {
                Kind::Variable => {
                    raise(&mut block[0], own[0]);
                    block[0].value() > 0.0 && eliminate_single(block, tail, destinations)
                }
                Kind::Equation => {
                    lower(&mut block[0], own[0]);
                    block[0].value() < 0.0 && eliminate_single(block, tail, destinations)
                }
                Kind::Pair(floor) => {
                    raise(&mut block[0], own[0]);
                    lower(&mut block[2], own[1]);
                    eliminate_pair(block, tail, destinations, floor)
                }
            };
            if !usable {
                return Err(FactorError::Pivot { pivot: analysis.place(step.position, step.width()) });
            }
            storage = tail;
            tape = rest;
        }
        Ok(())
    }
}

impl<const N: usize> Factor<Dual<N>> {
    /// The same factor in plain numbers.
    pub fn real(&self) -> Factor<f64> {
        let real = |numbers: &[Dual<N>]| numbers.iter().map(|number| number.re).collect();
        Factor {
            analysis: Arc::clone(&self.analysis),
            storage: real(&self.storage),
            ready: self.ready,
            diagonal: real(&self.diagonal),
            coefficients: self.coefficients.clone(),
            work: Vec::new(),
            correction: Vec::new(),
            bound: Vec::new(),
        }
    }
}

impl Analysis {
    /// The caller's names of a pivot.
    fn place(&self, position: u32, width: usize) -> PivotPlace {
        let inside = |place: &u32| (position..position + width as u32).contains(place);
        let column = self.column_position.iter().position(inside).map(|column| column as u32);
        let row = self.row_position.iter().position(inside).map(|row| row as u32);
        PivotPlace { column, row }
    }
}

pub(super) fn check_length(what: &'static str, found: usize, expected: usize) -> Result<(), FactorError> {
    if found == expected { Ok(()) } else { Err(FactorError::Length { what, found, expected }) }
}

/// The diagonal of a variable is its own weight plus something that isn't negative, whatever was eliminated before: a
/// smaller one is rounding.
fn raise<S: Scalar>(diagonal: &mut S, own: S) {
    if diagonal.value() < own.value() {
        *diagonal = own;
    }
}

/// The same for an equation, whose diagonal is its own softening and what isn't positive.
fn lower<S: Scalar>(diagonal: &mut S, own: S) {
    if diagonal.value() > own.value() {
        *diagonal = own;
    }
}

/// Eliminates one node: turns its block into the inverse pivot and the multipliers, and subtracts the outer product
/// from what comes later. False when the pivot isn't finite.
#[inline]
fn eliminate_single<S: Scalar>(block: &mut [S], tail: &mut [S], destinations: &[u32]) -> bool {
    let Some((head, mut panel)) = block.split_first_mut() else { return false };
    let inverse = S::constant(1.0) / *head;
    *head = inverse;
    let mut destinations = destinations;
    while let Some((first, others)) = panel.split_first_mut() {
        let multiplier = *first * inverse;
        let (own, run) = destinations.split_at(1);
        tail[own[0] as usize] -= multiplier * *first;
        let (run, rest) = run.split_at(others.len());
        for (&destination, value) in run.iter().zip(&*others) {
            tail[destination as usize] -= multiplier * *value;
        }
        *first = multiplier;
        destinations = rest;
        panel = others;
    }
    inverse.value().is_finite() && inverse.value() != 0.0
}

/// Eliminates a variable with its equation. False when the determinant isn't negative, finite and above the floor.
#[inline]
fn eliminate_pair<S: Scalar>(block: &mut [S], tail: &mut [S], destinations: &[u32], floor: f64) -> bool {
    let Some((head, panel)) = block.split_first_chunk_mut::<3>() else { return false };
    let [h, c, e] = *head;
    let determinant = h * e - c * c;
    if !(-determinant.value() > floor && determinant.value().is_finite()) {
        return false;
    }
    let inverse = S::constant(1.0) / determinant;
    let (i00, i10, i11) = (e * inverse, -(c * inverse), h * inverse);
    *head = [i00, i10, i11];
    let (mut panel, _) = panel.as_chunks_mut::<2>();
    let mut destinations = destinations;
    while let Some((first, others)) = panel.split_first_mut() {
        let [a, b] = *first;
        let (left, right) = (i00 * a + i10 * b, i10 * a + i11 * b);
        let (own, run) = destinations.split_at(1);
        tail[own[0] as usize] -= left * a + right * b;
        let (run, rest) = run.split_at(others.len());
        for (&destination, [a, b]) in run.iter().zip(&*others) {
            tail[destination as usize] -= left * *a + right * *b;
        }
        *first = [left, right];
        destinations = rest;
        panel = others;
    }
    true
}
