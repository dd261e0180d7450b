//! The balance that accounts for what is found.

use super::weighed::Live;
use super::{CompiledPlant, Observations};
use crate::balance::{Balance, Finding, GlobalTest, QuantityBalance, Verdict};
use crate::estimate::{self, Anchor, Situation, Solution};
use crate::kkt::FactorError;
use crate::search::{Named, Sizes, Source};
use crate::verdict;

/// What is found, and the errors that the balance is to account for.
pub(super) struct Found {
    pub(super) named: Vec<Named>,
    pub(super) findings: Vec<Finding>,
    /// Hypotheses whose sizes count.
    pub(super) of: Vec<u16>,
    /// Their sizes, in units of the prior standard deviations.
    pub(super) sizes: Sizes,
}

impl CompiledPlant {
    /// Solves once more with the readings lessened by what the errors are expected to be, so that everything closes, and
    /// puts that balance and the findings into the one without them.
    pub(super) fn account_for(
        &self,
        observations: &Observations,
        before: &Solution,
        anchor: Option<&Anchor>,
        live: &Live,
        found: Found,
        balance: &mut Balance,
    ) -> Result<(), FactorError> {
        let Found { named, findings, of, sizes } = found;
        balance.findings = findings;
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
        balance.global_test_after = Some(self.test_after(observations, &after, live, &named, balance));
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
