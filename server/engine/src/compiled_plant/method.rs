//! One balance with a published method's verdict in the place of the search's.

use nalgebra::{DMatrix, DVector};

use super::account::Found;
use super::weighed::Live;
use super::{CompiledPlant, Observations};
use crate::balance::{Alternative, Balance, Finding, FindingKind, Reading};
use crate::estimate::{Anchor, Solution};
use crate::kkt::FactorError;
use crate::method::{Hypotheses, Level, Method, Tested};
use crate::search::{Named, Sizes, Source};

/// Below this share of a prior variance's worth of information, about a millionth of a reading's, a test is rounding. The
/// published methods test whatever can be tested.
const SEEN: f64 = 1e-4;
/// Eigenvalues below this share of the largest are rounding.
const EXHAUSTED: f64 = 1e-9;

impl CompiledPlant {
    /// Balances one set of readings like [`Self::balance`] and lets a published method name what is wrong, in the place of
    /// the search. Its findings have no probabilities, and the sizes that are most likely if all of them are true and
    /// nothing else is.
    pub fn balance_by_method(
        &self,
        readings: &[Option<Reading>],
        anchor: Option<&Anchor>,
        method: &Method,
        level: Level,
    ) -> Balance {
        let observations = self.observe(readings);
        match self.solve(&observations.situation, anchor) {
            Ok(solution) => self
                .tested(&observations, solution, anchor, method, level)
                .unwrap_or_else(|error| self.not_found(&observations, error.to_string())),
            Err(failure) => self.not_found(&observations, failure.to_string()),
        }
    }

    fn tested(
        &self,
        observations: &Observations,
        mut solution: Solution,
        anchor: Option<&Anchor>,
        method: &Method,
        level: Level,
    ) -> Result<Balance, FactorError> {
        let mut balance = self.unsuspecting(observations, &solution)?;
        let takes = |at: &u32| {
            let candidate = &self.candidates[*at as usize];
            match method.tests {
                Tested::Observations => !matches!(candidate.source, Source::Exact(_)),
                Tested::Losses => candidate.hypothesis.kind == FindingKind::Loss,
                Tested::All => true,
            }
        };
        let chosen: Vec<u32> = (0..self.candidates.len() as u32).filter(takes).collect();
        let live = self.live(observations, &mut solution, &chosen)?;
        let visible: Vec<u16> = (0..live.candidate.len())
            .filter(|at| live.evidence.own(*at) > SEEN)
            .map(|at| at as u16)
            .collect();
        if visible.is_empty() {
            return Ok(balance);
        }
        let hypotheses = self.for_method(observations, &live, &visible);
        let within = |at: u16| visible[at as usize];
        let named: Vec<Named> = (method.names)(&hypotheses, level)
            .into_iter()
            .map(|named| Named {
                hypothesis: within(named.hypothesis),
                alternatives: named.alternatives.into_iter().map(within).collect(),
            })
            .collect();
        if !named.is_empty() {
            let found = self.found_by_method(&live, named);
            self.account_for(observations, &solution, anchor, &live, found, &mut balance)?;
        }
        Ok(balance)
    }

    /// What methods look at: observations measured in their sigmas, all else in its prior standard deviation.
    fn for_method(&self, observations: &Observations, live: &Live, visible: &[u16]) -> Hypotheses {
        let observation = |at: u16| {
            let source = self.candidates[live.candidate[at as usize] as usize].source;
            self.place(observations, source).map(|place| observations.situation.observations[place])
        };
        let unit: Vec<f64> = visible
            .iter()
            .map(|at| observation(*at).map_or(1.0, |observation| observation.sigma / live.size[*at as usize]))
            .collect();
        let count = visible.len();
        let room = |at: &u16| match observation(*at) {
            Some(observation) => {
                let data = &self.problem.variables[observation.variable as usize];
                [observation.value - data.upper, observation.value - data.lower]
                    .map(|size| size / observation.sigma)
            }
            None => [f64::NEG_INFINITY, f64::INFINITY],
        };
        Hypotheses {
            score: DVector::from_fn(count, |at, _| live.evidence.score[visible[at] as usize] * unit[at]),
            information: DMatrix::from_fn(count, count, |a, b| {
                live.evidence.row(visible[a] as usize)[visible[b] as usize] * unit[a] * unit[b]
            }),
            room: visible.iter().map(room).collect(),
        }
    }

    /// Findings of the named hypotheses, with their most likely sizes together.
    fn found_by_method(&self, live: &Live, named: Vec<Named>) -> Found {
        let of: Vec<u16> = named.iter().map(|named| named.hypothesis).collect();
        let sizes = most_likely(live, &of);
        let count = of.len();
        let number = |at: u16| live.candidate[at as usize] as usize;
        let finding = |(at, named): (usize, &Named)| {
            let hypothesis = number(named.hypothesis);
            let unit = self.candidates[hypothesis].factor * live.size[named.hypothesis as usize];
            let alternative = |other: &u16| Alternative { hypothesis: number(*other), probability: None };
            Finding {
                hypothesis,
                estimate: sizes.mean[at] * unit,
                sigma: sizes.covariance[at * count + at].max(0.0).sqrt() * unit.abs(),
                probability: None,
                alternatives: named.alternatives.iter().map(alternative).collect(),
            }
        };
        let findings = named.iter().enumerate().map(finding).collect();
        Found { named, findings, of, sizes }
    }
}

/// The most likely sizes of some hypotheses together, `M^-1 u`, and their covariance `M^-1`; what they can't be told apart
/// by counts for nothing.
fn most_likely(live: &Live, of: &[u16]) -> Sizes {
    let count = of.len();
    let information =
        DMatrix::from_fn(count, count, |a, b| live.evidence.row(of[a] as usize)[of[b] as usize]);
    let score = DVector::from_fn(count, |at, _| live.evidence.score[of[at] as usize]);
    let law = information.symmetric_eigen();
    let least = EXHAUSTED * law.eigenvalues.max();
    let mut covariance = DMatrix::zeros(count, count);
    for (eigenvalue, vector) in law.eigenvalues.iter().zip(law.eigenvectors.column_iter()) {
        if *eigenvalue > least {
            covariance.ger(1.0 / eigenvalue, &vector, &vector, 1.0);
        }
    }
    Sizes { mean: (&covariance * score).as_slice().to_vec(), covariance: covariance.as_slice().to_vec() }
}
