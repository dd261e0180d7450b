//! The Welsch function.
//!
//! J. E. Dennis and R. E. Welsch, "Techniques for nonlinear least squares and robust regression", Communications in
//! Statistics B 7 (1978) 345-359: `c^2/2 (1 - exp(-(e/c)^2))`, which falls off to no weight. `c` gives 95 % efficiency on
//! normal readings (from memory).

use super::robust;
use super::{Hypotheses, Level, Method, Tested};
use crate::search::Named;

pub(super) const METHOD: Method = Method {
    name: "welsch",
    about: "robust estimator with the Welsch function (Dennis and Welsch 1978)",
    tests: Tested::Observations,
    names,
};

const TUNING: f64 = 2.9846;

pub(super) fn weight(deviation: f64) -> f64 {
    (-(deviation / TUNING).powi(2)).exp()
}

fn names(hypotheses: &Hypotheses, level: Level) -> Vec<Named> {
    robust::names(hypotheses, level, weight)
}
