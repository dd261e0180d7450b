//! The measurement test with serial elimination.
//!
//! R. S. H. Mah and A. C. Tamhane, "Detection of gross errors in process data", AIChE J. 28 (1982) 828-830: the tag whose
//! adjustment is largest in its own standard deviations is named if that lies beyond the limit. Serially (D. Ripps, Chem.
//! Eng. Prog. Symp. Ser. 61 (55) (1965) 8-13, from memory) it is then deleted and the rest tested again, at the same limit.

use super::{Hypotheses, Level, Method, Tested, TestsLeft};
use crate::search::Named;

pub(super) const METHOD: Method = Method {
    name: "serial_elimination",
    about: "measurement test, the largest deleted and the rest tested again (Mah and Tamhane 1982)",
    tests: Tested::Observations,
    names,
};

fn names(hypotheses: &Hypotheses, level: Level) -> Vec<Named> {
    let mut left = TestsLeft::of(hypotheses);
    let limit = level.limit(left.count());
    let mut named = Vec::new();
    while let Some((at, _)) = left.largest(|_| true).filter(|(_, size)| *size > limit) {
        named.push(left.named(at));
        left.eliminate(at);
    }
    named
}
