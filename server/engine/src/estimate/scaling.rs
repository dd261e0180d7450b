//! Scales of variables and rows, and the anchor: the point a plant's balances start from.

use std::hash::{DefaultHasher, Hash, Hasher};

use crate::equation::Form;
use crate::equipment::{VariableData, VariableRole};

use super::evaluation::Evaluation;
use super::problem::Problem;

/// A state that closes the balances, near which the plant runs. Solves start from it, and analyses of structure are
/// made at it.
#[derive(Clone, Debug)]
pub struct Anchor {
    pub(crate) x: Vec<f64>,
    pub(crate) forms: Vec<Form>,
    /// Scale of each variable.
    pub(crate) scale: Vec<f64>,
    /// Weight of each variable there, `1/sigma^2`; analyses order weak meters by it.
    pub(crate) weight: Vec<f64>,
    pub(crate) id: u64,
}

impl Anchor {
    pub(crate) fn new(problem: &Problem, x: Vec<f64>, forms: Vec<Form>, weight: Vec<f64>) -> Self {
        let scale = scales(&problem.variables, &x);
        let mut hasher = DefaultHasher::new();
        x.iter().chain(&weight).for_each(|value| value.to_bits().hash(&mut hasher));
        Self { id: hasher.finish(), x, forms, scale, weight }
    }
}

/// Scales that make the problem's entries of order one.
pub(crate) struct Scaling {
    /// A variable is its scaled value times this.
    pub(crate) column: Vec<f64>,
    /// A row is multiplied by this.
    pub(crate) row: Vec<f64>,
    /// An entry of the Jacobian is multiplied by this.
    entry: Vec<f64>,
}

impl Scaling {
    /// Scales at a point: columns as given, rows to norm one.
    pub(crate) fn at(problem: &Problem, column: Vec<f64>, evaluation: &Evaluation) -> Self {
        let mut row = Vec::with_capacity(problem.rows.len());
        let mut entry = Vec::with_capacity(problem.pattern.len());
        for number in 0..problem.rows.len() {
            let slopes = &evaluation.jacobian[problem.pattern.range(number)];
            let scales = problem.pattern.row(number).iter().map(|c| column[*c as usize]);
            let norm =
                slopes.iter().zip(scales.clone()).map(|(slope, s)| (slope * s).abs()).fold(0.0, f64::max);
            let scale = if norm > 0.0 { 1.0 / norm } else { 1.0 };
            row.push(scale);
            entry.extend(scales.map(|s| s * scale));
        }
        Self { column, row, entry }
    }

    /// The scaled Jacobian.
    pub(crate) fn jacobian(&self, evaluation: &Evaluation, out: &mut Vec<f64>) {
        out.clear();
        out.extend(evaluation.jacobian.iter().zip(&self.entry).map(|(slope, scale)| slope * scale));
    }
}

/// Scale of each variable: flows by the plant's largest, pressures by themselves, temperatures by 100 K, enthalpies
/// by 1 MJ/kg, powers by the largest flow times that.
fn scales(variables: &[VariableData], x: &[f64]) -> Vec<f64> {
    let largest = |role: VariableRole| {
        let of_role = variables.iter().zip(x).filter(|(variable, _)| variable.role == role);
        of_role.map(|(_, value)| value.abs()).fold(0.0, f64::max)
    };
    let positive = |value: f64, otherwise: f64| if value > 0.0 { value } else { otherwise };
    let flow = positive(largest(VariableRole::MassFlow), 1.0);
    let power = positive(largest(VariableRole::Power), flow * ENTHALPY_SCALE);
    let scale = |(variable, value): (&VariableData, &f64)| match variable.role {
        VariableRole::MassFlow => flow,
        VariableRole::Pressure => positive(value.abs(), 1e5),
        VariableRole::Temperature => TEMPERATURE_SCALE,
        VariableRole::Enthalpy => ENTHALPY_SCALE,
        VariableRole::Power => power,
        VariableRole::Ratio => 1.0,
        VariableRole::Other => positive(value.abs(), 1.0),
    };
    variables.iter().zip(x).map(scale).collect()
}

const TEMPERATURE_SCALE: f64 = 100.0;
const ENTHALPY_SCALE: f64 = 1e6;
