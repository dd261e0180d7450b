//! What tests need to see of a solve's inside.

use super::evaluation::Evaluation;
use super::problem::{Problem, Situation};
use super::scaling::{Anchor, Scaling};
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
