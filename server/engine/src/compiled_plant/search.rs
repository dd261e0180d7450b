//! One balance with a search for errors.

use std::collections::HashMap;
use std::sync::{Arc, Mutex, PoisonError};

use super::account::Found;
use super::weighed::Live;
use super::{CompiledPlant, Observations};
use crate::balance::{Alternative, Balance, Finding, Hypothesis, Prior, Reading, Verdict};
use crate::compile::Instrument;
use crate::estimate::{self, Anchor, Solution};
use crate::kkt::FactorError;
use crate::search::{Candidate, Chance, Named, Posterior, Set, Source, bound, name};
use crate::verdict;

/// What the search of a plant keeps from one balance to the next, for each anchor and set of live tags.
#[derive(Default)]
pub(super) struct Chances {
    kept: Mutex<HashMap<ChanceKey, Option<Arc<Expected>>>>,
}

/// The anchor, and which tags take part.
type ChanceKey = (u64, Vec<bool>);

/// What can be expected of a search before anything is read.
struct Expected {
    /// The hypotheses of which anything can be seen.
    visible: Vec<u32>,
    /// How strong chance makes the strongest of them.
    chance: Chance,
}

/// So many simulations are kept; more sets of live tags than this a log has only if it is strange.
const KEPT: usize = 64;
/// Below this share of a prior variance's worth of information nothing could be seen of a hypothesis.
const INVISIBLE: f64 = 0.1;
/// A rate below this is too rare for the simulation to tell.
const RAREST: f64 = 1e-3;
/// So many hypotheses are weighed against one another at most.
const MOST: usize = 500;

impl CompiledPlant {
    /// The errors that a search looks for; findings name them by their place here.
    pub fn hypotheses(&self) -> impl ExactSizeIterator<Item = &Hypothesis> {
        self.candidates.iter().map(|candidate| &candidate.hypothesis)
    }

    /// Balances one set of readings like [`Self::balance`] and looks for errors. `false_alarm_rate` is the share of
    /// error-free balances in which anything is found. With findings, values and uncertainties are those of the balance
    /// that accounts for them; classes, redundancies and statistics stay those of the balance that doesn't.
    pub fn balance_and_search(
        &self,
        readings: &[Option<Reading>],
        anchor: Option<&Anchor>,
        false_alarm_rate: f64,
    ) -> Balance {
        let observations = self.observe(readings);
        match self.solve(&observations.situation, anchor) {
            Ok(solution) => self
                .searched(&observations, solution, anchor, false_alarm_rate)
                .unwrap_or_else(|error| self.not_found(&observations, error.to_string())),
            Err(failure) => self.not_found(&observations, failure.to_string()),
        }
    }

    fn searched(
        &self,
        observations: &Observations,
        mut solution: Solution,
        anchor: Option<&Anchor>,
        false_alarm_rate: f64,
    ) -> Result<Balance, FactorError> {
        let mut balance = self.unsuspecting(observations, &solution)?;
        let expected = anchor.and_then(|anchor| self.expected(observations, anchor));
        let chosen = match &expected {
            Some(expected) => expected.visible.clone(),
            None => self.strongest(observations, &solution),
        };
        let live = self.live(observations, &mut solution, &chosen)?;
        if live.candidate.is_empty() {
            return Ok(balance);
        }
        balance.evidence = live.told();
        let limit = match &expected {
            Some(expected) if false_alarm_rate >= RAREST => expected.chance.limit(false_alarm_rate),
            Some(_) => bound(&live.evidence, false_alarm_rate),
            None => bound(&live.evidence, self.share_of(live.candidate.len(), false_alarm_rate)),
        };
        if live.evidence.strongest(&live.evidence.score) <= limit {
            return Ok(balance);
        }
        let posterior = Posterior::of(&live.evidence);
        if !posterior.complete {
            balance.warnings.push(
                "more combinations of errors would explain these readings than could be weighed: the findings are the \
                 most probable of those that were"
                    .into(),
            );
        }
        let found = self.found(&live, &posterior);
        self.account_for(observations, &solution, anchor, &live, found, &mut balance)?;
        Ok(balance)
    }

    /// What is told of a solution before anything is looked for.
    pub(super) fn unsuspecting(
        &self,
        observations: &Observations,
        solution: &Solution,
    ) -> Result<Balance, FactorError> {
        let mut balance = self.report(observations, solution)?;
        for tag in
            balance.tags.iter_mut().chain(&mut balance.givens).filter(|tag| tag.verdict == Verdict::Suspect)
        {
            // Its own test is set aside; how well it is checked is not.
            let (detectable, sigma) = (tag.minimum_detectable_bias, tag.sigma);
            let sigmas = detectable.zip(sigma).map_or(f64::INFINITY, |(bias, sigma)| bias / sigma);
            tag.verdict = verdict::unsuspected(sigmas);
        }
        Ok(balance)
    }

    /// The rate that some of the hypotheses may be held to, if all are to be held to this one together.
    fn share_of(&self, some: usize, rate: f64) -> f64 {
        1.0 - (1.0 - rate).powf(some as f64 / self.candidates.len().max(some) as f64)
    }

    /// All hypotheses, or where there are too many to weigh every two, those that the solution speaks for most: half of
    /// them observations by their test, half exact values by what half the sum of squares would gain.
    fn strongest(&self, observations: &Observations, solution: &Solution) -> Vec<u32> {
        let all = 0..self.candidates.len() as u32;
        if all.len() <= MOST {
            return all.collect();
        }
        let mut kept = Vec::with_capacity(MOST);
        for exact in [false, true] {
            let mut ranked: Vec<(f64, u32)> = all
                .clone()
                .filter(|at| matches!(self.candidates[*at as usize].source, Source::Exact(_)) == exact)
                .filter_map(|at| {
                    let candidate = &self.candidates[at as usize];
                    let (direction, sigma) = self.direction(observations, &solution.x, candidate.source)?;
                    let score = solution.linearisation.score(&self.problem, direction);
                    Some((score.abs() * candidate.size(&solution.x, sigma), at))
                })
                .collect();
            ranked.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
            kept.extend(ranked.iter().take(MOST / 2).map(|(_, at)| *at));
        }
        kept.sort_unstable();
        kept
    }

    /// What can be expected of a search with these tags live: reckoned at the anchor, so that it doesn't depend on which
    /// balance came first. Nothing where the anchor doesn't tell.
    fn expected(&self, observations: &Observations, anchor: &Anchor) -> Option<Arc<Expected>> {
        if self.candidates.len() > MOST {
            return None;
        }
        let key = (anchor.id, observations.places.iter().map(Option::is_some).collect());
        let lock = || self.chances.kept.lock().unwrap_or_else(PoisonError::into_inner);
        if let Some(kept) = lock().get(&key) {
            return kept.clone();
        }
        let made = self.expect(observations, anchor).map(Arc::new);
        let mut kept = lock();
        if kept.len() >= KEPT {
            kept.clear();
        }
        kept.insert(key, made.clone());
        made
    }

    /// What every tag reads at an anchor.
    fn typical(&self, anchor: &Anchor) -> Vec<Option<Reading>> {
        let reads = |instrument: &Instrument| {
            let value = anchor.x[instrument.base? as usize] - instrument.shift;
            Some(Reading::single(instrument.tag.unit.value.from_si(value)))
        };
        self.instruments.iter().map(reads).collect()
    }

    /// What the search expects of each hypothesis before anything is read, at an anchor.
    pub fn priors(&self, anchor: &Anchor) -> Vec<Prior> {
        let typical = self.observe(&self.typical(anchor));
        let one = |candidate: &Candidate| {
            let place = self.place(&typical, candidate.source);
            let sigma = place.map_or(0.0, |place| typical.situation.observations[place].sigma);
            Prior {
                probability: 1.0 / (1.0 + (-candidate.log_odds).exp()),
                size: candidate.size(&anchor.x, sigma) * candidate.factor.abs(),
            }
        };
        self.candidates.iter().map(one).collect()
    }

    /// Searches as if every live tag read what the anchor says.
    fn expect(&self, observations: &Observations, anchor: &Anchor) -> Option<Expected> {
        let mut readings = self.typical(anchor);
        for (reading, (read, _)) in readings.iter_mut().zip(&observations.tags) {
            *reading = reading.filter(|_| read.is_ok());
        }
        let mut typical = self.observe(&readings);
        if typical.places.iter().map(Option::is_some).ne(observations.places.iter().map(Option::is_some)) {
            return None;
        }
        for observation in &mut typical.situation.observations {
            observation.value = anchor.x[observation.variable as usize];
        }
        let mut solution = estimate::solve(&self.problem, &typical.situation, anchor).ok()?;
        let all: Vec<u32> = (0..self.candidates.len() as u32).collect();
        let every = self.live(&typical, &mut solution, &all).ok()?;
        let seen = |(at, number): (usize, &u32)| (every.evidence.own(at) > INVISIBLE).then_some(*number);
        let visible: Vec<u32> = every.candidate.iter().enumerate().filter_map(seen).collect();
        let live = self.live(&typical, &mut solution, &visible).ok()?;
        Some(Expected { visible, chance: Chance::simulate(&live.evidence) })
    }

    /// What a posterior says is wrong, with sizes averaged over the sets that hold every finding.
    fn found(&self, live: &Live, posterior: &Posterior) -> Found {
        let named = name(&live.evidence, posterior);
        let groups: Vec<Vec<u16>> = named.iter().map(Named::group).collect();
        let of = groups.concat();
        let counts =
            |set: &Set| groups.iter().all(|group| group.iter().any(|member| set.members.contains(member)));
        // Findings that hold only in turn, never together, are averaged over all sets.
        let together = posterior.sets.iter().any(counts);
        let sizes = posterior.sizes(&live.evidence, &of, |set| !together || counts(set));
        let findings = named.iter().map(|named| self.finding(live, posterior, named)).collect();
        Found { named, findings, of, sizes }
    }

    fn finding(&self, live: &Live, posterior: &Posterior, named: &Named) -> Finding {
        let place = named.hypothesis as usize;
        let own = posterior
            .sizes(&live.evidence, &[named.hypothesis], |set| set.members.contains(&named.hypothesis));
        let candidate = &self.candidates[live.candidate[place] as usize];
        let unit = candidate.factor * live.size[place];
        Finding {
            hypothesis: live.candidate[place] as usize,
            estimate: own.mean[0] * unit,
            sigma: own.covariance[0].max(0.0).sqrt() * unit.abs(),
            probability: Some(posterior.inclusion[place]),
            alternatives: named
                .alternatives
                .iter()
                .map(|other| Alternative {
                    hypothesis: live.candidate[*other as usize] as usize,
                    probability: Some(posterior.inclusion[*other as usize]),
                })
                .collect(),
        }
    }
}
