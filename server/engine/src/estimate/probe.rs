//! What tests need to see of a solve's inside.

use super::evaluation::Evaluation;
use super::problem::{Problem, Recipe, Situation};
use super::scaling::{Anchor, Scaling};
use crate::equation::Form;
use crate::kkt::Column;

pub(crate) use super::structure::undetermined;

/// The scaled derivatives of all rows at an anchor, and how each variable takes part.
pub(crate) fn linearised(
    problem: &Problem,
    situation: &Situation,
    anchor: &Anchor,
) -> (Vec<f64>, Vec<Column>) {
    let mut here = Evaluation::default();
    here.at(problem, &anchor.x, &anchor.forms).unwrap();
    let scaling = Scaling::at(problem, anchor.scale.clone(), &here);
    let mut values = Vec::new();
    scaling.jacobian(&here, &mut values);
    let (weight, _) = situation.weights();
    let column = |j: usize| match (situation.exact[j], weight[j] > 0.0) {
        (Some(_), _) => Column::Fixed,
        (None, true) => Column::Weighted(weight[j] * scaling.column[j].powi(2)),
        (None, false) => Column::Free,
    };
    (values, (0..weight.len()).map(column).collect())
}

/// Residuals and derivatives of the laws by each row's own equation, and by the recipes that solves use; those of
/// definitions are zero.
pub(crate) fn evaluated(problem: &Problem, x: &[f64], forms: &[Form]) -> [(Vec<f64>, Vec<f64>); 2] {
    let mut whole = Evaluation::default();
    whole.at(problem, x, forms).unwrap();
    let mut laws = whole.clone();
    // What isn't overwritten shows.
    laws.residual.fill(f64::NAN);
    for (number, recipe) in problem.recipes.iter().enumerate() {
        let range = problem.pattern.range(number);
        match recipe {
            Recipe::Linear(_) => {}
            Recipe::Definition => {
                whole.residual[number] = 0.0;
                whole.jacobian[range.clone()].fill(0.0);
                laws.jacobian[range].fill(0.0);
            }
            Recipe::Paired(_) | Recipe::Property(_) | Recipe::Law => laws.jacobian[range].fill(f64::NAN),
        }
    }
    laws.laws_at(problem, x, forms).unwrap();
    [(whole.residual, whole.jacobian), (laws.residual, laws.jacobian)]
}
