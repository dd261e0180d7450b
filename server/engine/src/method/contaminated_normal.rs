//! The contaminated normal law.
//!
//! I. B. Tjoa and L. T. Biegler, Comput. Chem. Eng. 15 (1991) 679-690: a reading is good, or, with probability `p`, has a
//! standard deviation `b` times as large; the loss is minus the logarithm of that density,
//! `-ln((1 - p) exp(-e^2/2) + p/b exp(-e^2/(2 b^2)))`. `p` gives 95 % efficiency on normal readings (from memory).

use super::robust;
use super::{Hypotheses, Level, Method, Tested};
use crate::search::Named;

pub(super) const METHOD: Method = Method {
    name: "contaminated_normal",
    about: "robust estimator with a contaminated normal law (Tjoa and Biegler 1991)",
    tests: Tested::Observations,
    names,
};

const SHARE: f64 = 0.235;
const SPREAD: f64 = 10.0;

pub(super) fn weight(deviation: f64) -> f64 {
    let square = deviation * deviation;
    // Both densities over the good one's, so that far out neither vanishes.
    let wrong = SHARE / SPREAD * (0.5 * square * (1.0 - SPREAD.powi(-2))).min(700.0).exp();
    let good = 1.0 - SHARE;
    (good + wrong / (SPREAD * SPREAD)) / (good + wrong)
}

fn names(hypotheses: &Hypotheses, level: Level) -> Vec<Named> {
    robust::names(hypotheses, level, weight)
}
