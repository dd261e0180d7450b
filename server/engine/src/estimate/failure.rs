//! Why no balance was found, in terms a plant engineer can act on.

use crate::equation::Form;

use super::cold::proximal;
use super::evaluation::NoValue;
use super::problem::{Problem, Situation};
use super::scaling::Anchor;

/// Why a solve found nothing. Its words name equations and variables.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Failure {
    /// A law has no value where the solve had to start.
    #[error("`{row}` can't be evaluated at the starting point: {reason}")]
    NoValue {
        /// Name of the row.
        row: String,
        /// Why.
        reason: String,
    },
    /// The equations and readings pull apart.
    #[error("no state closes the balances near these readings; {}", pull(equations, observations))]
    Apart {
        /// Equations with the largest slacks when softened, worst first.
        equations: Vec<String>,
        /// Observed variables with the largest corrections and those corrections in sigmas, worst first.
        observations: Vec<(String, f64)>,
    },
    /// The linear algebra failed.
    #[error("the numbers defeat the solver: {message}")]
    Numeric {
        /// How.
        message: String,
    },
}

impl Failure {
    pub(super) fn no_value(problem: &Problem, error: &NoValue) -> Self {
        Self::NoValue { row: problem.rows[error.row].name().to_owned(), reason: error.error.to_string() }
    }
}

fn pull(equations: &[String], observations: &[(String, f64)]) -> String {
    let mut parts = Vec::new();
    if !equations.is_empty() {
        let quoted: Vec<String> = equations.iter().map(|name| format!("`{name}`")).collect();
        parts.push(format!("what closes worst when the equations are softened: {}", quoted.join(", ")));
    }
    if !observations.is_empty() {
        let named: Vec<String> =
            observations.iter().map(|(name, sigmas)| format!("`{name}` ({sigmas:.0} sigmas)")).collect();
        parts.push(format!("what would have to be corrected most: {}", named.join(", ")));
    }
    if parts.is_empty() { "the steps ended without a result".to_owned() } else { parts.join("; ") }
}

/// Equations and observations that are named at most.
const NAMED: usize = 4;
/// Softening of every scaled equation when a failure is explained.
const SOFTENING: f64 = 1e-4;

/// Softens every equation and says which then close worst and which observations are corrected most.
pub(super) fn explain(
    problem: &Problem,
    situation: &Situation,
    anchor: &Anchor,
    x: &[f64],
    forms: &[Form],
) -> Failure {
    let softened = match proximal(problem, situation, &anchor.scale, x.to_vec(), forms, SOFTENING) {
        Ok(softened) => softened,
        Err(failure) => return failure,
    };
    let mut equations: Vec<(f64, usize)> =
        softened.slack.iter().enumerate().map(|(row, slack)| (slack.abs(), row)).collect();
    equations.sort_by(|a, b| b.0.total_cmp(&a.0));
    let mut corrections: Vec<(f64, u32)> = situation
        .observations
        .iter()
        .map(|o| (((o.value - softened.x[o.variable as usize]) / o.sigma).abs(), o.variable))
        .collect();
    corrections.sort_by(|a, b| b.0.total_cmp(&a.0));
    let name = |row: usize| problem.rows[row].name().to_owned();
    Failure::Apart {
        equations: equations
            .iter()
            .take(NAMED)
            .filter(|(slack, _)| *slack > 1e-7)
            .map(|(_, row)| name(*row))
            .collect(),
        observations: corrections
            .iter()
            .take(NAMED)
            .filter(|(sigmas, _)| *sigmas > 2.0)
            .map(|(sigmas, variable)| (problem.variables[*variable as usize].name.clone(), *sigmas))
            .collect(),
    }
}
