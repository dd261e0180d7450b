//! What is told of a posterior: findings, each with the hypotheses that can't be told from it.

use super::evidence::Evidence;
use super::posterior::Posterior;

/// A hypothesis that is named, with its alternatives, most probable first.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Named {
    /// The hypothesis.
    pub(crate) hypothesis: u16,
    /// Those that can't be told from it.
    pub(crate) alternatives: Vec<u16>,
}

impl Named {
    /// The hypothesis and its alternatives.
    pub(crate) fn group(&self) -> Vec<u16> {
        std::iter::once(self.hypothesis).chain(self.alternatives.iter().copied()).collect()
    }
}

/// Something is named if it or an alternative is more probable than not.
const NAMED: f64 = 0.5;
/// Test directions that correlate this well are one direction.
const SAME_DIRECTION: f64 = 0.9999;
/// Posterior odds within this are no reason to prefer one.
const ODDS: f64 = 10.0;
/// Hypotheses whose test directions correlate less than this speak of different things.
const RELATED: f64 = 0.3;
/// Two hypotheses explain the same if they are true together in less than this share of the rarer's probability.
const TOGETHER: f64 = 0.5;

/// Names hypotheses until what is left is more probably not there. The first is named in any case: that something is
/// wrong has been decided before.
pub(crate) fn name(evidence: &Evidence, posterior: &Posterior) -> Vec<Named> {
    let mut left: Vec<u16> = (0..evidence.len() as u16).collect();
    left.sort_by(|a, b| probability(posterior, *b).total_cmp(&probability(posterior, *a)));
    let mut named: Vec<Named> = Vec::new();
    while !left.is_empty() {
        let hypothesis = left.remove(0);
        // A less probable hypothesis with more alternatives may still pass together with them, but not any.
        if !named.is_empty() && probability(posterior, hypothesis) < NAMED / ODDS {
            break;
        }
        let alternatives: Vec<u16> =
            left.iter().copied().filter(|other| alike(evidence, posterior, hypothesis, *other)).collect();
        let next = Named { hypothesis, alternatives };
        if !named.is_empty() && posterior.any(&next.group()) < NAMED {
            continue;
        }
        left.retain(|other| !next.alternatives.contains(other));
        named.push(next);
    }
    named
}

fn probability(posterior: &Posterior, hypothesis: u16) -> f64 {
    posterior.inclusion[hypothesis as usize]
}

/// Whether a hypothesis explains what another does about as well.
fn alike(evidence: &Evidence, posterior: &Posterior, one: u16, other: u16) -> bool {
    let correlation = evidence.correlation(one as usize, other as usize).abs();
    let (p, q) = (probability(posterior, one), probability(posterior, other));
    let as_well = q * ODDS >= p && posterior.both(one, other) < TOGETHER * q;
    correlation >= SAME_DIRECTION || correlation >= RELATED && as_well
}
