//! The iterative measurement test.
//!
//! R. W. Serth and W. A. Heenan, "Gross error detection and data reconciliation in steam-metering systems", AIChE J. 32
//! (1986) 733-742 (from memory), in its modified form: as serial elimination, but a tag is only named if what the others
//! then say of its quantity lies within the quantity's physical bounds, the next largest being tried where it doesn't;
//! and each round is held to the limit for as many tests as are left.

use super::{Hypotheses, Level, Method, Tested, TestsLeft};
use crate::search::Named;

pub(super) const METHOD: Method = Method {
    name: "iterative_measurement_test",
    about: "the same within physical bounds, limits for the tests left (Serth and Heenan 1986)",
    tests: Tested::Observations,
    names,
};

fn names(hypotheses: &Hypotheses, level: Level) -> Vec<Named> {
    let mut left = TestsLeft::of(hypotheses);
    let mut named = Vec::new();
    loop {
        let limit = level.limit(left.count());
        let within = |at: usize| {
            let [least, most] = hypotheses.room[at];
            (least..=most).contains(&left.estimate(at))
        };
        let Some((at, _)) = left.largest(within).filter(|(_, size)| *size > limit) else { break };
        named.push(left.named(at));
        left.eliminate(at);
    }
    named
}
