//! A poor start made good: proximal Gauss-Newton steps that need no rank decisions.
//!
//! Every variable is held to where it is by a weak weight that fades, and every equation is softened a little, so that
//! the system is quasi-definite whatever the point looks like (equal enthalpies at a guessed start make equations
//! look dependent that aren't). What nothing determines stays near its guess.

use std::sync::Arc;

use crate::equation::Form;
use crate::kkt::{Analysis, Column, Diagonal, Factor, Vectors};

use super::bounds::longest;
use super::evaluation::Evaluation;
use super::failure::Failure;
use super::problem::{Problem, Situation};
use super::scaling::{Anchor, Scaling};
use super::solve::{Solution, solve_from};
use super::start::open_flows;
use super::step::Filter;

/// Where proximal steps end.
pub(super) struct Softened {
    pub(super) x: Vec<f64>,
    /// Scaled residual of each equation.
    pub(super) slack: Vec<f64>,
}

/// Softening that only keeps dependent equations apart.
const FAINT: f64 = 1e-10;
/// Steps of the proximal iteration.
const MOST_STEPS: usize = 80;
/// Steps smaller than this (scaled) end it.
const SMALL: f64 = 1e-6;
/// So does a damping that leaves no room to move.
const STRONGEST: f64 = 1e8;

/// Solves from a guess alone; answers also the anchor that later solves start from.
///
/// # Errors
/// [`Failure`].
pub fn solve_cold(
    problem: &Problem,
    situation: &Situation,
    guess: Vec<f64>,
    forms: Vec<Form>,
) -> Result<(Solution, Anchor), Failure> {
    let (weight, _) = situation.weights();
    let rough = Anchor::new(problem, guess, forms, weight);
    solve_near(problem, situation, &rough).or_else(|failure| {
        // A flow that no reading and no mass balance tells of can close an energy balance by ceasing. Approached with it
        // running, the equations leave it open unless something else determines it.
        let mut running = situation.clone();
        let open = open_flows(problem, situation);
        for flow in &open {
            running.exact[*flow as usize] = Some(rough.x[*flow as usize]);
        }
        if open.is_empty() {
            return Err(failure);
        }
        let Ok((_, anchor)) = solve_near(problem, &running, &rough) else { return Err(failure) };
        solve_at(problem, situation, &anchor).map_err(|_| failure)
    })
}

/// Solves from where proximal steps lead.
fn solve_near(
    problem: &Problem,
    situation: &Situation,
    rough: &Anchor,
) -> Result<(Solution, Anchor), Failure> {
    let near = proximal(problem, situation, &rough.scale, rough.x.clone(), &rough.forms, FAINT)?;
    solve_at(problem, situation, &Anchor::new(problem, near.x, rough.forms.clone(), rough.weight.clone()))
}

/// Solves from an anchor, and answers the one that the solution makes.
fn solve_at(
    problem: &Problem,
    situation: &Situation,
    anchor: &Anchor,
) -> Result<(Solution, Anchor), Failure> {
    let solution = solve_from(problem, situation, anchor, anchor.x.clone(), anchor.forms.clone())?;
    let anchor = Anchor::new(problem, solution.x.clone(), solution.forms.clone(), anchor.weight.clone());
    Ok((solution, anchor))
}

/// The state near a guess that closes the equations best.
pub(crate) fn onto_equations(
    problem: &Problem,
    situation: &Situation,
    guess: Vec<f64>,
    forms: &[Form],
) -> Vec<f64> {
    let (weight, _) = situation.weights();
    let rough = Anchor::new(problem, guess, forms.to_vec(), weight);
    let near = proximal(problem, situation, &rough.scale, rough.x.clone(), forms, FAINT);
    near.map_or(rough.x, |near| near.x)
}

/// Proximal steps from `x` with every equation softened by `softening`.
pub(super) fn proximal(
    problem: &Problem,
    situation: &Situation,
    scale: &[f64],
    mut x: Vec<f64>,
    forms: &[Form],
    softening: f64,
) -> Result<Softened, Failure> {
    let (weight, mean) = situation.weights();
    for (value, exact) in x.iter_mut().zip(&situation.exact) {
        *value = exact.unwrap_or(*value);
    }
    let mut here = Evaluation::default();
    here.at(problem, &x, forms).map_err(|error| Failure::no_value(problem, &error))?;
    let mut iterate = Iterate { problem, situation, forms, x, here, filter: Filter::default() };
    let mut strength = 1e-2;
    let mut values = Vec::new();
    let mut factor = None;
    let mut scaling = Scaling::at(problem, scale.to_vec(), &iterate.here);
    for step_number in 0..MOST_STEPS {
        if step_number % 8 == 0 {
            // Rows whose derivatives were small at a poor point are scaled anew as the point improves.
            scaling = Scaling::at(problem, scale.to_vec(), &iterate.here);
            iterate.filter = Filter::default();
            factor = None;
        }
        scaling.jacobian(&iterate.here, &mut values);
        let weights: Vec<f64> = weight.iter().zip(scale).map(|(w, s)| w * s * s).collect();
        let system = System { problem, situation, weights: &weights, values: &values, strength, softening };
        let Ok(mut ready) = system.factor(factor.take()) else {
            strength *= 10.0;
            if strength > STRONGEST {
                break;
            }
            continue;
        };
        let mut right = Vectors::zeros(ready.analysis());
        let mut step = Vectors::zeros(ready.analysis());
        for (j, slot) in right.columns.iter_mut().enumerate() {
            *slot = weight[j] * (mean[j] - iterate.x[j]) * scale[j];
        }
        for (i, slot) in right.rows.iter_mut().enumerate() {
            *slot = -iterate.here.residual[i] * scaling.row[i];
        }
        let solved = ready.solve(&right, &mut step);
        factor = Some(ready);
        if solved.is_err() || !step.columns.iter().all(|value| value.is_finite()) {
            strength *= 10.0;
            factor = None;
            continue;
        }
        let moved = iterate.advance(&scaling, &step.columns);
        let size = step.columns.iter().map(|value| value.abs()).fold(0.0, f64::max);
        if size < SMALL || strength > STRONGEST {
            break;
        } else if !moved {
            strength *= 10.0;
        } else {
            strength = (strength * 0.2).max(1e-9);
        }
    }
    let slack = iterate.here.residual.iter().zip(&scaling.row).map(|(c, s)| c * s).collect();
    Ok(Softened { x: iterate.x, slack })
}

/// One proximal system.
struct System<'a> {
    problem: &'a Problem,
    situation: &'a Situation,
    weights: &'a [f64],
    values: &'a [f64],
    strength: f64,
    softening: f64,
}

impl System<'_> {
    /// Factors it, with the pivots of the last one where they serve.
    fn factor(&self, old: Option<Factor<f64>>) -> Result<Factor<f64>, Failure> {
        let damping = vec![self.strength; self.weights.len()];
        let softening = vec![self.softening; self.problem.rows.len()];
        let diagonal = Diagonal { weights: self.weights, damping: &damping, softening: &softening };
        if let Some(mut factor) = old
            && factor.refactor(self.values, &diagonal).is_ok()
        {
            return Ok(factor);
        }
        let column = |(weight, exact): (&f64, &Option<f64>)| match exact {
            Some(_) => Column::Fixed,
            None => Column::Weighted(weight + self.strength),
        };
        let columns: Vec<Column> = self.weights.iter().zip(&self.situation.exact).map(column).collect();
        let numeric = |message: String| Failure::Numeric { message };
        let analysis = Analysis::softened(&self.problem.pattern, self.values, &columns)
            .map_err(|error| numeric(error.to_string()))?;
        let mut factor = Factor::new(Arc::new(analysis));
        factor.refactor(self.values, &diagonal).map_err(|error| numeric(error.to_string()))?;
        Ok(factor)
    }
}

/// Where proximal steps stand.
struct Iterate<'a> {
    problem: &'a Problem,
    situation: &'a Situation,
    forms: &'a [Form],
    x: Vec<f64>,
    here: Evaluation,
    filter: Filter,
}

impl Iterate<'_> {
    /// Moves along a step as far as the filter lets it; says whether it moved.
    fn advance(&mut self, scaling: &Scaling, step: &[f64]) -> bool {
        let now = self.measures(scaling);
        let from = self.x.clone();
        let (mut share, _) = longest(&self.problem.bounded, &from, step, scaling);
        for _ in 0..8 {
            for (j, value) in self.x.iter_mut().enumerate() {
                *value = from[j] + share * step[j] * scaling.column[j];
            }
            if self.here.at(self.problem, &self.x, self.forms).is_ok()
                && self.filter.accepts(self.measures(scaling), now)
            {
                self.filter.add(now);
                return true;
            }
            share *= 0.5;
        }
        self.x = from;
        // This point was accepted before, so that it has a value; the evaluation must be its own again.
        let _ = self.here.at(self.problem, &self.x, self.forms);
        false
    }

    /// Infeasibility and objective.
    fn measures(&self, scaling: &Scaling) -> (f64, f64) {
        let residuals = self.here.residual.iter().zip(&scaling.row);
        (residuals.map(|(c, s)| (c * s).abs()).sum(), self.situation.objective(&self.x))
    }
}
