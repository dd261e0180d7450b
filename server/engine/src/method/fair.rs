//! The Fair function.
//!
//! R. C. Fair, "On the robust estimation of econometric models", Annals of Economic and Social Measurement 3 (1974)
//! 667-677: `c^2 (|e|/c - ln(1 + |e|/c))`, convex. `c` gives 95 % efficiency on normal readings.

use super::robust;
use super::{Hypotheses, Level, Method, Tested};
use crate::search::Named;

pub(super) const METHOD: Method = Method {
    name: "fair",
    about: "robust estimator with the Fair function (Fair 1974)",
    tests: Tested::Observations,
    names,
};

const TUNING: f64 = 1.3998;

pub(super) fn weight(deviation: f64) -> f64 {
    1.0 / (1.0 + deviation.abs() / TUNING)
}

fn names(hypotheses: &Hypotheses, level: Level) -> Vec<Named> {
    robust::names(hypotheses, level, weight)
}
