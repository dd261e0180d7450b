//! Which sets of hypotheses the readings speak for: the posterior over sets, and what follows from it.
//!
//! A set's weight against the empty one is the product of its prior odds and its Bayes factor,
//! `exp(u' (M + I)^-1 u / 2) / sqrt(det(M + I))` over its members, all in units of their prior standard deviations (the
//! linear model with normal sizes; for instance A. Gelman et al., Bayesian Data Analysis, 3rd ed. 2013, chapter 14).
//! Sets are visited best first: each is extended by every hypothesis and shortened by every member. Whatever lies within
//! [`WINDOW`] of the best is kept, and within [`VISITED`] visited in turn.

use std::cmp::Ordering;
use std::collections::{BinaryHeap, HashSet};

use super::evidence::Evidence;

/// Sets this much less probable than the best, in logarithms, are left out. One more hypothesis that explains nothing costs
/// four to six, so that each set that matters stays with all its neighbours.
const WINDOW: f64 = 6.5;
/// Sets this much less probable than the best are kept but not visited: what they lead to seldom comes back into the
/// window.
const VISITED: f64 = 5.0;
/// Members are exchanged in sets that are no less probable than this against the best.
const EXCHANGED: f64 = 2.0;
/// So many sets are extended at most; a search that ends here says so.
const MOST_VISITED: usize = 250;
/// A set has at most so many members.
const LARGEST_SET: usize = 12;
/// Sets with less than this share of the best one's weight add nothing to sizes and uncertainties.
const NEGLIGIBLE: f64 = 1e-2;

/// A set of hypotheses.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Set {
    /// Its members, ascending.
    pub(crate) members: Vec<u16>,
    /// Its posterior probability among the sets that were visited.
    pub(crate) probability: f64,
}

/// The posterior over sets.
#[derive(Clone, Debug, Default)]
pub(crate) struct Posterior {
    /// Sets, the most probable first.
    pub(crate) sets: Vec<Set>,
    /// Probability of each hypothesis.
    pub(crate) inclusion: Vec<f64>,
    /// Probability that both of two are true, row by row.
    pairs: Vec<f64>,
    /// Whether everything that should be visited was.
    pub(crate) complete: bool,
}

/// Mean and variance of the sizes of some hypotheses, in their prior standard deviations.
#[derive(Clone, Debug, Default)]
pub(crate) struct Sizes {
    /// Means.
    pub(crate) mean: Vec<f64>,
    /// Covariance, row by row.
    pub(crate) covariance: Vec<f64>,
}

/// A set that waits to be visited; the heaviest goes first.
struct Waiting {
    weight: f64,
    members: Vec<u16>,
}

impl Ord for Waiting {
    fn cmp(&self, other: &Self) -> Ordering {
        self.weight.total_cmp(&other.weight).then_with(|| other.members.cmp(&self.members))
    }
}

impl PartialOrd for Waiting {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl PartialEq for Waiting {
    fn eq(&self, other: &Self) -> bool {
        self.cmp(other) == Ordering::Equal
    }
}

impl Eq for Waiting {}

impl Posterior {
    /// Visits the sets that matter.
    pub(crate) fn of(evidence: &Evidence) -> Self {
        let mut visit = Visit {
            evidence,
            known: HashSet::from([Vec::new()]),
            waiting: BinaryHeap::from([Waiting { weight: 0.0, members: Vec::new() }]),
            extended: HashSet::new(),
            kept: Vec::new(),
            best: 0.0,
            elimination: Elimination::default(),
        };
        while let Some(next) = visit.waiting.pop() {
            if next.weight < visit.best - VISITED || visit.extended.len() >= MOST_VISITED {
                visit.waiting.push(next);
                break;
            }
            visit.extend(&next.members);
            if next.weight >= visit.best - EXCHANGED {
                visit.exchange(&next.members);
            }
            visit.kept.push(next);
        }
        let complete = visit.waiting.peek().is_none_or(|next| next.weight < visit.best - VISITED);
        let (best, mut kept) = (visit.best, visit.kept);
        kept.extend(visit.waiting.into_vec().into_iter().filter(|set| set.weight >= best - WINDOW));
        Self::normalised(kept, best, evidence.len(), complete)
    }

    fn normalised(mut kept: Vec<Waiting>, best: f64, count: usize, complete: bool) -> Self {
        kept.sort_by(|a, b| b.cmp(a));
        let total: f64 = kept.iter().map(|set| (set.weight - best).exp()).sum();
        let mut pairs = vec![0.0; count * count];
        let set = |Waiting { weight, members }: Waiting| {
            let probability = (weight - best).exp() / total;
            for a in &members {
                for b in &members {
                    pairs[*a as usize * count + *b as usize] += probability;
                }
            }
            Set { members, probability }
        };
        let sets = kept.into_iter().map(set).collect();
        // Shares of one total, whose rounding may exceed it.
        let inclusion = (0..count).map(|at| pairs[at * count + at].min(1.0)).collect();
        Self { sets, inclusion, pairs, complete }
    }

    /// Probability that at least one of some hypotheses is true.
    pub(crate) fn any(&self, hypotheses: &[u16]) -> f64 {
        let holds = |set: &&Set| set.members.iter().any(|member| hypotheses.contains(member));
        self.sets.iter().filter(holds).map(|set| set.probability).sum()
    }

    /// Probability that both of two hypotheses are true.
    pub(crate) fn both(&self, a: u16, b: u16) -> f64 {
        self.pairs[a as usize * self.inclusion.len() + b as usize]
    }

    /// Mean and covariance of the sizes of some hypotheses over the sets that `count`, absent ones being of size zero.
    pub(crate) fn sizes(&self, evidence: &Evidence, of: &[u16], counts: impl Fn(&Set) -> bool) -> Sizes {
        let size = of.len();
        let mut sum = Sizes { mean: vec![0.0; size], covariance: vec![0.0; size * size] };
        let (mut total, mut best) = (0.0, 0.0_f64);
        for set in self.sets.iter().filter(|set| counts(set)) {
            best = best.max(set.probability);
            // The most probable sets come first.
            if set.probability < NEGLIGIBLE * best {
                break;
            }
            total += set.probability;
            let own = evidence.sizes(&set.members);
            let place = |hypothesis: &u16| set.members.iter().position(|member| member == hypothesis);
            let places: Vec<Option<usize>> = of.iter().map(place).collect();
            for (i, a) in places.iter().enumerate().filter_map(|(i, a)| Some((i, (*a)?))) {
                sum.mean[i] += set.probability * own.mean[a];
                for (j, b) in places.iter().enumerate().filter_map(|(j, b)| Some((j, (*b)?))) {
                    let moment = own.covariance[a * set.members.len() + b] + own.mean[a] * own.mean[b];
                    sum.covariance[i * size + j] += set.probability * moment;
                }
            }
        }
        if total > 0.0 {
            sum.mean.iter_mut().chain(&mut sum.covariance).for_each(|value| *value /= total);
        }
        for i in 0..size {
            for j in 0..size {
                sum.covariance[i * size + j] -= sum.mean[i] * sum.mean[j];
            }
        }
        sum
    }
}

/// The visit of sets while it runs.
struct Visit<'e> {
    evidence: &'e Evidence,
    known: HashSet<Vec<u16>>,
    waiting: BinaryHeap<Waiting>,
    /// Sets that were extended.
    extended: HashSet<Vec<u16>>,
    kept: Vec<Waiting>,
    best: f64,
    elimination: Elimination,
}

impl Visit<'_> {
    /// Puts a set into the queue if it matters and is new.
    fn offer(&mut self, members: Vec<u16>, weight: f64) {
        if weight >= self.best - WINDOW && weight.is_finite() && !self.known.contains(&members) {
            self.best = self.best.max(weight);
            self.known.insert(members.clone());
            self.waiting.push(Waiting { weight, members });
        }
    }

    /// Offers a set with each other hypothesis.
    fn extend(&mut self, members: &[u16]) {
        if members.len() == LARGEST_SET || !self.extended.insert(members.to_vec()) {
            return;
        }
        self.elimination.of(self.evidence, members);
        let weight = self.elimination.weight;
        for next in 0..self.evidence.len() as u16 {
            if members.contains(&next) {
                continue;
            }
            let longer = weight + self.elimination.gain(self.evidence, next as usize);
            if longer >= self.best - WINDOW {
                let mut with = members.to_vec();
                with.insert(members.partition_point(|member| *member < next), next);
                self.offer(with, longer);
            }
        }
    }

    /// Offers a set without each of its members, and with each other hypothesis in that one's place: two sets that
    /// explain as much may have nothing between them that does.
    fn exchange(&mut self, members: &[u16]) {
        for gone in members.iter().filter(|_| members.len() > 1) {
            if self.extended.len() >= MOST_VISITED {
                return;
            }
            let rest: Vec<u16> = members.iter().copied().filter(|member| member != gone).collect();
            self.extend(&rest);
            let weight = self.evidence.weight(&rest);
            self.offer(rest, weight);
        }
    }
}

/// Scores and information of all hypotheses after those of a set are accounted for, by Cholesky's elimination of
/// `M + I`.
#[derive(Default)]
struct Elimination {
    score: Vec<f64>,
    own: Vec<f64>,
    rows: Vec<f64>,
    weight: f64,
}

impl Elimination {
    fn of(&mut self, evidence: &Evidence, members: &[u16]) {
        let count = evidence.len();
        self.score.clone_from(&evidence.score);
        self.own.clear();
        self.own.extend((0..count).map(|at| evidence.own(at)));
        self.rows.clear();
        self.weight = 0.0;
        for member in members {
            self.eliminate(evidence, *member as usize);
        }
    }

    fn eliminate(&mut self, evidence: &Evidence, member: usize) {
        let count = evidence.len();
        self.weight += self.gain(evidence, member);
        let root = (1.0 + self.own[member]).sqrt();
        let mut row = evidence.row(member).to_vec();
        for earlier in self.rows.chunks_exact(count) {
            let share = earlier[member];
            row.iter_mut().zip(earlier).for_each(|(value, part)| *value -= share * part);
        }
        for value in &mut row {
            *value /= root;
        }
        let size = self.score[member] / root;
        for ((score, own), part) in self.score.iter_mut().zip(&mut self.own).zip(&row) {
            *score -= part * size;
            *own -= part * part;
        }
        self.rows.extend_from_slice(&row);
    }

    /// What a further hypothesis adds to the logarithm of a set's weight.
    fn gain(&self, evidence: &Evidence, next: usize) -> f64 {
        let spread = 1.0 + self.own[next].max(0.0);
        evidence.log_odds[next] + 0.5 * (self.score[next].powi(2) / spread - spread.ln())
    }
}

impl Evidence {
    /// Logarithm of a set's weight against the empty one.
    pub(crate) fn weight(&self, members: &[u16]) -> f64 {
        let mut elimination = Elimination::default();
        elimination.of(self, members);
        elimination.weight
    }

    /// Mean and covariance of the sizes of a set's members, given that they and no others are true: `(M + I)^-1 u` and
    /// `(M + I)^-1`.
    fn sizes(&self, members: &[u16]) -> Sizes {
        let size = members.len();
        let system = nalgebra::DMatrix::from_fn(size, size, |i, j| {
            self.row(members[i] as usize)[members[j] as usize] + f64::from(u8::from(i == j))
        });
        let score = nalgebra::DVector::from_iterator(size, members.iter().map(|m| self.score[*m as usize]));
        // Positive definite by construction: information is, and the identity is added to it.
        let Some(factor) = system.cholesky() else {
            return Sizes { mean: vec![0.0; size], covariance: vec![0.0; size * size] };
        };
        Sizes {
            mean: factor.solve(&score).as_slice().to_vec(),
            covariance: factor.inverse().as_slice().to_vec(),
        }
    }
}
