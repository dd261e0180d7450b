//! The solve: Gauss-Newton steps on the equations' KKT system, a filter for the step, an active set for the bounds.

use crate::equation::Form;
use crate::kkt::{Diagonal, Factor, Vectors};

use super::bounds::{ActiveSet, Bounded, Side, blocked, longest};
use super::cache::Structure;
use super::evaluation::Evaluation;
use super::failure::{Failure, explain};
use super::linearisation::Linearisation;
use super::phases;
use super::problem::{Problem, Situation};
use super::scaling::{Anchor, Scaling};
use super::step::{Damping, Filter};
use super::structure::undetermined;

/// A state that closes every equation with the least sum of squares.
pub struct Solution {
    /// Value of every variable, SI.
    pub x: Vec<f64>,
    /// The formula each stream holds.
    pub forms: Vec<Form>,
    /// Steps it took.
    pub iterations: u32,
    /// Variables that lie at a bound.
    pub at_bound: Vec<u32>,
    /// Remarks on phases that were left where they are doubtful.
    pub remarks: Vec<String>,
    /// The problem linearised at the solution.
    pub linearisation: Linearisation,
}

/// Largest number of steps from one start.
const MOST_STEPS: u32 = 60;
/// Rounds of the active set and of phase changes together.
const MOST_ROUNDS: usize = 25;
/// Changes of phase that are tried.
const MOST_PHASE_CHANGES: usize = 5;
/// A solve has converged when the error left after its last step, extrapolated from the steps' ratio, is this much of
/// the larger of value and sigma.
const STEP_TOLERANCE: f64 = 1e-10;
/// A variable that cuts so many steps in a row short runs away.
const RUNAWAY: usize = 3;
/// After a step this large, in sigmas, the factor is made anew.
const STALE_STEP: f64 = 0.5;
/// So is it when steps shrink no faster than this.
const STALE_RATE: f64 = 0.05;
/// Steps onto the equations go on until they close to this.
const CLOSED_WELL: f64 = 1e-11;

/// Solves from an anchor.
///
/// # Errors
/// [`Failure`], which says what pulls apart.
pub fn solve(problem: &Problem, situation: &Situation, anchor: &Anchor) -> Result<Solution, Failure> {
    solve_from(problem, situation, anchor, anchor.x.clone(), anchor.forms.clone())
}

/// Solves from any start, with the scales and the structure of an anchor.
///
/// # Errors
/// [`Failure`], which says what pulls apart.
pub fn solve_from(
    problem: &Problem,
    situation: &Situation,
    anchor: &Anchor,
    start: Vec<f64>,
    forms: Vec<Form>,
) -> Result<Solution, Failure> {
    let mut search = Search::new(problem, situation, anchor, start, forms);
    let mut best = search.solve_phase()?;
    for _ in 0..MOST_PHASE_CHANGES {
        let Some((x, forms)) = phases::changed(problem, &best.x, &best.forms, best.linearisation.touched())
        else {
            break;
        };
        let mut again = Search::new(problem, situation, anchor, x, forms);
        match again.solve_phase() {
            Ok(other)
                if situation.objective(&other.x) <= situation.objective(&best.x) * (1.0 + 1e-9) + 1e-9 =>
            {
                let iterations = best.iterations;
                best = other;
                best.iterations += iterations;
            }
            _ => break,
        }
    }
    best.remarks = phases::remarks(problem, &best.x, &best.forms, best.linearisation.touched());
    Ok(best)
}

/// One search for a solution with the forms held.
pub(super) struct Search<'a> {
    pub(super) problem: &'a Problem,
    pub(super) situation: &'a Situation,
    pub(super) anchor: &'a Anchor,
    pub(super) weight: Vec<f64>,
    pub(super) mean: Vec<f64>,
    pub(super) x: Vec<f64>,
    pub(super) forms: Vec<Form>,
    pub(super) active: ActiveSet,
    /// Where the search began.
    pub(super) start: Vec<f64>,
    /// Variables that ran away and are held where they began: what the equations hardly see can't be known, and must
    /// not disturb the rest.
    pub(super) held: Vec<u32>,
    pub(super) here: Evaluation,
    /// Scaled derivatives of the equations at the point reached.
    pub(super) values: Vec<f64>,
    /// Scaled multipliers of the equations.
    pub(super) multipliers: Vec<f64>,
    pub(super) iterations: u32,
}

/// Why one structure didn't lead to a solution.
enum Trouble<'a> {
    /// The pivots or ranks found at the anchor don't suit the point reached.
    Structure,
    /// A pressure or temperature ran into its limit.
    Blocked(&'a Bounded, Side),
    /// A pressure, temperature or enthalpy that the equations hardly see runs away.
    Runaway(u32),
    /// It can't go on.
    Stuck,
}

impl<'a> Search<'a> {
    pub(super) fn new(
        problem: &'a Problem,
        situation: &'a Situation,
        anchor: &'a Anchor,
        mut x: Vec<f64>,
        forms: Vec<Form>,
    ) -> Self {
        for (value, exact) in x.iter_mut().zip(&situation.exact) {
            if let Some(exact) = exact {
                *value = *exact;
            }
        }
        let (weight, mean) = situation.weights();
        let (active, here, values) = (ActiveSet::default(), Evaluation::default(), Vec::new());
        Self {
            problem,
            situation,
            anchor,
            weight,
            mean,
            start: x.clone(),
            x,
            forms,
            active,
            held: Vec::new(),
            here,
            values,
            multipliers: Vec::new(),
            iterations: 0,
        }
    }

    /// Rounds of solving; where they fail, once more with what the equations hardly see held where the search began.
    fn solve_phase(&mut self) -> Result<Solution, Failure> {
        let failure = match self.rounds() {
            Ok(solution) => return Ok(solution),
            Err(failure) => failure,
        };
        self.active = ActiveSet::default();
        self.x.clone_from(&self.start);
        if self.hold_the_unseen()? { self.rounds() } else { Err(failure) }
    }

    /// Rounds of solving and of mending the active set.
    fn rounds(&mut self) -> Result<Solution, Failure> {
        let mut local = false;
        for round in 0..MOST_ROUNDS {
            let structure = self.structure(local)?;
            match self.converge(&structure) {
                Ok(()) => {
                    let gradient: Vec<f64> = self.pull(&structure.scaling).iter().map(|pull| -pull).collect();
                    let undetermined = undetermined(&structure.analysis, self.x.len());
                    if self.active.update(&self.problem.bounded, &mut self.x, &gradient, &undetermined, round)
                    {
                        continue;
                    }
                    if self.structure_holds(&structure)
                        && let Ok(linearisation) = self.linearise(structure)
                    {
                        return Ok(self.finish(linearisation));
                    }
                    if local {
                        break;
                    }
                    local = true;
                }
                Err(Trouble::Blocked(bounds, side)) => self.active.block(bounds, &mut self.x, side),
                Err(Trouble::Runaway(variable)) => {
                    self.x.clone_from(&self.start);
                    self.held.push(variable);
                }
                Err(Trouble::Structure) if !local => local = true,
                Err(Trouble::Structure | Trouble::Stuck) => break,
            }
        }
        Err(explain(self.problem, self.situation, self.anchor, &self.x, &self.forms))
    }

    /// Steps until they vanish. Each solves the conditions of the least sum of squares, linearised, for increments of
    /// the variables and of the multipliers, so that a factor made a step earlier, or at the anchor, slows the steps
    /// down a little and moves the answer not at all.
    fn converge(&mut self, structure: &Structure) -> Result<(), Trouble<'a>> {
        let scaling = &structure.scaling;
        let mut factor = structure.factor.clone();
        let mut fresh = false;
        let mut renew = false;
        let mut right = Vectors::zeros(&structure.analysis);
        let mut step = Vectors::zeros(&structure.analysis);
        let weights: Vec<f64> = self.weight.iter().zip(&scaling.column).map(|(w, s)| w * s * s).collect();
        let units = self.units(scaling);
        let mut damping = Damping::default();
        let mut filter = Filter::default();
        let mut previous = f64::NAN;
        let mut running = (None, 0);
        self.multipliers.clear();
        self.multipliers.resize(self.problem.rows.len(), 0.0);
        self.start(structure)?;
        scaling.jacobian(&self.here, &mut self.values);
        for _ in 0..MOST_STEPS {
            self.iterations += 1;
            if renew {
                let damped = damping.columns(&self.x);
                let diagonal = Diagonal { weights: &weights, damping: &damped, softening: &[] };
                factor.refactor(&self.values, &diagonal).map_err(|_| Trouble::Structure)?;
                fresh = true;
            }
            right.columns.copy_from_slice(&self.pull(scaling));
            for (slot, (residual, scale)) in
                right.rows.iter_mut().zip(self.here.residual.iter().zip(&scaling.row))
            {
                *slot = -residual * scale;
            }
            factor.solve(&right, &mut step).map_err(|_| Trouble::Structure)?;
            if !step.columns.iter().all(|value| value.is_finite()) {
                return Err(Trouble::Structure);
            }
            let (size, relative) = self.step_size(scaling, &step.columns, &units);
            if let Some((bounds, side)) = blocked(&self.problem.bounded, &self.x, &step.columns, scaling) {
                return Err(Trouble::Blocked(bounds, side));
            }
            let Some((share, capped)) = self.advance(scaling, &step, size, &mut filter) else {
                if fresh && !damping.raise() {
                    return Err(Trouble::Stuck);
                }
                renew = true;
                continue;
            };
            if let Some(variable) = capped {
                running = if running.0 == Some(variable) {
                    (Some(variable), running.1 + 1)
                } else {
                    (Some(variable), 1)
                };
                if running.1 > RUNAWAY && share < 0.5 && self.weight[variable as usize] == 0.0 {
                    return Err(Trouble::Runaway(variable));
                }
            }
            scaling.jacobian(&self.here, &mut self.values);
            let rate = if previous.is_finite() { (size / previous).min(1.0) } else { 1.0 };
            if damping.is_zero() && relative * rate < STEP_TOLERANCE {
                return self.close(scaling, &mut factor, &mut right, &mut step);
            }
            renew = size > STALE_STEP || rate > STALE_RATE && previous.is_finite() || damping.lower();
            fresh = false;
            previous = size;
        }
        Err(Trouble::Stuck)
    }

    /// The evaluation at the start: the structure's own where it was made at the same point.
    fn start(&mut self, structure: &Structure) -> Result<(), Trouble<'a>> {
        if structure.point == self.x {
            self.here.clone_from(&structure.evaluation);
            return Ok(());
        }
        self.here.at(self.problem, &self.x, &self.forms).map_err(|_| Trouble::Stuck)
    }

    /// What pulls at each variable, scaled: the readings against the multipliers of the equations. It vanishes for
    /// free variables at the solution; for a fixed one it says what its bound or exact value holds back.
    fn pull(&self, scaling: &Scaling) -> Vec<f64> {
        let reading = |j: usize| self.weight[j] * (self.mean[j] - self.x[j]) * scaling.column[j];
        let mut pull: Vec<f64> = (0..self.x.len()).map(reading).collect();
        for (row, multiplier) in
            self.multipliers.iter().enumerate().filter(|(_, multiplier)| **multiplier != 0.0)
        {
            let range = self.problem.pattern.range(row);
            for (value, column) in self.values[range].iter().zip(self.problem.pattern.row(row)) {
                pull[*column as usize] -= value * multiplier;
            }
        }
        pull
    }

    /// What a step is measured in: sigmas where observed and thousandths of the scale elsewhere. What is only defined
    /// follows at the end and doesn't count.
    fn units(&self, scaling: &Scaling) -> Vec<f64> {
        let unit =
            |((only_defined, weight), scale): ((&bool, &f64), &f64)| match (only_defined, *weight > 0.0) {
                (true, _) => f64::INFINITY,
                (false, true) => weight.sqrt().recip(),
                (false, false) => 1e-3 * scale,
            };
        self.problem.only_defined.iter().zip(&self.weight).zip(&scaling.column).map(unit).collect()
    }

    /// Largest component of a step in its unit; and relative to the larger of value and unit.
    fn step_size(&self, scaling: &Scaling, step: &[f64], units: &[f64]) -> (f64, f64) {
        let (mut size, mut relative) = (0.0_f64, 0.0_f64);
        for (((change, scale), unit), x) in step.iter().zip(&scaling.column).zip(units).zip(&self.x) {
            let moved = change.abs() * scale;
            size = size.max(moved / unit);
            relative = relative.max(moved / unit.max(x.abs()));
        }
        (size, relative)
    }

    /// Moves along a step as far as the filter lets it; tells the longest share that caps allowed and the variable that
    /// set it, or nothing where it didn't move.
    fn advance(
        &mut self,
        scaling: &Scaling,
        step: &Vectors<f64>,
        size: f64,
        filter: &mut Filter,
    ) -> Option<(f64, Option<u32>)> {
        let now = (self.infeasibility(scaling), self.situation.objective(&self.x));
        let from = self.x.clone();
        let allowed = longest(&self.problem.bounded, &from, &step.columns, scaling);
        let mut share = allowed.0;
        for _ in 0..9 {
            for (j, value) in self.x.iter_mut().enumerate() {
                *value = from[j] + share * step.columns[j] * scaling.column[j];
            }
            if self.here.laws_at(self.problem, &self.x, &self.forms).is_ok() {
                let then = (self.infeasibility(scaling), self.situation.objective(&self.x));
                if size < 1e-2 || filter.accepts(then, now) {
                    filter.add(now);
                    for (multiplier, change) in self.multipliers.iter_mut().zip(&step.rows) {
                        *multiplier += share * change;
                    }
                    return Some(allowed);
                }
            }
            share *= 0.5;
        }
        self.x = from;
        // This point was accepted before, so that it has a value; the evaluation must be its own again.
        let _ = self.here.laws_at(self.problem, &self.x, &self.forms);
        None
    }

    fn infeasibility(&self, scaling: &Scaling) -> f64 {
        self.here.residual.iter().zip(&scaling.row).map(|(c, s)| (c * s).abs()).sum()
    }

    /// Steps onto the equations alone, then gives definitions their values.
    fn close(
        &mut self,
        scaling: &Scaling,
        factor: &mut Factor<f64>,
        right: &mut Vectors<f64>,
        step: &mut Vectors<f64>,
    ) -> Result<(), Trouble<'a>> {
        right.columns.fill(0.0);
        for _ in 0..3 {
            if self.here.worst(self.problem, &self.x).0 < CLOSED_WELL {
                break;
            }
            for (slot, (residual, scale)) in
                right.rows.iter_mut().zip(self.here.residual.iter().zip(&scaling.row))
            {
                *slot = -residual * scale;
            }
            factor.solve(right, step).map_err(|_| Trouble::Structure)?;
            for (value, (change, scale)) in self.x.iter_mut().zip(step.columns.iter().zip(&scaling.column)) {
                *value += change * scale;
            }
            self.here.laws_at(self.problem, &self.x, &self.forms).map_err(|_| Trouble::Stuck)?;
        }
        self.here.define(self.problem, &mut self.x, &self.forms).map_err(|_| Trouble::Stuck)?;
        scaling.jacobian(&self.here, &mut self.values);
        Ok(())
    }

    pub(super) fn finish(&mut self, linearisation: Linearisation) -> Solution {
        Solution {
            x: std::mem::take(&mut self.x),
            forms: std::mem::take(&mut self.forms),
            iterations: self.iterations,
            at_bound: self.active.variables(),
            remarks: Vec::new(),
            linearisation,
        }
    }
}
