//! The principal-component test.
//!
//! H. Tong and C. M. Crowe, "Detection of gross errors in data reconciliation by principal component analysis", AIChE J. 41
//! (1995) 1712-1722 (from memory): the principal components of the adjustments, independent and normal without errors,
//! are tested instead of the adjustments; the reading that contributes most to the one that is furthest out is suspect.
//!
//! Our choices where the paper leaves one: the components are those of the measurement tests, whose covariance is a
//! correlation (that of the adjustments in sigmas is a projection and has no principal directions); what is named is
//! deleted and the rest tested again.

use super::{Hypotheses, Level, Method, Tested, TestsLeft};
use crate::search::Named;

pub(super) const METHOD: Method = Method {
    name: "principal_components",
    about: "principal components of the adjustments and who contributes most (Tong and Crowe 1995)",
    tests: Tested::Observations,
    names,
};

/// Eigenvalues below this share of the largest are rounding.
const EXHAUSTED: f64 = 1e-9;

fn names(hypotheses: &Hypotheses, level: Level) -> Vec<Named> {
    let mut left = TestsLeft::of(hypotheses);
    let mut named = Vec::new();
    while let Some(at) = furthest(&left, level) {
        named.push(left.named(at));
        left.eliminate(at);
    }
    named
}

/// Who contributes most to the component that is furthest out, if it lies beyond the limit for as many as there are.
fn furthest(left: &TestsLeft, level: Level) -> Option<usize> {
    let places: Vec<usize> = (0..left.score.len()).filter(|at| left.statistic(*at).is_some()).collect();
    let count = places.len();
    if count == 0 {
        return None;
    }
    let root = |at: usize| left.information[(places[at], places[at])].sqrt();
    let correlation = nalgebra::DMatrix::from_fn(count, count, |a, b| {
        left.information[(places[a], places[b])] / (root(a) * root(b))
    });
    let test = nalgebra::DVector::from_fn(count, |at, _| left.score[places[at]] / root(at));
    let law = correlation.symmetric_eigen();
    let least = EXHAUSTED * law.eigenvalues.iter().copied().fold(0.0, f64::max);
    let components: Vec<usize> = (0..count).filter(|part| law.eigenvalues[*part] > least).collect();
    let component = |part: usize| law.eigenvectors.column(part).dot(&test) / law.eigenvalues[part].sqrt();
    let furthest = components
        .iter()
        .map(|part| (*part, component(*part)))
        .max_by(|a, b| a.1.abs().total_cmp(&b.1.abs()))
        .filter(|(_, size)| size.abs() > level.limit(components.len()))?;
    // Contributions sum to the component; the largest of its sign made it.
    let contribution = |at: &usize| law.eigenvectors[(*at, furthest.0)] * test[*at] * furthest.1.signum();
    (0..count).max_by(|a, b| contribution(a).total_cmp(&contribution(b))).map(|at| places[at])
}
