//! What is told of a solution: values with their uncertainties, where they can be known.

use crate::balance::{TagBalance, TagClass, Verdict};
use crate::compile::Observed;
use crate::equipment::VariableRole;
use crate::estimate::{Solution, Variances};
use crate::verdict::{Judged, Residual};

/// Sizes beyond which an uncertainty says nothing.
pub(super) struct Largest {
    pub(super) mass_flow: f64,
    pub(super) power: f64,
}

/// A solution with its uncertainties, ready to be told.
pub(super) struct Told<'a> {
    pub(super) roles: &'a [VariableRole],
    pub(super) solution: &'a Solution,
    pub(super) variances: &'a Variances,
    pub(super) limit: Largest,
}

impl Told<'_> {
    pub(super) fn residual(&self, variable: u32, value: f64, sigma: f64) -> Residual {
        let place = variable as usize;
        Residual { deviation: value - self.solution.x[place], sigma, variance: self.variances.total[place] }
    }

    /// Value and standard uncertainty of a variable, if it can be known.
    pub(super) fn known(&self, variable: u32) -> Option<(f64, f64)> {
        let place = variable as usize;
        let (value, sigma) = (self.solution.x[place], self.variances.sigma(variable));
        let span = match self.roles[place] {
            VariableRole::MassFlow if self.limit.mass_flow > 0.0 => self.limit.mass_flow,
            VariableRole::Power if self.limit.power > 0.0 => self.limit.power,
            role => role.span(value),
        };
        let determined = !self.solution.linearisation.touched()[place];
        (determined && sigma <= span && value.is_finite()).then_some((value, sigma))
    }

    pub(super) fn repeat_sigma(&self, variable: u32) -> Option<f64> {
        self.variances.repeat.as_ref().map(|repeat| repeat[variable as usize].sqrt())
    }

    /// A live tag or given; `reads` is the variable it speaks of and variable minus reading.
    pub(super) fn tag(
        &self,
        reads: Option<(u32, f64)>,
        observed: Observed,
        samples: u32,
        shared: f64,
        residual: &Residual,
        judged: &Judged,
    ) -> TagBalance {
        let sigma = observed.sigma.hypot(shared);
        let variance = reads.map_or(residual.variance, |(base, _)| self.variances.total[base as usize]);
        let reconciled = reads.map_or(observed.value, |(base, shift)| self.solution.x[base as usize] - shift);
        let redundancy =
            if shared > 0.0 { (1.0 - variance / (sigma * sigma)).clamp(0.0, 1.0) } else { judged.redundancy };
        TagBalance {
            measured: Some(observed.value),
            sigma: Some(sigma),
            samples,
            reconciled: Some(reconciled),
            reconciled_sigma: Some(
                reads.map_or(residual.variance.sqrt(), |(base, _)| self.variances.sigma(base)),
            ),
            correction: Some(reconciled - observed.value),
            redundancy: Some(redundancy),
            statistic: judged.statistic,
            minimum_detectable_bias: judged.minimum_detectable_bias,
            class: judged.class,
            verdict: judged.verdict,
        }
    }

    /// A tag that takes no part; what it would have read is told where it is known.
    pub(super) fn excluded(&self, reads: Option<(u32, f64)>, samples: u32) -> TagBalance {
        let known = reads.and_then(|(base, shift)| Some((self.known(base)?, shift)));
        TagBalance {
            samples,
            reconciled: known.map(|((value, _), shift)| value - shift),
            reconciled_sigma: known.map(|((_, sigma), _)| sigma),
            ..NOTHING
        }
    }
}

/// A tag that enters no balance and states no uncertainty: its reading is kept, and nothing is said of it.
pub(super) fn kept(observed: Observed, samples: u32) -> TagBalance {
    TagBalance { measured: Some(observed.value), samples, verdict: Verdict::Unchecked, ..NOTHING }
}

/// A tag of which nothing is known.
const NOTHING: TagBalance = TagBalance {
    measured: None,
    sigma: None,
    samples: 0,
    reconciled: None,
    reconciled_sigma: None,
    correction: None,
    redundancy: None,
    statistic: None,
    minimum_detectable_bias: None,
    class: TagClass::Nonredundant,
    verdict: Verdict::Excluded,
};
