//! Generalised likelihood ratios with serial compensation.
//!
//! S. Narasimhan and R. S. H. Mah, "Generalized likelihood ratio method for gross error identification", AIChE J. 33 (1987)
//! 1514-1521: of all hypotheses, biases and leaks alike, the one with the largest ratio `u^2 / M` is named if that lies
//! beyond the limit squared. The readings are then compensated by its most likely size and all are tested again as if
//! that size were known; one that was compensated already may need more of it, now that others are.

use super::{Hypotheses, Level, Method, Tested, TestsLeft};
use crate::search::Named;

pub(super) const METHOD: Method = Method {
    name: "likelihood_ratio",
    about: "generalised likelihood ratio of biases and losses, serial compensation (Narasimhan and Mah 1987)",
    tests: Tested::All,
    names,
};

/// Compensations at most; each lowers the sum of squares, so that they end by themselves but where hypotheses are nearly
/// one.
const ROUNDS: usize = 1000;

fn names(hypotheses: &Hypotheses, level: Level) -> Vec<Named> {
    let mut left = TestsLeft::of(hypotheses);
    let limit = level.limit(left.count());
    let mut named: Vec<Named> = Vec::new();
    for _ in 0..ROUNDS {
        let Some((at, _)) = left.largest(|_| true).filter(|(_, size)| *size > limit) else { break };
        if !named.iter().any(|named| named.group().contains(&(at as u16))) {
            named.push(left.named(at));
        }
        left.compensate(at);
    }
    named
}
