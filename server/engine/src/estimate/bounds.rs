//! Bounds by an active set: a variable at its bound is fixed there until its multiplier says it wants to leave.
//!
//! Flows and qualities may stray outside while a solve runs, since every equation has a value there; the set is
//! mended after each convergence from the violations and the signs of the multipliers (the primal-dual active set
//! method: M. Hintermüller, K. Ito, K. Kunisch, SIAM J. Optim. 13 (2002) 865-888). Pressures and temperatures stop
//! at their limits, beyond which properties have no value.

use crate::equipment::{VariableData, VariableRole};

use super::scaling::Scaling;

/// Which bound.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Side {
    Lower,
    Upper,
}

/// A variable with bounds, or one whose steps are capped: the few numbers of it that every step needs, side by side.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Bounded {
    variable: u32,
    role: VariableRole,
    lower: f64,
    upper: f64,
}

impl Bounded {
    /// The variable.
    pub(crate) fn variable(&self) -> u32 {
        self.variable
    }

    /// What kind of thing it is.
    pub(crate) fn role(&self) -> VariableRole {
        self.role
    }

    /// Those among all variables.
    pub(crate) fn among(variables: &[VariableData]) -> Vec<Self> {
        let capped = |role| is_hard(role) || role == VariableRole::Enthalpy;
        (0..)
            .zip(variables)
            .filter(|(_, data)| capped(data.role) || data.lower.is_finite() || data.upper.is_finite())
            .map(|(variable, data)| Self { variable, role: data.role, lower: data.lower, upper: data.upper })
            .collect()
    }
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
    pub(super) fn block(&mut self, bounds: &Bounded, x: &mut [f64], side: Side) {
        x[bounds.variable as usize] = if side == Side::Lower { bounds.lower } else { bounds.upper };
        if !self.contains(bounds.variable) {
            self.held.push((bounds.variable, side));
        }
    }

    /// Adds what violates its bound and releases what pulls away from it; says whether anything changed. What nothing
    /// determines may lie anywhere: its value is never told, and pulling it to a bound would disturb what is known.
    pub(super) fn update(
        &mut self,
        bounded: &[Bounded],
        x: &mut [f64],
        gradient: &[f64],
        undetermined: &[bool],
        round: usize,
    ) -> bool {
        let mut changes: Vec<(f64, Change<'_>)> = Vec::new();
        for bounds in bounded.iter().filter(|bounds| !undetermined[bounds.variable as usize]) {
            let value = x[bounds.variable as usize];
            let tolerance = 1e-12 * (1.0 + value.abs());
            if value < bounds.lower - tolerance {
                changes.push((bounds.lower - value, Change::Hold(bounds, Side::Lower)));
            } else if value > bounds.upper + tolerance {
                changes.push((value - bounds.upper, Change::Hold(bounds, Side::Upper)));
            }
        }
        for (variable, side) in &self.held {
            let pull = gradient[*variable as usize] * if *side == Side::Lower { -1.0 } else { 1.0 };
            if pull > 1e-9 {
                changes.push((pull, Change::Release(*variable)));
            }
        }
        if round >= ALL_AT_ONCE {
            changes.sort_by(|a, b| b.0.total_cmp(&a.0));
            changes.truncate(1);
        }
        for (_, change) in &changes {
            match change {
                Change::Hold(bounds, side) => self.block(bounds, x, *side),
                Change::Release(variable) => self.held.retain(|(held, _)| held != variable),
            }
        }
        !changes.is_empty()
    }
}

/// What the active set does with a variable.
enum Change<'a> {
    Hold(&'a Bounded, Side),
    Release(u32),
}

/// The pressure or temperature that stands at its limit and is pushed beyond it by a step.
pub(super) fn blocked<'a>(
    bounded: &'a [Bounded],
    x: &[f64],
    step: &[f64],
    scaling: &Scaling,
) -> Option<(&'a Bounded, Side)> {
    bounded.iter().filter(|bounds| is_hard(bounds.role)).find_map(|bounds| {
        let j = bounds.variable as usize;
        let moved = step[j] * scaling.column[j];
        let near = 1e-3 * (1.0 + x[j].abs());
        if moved < 0.0 && x[j] + moved < bounds.lower && x[j] - bounds.lower < near {
            Some((bounds, Side::Lower))
        } else if moved > 0.0 && x[j] + moved > bounds.upper && bounds.upper - x[j] < near {
            Some((bounds, Side::Upper))
        } else {
            None
        }
    })
}

/// Beyond the bounds of a pressure or temperature the properties have no value.
fn is_hard(role: VariableRole) -> bool {
    matches!(role, VariableRole::Pressure | VariableRole::Temperature)
}

/// The longest share of a step, at most one, that moves no pressure by more than half of itself, no temperature by
/// more than 60 K, no enthalpy by more than 0.6 MJ/kg, and none of them nearer to its limit than a tenth of the way; and
/// the variable that sets it.
pub(super) fn longest(bounded: &[Bounded], x: &[f64], step: &[f64], scaling: &Scaling) -> (f64, Option<u32>) {
    let (mut share, mut by) = (1.0_f64, None);
    for bounds in bounded {
        let j = bounds.variable as usize;
        let cap = match bounds.role {
            VariableRole::Pressure => 0.5 * x[j].abs(),
            VariableRole::Temperature => 60.0,
            VariableRole::Enthalpy => 6e5,
            _ => continue,
        };
        let moved = step[j] * scaling.column[j];
        let room = if moved < 0.0 { x[j] - bounds.lower } else { bounds.upper - x[j] };
        let cap = if is_hard(bounds.role) && room > 0.0 { cap.min(0.9995 * room) } else { cap };
        if moved.abs() * share > cap {
            share = cap / moved.abs();
            by = Some(bounds.variable);
        }
    }
    (share, by)
}
