//! Hampel's redescending function.
//!
//! F. R. Hampel, "The influence curve and its role in robust estimation", J. Amer. Statist. Assoc. 69 (1974) 383-393, from
//! memory, as are the constants: quadratic up to `a`, linear up to `b`, falling off until `c`, beyond which a reading has
//! no weight.

use super::robust;
use super::{Hypotheses, Level, Method, Tested};
use crate::search::Named;

pub(super) const METHOD: Method = Method {
    name: "hampel",
    about: "robust estimator with Hampel's redescending function (Hampel 1974)",
    tests: Tested::Observations,
    names,
};

const A: f64 = 1.35;
const B: f64 = 2.70;
const C: f64 = 5.40;

pub(super) fn weight(deviation: f64) -> f64 {
    let size = deviation.abs();
    let influence = if size <= B { size.min(A) } else { A * ((C - size) / (C - B)).max(0.0) };
    if size <= A { 1.0 } else { influence / size }
}

fn names(hypotheses: &Hypotheses, level: Level) -> Vec<Named> {
    robust::names(hypotheses, level, weight)
}
