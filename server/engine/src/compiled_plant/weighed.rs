//! What one solution says of every hypothesis.

use super::{CompiledPlant, Observations};
use crate::balance::Evidence as Told;
use crate::estimate::{Direction, Response, Solution};
use crate::kkt::FactorError;
use crate::search::{Candidate, Evidence, Source};

/// Hypotheses with what one solution says of them.
pub(super) struct Live {
    /// Which candidate each is.
    pub(super) candidate: Vec<u32>,
    /// Their prior standard deviations, SI.
    pub(super) size: Vec<f64>,
    pub(super) response: Vec<Response>,
    pub(super) evidence: Evidence,
}

impl CompiledPlant {
    /// Scores and information of those of some hypotheses that these readings can speak of.
    pub(super) fn live(
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
    pub(super) fn direction(
        &self,
        observations: &Observations,
        x: &[f64],
        source: Source,
    ) -> Option<(Direction, f64)> {
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
    pub(super) fn place(&self, observations: &Observations, source: Source) -> Option<usize> {
        match source {
            Source::Exact(_) => None,
            Source::Tag(tag) => observations.places[tag],
            Source::Given(given) => Some(observations.first_given + given),
            Source::Shared(group) => Some(observations.first_given + self.soft_givens.len() + group),
        }
    }
}

impl Live {
    /// Scores and information in SI.
    pub(super) fn told(&self) -> Vec<Told> {
        let one = |(at, number): (usize, &u32)| Told {
            hypothesis: *number as usize,
            score: self.response[at].score,
            information: self.response[at].information(&self.response[at], true),
        };
        self.candidate.iter().enumerate().map(one).collect()
    }

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
}
