//! Robust estimators of the balance: least loss instead of least squares.
//!
//! I. B. Tjoa and L. T. Biegler, "Simultaneous strategies for data reconciliation and gross error detection of nonlinear
//! systems", Comput. Chem. Eng. 15 (1991) 679-690; J. W. Tukey's and P. J. Huber's M-estimators by reweighted least squares
//! (A. E. Beaton and J. W. Tukey, Technometrics 16 (1974) 147-185, from memory).
//!
//! With weights `w` instead of ones, the deviations `e = (y - x) / sigma` that solve the linearised balance are those of
//! least squares moved by what the weights withdraw: `e = u + (1 - M) (1 - w) e`, `1 - M` being the covariance of the
//! balanced values in sigmas.

use nalgebra::{DMatrix, DVector};

use super::{Hypotheses, Level, TestsLeft};
use crate::search::Named;

/// Weight of a deviation, in sigmas: the derivative of the loss over the deviation.
pub(super) type Weight = fn(f64) -> f64;

/// Rounds of reweighting at most; most end within twenty.
const ROUNDS: usize = 200;
/// Deviations that move less than this, in sigmas, are found.
const SETTLED: f64 = 1e-10;
/// No reading's weight falls below this: a balance in which too many lose all weight would have no solution.
const LEAST_WEIGHT: f64 = 1e-6;

/// Deviations in sigmas that have the least loss, from a start.
pub(super) fn deviations(hypotheses: &Hypotheses, weight: Weight, start: &DVector<f64>) -> DVector<f64> {
    let count = start.len();
    let balanced = DMatrix::identity(count, count) - &hypotheses.information;
    let mut found = start.clone();
    for _ in 0..ROUNDS {
        let mut system = balanced.clone();
        for (mut column, deviation) in system.column_iter_mut().zip(found.iter()) {
            column *= weight(*deviation).max(LEAST_WEIGHT) - 1.0;
        }
        system += DMatrix::identity(count, count);
        let Some(next) = system.lu().solve(&hypotheses.score) else { break };
        let moved = (&next - &found).amax();
        found = next;
        if moved < SETTLED {
            break;
        }
    }
    found
}

/// Names the readings that deviate from a robust balance by more than the limit, in sigmas.
pub(super) fn names(hypotheses: &Hypotheses, level: Level, weight: Weight) -> Vec<Named> {
    let left = TestsLeft::of(hypotheses);
    let limit = level.limit(left.count());
    // A loss that isn't convex has several least values; that nearest to the one convex loss is taken.
    let start = deviations(hypotheses, super::fair::weight, &hypotheses.score);
    let found = deviations(hypotheses, weight, &start);
    let mut beyond: Vec<usize> =
        (0..found.len()).filter(|at| found[*at].abs() > limit && left.statistic(*at).is_some()).collect();
    beyond.sort_by(|a, b| found[*b].abs().total_cmp(&found[*a].abs()));
    beyond.into_iter().map(|at| Named { hypothesis: at as u16, alternatives: Vec::new() }).collect()
}
