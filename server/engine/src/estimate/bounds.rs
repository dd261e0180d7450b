//! Bounds by an active set: a variable at its bound is fixed there until its multiplier says it wants to leave.
//!
//! Flows and qualities may stray outside while a solve runs, since every equation has a value there; the set is
//! mended after each convergence from the violations and the signs of the multipliers (the primal-dual active set
//! method: M. Hintermüller, K. Ito, K. Kunisch, SIAM J. Optim. 13 (2002) 865-888). Pressures and temperatures stop
//! at their limits, beyond which properties have no value.

use crate::equipment::{VariableData, VariableRole};
use crate::kkt::Vectors;

use super::scaling::Scaling;

/// Which bound.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Side {
    Lower,
    Upper,
}

/// Variables that are held at a bound.
#[derive(Clone, Debug, Default)]
pub(super) struct ActiveSet {
    held: Vec<(u32, Side)>,
}

/// After so many rounds only the worst violation or multiplier is mended at a time, which can't cycle for long.
const ALL_AT_ONCE: usize = 6;

impl ActiveSet {
    pub(super) fn contains(&self, variable: u32) -> bool {
        self.held.iter().any(|(held, _)| *held == variable)
    }

    pub(super) fn is_empty(&self) -> bool {
        self.held.is_empty()
    }

    /// The variables, in ascending order.
    pub(super) fn variables(&self) -> Vec<u32> {
        let mut variables: Vec<u32> = self.held.iter().map(|(variable, _)| *variable).collect();
        variables.sort_unstable();
        variables
    }

    /// Holds a variable at its bound.
    pub(super) fn block(&mut self, data: &[VariableData], x: &mut [f64], variable: u32, side: Side) {
        let bounds = &data[variable as usize];
        x[variable as usize] = if side == Side::Lower { bounds.lower } else { bounds.upper };
        if !self.contains(variable) {
            self.held.push((variable, side));
        }
    }

    /// Adds what violates its bound and releases what pulls away from it; says whether anything changed. What nothing
    /// determines may lie anywhere: its value is never told, and pulling it to a bound would disturb what is known.
    pub(super) fn update(
        &mut self,
        data: &[VariableData],
        x: &mut [f64],
        gradient: &[f64],
        undetermined: &[bool],
        round: usize,
    ) -> bool {
        let mut changes: Vec<(f64, u32, Option<Side>)> = Vec::new();
        for (j, bounds) in data.iter().enumerate().filter(|(j, _)| !undetermined[*j]) {
            let tolerance = 1e-12 * (1.0 + x[j].abs());
            if x[j] < bounds.lower - tolerance {
                changes.push((bounds.lower - x[j], j as u32, Some(Side::Lower)));
            } else if x[j] > bounds.upper + tolerance {
                changes.push((x[j] - bounds.upper, j as u32, Some(Side::Upper)));
            }
        }
        for (variable, side) in &self.held {
            let pull = gradient[*variable as usize] * if *side == Side::Lower { -1.0 } else { 1.0 };
            if pull > 1e-9 {
                changes.push((pull, *variable, None));
            }
        }
        if round >= ALL_AT_ONCE {
            changes.sort_by(|a, b| b.0.total_cmp(&a.0));
            changes.truncate(1);
        }
        for (_, variable, side) in &changes {
            match side {
                Some(side) => self.block(data, x, *variable, *side),
                None => self.held.retain(|(held, _)| held != variable),
            }
        }
        !changes.is_empty()
    }
}

/// The pressure or temperature that stands at its limit and is pushed beyond it by a step.
pub(super) fn blocked(
    data: &[VariableData],
    x: &[f64],
    step: &Vectors<f64>,
    scaling: &Scaling,
) -> Option<(u32, Side)> {
    (0..data.len()).filter(|j| is_hard(&data[*j]) && step.columns[*j] != 0.0).find_map(|j| {
        let moved = step.columns[j] * scaling.column[j];
        let near = 1e-3 * (1.0 + x[j].abs());
        if x[j] + moved < data[j].lower && x[j] - data[j].lower < near {
            Some((j as u32, Side::Lower))
        } else if x[j] + moved > data[j].upper && data[j].upper - x[j] < near {
            Some((j as u32, Side::Upper))
        } else {
            None
        }
    })
}

/// Beyond the bounds of a pressure or temperature the properties have no value.
fn is_hard(data: &VariableData) -> bool {
    matches!(data.role, VariableRole::Pressure | VariableRole::Temperature)
}

/// The longest share of a step, at most one, that moves no pressure by more than half of itself, no temperature by
/// more than 60 K, no enthalpy by more than 0.6 MJ/kg, and none of them nearer to its limit than a tenth of the way; and
/// the variable that sets it.
pub(super) fn longest(
    data: &[VariableData],
    x: &[f64],
    step: &[f64],
    scaling: &Scaling,
) -> (f64, Option<u32>) {
    let (mut share, mut by) = (1.0_f64, None);
    for (j, variable) in data.iter().enumerate() {
        let cap = match variable.role {
            VariableRole::Pressure => 0.5 * x[j].abs(),
            VariableRole::Temperature => 60.0,
            VariableRole::Enthalpy => 6e5,
            _ => continue,
        };
        let moved = step[j] * scaling.column[j];
        let room = if moved < 0.0 { x[j] - variable.lower } else { variable.upper - x[j] };
        let cap = if is_hard(variable) && room > 0.0 { cap.min(0.9995 * room) } else { cap };
        if moved.abs() * share > cap {
            share = cap / moved.abs();
            by = Some(j as u32);
        }
    }
    (share, by)
}
