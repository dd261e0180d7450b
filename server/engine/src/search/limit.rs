//! How strong the strongest hypothesis must be before anything is said to be wrong.
//!
//! Without errors the scores are normal with the information for covariance. Drawn from that law often enough, the
//! strongest hypothesis shows how strong chance makes it; its quantile holds the share of error-free balances in which
//! anything is found, however the hypotheses are correlated.

use rand_distr::{Distribution, StandardNormal};
use rand_pcg::Pcg64Mcg;
use statrs::function::erf::erfc;

use super::evidence::Evidence;

/// Draws of a simulation: the share beyond the 95 % point then has a standard error of 0.15 points.
const DRAWS: usize = 20_000;
/// Seed of a simulation.
const SEED: u128 = 20_261_201;
/// What is left of a variance below this is rounding.
const EXHAUSTED: f64 = 1e-9;

/// Strengths that chance gives, ascending.
#[derive(Clone, Debug)]
pub(crate) struct Chance {
    strongest: Vec<f64>,
}

impl Chance {
    /// Simulates balances without errors.
    pub(crate) fn simulate(evidence: &Evidence) -> Self {
        let factor = factor(evidence);
        let rank = factor.first().map_or(0, Vec::len);
        // The same draws on every machine.
        let mut random = Pcg64Mcg::new(SEED);
        let mut normal: Vec<f64> = vec![0.0; rank];
        let mut score = vec![0.0; evidence.len()];
        let mut strongest: Vec<f64> = (0..DRAWS)
            .map(|_| {
                normal.fill_with(|| StandardNormal.sample(&mut random));
                for (score, row) in score.iter_mut().zip(&factor) {
                    *score = row.iter().zip(&normal).map(|(a, b)| a * b).sum();
                }
                evidence.strongest(&score)
            })
            .collect();
        strongest.sort_by(f64::total_cmp);
        Self { strongest }
    }

    /// The strength that is exceeded with this probability.
    pub(crate) fn limit(&self, rate: f64) -> f64 {
        let share = 1.0 - rate.clamp(0.0, 1.0);
        let below = |at: &usize| (*at + 1) as f64 >= share * self.strongest.len() as f64;
        let at = (0..self.strongest.len()).find(below);
        at.filter(|_| share > 0.0).map_or(f64::NEG_INFINITY, |at| self.strongest[at])
    }
}

/// A strength that is exceeded with at most this probability, without a simulation: each hypothesis is held to a share of it
/// as if all were independent, which is conservative where they are correlated (Bonferroni's inequality).
///
/// Alone, a hypothesis passes the strength `L` where its squared score over its information, chi-square with one degree of
/// freedom without errors, exceeds `(2 (L - log odds) + log(1 + M)) (1 + M) / M`.
pub(crate) fn bound(evidence: &Evidence, rate: f64) -> f64 {
    let beyond = |limit: f64| -> f64 {
        let one = |at: usize| {
            let own = evidence.own(at);
            let square = (2.0 * (limit - evidence.log_odds[at]) + own.ln_1p()) * (1.0 + own) / own;
            if square > 0.0 { erfc((0.5 * square).sqrt()) } else { 1.0 }
        };
        (0..evidence.len()).map(one).sum()
    };
    let (mut low, mut high) = (-50.0, 200.0);
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if beyond(middle) > rate { low = middle } else { high = middle }
    }
    high
}

/// `L` with `L L' = M`, one row a hypothesis, by Cholesky's elimination with the largest pivot first: `M` has the rank
/// of the degrees of freedom only.
fn factor(evidence: &Evidence) -> Vec<Vec<f64>> {
    let count = evidence.len();
    let mut rest: Vec<f64> = (0..count).map(|at| evidence.own(at)).collect();
    let first: Vec<f64> = rest.clone();
    let mut columns: Vec<Vec<f64>> = Vec::new();
    while let Some(pivot) = (0..count)
        .filter(|at| rest[*at] > EXHAUSTED * first[*at])
        .max_by(|a, b| rest[*a].total_cmp(&rest[*b]))
    {
        let root = rest[pivot].sqrt();
        let mut column = evidence.row(pivot).to_vec();
        for earlier in &columns {
            let share = earlier[pivot];
            column.iter_mut().zip(earlier).for_each(|(value, part)| *value -= share * part);
        }
        for value in &mut column {
            *value /= root;
        }
        rest.iter_mut().zip(&column).for_each(|(rest, part)| *rest -= part * part);
        rest[pivot] = 0.0;
        columns.push(column);
        if columns.len() == count {
            break;
        }
    }
    (0..count).map(|row| columns.iter().map(|column| column[row]).collect()).collect()
}
