//! How far a step goes: proximal damping when steps fail, and a filter that judges where they lead.

/// Proximal damping of a step, zero unless steps fail.
#[derive(Default)]
pub(super) struct Damping {
    strength: f64,
}

impl Damping {
    pub(super) fn is_zero(&self) -> bool {
        self.strength == 0.0
    }

    /// Raises it; false when that makes no sense any more.
    pub(super) fn raise(&mut self) -> bool {
        self.strength = if self.strength == 0.0 { 1e-4 } else { self.strength * 100.0 };
        self.strength < 1e8
    }

    /// Lowers it; says whether there was any.
    pub(super) fn lower(&mut self) -> bool {
        let any = !self.is_zero();
        self.strength = if self.strength < 1e-5 { 0.0 } else { self.strength * 0.1 };
        any
    }

    pub(super) fn columns(&self, x: &[f64]) -> Vec<f64> {
        if self.is_zero() { Vec::new() } else { vec![self.strength; x.len()] }
    }
}

/// Pairs of infeasibility and objective that a new point must not be dominated by: R. Fletcher and S. Leyffer,
/// "Nonlinear programming without a penalty function", Mathematical Programming 91 (2002) 239-269.
#[derive(Default)]
pub(super) struct Filter {
    entries: Vec<(f64, f64)>,
}

impl Filter {
    pub(super) fn accepts(&self, then: (f64, f64), now: (f64, f64)) -> bool {
        let better = |(theta, phi): (f64, f64)| {
            then.0 <= (1.0 - 1e-4) * theta || then.1 <= phi - 1e-4 * theta || then.0 < 1e-9
        };
        then.0.is_finite()
            && then.1.is_finite()
            && better(now)
            && self.entries.iter().all(|entry| better(*entry))
    }

    pub(super) fn add(&mut self, entry: (f64, f64)) {
        self.entries.push(entry);
    }
}
