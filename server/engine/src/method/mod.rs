//! Published methods of naming what is wrong, to compare the search with.
//!
//! Each looks at one linearised balance: the score `u` and information `M` of every hypothesis. For tags whose sizes are
//! measured in their sigmas `u = (y - x) / sigma` are the standardised adjustments and `M` is their covariance; for a loss
//! they are the multiplier of the machine's balance and its variance. `u / sqrt(M)` is the measurement test of a tag, the
//! maximum-power test of a balance, and the square root of either's generalised likelihood ratio.
//!
//! One file a method; [`METHODS`] lists them. They give no probabilities: each names whatever lies beyond a limit.

mod contaminated_normal;
mod fair;
mod hampel;
mod iterative_measurement_test;
mod likelihood_ratio;
mod nodal_test;
mod principal_components;
mod robust;
mod serial_elimination;
#[cfg(test)]
mod tests;
mod tests_left;
mod welsch;

pub(crate) use tests_left::{Hypotheses, TestsLeft};

use crate::search::Named;
use crate::verdict::sidak;

/// A published method of naming what is wrong.
pub struct Method {
    /// What it is called at the command line.
    pub name: &'static str,
    /// What it does, in half a sentence, and who published it.
    pub about: &'static str,
    /// What it tests.
    pub(crate) tests: Tested,
    /// What it names among these, of which there is at least one, beyond this limit.
    pub(crate) names: fn(&Hypotheses, Level) -> Vec<Named>,
}

/// What a method tests.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Tested {
    /// Tags, soft givens and shared errors.
    Observations,
    /// Losses of mass and heat.
    Losses,
    /// Every hypothesis.
    All,
}

/// All methods.
pub const METHODS: &[Method] = &[
    serial_elimination::METHOD,
    iterative_measurement_test::METHOD,
    nodal_test::METHOD,
    likelihood_ratio::METHOD,
    principal_components::METHOD,
    fair::METHOD,
    hampel::METHOD,
    welsch::METHOD,
    contaminated_normal::METHOD,
];

/// How strict a method is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Level {
    /// Šidák's limit: at most this share of error-free balances has a finding, were the tests independent.
    FalseAlarmRate(f64),
    /// The limit of each test itself, in standard deviations of its statistic (for a robust estimator in sigmas of the
    /// reading).
    Limit(f64),
}

impl Level {
    /// The limit of each of so many tests.
    pub(crate) fn limit(self, tests: usize) -> f64 {
        match self {
            Self::FalseAlarmRate(rate) => sidak(tests, rate),
            Self::Limit(limit) => limit,
        }
    }
}
