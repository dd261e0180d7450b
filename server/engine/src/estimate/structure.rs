//! The structure that a solve stands on: made for its masks and forms, held against the solution, and linearised there.

use std::sync::Arc;

use crate::equation::Form;
use crate::kkt::{Analysis, Column, Diagonal, Factor, FactorError};

use super::bounds::Bounded;
use super::cache::{Key, Structure};
use super::evaluation::{Evaluation, NoValue};
use super::failure::Failure;
use super::linearisation::Linearisation;
use super::problem::{Problem, Situation};
use super::scaling::{Anchor, Scaling};
use super::solve::{Search, Solution};

/// So many variables that the equations hardly see are held before a search is given up.
const MOST_HELD: usize = 12;
/// Each equation closes to this much of its largest term.
const CLOSURE: f64 = 1e-9;

/// The problem linearised at any state, as if it were a solution.
///
/// # Errors
/// [`Failure`] where the rows have no value there.
pub(crate) fn linearised(
    problem: &Problem,
    situation: &Situation,
    x: Vec<f64>,
    forms: Vec<Form>,
) -> Result<Solution, Failure> {
    let (weight, _) = situation.weights();
    let anchor = Anchor::new(problem, x.clone(), forms.clone(), weight);
    let mut search = Search::new(problem, situation, &anchor, x, forms);
    let structure = search.structure(true)?;
    search.here.clone_from(&structure.evaluation);
    structure.scaling.jacobian(&search.here, &mut search.values);
    search.multipliers = vec![0.0; problem.rows()];
    let linearisation = search.linearise(structure)?;
    Ok(search.finish(linearisation))
}

impl Search<'_> {
    /// Holds pressures, temperatures and enthalpies whose uncertainty exceeds what they can span, one after the other, the
    /// worst first, because the next may be known once that is held. Says whether there was any.
    pub(super) fn hold_the_unseen(&mut self) -> Result<bool, Failure> {
        let before = self.held.len();
        while self.held.len() < before + MOST_HELD {
            let structure = self.structure(false)?;
            let Ok(inverse) = structure.factor.selected_inverse() else { break };
            let beyond = |bounded: &Bounded| {
                let j = bounded.variable() as usize;
                let sigma = inverse.variance(j).sqrt() * structure.scaling.column[j];
                (sigma / bounded.role().span(self.x[j]), bounded.variable())
            };
            let worst = self.problem.bounded.iter().map(beyond).max_by(|a, b| a.0.total_cmp(&b.0));
            let Some((_, variable)) = worst.filter(|(share, _)| *share > 1.0) else { break };
            self.held.push(variable);
        }
        Ok(self.held.len() > before)
    }

    /// The structure for the masks and forms at hand: the anchor's where it serves, else one of this point alone.
    pub(super) fn structure(&mut self, local: bool) -> Result<Arc<Structure>, Failure> {
        let columns: Vec<u8> = (0..self.x.len()).map(|j| self.column_kind(j)).collect();
        if local {
            return self.analyse(&columns, None);
        }
        let key = Key { anchor: self.anchor.id, columns, forms: self.forms.clone() };
        if let Some(found) = self.problem.cache.get(&key) {
            return Ok(found);
        }
        match self.analyse(&key.columns, Some(self.anchor)) {
            Ok(made) => {
                self.problem.cache.put(key, &made);
                Ok(made)
            }
            Err(_) => self.analyse(&key.columns, None),
        }
    }

    pub(super) fn column_kind(&self, variable: usize) -> u8 {
        let fixed = self.situation.exact[variable].is_some()
            || self.active.contains(variable as u32)
            || self.held.contains(&(variable as u32));
        match (fixed, self.weight[variable] > 0.0) {
            (true, _) => FIXED,
            (false, true) => WEIGHTED,
            (false, false) => FREE,
        }
    }

    /// Analyses the structure at the anchor, or at the point reached.
    fn analyse(&self, kinds: &[u8], anchor: Option<&Anchor>) -> Result<Arc<Structure>, Failure> {
        let point = anchor.map_or(&self.x, |anchor| &anchor.x);
        let mut evaluation = Evaluation::default();
        evaluation.at(self.problem, point, &self.forms).map_err(|error| self.no_value(&error))?;
        let scaling = Scaling::at(self.problem, self.anchor.scale.clone(), &evaluation);
        let mut values = Vec::new();
        scaling.jacobian(&evaluation, &mut values);
        let columns: Vec<Column> = kinds
            .iter()
            .enumerate()
            .map(|(j, kind)| match *kind {
                FIXED => Column::Fixed,
                FREE => Column::Free,
                _ => {
                    let of_anchor = anchor.map_or(0.0, |anchor| anchor.weight[j]);
                    let weight = if of_anchor > 0.0 { of_anchor } else { self.weight[j] };
                    Column::Weighted(weight * scaling.column[j].powi(2))
                }
            })
            .collect();
        let analysis = Analysis::new(&self.problem.pattern, &values, &columns)
            .map_err(|error| Failure::Numeric { message: error.to_string() })?;
        let analysis = Arc::new(analysis);
        let weights: Vec<f64> =
            columns.iter().map(|column| if let Column::Weighted(w) = column { *w } else { 0.0 }).collect();
        let mut factor = Factor::new(Arc::clone(&analysis));
        factor
            .refactor(&values, &Diagonal::new(&weights))
            .map_err(|error| Failure::Numeric { message: error.to_string() })?;
        Ok(Arc::new(Structure { analysis, scaling, factor, point: point.clone(), evaluation }))
    }

    pub(super) fn no_value(&self, error: &NoValue) -> Failure {
        Failure::no_value(self.problem, error)
    }

    /// Whether what the structure took for dependent is so at the solution: dropped rows close, and directions that
    /// nothing determines still change no equation.
    pub(super) fn structure_holds(&self, structure: &Structure) -> bool {
        let closes = self.here.worst(self.problem, &self.x).0 < CLOSURE;
        closes
            && structure.analysis.null_vectors().iter().all(|vector| self.is_null(structure, vector.column))
    }

    /// A held column that had no coefficients where the structure was analysed must have none here.
    fn is_null(&self, structure: &Structure, column: u32) -> bool {
        let vectors = structure.analysis.null_vectors();
        let Some(vector) = vectors.iter().find(|vector| vector.column == column) else { return true };
        if vector.parts.len() > 1 {
            return true;
        }
        let scaling = &structure.scaling;
        (0..self.problem.rows.len()).all(|row| {
            let range = self.problem.pattern.range(row);
            range.zip(self.problem.pattern.row(row)).all(|(place, other)| {
                let scaled = self.here.jacobian[place] * scaling.column[column as usize] * scaling.row[row];
                *other != column || scaled.abs() < 1e-9
            })
        })
    }

    /// The linearisation at the solution. Uncertainties ignore active bounds: with any, the structure is that without.
    pub(super) fn linearise(&mut self, structure: Arc<Structure>) -> Result<Linearisation, Failure> {
        let counted = (0..self.x.len()).filter(|j| self.column_kind(*j) == WEIGHTED).count();
        // Observations beyond what they determine: those that the structure counts once a variable, each of the others
        // on the same variable, and all of exact variables and of those at a bound.
        let degrees_of_freedom = (self.situation.observations.len()
            + structure.analysis.degrees_of_freedom())
        .saturating_sub(counted);
        let structure = if self.active.is_empty() {
            structure
        } else {
            let held = std::mem::take(&mut self.active);
            let columns: Vec<u8> = (0..self.x.len()).map(|j| self.column_kind(j)).collect();
            self.active = held;
            let free = self.analyse(&columns, None)?;
            free.scaling.jacobian(&self.here, &mut self.values);
            let rescale = structure.scaling.row.iter().zip(&free.scaling.row);
            for (multiplier, (old, new)) in self.multipliers.iter_mut().zip(rescale) {
                *multiplier *= old / new;
            }
            free
        };
        let undefined = self.here.undefined.iter().map(|row| self.problem.rows[*row as usize].variables()[0]);
        let unknown = undefined.chain(self.held.iter().copied()).collect();
        let numeric = |error: FactorError| Failure::Numeric { message: error.to_string() };
        let (values, multipliers) = (std::mem::take(&mut self.values), std::mem::take(&mut self.multipliers));
        let mut linear =
            Linearisation::new(structure, values, multipliers, self.situation, degrees_of_freedom, unknown)
                .map_err(numeric)?;
        for variable in &self.held {
            let span = self.problem.roles[*variable as usize].span(self.x[*variable as usize]);
            linear.doubt(self.problem, *variable, span).map_err(numeric)?;
        }
        Ok(linear)
    }
}

/// Which variables the null vectors of an analysis move.
pub(crate) fn undetermined(analysis: &Analysis, variables: usize) -> Vec<bool> {
    let mut moved = vec![false; variables];
    for vector in analysis.null_vectors() {
        let largest = vector.parts.iter().map(|(_, part)| part.abs()).fold(0.0, f64::max);
        for (column, part) in &vector.parts {
            moved[*column as usize] |= part.abs() > NULL_PART * largest;
        }
    }
    moved
}

/// A part of a null vector this small against its largest is rounding: ranks are clean, with a gap of nine decades.
const NULL_PART: f64 = 1e-9;

const FREE: u8 = 0;
const WEIGHTED: u8 = 1;
const FIXED: u8 = 2;
