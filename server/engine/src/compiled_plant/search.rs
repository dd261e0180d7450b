//! One balance with a search for errors: what the readings say is wrong, and the balance that closes when that is
//! accounted for.

use std::collections::HashMap;
use std::sync::{Arc, Mutex, PoisonError};

use super::{CompiledPlant, Observations, Read};
use crate::balance::{
    Alternative, Balance, Evidence as Told, Finding, GlobalTest, Hypothesis, QuantityBalance, Reading,
    Verdict,
};
use crate::compile::Instrument;
use crate::estimate::{self, Anchor, Direction, Response, Situation, Solution};
use crate::kkt::FactorError;
use crate::search::{Candidate, Chance, Evidence, Named, Posterior, Set, Sizes, Source, bound, name};
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

/// Hypotheses with what one solution says of them.
struct Live {
    /// Which candidate each is.
    candidate: Vec<u32>,
    /// Their prior standard deviations, SI.
    size: Vec<f64>,
    response: Vec<Response>,
    evidence: Evidence,
}

/// What a search has found.
struct Found {
    named: Vec<Named>,
    posterior: Posterior,
}

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
        let mut balance = self.report(observations, &solution)?;
        for tag in
            balance.tags.iter_mut().chain(&mut balance.givens).filter(|tag| tag.verdict == Verdict::Suspect)
        {
            tag.verdict = Verdict::Trusted;
        }
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
        let found = Found { named: name(&live.evidence, &posterior), posterior };
        self.account_for(observations, &solution, anchor, &live, &found, &mut balance)?;
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

    /// Scores and information of those of some hypotheses that these readings can speak of.
    fn live(
        &self,
        observations: &Observations,
        solution: &mut Solution,
        chosen: &[u32],
    ) -> Result<Live, FactorError> {
        let mut live = Live {
            candidate: Vec::new(),
            size: Vec::new(),
            response: Vec::new(),
            evidence: Evidence::default(),
        };
        for number in chosen {
            let candidate = &self.candidates[*number as usize];
            let Some((direction, sigma)) = self.direction(observations, &solution.x, candidate.source) else {
                continue;
            };
            let size = candidate.size(&solution.x, sigma);
            let Some(response) = solution.linearisation.response(&self.problem, direction)? else { continue };
            let visible = response.information(&response, true) * size * size;
            if visible > 0.0 && visible.is_finite() {
                live.candidate.push(*number);
                live.size.push(size);
                live.response.push(response);
            }
        }
        live.weigh(&self.candidates);
        Ok(live)
    }

    /// Score and information of every hypothesis.
    #[cfg(test)]
    pub(super) fn evidence(&self, observations: &Observations, solution: &mut Solution) -> Vec<Told> {
        let all: Vec<u32> = (0..self.candidates.len() as u32).collect();
        self.live(observations, solution, &all).unwrap().told()
    }

    /// The direction of a hypothesis, and the sigma of its observation.
    fn direction(&self, observations: &Observations, x: &[f64], source: Source) -> Option<(Direction, f64)> {
        if let Source::Exact(variable) = source {
            let exact = observations.situation.exact[variable as usize].is_some();
            return exact.then_some((Direction::Exact(variable), 0.0));
        }
        let place = self.place(observations, source)?;
        let observation = observations.situation.observations[place];
        let deviation = observation.value - x[observation.variable as usize];
        let weight = observation.sigma.powi(-2);
        let direction = Direction::Observation { variable: observation.variable, weight, deviation };
        Some((direction, observation.sigma))
    }

    /// Which observation a hypothesis speaks of.
    fn place(&self, observations: &Observations, source: Source) -> Option<usize> {
        match source {
            Source::Exact(_) => None,
            Source::Tag(tag) => observations.places[tag],
            Source::Given(given) => Some(observations.first_given + given),
            Source::Shared(group) => Some(observations.first_given + self.soft_givens.len() + group),
        }
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

    /// Searches as if every live tag read what the anchor says.
    fn expect(&self, observations: &Observations, anchor: &Anchor) -> Option<Expected> {
        let reads = |(tag, instrument): (&(Read, u32), &Instrument)| {
            tag.0.ok()?;
            let base = instrument.base?;
            let value = anchor.x[base as usize] - instrument.shift;
            Some(Reading::single(instrument.tag.unit.value.from_si(value)))
        };
        let readings: Vec<Option<Reading>> =
            observations.tags.iter().zip(&self.instruments).map(reads).collect();
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

    /// Solves once more with the readings lessened by what the errors are expected to be, so that everything closes, and
    /// puts that balance and the findings into the one without them.
    fn account_for(
        &self,
        observations: &Observations,
        before: &Solution,
        anchor: Option<&Anchor>,
        live: &Live,
        found: &Found,
        balance: &mut Balance,
    ) -> Result<(), FactorError> {
        let (named, posterior) = (&found.named, &found.posterior);
        let groups: Vec<Vec<u16>> = named.iter().map(Named::group).collect();
        let of = groups.concat();
        let counts =
            |set: &Set| groups.iter().all(|group| group.iter().any(|member| set.members.contains(member)));
        // Findings that hold only in turn, never together, are averaged over all sets.
        let together = posterior.sets.iter().any(counts);
        let sizes = posterior.sizes(&live.evidence, &of, |set| !together || counts(set));
        balance.findings = named.iter().map(|named| self.finding(live, posterior, named)).collect();
        self.mark(balance);
        let lessened = self.lessened(observations, live, &of, &sizes);
        let Some(mut after) = self.solve_from(&lessened, anchor, before) else {
            balance.warnings.push(
                "the balance that accounts for the findings wasn't found: values are those without them"
                    .into(),
            );
            return Ok(());
        };
        for moves in moves(before, live, &of, &sizes) {
            after.linearisation.widen(&moves);
        }
        let told = self.report(observations, &after)?;
        balance.iterations += after.iterations;
        for (tag, after) in
            balance.tags.iter_mut().zip(&told.tags).chain(balance.givens.iter_mut().zip(&told.givens))
        {
            tag.reconciled = after.reconciled;
            tag.reconciled_sigma = after.reconciled_sigma;
            tag.correction = after.correction;
        }
        for (quantity, after) in balance.quantities.iter_mut().zip(&told.quantities) {
            *quantity = QuantityBalance { class: quantity.class, ..*after };
        }
        balance.indicators = told.indicators;
        balance.warnings.extend(
            told.warnings
                .into_iter()
                .filter(|warning| !balance.warnings.contains(warning))
                .collect::<Vec<_>>(),
        );
        balance.global_test_after = Some(self.test_after(observations, &after, live, named, balance));
        Ok(())
    }

    /// Solves from the anchor, and where that finds nothing from the solution with the errors in it.
    fn solve_from(
        &self,
        situation: &Situation,
        anchor: Option<&Anchor>,
        before: &Solution,
    ) -> Option<Solution> {
        let from_anchor = |anchor: &Anchor| estimate::solve(&self.problem, situation, anchor).ok();
        let from_before = |anchor: &Anchor| {
            let (x, forms) = (before.x.clone(), before.forms.clone());
            estimate::solve_from(&self.problem, situation, anchor, x, forms).ok()
        };
        let found = anchor.and_then(|anchor| from_anchor(anchor).or_else(|| from_before(anchor)));
        found.or_else(|| self.solve(situation, None).ok())
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
            probability: posterior.inclusion[place],
            alternatives: named
                .alternatives
                .iter()
                .map(|other| Alternative {
                    hypothesis: live.candidate[*other as usize] as usize,
                    probability: posterior.inclusion[*other as usize],
                })
                .collect(),
        }
    }

    /// Tags and givens that a finding names or that it could as well name are suspect.
    fn mark(&self, balance: &mut Balance) {
        let findings = &balance.findings;
        let of = |finding: &Finding| {
            let others: Vec<usize> = finding.alternatives.iter().map(|other| other.hypothesis).collect();
            std::iter::once(finding.hypothesis).chain(others)
        };
        let suspects: Vec<Source> =
            findings.iter().flat_map(of).map(|at| self.candidates[at].source).collect();
        for source in suspects {
            match source {
                Source::Tag(tag) => balance.tags[tag].verdict = Verdict::Suspect,
                Source::Given(given) => balance.givens[given].verdict = Verdict::Suspect,
                Source::Shared(_) | Source::Exact(_) => {}
            }
        }
    }

    /// The situation with the expected errors taken out.
    fn lessened(&self, observations: &Observations, live: &Live, of: &[u16], sizes: &Sizes) -> Situation {
        let mut situation = observations.situation.clone();
        for (hypothesis, mean) in of.iter().zip(&sizes.mean) {
            let amount = mean * live.size[*hypothesis as usize];
            match self.candidates[live.candidate[*hypothesis as usize] as usize].source {
                Source::Exact(variable) => {
                    if let Some(value) = &mut situation.exact[variable as usize] {
                        *value += amount;
                    }
                }
                source => {
                    if let Some(place) = self.place(observations, source) {
                        situation.observations[place].value -= amount;
                    }
                }
            }
        }
        situation
    }

    /// The global test over what no finding names.
    fn test_after(
        &self,
        observations: &Observations,
        after: &Solution,
        live: &Live,
        named: &[Named],
        balance: &Balance,
    ) -> GlobalTest {
        let source = |at: u16| self.candidates[live.candidate[at as usize] as usize].source;
        let groups = named.iter().flat_map(Named::group);
        let taken: Vec<usize> = groups.filter_map(|at| self.place(observations, source(at))).collect();
        let rest = observations.situation.observations.iter().enumerate();
        let rest = rest.filter(|(place, _)| !taken.contains(place));
        let statistic = rest.map(|(_, o)| ((o.value - after.x[o.variable as usize]) / o.sigma).powi(2)).sum();
        let freedom = balance.global_test.map_or(0, |test| test.degrees_of_freedom as usize);
        verdict::global_test(statistic, freedom.saturating_sub(named.len()), &self.limits)
    }
}

impl Live {
    /// Scores and information in units of the prior standard deviations.
    fn weigh(&mut self, candidates: &[Candidate]) {
        let count = self.candidate.len();
        let mut information = vec![0.0; count * count];
        for a in 0..count {
            for b in 0..=a {
                let value =
                    self.response[a].information(&self.response[b], a == b) * self.size[a] * self.size[b];
                information[a * count + b] = value;
                information[b * count + a] = value;
            }
        }
        self.evidence = Evidence {
            log_odds: self.candidate.iter().map(|at| candidates[*at as usize].log_odds).collect(),
            score: self
                .response
                .iter()
                .zip(&self.size)
                .map(|(response, size)| response.score * size)
                .collect(),
            information,
        };
    }

    /// Scores and information in SI.
    fn told(&self) -> Vec<Told> {
        let one = |(at, number): (usize, &u32)| Told {
            hypothesis: *number as usize,
            score: self.response[at].score,
            information: self.response[at].information(&self.response[at], true),
        };
        self.candidate.iter().enumerate().map(one).collect()
    }
}

/// How all variables move with the uncertain sizes of some hypotheses: one vector for each independent part of their
/// covariance.
fn moves(solution: &Solution, live: &Live, of: &[u16], sizes: &Sizes) -> Vec<Vec<f64>> {
    let size = of.len();
    let covariance = nalgebra::DMatrix::from_row_slice(size, size, &sizes.covariance);
    let law = covariance.symmetric_eigen();
    (0..size)
        .filter(|part| law.eigenvalues[*part] > 0.0)
        .map(|part| {
            let root = law.eigenvalues[part].sqrt();
            let mut sum = vec![0.0; solution.x.len()];
            for (row, hypothesis) in of.iter().enumerate() {
                let place = *hypothesis as usize;
                let amount = root * law.eigenvectors[(row, part)] * live.size[place];
                let moved = solution.linearisation.moved(&live.response[place]);
                sum.iter_mut().zip(moved).for_each(|(sum, moved)| *sum += amount * moved);
            }
            sum
        })
        .collect()
}
